// The pictures of responses: answer to a step, to a load, the controller's output, and the open loop over frequency.
import { axisBottom, axisLeft } from "d3-axis";
import { scaleLinear, scaleLog, type ScaleContinuousNumeric } from "d3-scale";
import { pointer, select } from "d3-selection";
import { line } from "d3-shape";
import { tickText } from "./axis.ts";
import { chartOf, readingAt, tableOf, valueAt, type Area, type Chart, type ChartName, type Dot, type Mark, type Pane, type Series } from "./charts.ts";
import { byId, html, letterScale, oncePerFrame, setAttributes, svg, watchSize } from "./dom.ts";
import type { Session } from "./session.ts";
import type { Record as Findings } from "./types.ts";

/** Sizes in pixels at the usual letter size. */
const SIZES = { name: 18, letter: 7.4, right: 10, top: 6, bottom: 40, gap: 14, tickX: 76, tickY: 44 };
/** Steps of the reading line from one end of the picture to the other, by keys. */
const STEPS = 100;
/** The hidden table is written after a pause this long, in milliseconds. */
const PAUSE = 900;
/** Letters this close to the border, in pixels, are turned inwards. */
const NEAR = 70;

type Scale = ScaleContinuousNumeric<number, number>;

/** A pane with its scales. */
interface Drawn {
  readonly pane: Pane;
  readonly x: Scale;
  readonly y: Scale;
  readonly box: Box;
}

interface Box {
  readonly left: number;
  readonly right: number;
  readonly top: number;
  readonly bottom: number;
}

/** The panel of responses. */
export class Responses {
  readonly #frame = byId("response-frame", HTMLElement);
  readonly #element = byId("response", SVGSVGElement);
  readonly #heading = byId("response-heading", HTMLElement);
  readonly #none = byId("response-none", HTMLElement);
  readonly #readout = byId("response-readout", HTMLElement);
  readonly #table = byId("response-table", HTMLTableElement);
  readonly #buttons = [...document.querySelectorAll<HTMLButtonElement>("#response-choice button")];
  readonly #base = svg("g");
  readonly #hover = svg("g");
  readonly #redraw = oncePerFrame(() => this.#draw());
  #name: ChartName = "step";
  #record: Findings | null = null;
  #chart: Chart | null = null;
  #drawn: readonly Drawn[] = [];
  #size = { width: 0, height: 0 };
  /** Where the reading line stands, as a part of the abscissa; null while nothing is read. */
  #reading: number | null = null;
  #timer: ReturnType<typeof setTimeout> | undefined;

