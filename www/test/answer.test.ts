import assert from "node:assert/strict";
import test from "node:test";
import { answerSentence, plain, settingSentence, stabilitySentence, suggestionReason } from "../src/answer.ts";
import type { ClosedLoop, Permitted } from "../src/types.ts";
import { BAND, edge, limitRange, record, requirement, stability } from "./record.ts";

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
    pieces.flatMap(({ edge: asked }) => (asked && "value" in asked ? [asked.value] : [])),
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

const permitted = (parts: Partial<Permitted>): Permitted => ({ knob: [], setting: [], proven: false, suggested: null, conflict: null, ...parts });
const use = (parts: Partial<Permitted>, others: Parameters<typeof record>[1] = {}): string =>
  plain(answerSentence(record([], { permitted: permitted(parts), requirements: [requirement()], ...others })));

test("The permitted settings come first, with the word for their proof", () => {
  assert.equal(use({ knob: [limitRange(29.6, 44.8)], setting: [["30", "44"]] }), "Use 30 to 44\u202fV (permitted, computed).");
  assert.equal(use({ knob: [limitRange(29.6, null)], setting: [["30", null]], proven: true }), "Use 30\u202fV and more (permitted, proven).");
  const two = { knob: [limitRange(1, 2), limitRange(5, 9)], setting: [["1", "2"], ["5", "9"]] as [string, string][] };
  assert.equal(use(two), "Use 1 to 2 or 5 to 9\u202fV (permitted, computed).");
  assert.equal(use({ knob: [limitRange(4.6, 5.4)], setting: [["5", "5"]] }), "Use only 5\u202fV (permitted, computed).");
});

test("Where nothing is permitted the conflict is told; where the grid leaves nothing, that", () => {
  const conflict = { requirements: [], text: "damping ratio allows 1 to 12.1; static error on a step allows 29.6 to 90" };
  assert.equal(use({ conflict }), `No setting is permitted (computed): ${conflict.text}.`);
  assert.match(use({ knob: [limitRange(4.1, 4.2)], setting: [[null, null]] }), /resolution leaves none/);
});

test("On a reciprocal scale the answer is in the controller's units, lower setting first", () => {
  const knob = [{ from: limitRange(1, 1).from, to: limitRange(5, 5).from }];
  assert.equal(use({ knob, setting: [["20", "100"]] }, { scale: BAND }), "Use 20 to 100\u202f% (permitted, computed).");
  const stable = plain(stabilitySentence(record(stability([exact(1, "1"), edge(3)], [1, 0, 2]), { scale: BAND })));
  assert.equal(stable, "Stable for band from 33.34 to 100\u202f% (proven; ends rounded to the safe side).");
});

test("Without requirements the answer is the stable range", () => {
  assert.match(plain(answerSentence(record(stability([edge(1), edge(5)], [1, 0, 2])))), /^Stable for K/);
});

test("The suggestion says how it was chosen", () => {
  const suggested = { setting: "36", knob: 36, reason: "midway between the ends" };
  assert.equal(suggestionReason(record([], { permitted: permitted({ suggested }) })), "36\u202fV is midway between the ends.");
});

test("What is not met at the setting is named", () => {
  const closedLoop: ClosedLoop = { knob: 37, poles: [], unstablePoles: 0, axisPoles: 0, name: "underdamped" };
  const at = (...met: (boolean | null)[]): string =>
    settingSentence(record([], { closedLoop, requirements: met.map((one, index) => requirement({ met: one, kind: index === 0 ? "damping-ratio" : "overshoot" })) }));
  assert.match(at(true), /The requirement is met\.$/);
  assert.match(at(true, true), /All 2 requirements are met\.$/);
  assert.match(at(false, false), /Not met: damping ratio and overshoot\.$/);
  assert.match(at(true, null), /underdamped\.$/);
});
