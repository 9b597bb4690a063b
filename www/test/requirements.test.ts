import assert from "node:assert/strict";
import test from "node:test";
import { DEMOS } from "../src/demos.ts";
import { GROUPS, KINDS, kindOf, nameInSentence, offerFor, PRESETS } from "../src/requirements.ts";
import { REQUIREMENT_FACTS, type Project } from "../src/types.ts";
import { record } from "./record.ts";

test("Every kind stands once, in a group that is listed", () => {
  assert.deepEqual(KINDS.map(({ kind }) => kind).sort(), Object.keys(REQUIREMENT_FACTS).sort());
  assert.ok(KINDS.every(({ group }) => GROUPS.includes(group)));
  assert.deepEqual([nameInSentence("gain-margin-up"), nameInSentence("step-error")], ["gain margin upward", "static error (step)"]);
});

test("The usual limit is offered, else one that the present loop just meets", () => {
  const kinds = ["decay-rate", "natural-frequency-maximum"] as const;
  const found = record([], { figures: kinds.map((kind) => ({ kind, value: 8.047 })) });
  assert.deepEqual(offerFor(kindOf("phase-margin"), found), { limit: "45", source: "usual" });
  assert.deepEqual(offerFor(kindOf("decay-rate"), found), { limit: "8", source: "this loop" });
  assert.deepEqual(offerFor(kindOf("natural-frequency-maximum"), found), { limit: "8.1", source: "this loop" });
  assert.deepEqual(offerFor(kindOf("rise-time"), null), { limit: "1", source: "none" });
});

test("Every preset names its source and says how far it was confirmed", () => {
  for (const { source, requirements } of PRESETS) {
    assert.match(source, /edition/);
    assert.match(source, /confirmed|memory/);
    for (const { kind, limit } of requirements) assert.ok(Number(limit) > 0, kind);
  }
});

test("Every demo has requirements of known kinds; one has a proportional band in %", () => {
  const projects = DEMOS.map(({ document }) => document as Project);
  for (const { requirements } of projects) {
    assert.ok(requirements.length > 0);
    for (const { kind } of requirements) assert.equal(kindOf(kind).kind, kind);
  }
  assert.ok(projects.some(({ setting }) => setting.direction === "reciprocal" && setting.unit === "%"));
});
