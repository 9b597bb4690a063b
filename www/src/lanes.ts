// What stands in the lanes under the ruler: segments with their words, longest first, and the edges between them.
import { counted } from "./format.ts";
import { verdictOf } from "./ranges.ts";
import type { CharacterRange, Edge, Record as Findings, StabilityRange } from "./types.ts";

/** A piece of a lane. */
export interface Segment {
  /** Ends on the knob's line; infinite where open. */
  readonly from: number;
  readonly to: number;
  /** How it is drawn. */
  readonly look: "stable" | "marginal" | "unstable" | "real" | "one-pair" | "more-pairs";
  /** Words to write in it, the longest first; the first that fits is taken. */
  readonly words: readonly string[];
}

/** A lane. */
export interface Lane {
  readonly name: string;
  readonly segments: readonly Segment[];
  readonly edges: readonly Edge[];
}

/** The stability lane. */
export function stabilityLane(record: Findings): Lane {
  return {
    name: "Stability",
    segments: record.stability.map((range) => ({ ...span(range), look: verdictOf(range), words: [stabilityWords(range)] })),
    edges: inner(record.stability),
  };
}

/** The character lane. */
export function characterLane(record: Findings): Lane {
  return {
    name: "Character",
    segments: record.character.map((range) => ({
      ...span(range),
      look: range.pairs === 0 ? "real" : range.pairs === 1 ? "one-pair" : "more-pairs",
      words: characterWords(range),
    })),
    edges: inner(record.character),
  };
}

/** "stable", "2 unstable poles", "2 poles on the axis". */
export function stabilityWords(range: StabilityRange): string {
  if (range.stable) return "stable";
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

function inner(ranges: readonly { to: Edge | null }[]): Edge[] {
  return ranges.flatMap((range) => (range.to ? [range.to] : []));
}
