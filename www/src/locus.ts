// Geometry of the locus in the s-plane: pieces by verdict, the nearest point, what the picture frames. No DOM.
import { rangeAt, verdictOf, type Verdict } from "./ranges.ts";
import type { KnobSign, LimitRange, StabilityRange, View } from "./types.ts";

/** A branch as the engine delivers it: `re, im, knob` for every vertex, |knob| growing. */
export interface BranchLine {
  readonly sign: KnobSign;
  readonly points: Float64Array;
}

/** What the lanes say to a point of a branch. */
export type Standing = "permitted" | Verdict;

/** A piece of a branch with one verdict: `re, im` for every vertex. */
export interface Piece {
  readonly verdict: Standing;
  readonly points: readonly number[];
}

/** A point of a branch. */
export interface LocusPoint {
  readonly re: number;
  readonly im: number;
  readonly knob: number;
}

/** A rectangle of the s-plane. */
export interface Window {
  readonly re: readonly [number, number];
  readonly im: readonly [number, number];
}

/** Cuts a branch at the edges of the stability ranges and of the permitted ranges of the knob. */
export function piecesOf(branch: BranchLine, ranges: readonly StabilityRange[], permitted: readonly LimitRange[] = []): Piece[] {
  const stability = ranges.flatMap((range) => (range.to ? [range.to.value] : []));
  const limits = permitted.flatMap(({ from, to }) => [from, to].flatMap((edge) => (edge ? [edge.knob] : [])));
  const edges = [...new Set([...stability, ...limits])].sort((left, right) => left - right);
  const pieces: { verdict: Standing; points: number[] }[] = [];
  const draw = (from: LocusPoint, to: LocusPoint): void => {
    const verdict = standing(Number.isFinite(to.knob) ? (from.knob + to.knob) / 2 : to.knob, ranges, permitted);
    const last = pieces.at(-1);
    if (last?.verdict === verdict) last.points.push(to.re, to.im);
    else pieces.push({ verdict, points: [from.re, from.im, to.re, to.im] });
  };
  for (let index = 3; index + 2 < branch.points.length; index += 3) {
    let from = vertex(branch.points, index - 3);
    const to = vertex(branch.points, index);
    for (const cut of cutsBetween(edges, from.knob, to.knob)) {
      const at = between(from, to, cut);
      draw(from, at);
      from = at;
    }
    draw(from, to);
  }
  return pieces;
}

function standing(knob: number, ranges: readonly StabilityRange[], permitted: readonly LimitRange[]): Standing {
  const inside = ({ from, to }: LimitRange): boolean => (from?.knob ?? -Infinity) <= knob && knob <= (to?.knob ?? Infinity);
  if (permitted.some(inside)) return "permitted";
  const range = rangeAt(ranges, knob);
  return range ? verdictOf(range) : "unstable";
}

/** The point of the branches nearest to a place, with distances measured after scaling by `scale` pixels per unit. */
export function nearestPoint(
  branches: readonly BranchLine[],
  place: { readonly re: number; readonly im: number },
  scale: number,
): { point: LocusPoint; sign: KnobSign; distance: number } | null {
  let best: { point: LocusPoint; sign: KnobSign; distance: number } | null = null;
  for (const { points, sign } of branches) {
    for (let index = 3; index + 2 < points.length; index += 3) {
      const from = vertex(points, index - 3);
      const to = vertex(points, index);
      const point = along(from, to, projection(from, to, place));
      const distance = Math.hypot(point.re - place.re, point.im - place.im) * scale;
      if (best === null || distance < best.distance) best = { point, sign, distance };
    }
  }
  return best;
}

