// What the pictures of responses hold: curves, forbidden areas, marks and readouts, taken from the record. No DOM.
import { settingText } from "./answer.ts";
import { figure, withUnit } from "./format.ts";
import { limitWords, quantity } from "./reason.ts";
import { nameInSentence } from "./requirements.ts";
import { settingName, settingUnit, toSetting } from "./scale.ts";
import type { Curve, Margins, Record as Findings, RequirementKind } from "./types.ts";

/** The pictures to choose from. */
export type ChartName = "step" | "load" | "controller" | "open loop";

/** A curve. */
export interface Series {
  readonly name: string;
  /** `edge`: at an end of the permitted range, faint behind the one at the setting. */
  readonly look: "main" | "edge";
  readonly x: readonly number[];
  readonly y: readonly number[];
}

/** A rectangle the curve must stay out of; infinite sides run to the border. */
export interface Area {
  readonly x: readonly [number, number];
  readonly y: readonly [number, number];
  readonly words: string;
}

/** A straight line; infinite ends run to the border. With words, they stand at its end. */
export interface Mark {
  readonly look: "level" | "limit" | "margin";
  readonly from: readonly [number, number];
  readonly to: readonly [number, number];
  readonly words: string;
}

/** A dot on a curve. */
export interface Dot {
  readonly x: number;
  readonly y: number;
  readonly words: string;
}

/** One of the pictures that stand above each other on the same abscissa. */
export interface Pane {
  readonly yName: string;
  readonly yUnit?: string;
  readonly yDomain: readonly [number, number];
  /** Where ticks stand at multiples of a number, as for degrees. */
  readonly yStep?: number;
  readonly series: readonly Series[];
  readonly areas: readonly Area[];
  readonly marks: readonly Mark[];
  readonly dots: readonly Dot[];
}

/** A picture. */
export interface Chart {
  readonly title: string;
  readonly xName: string;
  readonly xUnit: string;
  readonly xLog: boolean;
  readonly xDomain: readonly [number, number];
  readonly panes: readonly Pane[];
  /** The marks and limits in words. */
  readonly words: string;
}

/** Room above and below the curves, as a part of their extent. */
const ROOM = 0.08;
/** Curves at the edges may stretch the picture to so many times the final value, not more. */
const MOST_STRETCH = 2.5;
/** Magnitudes beyond these lie outside of the picture, in dB. */
const MAGNITUDES: readonly [number, number] = [-80, 80];
/** Rows of a picture's table. */
const TABLE_ROWS = 11;

/** A picture; where there is none, the reason in words. */
export function chartOf(name: ChartName, record: Findings): Chart | string {
  const missing = missingWords(record);
  if (missing !== null) return missing;
  switch (name) {
    case "step":
      return stepChart(record) ?? "The answer to a step cannot be drawn for this loop.";
    case "load":
      return loadChart(record) ?? "The answer to a load cannot be drawn for this loop.";
    case "controller":
      return controllerChart(record) ?? "On a step of the command this controller’s output is infinite at the first moment: it has more zeros than poles.";
    case "open loop":
      return record.margins ? openLoopChart(record, record.margins) : "The open loop cannot be drawn for this setting.";
  }
}

/** The value of a curve at a place, straight between its points; NaN outside. */
export function valueAt(x: readonly number[], y: readonly number[], place: number): number {
  const above = x.findIndex((value) => value >= place);
  const [x1, y1] = [x[above], y[above]];
  if (x1 === undefined || y1 === undefined) return NaN;
  const [x0, y0] = [x[above - 1], y[above - 1]];
  if (x0 === undefined || y0 === undefined || x1 === x0) return x1 === place ? y1 : NaN;
  return y0 + ((place - x0) / (x1 - x0)) * (y1 - y0);
}

/** The figures of all curves at a place, for the readout. */
export function readingAt(chart: Chart, place: number): string[] {
  const curves = chart.panes.flatMap(({ series, yUnit = "" }) =>
    series.map(({ name, x, y, look }) => {
      const value = valueAt(x, y, place);
      return Number.isNaN(value) ? "" : `${look === "main" ? "" : "at "}${name}: ${quantity(value, yUnit, 3)}`;
    }),
  );
  const [label = ""] = chart.xName.split(",");
  return [`${label} ${withUnit(figure(place, 3), chart.xUnit)}`, ...curves.filter((text) => text !== "")];
}