  constructor(session: Session) {
    this.#element.append(this.#base, this.#hover);
    for (const choice of this.#buttons) {
      choice.addEventListener("click", () => {
        this.#name = (choice.dataset["chart"] ?? "step") as ChartName;
        this.#reading = null;
        this.#draw();
      });
    }
    this.#listen();
    watchSize(this.#frame, (width, height) => {
      this.#size = { width, height };
      this.#redraw();
    });
    session.onChange(({ good }) => {
      this.#record = good?.record ?? null;
      this.#redraw();
    });
  }

  #listen(): void {
    const read = (event: PointerEvent): void => {
      const [first] = this.#drawn;
      if (!first) return;
      const [px] = pointer(event, this.#element);
      const { left, right } = first.box;
      this.#reading = Math.min(1, Math.max(0, (px - left) / (right - left)));
      this.#read();
    };
    this.#element.addEventListener("pointermove", read);
    this.#element.addEventListener("pointerdown", read);
    this.#element.addEventListener("pointerleave", (event) => {
      // After a touch the reading stays, as no finger hovers.
      if (event.pointerType === "touch") return;
      this.#reading = null;
      this.#read();
    });
    this.#frame.addEventListener("keydown", (event) => {
      if (event.altKey || event.ctrlKey || event.metaKey) return;
      const many = event.shiftKey ? 10 : 1;
      const now = this.#reading ?? 0;
      const to: Partial<{ [key: string]: number | null }> = {
        ArrowRight: now + many / STEPS,
        ArrowLeft: now - many / STEPS,
        Home: 0,
        End: 1,
        Escape: null,
      };
      const next = to[event.key];
      if (next === undefined) return;
      this.#reading = next === null ? null : Math.min(1, Math.max(0, next));
      this.#read();
      event.preventDefault();
    });
  }

  #draw(): void {
    const record = this.#record;
    if (!record || this.#size.width === 0) return;
    for (const choice of this.#buttons) setAttributes(choice, { "aria-pressed": choice.dataset["chart"] === this.#name ? "true" : "false" });
    const found = chartOf(this.#name, record);
    const chart = typeof found === "string" ? null : found;
    this.#chart = chart;
    this.#none.hidden = chart !== null;
    this.#none.textContent = typeof found === "string" ? found : "";
    this.#heading.textContent = chart?.title ?? HEADINGS[this.#name];
    setAttributes(this.#element, { viewBox: `0 0 ${this.#size.width} ${this.#size.height}`, ...this.#size });
    setAttributes(this.#element, { "aria-label": chart ? `${chart.title}. ${chart.words}` : "No picture" });
    this.#drawn = chart ? layOut(chart, this.#size) : [];
    this.#base.replaceChildren(...this.#drawn.flatMap((drawn, index) => paneParts(drawn, chart, index, index === this.#drawn.length - 1)));
    this.#read();
    clearTimeout(this.#timer);
    this.#timer = setTimeout(() => this.#writeTable(), PAUSE);
  }

  #read(): void {
    const chart = this.#chart;
    const [first] = this.#drawn;
    if (!chart || !first || this.#reading === null) {
      this.#hover.replaceChildren();
      this.#readout.hidden = true;
      return;
    }
    const { left, right } = first.box;
    const px = left + this.#reading * (right - left);
    const place = first.x.invert(px);
    this.#hover.replaceChildren(
      ...this.#drawn.flatMap(({ pane, y, box }) => [
        svg("line", { class: "reading-line", x1: px, x2: px, y1: box.top, y2: box.bottom }),
        ...pane.series
          .map((series) => valueAt(series.x, series.y, place))
          .filter(Number.isFinite)
          .map((value) => svg("circle", { class: "hover", cx: px, cy: y(value), r: 4 })),
      ]),
    );
    this.#readout.replaceChildren(...readingAt(chart, place).map((text) => html("li", {}, text)));
    this.#readout.classList.toggle("left", this.#reading > 0.5);
    this.#readout.hidden = false;
  }

  #writeTable(): void {
    const chart = this.#chart;
    if (!chart) {
      this.#table.replaceChildren();
      return;
    }
    const { head, rows } = tableOf(chart);
    this.#table.replaceChildren(
      html("caption", {}, `${chart.title}. ${chart.words}`),
      html("thead", {}, html("tr", {}, ...head.map((text) => html("th", { scope: "col" }, text)))),
      html("tbody", {}, ...rows.map((row) => html("tr", {}, ...row.map((text) => html("td", {}, text))))),
    );
  }
}

/** What the panel is called while there is no picture. */
const HEADINGS: { readonly [name in ChartName]: string } = {
  step: "Answer to a step",
  load: "Answer to a unit load",
  controller: "Controller output on a unit step",
  "open loop": "Open loop over frequency",
};

