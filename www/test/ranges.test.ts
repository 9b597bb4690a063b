import assert from "node:assert/strict";
import test from "node:test";
import { compare, readDecimal, typedText } from "../src/decimal.ts";
import { printedEnd, printedEnds, rangeAt, stableSpans } from "../src/ranges.ts";
import { edge, stability } from "./record.ts";

test("Stable ranges that only touch the axis between them are one span", () => {
  const touch = edge(5, { touching: true });
  const spans = stableSpans(stability([edge(1), touch, edge(9)], [1, 0, 0, 2]));
  assert.equal(spans.length, 1);
  assert.deepEqual([spans[0]?.from?.value, spans[0]?.to?.value, spans[0]?.touching], [1, 9, [touch]]);
});

test("Stable ranges with an unstable one between them stay apart", () => {
  const spans = stableSpans(stability([edge(0), edge(2), edge(7), edge(11)], [1, 0, 2, 0, 2]));
  assert.deepEqual(
    spans.map(({ from, to }) => [from?.value, to?.value]),
    [
      [0, 2],
      [7, 11],
    ],
  );
});

test("Both printed ends lie inside the range, whatever the bracket", () => {
  const from = edge(27 / 7, { bracket: ["3.857142857142855", "3.857142857142858"], exact: "27/7" });
  const to = edge(236.8449, { bracket: ["236.84487", "236.84493"] });
  const ends = printedEnds({ from, to, touching: [] });
  assert.equal(ends.from && typedText(ends.from.decimal), "3.858");
  assert.equal(ends.to && typedText(ends.to.decimal), "236.8");
  assert.equal(ends.from?.exact, false);
});

test("An end that is a short decimal is printed as it is", () => {
  const end = printedEnd(edge(12.6, { exact: "63/5" }), "down");
  assert.deepEqual([typedText(end.decimal), end.exact], ["12.6", true]);
  assert.equal(typedText(printedEnd(edge(-1, { exact: "-1" }), "up").decimal), "-1");
});

test("A narrow range gets as many digits as it takes to tell its ends apart", () => {
  const from = edge(1, { bracket: ["1.000000111", "1.000000112"] });
  const to = edge(1, { bracket: ["1.000000222", "1.000000223"] });
  const { from: low, to: high } = printedEnds({ from, to, touching: [] });
  assert.ok(low && high && compare(low.decimal, high.decimal) < 0);
  assert.ok(compare(low.decimal, readDecimal("1.000000112") ?? low.decimal) >= 0);
  assert.ok(compare(high.decimal, readDecimal("1.000000222") ?? high.decimal) <= 0);
});

test("A range is found by a value of the knob", () => {
  const ranges = stability([edge(1), edge(5)], [1, 0, 2]);
  assert.deepEqual(
    [-3, 3, 8].map((knob) => rangeAt(ranges, knob)?.unstablePoles),
    [1, 0, 2],
  );
});
