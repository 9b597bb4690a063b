import assert from "node:assert/strict";
import test from "node:test";
import { answersTable, csvText, frequencyTable, locusTable } from "../src/csv.ts";
import { parsed, parsedEntry, Refusal } from "../src/document.ts";
import { fileName } from "../src/file.ts";
import { emptyProject } from "../src/project.ts";
import { answerText } from "../src/words.ts";
import { edge, record, requirement, stability } from "./record.ts";

test("A table is CSV: CR LF behind every record, quotes where a field needs them", () => {
  assert.equal(csvText([["a", "b,c"], [1.5, 'say "no"'], [1e-300, "two\nlines"], [NaN, ""]]), 'a,"b,c"\r\n1.5,"say ""no"""\r\n1e-300,"two\nlines"\r\n,\r\n');
});

test("The locus has a row for every vertex, with the setting on the controller's scale", () => {
  const found = record([], {});
  const scaled = { ...found, scale: { ...found.scale, factor: 2 } };
  const branches = [
    { sign: "positive" as const, points: Float64Array.of(-1, 0, 0, -2, 3, 4) },
    { sign: "negative" as const, points: Float64Array.of(-1, 0, -6) },
  ];
  const [head, ...rows] = locusTable(scaled, branches);
  assert.equal(head?.length, 6);
  assert.deepEqual(rows, [
    [1, "positive", -1, 0, 0, 0],
    [1, "positive", -2, 3, 4, 2],
    [2, "negative", -1, 0, -6, -3],
  ]);
});

test("Where there is no answer the tables have only their head", () => {
  assert.equal(answersTable(record([])).length, 1);
  assert.equal(frequencyTable(record([])).length, 1);
});

test("What is no project is refused before it is asked about", () => {
  const circle: { itself?: unknown } = {};
  circle.itself = circle;
  for (const [document, reason] of [
    ["{", /no JSON text/],
    ["[]", /no JSON object/],
    ["null", /no JSON object/],
    [undefined, /no JSON text/],
    [circle, /in itself/],
    [" ".repeat(2_000_001), /at most 2 MB/],
  ] as const) {
    assert.throws(() => parsed(document), (error) => error instanceof Refusal && reason.test(error.message), String(reason));
  }
  const project = emptyProject();
  assert.deepEqual(parsed(project), project);
  assert.notEqual(parsed(project), project, "a later change of the object has no effect");
});

test("An entry of the store without a format, or with a title that is none, is damaged", () => {
  assert.deepEqual(parsedEntry(emptyProject()), emptyProject());
  assert.equal(parsedEntry({ ...emptyProject(), title: 3 }), null);
  assert.equal(parsedEntry({ title: "x" }), null);
  assert.equal(parsedEntry(undefined), null);
});

test("A file's name ends as it should, whatever was typed", () => {
  assert.equal(fileName("axis/7", ".locus.csv"), "axis 7.locus.csv");
  assert.equal(fileName("../..", ".svg"), "loop.svg");
});

test("The answer as text says the loop, the answer, what was required and which program said so", () => {
  const found = record(stability([edge(1), edge(9)], [1, 0, 2]), { requirements: [requirement({ limit: 0.5 })] });
  const text = answerText({ ...found, project: { ...found.project, title: "Axis 7" } });
  for (const part of ["Axis 7", "negative feedback", "damping ratio at least 0.5", "Stayband"]) assert.ok(text.includes(part), `${part} in\n${text}`);
  assert.ok(!text.includes("\n\n\n"), text);
});
