// The packed parts of the page.
import assert from "node:assert/strict";
import test from "node:test";
import { bytesOf } from "../src/packed.ts";

// The same example stands in www/pack/src/printable.rs, which writes it.
test("Printable text is read back to its bytes", () => {
  assert.equal(new TextDecoder().decode(bytesOf("]2C(i9tv3_", 8)), "Stayband");
  assert.deepEqual([...bytesOf("!!!!", 3)], [0, 0, 0]);
  assert.equal(bytesOf("", 0).length, 0);
});
