// Records for the tests: small, invented, with only what a test needs spelled out.
import type { CharacterRange, Edge, Record as Findings, StabilityRange } from "../src/types.ts";

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
      format: "stayband-project/1",
      title: "",
      loop: { controller: "K", plant: "1/s", sensor: "1", feedback: "negative" },
      quantities: [{ symbol: "K", value: "", unit: "V", meaning: "" }],
      knob: "K",
      setting: { value: "" },
    },
    reading: { controller: null, plant: null, sensor: null, names: ["K"] },
    model: { order: 3, knobDegree: 1, coefficients: [], mathml: "" },
    stability: ranges,
    character: [whole],
    landmarks: [],
    asymptotes: null,
    realAxis: null,
    poles: [],
    zeros: [],
    closedLoop: null,
    view: { re: [-1, 1], im: [-1, 1] },
    notices: [],
    ...parts,
  };
}
