import assert from "node:assert/strict";
import test from "node:test";
import { characterWords, kindWords, lanesOf, permittedLane, requirementLane, stabilityLane, stabilityWords } from "../src/lanes.ts";
import { happening, reasonLines } from "../src/reason.ts";
import { BAND, edge, limitEdge, limitRange, record, requirement, stability } from "./record.ts";

test("The stability lane covers the whole line and names every range", () => {
  const lane = stabilityLane(record(stability([edge(1), edge(5)], [1, 0, 2])));
  assert.deepEqual(
    lane.segments.map(({ from, to, look, words }) => [from, to, look, words[0]]),
    [
      [-Infinity, 1, "unstable", "1 unstable pole"],
      [1, 5, "stable", "stable"],
      [5, Infinity, "unstable", "2 unstable poles"],
    ],
  );
  assert.equal(lane.edges.length, 2);
});

test("Poles that stay on the axis are not called stable", () => {
  const range = { from: null, to: null, unstablePoles: 0, axisPoles: 2, atLeast: false, stable: false };
  assert.equal(stabilityWords(range), "2 poles on the axis");
});

test("The character is named in full where there is room, in short where not", () => {
  const range = { from: null, to: null, realPoles: 1, pairs: 1, name: "underdamped" as const };
  assert.deepEqual(characterWords(range), ["one oscillating pair, underdamped", "one oscillating pair", "1 pair"]);
  assert.deepEqual(characterWords({ ...range, name: "unstable" }), ["one oscillating pair", "1 pair"]);
  assert.equal(kindWords(4, 0), "all real");
  assert.equal(kindWords(0, 3), "3 oscillating pairs");
});

test("Every kind of edge says what happens", () => {
  assert.equal(happening(edge(1, { omegas: [84.6123] }), "s"), "A pole pair crosses the imaginary axis at ±84.61\u202fj rad/s.");
  assert.match(happening(edge(1, { touching: true }), "s"), /touches the imaginary axis and returns/);
  assert.match(happening(edge(1, { omegas: [1, 2] }), "s"), /±1\u202fj and ±2\u202fj rad\/s/);
  assert.match(happening(edge(1, { kind: "origin crossing" }), "s"), /origin/);
  assert.match(happening(edge(1, { kind: "degree drop" }), "s"), /infinity/);
  assert.match(happening(edge(1, { kind: "breakaway" }), "s"), /leave the real axis/);
});

test("The reason of an edge holds its exact value, its bracket and its proof", () => {
  const at = edge(3.857, { exact: "27/7", bracket: ["3.857142857142857", "3.857142857142858"] });
  const lines = new Map(reasonLines(record(stability([at], [1, 0])), at).map(({ term, text }) => [term, text]));
  assert.equal(lines.get("exact value"), "K = 27/7");
  assert.equal(lines.get("lies between"), "3.857142857142857 and 3.857142857142858");
  assert.equal(lines.get("proof"), "proven by exact arithmetic");
  assert.deepEqual([lines.get("below"), lines.get("above")], ["1 unstable pole", "stable"]);
});

test("Every requirement has a lane between character and permitted", () => {
  const requirements = [requirement(), requirement({ kind: "step-error", limit: 15, atLeast: false, unit: "%" })];
  const lanes = lanesOf(record(stability([edge(1, { exact: "1" }), edge(5, { exact: "5" })], [1, 0, 2]), { requirements }));
  assert.deepEqual(
    lanes.map(({ name, text }) => [name, text]),
    [
      ["Stability", "1 … 5"],
      ["Character", ""],
      ["Damping ratio", "at least 0.5"],
      ["Static error", "at most 15\u202f%"],
      ["Permitted", "nothing"],
    ],
  );
});

test("A lane without ranges says why", () => {
  const found = record([], { requirements: [requirement({ remark: "infinite at every setting" })] });
  assert.equal(requirementLane(found, requirement({ remark: "infinite at every setting" })).empty, "infinite at every setting");
  assert.equal(requirementLane(found, requirement()).empty, "no setting meets it");
});

test("The permitted lane holds the settings to type in, and every edge its cause", () => {
  const permitted = { knob: [limitRange(29.6, 44.8)], setting: [["30", "44"] as [string, string]], proven: false, suggested: null, conflict: null };
  const lane = permittedLane(record([], { permitted, requirements: [requirement()] }));
  assert.deepEqual([lane.segments[0]?.from, lane.segments[0]?.to, lane.segments[0]?.words], [29.6, 44.8, ["30 … 44"]]);
  assert.equal(lane.edges[1]?.words, "Behind it the requirement on damping ratio, at least 0.5, is not met.");
});

test("On a reciprocal scale the lanes are mirrored", () => {
  const lane = stabilityLane(record(stability([edge(1, { exact: "1" }), edge(5, { exact: "5" })], [1, 0, 2]), { scale: BAND }));
  assert.deepEqual(
    lane.segments.map(({ from, to, look }) => [from, to, look]),
    [
      [-Infinity, 20, "unstable"],
      [20, 100, "stable"],
      [100, Infinity, "unstable"],
    ],
  );
  assert.equal(lane.text, "20 … 100");
});

test("The reason of a computed limit says that it was computed, and how the knob stands there", () => {
  const at = limitEdge(4, { setting: 25, proven: false, bracket: ["3.999999", "4.000001"] });
  const lines = new Map(reasonLines(record([], { scale: BAND }), at).map(({ term, text }) => [term, text]));
  assert.match(lines.get("proof") ?? "", /computed/);
  assert.equal(lines.get("knob there"), "K = 4\u202fV");
  assert.equal(lines.get("knob between"), "3.999999 and 4.000001");
});
