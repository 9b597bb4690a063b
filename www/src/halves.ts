// Which half of the locus is shown: the one where the loop can be stable, unless the user chooses.
import { stableSpans } from "./ranges.ts";
import type { KnobSign, Record as Findings } from "./types.ts";

/** What the user chose. */
export type HalfChoice = "automatic" | KnobSign | "both";

/** The signs of the knob that are shown. */
export function shownSigns(record: Findings, choice: HalfChoice): KnobSign[] {
  if (choice === "both") return ["positive", "negative"];
  if (choice !== "automatic") return [choice];
  const spans = stableSpans(record.stability);
  const setting = record.closedLoop?.knob;
  if (setting !== undefined && setting !== 0) return [setting > 0 ? "positive" : "negative"];
  const positive = spans.some(({ to }) => to === null || to.value > 0);
  return positive || spans.length === 0 ? ["positive"] : ["negative"];
}
