// The controller's scale: where the knob's ranges lie on the axis of settings. Only for drawing and printing; what is
// claimed about settings stands in the record.
import type { CharacterRange, Edge, LimitEdge, LimitRange, Record as Findings, Scale, StabilityRange } from "./types.ts";

/** An edge of the record, seen from the axis of settings; what it says about the knob stays in `origin`. */
export interface PlacedEdge extends Edge {
  readonly origin: Edge;
}

/** The ranges of stability and character on the axis of settings. */
export interface OnScale {
  readonly stability: readonly StabilityRange[];
  readonly character: readonly CharacterRange[];
}

/** The error of a conversion in floating point is far below this part of the value. */
const CONVERSION_ERROR = 1e-14;

/** True where setting and knob are the same number. */
export function isPlain(scale: Scale): boolean {
  return scale.direction === "proportional" && scale.factor === 1;
}

/** What the setting is called. */
export function settingName(record: Findings): string {
  return record.scale.name || record.project.knob;
}

/** The unit of the setting: the controller's, or on a plain scale without a unit that of the knob. */
export function settingUnit({ scale, project }: Findings): string {
  if (scale.unit.trim() !== "" || !isPlain(scale)) return scale.unit;
  return project.quantities.find((row) => row.symbol === project.knob)?.unit ?? "";
}

/** The setting for a knob; on a reciprocal scale knob 0 is infinitely far out. */
export function toSetting({ direction, factor }: Scale, knob: number): number {
  if (direction === "proportional") return knob / factor;
  return knob === 0 ? Math.sign(factor) * Infinity : factor / knob;
}

/** The knob at a setting. */
export function toKnob({ direction, factor }: Scale, setting: number): number {
  if (direction === "proportional") return factor * setting;
  return setting === 0 ? Math.sign(factor) * Infinity : factor / setting;
}

/** True where a larger setting means a larger knob. */
export function rises({ direction, factor }: Scale): boolean {
  return direction === "proportional" ? factor > 0 : factor < 0;
}

/** The record's ranges on the axis of settings. */
export function onScale(record: Findings): OnScale {
  const { scale, stability, character } = record;
  if (isPlain(scale)) return { stability, character };
  return { stability: placed(scale, stability), character: placed(scale, character) };
}

/** The edge of the record behind an edge on the axis of settings. */
export function originOf(edge: Edge | PlacedEdge): Edge {
  return "origin" in edge ? edge.origin : edge;
}

/** A requirement's or permitted range on the axis of settings: its places, and the edges behind them; null is open. */
export interface LimitSpan {
  readonly low: number;
  readonly high: number;
  readonly lowEdge: LimitEdge | null;
  readonly highEdge: LimitEdge | null;
}

/** A range of the record on the axis of settings; null where a reciprocal scale does not reach it. */
export function limitSpan(scale: Scale, { from, to }: LimitRange): LimitSpan | null {
  const [lower, upper] = rises(scale) ? [from, to] : [to, from];
  if (scale.direction === "proportional") {
    return { low: lower?.setting ?? -Infinity, high: upper?.setting ?? Infinity, lowEdge: lower, highEdge: upper };
  }
  // Knobs of the other sign lie beyond setting 0 or beyond infinity, which settings above zero do not reach.
  const reached = (edge: LimitEdge | null): boolean => edge !== null && edge.knob * scale.factor > 0;
  const opposite = (edge: LimitEdge | null): boolean => edge !== null && edge.knob * scale.factor <= 0;
  const [inner, outer] = scale.factor > 0 ? [from, to] : [to, from];
  if (opposite(outer) && (inner === null || opposite(inner))) return null;
  const lowEdge = reached(lower) ? lower : null;
  const highEdge = reached(upper) ? upper : null;
  return { low: lowEdge?.setting ?? 0, high: highEdge?.setting ?? Infinity, lowEdge, highEdge };
}

/** Ranges of the knob's line on the settings' line. On a reciprocal scale only settings above zero mean anything. */
function placed<Range extends { from: Edge | null; to: Edge | null }>(scale: Scale, ranges: readonly Range[]): Range[] {
  const reciprocal = scale.direction === "reciprocal";
  const side = Math.sign(scale.factor);
  const reached = (range: Range): boolean =>
    side > 0 ? range.to === null || range.to.value > 0 : range.from === null || range.from.value < 0;
  const place = (edge: Edge | null): PlacedEdge | null => {
    if (!edge || (reciprocal && edge.value * side <= 0)) return null;
    return placedEdge(scale, edge);
  };
  const found = ranges
    .filter((range) => !reciprocal || reached(range))
    .map((range): Range => {
      const [from, to] = [place(range.from), place(range.to)];
      return rises(scale) ? { ...range, from, to } : { ...range, from: to, to: from };
    });
  return rises(scale) ? found : found.reverse();
}

function placedEdge(scale: Scale, edge: Edge): PlacedEdge {
  const value = toSetting(scale, edge.value);
  const slack = Math.abs(value) * CONVERSION_ERROR;
  // A decimal of a few digits this close to the converted edge of a rational number is that edge itself.
  const near = Number(value.toPrecision(12));
  const exact = edge.exact !== null && Math.abs(near - value) <= slack ? String(near) : null;
  return { ...edge, value: exact === null ? value : near, bracket: [String(value - slack), String(value + slack)], exact, origin: edge };
}
