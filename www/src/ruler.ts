// The ruler: the axis of settings with its lanes, and the one pointer that sets the setting everywhere.
import { axisTop } from "d3-axis";
import { drag } from "d3-drag";
import { select } from "d3-selection";
import { settingText, type AnyEdge } from "./answer.ts";
import { axisFor, onAxis, positionOn, settingAt, stepFrom, ticksOn, type Axis, type AxisChoice, type Position } from "./axis.ts";
import { fromNumber, fromRational, typedText, type Decimal } from "./decimal.ts";
import { byId, letterScale, oncePerFrame, setAttributes, svg, watchSize } from "./dom.ts";
import { figure, withUnit } from "./format.ts";
import { gridOf, onGrid, stepOnGrid } from "./grid.ts";
import { lanesOf, otherLanes, type Lane, type Segment } from "./lanes.ts";
import { settingNumber, withSetting } from "./project.ts";
import { stableSpans } from "./ranges.ts";
import { limitSpan, onScale, settingName, settingUnit } from "./scale.ts";
import type { Session, Situation } from "./session.ts";
import type { Edge, Record as Findings } from "./types.ts";

/** Sizes in pixels at the usual letter size. */
const SIZES = { inset: 14, lane: 20, gap: 4, axis: 34, foot: 22, names: 180, texts: 124, letter: 7.2, edge: 24, minorTick: 5, majorTick: 9 };
/** Where the letters of a lane stand, as a part of its height. */
const BASELINE = 0.72;
/** Below this width the names of the lanes stand above them and the texts at their right end are left out. */
const NARROW = 700;

/** Where things are on the picture. */
interface Layout {
  readonly width: number;
  readonly left: number;
  readonly length: number;
  readonly scale: number;
  readonly narrow: boolean;
  /** Height of a lane with its gap, and of its name where that stands above. */
  readonly pitch: number;
}

/** Connects the ruler with the session; `onReason` is asked to explain an edge. */
export class Ruler {
  readonly #session: Session;
  readonly #onReason: (edge: AnyEdge, from: Element) => void;
  readonly #picture = byId("ruler", SVGSVGElement);
  readonly #choice = byId("axis", HTMLSelectElement);
  readonly #base = svg("g");
  readonly #pointer = svg("g", { class: "pointer", role: "slider", tabindex: 0, "aria-label": "Setting" });
  /** They stay while the pointer moves: a finger on a part that is replaced would lose it. */
  readonly #parts = { halo: svg("rect", { class: "halo" }), stem: svg("line"), head: svg("path"), words: svg("text") };
  #width = 0;
  #axis: Axis | null = null;
  #dragging = false;
  #drawn = "";
  #lanes: readonly Lane[] = [];
  /** The record of another project, for comparison. */
  #other: Findings | null = null;

  constructor(session: Session, onReason: (edge: AnyEdge, from: Element) => void) {
    this.#session = session;
    this.#onReason = onReason;
    this.#pointer.append(...Object.values(this.#parts));
    this.#picture.append(this.#base, this.#pointer);
    this.#choice.addEventListener("change", () => this.show(session.situation));
    this.#pointer.addEventListener("keydown", (event) => this.#press(event));
    this.#makeDraggable();
    watchSize(byId("ruler-place", HTMLElement), (width) => {
      this.#width = width;
      this.show(session.situation);
    });
    session.onChange((situation) => this.show(situation));
  }

