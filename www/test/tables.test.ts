import assert from "node:assert/strict";
import test from "node:test";
import { figureRows, poleRows } from "../src/figures.ts";
import { shownSigns } from "../src/halves.ts";
import { asymptoteWords, grouped, landmarkWords, notable, realAxisWords } from "../src/landmarks.ts";
import type { ClosedLoop, Landmark } from "../src/types.ts";
import { edge, pole, record, requirement, stability } from "./record.ts";

const landmark = (parts: Partial<Landmark>): Landmark => ({
  kind: "breakaway",
  s: { re: -2, im: 0 },
  equivalent: null,
  knob: 3,
  multiplicity: 2,
  angle: null,
  sign: "positive",
  ...parts,
});
const loop = (poles: ClosedLoop["poles"]): ClosedLoop => ({ knob: 1, poles, unstablePoles: 0, axisPoles: 0, name: "underdamped" });

test("Branches of simple real poles and zeros get no row, others do", () => {
  const rows = notable(
    [
      landmark({ kind: "departure", s: { re: -1, im: 0 }, multiplicity: 1, angle: 180, knob: 0 }),
      landmark({ kind: "departure", s: { re: -1, im: 2 }, multiplicity: 1, angle: 104, knob: 0 }),
      landmark({ kind: "arrival", s: { re: -1, im: 0 }, multiplicity: 2, angle: 90, knob: null }),
      landmark({ sign: "negative", knob: -4 }),
      landmark({ knob: 7 }),
    ],
    ["positive"],
  );
  assert.deepEqual(
    rows.map(({ kind, knob }) => [kind, knob]),
    [
      ["departure", 0],
      ["breakaway", 7],
      ["arrival", null],
    ],
  );
});

test("Landmarks are told in the trade's words", () => {
  const words = (parts: Partial<Landmark>): string[] => grouped([landmark(parts)]).map((row) => landmarkWords(row, "s"));
  assert.deepEqual(words({}), ["leaves the real axis"]);
  assert.deepEqual(words({ multiplicity: 3 }), ["leaves the real axis (3 poles)"]);
  assert.deepEqual(words({ s: { re: -2, im: 1 } }), ["branches meet"]);
  assert.deepEqual(words({ kind: "departure", angle: 104.04 }), ["leaves the pole at 104°"]);
});

test("Branches that leave one repeated pole share a row", () => {
  const leaving = (angle: number, re: number): Landmark => landmark({ kind: "departure", angle, s: { re, im: 0 }, knob: 0 });
  const rows = grouped([leaving(90, -20), leaving(-90, -20), leaving(60, -3), landmark({})]);
  assert.deepEqual(rows.map((row) => landmarkWords(row, "s")), ["leaves the pole at ±90°", "leaves the pole at 60°", "leaves the real axis"]);
});

test("Asymptotes and the parts of the real axis are told in one line", () => {
  const found = record([], {
    asymptotes: {
      positive: { count: 3, centroid: -5.5, angles: [-60, 60, 180] },
      negative: { count: 0, centroid: null, angles: [] },
    },
    realAxis: { positive: [[null, -9], [-4, 3]], negative: [] },
  });
  assert.equal(asymptoteWords(found, "positive"), "3 branches to infinity from −5.5 at −60°, 60° and 180°");
  assert.equal(asymptoteWords(found, "negative"), null);
  assert.equal(realAxisWords(found, "positive"), "−∞ to −9 and −4 to 3");
  assert.equal(realAxisWords(found, "negative"), null);
});

test("Poles are listed slowest first, a pair once, with its figures", () => {
  const rows = poleRows(
    loop([
      pole(-200, 0, { dampingRatio: 1, naturalFrequency: 200 }),
      pole(-3, 4, { dampingRatio: 0.6, naturalFrequency: 5 }),
      pole(-3, -4, { dampingRatio: 0.6, naturalFrequency: 5 }),
    ]),
  );
  assert.deepEqual(rows, [
    { s: "−3 ± 4\u202fj", ratio: "0.6", frequency: "5", time: "0.333" },
    { s: "−200", ratio: "1", frequency: "200", time: "0.005" },
  ]);
});

test("A pole on the axis does not decay, one right of it grows, one at the origin has no damping ratio", () => {
  const row = (...parts: Parameters<typeof pole>): ReturnType<typeof poleRows>[number] | undefined => poleRows(loop([pole(...parts)]))[0];
  const onAxis = row(0, 5, { radius: 1e-9, dampingRatio: 0, naturalFrequency: 5 });
  assert.deepEqual([onAxis?.ratio, onAxis?.time], ["0", "∞"]);
  assert.equal(row(2, 5, { dampingRatio: -0.371, naturalFrequency: 5.385 })?.time, "grows");
  const origin = row(0, 0, { dampingRatio: null, naturalFrequency: 0 });
  assert.deepEqual([origin?.s, origin?.ratio, origin?.frequency], ["0", "–", "0"]);
});

test("The half that is shown is the one of the setting, else the one with stable ranges", () => {
  const negative = record(stability([edge(-5), edge(-1)], [2, 0, 1]));
  assert.deepEqual(shownSigns(negative, "automatic"), ["negative"]);
  assert.deepEqual(shownSigns({ ...negative, closedLoop: { ...loop([]), knob: 3 } }, "automatic"), ["positive"]);
  assert.deepEqual(shownSigns(record(stability([edge(-1), edge(5)], [1, 0, 2])), "automatic"), ["positive"]);
  assert.deepEqual(shownSigns(record(stability([], [1])), "automatic"), ["positive"]);
  assert.deepEqual(shownSigns(negative, "both"), ["positive", "negative"]);
});

test("Figures with a limit come first, with their verdict; others follow without", () => {
  const closedLoop = { ...loop([pole(-3, 4, { dampingRatio: 0.6, naturalFrequency: 5 })]), name: "underdamped" as const };
  const rows = figureRows(record([], { closedLoop, figures: [{ kind: "damping-ratio", value: 0.6 }], requirements: [requirement({ kind: "phase-margin", limit: 45, figure: 41.26, unit: "°", met: false })] }));
  assert.deepEqual(rows[0], { name: "Phase margin", here: "41.3°", limit: "at least 45°", met: false });
  assert.deepEqual(rows.find(({ name }) => name === "Damping ratio"), { name: "Damping ratio", here: "0.6", limit: "", met: null });
});
