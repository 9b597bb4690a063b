import assert from "node:assert/strict";
import test from "node:test";
import { plain, settingSentence, stabilitySentence } from "../src/answer.ts";
import type { ClosedLoop } from "../src/types.ts";
import { edge, record, stability } from "./record.ts";

const exact = (value: number, text: string): ReturnType<typeof edge> => edge(value, { exact: text });
const say = (...input: Parameters<typeof record>): string => plain(stabilitySentence(record(...input)));

test("One range with exact ends is printed exactly", () => {
  assert.equal(say(stability([exact(-1, "-1"), exact(12.6, "63/5")], [1, 0, 2])), "Stable for K from −1 to 12.6\u202fV (proven).");
});

test("Rounded ends are said to be rounded", () => {
  const upper = edge(236.8449, { bracket: ["236.84487", "236.84493"] });
  assert.equal(
    say(stability([exact(2, "2"), upper], [1, 0, 2])),
    "Stable for K from 2 to 236.8\u202fV (proven; ends rounded to the safe side).",
  );
});

test("Two ranges are both named", () => {
  const edges = [exact(0, "0"), exact(15.5, "31/2"), exact(67, "67"), exact(163, "163")];
  assert.equal(say(stability(edges, [1, 0, 2, 0, 2])), "Stable for K from 0 to 15.5 and from 67 to 163\u202fV (proven).");
});

test("Open ranges are above or below their end", () => {
  assert.equal(say(stability([exact(7.5, "15/2")], [1, 0])), "Stable for K above 7.5\u202fV (proven).");
  assert.equal(say(stability([exact(-2, "-2"), exact(4, "4")], [0, 1, 0])), "Stable for K below −2 and above 4\u202fV (proven).");
});

test("Every value and no value are answers, too", () => {
  assert.equal(say(stability([], [0])), "Stable for every value of K (proven).");
  assert.equal(say(stability([], [1])), "No value of K makes this loop stable (proven).");
  const notices = [{ kind: "unstable-fixed-mode" as const, text: "…" }];
  assert.match(say(stability([], [1]), { notices }), /fixed mode/);
});

test("A touching edge inside a range is an exception to it", () => {
  const edges = [exact(1, "1"), edge(5, { touching: true }), exact(9, "9")];
  assert.equal(
    say(stability(edges, [1, 0, 0, 2])),
    "Stable for K from 1 to 9\u202fV, except at 5, where poles touch the imaginary axis (proven).",
  );
});

test("What is not proven is not called proven", () => {
  assert.match(say(stability([edge(3, { exact: "3", proven: false })], [0, 2])), /\(not proven\)/);
});

test("Every edge in the sentence can be asked for its reason", () => {
  const pieces = stabilitySentence(record(stability([exact(2, "2"), exact(9, "9")], [1, 0, 2])));
  assert.deepEqual(
    pieces.flatMap((piece) => (piece.edge ? [piece.edge.value] : [])),
    [2, 9],
  );
});

test("The setting is judged in the words of the trade", () => {
  const loop = (parts: Partial<ClosedLoop>): string => {
    const closedLoop: ClosedLoop = { knob: 37, poles: [], unstablePoles: 0, axisPoles: 0, name: "underdamped", ...parts };
    return settingSentence(record([], { closedLoop }));
  };
  assert.equal(loop({}), "At K = 37\u202fV the loop is stable, underdamped.");
  assert.equal(loop({ name: "unstable", unstablePoles: 2 }), "At K = 37\u202fV the loop is unstable: 2 poles right of the imaginary axis.");
  assert.equal(
    loop({ name: "marginally stable", axisPoles: 2 }),
    "At K = 37\u202fV the loop is marginally stable: 2 poles on the imaginary axis.",
  );
  assert.match(loop({ name: "unstable", axisPoles: 2 }), /some repeated/);
  assert.match(settingSentence(record([])), /No setting/);
});
