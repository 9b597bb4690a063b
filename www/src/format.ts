// Figures as an engineer writes them: as many digits as are known, a true minus sign, a thin space before the unit.
import { fromNumber, printedText, roundDigits } from "./decimal.ts";

/** A narrow space at which no line breaks. */
export const THIN_SPACE = "\u202f";

/** Digits of a figure that is known well: enough for the shop floor, short enough to read at a glance. */
const USUAL_DIGITS = 4;

/** A number with at most so many significant digits, rounded to the nearest. */
export function figure(value: number, digits: number = USUAL_DIGITS): string {
  if (value === Infinity) return "∞";
  if (value === -Infinity) return "−∞";
  return Number.isNaN(value) ? "unknown" : printedText(roundDigits(fromNumber(value), digits, "nearest"));
}

/** A number whose error is at most `radius`: only the digits that the radius allows; "0" where it could be zero. */
export function knownFigure(value: number, radius: number, digits: number = USUAL_DIGITS): string {
  if (Math.abs(value) <= radius) return "0";
  return figure(value, Math.min(digits, knownDigits(value, radius)));
}

/** How many significant digits of a value stand firm when its error is at most `radius`; at least one. */
export function knownDigits(value: number, radius: number): number {
  if (radius <= 0) return USUAL_DIGITS;
  return Math.max(1, Math.floor(Math.log10(Math.abs(value) / (2 * radius))));
}

/** A figure followed by its unit; the figure alone where there is none. */
export function withUnit(text: string, unit: string): string {
  return unit.trim() === "" ? text : `${text}${THIN_SPACE}${unit.trim()}`;
}

/** A point of the s-plane; with an imaginary part it stands for the conjugate pair. */
export function pairText(re: number, im: number, radius = 0): string {
  const real = knownFigure(re, radius);
  if (im === 0) return real;
  const imaginary = `${knownFigure(Math.abs(im), radius)}${THIN_SPACE}j`;
  return real === "0" ? `± ${imaginary}` : `${real} ± ${imaginary}`;
}

/** An angle in degrees, to a tenth. */
export function angleText(degrees: number): string {
  return `${figure(Math.round(degrees * 10) / 10)}°`;
}

/** With a capital letter, to begin a sentence. */
export function capital(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1);
}

/** "1 pole", "2 poles": a count with its noun. */
export function counted(count: number, noun: string): string {
  return `${count} ${noun}${count === 1 ? "" : "s"}`;
}

/** Items as a phrase: "a", "a and b", "a, b and c". */
export function listed(items: readonly string[], conjunction: "and" | "or" = "and"): string {
  const last = items.at(-1) ?? "";
  return items.length < 2 ? last : `${items.slice(0, -1).join(", ")} ${conjunction} ${last}`;
}
