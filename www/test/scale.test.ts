import assert from "node:assert/strict";
import test from "node:test";
import { CONVERSIONS, conversionText, withConversion } from "../src/conversions.ts";
import { emptyProject, withSetting } from "../src/project.ts";
import { limitSpan, onScale, originOf, settingName, settingUnit, toKnob, toSetting } from "../src/scale.ts";
import { scaleText } from "../src/scaleform.ts";
import { BAND, edge, limitEdge, record, stability } from "./record.ts";

const GAIN = { ...BAND, direction: "proportional" as const, factor: 0.5 };

test("Setting and knob turn into each other on both kinds of scale", () => {
  for (const scale of [BAND, GAIN, { ...BAND, factor: -3 }]) {
    for (const knob of [-7, 0.01, 4, 1e6]) assert.ok(Math.abs(toKnob(scale, toSetting(scale, knob)) / knob - 1) < 1e-12);
  }
  assert.equal(toSetting(BAND, 0), Infinity);
});

test("Ranges keep their order on a falling scale, and remember their edge", () => {
  const { stability: placed } = onScale(record(stability([edge(-1), edge(2), edge(8)], [2, 1, 0, 2]), { scale: BAND }));
  assert.deepEqual(
    placed.map(({ from, to, unstablePoles }) => [from?.value ?? null, to?.value ?? null, unstablePoles]),
    [
      [null, 12.5, 2],
      [12.5, 50, 0],
      [50, null, 1],
    ],
  );
  const [first] = placed;
  assert.equal(first?.to && originOf(first.to).value, 8);
});

test("A converted end is exact only where it is a short decimal", () => {
  const placed = (knob: number, exact: string): string | null =>
    onScale(record(stability([edge(knob, { exact })], [0, 2]), { scale: GAIN })).stability[0]?.to?.exact ?? null;
  assert.equal(placed(60, "60"), "120");
  assert.equal(placed(27 / 7, "27/7"), null);
});

test("A limit's range reaches beyond infinity on a reciprocal scale", () => {
  const span = (from: number | null, to: number | null): [number, number] | null => {
    const at = (knob: number | null): ReturnType<typeof limitEdge> | null => (knob === null ? null : limitEdge(knob, { setting: 100 / knob }));
    const found = limitSpan(BAND, { from: at(from), to: at(to) });
    return found && [found.low, found.high];
  };
  assert.deepEqual(span(2, 5), [20, 50]);
  assert.deepEqual(span(-3, 5), [20, Infinity]);
  assert.deepEqual(span(4, null), [0, 25]);
  assert.deepEqual(span(null, 4), [25, Infinity]);
  assert.equal(span(-5, -2), null);
  assert.equal(span(null, -2), null);
});

test("Name and unit are the controller's, or the knob's on a plain scale", () => {
  assert.deepEqual([settingName(record([])), settingUnit(record([]))], ["K", "V"]);
  const banded = record([], { scale: BAND });
  assert.deepEqual([settingName(banded), settingUnit(banded)], ["band", "%"]);
  assert.equal(settingUnit(record([], { scale: { ...GAIN, unit: "" } })), "");
});

test("A conversion keeps the knob where it is", () => {
  const project = withSetting({ ...emptyProject(), knob: "K" }, "4");
  const closedLoop = { knob: 4, poles: [], unstablePoles: 0, axisPoles: 0, name: "underdamped" as const };
  const [band] = CONVERSIONS;
  assert.ok(band);
  const changed = withConversion(project, band, record([], { closedLoop })).setting;
  assert.deepEqual([changed.value, changed.unit, changed.direction, changed.factor], ["25", "%", "reciprocal", "100"]);
});

test("Every conversion has the factor it names", () => {
  for (const { factor, value } of CONVERSIONS) {
    const [above = NaN, below = 1] = factor.split("/").map(Number);
    assert.equal(above / below, value, factor);
  }
  assert.ok(CONVERSIONS.some((one) => conversionText(one).includes("(m/min)/mm (knob = 16.667 × setting)")));
});

test("The scale is told in one line", () => {
  const project = { ...emptyProject(), knob: "K" };
  assert.equal(scaleText(project), "setting; K = 1 × setting");
  const setting = { ...project.setting, name: "band", unit: "%", direction: "reciprocal" as const, factor: "100", minimum: "1", maximum: "999", step: "1" };
  assert.equal(scaleText({ ...project, setting }), "band\u202fin %, 1 … 999, step 1; K = 100 ÷ setting");
});
