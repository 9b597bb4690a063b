// The axis of settings under which the lanes are drawn: which part of the knob's line it shows, on which scale, with
// which ticks, and how far one step of the pointer goes.
import { scaleLinear, scaleLog, scaleSymlog, type ScaleContinuousNumeric } from "d3-scale";
import { fromNumber, readDecimal, roundPlace, superscript, toNumber, type Decimal } from "./decimal.ts";
import { figure } from "./format.ts";

/** What the user chose; `automatic` leaves it to the loop. */
export type AxisChoice = "automatic" | "positive" | "negative" | "linear" | "both";

/** A piece of the knob's line on a scale. */
export interface Axis {
  /** `log` for one sign, `linear`, or `both`: logarithmic away from zero on both sides, linear through it. */
  readonly scale: "log" | "linear" | "both";
  /** From left to right; ascending. */
  readonly domain: readonly [number, number];
  /** For `both`: the size of the knob at which the scale turns from linear to logarithmic. */
  readonly linearWithin: number;
}

/** What the axis must show. */
export interface Subject {
  /** Edges of the stability lane. */
  readonly stability: readonly number[];
  /** Edges of the character lane, and ends of the permitted ranges. */
  readonly character: readonly number[];
  /** The stable ranges; infinite ends allowed. */
  readonly stable: readonly (readonly [number, number])[];
  readonly setting: number | null;
  /** The smallest and the largest setting the controller takes: far beyond them there is nothing to see. */
  readonly limits?: readonly [number | null, number | null];
}

/** A tick; minor ones have no label. */
export interface Tick {
  readonly value: number;
  readonly label: string;
}

/** Maps the knob to [0, length] and back. */
export type Position = ScaleContinuousNumeric<number, number>;

/** Room left of the first and right of the last edge on a logarithmic axis, in decades, before rounding to 1, 2, 5. */
const MARGIN_DECADES = 0.35;
/** The same on a linear axis, as a part of the width. */
const MARGIN_PART = 0.12;
/** Where edges lie on both sides of zero, sizes further apart than this ratio need logarithms. */
const LINEAR_RATIO = 30;
/** Decades shown on each side of the setting of a loop without any edge, and the ends of its linear axis. */
const EMPTY_DECADES = 2;
const EMPTY_END = 10;
/** Steps of the pointer from one end of the axis to the other. */
const STEPS = 200;
/** Ticks closer together than this, in pixels, are left out. */
const MINOR_ROOM = 6;
/** At most so many decades get ticks of their own, so that a range from 1e-300 to 1e300 is drawn in a moment. */
const MOST_DECADES = 700;

/** The axis for a subject. */
export function axisFor(subject: Subject, choice: AxisChoice): Axis {
  switch (choice === "automatic" ? automatic(subject) : choice) {
    case "positive":
      return logAxis(subject, 1);
    case "negative":
      return logAxis(subject, -1);
    case "both":
      return bothAxis(subject);
    default:
      return linearAxis(subject);
  }
}

/** The choice that shows every stable range, or else every edge, and the setting. */
export function automatic(subject: Subject): Exclude<AxisChoice, "automatic"> {
  const spans = subject.stable.length > 0 ? subject.stable : subject.stability.map((edge) => [edge, edge] as const);
  const wanted = [...spans.flat(), ...(subject.setting === null ? [] : [subject.setting])];
  if (wanted.length === 0) wanted.push(...subject.character);
  const below = wanted.some((knob) => knob < 0);
  if (!below) return "positive";
  if (!wanted.some((knob) => knob > 0)) return "negative";
  const sizes = wanted.filter((knob) => knob !== 0 && Number.isFinite(knob)).map(Math.abs);
  return Math.max(...sizes) / Math.min(...sizes) > LINEAR_RATIO ? "both" : "linear";
}

/** The position on an axis of a given length. */
export function positionOn(axis: Axis, length: number): Position {
  const domain = [...axis.domain];
  if (axis.scale === "log") return scaleLog(domain, [0, length]);
  if (axis.scale === "both") return scaleSymlog(domain, [0, length]).constant(axis.linearWithin);
  return scaleLinear(domain, [0, length]);
}

/** True where the knob lies on the axis. */
export function onAxis(axis: Axis, knob: number): boolean {
  return axis.domain[0] <= knob && knob <= axis.domain[1];
}

/** The knob at a position, as a number with no more digits than one part of the axis in `parts` can tell apart. */
export function settingAt(axis: Axis, place: number, parts: number): Decimal {
  const position = positionOn(axis, 1);
  const inside = Math.min(1, Math.max(0, place));
  const size = Math.abs(position.invert(inside + 1 / parts) - position.invert(inside));
  const digit = Math.floor(Math.log10(size));
  const knob = Math.min(axis.domain[1], Math.max(axis.domain[0], position.invert(inside)));
  const rounded = roundPlace(fromNumber(knob), digit, "nearest");
  if (onAxis(axis, toNumber(rounded))) return rounded;
  return roundPlace(fromNumber(knob), digit, knob > toNumber(rounded) ? "up" : "down");
}

/** The setting so many steps away; the end of the axis stops it. */
export function stepFrom(axis: Axis, setting: number, steps: number): Decimal {
  const clamped = Math.min(axis.domain[1], Math.max(axis.domain[0], setting));
  return settingAt(axis, positionOn(axis, 1)(clamped) + steps / STEPS, STEPS);
}

