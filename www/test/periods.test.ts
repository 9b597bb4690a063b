// The table of sample periods in words.
import assert from "node:assert/strict";
import test from "node:test";
import { longestWords, rangesWords } from "../src/periods.ts";
import { BAND, record } from "./record.ts";

test("Stable settings at a period are told in the controller's units, ascending", () => {
  const at = { period: 0.01, ranges: [[2, 5] as [number, number]] };
  assert.equal(rangesWords(record([]), at), "2 … 5");
  // 100 ÷ setting: the knob 5 is 20 %, the knob 2 is 50 %.
  assert.equal(rangesWords(record([], { scale: BAND }), at), "20 … 50");
  assert.equal(rangesWords(record([]), { period: 1, ranges: [] }), "none");
  assert.equal(rangesWords(record([]), { period: 1, ranges: [[null, 3]] }), "below 3");
});

test("The longest period is told where a setting is chosen", () => {
  const sampling = { period: 0.01, delay: 0, method: null, byPeriod: [], longestPeriod: 0.0125 };
  assert.equal(longestWords(sampling, record([])), "");
  const closedLoop = { knob: 1, poles: [], unstablePoles: 0, axisPoles: 0, name: "underdamped" as const };
  assert.match(longestWords(sampling, record([], { closedLoop })), /up to a sample period of 0\.0125/);
  assert.match(longestWords({ ...sampling, longestPeriod: null }, record([], { closedLoop })), /No limit/);
});
