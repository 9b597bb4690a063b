import assert from "node:assert/strict";
import test from "node:test";
import { DEMOS } from "../src/demos.ts";
import { fileName } from "../src/file.ts";
import { History } from "../src/history.ts";
import { carriesProject, linkPart, projectText } from "../src/link.ts";
import { cutOut } from "../src/problem.ts";
import {
  completed,
  emptyProject,
  PROJECT_FORMAT,
  rowsOf,
  withBlock,
  withKnob,
  withoutRequirement,
  withQuantity,
  withRequirement,
  withScale,
  withSetting,
} from "../src/project.ts";
import type { Project } from "../src/types.ts";

const titled = (title: string): Project => ({ ...emptyProject(), title });

test("A link carries the whole project, whatever characters it holds", async () => {
  const project = withQuantity(withBlock(titled("Walze “ä” 軸 🙂"), "plant", "14/((s − 3)(τ s + 1))"), "τ", { value: "0.008" });
  assert.deepEqual(JSON.parse(await projectText(await linkPart(project))), project);
});

test("A link in plain base64url is read as well", async () => {
  const code = Buffer.from(JSON.stringify(titled("plain"))).toString("base64url");
  assert.equal(JSON.parse(await projectText(`#project=${code}`)).title, "plain");
});

test("A broken link says so", async () => {
  const whole = await linkPart(titled("whole"));
  for (const part of ["#project=", "#project=z", "#project=%%%", "#project=z!!", whole.slice(0, -6), "#project=gICA"]) {
    await assert.rejects(projectText(part), /cut off|nothing behind/, part);
  }
});

test("A link that unpacks to far more than a project is refused", async () => {
  const bomb = await linkPart(titled("a".repeat(3_000_000)));
  assert.ok(bomb.length < 20_000);
  await assert.rejects(projectText(bomb), /more than 2000000 bytes/);
});

test("Only a part that says so carries a project", () => {
  assert.equal(carriesProject("#project=abc"), true);
  assert.equal(carriesProject("#loop"), false);
});

test("Undo goes back step by step, and redo forth again", () => {
  const history = new History<Project>();
  history.note(titled("a"), "title", 0);
  history.note(titled("b"), "knob", 100);
  assert.equal(history.undo(titled("c"))?.title, "b");
  assert.equal(history.undo(titled("b"))?.title, "a");
  assert.equal(history.undo(titled("a")), null);
  assert.equal(history.redo(titled("a"))?.title, "b");
  assert.equal(history.redo(titled("b"))?.title, "c");
  assert.equal(history.canRedo, false);
});

test("Letters typed without a pause are undone together, those after a pause are not", () => {
  const history = new History<Project>();
  history.note(titled(""), "title", 0);
  history.note(titled("a"), "title", 300);
  history.note(titled("ab"), "title", 600);
  history.note(titled("abc"), "title", 9000);
  assert.equal(history.undo(titled("abcd"))?.title, "abc");
  assert.equal(history.undo(titled("abc"))?.title, "");
});

test("A change after undo leaves nothing to redo", () => {
  const history = new History<Project>();
  history.note(titled("a"), "title", 0);
  history.undo(titled("b"));
  history.note(titled("a"), "title", 10_000);
  assert.equal(history.canRedo, false);
});

test("Another knob takes its value along as the setting and leaves the old one its setting as value", () => {
  const start = withSetting({ ...withQuantity(emptyProject(), "tau", { value: "0.008" }), knob: "K" }, "37");
  const moved = withKnob(start, "tau");
  assert.equal(moved.setting.value, "0.008");
  assert.equal(moved.quantities.find((row) => row.symbol === "K")?.value, "37");
  assert.equal(moved.quantities.find((row) => row.symbol === "tau")?.value, "");
  const back = withKnob(moved, "K");
  assert.equal(back.setting.value, "37");
  assert.equal(back.quantities.find((row) => row.symbol === "tau")?.value, "0.008");
});

test("Another knob leaves the old one's scale behind", () => {
  const banded = withScale(withSetting({ ...withQuantity(emptyProject(), "tau", { value: "0.008" }), knob: "K" }, "25"), {
    direction: "reciprocal",
    factor: "100",
    unit: "%",
  });
  const moved = withKnob(banded, "tau", "4");
  assert.equal(moved.quantities.find((row) => row.symbol === "K")?.value, "4");
  assert.deepEqual([moved.setting.value, moved.setting.direction, moved.setting.factor], ["0.008", "proportional", ""]);
});

test("A requirement is added once, changed in its place, and taken away", () => {
  const two = withRequirement(withRequirement(emptyProject(), "damping-ratio", "0.5"), "overshoot", "20");
  const changed = withRequirement(two, "damping-ratio", "0.7");
  assert.deepEqual(changed.requirements, [
    { kind: "damping-ratio", limit: "0.7" },
    { kind: "overshoot", limit: "20" },
  ]);
  assert.deepEqual(withoutRequirement(changed, "damping-ratio").requirements, [{ kind: "overshoot", limit: "20" }]);
});

test("A project saved before requirements and scales opens with none", () => {
  const old = { ...emptyProject(), setting: { value: "37" }, requirements: undefined } as unknown as Project;
  const project = completed(old);
  assert.deepEqual(project.requirements, []);
  assert.deepEqual([project.setting.value, project.setting.direction, project.setting.step], ["37", "proportional", ""]);
});

test("Every name has a row; rows of names that are gone stay only while they hold something", () => {
  const project = withQuantity(withQuantity(emptyProject(), "old", { value: "5" }), "gone", {});
  assert.deepEqual(
    rowsOf(project, ["K", "tau"]).map(({ row, used }) => [row.symbol, used]),
    [
      ["K", true],
      ["tau", true],
      ["old", false],
    ],
  );
});

test("Fields that an older document leaves out are filled in", () => {
  const old = { format: PROJECT_FORMAT, loop: { controller: "K", plant: "1/s" }, knob: "K" } as unknown as Project;
  const project = completed(old);
  assert.deepEqual([project.title, project.loop.sensor, project.loop.feedback, project.setting.value], ["", "1", "negative", ""]);
});

test("A file name holds only what every file system takes", () => {
  assert.equal(fileName("Levitated roller, axis A"), "Levitated roller, axis A.stayband.json");
  assert.equal(fileName("../../etc: a/b\\c*?"), "etc a b c.stayband.json");
  assert.equal(fileName("  "), "loop.stayband.json");
});

test("The wrong place is cut out of the text by characters, not by code units", () => {
  assert.deepEqual(cutOut("𝜏 s, 1", [3, 4]), { before: "𝜏 s", at: ",", behind: " 1" });
  const long = cutOut("a".repeat(60) + "!" + "b".repeat(60), [60, 61]);
  assert.deepEqual([long.at, long.before.length, long.behind.length], ["!", 25, 25]);
});

test("Every demo is a project, marked as invented", () => {
  for (const { document } of DEMOS) {
    const project = document as Project;
    assert.equal(project.format, PROJECT_FORMAT);
    assert.match(project.title, /invented/);
    assert.deepEqual(completed(project), project);
  }
});
