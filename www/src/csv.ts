// Curves as tables for other programs: CSV as in RFC 4180, numbers with all their digits and a decimal point.
//
// No text of the user goes into a table, so that none can be taken for a formula by a program that opens it.
import type { Branch } from "./engine.ts";
import { toSetting } from "./scale.ts";
import type { Record as Findings } from "./types.ts";

type Cell = string | number;

/** Rows as text: fields parted by commas, records by CR LF; a field with a comma, quote or line break in quotes. */
export function csvText(rows: readonly (readonly Cell[])[]): string {
  return rows.map((row) => `${row.map(field).join(",")}\r\n`).join("");
}

/** The branches of the locus, vertex by vertex. */
export function locusTable(record: Findings, branches: readonly Branch[]): Cell[][] {
  const rows = branches.flatMap(({ sign, points }, index) =>
    Array.from({ length: Math.floor(points.length / 3) }, (_, vertex): Cell[] => {
      const [re = 0, im = 0, knob = 0] = points.subarray(3 * vertex);
      return [index + 1, sign, re, im, knob, toSetting(record.scale, knob)];
    }),
  );
  return [["branch", "sign of the knob", "real part in 1/s", "imaginary part in 1/s", "knob", "setting"], ...rows];
}

/** The answers over time: to a step at the setting and at the permitted ends, the controller's output, to a load. */
export function answersTable({ step, load, closedLoop }: Findings): Cell[][] {
  const curves = [
    { name: "output on a step", knob: closedLoop?.knob, curve: step?.curve },
    ...(step?.atEdges ?? []).map(({ knob, curve }) => ({ name: "output on a step at a permitted end", knob, curve })),
    { name: "controller output on a step", knob: closedLoop?.knob, curve: step?.controller },
    { name: "output on a load", knob: closedLoop?.knob, curve: load?.curve },
  ];
  const rows = curves.flatMap(({ name, knob = NaN, curve }) =>
    (curve?.time ?? []).map((time, index): Cell[] => [name, knob, time, curve?.value[index] ?? NaN]),
  );
  return [["curve", "knob", "time in s", "value"], ...rows];
}

/** The open loop over frequency. */
export function frequencyTable({ margins }: Findings): Cell[][] {
  const { omega, magnitude, phase } = margins?.response ?? { omega: [], magnitude: [], phase: [] };
  const rows = omega.map((at, index): Cell[] => [at, magnitude[index] ?? NaN, phase[index] ?? NaN]);
  return [["frequency in rad/s", "magnitude in dB", "phase in degrees"], ...rows];
}

function field(cell: Cell): string {
  const text = typeof cell === "number" ? (Number.isFinite(cell) ? String(cell) : "") : cell;
  return /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}
