import assert from "node:assert/strict";
import test from "node:test";
import {
  compare,
  fromRational,
  fromNumber,
  printedText,
  readDecimal,
  roundDigits,
  roundPlace,
  toNumber,
  typedText,
  type Decimal,
} from "../src/decimal.ts";

const read = (text: string): Decimal => {
  const decimal = readDecimal(text);
  assert.ok(decimal, text);
  return decimal;
};

test("A decimal is read whichever way it is written", () => {
  for (const text of ["0.0125", ".0125", "1.25e-2", "12.5E-3", "+0.01250"]) {
    assert.deepEqual(read(text), { digits: 125n, exponent: -4 }, text);
  }
  assert.deepEqual(read("−3"), { digits: -3n, exponent: 0 });
});

test("What is no decimal is not read", () => {
  for (const text of ["", ".", "-", "1,5", "1e", "0x1", "1e99999", "NaN", "1 2"]) assert.equal(readDecimal(text), null, text);
});

test("Rounding up and down goes towards +∞ and −∞ also below zero", () => {
  assert.equal(typedText(roundDigits(read("3.857142857"), 4, "up")), "3.858");
  assert.equal(typedText(roundDigits(read("3.857142857"), 4, "down")), "3.857");
  assert.equal(typedText(roundDigits(read("-3.857142857"), 4, "up")), "-3.857");
  assert.equal(typedText(roundDigits(read("-3.857142857"), 4, "down")), "-3.858");
  assert.equal(typedText(roundDigits(read("9.9996"), 4, "up")), "10");
});

test("A number that is short enough is not changed by rounding", () => {
  for (const direction of ["up", "down", "nearest"] as const) assert.equal(typedText(roundDigits(read("12.6"), 4, direction)), "12.6");
});

test("Rounded figures never pass the number they came from", () => {
  let state = 7;
  for (let run = 0; run < 2000; run += 1) {
    state = (state * 48271) % 2147483647;
    const value = fromNumber((state / 1e9 - 1) * 10 ** ((state % 31) - 15));
    for (const digits of [1, 3, 6]) {
      assert.ok(compare(roundDigits(value, digits, "down"), value) <= 0);
      assert.ok(compare(roundDigits(value, digits, "up"), value) >= 0);
    }
  }
});

test("Rounding to a place keeps multiples of it", () => {
  assert.equal(typedText(roundPlace(read("37.26"), -1, "nearest")), "37.3");
  assert.equal(typedText(roundPlace(read("37.26"), 1, "nearest")), "40");
  assert.equal(typedText(roundPlace(read("-0.04"), 0, "nearest")), "0");
});

test("A rational number becomes a decimal only where that ends", () => {
  assert.equal(typedText(fromRational("0.5") ?? read("0")), "0.5");
  assert.equal(typedText(fromRational("63/5") ?? read("0")), "12.6");
  assert.equal(typedText(fromRational("-1386") ?? read("0")), "-1386");
  assert.equal(fromRational("-2/15"), null);
  assert.equal(fromRational("1/0"), null);
});

test("Numbers are printed with a true minus sign and powers of ten only far from one", () => {
  assert.equal(printedText(read("-0.0125")), "−0.0125");
  assert.equal(printedText(read("1500000")), "1500000");
  assert.equal(printedText(read("1.2e-9")), "1.2 × 10⁻⁹");
  assert.equal(printedText(read("-3e12")), "−3 × 10¹²");
  assert.equal(printedText(read("0")), "0");
});

test("What is typed into a field reads back as the same number", () => {
  for (const value of [0, 1, -37.5, 1.25e-9, 6.02e23, 0.1, 123456.789, 5e-324, 1.7976931348623157e308]) {
    assert.equal(toNumber(read(typedText(fromNumber(value)))), value);
  }
});
