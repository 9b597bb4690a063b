// The limits that requirements draw into the s-plane.
import { quantity } from "./reason.ts";
import type { Record as Findings } from "./types.ts";

/** A limit in the s-plane; poles must stay out of it, or for a circle that is not `inside`, one of them within. */
export type Forbidden = { readonly words: string } & (
  | { readonly shape: "ray"; readonly ratio: number }
  | { readonly shape: "line"; readonly rate: number }
  | { readonly shape: "circle"; readonly radius: number; readonly inside: boolean }
);

/** The limits of the requirements that are switched on. */
export function forbiddenOf(record: Findings): Forbidden[] {
  return record.requirements.flatMap(({ kind, limit }): Forbidden[] => {
    switch (kind) {
      case "damping-ratio":
        return [{ shape: "ray", ratio: limit, words: `damping ratio ${quantity(limit, "")}` }];
      case "decay-rate":
        return [{ shape: "line", rate: limit, words: `decay rate ${quantity(limit, "1/s")}` }];
      case "natural-frequency-minimum":
        return [{ shape: "circle", radius: limit, inside: true, words: `natural frequency at least ${quantity(limit, "rad/s")}` }];
      case "natural-frequency-maximum":
        return [{ shape: "circle", radius: limit, inside: false, words: `slowest natural frequency at most ${quantity(limit, "rad/s")}` }];
      default:
        return [];
    }
  });
}
