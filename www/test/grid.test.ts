import assert from "node:assert/strict";
import test from "node:test";
import { readDecimal, typedText, type Decimal } from "../src/decimal.ts";
import { gridOf, onGrid, stepOnGrid } from "../src/grid.ts";

const read = (text: string): Decimal => {
  const decimal = readDecimal(text);
  assert.ok(decimal, text);
  return decimal;
};
const near = (setting: string, step: string, minimum = "", maximum = ""): string =>
  typedText(onGrid(gridOf({ step, minimum, maximum }), read(setting)));
const stepped = (setting: string, step: string, steps: number, minimum = "", maximum = ""): string | null => {
  const found = stepOnGrid(gridOf({ step, minimum, maximum }), read(setting), steps);
  return found && typedText(found);
};

test("A setting is taken to the nearest multiple of the resolution, exactly", () => {
  assert.deepEqual([near("37.4", "1"), near("37.5", "1"), near("0.1234", "0.05"), near("-2.6", "0.5")], ["37", "38", "0.1", "-2.5"]);
  assert.equal(near("37.123", ""), "37.123");
});

test("The controller's limits hold, on its own grid", () => {
  assert.deepEqual([near("0.2", "1", "1", "999"), near("2000", "1", "1", "999"), near("0", "2", "1", "9"), near("99", "2", "1", "9")], ["1", "999", "2", "8"]);
  assert.equal(near("0.2", "", "0.5"), "0.5");
});

test("A step goes to the next setting of the grid, also from between two", () => {
  assert.deepEqual([stepped("37", "1", 1), stepped("37", "1", -10), stepped("37.4", "1", 1), stepped("37.4", "1", -1)], ["38", "27", "38", "37"]);
  assert.equal(stepped("0.3", "0.1", 1), "0.4");
  assert.equal(stepped("999", "1", 10, "1", "999"), "999");
  assert.equal(stepped("37", "", 1), null);
});
