// What stands in the lanes under the ruler: segments with their words, longest first, and the edges between them.
//
// All places are settings: the lanes stand on the controller's own scale.
import type { AnyEdge } from "./answer.ts";
import { typedSetting } from "./answer.ts";
import { printedText } from "./decimal.ts";
import { counted } from "./format.ts";
import { printedEnds, stableSpans, verdictOf } from "./ranges.ts";
import { failing, happening, limitWords } from "./reason.ts";
import { kindOf } from "./requirements.ts";
import { limitSpan, onScale } from "./scale.ts";
import type { CharacterRange, Edge, LimitRange, Plane, Record as Findings, RequirementRecord, StabilityRange } from "./types.ts";

/** A piece of a lane. */
export interface Segment {
  /** Ends on the axis of settings; infinite where open. */
  readonly from: number;
  readonly to: number;
  /** How it is drawn. */
  readonly look: "stable" | "marginal" | "unstable" | "real" | "one-pair" | "more-pairs" | "met" | "permitted";
  /** Words to write in it, the longest first; the first that fits is taken. */
  readonly words: readonly string[];
}

/** An edge of a lane. */
export interface LaneEdge {
  /** On the axis of settings. */
  readonly place: number;
  readonly edge: AnyEdge;
  /** What happens there, in a sentence. */
  readonly words: string;
}

/** A lane. */
export interface Lane {
  readonly name: string;
  readonly segments: readonly Segment[];
  readonly edges: readonly LaneEdge[];
  /** Short words at its right end. */
  readonly text: string;
  /** Words in the middle of a lane without segments. */
  readonly empty: string;
}

/** All lanes of a record, from top to bottom. */
export function lanesOf(record: Findings): Lane[] {
  return [
    stabilityLane(record),
    // Of a loop with dead time there is none: it has infinitely many pairs of poles.
    ...(record.character.length > 0 ? [characterLane(record)] : []),
    ...record.requirements.map((requirement) => requirementLane(record, requirement)),
    permittedLane(record),
  ];
}

/**
 * The lanes of another project that is compared with the present one. Their edges are not to be asked for reasons: those
 * are given on the scale of the present project.
 */
export function otherLanes(other: Findings): Lane[] {
  return [stabilityLane(other), permittedLane(other)].map((lane) => ({ ...lane, name: `Other: ${lane.name.toLowerCase()}`, edges: [] }));
}

/** The stability lane. */
export function stabilityLane(record: Findings): Lane {
  const ranges = onScale(record).stability;
  return {
    name: "Stability",
    segments: ranges.map((range) => ({ ...span(range), look: verdictOf(range), words: [stabilityWords(range)] })),
    edges: inner(ranges, record.timing.plane),
    text: stableText(ranges),
    empty: "",
  };
}

/** The character lane. */
export function characterLane(record: Findings): Lane {
  const ranges = onScale(record).character;
  return {
    name: "Character",
    segments: ranges.map((range) => ({
      ...span(range),
      look: range.pairs === 0 ? "real" : range.pairs === 1 ? "one-pair" : "more-pairs",
      words: characterWords(range),
    })),
    edges: inner(ranges, record.timing.plane),
    text: "",
    empty: "",
  };
}

/** The lane of a requirement. */
export function requirementLane(record: Findings, requirement: RequirementRecord): Lane {
  return {
    name: kindOf(requirement.kind).name.replace(/, .*$/, ""),
    segments: requirement.ranges.flatMap((range) => segmentOf(record, range, "met", ["met"])),
    edges: requirement.ranges.flatMap((range) => edgesOf(record, range)),
    text: limitWords(requirement),
    empty: requirement.remark ?? "no setting meets it",
  };
}

/** The lane in which all others agree; the settings to type in stand in it. */
export function permittedLane(record: Findings): Lane {
  const { permitted } = record;
  const words = permitted.knob.map((_, index) => rangeText(permitted.setting[index] ?? [null, null]));
  return {
    name: "Permitted",
    segments: permitted.knob.flatMap((range, index) => segmentOf(record, range, "permitted", [words[index] ?? ""])),
    edges: permitted.knob.flatMap((range) => edgesOf(record, range)),
    text: words.length === 0 ? "nothing" : words.length === 1 ? (words[0] ?? "") : `${words.length} ranges`,
    empty: permitted.conflict?.text ?? "nothing is permitted",
  };
}

/** "30 … 44", "above 30", "below 44". */
function rangeText([low, high]: readonly [string | null, string | null]): string {
  if (low !== null && high !== null) return low === high ? typedSetting(low) : `${typedSetting(low)} … ${typedSetting(high)}`;
  if (low !== null) return `above ${typedSetting(low)}`;
  return high === null ? "every setting" : `below ${typedSetting(high)}`;
}

function segmentOf(record: Findings, range: LimitRange, look: Segment["look"], words: readonly string[]): Segment[] {
  const found = limitSpan(record.scale, range);
  return found ? [{ from: found.low, to: found.high, look, words }] : [];
}

function edgesOf(record: Findings, range: LimitRange): LaneEdge[] {
  const found = limitSpan(record.scale, range);
  return [found?.lowEdge, found?.highEdge].flatMap((edge) => {
    if (!edge || edge.setting === null) return [];
    return [{ place: edge.setting, edge, words: failing(record, edge) }];
  });
}

/** "3.858 … 236.7" for the right end of the stability lane. */
function stableText(ranges: readonly StabilityRange[]): string {
  const spans = stableSpans(ranges);
  const [only] = spans;
  if (spans.length !== 1 || !only) return spans.length === 0 ? "never stable" : `${spans.length} stable ranges`;
  const { from, to } = printedEnds(only);
  const both = from && to ? `${printedText(from.decimal)} … ${printedText(to.decimal)}` : "";
  if (both) return both;
  if (from) return `above ${printedText(from.decimal)}`;
  return to ? `below ${printedText(to.decimal)}` : "always stable";
}

/** "stable", "2 unstable poles", "2 poles on the axis". */
export function stabilityWords(range: StabilityRange): string {
  if (range.stable) return "stable";
  if (range.atLeast) return `${range.unstablePoles} or more unstable poles`;
  if (range.unstablePoles > 0) return counted(range.unstablePoles, "unstable pole");
  return `${counted(range.axisPoles, "pole")} on the axis`;
}

/** "one oscillating pair, underdamped" and shorter forms. */
export function characterWords(range: CharacterRange): string[] {
  const kinds = kindWords(range.realPoles, range.pairs);
  const short = range.pairs === 0 ? "real" : counted(range.pairs, "pair");
  const named = range.name === "unstable" ? [] : [`${kinds}, ${range.name}`];
  return [...named, kinds, short];
}

/** "all real", "one oscillating pair", "3 oscillating pairs". */
export function kindWords(realPoles: number, pairs: number): string {
  if (pairs === 0) return realPoles === 0 ? "no pole" : "all real";
  const count = ["no", "one", "two"][pairs] ?? String(pairs);
  return `${count} oscillating pair${pairs === 1 ? "" : "s"}`;
}

function span(range: { from: Edge | null; to: Edge | null }): { from: number; to: number } {
  return { from: range.from?.value ?? -Infinity, to: range.to?.value ?? Infinity };
}

function inner(ranges: readonly { to: Edge | null }[], plane: Plane): LaneEdge[] {
  return ranges.flatMap(({ to }) => (to ? [{ place: to.value, edge: to, words: happening(to, plane) }] : []));
}
