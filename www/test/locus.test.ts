import assert from "node:assert/strict";
import test from "node:test";
import { clipLine, frameOf, nearestPoint, piecesOf } from "../src/locus.ts";
import { edge, limitRange, stability } from "./record.ts";

/** A branch along the real axis from −4 to 4 while the knob goes from 0 to 8. */
const straight = { sign: "positive" as const, points: new Float64Array([-4, 0, 0, 0, 0, 4, 4, 0, 8]) };

test("A branch is cut exactly where the verdict changes, also between its vertices", () => {
  const pieces = piecesOf(straight, stability([edge(1), edge(6)], [1, 0, 2]));
  assert.deepEqual(
    pieces.map(({ verdict, points }) => [verdict, ...points]),
    [
      ["unstable", -4, 0, -3, 0],
      ["stable", -3, 0, 0, 0, 2, 0],
      ["unstable", 2, 0, 4, 0],
    ],
  );
});

test("The permitted part of a branch stands out from what is only stable", () => {
  const pieces = piecesOf(straight, stability([edge(1), edge(6)], [1, 0, 2]), [limitRange(2, 3)]);
  assert.deepEqual(
    pieces.map(({ verdict, points }) => [verdict, points[0], points.at(-2)]),
    [
      ["unstable", -4, -3],
      ["stable", -3, -2],
      ["permitted", -2, -1],
      ["stable", -1, 2],
      ["unstable", 2, 4],
    ],
  );
});

test("A branch for negative knob is cut in its own order", () => {
  const points = new Float64Array([-4, 0, 0, 4, 0, -8]);
  const pieces = piecesOf({ sign: "negative", points }, stability([edge(-6), edge(-1)], [2, 0, 1]));
  assert.deepEqual(
    pieces.map(({ verdict, points: line }) => [verdict, ...line]),
    [
      ["unstable", -4, 0, -3, 0],
      ["stable", -3, 0, 2, 0],
      ["unstable", 2, 0, 4, 0],
    ],
  );
});

test("A branch that ends in a zero at infinite knob has finite pieces", () => {
  const points = new Float64Array([-4, 0, 0, -2, 0, 3, -1, 0, Infinity]);
  const pieces = piecesOf({ sign: "positive", points }, stability([edge(5)], [1, 0]));
  assert.ok(pieces.flatMap((piece) => piece.points).every(Number.isFinite));
  assert.deepEqual(
    pieces.map((piece) => piece.verdict),
    ["unstable", "stable"],
  );
  assert.deepEqual(pieces.at(-1)?.points.slice(-2), [-1, 0]);
});

test("The nearest point lies between vertices and carries the knob there", () => {
  const found = nearestPoint([straight], { re: -3, im: 0.5 }, 10);
  assert.deepEqual(found, { point: { re: -3, im: 0, knob: 1 }, sign: "positive", distance: 5 });
});

test("The frame shows all of the view, centred, with equal scales", () => {
  const frame = frameOf({ re: [-150, 40], im: [-10, 10] }, 400, 300);
  assert.deepEqual(frame.re, [-150, 40]);
  const scale = (frame.re[1] - frame.re[0]) / 400;
  assert.ok(Math.abs((frame.im[1] - frame.im[0]) / 300 - scale) < 1e-12);
  assert.equal(frame.im[0], -frame.im[1]);
});

test("A view without extent still makes a frame", () => {
  const frame = frameOf({ re: [2, 2], im: [0, 0] }, 400, 300);
  assert.ok(frame.re[0] < 2 && 2 < frame.re[1]);
});

test("A line is cut at the picture's border and keeps what is inside", () => {
  assert.deepEqual(clipLine([-10, 5, 5, 5, 5, 1e12], [0, 0, 10, 10]), [[0, 5, 5, 5, 5, 10]]);
  assert.deepEqual(clipLine([-10, 20, 20, 20], [0, 0, 10, 10]), []);
  assert.deepEqual(clipLine([5, 5, 15, 5, 15, 6, 5, 6], [0, 0, 10, 10]), [
    [5, 5, 10, 5],
    [10, 6, 5, 6],
  ]);
});
