// The kinds of requirements as the page offers them: their names, the usual limit, and the figure they limit. Units and
// directions are the core's.
import { fromNumber, roundDigits, typedText } from "./decimal.ts";
import { REQUIREMENT_FACTS, type Record as Findings, type Requirement, type RequirementKind } from "./types.ts";

/** How the kinds are grouped. */
export type Group = "Poles" | "Margins" | "Answer to a step" | "Static" | "Load and effort";

/** A kind of requirement. */
export interface Kind {
  readonly kind: RequirementKind;
  readonly group: Group;
  /** As it stands in a lane, a row and a table. */
  readonly name: string;
  readonly unit: string;
  readonly atLeast: boolean;
  /** A limit in common use. Where there is none, the figure of the present loop makes the offer. */
  readonly usual?: string;
}

/** What the page adds to what the core knows. */
const NAMES: readonly Omit<Kind, "unit" | "atLeast">[] = [
  { kind: "damping-ratio", group: "Poles", name: "Damping ratio", usual: "0.5" },
  { kind: "decay-rate", group: "Poles", name: "Decay rate" },
  { kind: "natural-frequency-minimum", group: "Poles", name: "Natural frequency, lower limit" },
  { kind: "natural-frequency-maximum", group: "Poles", name: "Natural frequency, upper limit" },
  { kind: "gain-margin-up", group: "Margins", name: "Gain margin upward", usual: "6" },
  { kind: "gain-margin-down", group: "Margins", name: "Gain margin downward", usual: "6" },
  { kind: "phase-margin", group: "Margins", name: "Phase margin", usual: "45" },
  { kind: "delay-margin", group: "Margins", name: "Delay margin" },
  { kind: "peak-sensitivity", group: "Margins", name: "Peak sensitivity", usual: "2" },
  { kind: "bandwidth", group: "Margins", name: "Bandwidth" },
  { kind: "overshoot", group: "Answer to a step", name: "Overshoot", usual: "20" },
  { kind: "undershoot", group: "Answer to a step", name: "Undershoot", usual: "10" },
  { kind: "rise-time", group: "Answer to a step", name: "Rise time, 10 to 90 %" },
  { kind: "settling-time-2", group: "Answer to a step", name: "Settling time, 2 %" },
  { kind: "settling-time-5", group: "Answer to a step", name: "Settling time, 5 %" },
  { kind: "peak-time", group: "Answer to a step", name: "Peak time" },
  { kind: "step-error", group: "Static", name: "Static error, step", usual: "5" },
  { kind: "ramp-error", group: "Static", name: "Static error, ramp" },
  { kind: "parabola-error", group: "Static", name: "Static error, parabola" },
  { kind: "load-peak", group: "Load and effort", name: "Peak deviation, unit load" },
  { kind: "load-final", group: "Load and effort", name: "Final deviation, unit load" },
  { kind: "controller-peak", group: "Load and effort", name: "Peak controller output, unit step" },
];

/** All kinds, in the order in which they are listed. */
export const KINDS: readonly Kind[] = NAMES.map((entry) => ({ ...entry, ...REQUIREMENT_FACTS[entry.kind] }));

/** The groups in their order. */
export const GROUPS: readonly Group[] = ["Poles", "Margins", "Answer to a step", "Static", "Load and effort"];

/** Digits of a limit that is taken from the present loop. */
const OFFERED_DIGITS = 2;

/** What is known about a kind; there is an entry for every one. */
export function kindOf(kind: RequirementKind): Kind {
  const found = KINDS.find((entry) => entry.kind === kind);
  if (!found) throw new RangeError(`a requirement without an entry: ${kind}`);
  return found;
}

/** The name within a sentence: "damping ratio", "static error (step)". */
export function nameInSentence(kind: RequirementKind): string {
  const name = kindOf(kind).name.replace(/, (.*)$/, " ($1)");
  return name.charAt(0).toLowerCase() + name.slice(1);
}

/** A limit to begin with, and where it comes from. */
export interface Offer {
  readonly limit: string;
  readonly source: "usual" | "this loop" | "none";
}

/** The offer when a requirement is switched on: the usual limit, or one that the present setting just meets. */
export function offerFor(kind: Kind, record: Findings | null): Offer {
  if (kind.usual !== undefined) return { limit: kind.usual, source: "usual" };
  const figure = record ? figureOf(kind.kind, record) : null;
  if (figure === null || !Number.isFinite(figure) || figure <= 0) return { limit: "1", source: "none" };
  const limit = roundDigits(fromNumber(figure), OFFERED_DIGITS, kind.atLeast ? "down" : "up");
  return { limit: typedText(limit), source: "this loop" };
}

/** The figure at the setting, in the kind's unit; null where it is infinite or has no meaning for this loop. */
export function figureOf(kind: RequirementKind, record: Findings): number | null {
  return record.figures.find((figure) => figure.kind === kind)?.value ?? null;
}

/** Several requirements in common use. */
export interface Preset {
  readonly name: string;
  /** Where the figures come from, and how far that was confirmed. */
  readonly source: string;
  readonly requirements: readonly Requirement[];
}

/** Presets; each names its source. */
export const PRESETS: readonly Preset[] = [
  {
    name: "Margins 6 dB and 45°",
    source: "MIL-F-9490D (1975), flight control systems: figures confirmed second hand. Check your edition.",
    requirements: [
      { kind: "gain-margin-up", limit: "6" },
      { kind: "gain-margin-down", limit: "6" },
      { kind: "phase-margin", limit: "45" },
    ],
  },
  {
    name: "Margins 2.5 times (8 dB) and 60°",
    source: "B. W. Bequette, Process Control, a textbook’s advice: figures confirmed second hand. Check your edition.",
    requirements: [
      { kind: "gain-margin-up", limit: "7.96" },
      { kind: "phase-margin", limit: "60" },
    ],
  },
  {
    name: "Magnetic bearing, zone A: peak sensitivity 3 (9.5 dB)",
    source: "ISO 14839-3:2006: limit confirmed second hand. Check your edition.",
    requirements: [{ kind: "peak-sensitivity", limit: "3" }],
  },
  {
    name: "Magnetic bearing, zone B: peak sensitivity 4 (12 dB)",
    source: "ISO 14839-3:2006: limit confirmed second hand. Check your edition.",
    requirements: [{ kind: "peak-sensitivity", limit: "4" }],
  },
  {
    name: "Damping ratio 0.7",
    source: "The textbooks’ usual value; from memory, no edition checked.",
    requirements: [{ kind: "damping-ratio", limit: "0.7" }],
  },
  {
    name: "Quarter-amplitude decay: damping ratio 0.215",
    source: "J. G. Ziegler and N. B. Nichols, Trans. ASME 64 (1942): the aim is from memory; the ratio is that of a single pair. Check your edition.",
    requirements: [{ kind: "damping-ratio", limit: "0.215" }],
  },
];
