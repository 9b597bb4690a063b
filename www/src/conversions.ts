// Common scales of controllers with their conversion to the knob.
import { fromNumber, roundDigits, typedText } from "./decimal.ts";
import { withScale } from "./project.ts";
import { toSetting } from "./scale.ts";
import type { Direction, Project, Record as Findings } from "./types.ts";

/** A scale to choose. */
export interface Conversion {
  /** What the knob must be in the model. */
  readonly knob: string;
  readonly name: string;
  readonly unit: string;
  readonly direction: Direction;
  /** As it is typed into the form. */
  readonly factor: string;
  /** The factor as a number, to carry the present setting over. */
  readonly value: number;
}

const RATIO = "knob: gain without unit";
const POSITION = "knob: position-loop gain in 1/s";
const TIME = "knob: integral time in s";
const RATE = "knob: 1/integral time, in 1/s";

/** The scales that are offered. */
export const CONVERSIONS: readonly Conversion[] = [
  { knob: RATIO, name: "proportional band", unit: "%", direction: "reciprocal", factor: "100", value: 100 },
  { knob: RATIO, name: "gain", unit: "%", direction: "proportional", factor: "1/100", value: 0.01 },
  { knob: POSITION, name: "position-loop gain", unit: "1/s", direction: "proportional", factor: "1", value: 1 },
  { knob: POSITION, name: "position-loop gain", unit: "(m/min)/mm", direction: "proportional", factor: "1000/60", value: 1000 / 60 },
  { knob: POSITION, name: "position-loop gain", unit: "(in/min)/mil", direction: "proportional", factor: "1000/60", value: 1000 / 60 },
  { knob: TIME, name: "integral time", unit: "s", direction: "proportional", factor: "1", value: 1 },
  { knob: TIME, name: "integral time", unit: "min", direction: "proportional", factor: "60", value: 60 },
  { knob: TIME, name: "integral action", unit: "repeats/min", direction: "reciprocal", factor: "60", value: 60 },
  { knob: RATE, name: "integral time", unit: "s", direction: "reciprocal", factor: "1", value: 1 },
  { knob: RATE, name: "integral time", unit: "min", direction: "reciprocal", factor: "1/60", value: 1 / 60 },
  { knob: RATE, name: "integral action", unit: "repeats/min", direction: "proportional", factor: "1/60", value: 1 / 60 },
];

/** Digits of the present setting on its new scale. */
const DIGITS = 4;

/** "proportional band, % (knob = 100 ÷ setting)". */
export function conversionText({ name, unit, direction, factor, value }: Conversion): string {
  const shown = factor === "1000/60" ? "16.667" : factor;
  if (direction === "proportional") return value === 1 ? `${name}, ${unit} (knob = setting)` : `${name}, ${unit} (knob = ${shown} × setting)`;
  return `${name}, ${unit} (knob = ${shown} ÷ setting)`;
}

/** The project on another scale; the knob stays where it is, to a few digits. Limits of the old scale are dropped. */
export function withConversion(project: Project, conversion: Conversion, record: Findings | null): Project {
  const { name, unit, direction, factor, value } = conversion;
  const knob = record?.closedLoop?.knob;
  const setting = knob === undefined ? NaN : toSetting({ ...conversionScale, direction, factor: value }, knob);
  const carried = Number.isFinite(setting) ? typedText(roundDigits(fromNumber(setting), DIGITS, "nearest")) : "";
  return withScale(project, { name, unit, direction, factor, minimum: "", maximum: "", step: "", value: carried });
}

const conversionScale = { name: "", unit: "", minimum: null, maximum: null, step: null };