/** The panes above each other with their scales. */
function layOut(chart: Chart, size: { width: number; height: number }): Drawn[] {
  const scale = letterScale();
  const count = chart.panes.length;
  const top = SIZES.top * scale;
  const bottom = Math.max(size.height - SIZES.bottom * scale, top + 1);
  const gap = SIZES.gap * scale;
  const height = (bottom - top - gap * (count - 1)) / count;
  const boxes = chart.panes.map((_, index) => ({ top: top + index * (height + gap), bottom: top + index * (height + gap) + height }));
  const texts = chart.panes.flatMap((pane) => ticksOf(pane, height).map(tickText));
  const left = (SIZES.name + 12 + SIZES.letter * Math.max(...texts.map((text) => text.length), 2)) * scale;
  const right = Math.max(size.width - SIZES.right * scale, left + 1);
  return chart.panes.map((pane, index) => {
    const box = { left, right, top: boxes[index]?.top ?? 0, bottom: boxes[index]?.bottom ?? 1 };
    const x = (chart.xLog ? scaleLog() : scaleLinear()).domain([...chart.xDomain]).range([left, right]);
    return { pane, x, y: scaleLinear([...pane.yDomain], [box.bottom, box.top]), box };
  });
}

/** The ticks of the ordinate: at multiples of the pane's step where that leaves a few, else at round numbers. */
function ticksOf({ yDomain: [low, high], yStep }: Pane, height: number): number[] {
  const most = Math.max(2, Math.round(height / (SIZES.tickY * letterScale())));
  if (yStep === undefined) return scaleLinear([low, high], [0, 1]).ticks(most);
  const finest = (high - low) / yStep < 2 ? yStep / 2 : yStep;
  const step = finest * Math.max(1, Math.ceil((high - low) / finest / most));
  const first = Math.ceil(low / step);
  return Array.from({ length: Math.floor(high / step) - first + 1 }, (_, index) => (first + index) * step);
}

/** A picture without its readings, for the sheet. */
export function chartPicture(chart: Chart, size: { width: number; height: number }): SVGSVGElement {
  const panes = layOut(chart, size);
  const parts = panes.flatMap((drawn, index) => paneParts(drawn, chart, index, index === panes.length - 1));
  return svg("svg", { class: "chart", viewBox: `0 0 ${size.width} ${size.height}`, role: "img", "aria-label": chart.title }, ...parts);
}

function paneParts(drawn: Drawn, chart: Chart | null, index: number, last: boolean): SVGElement[] {
  if (!chart) return [];
  const { pane, x, y, box } = drawn;
  const { left, right, top, bottom } = box;
  const scale = letterScale();
  const clip = `response-clip-${index}`;
  const horizontal = svg("g", { class: "grid", transform: `translate(0 ${bottom})` });
  const vertical = svg("g", { class: "grid", transform: `translate(${left} 0)` });
  const across = axisBottom<number>(x)
    .ticks(Math.max(2, Math.round((right - left) / (SIZES.tickX * scale))), chart.xLog ? undefined : null)
    .tickSize(top - bottom)
    .tickPadding(8)
    .tickFormat((value) => (last && labelled(value, chart) ? tickText(value) : ""));
  const up = axisLeft<number>(y).tickValues(ticksOf(pane, bottom - top)).tickSize(left - right).tickPadding(8).tickFormat(tickText);
  select(horizontal).call(across).attr("font-size", null).attr("font-family", null).attr("text-anchor", null).select(".domain").remove();
  select(vertical).call(up).attr("font-size", null).attr("font-family", null).select(".domain").remove();
  select(horizontal).selectAll("text").attr("text-anchor", "middle");
  const zero = y(0);
  const shown = svg(
    "g",
    { "clip-path": `url(#${clip})` },
    ...pane.areas.map((area) => areaPart(area, drawn)),
    pane.yDomain[0] <= 0 && pane.yDomain[1] >= 0 ? svg("line", { class: "axis-line", x1: left, x2: right, y1: zero, y2: zero }) : null,
    ...pane.marks.map((mark) => markLine(mark, drawn)),
    ...pane.series.map((series) => seriesPart(series, drawn)),
    ...pane.dots.map((dot) => dotPart(dot, drawn)),
    // Words lie on top: a curve through them would make them unreadable.
    ...pane.marks.filter(({ words }) => words !== "").map((mark) => markWords(mark, drawn)),
  );
  const name = (text: string, place: string): SVGTextElement => svg("text", { class: "axis-name", transform: place }, text);
  return [
    svg("clipPath", { id: clip }, svg("rect", { x: left, y: top, width: right - left, height: bottom - top })),
    horizontal,
    vertical,
    name(pane.yName, `translate(${12 * scale} ${(top + bottom) / 2}) rotate(-90)`),
    ...(last ? [name(chart.xName, `translate(${(left + right) / 2} ${bottom + 34 * scale})`)] : []),
    shown,
  ];
}

