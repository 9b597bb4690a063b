// Records for the tests: small, invented, with only what a test needs spelled out.
import { emptyProject } from "../src/project.ts";
import type { CharacterRange, ClosedPole, Edge, LimitEdge, LimitRange, Record as Findings, RequirementRecord, Scale, StabilityRange } from "../src/types.ts";

/** An edge at a value; parts may be given otherwise. */
export function edge(value: number, parts: Partial<Edge> = {}): Edge {
  return {
    value,
    bracket: [String(value), String(value)],
    exact: null,
    proven: true,
    kind: "axis crossing",
    omega: 5,
    omegas: [5],
    touching: false,
    unstablePoles: 0,
    axisPoles: 2,
    name: "marginally stable",
    ...parts,
  };
}

/** Ranges of the whole line from edges and the unstable poles between them. */
export function stability(edges: readonly Edge[], unstable: readonly number[]): StabilityRange[] {
  return unstable.map((unstablePoles, index) => ({
    from: edges[index - 1] ?? null,
    to: edges[index] ?? null,
    unstablePoles,
    axisPoles: 0,
    atLeast: false,
    stable: unstablePoles === 0,
  }));
}

/** A record of a loop with the knob K in V. */
export function record(ranges: StabilityRange[], parts: Partial<Findings> = {}): Findings {
  const whole: CharacterRange = { from: null, to: null, realPoles: 3, pairs: 0, name: "overdamped" };
  return {
    format: "stayband-record/1",
    program: { version: "0", hash: null },
    project: {
      ...emptyProject(),
      loop: { ...emptyProject().loop, controller: "K", plant: "1/s" },
      quantities: [{ symbol: "K", value: "", unit: "V", meaning: "", tolerance: "" }],
      knob: "K",
    },
    reading: { controller: null, plant: null, sensor: null, names: ["K"] },
    model: { order: 3, knobDegree: 1, coefficients: [], mathml: "" },
    timing: { plane: "s", deadTime: 0, deadTimePerKnob: 0, sampling: null },
    stability: ranges,
    character: [whole],
    landmarks: [],
    asymptotes: null,
    realAxis: null,
    poles: [],
    zeros: [],
    closedLoop: null,
    scale: { name: "K", unit: "", direction: "proportional", factor: 1, minimum: null, maximum: null, step: null },
    requirements: [],
    figures: [],
    permitted: { knob: [], setting: [], proven: true, suggested: null, conflict: null },
    margins: null,
    step: null,
    load: null,
    view: { re: [-1, 1], im: [-1, 1] },
    notices: [],
    sheet: null,
    ...parts,
  };
}

/** A proportional band in %: knob = 100 ÷ setting. */
export const BAND: Scale = { name: "band", unit: "%", direction: "reciprocal", factor: 100, minimum: null, maximum: null, step: 1 };

/** An end of a limit's range on a scale. */
export function limitEdge(knob: number, parts: Partial<LimitEdge> = {}): LimitEdge {
  const cause = { kind: "requirement", requirement: "damping-ratio" } as const;
  return { knob, setting: knob, bracket: [String(knob), String(knob)], proven: true, cause, ...parts };
}

/** A limit's range between two knobs; null is open. */
export function limitRange(from: number | null, to: number | null): LimitRange {
  return { from: from === null ? null : limitEdge(from), to: to === null ? null : limitEdge(to) };
}

/** A requirement on the damping ratio, met at the setting. */
export function requirement(parts: Partial<RequirementRecord> = {}): RequirementRecord {
  return { kind: "damping-ratio", limit: 0.5, atLeast: true, unit: "", ranges: [], proven: true, figure: 0.6, met: true, remark: null, ...parts };
}

/** A pole of the closed loop. */
export function pole(re: number, im: number, parts: Partial<ClosedPole> = {}): ClosedPole {
  return { re, im, radius: 1e-12, multiplicity: 1, equivalent: null, dampingRatio: null, naturalFrequency: 0, ...parts };
}
