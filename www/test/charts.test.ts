import assert from "node:assert/strict";
import test from "node:test";
import { chartOf, readingAt, tableOf, valueAt, type Chart } from "../src/charts.ts";
import { limitsOf } from "../src/regions.ts";
import type { Record as Findings, RequirementKind } from "../src/types.ts";
import { record, requirement } from "./record.ts";

const curve = { time: [0, 1, 2, 4], value: [0, 1.2, 1, 1] };
const step: NonNullable<Findings["step"]> = {
  curve,
  atEdges: [{ knob: 30, curve: { time: [0, 4], value: [0, 0.9] } }],
  controller: null,
  finalValue: 1,
  overshoot: 20,
  undershoot: 0,
  riseTime: 0.7,
  settlingTime2: 2,
  settlingTime5: 1.8,
  peakTime: 1,
  controllerPeak: null,
};
const closedLoop = { knob: 37, poles: [], unstablePoles: 0, axisPoles: 0, name: "underdamped" as const };
const chart = (name: Parameters<typeof chartOf>[0], parts: Partial<Findings> = {}): Chart => {
  const found = chartOf(name, record([], { closedLoop, step, ...parts }));
  assert.ok(typeof found !== "string", String(found));
  return found;
};
const limited = (kind: RequirementKind, limit: number): Chart => chart("step", { requirements: [requirement({ kind, limit, atLeast: false })] });

test("A curve is read between its points, and nowhere else", () => {
  assert.equal(valueAt(curve.time, curve.value, 0.5), 0.6);
  assert.equal(valueAt(curve.time, curve.value, 0), 0);
  assert.ok(Number.isNaN(valueAt(curve.time, curve.value, 5)) && Number.isNaN(valueAt(curve.time, curve.value, -1)));
});

test("The answer to a step stands before those at the ends of the permitted range", () => {
  const [pane] = chart("step").panes;
  assert.deepEqual(pane?.series.map(({ name, look }) => [name, look]), [
    ["K 30\u202fV", "edge"],
    ["output", "main"],
  ]);
  assert.deepEqual(readingAt(chart("step"), 2), ["time 2\u202fs", "at K 30\u202fV: 0.45", "output: 1"]);
});

test("Requirements on the answer forbid what lies beyond them", () => {
  assert.deepEqual(limited("overshoot", 15).panes[0]?.areas.map(({ x, y }) => [x, y]), [[[0, Infinity], [1.15, Infinity]]]);
  const settled = limited("settling-time-2", 2).panes[0]?.areas.map(({ x, y }) => [x, y]);
  assert.deepEqual(settled, [
    [
      [2, Infinity],
      [1.02, Infinity],
    ],
    [
      [2, Infinity],
      [-Infinity, 0.98],
    ],
  ]);
  assert.equal(limited("peak-time", 1.5).panes[0]?.marks.at(-1)?.from[0], 1.5);
  // 10 % is reached at 1/12 s, so 90 % must be by 0.5 s later.
  const rise = limited("rise-time", 0.5).panes[0]?.areas[0];
  assert.ok(rise && Math.abs(rise.x[0] - (0.1 / 1.2 + 0.5)) < 1e-12);
});

test("A falling answer is limited on its own side", () => {
  const falling = { ...step, finalValue: -1, curve: { time: [0, 1, 2], value: [0, -1.2, -1] }, atEdges: [] };
  const found = chart("step", { step: falling, requirements: [requirement({ kind: "overshoot", limit: 10, atLeast: false })] });
  assert.deepEqual(found.panes[0]?.areas[0]?.y, [-Infinity, -1.1]);
});

test("Without a picture the reason is told", () => {
  assert.match(String(chartOf("step", record([]))), /No setting is chosen/);
  assert.match(String(chartOf("load", record([], { closedLoop }))), /not stable/);
  assert.match(String(chartOf("controller", record([], { closedLoop, step }))), /more zeros than poles/);
});

test("Crossovers and margins are marked where they are", () => {
  const margins: NonNullable<Findings["margins"]> = {
    gainUp: 10,
    gainDown: null,
    phase: 45,
    delay: 0.1,
    peakSensitivity: 1.5,
    peakFrequency: 12,
    bandwidth: 9,
    gainCrossings: [{ omega: 10, phaseMargin: 45, delayMargin: 0.1 }],
    phaseCrossings: [{ omega: 100, factor: 10 }],
    response: { omega: [1, 10, 100], magnitude: [20, 0, -20], phase: [-90, -135, -180] },
  };
  const [magnitude, phase] = chart("open loop", { margins }).panes;
  assert.deepEqual(magnitude?.dots.map(({ x, y }) => [x, y]), [
    [10, 0],
    [100, -20],
  ]);
  assert.deepEqual(phase?.marks.find(({ look }) => look === "margin")?.from, [10, -180]);
  assert.deepEqual(phase?.dots.map(({ x, y }) => [x, y]), [
    [10, -135],
    [100, -180],
  ]);
});

test("Every picture has a table with the same curves", () => {
  const { head, rows } = tableOf(chart("step"));
  assert.deepEqual(head.slice(0, 1), ["time, s"]);
  assert.ok(rows.every((row) => row.length === head.length));
  assert.equal(rows[0]?.at(-1), "0");
  assert.equal(rows.at(-1)?.at(-1), "1");
});

test("Requirements on poles are drawn into the s-plane, others are not", () => {
  const kinds = ["damping-ratio", "decay-rate", "natural-frequency-minimum", "natural-frequency-maximum", "overshoot"] as const;
  const found = limitsOf(record([], { requirements: kinds.map((kind) => requirement({ kind, limit: 0.5 })) }));
  assert.deepEqual(found.map(({ shape }) => shape), ["ray", "line", "closed", "closed"]);
});

test("In the z-plane the same requirements are a spiral, a circle and ovals", () => {
  const kinds = ["damping-ratio", "decay-rate", "natural-frequency-minimum"] as const;
  const sampling = { period: 0.1, delay: 0, method: null, byPeriod: [], longestPeriod: null };
  const timing = { plane: "z", deadTime: 0, deadTimePerKnob: 0, sampling } as const;
  const [spiral, circle, oval] = limitsOf(record([], { timing, requirements: kinds.map((kind) => requirement({ kind, limit: 0.6 })) }));
  assert.ok(spiral?.shape === "closed" && circle?.shape === "closed" && oval?.shape === "closed");
  // A pole of damping ratio 0.6 and ω = 10 rad/s: z = e^((−0.6 ± 0.8 j)·10·0.1) has the angle 0.8 and the radius e^−0.6.
  const radius = (angle: number): number => Math.exp((-0.6 / 0.8) * Math.abs(angle));
  for (const [re, im] of spiral.points) assert.ok(Math.abs(Math.hypot(re, im) - radius(Math.atan2(im, re))) < 1e-12);
  for (const [re, im] of circle.points) assert.ok(Math.abs(Math.hypot(re, im) - Math.exp(-0.06)) < 1e-12);
  for (const [re, im] of oval.points) assert.ok(Math.abs(Math.hypot(Math.log(Math.hypot(re, im)), Math.atan2(im, re)) - 0.06) < 1e-12);
  assert.deepEqual([spiral.forbids, circle.forbids, oval.forbids], ["outside", "outside", "inside"]);
});
