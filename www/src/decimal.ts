// Exact decimal numbers as text, so that a rounded figure can be proven to lie on the safe side.
//
// A number is `digits × 10^exponent` with an integer of any size; nothing passes through floating point.

/** `digits × 10^exponent`. */
export interface Decimal {
  readonly digits: bigint;
  readonly exponent: number;
}

/** Where a figure that must be shortened may move to. */
export type Direction = "down" | "up" | "nearest";

/** Larger exponents are refused: nothing an engineer types needs them, and powers of ten of that size cost memory. */
const LARGEST_EXPONENT = 5000;

/** How many decimal places of a fraction are tried before it is taken as one that does not end. */
const FRACTION_PLACES = 24;

const DECIMAL = /^\s*([+\-−]?)(\d*)(?:\.(\d*))?(?:[eE]([+\-−]?\d{1,5}))?\s*$/u;

/** Reads a decimal such as `-12.5`, `.5` or `1.2e-9`; null where the text is none. */
export function readDecimal(text: string): Decimal | null {
  const match = DECIMAL.exec(text);
  if (!match) return null;
  const [, sign, whole = "", part = "", power = "0"] = match;
  if (whole === "" && part === "") return null;
  const exponent = Number(power.replace("−", "-")) - part.length;
  if (Math.abs(exponent) > LARGEST_EXPONENT) return null;
  const digits = BigInt(whole + part);
  return trim({ digits: sign === "-" || sign === "−" ? -digits : digits, exponent });
}

/** The shortest decimal that reads back as this finite number. */
export function fromNumber(value: number): Decimal {
  const decimal = readDecimal(String(value));
  if (!decimal) throw new RangeError(`not a finite number: ${value}`);
  return decimal;
}

/** The decimal equal to a rational number such as `0.5` or `-1/8`; null where it does not end within a few places. */
export function fromRational(text: string): Decimal | null {
  const match = /^(-?\d+)\/(\d+)$/.exec(text);
  if (!match?.[1] || !match[2]) return readDecimal(text);
  const numerator = BigInt(match[1]);
  const denominator = BigInt(match[2]);
  if (denominator === 0n) return null;
  for (let places = 0; places <= FRACTION_PLACES; places += 1) {
    const scaled = numerator * 10n ** BigInt(places);
    if (scaled % denominator === 0n) return trim({ digits: scaled / denominator, exponent: -places });
  }
  return null;
}

/** How many significant digits are written. */
export function significantDigits(value: Decimal): number {
  return magnitude(value.digits).toString().length;
}

/** Rounds to a number of significant digits; `down` is towards −∞, `up` towards +∞. */
export function roundDigits(value: Decimal, digits: number, direction: Direction): Decimal {
  const surplus = significantDigits(value) - digits;
  return surplus <= 0 ? value : roundPlace(value, value.exponent + surplus, direction);
}

/** Rounds to a multiple of 10^place. */
export function roundPlace(value: Decimal, place: number, direction: Direction): Decimal {
  if (value.exponent >= place) return value;
  const unit = 10n ** BigInt(place - value.exponent);
  const rest = ((value.digits % unit) + unit) % unit;
  const floor = (value.digits - rest) / unit;
  const upwards = direction === "up" ? rest > 0n : direction === "nearest" && 2n * rest >= unit;
  return trim({ digits: upwards ? floor + 1n : floor, exponent: place });
}

/** Negative, zero or positive, as `left` is less than, equal to or greater than `right`. */
export function compare(left: Decimal, right: Decimal): number {
  const exponent = Math.min(left.exponent, right.exponent);
  const difference = lift(left, exponent) - lift(right, exponent);
  return difference < 0n ? -1 : difference > 0n ? 1 : 0;
}

/** The nearest floating-point number. */
export function toNumber(value: Decimal): number {
  return Number(`${value.digits}e${value.exponent}`);
}

/** The exponent of the leading digit: 2 for 236.8. */
function leadingExponent(value: Decimal): number {
  return value.exponent + significantDigits(value) - 1;
}

/** Between these exponents of the leading digit a number is written without a power of ten. */
const PLAIN_FROM = -5;
const PLAIN_TO = 6;

/** As it is typed: `0.0125`, `-1.2e-9`. */
export function typedText(value: Decimal): string {
  const { mantissa, power } = parts(value);
  return power === 0 ? mantissa : `${mantissa}e${power}`;
}

/** As it is printed: a true minus sign, and `1.2 × 10⁻⁹` for very large and small numbers. */
export function printedText(value: Decimal): string {
  const { mantissa, power } = parts(value);
  const number = mantissa.replace("-", "−");
  return power === 0 ? number : `${number} × 10${superscript(power)}`;
}

/** An integer in raised digits. */
export function superscript(power: number): string {
  const raised = "⁰¹²³⁴⁵⁶⁷⁸⁹";
  return [...String(power)].map((character) => (character === "-" ? "⁻" : (raised[Number(character)] ?? ""))).join("");
}

function parts(value: Decimal): { mantissa: string; power: number } {
  const sign = value.digits < 0n ? "-" : "";
  const digits = magnitude(value.digits).toString();
  const leading = leadingExponent(value);
  if (value.digits !== 0n && (leading < PLAIN_FROM || leading > PLAIN_TO)) {
    const rest = digits.slice(1);
    return { mantissa: `${sign}${digits[0]}${rest ? `.${rest}` : ""}`, power: leading };
  }
  if (value.exponent >= 0) return { mantissa: sign + digits + "0".repeat(value.exponent), power: 0 };
  const places = -value.exponent;
  const padded = digits.padStart(places + 1, "0");
  return { mantissa: `${sign}${padded.slice(0, -places)}.${padded.slice(-places)}`, power: 0 };
}

function trim(value: Decimal): Decimal {
  if (value.digits === 0n) return { digits: 0n, exponent: 0 };
  const text = value.digits.toString();
  const zeros = text.length - text.replace(/0+$/, "").length;
  return zeros === 0 ? value : { digits: BigInt(text.slice(0, -zeros)), exponent: value.exponent + zeros };
}

function lift(value: Decimal, exponent: number): bigint {
  return value.digits * 10n ** BigInt(value.exponent - exponent);
}

function magnitude(value: bigint): bigint {
  return value < 0n ? -value : value;
}
