// The stable ranges of a record, joined and rounded so that every printed figure lies on the safe side.
import {
  compare,
  fromRational,
  readDecimal,
  roundDigits,
  significantDigits,
  type Decimal,
} from "./decimal.ts";
import type { Edge, StabilityRange } from "./types.ts";

/** A verdict on the loop at one value of the knob. */
export type Verdict = "stable" | "marginal" | "unstable";

/** Stable ranges that meet in touching edges, seen as one. */
export interface StableSpan {
  readonly from: Edge | null;
  readonly to: Edge | null;
  /** Edges inside, at which poles touch the axis and return. */
  readonly touching: readonly Edge[];
}

/** An end of a span as it is printed. */
export interface PrintedEnd {
  readonly edge: Edge;
  readonly decimal: Decimal;
  /** False where it was rounded into the range. */
  readonly exact: boolean;
}

/** Digits of a printed end. */
const END_DIGITS = 4;
/** An end that is a decimal with no more digits than this is printed as it is. */
const EXACT_DIGITS = 7;
/** More digits than a bracket of 1e-15 can support are never needed to tell two ends apart. */
const MOST_DIGITS = 16;

/** The stable ranges, those that only a touching edge parts joined into one. */
export function stableSpans(ranges: readonly StabilityRange[]): StableSpan[] {
  const spans: StableSpan[] = [];
  let open: { from: Edge | null; touching: Edge[] } | null = null;
  for (const [index, range] of ranges.entries()) {
    if (!range.stable) continue;
    open ??= { from: range.from, touching: [] };
    if (range.to && ranges[index + 1]?.stable) {
      open.touching.push(range.to);
    } else {
      spans.push({ from: open.from, to: range.to, touching: open.touching });
      open = null;
    }
  }
  return spans;
}

/** Both ends of a span, rounded into it; more digits are spent until the lower end is less than the upper. */
export function printedEnds(span: StableSpan): { from: PrintedEnd | null; to: PrintedEnd | null } {
  for (let digits = END_DIGITS; ; digits += 1) {
    const from = span.from && printedEnd(span.from, "up", digits);
    const to = span.to && printedEnd(span.to, "down", digits);
    if (digits >= MOST_DIGITS || !from || !to || compare(from.decimal, to.decimal) < 0) return { from, to };
  }
}

/** An edge as a short decimal: exact where that is possible, otherwise rounded up or down past its bracket. */
export function printedEnd(edge: Edge, direction: "up" | "down", digits: number = END_DIGITS): PrintedEnd {
  const exact = edge.exact === null ? null : fromRational(edge.exact);
  if (exact && significantDigits(exact) <= EXACT_DIGITS) return { edge, decimal: exact, exact: true };
  const bound = readDecimal(edge.bracket[direction === "up" ? 1 : 0]);
  if (!bound) throw new RangeError(`a bracket that is no decimal: ${edge.bracket.join(", ")}`);
  return { edge, decimal: roundDigits(bound, digits, direction), exact: false };
}

/** The verdict on a range of the knob. */
export function verdictOf(range: StabilityRange): Verdict {
  if (range.stable) return "stable";
  return range.unstablePoles > 0 ? "unstable" : "marginal";
}

/** The range that holds a value of the knob; a value on an edge belongs to the range below it. */
export function rangeAt(ranges: readonly StabilityRange[], knob: number): StabilityRange | undefined {
  return ranges.find((range) => range.to === null || knob <= range.to.value);
}
