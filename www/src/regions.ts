// The areas of the s- or z-plane that are shaded: where poles are unstable, and where a requirement does not want them.
import type { ScaleLinear } from "d3-scale";
import { svg } from "./dom.ts";
import { quantity } from "./reason.ts";
import type { Plane, Record as Findings, RequirementKind } from "./types.ts";

type Scale = ScaleLinear<number, number>;

/** Points of a drawn curve: a circle as large as the picture stays within a pixel. */
const CURVE_POINTS = 96;

/** A limit in the plane; poles must stay out of it, or for a border that forbids nothing, one of them within. */
export type Limit = { readonly words: string } & (
  | { readonly shape: "ray"; readonly ratio: number }
  | { readonly shape: "line"; readonly rate: number }
  | { readonly shape: "closed"; readonly points: readonly (readonly [number, number])[]; readonly forbids: "inside" | "outside" | "nothing" }
);

/** The limits of the requirements that are switched on. */
export function limitsOf(record: Findings): Limit[] {
  const period = record.timing.plane === "z" ? (record.timing.sampling?.period ?? null) : null;
  return record.requirements.flatMap(({ kind, limit }) => {
    const words = limitWords(kind, limit);
    return words === null ? [] : [period === null ? inLaplace(kind, limit, words) : inSamples(kind, limit, period, words)];
  });
}

function limitWords(kind: RequirementKind, limit: number): string | null {
  switch (kind) {
    case "damping-ratio":
      return `damping ratio ${quantity(limit, "")}`;
    case "decay-rate":
      return `decay rate ${quantity(limit, "1/s")}`;
    case "natural-frequency-minimum":
      return `natural frequency at least ${quantity(limit, "rad/s")}`;
    case "natural-frequency-maximum":
      return `slowest natural frequency at most ${quantity(limit, "rad/s")}`;
    default:
      return null;
  }
}

/** A limit in the s-plane: a sector, a line or a circle. */
function inLaplace(kind: RequirementKind, limit: number, words: string): Limit {
  if (kind === "damping-ratio") return { shape: "ray", ratio: limit, words };
  if (kind === "decay-rate") return { shape: "line", rate: limit, words };
  const points = around((turn) => [limit * Math.cos(turn), limit * Math.sin(turn)]);
  return { shape: "closed", points, forbids: kind === "natural-frequency-minimum" ? "inside" : "nothing", words };
}

/** The same limit carried over by z = e^(s·period): a spiral, a circle around the origin, or an oval around 1. */
function inSamples(kind: RequirementKind, limit: number, period: number, words: string): Limit {
  if (kind === "damping-ratio") {
    const decay = limit / Math.sqrt(Math.max(1 - limit ** 2, 1e-12));
    const points = around((turn) => polar(Math.exp(-decay * Math.abs(turn)), turn));
    return { shape: "closed", points, forbids: "outside", words };
  }
  if (kind === "decay-rate") {
    const points = around((turn) => polar(Math.exp(-limit * period), turn));
    return { shape: "closed", points, forbids: "outside", words };
  }
  const reach = limit * period;
  const points = around((turn) => polar(Math.exp(reach * Math.cos(turn)), reach * Math.sin(turn)));
  return { shape: "closed", points, forbids: kind === "natural-frequency-minimum" ? "inside" : "nothing", words };
}

function polar(radius: number, angle: number): [number, number] {
  return [radius * Math.cos(angle), radius * Math.sin(angle)];
}

/** The points for angles from −π to π. */
function around(point: (turn: number) => readonly [number, number]): (readonly [number, number])[] {
  return Array.from({ length: CURVE_POINTS + 1 }, (_, index) => point(Math.PI * ((2 * index) / CURVE_POINTS - 1)));
}

/** The area of unstable poles. */
export function unstableArea(plane: Plane, x: Scale, y: Scale, box: readonly [number, number, number, number]): SVGElement {
  const [left, top, right, bottom] = box;
  if (plane === "z") {
    const d = `${rectangle(box)}${closedPath(around((turn) => polar(1, turn)), x, y)}`;
    return svg("path", { class: "right-half", d, "fill-rule": "evenodd" });
  }
  const from = Math.min(right, Math.max(left, x(0)));
  return svg("rect", { class: "right-half", x: from, y: top, width: right - from, height: bottom - top });
}

/** A limit of a requirement: its area, as large as the box, and its border. */
export function limitArea(limit: Limit, x: Scale, y: Scale, box: readonly [number, number, number, number]): SVGElement {
  const [left, top, right, bottom] = box;
  const [ox, oy] = [x(0), y(0)];
  const title = svg("title", {}, limit.words);
  switch (limit.shape) {
    case "ray": {
      const far = 2 * Math.hypot(right - left, bottom - top) + Math.hypot(ox - left, oy - top) + Math.hypot(ox - right, oy - bottom);
      const [dx, dy] = [far * limit.ratio, far * Math.sqrt(1 - limit.ratio ** 2)];
      const rays = `M${ox - dx} ${oy - dy}L${ox} ${oy}L${ox - dx} ${oy + dy}`;
      return svg("g", { class: "forbidden" }, title, svg("path", { class: "area", d: `${rays}L${ox + far} ${oy + dy}V${oy - dy}Z` }), svg("path", { class: "border", d: rays }));
    }
    case "line": {
      const at = x(-limit.rate);
      const from = Math.max(left, Math.min(right, at));
      const area = svg("rect", { class: "area", x: from, y: top, width: right - from, height: bottom - top });
      return svg("g", { class: "forbidden" }, title, area, svg("path", { class: "border", d: `M${at} ${top}V${bottom}` }));
    }
    case "closed": {
      const border = closedPath(limit.points, x, y);
      const d = limit.forbids === "outside" ? rectangle(box) + border : border;
      const area = limit.forbids === "nothing" ? null : svg("path", { class: "area", d, "fill-rule": "evenodd" });
      return svg("g", { class: "forbidden" }, title, area, svg("path", { class: "border", d: border }));
    }
  }
}

function rectangle([left, top, right, bottom]: readonly [number, number, number, number]): string {
  return `M${left} ${top}H${right}V${bottom}H${left}Z`;
}

function closedPath(points: readonly (readonly [number, number])[], x: Scale, y: Scale): string {
  return `M${points.map(([re, im]) => `${x(re).toFixed(2)} ${y(im).toFixed(2)}`).join("L")}Z`;
}