/** The curves as a table with a few rows: the head, then the rows. */
export function tableOf(chart: Chart): { head: string[]; rows: string[][] } {
  const series = chart.panes.flatMap((pane) => pane.series.map((one) => ({ ...one, yName: pane.yName })));
  const [low, high] = chart.xDomain;
  const places = Array.from({ length: TABLE_ROWS }, (_, index) => {
    const part = index / (TABLE_ROWS - 1);
    return chart.xLog ? low * (high / low) ** part : low + part * (high - low);
  });
  const cell = (x: readonly number[], y: readonly number[], place: number): string => {
    const value = valueAt(x, y, place);
    return Number.isNaN(value) ? "–" : figure(value, 3);
  };
  return {
    head: [chart.xName, ...series.map(({ name, look, yName }) => (look === "main" ? yName : `${yName} at ${name}`))],
    rows: places.map((place) => [figure(place, 3), ...series.map(({ x, y }) => cell(x, y, place))]),
  };
}

/** "setting 37 V/mm". */
export function atSetting(record: Findings): string {
  const unit = settingUnit(record);
  return `setting ${withUnit(settingText(record), unit)}`;
}

function missingWords({ closedLoop, step, load, margins }: Findings): string | null {
  if (!closedLoop) return "No setting is chosen yet: drag the pointer or type one.";
  if (step || load || margins) return null;
  return "At this setting the loop is not stable: there is no answer that settles, and no margin.";
}

function limitOf(record: Findings, kind: RequirementKind): number | null {
  return record.requirements.find((requirement) => requirement.kind === kind)?.limit ?? null;
}

function wordsOf(record: Findings, kinds: readonly RequirementKind[]): string {
  const drawn = record.requirements.filter(({ kind }) => kinds.includes(kind));
  return drawn.map((requirement) => `${nameInSentence(requirement.kind)} ${limitWords(requirement)}`).join(", ");
}

const LARGE = Infinity;

function stepChart(record: Findings): Chart | null {
  const { step } = record;
  if (!step) return null;
  const { curve, finalValue: final } = step;
  const edges = step.atEdges.map(({ knob, curve: at }): Series => {
    const setting = withUnit(figure(toSetting(record.scale, knob), 3), settingUnit(record));
    return { name: `${settingName(record)} ${setting}`, look: "edge", x: at.time, y: at.value };
  });
  const areas: Area[] = [];
  const marks: Mark[] = [level(final, `final ${figure(final, 3)}`)];
  const overshoot = limitOf(record, "overshoot");
  // Above the ceiling, seen in the direction of the final value.
  if (overshoot !== null && final !== 0) {
    areas.push({ x: [0, LARGE], y: beyond(final * (1 + overshoot / 100), final), words: `overshoot at most ${quantity(overshoot, "%")}` });
  }
  const undershoot = limitOf(record, "undershoot");
  if (undershoot !== null && final !== 0) {
    areas.push({ x: [0, LARGE], y: beyond((-final * undershoot) / 100, -final), words: `undershoot at most ${quantity(undershoot, "%")}` });
  }
  for (const [kind, part] of [["settling-time-2", 0.02], ["settling-time-5", 0.05]] as const) {
    const time = limitOf(record, kind);
    if (time === null) continue;
    const half = Math.abs(final) * part;
    const words = `settled to ${part * 100} % by ${quantity(time, "s")}`;
    areas.push({ x: [time, LARGE], y: [final + half, LARGE], words }, { x: [time, LARGE], y: [-LARGE, final - half], words });
  }
  const rise = limitOf(record, "rise-time");
  const start = rise === null ? NaN : firstReach(curve, 0.1 * final);
  if (rise !== null && !Number.isNaN(start)) {
    areas.push({ x: [start + rise, LARGE], y: beyond(0.9 * final, -final), words: "risen by then" });
  }
  const peak = limitOf(record, "peak-time");
  if (peak !== null) marks.push(limitLine(peak, `peak ${quantity(peak, "s")}`));
  const stretch = Math.abs(final) * MOST_STRETCH;
  const values = [0, final, ...curve.value, ...edges.flatMap(({ y }) => y.map((v) => (stretch > 0 ? Math.max(-stretch, Math.min(stretch, v)) : v)))];
  const borders = areas.flatMap(({ y }) => y).filter(Number.isFinite);
  const main: Series = { name: "output", look: "main", x: curve.time, y: curve.value };
  const pane: Pane = { yName: "output, in the command’s units", yDomain: domainOf([...values, ...borders]), series: [...edges, main], areas, marks, dots: [] };
  return timeChart(`Answer to a step at ${atSetting(record)}`, curve, pane, wordsOf(record, ["overshoot", "undershoot", "settling-time-2", "settling-time-5", "rise-time", "peak-time"]));
}

