// The closed loop at the setting, in figures: those with a limit first, each beside it, then the others, then the poles.
import { settingText, verdictWords } from "./answer.ts";
import { byId, html } from "./dom.ts";
import { capital, figure, knownDigits, pairText, withUnit } from "./format.ts";
import { limitWords, quantity } from "./reason.ts";
import { figureOf, KINDS } from "./requirements.ts";
import { isPlain, settingName, settingUnit } from "./scale.ts";
import type { Session } from "./session.ts";
import type { ClosedLoop, ClosedPole, Record as Findings } from "./types.ts";

/** A row of the table of poles, as text; units stand in the head of the table. */
export interface PoleRow {
  readonly s: string;
  readonly ratio: string;
  readonly frequency: string;
  readonly time: string;
}

/** A row of the table of figures. */
export interface FigureRow {
  readonly name: string;
  readonly here: string;
  /** "at least 0.5"; empty where nothing is required. */
  readonly limit: string;
  /** Null where nothing is required, or nothing is known. */
  readonly met: boolean | null;
}

/** Digits of a figure at the setting, and of those drawn from a pole. */
const DIGITS = 3;

/** The figures at the setting: first those with a limit, in the project's order. */
export function figureRows(record: Findings): FigureRow[] {
  const here = (value: number | null, unit: string): string => (value === null ? "–" : quantity(value, unit, DIGITS));
  const required = record.requirements.map((requirement): FigureRow => {
    const { kind, figure: value, met, unit } = requirement;
    const name = KINDS.find((entry) => entry.kind === kind)?.name ?? kind;
    return { name, here: here(value, unit), limit: limitWords(requirement), met };
  });
  const others = KINDS.filter(({ kind }) => !record.requirements.some((requirement) => requirement.kind === kind)).flatMap(
    ({ kind, name, unit }): FigureRow[] => {
      // The same figure stands behind both limits of the natural frequency.
      if (kind === "natural-frequency-maximum") return [];
      const value = figureOf(kind, record);
      if (value === null) return [];
      return [{ name: kind === "natural-frequency-minimum" ? "Slowest natural frequency" : name, here: here(value, unit), limit: "", met: null }];
    },
  );
  const knob = record.closedLoop && !isPlain(record.scale) ? [knobRow(record, record.closedLoop.knob)] : [];
  const final = record.step ? [{ name: "Final value of a unit step", here: figure(record.step.finalValue, DIGITS), limit: "", met: null }] : [];
  return [...required, ...others, ...final, ...knob];
}

function knobRow({ project }: Findings, knob: number): FigureRow {
  const unit = project.quantities.find((row) => row.symbol === project.knob)?.unit ?? "";
  return { name: `Knob ${project.knob}`, here: withUnit(figure(knob), unit), limit: "", met: null };
}

/** The poles of the closed loop, slowest first, each pair once. */
export function poleRows(loop: ClosedLoop): PoleRow[] {
  return loop.poles
    .filter((root) => root.im >= 0)
    .sort((left, right) => right.re - left.re)
    .map(poleRow);
}

function poleRow(pole: ClosedPole): PoleRow {
  const { re, im, radius, multiplicity, dampingRatio, naturalFrequency } = pole;
  const digits = Math.min(DIGITS, knownDigits(naturalFrequency, radius));
  // A sampled pole dies away as the one of the s-plane does that it comes from.
  const { re: rate, radius: blur } = pole.equivalent ?? pole;
  const onAxis = Math.abs(rate) <= blur;
  const many = multiplicity > 1 ? ` (${multiplicity} times)` : "";
  return {
    s: pairText(re, im, radius) + many,
    ratio: dampingRatio === null ? "–" : figure(dampingRatio, digits),
    frequency: figure(naturalFrequency, digits),
    time: onAxis ? "∞" : rate > 0 ? "grows" : figure(-1 / rate, Math.min(DIGITS, knownDigits(rate, blur))),
  };
}

/** Keeps the figures in step with the session. */
export function figuresTable(session: Session): void {
  const heading = byId("figures-heading", HTMLElement);
  const verdict = byId("figures-verdict", HTMLElement);
  const figures = byId("figures-table", HTMLTableElement);
  const figureBody = byId("figures", HTMLTableSectionElement);
  const poles = byId("poles-table", HTMLTableElement);
  const poleBody = byId("poles", HTMLTableSectionElement);
  const poleUnit = byId("poles-unit", HTMLElement);
  session.onChange(({ good }) => {
    if (!good) return;
    const { record } = good;
    const loop = record.closedLoop;
    figures.hidden = loop === null;
    poles.hidden = loop === null;
    poleUnit.textContent = record.timing.plane === "z" ? "pole in z" : "pole, 1/s";
    heading.textContent = loop ? `At ${settingName(record)} = ${withUnit(settingText(record), settingUnit(record))}` : "At the setting";
    verdict.textContent = loop ? `${capital(verdictWords(loop, record.timing.plane))}.` : "No setting is chosen yet.";
    figureBody.replaceChildren(...(loop ? figureRows(record) : []).map(figureRow));
    poleBody.replaceChildren(
      ...(loop ? poleRows(loop) : []).map(({ s, ratio, frequency, time }) =>
        html("tr", {}, ...[s, ratio, frequency, time].map((text) => html("td", { class: "number" }, text))),
      ),
    );
  });
}

function figureRow({ name, here, limit, met }: FigureRow): HTMLTableRowElement {
  const mark = met === null ? null : html("span", { class: met ? "pass" : "fail" }, html("span", { "aria-hidden": "true" }, met ? "✓" : "✗"), met ? " met" : " not met");
  return html(
    "tr",
    {},
    html("th", { scope: "row" }, name),
    html("td", { class: "number" }, here),
    html("td", { class: "number" }, limit),
    html("td", { class: "number" }, mark),
  );
}