/** Ticks for an axis of a given length; labels keep a distance of `room`. */
export function ticksOn(axis: Axis, length: number, room: number): Tick[] {
  const position = positionOn(axis, length);
  if (axis.scale === "linear") {
    const scale = scaleLinear([...axis.domain], [0, length]);
    return scale.ticks(Math.max(2, Math.floor(length / (2 * room)))).map((value) => ({ value, label: tickText(value) }));
  }
  const taken: number[] = [];
  const ticks: Tick[] = [];
  for (const { value, rank } of candidates(axis)) {
    const x = position(value);
    const free = taken.every((other) => Math.abs(other - x) >= room);
    if (rank < 2 && free) taken.push(x);
    if (rank < 2 || minorRoom(axis, length) >= MINOR_ROOM) ticks.push({ value, label: rank < 2 && free ? tickText(value) : "" });
  }
  return ticks.sort((left, right) => left.value - right.value);
}

/** Figures on axes: plain up to a million, powers of ten beyond. */
export function tickText(value: number): string {
  const power = Math.log10(Math.abs(value));
  if (value !== 0 && (power >= 6 || power < -3.5) && Number.isInteger(Math.round(power * 1e9) / 1e9)) {
    return `${value < 0 ? "−" : ""}10${superscript(Math.round(power))}`;
  }
  return figure(value, 12);
}

/** Pixels between ticks, on the average, if each of a decade's nine is drawn. */
function minorRoom(axis: Axis, length: number): number {
  const sizes = axis.domain.map((end) => Math.max(Math.abs(end), axis.linearWithin));
  const decades =
    axis.scale === "log"
      ? Math.abs(Math.log10(Math.abs(axis.domain[1] / axis.domain[0])))
      : sizes.reduce((sum, size) => sum + Math.log10(size / axis.linearWithin), 0);
  return length / Math.max(decades, 1) / 9;
}

/** Values for ticks with their rank: 0 for decades and zero, 1 for their doubles and fives, 2 for the rest. */
function candidates(axis: Axis): { value: number; rank: number }[] {
  const [low, high] = axis.domain;
  const largest = Math.max(Math.abs(low), Math.abs(high));
  const smallest = axis.scale === "log" ? Math.min(Math.abs(low), Math.abs(high)) : axis.linearWithin;
  const last = Math.floor(Math.log10(largest) + 1e-9);
  const first = Math.max(last - MOST_DECADES, Math.floor(Math.log10(smallest) + 1e-9));
  const found = axis.scale === "both" ? [{ value: 0, rank: 0 }] : [];
  for (const rank of [0, 1, 2]) {
    const leading = [[1], [2, 5], [3, 4, 6, 7, 8, 9]][rank] ?? [];
    for (let power = first; power <= last; power += 1) {
      for (const digit of leading) {
        const size = Number(`${digit}e${power}`);
        for (const value of [size, -size]) {
          if (onAxis(axis, value) && size >= smallest * (1 - 1e-9)) found.push({ value, rank });
        }
      }
    }
  }
  return found;
}

function logAxis(subject: Subject, sign: 1 | -1): Axis {
  const side = (values: readonly number[]): number[] => values.map((value) => value * sign).filter((value) => value > 0);
  const edges = side([...subject.stability, ...subject.character]);
  const setting = side(subject.setting === null ? [] : [subject.setting]);
  const middle = setting[0] ?? 1;
  const shown = edges.length > 0 ? [...edges, ...setting] : [middle / 10 ** EMPTY_DECADES, middle * 10 ** EMPTY_DECADES];
  const [least, most] = (sign === 1 && subject.limits) || [null, null];
  // Where the controller ends before the edges do, the axis ends with the controller, but never before the setting.
  const first = Math.min(Math.max(Math.min(...shown) / 10 ** MARGIN_DECADES, least ?? 0), ...setting);
  const last = Math.max(Math.min(Math.max(...shown) * 10 ** MARGIN_DECADES, most ?? Infinity), ...setting);
  const low = roundOutwards(first < last ? first : Math.min(...shown), -1);
  const high = roundOutwards(first < last ? last : Math.max(...shown) * 10 ** MARGIN_DECADES, 1);
  return { scale: "log", domain: sign === 1 ? [low, high] : [-high, -low], linearWithin: low };
}

function linearAxis(subject: Subject): Axis {
  const frame = framed(subject);
  const low = Math.min(0, ...frame);
  const high = Math.max(0, ...frame);
  const margin = (high - low) * MARGIN_PART || EMPTY_END;
  const [from = -EMPTY_END, to = EMPTY_END] = scaleLinear([low - margin, high + margin], [0, 1]).nice(20).domain();
  return { scale: "linear", domain: [from, to], linearWithin: 0 };
}

function bothAxis(subject: Subject): Axis {
  const frame = framed(subject).filter((value) => value !== 0);
  const smallest = frame.length > 0 ? Math.min(...frame.map(Math.abs)) : 1;
  const end = (sign: 1 | -1): number => {
    const side = frame.map((value) => value * sign).filter((value) => value > 0);
    return sign * roundOutwards(Math.max(smallest, ...side) * 10 ** MARGIN_DECADES, 1);
  };
  return { scale: "both", domain: [end(-1), end(1)], linearWithin: roundOutwards(smallest, -1) };
}

/** What an axis through zero frames: the edges of stability, or of character where there are none, and the setting. */
function framed(subject: Subject): number[] {
  const edges = subject.stability.length > 0 ? subject.stability : subject.character;
  return [...edges, ...(subject.setting === null ? [] : [subject.setting])];
}

/** The next of 1, 2, 5, 10, … away from (`towards` = 1) or near to zero (−1). */
function roundOutwards(size: number, towards: 1 | -1): number {
  const power = Math.floor(Math.log10(size));
  const steps = [0.5, 1, 2, 5, 10].map((digit) => toNumber(readDecimal(`${digit}e${power}`) ?? fromNumber(size)));
  const slack = size * 1e-9;
  const found = towards === 1 ? steps.find((step) => step >= size - slack) : steps.filter((step) => step <= size + slack).at(-1);
  return found ?? size;
}