/** On a logarithmic axis only decades are labelled, and 2 and 5 where there are few decades. */
function labelled(value: number, { xLog, xDomain: [low, high] }: Chart): boolean {
  if (!xLog) return true;
  const power = Math.log10(value);
  const digit = Math.round(value / 10 ** Math.floor(power + 1e-9));
  const few = Math.log10(high / low) < 2.5;
  return digit === 1 || (few && (digit === 2 || digit === 5));
}

function areaPart({ x: [x0, x1], y: [y0, y1], words }: Area, { x, y, box }: Drawn): SVGElement {
  const clampX = (value: number): number => Math.min(box.right, Math.max(box.left, Number.isFinite(value) ? x(value) : value > 0 ? box.right : box.left));
  const clampY = (value: number): number => Math.min(box.bottom, Math.max(box.top, Number.isFinite(value) ? y(value) : value > 0 ? box.top : box.bottom));
  const [left, right, top, bottom] = [clampX(x0), clampX(x1), clampY(y1), clampY(y0)];
  const border = `M${left} ${top}H${right}V${bottom}H${left}Z`;
  return svg("g", { class: "forbidden" }, svg("title", {}, words), svg("path", { class: "area", d: border }), svg("path", { class: "border", d: border }));
}

/** Both ends of a mark in pixels. */
function markEnds({ from, to }: Mark, { x, y, box }: Drawn): { x1: number; y1: number; x2: number; y2: number } {
  const px = (value: number): number => (Number.isFinite(value) ? x(value) : value > 0 ? box.right : box.left);
  const py = (value: number): number => (Number.isFinite(value) ? y(value) : value > 0 ? box.top : box.bottom);
  return { x1: px(from[0]), y1: py(from[1]), x2: px(to[0]), y2: py(to[1]) };
}

function markLine(mark: Mark, drawn: Drawn): SVGElement {
  return svg("line", { class: `mark ${mark.look}`, ...markEnds(mark, drawn) });
}

/** A level's words stand above its left end, where curves are still on their way; others beside the line. */
function markWords(mark: Mark, drawn: Drawn): SVGElement {
  const { y1, x2, y2 } = markEnds(mark, drawn);
  const { box } = drawn;
  const scale = letterScale();
  const level = y1 === y2;
  const inward = !level && x2 > box.right - NEAR * scale;
  const textX = level ? box.left + 6 * scale : x2 + (inward ? -6 : 6) * scale;
  const middle = level ? y2 - 5 * scale : mark.look === "margin" ? (y1 + y2) / 2 + 4 * scale : box.top + 14 * scale;
  const textY = Math.min(box.bottom - 4 * scale, Math.max(box.top + 13 * scale, middle));
  return svg("text", { class: "mark-words", x: textX, y: textY, "text-anchor": inward ? "end" : "start" }, mark.words);
}

function seriesPart({ x: xs, y: ys, look, name }: Series, { x, y }: Drawn): SVGElement {
  const draw = line<number>()
    .defined((index) => Number.isFinite(ys[index] ?? NaN))
    .x((index) => x(xs[index] ?? 0))
    .y((index) => y(ys[index] ?? 0))
    .digits(2);
  return svg("path", { class: `curve ${look}`, d: draw(xs.map((_, index) => index)) ?? "" }, svg("title", {}, name));
}

function dotPart({ x: place, y: value, words }: Dot, { x, y }: Drawn): SVGElement {
  return svg("circle", { class: "crossing", cx: x(place), cy: y(value), r: 4 * letterScale() }, svg("title", {}, words));
}
