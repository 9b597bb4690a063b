import assert from "node:assert/strict";
import test from "node:test";
import { angleText, counted, figure, knownFigure, listed, pairText, withUnit } from "../src/format.ts";

test("A figure shows no digit that its error radius does not allow", () => {
  assert.equal(knownFigure(84.61234, 1e-12), "84.61");
  assert.equal(knownFigure(84.61234, 0.04), "84.6");
  assert.equal(knownFigure(84.61234, 3), "80");
});

test("A figure that could be zero is printed as zero", () => {
  assert.equal(knownFigure(-1e-15, 1e-14), "0");
});

test("A pair is printed once, with both signs", () => {
  assert.equal(pairText(-26.04, 35.63), "−26.04 ± 35.63\u202fj");
  assert.equal(pairText(0, -84.6), "± 84.6\u202fj");
  assert.equal(pairText(-8.5, 0), "−8.5");
  assert.equal(pairText(1e-16, 3, 1e-15), "± 3\u202fj");
});

test("A unit follows after a thin space, and nothing follows where there is none", () => {
  assert.equal(withUnit("37", "V/mm"), "37\u202fV/mm");
  assert.equal(withUnit("37", " "), "37");
});

test("Infinite and missing numbers are named", () => {
  assert.equal(figure(Infinity), "∞");
  assert.equal(figure(-Infinity), "−∞");
  assert.equal(figure(NaN), "unknown");
});

test("Counts, lists and angles read like a sentence", () => {
  assert.equal(counted(1, "pole"), "1 pole");
  assert.equal(counted(2, "pole"), "2 poles");
  assert.equal(listed(["a"]), "a");
  assert.equal(listed(["a", "b", "c"]), "a, b and c");
  assert.equal(angleText(-60), "−60°");
  assert.equal(angleText(104.0362), "104°");
});