function loadChart(record: Findings): Chart | null {
  const { load } = record;
  if (!load) return null;
  const { curve, finalValue } = load;
  const areas: Area[] = [];
  const marks: Mark[] = [level(finalValue, `final ${figure(finalValue, 3)}`)];
  const peak = limitOf(record, "load-peak");
  if (peak !== null) areas.push(...bothSides(peak, [0, LARGE], `peak at most ${figure(peak)}`));
  const remaining = limitOf(record, "load-final");
  if (remaining !== null) {
    marks.push({ ...level(remaining, `final at most ${figure(remaining)}`), look: "limit" }, { ...level(-remaining, ""), look: "limit" });
  }
  const borders = areas.flatMap(({ y }) => y).filter(Number.isFinite);
  const series: Series[] = [{ name: "output", look: "main", x: curve.time, y: curve.value }];
  const pane: Pane = { yName: "output", yDomain: domainOf([0, ...curve.value, ...borders]), series, areas, marks, dots: [] };
  return timeChart(`Answer to a unit load at ${atSetting(record)}`, curve, pane, wordsOf(record, ["load-peak", "load-final"]));
}

function controllerChart(record: Findings): Chart | null {
  const curve = record.step?.controller;
  if (!curve) return null;
  const peak = limitOf(record, "controller-peak");
  const areas = peak === null ? [] : bothSides(peak, [0, LARGE], `at most ${figure(peak)}`);
  const borders = areas.flatMap(({ y }) => y).filter(Number.isFinite);
  const series: Series[] = [{ name: "controller output", look: "main", x: curve.time, y: curve.value }];
  const pane: Pane = { yName: "controller output", yDomain: domainOf([0, ...curve.value, ...borders]), series, areas, marks: [], dots: [] };
  return timeChart(`Controller output on a unit step at ${atSetting(record)}`, curve, pane, wordsOf(record, ["controller-peak"]));
}

