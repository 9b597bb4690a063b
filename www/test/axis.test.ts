import assert from "node:assert/strict";
import test from "node:test";
import { automatic, axisFor, onAxis, positionOn, settingAt, stepFrom, tickText, ticksOn, type Subject } from "../src/axis.ts";
import { toNumber, typedText } from "../src/decimal.ts";

const subject = (parts: Partial<Subject>): Subject => ({ stability: [], character: [], stable: [], setting: null, ...parts });
const roller = subject({ stability: [3.857, 236.8], character: [3.857, 18.6, 236.8], stable: [[3.857, 236.8]], setting: 37 });

test("A loop whose stable range is positive gets a logarithmic axis with room on both sides", () => {
  const axis = axisFor(roller, "automatic");
  assert.deepEqual(axis, { scale: "log", domain: [1, 1000], linearWithin: 1 });
});

test("Stable ranges below zero get the mirrored axis", () => {
  const axis = axisFor(subject({ stability: [-236.8, -3.857], stable: [[-236.8, -3.857]] }), "automatic");
  assert.deepEqual(axis.domain, [-1000, -1]);
  assert.equal(axis.scale, "log");
});

test("A range through zero gets a linear axis when its ends are alike, logarithms on both sides when not", () => {
  assert.equal(automatic(subject({ stability: [-1, 12.6], stable: [[-1, 12.6]] })), "linear");
  assert.equal(automatic(subject({ stability: [-0.01, 12.6], stable: [[-0.01, 12.6]] })), "both");
});

test("The setting is on the automatic axis, wherever it is but at zero", () => {
  for (const setting of [-1e6, -3, 1e-9, 37, 1e9]) {
    const axis = axisFor({ ...roller, setting }, "automatic");
    assert.ok(onAxis(axis, setting), `${setting} on ${axis.domain.join(" to ")}`);
  }
});

test("The axis ends with the controller where edges lie far beyond it, but not before the setting", () => {
  const band = subject({ stability: [72.7], character: [72.7, 5950], stable: [[72.7, Infinity]], setting: 450 });
  assert.deepEqual(axisFor(band, "automatic").domain, [20, 20000]);
  assert.deepEqual(axisFor({ ...band, limits: [10, 1000] }, "automatic").domain, [20, 1000]);
  assert.deepEqual(axisFor({ ...band, limits: [100, null] }, "automatic").domain, [100, 20000]);
  assert.deepEqual(axisFor({ ...band, limits: [10, 200] }, "automatic").domain, [20, 500]);
  assert.deepEqual(axisFor({ ...band, setting: null, limits: [1e5, 1e6] }, "automatic").domain, [50, 20000]);
});

test("Every edge is on the automatic axis of a range through zero", () => {
  for (const ends of [
    [-1, 12.6],
    [-1e-6, 5e8],
    [-400, 0.1],
  ] as const) {
    const axis = axisFor(subject({ stability: ends, stable: [ends] }), "automatic");
    assert.ok(ends.every((end) => onAxis(axis, end)));
  }
});

test("A loop without any edge still has an axis", () => {
  for (const choice of ["automatic", "positive", "negative", "linear", "both"] as const) {
    const axis = axisFor(subject({ stable: [[-Infinity, Infinity]] }), choice);
    assert.ok(axis.domain.every(Number.isFinite) && axis.domain[0] < axis.domain[1], choice);
    assert.ok(ticksOn(axis, 600, 40).length > 1, choice);
  }
});

test("Positions grow with the knob on every kind of axis", () => {
  for (const choice of ["positive", "negative", "linear", "both"] as const) {
    const axis = axisFor({ ...roller, stability: [-5, 3.857, 236.8] }, choice);
    const position = positionOn(axis, 1000);
    const knobs = [0, 0.2, 0.4, 0.6, 0.8, 1].map((part) => position.invert(part * 1000));
    assert.ok(knobs.every((knob, index) => index === 0 || knob > (knobs[index - 1] ?? Infinity)), choice);
  }
});

test("One step of the pointer is a two-hundredth of the axis, to a round number", () => {
  const axis = axisFor(roller, "automatic");
  assert.equal(typedText(stepFrom(axis, 37, 1)), "38");
  assert.equal(typedText(stepFrom(axis, 37, -10)), "26.2");
});

test("A step always moves, and stops at the ends of the axis", () => {
  const axis = axisFor(roller, "automatic");
  let setting = axis.domain[0];
  for (let step = 0; step < 400 && setting < axis.domain[1]; step += 1) {
    const next = toNumber(stepFrom(axis, setting, 1));
    assert.ok(next > setting, `stuck at ${setting}`);
    setting = next;
  }
  assert.equal(setting, axis.domain[1]);
  assert.equal(toNumber(stepFrom(axis, setting, 10)), axis.domain[1]);
});

test("A dragged setting has no more digits than a pixel can tell apart", () => {
  const axis = axisFor(roller, "automatic");
  const text = typedText(settingAt(axis, positionOn(axis, 1)(37.123456), 1000));
  assert.equal(text, "37.1");
});

test("Labels of ticks keep their distance; 1, 2 and 5 are labelled where there is room", () => {
  const axis = axisFor(roller, "automatic");
  const labels = (length: number): string[] => ticksOn(axis, length, 40).flatMap(({ label }) => (label ? [label] : []));
  assert.deepEqual(labels(1000), ["1", "2", "5", "10", "20", "50", "100", "200", "500", "1000"]);
  assert.deepEqual(labels(240), ["1", "10", "100", "1000"]);
});

test("Ticks of an axis through zero include zero", () => {
  const axis = axisFor(subject({ stability: [-0.01, 500], stable: [[-0.01, 500]] }), "automatic");
  assert.ok(ticksOn(axis, 900, 40).some(({ value, label }) => value === 0 && label === "0"));
});

test("An axis over six hundred decades is ticked in a moment", () => {
  const axis = axisFor(subject({ stability: [1e-300, 1e300], stable: [[1e-300, 1e300]] }), "positive");
  assert.ok(ticksOn(axis, 900, 40).length < 10_000);
});

test("Figures on an axis are plain, or powers of ten far from one", () => {
  assert.deepEqual([0.001, 0, -20, 1e6, 1e-9, -1e7].map(tickText), ["0.001", "0", "−20", "10⁶", "10⁻⁹", "−10⁷"]);
});