/** The smallest window of the shape `width` to `height` with equal scales that shows all of the view. */
export function frameOf(view: View, width: number, height: number): Window {
  const spanRe = view.re[1] - view.re[0];
  const spanIm = view.im[1] - view.im[0];
  const unit = Math.max(spanRe / width, spanIm / height) || 1 / Math.min(width, height);
  const around = (ends: readonly [number, number], length: number): [number, number] => {
    const middle = (ends[0] + ends[1]) / 2;
    return [middle - (unit * length) / 2, middle + (unit * length) / 2];
  };
  return { re: around(view.re, width), im: around(view.im, height) };
}

/** The parts of a polyline of `x, y` pairs inside a rectangle; far vertices would exceed what a picture can hold. */
export function clipLine(points: readonly number[], box: readonly [number, number, number, number]): number[][] {
  const parts: number[][] = [];
  let open: number[] | null = null;
  for (let index = 2; index + 1 < points.length; index += 2) {
    const [x0 = 0, y0 = 0, x1 = 0, y1 = 0] = points.slice(index - 2, index + 2);
    const kept = clipSegment(x0, y0, x1, y1, box);
    if (!kept) {
      open = null;
      continue;
    }
    const [fromX, fromY, toX, toY] = kept;
    if (open && fromX === x0 && fromY === y0) {
      open.push(toX, toY);
    } else {
      open = [fromX, fromY, toX, toY];
      parts.push(open);
    }
    if (toX !== x1 || toY !== y1) open = null;
  }
  return parts;
}

/** Liang and Barsky's clipping of a segment (ACM Transactions on Graphics 3, 1984): the part of the parameter inside. */
function clipSegment(
  x0: number,
  y0: number,
  x1: number,
  y1: number,
  [left, top, right, bottom]: readonly [number, number, number, number],
): [number, number, number, number] | null {
  let enter = 0;
  let leave = 1;
  const sides = [
    [x0 - x1, x0 - left],
    [x1 - x0, right - x0],
    [y0 - y1, y0 - top],
    [y1 - y0, bottom - y0],
  ] as const;
  for (const [slope, room] of sides) {
    if (slope === 0 && room < 0) return null;
    if (slope < 0) enter = Math.max(enter, room / slope);
    if (slope > 0) leave = Math.min(leave, room / slope);
  }
  if (enter > leave) return null;
  const at = (part: number): [number, number] =>
    part === 0 ? [x0, y0] : part === 1 ? [x1, y1] : [x0 + part * (x1 - x0), y0 + part * (y1 - y0)];
  return [...at(enter), ...at(leave)];
}

function vertex(points: Float64Array, index: number): LocusPoint {
  return { re: points[index] ?? 0, im: points[index + 1] ?? 0, knob: points[index + 2] ?? 0 };
}

/** Edges strictly between two knob values, in the order in which they are met. */
function cutsBetween(edges: readonly number[], from: number, to: number): number[] {
  const met = edges.filter((edge) => (from < edge && edge < to) || (to < edge && edge < from));
  return to < from ? met.reverse() : met;
}

function between(from: LocusPoint, to: LocusPoint, knob: number): LocusPoint {
  // Where the segment runs to infinite knob its far end is the zero itself: an edge beyond the last finite vertex is
  // invisibly close to it.
  const part = Number.isFinite(to.knob) ? (knob - from.knob) / (to.knob - from.knob) : 1;
  return { ...along(from, to, part), knob };
}

function along(from: LocusPoint, to: LocusPoint, part: number): LocusPoint {
  const mix = (start: number, end: number): number => (part === 0 ? start : part === 1 ? end : start + part * (end - start));
  const knob = Number.isFinite(to.knob) ? mix(from.knob, to.knob) : part < 1 ? from.knob : to.knob;
  return { re: mix(from.re, to.re), im: mix(from.im, to.im), knob };
}

function projection(from: LocusPoint, to: LocusPoint, place: { readonly re: number; readonly im: number }): number {
  const re = to.re - from.re;
  const im = to.im - from.im;
  const length = re * re + im * im;
  if (length === 0) return 0;
  return Math.min(1, Math.max(0, ((place.re - from.re) * re + (place.im - from.im) * im) / length));
}