function openLoopChart(record: Findings, margins: Margins): Chart {
  const { omega, magnitude, phase } = margins.response;
  const gains = margins.gainCrossings.map(({ omega: at, phaseMargin }) => {
    const there = valueAt(omega, phase, at);
    return { at, phaseMargin, there, words: `phase margin ${figure(phaseMargin, 3)}° at ${quantity(at, "rad/s", 3)}` };
  });
  const phases = margins.phaseCrossings
    .filter(({ omega: at, factor }) => at > 0 && factor > 0)
    .map(({ omega: at, factor }) => {
      const decibels = 20 * Math.log10(factor);
      return { at, there: -decibels, turn: valueAt(omega, phase, at), words: `gain margin ${figure(Math.abs(decibels), 3)} dB ${decibels > 0 ? "upward" : "downward"} at ${quantity(at, "rad/s", 3)}` };
    });
  const shownMagnitude = magnitude.map((value) => Math.max(MAGNITUDES[0], Math.min(MAGNITUDES[1], value)));
  const magnitudes: Pane = {
    yName: "magnitude, dB",
    yUnit: "dB",
    yDomain: domainOf([0, ...shownMagnitude]),
    yStep: 20,
    series: [{ name: "magnitude", look: "main", x: omega, y: magnitude }],
    areas: [],
    marks: [level(0, ""), ...phases.map(({ at, there, words }): Mark => ({ look: "margin", from: [at, 0], to: [at, there], words: words.replace(/^gain margin | at .*$| upward| downward/g, "") }))],
    dots: [...gains.map(({ at, words }) => ({ x: at, y: 0, words })), ...phases.map(({ at, there, words }) => ({ x: at, y: there, words }))],
  };
  const turns = gains.filter(({ there }) => Number.isFinite(there));
  const phasePane: Pane = {
    yName: "phase, °",
    yUnit: "°",
    yDomain: domainOf([...phase, ...turns.map(({ there, phaseMargin }) => there - phaseMargin)]),
    yStep: 90,
    series: [{ name: "phase", look: "main", x: omega, y: phase }],
    areas: [],
    marks: [
      ...oddHalfTurns(phase).map((at) => level(at, "")),
      ...turns.map(({ at, there, phaseMargin }): Mark => ({ look: "margin", from: [at, there - phaseMargin], to: [at, there], words: `${figure(phaseMargin, 3)}°` })),
    ],
    dots: [...turns.map(({ at, there, words }) => ({ x: at, y: there, words })), ...phases.filter(({ turn }) => Number.isFinite(turn)).map(({ at, turn, words }) => ({ x: at, y: turn, words }))],
  };
  return {
    title: `Open loop over frequency at ${atSetting(record)}`,
    xName: "frequency, rad/s",
    xUnit: "rad/s",
    xLog: true,
    xDomain: [omega[0] ?? 1, omega.at(-1) ?? 10],
    panes: [magnitudes, phasePane],
    words: [...gains, ...phases].map(({ words }) => words).join("; "),
  };
}

/** −180° and what differs from it by whole turns, within the phase drawn; these are where the loop can be marginal. */
function oddHalfTurns(phase: readonly number[]): number[] {
  const [low, high] = extent(phase);
  const first = Math.ceil((low - 180) / 360);
  const last = Math.floor((high - 180) / 360);
  // A phase turns at most a quarter for each pole and zero, so this is a handful.
  return Array.from({ length: Math.max(0, Math.min(last - first + 1, 50)) }, (_, index) => 180 + 360 * (first + index));
}

function timeChart(title: string, curve: Curve, pane: Pane, words: string): Chart {
  return { title, xName: "time, s", xUnit: "s", xLog: false, xDomain: [0, curve.time.at(-1) || 1], panes: [pane], words };
}

function level(y: number, words: string): Mark {
  return { look: "level", from: [-LARGE, y], to: [LARGE, y], words };
}

function limitLine(x: number, words: string): Mark {
  return { look: "limit", from: [x, -LARGE], to: [x, LARGE], words };
}

/** All values beyond a border, away from zero on the side of `side`. */
function beyond(border: number, side: number): [number, number] {
  return side > 0 ? [border, LARGE] : [-LARGE, border];
}

function bothSides(limit: number, x: [number, number], words: string): Area[] {
  return [
    { x, y: [limit, LARGE], words },
    { x, y: [-LARGE, -limit], words },
  ];
}

/** When a curve that starts at 0 first reaches a level; NaN where it never does. */
function firstReach({ time, value }: Curve, at: number): number {
  const index = value.findIndex((one) => (at >= 0 ? one >= at : one <= at));
  const [t1, v1, t0, v0] = [time[index], value[index], time[index - 1], value[index - 1]];
  if (t1 === undefined || v1 === undefined) return NaN;
  if (t0 === undefined || v0 === undefined || v1 === v0) return t1;
  return t0 + ((at - v0) / (v1 - v0)) * (t1 - t0);
}

function extent(values: readonly number[]): [number, number] {
  let [low, high] = [Infinity, -Infinity];
  for (const value of values) {
    if (!Number.isFinite(value)) continue;
    low = Math.min(low, value);
    high = Math.max(high, value);
  }
  return low <= high ? [low, high] : [0, 1];
}

function domainOf(values: readonly number[]): [number, number] {
  const [low, high] = extent(values);
  const room = (high - low) * ROOM || Math.abs(high) * ROOM || 1;
  return [low === 0 ? 0 : low - room, high === 0 ? 0 : high + room];
}
