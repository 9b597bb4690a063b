// How the border of stability is called in the plane of the poles.
import type { Plane } from "./types.ts";

/** "the imaginary axis" or "the unit circle". */
export function borderWords(plane: Plane): string {
  return plane === "z" ? "the unit circle" : "the imaginary axis";
}

/** "right of the imaginary axis" or "outside the unit circle". */
export function beyondWords(plane: Plane): string {
  return plane === "z" ? "outside the unit circle" : "right of the imaginary axis";
}
