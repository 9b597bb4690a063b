// The ruler: the axis of settings with its lanes, and the one pointer that sets the setting everywhere.
import { axisTop } from "d3-axis";
import { drag } from "d3-drag";
import { select } from "d3-selection";
import { settingText, knobUnit } from "./answer.ts";
import { axisFor, onAxis, positionOn, settingAt, stepFrom, ticksOn, type Axis, type AxisChoice, type Position } from "./axis.ts";
import { fromNumber, printedText, toNumber, typedText, type Decimal } from "./decimal.ts";
import { byId, letterScale, oncePerFrame, setAttributes, svg, watchSize } from "./dom.ts";
import { figure, withUnit } from "./format.ts";
import { characterLane, stabilityLane, type Lane, type Segment } from "./lanes.ts";
import { settingNumber, withSetting } from "./project.ts";
import { justInside, printedEnds, stableSpans, type StableSpan } from "./ranges.ts";
import { happening } from "./reason.ts";
import type { Session, Situation } from "./session.ts";
import type { Edge, Record as Findings } from "./types.ts";

/** Sizes in pixels at the usual letter size. */
const SIZES = { inset: 14, lane: 24, gap: 4, axis: 34, foot: 24, names: 96, texts: 124, letter: 7.2, edge: 24, minorTick: 5, majorTick: 9 };
/** Below this width the names of the lanes stand above them and the texts at their right end are left out. */
const NARROW = 700;
/** Where a setting has to be chosen between two ends too close for the usual digits, the middle of them is taken. */
const HALF = 0.5;

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
  readonly #onReason: (edge: Edge, from: Element) => void;
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

  constructor(session: Session, onReason: (edge: Edge, from: Element) => void) {
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

  /** Draws what has changed. */
  show({ good, project }: Situation): void {
    if (!good || this.#width === 0) return;
    const record = good.record;
    const setting = settingNumber(project);
    // The axis stands still while the pointer is dragged along it.
    if (!this.#dragging || !this.#axis) this.#axis = axisFor(subjectOf(record, setting), this.#choice.value as AxisChoice);
    const layout = layoutFor(this.#width);
    const drawn = [good.picture, knobUnit(record), record.project.knob, this.#width, layout.scale, JSON.stringify(this.#axis)].join();
    if (drawn !== this.#drawn) {
      this.#drawBase(record, this.#axis, layout);
      this.#drawn = drawn;
    }
    this.#placePointer(record, setting, layout);
  }

  #drawBase(record: Findings, axis: Axis, layout: Layout): void {
    const { left, length, scale, pitch } = layout;
    const position = positionOn(axis, length);
    const lanes = [stabilityLane(record), characterLane(record)];
    const height = SIZES.axis * scale + lanes.length * pitch + SIZES.foot * scale;
    setAttributes(this.#picture, { viewBox: `0 0 ${layout.width} ${height}`, width: layout.width, height });
    const ticks = svg("g", { class: "ticks", transform: `translate(${left} ${SIZES.axis * scale - 4})` });
    drawTicks(ticks, axis, position, layout);
    const catcher = svg("rect", { class: "catcher", x: left, y: 0, width: length, height });
    const rows = lanes.map((lane, index) => {
      const y = SIZES.axis * scale + index * pitch;
      return svg(
        "g",
        { transform: `translate(0 ${y})` },
        ...laneParts(lane, axis, position, layout),
        laneText(index === 0 ? stableText(record) : "", layout),
      );
    });
    const edges = lanes.map((lane, index) => {
      const top = SIZES.axis * scale + (index + 1) * pitch - (SIZES.lane + SIZES.gap) * scale;
      return this.#edgeMarks(lane, axis, layout, top, record);
    });
    this.#base.replaceChildren(ticks, ...rows, catcher, ...edges);
  }

  #edgeMarks(lane: Lane, axis: Axis, layout: Layout, top: number, record: Findings): SVGGElement {
    const height = SIZES.lane * layout.scale;
    const position = positionOn(axis, layout.length);
    const lead = `Edge of ${lane.name.toLowerCase()} at ${record.project.knob} =`;
    const marks = lane.edges
      .filter((edge) => onAxis(axis, edge.value))
      .map((edge) => {
        const x = layout.left + position(edge.value);
        const name = `${lead} ${figure(edge.value)}: ${happening(edge)} Open the reason.`;
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
    const words = setting === null ? "not chosen" : withUnit(settingWords(record, this.#session), knobUnit(record));
    setAttributes(this.#pointer, {
      "aria-valuemin": axis.domain[0],
      "aria-valuemax": axis.domain[1],
      "aria-valuenow": value,
      "aria-valuetext": `${record.project.knob} ${words}`,
      class: shown ? "pointer" : "pointer away",
    });
    const { scale, left, length } = layout;
    const x = left + (shown ? positionOn(axis, length)(value) : value > axis.domain[1] ? length : 0);
    const bottom = SIZES.axis * scale + 2 * layout.pitch;
    const label = `setting ${shown || setting === null ? words : `${words} lies outside this axis`}`;
    const half = (label.length * SIZES.letter * scale) / 2;
    const inside = Math.min(layout.width - half, Math.max(half, x)) - x;
    const { halo, stem, head, words: name } = this.#parts;
    const top = SIZES.axis * scale;
    setAttributes(halo, { x: -12 * scale, y: top - 30 * scale, width: 24 * scale, height: bottom - 2 * scale, rx: 4 });
    setAttributes(stem, { y1: top - 10 * scale, y2: bottom });
    setAttributes(head, { d: headPath(scale), transform: `translate(0 ${top - 8 * scale})` });
    setAttributes(name, { x: inside, y: bottom + 16 * scale });
    name.textContent = label;
    setAttributes(this.#pointer, { transform: `translate(${x} 0)` });
  }

  #makeDraggable(): void {
    const move = oncePerFrame((x: number) => {
      const layout = layoutFor(this.#width);
      if (!this.#axis) return;
      this.#set(settingAt(this.#axis, (x - layout.left) / layout.length, layout.length));
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
    if (steps !== undefined) this.#set(stepFrom(axis, setting, steps));
    else if (event.key === "Home") this.#set(this.#rangeEnd(axis, setting, "from"));
    else if (event.key === "End") this.#set(this.#rangeEnd(axis, setting, "to"));
    else return;
    event.preventDefault();
  }

  /** The setting just inside an end of the stable range that holds the setting, or the next one; else the axis' end. */
  #rangeEnd(axis: Axis, setting: number, end: "from" | "to"): Decimal {
    const record = this.#session.situation.good?.record;
    const span = record ? nearestSpan(stableSpans(record.stability), setting) : null;
    const edge = span?.[end];
    const axisEnd = settingAt(axis, end === "from" ? 0 : 1, this.#width);
    if (!span || !edge) return axisEnd;
    const found = justInside(edge, end === "from" ? "up" : "down") ?? axisEnd;
    const value = toNumber(found);
    if (value > (span.from?.value ?? -Infinity) && value < (span.to?.value ?? Infinity)) return found;
    const other = span[end === "from" ? "to" : "from"];
    return fromNumber(edge.value + ((other?.value ?? edge.value) - edge.value) * HALF);
  }

  #set(setting: Decimal): void {
    const { project } = this.#session.situation;
    this.#session.change(withSetting(project, typedText(setting)), "setting");
  }
}

/** What the axis has to show for a record. */
function subjectOf(record: Findings, setting: number | null): Parameters<typeof axisFor>[0] {
  const ends = (ranges: readonly { to: Edge | null }[]): number[] => ranges.flatMap(({ to }) => (to ? [to.value] : []));
  return {
    stability: ends(record.stability),
    character: ends(record.character),
    stable: stableSpans(record.stability).map(({ from, to }) => [from?.value ?? -Infinity, to?.value ?? Infinity]),
    setting,
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
    : svg("text", { class: "lane-name", x: left - 8 * scale, y: top + height * 0.68, "text-anchor": "end" }, lane.name);
  const segments = lane.segments.flatMap((segment) => segmentParts(segment, axis, position, layout, top, height));
  return [name, ...segments];
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
    ? svg("text", { class: hatched ? "words on-hatch" : "words", x: x + width / 2, y: y + height * 0.68 }, words)
    : null;
  return [box, hatch, label].filter((part) => part !== null);
}

function laneText(text: string, { narrow, left, length, scale, pitch }: Layout): SVGElement | null {
  if (narrow || text === "") return null;
  return svg("text", { class: "lane-text", x: left + length + 10 * scale, y: pitch - (SIZES.lane * 0.32 + SIZES.gap) * scale }, text);
}

/** "3.858 … 236.7" for the text at the right end of the stability lane. */
function stableText(record: Findings): string {
  const spans = stableSpans(record.stability);
  const [only] = spans;
  if (spans.length !== 1 || !only) return spans.length === 0 ? "never stable" : `${spans.length} stable ranges`;
  const { from, to } = printedEnds(only);
  const both = from && to ? `${printedText(from.decimal)} … ${printedText(to.decimal)}` : "";
  if (both) return both.length * SIZES.letter <= SIZES.texts ? both : "1 stable range";
  if (from) return `above ${printedText(from.decimal)}`;
  return to ? `below ${printedText(to.decimal)}` : "always stable";
}

/** The stable span that holds a setting, or the one whose end is nearest. */
function nearestSpan(spans: readonly StableSpan[], setting: number): StableSpan | null {
  const distance = ({ from, to }: StableSpan): number =>
    Math.max((from?.value ?? -Infinity) - setting, setting - (to?.value ?? Infinity), 0);
  const byDistance = [...spans].sort((left, right) => distance(left) - distance(right));
  return byDistance[0] ?? null;
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