  /** Shows the ranges of another project below the present ones; null takes them away. */
  compare(other: Findings | null): void {
    this.#other = other;
    this.#drawn = "";
    this.show(this.#session.situation);
  }

  /** Draws what has changed. */
  show({ good, project }: Situation): void {
    if (!good || this.#width === 0) return;
    const record = good.record;
    const setting = settingNumber(project);
    // The axis stands still while the pointer is dragged along it.
    if (!this.#dragging || !this.#axis) this.#axis = axisFor(subjectOf(record, this.#other, setting), this.#choice.value as AxisChoice);
    const layout = layoutFor(this.#width);
    // The figures at the setting change with every step of the pointer, the lanes do not.
    const required = record.requirements.map(({ kind, limit, ranges }) => [kind, limit, ranges]);
    const judged = JSON.stringify([record.scale, required, record.permitted, this.#axis]);
    const drawn = [good.picture, settingUnit(record), settingName(record), this.#width, layout.scale, judged].join();
    if (drawn !== this.#drawn) {
      this.#lanes = [...lanesOf(record), ...(this.#other ? otherLanes(this.#other) : [])];
      this.#drawBase(record, this.#axis, layout);
      this.#drawn = drawn;
    }
    this.#placePointer(record, setting, layout);
  }

  #drawBase(record: Findings, axis: Axis, layout: Layout): void {
    const { left, length, scale, pitch } = layout;
    const lanes = this.#lanes;
    const height = heightOf(lanes, layout);
    const names = lanes.map(({ name }) => name).join(", ");
    setAttributes(this.#picture, { viewBox: `0 0 ${layout.width} ${height}`, width: layout.width, height });
    setAttributes(this.#picture, { "aria-label": `Axis of settings with the lanes ${names}` });
    const catcher = svg("rect", { class: "catcher", x: left, y: 0, width: length, height });
    const edges = lanes.map((lane, index) => {
      const top = SIZES.axis * scale + (index + 1) * pitch - (SIZES.lane + SIZES.gap) * scale;
      return this.#edgeMarks(lane, axis, layout, top, record);
    });
    this.#base.replaceChildren(...axisAndLanes(lanes, axis, layout), catcher, ...edges);
  }

  #edgeMarks(lane: Lane, axis: Axis, layout: Layout, top: number, record: Findings): SVGGElement {
    const height = SIZES.lane * layout.scale;
    const position = positionOn(axis, layout.length);
    const lead = `Edge of ${lane.name.toLowerCase()} at ${settingName(record)} =`;
    const marks = lane.edges
      .filter(({ place }) => onAxis(axis, place))
      .map(({ place, edge, words }) => {
        const x = layout.left + position(place);
        const name = `${lead} ${figure(place)}: ${words} Open the reason.`;
        const mark = svg(
          "g",
          { class: "edge", role: "button", tabindex: 0, "aria-label": name, transform: `translate(${x} ${top})` },
          svg("title", {}, name),
          svg("rect", { class: "target", x: -SIZES.edge / 2, y: -SIZES.gap / 2, width: SIZES.edge, height: height + SIZES.gap }),
          svg("line", { y1: 0, y2: height }),
        );
        const open = (): void => this.#onReason(edge, mark);
        mark.addEventListener("click", open);
        mark.addEventListener("keydown", (event) => {
          if (event.key !== "Enter" && event.key !== " ") return;
          event.preventDefault();
          open();
        });
        return mark;
      });
    return svg("g", { class: "edges" }, ...marks);
  }

  #placePointer(record: Findings, setting: number | null, layout: Layout): void {
    const axis = this.#axis;
    if (!axis) return;
    const shown = setting !== null && onAxis(axis, setting);
    const value = setting ?? axis.domain[0];
    const words = setting === null ? "not chosen" : withUnit(settingWords(record, this.#session), settingUnit(record));
    setAttributes(this.#pointer, {
      "aria-valuemin": axis.domain[0],
      "aria-valuemax": axis.domain[1],
      "aria-valuenow": value,
      "aria-valuetext": `${settingName(record)} ${words}`,
      class: shown ? "pointer" : "pointer away",
    });
    const { scale, left, length } = layout;
    const x = left + (shown ? positionOn(axis, length)(value) : value > axis.domain[1] ? length : 0);
    const bottom = SIZES.axis * scale + this.#lanes.length * layout.pitch;
    const label = `setting ${shown || setting === null ? words : `${words} lies outside this axis`}`;
    const half = (label.length * SIZES.letter * scale) / 2;
    const inside = Math.min(layout.width - half, Math.max(half, x)) - x;
    const { halo, stem, head, words: name } = this.#parts;
    const top = SIZES.axis * scale;
    setAttributes(halo, { x: -12 * scale, y: top - 30 * scale, width: 24 * scale, height: bottom - 2 * scale, rx: 4 });
    setAttributes(stem, { y1: top - 10 * scale, y2: bottom });
    setAttributes(head, { d: headPath(scale), transform: `translate(0 ${top - 8 * scale})` });
    setAttributes(name, { x: inside, y: bottom + 14 * scale });
    name.textContent = label;
    setAttributes(this.#pointer, { transform: `translate(${x} 0)` });
  }

  #makeDraggable(): void {
    const move = oncePerFrame((x: number) => {
      const layout = layoutFor(this.#width);
      if (!this.#axis) return;
      this.#set(this.#onGrid(settingAt(this.#axis, (x - layout.left) / layout.length, layout.length)));
    });
    const behaviour = drag<SVGSVGElement, unknown>()
      .filter((event: MouseEvent) => !event.button && !(event.target as Element).closest(".edge"))
      .on("start", (event: { x: number }) => {
        this.#dragging = true;
        this.#pointer.focus({ preventScroll: true });
        move(event.x);
      })
      .on("drag", (event: { x: number }) => move(event.x))
      .on("end", () => {
        this.#dragging = false;
      });
    select(this.#picture).call(behaviour);
  }

  #press(event: KeyboardEvent): void {
    const axis = this.#axis;
    if (!axis || event.altKey || event.ctrlKey || event.metaKey) return;
    const setting = settingNumber(this.#session.situation.project) ?? axis.domain[0];
    const many = event.shiftKey || event.key.startsWith("Page") ? 10 : 1;
    const steps = { ArrowRight: many, ArrowUp: many, PageUp: many, ArrowLeft: -many, ArrowDown: -many, PageDown: -many }[event.key];
    if (steps !== undefined) this.#set(this.#stepped(axis, setting, steps));
    else if (event.key === "Home") this.#set(this.#rangeEnd(axis, setting, 0));
    else if (event.key === "End") this.#set(this.#rangeEnd(axis, setting, 1));
    else return;
    event.preventDefault();
  }

  #onGrid(setting: Decimal): Decimal {
    return onGrid(gridOf(this.#session.situation.project.setting), setting);
  }

  /** Steps of the controller's resolution; without one, parts of the axis. */
  #stepped(axis: Axis, setting: number, steps: number): Decimal {
    const grid = gridOf(this.#session.situation.project.setting);
    return stepOnGrid(grid, fromNumber(setting), steps) ?? onGrid(grid, stepFrom(axis, setting, steps));
  }

  /** The first or last setting of the permitted range that holds the setting, or the next one; else the axis' end. */
  #rangeEnd(axis: Axis, setting: number, end: 0 | 1): Decimal {
    const axisEnd = (): Decimal => this.#onGrid(settingAt(axis, end, this.#width));
    const record = this.#session.situation.good?.record;
    if (!record) return axisEnd();
    const distances = record.permitted.knob.map((range) => {
      const span = limitSpan(record.scale, range);
      return span ? Math.max(span.low - setting, setting - span.high, 0) : Infinity;
    });
    const nearest = distances.indexOf(Math.min(...distances));
    const text = record.permitted.setting[nearest]?.[end] ?? null;
    return (text === null ? null : fromRational(text)) ?? axisEnd();
  }

  #set(setting: Decimal): void {
    const { project } = this.#session.situation;
    this.#session.change(withSetting(project, typedText(setting)), "setting");
  }
}

/** The ruler at a width of its own, for the sheet: nothing on it can be moved. */
export function rulerPicture(record: Findings, width: number): SVGSVGElement {
  const layout = layoutFor(width);
  const lanes = lanesOf(record);
  const setting = settingNumber(record.project);
  const axis = axisFor(subjectOf(record, null, setting), "automatic");
  const height = heightOf(lanes, layout);
  const x = setting !== null && onAxis(axis, setting) ? layout.left + positionOn(axis, layout.length)(setting) : null;
  const top = SIZES.axis * layout.scale;
  const stem = x === null ? null : svg("g", { class: "pointer" }, svg("line", { x1: x, x2: x, y1: top - 10, y2: height - SIZES.foot * layout.scale }));
  const label = `Axis of settings with the lanes ${lanes.map(({ name }) => name).join(", ")}`;
  return svg("svg", { viewBox: `0 0 ${width} ${height}`, role: "img", "aria-label": label }, ...axisAndLanes(lanes, axis, layout), stem);
}

function heightOf(lanes: readonly Lane[], { scale, pitch }: Layout): number {
  return SIZES.axis * scale + lanes.length * pitch + SIZES.foot * scale;
}

function axisAndLanes(lanes: readonly Lane[], axis: Axis, layout: Layout): SVGGElement[] {
  const { left, length, scale, pitch } = layout;
  const position = positionOn(axis, length);
  const ticks = svg("g", { class: "ticks", transform: `translate(${left} ${SIZES.axis * scale - 4})` });
  drawTicks(ticks, axis, position, layout);
  const rows = lanes.map((lane, index) => {
    const place = `translate(0 ${SIZES.axis * scale + index * pitch})`;
    return svg("g", { transform: place }, ...laneParts(lane, axis, position, layout), laneText(lane.text, layout));
  });
  return [ticks, ...rows];
}

/** What the axis has to show for a record. */
function subjectOf(record: Findings, other: Findings | null, setting: number | null): Parameters<typeof axisFor>[0] {
  const { stability, character } = onScale(record);
  const otherStability = other ? onScale(other).stability : [];
  const open = record.scale.direction === "reciprocal" ? 0 : -Infinity;
  const ends = (ranges: readonly { to: Edge | null }[]): number[] => ranges.flatMap(({ to }) => (to ? [to.value] : []));
  const permitted = record.permitted.knob.flatMap((range) => {
    const span = limitSpan(record.scale, range);
    return span ? [span.low, span.high].filter((end) => Number.isFinite(end) && end !== 0) : [];
  });
  return {
    stability: [...ends(stability), ...ends(otherStability)],
    character: [...ends(character), ...permitted],
    stable: stableSpans(stability).map(({ from, to }) => [from?.value ?? open, to?.value ?? Infinity]),
    setting,
    limits: [record.scale.minimum, record.scale.maximum],
  };
}

function layoutFor(width: number): Layout {
  const scale = letterScale();
  const narrow = width < NARROW * scale;
  const left = (narrow ? SIZES.inset : SIZES.names) * scale;
  const right = (narrow ? SIZES.inset : SIZES.texts) * scale;
  const name = narrow ? 16 : 0;
  return { width, left, length: width - left - right, scale, narrow, pitch: (SIZES.lane + SIZES.gap + name) * scale };
}

function drawTicks(place: SVGGElement, axis: Axis, position: Position, { length, scale }: Layout): void {
  const ticks = ticksOn(axis, length, 44 * scale);
  const labels = new Map(ticks.map((tick) => [tick.value, tick.label]));
  const draw = axisTop<number>(position)
    .tickValues([...labels.keys()])
    .tickFormat((knob) => labels.get(knob) ?? "")
    .tickSize(SIZES.majorTick * scale)
    .tickPadding(4);
  const drawn = select(place).call(draw).attr("font-size", null).attr("font-family", null);
  drawn.select(".domain").remove();
  drawn
    .selectAll<SVGGElement, number>(".tick")
    .filter((knob) => !labels.get(knob))
    .select("line")
    .attr("y2", -SIZES.minorTick * scale);
}

function laneParts(lane: Lane, axis: Axis, position: Position, layout: Layout): SVGElement[] {
  const { scale, left, narrow, pitch } = layout;
  const height = SIZES.lane * scale;
  const top = pitch - height - SIZES.gap * scale;
  const name = narrow
    ? svg("text", { class: "lane-name", x: 0, y: 12 * scale }, lane.name)
    : svg("text", { class: "lane-name", x: left - 8 * scale, y: top + height * BASELINE, "text-anchor": "end" }, lane.name);
  const track = svg("rect", { class: "track", x: left, y: top, width: layout.length, height });
  const segments = lane.segments.flatMap((segment) => segmentParts(segment, axis, position, layout, top, height));
  const shown = lane.segments.some(({ from, to }) => from < axis.domain[1] && to > axis.domain[0]);
  const empty = shown ? null : emptyWords(lane, layout, top + height * BASELINE);
  return [name, track, ...segments, ...(empty ? [empty] : [])];
}

/** What a lane without a segment on the axis says: why there is none, or where they are. */
function emptyWords(lane: Lane, { left, length, scale }: Layout, y: number): SVGTextElement {
  const text = lane.segments.length > 0 ? "outside this axis" : lane.empty;
  const letters = Math.max(4, Math.floor((length - 12) / (SIZES.letter * scale)));
  const shown = text.length > letters ? `${text.slice(0, letters - 1)}…` : text;
  return svg("text", { class: "words quiet", x: left + length / 2, y }, svg("title", {}, text), shown);
}

function segmentParts(segment: Segment, axis: Axis, position: Position, layout: Layout, y: number, height: number): SVGElement[] {
  const from = Math.max(segment.from, axis.domain[0]);
  const to = Math.min(segment.to, axis.domain[1]);
  if (!(from < to)) return [];
  const x = layout.left + position(from);
  const width = position(to) - position(from);
  const title = svg("title", {}, segment.words[0] ?? "");
  const box = svg("rect", { class: `segment ${segment.look}`, x, y, width, height }, title);
  const hatched = segment.look === "unstable" || segment.look === "marginal";
  const hatch = hatched ? svg("rect", { class: "hatch", x, y, width, height, fill: `url(#hatch-${segment.look})` }) : null;
  const words = segment.words.find((text) => text.length * SIZES.letter * layout.scale + 10 <= width);
  const label = words
    ? svg("text", { class: hatched ? "words on-hatch" : `words on-${segment.look}`, x: x + width / 2, y: y + height * BASELINE }, words)
    : null;
  return [box, hatch, label].filter((part) => part !== null);
}

/** The short words at the right end of a lane; above it where the window is narrow. */
function laneText(text: string, { narrow, left, length, scale, pitch }: Layout): SVGElement | null {
  if (text === "") return null;
  if (narrow) return svg("text", { class: "lane-text", x: left + length, y: 12 * scale, "text-anchor": "end" }, text);
  return svg("text", { class: "lane-text", x: left + length + 10 * scale, y: pitch - (SIZES.lane * (1 - BASELINE) + SIZES.gap) * scale }, text);
}

/** The setting as the project holds it, which may be newer than the record. */
function settingWords(record: Findings, session: Session): string {
  return settingText({ ...record, project: session.situation.project });
}

/** The pointer's head: a small house upside down. */
function headPath(scale: number): string {
  const [half, shoulder, tip] = [8 * scale, -2 * scale, 6 * scale];
  return `M${-half} ${-12 * scale}H${half}V${shoulder}L0 ${tip}L${-half} ${shoulder}Z`;
}
