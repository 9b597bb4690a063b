// The s-plane: where the poles go as the knob grows, and where they are at the setting.
import { axisBottom, axisLeft } from "d3-axis";
import { scaleLinear, type ScaleLinear } from "d3-scale";
import { pointer, select, type Selection } from "d3-selection";
import { line } from "d3-shape";
import { zoom, zoomIdentity, type D3ZoomEvent, type ZoomBehavior, type ZoomTransform } from "d3-zoom";
import { tickText } from "./axis.ts";
import { fromNumber, roundDigits, typedText } from "./decimal.ts";
import { byId, html, letterScale, oncePerFrame, setAttributes, svg, watchSize } from "./dom.ts";
import { figure, pairText, THIN_SPACE, withUnit } from "./format.ts";
import { clipLine, frameOf, nearestPoint, piecesOf, type BranchLine, type Piece, type Window } from "./locus.ts";
import { gridOf, onGrid } from "./grid.ts";
import { withSetting } from "./project.ts";
import { limitArea, limitsOf, unstableArea } from "./regions.ts";
import { settingName, settingUnit, toSetting } from "./scale.ts";
import type { Session, Situation } from "./session.ts";
import { shownSigns, type HalfChoice } from "./halves.ts";
import type { KnobSign, Record as Findings, Root } from "./types.ts";

/** Sizes in pixels at the usual letter size. */
const SIZES = { name: 20, letter: 7.4, right: 10, top: 6, bottom: 40, mark: 5, tick: 84 };
/** A branch farther from the pointer than this, in pixels, is not meant. */
const REACH = 24;
/** How far out and in one can zoom from the first view. */
const ZOOM: [number, number] = [1e-3, 1e6];
/** What one key press zooms and pans. */
const KEY = { zoom: 1.25, pan: 48 };
/** Digits of a setting taken from a point of the picture: finer than a pixel, short enough to read. */
const PICKED_DIGITS = 4;

type Scale = ScaleLinear<number, number>;

/** What is drawn now. */
interface Picture {
  readonly record: Findings;
  readonly branches: readonly BranchLine[];
  readonly pieces: readonly Piece[];
  readonly signs: readonly KnobSign[];
}

/** The picture of the s-plane. */
export class Plane {
  readonly #session: Session;
  readonly #frame = byId("plane-frame", HTMLElement);
  readonly #element = byId("plane", SVGSVGElement);
  readonly #half = byId("half", HTMLSelectElement);
  readonly #readout = byId("plane-readout", HTMLElement);
  readonly #layers = { limits: svg("g"), back: svg("g"), axes: svg("g"), locus: svg("g"), marks: svg("g"), poles: svg("g"), hover: svg("g") };
  readonly #clip = svg("rect");
  readonly #zoom: ZoomBehavior<SVGSVGElement, unknown>;
  readonly #redraw = oncePerFrame(() => this.#draw());
  #picture: Picture | null = null;
  #drawn = "";
  /** What stands on the picture besides the poles at the setting. */
  #still = "";
  #view = "";
  #transform: ZoomTransform = zoomIdentity;
  #size = { width: 0, height: 0 };
  /** The point of the locus that is read now. */
  #pointed: ReturnType<typeof nearestPoint> = null;
  /** Room for the figures of the imaginary axis, in pixels. */
  #margin = 46;

  constructor(session: Session) {
    this.#session = session;
    const { limits, back, axes, locus, marks, poles, hover } = this.#layers;
    const clipped = svg("g", { "clip-path": "url(#plane-clip)" }, limits, back, locus, marks, poles, hover);
    this.#element.append(svg("clipPath", { id: "plane-clip" }, this.#clip), axes, clipped);
    this.#zoom = zoom<SVGSVGElement, unknown>()
      .scaleExtent(ZOOM)
      .on("zoom", (event: D3ZoomEvent<SVGSVGElement, unknown>) => {
        this.#transform = event.transform;
        this.#leave();
        this.#redraw();
      });
    this.#selection().call(this.#zoom).on("dblclick.zoom", null);
    this.#listen();
    watchSize(this.#frame, (width, height) => {
      this.#size = { width, height };
      this.#redraw();
    });
    session.onChange((situation) => this.show(situation));
  }

  /** The half of the locus the user chose. */
  get half(): HalfChoice {
    return this.#half.value as HalfChoice;
  }

  /** Calls back when another half is chosen. */
  onHalf(listener: () => void): void {
    this.#half.addEventListener("change", listener);
  }

  /** Draws what has changed. */
  show({ good }: Situation): void {
    if (!good) {
      this.#drawn = "";
      this.#view = "";
      return;
    }
    const signs = shownSigns(good.record, this.half);
    const drawn = `${good.picture} ${signs.join()} ${good.record.project.knob} ${JSON.stringify(good.record.permitted.knob)}`;
    if (drawn !== this.#drawn || !this.#picture) {
      this.#drawn = drawn;
      const branches = good.branches.filter((branch) => signs.includes(branch.sign));
      const pieces = branches.flatMap((branch) => piecesOf(branch, good.record.stability, good.record.permitted.knob));
      this.#picture = { record: good.record, branches, pieces, signs };
      const view = JSON.stringify(good.record.view);
      if (view !== this.#view) this.#reset();
      this.#view = view;
    } else {
      this.#picture = { ...this.#picture, record: good.record };
    }
    this.#redraw();
  }

  #selection(): Selection<SVGSVGElement, unknown, null, undefined> {
    return select<SVGSVGElement, unknown>(this.#element);
  }

  #reset(): void {
    this.#selection().call(this.#zoom.transform, zoomIdentity);
  }

  #listen(): void {
    this.#frame.addEventListener("keydown", (event) => this.#press(event));
    const controls: readonly (readonly [string, () => void])[] = [
      ["zoom-in", () => this.#selection().call(this.#zoom.scaleBy, KEY.zoom)],
      ["zoom-out", () => this.#selection().call(this.#zoom.scaleBy, 1 / KEY.zoom)],
      ["zoom-reset", () => this.#reset()],
    ];
    for (const [id, act] of controls) byId(id, HTMLButtonElement).addEventListener("click", act);
    this.#element.addEventListener("pointermove", (event) => this.#point(event));
    this.#element.addEventListener("pointerleave", () => this.#leave());
    this.#element.addEventListener("click", (event) => {
      // Browsers round the place of a click: what was read at the pointer is what is meant.
      const found = this.#pointed ?? this.#pick(event);
      const setting = found && this.#picture ? toSetting(this.#picture.record.scale, found.point.knob) : NaN;
      if (!Number.isFinite(setting)) return;
      const { project } = this.#session.situation;
      const typed = onGrid(gridOf(project.setting), roundDigits(fromNumber(setting), PICKED_DIGITS, "nearest"));
      this.#session.change(withSetting(project, typedText(typed)), "setting");
    });
  }

  #press(event: KeyboardEvent): void {
    if (event.altKey || event.ctrlKey || event.metaKey) return;
    const pan: Partial<{ [key: string]: [number, number] }> = {
      ArrowLeft: [KEY.pan, 0],
      ArrowRight: [-KEY.pan, 0],
      ArrowUp: [0, KEY.pan],
      ArrowDown: [0, -KEY.pan],
    };
    const by = pan[event.key];
    if (by) {
      const factor = this.#transform.k;
      this.#selection().call(this.#zoom.translateBy, by[0] / factor, by[1] / factor);
    } else if (event.key === "+" || event.key === "=") this.#selection().call(this.#zoom.scaleBy, KEY.zoom);
    else if (event.key === "-") this.#selection().call(this.#zoom.scaleBy, 1 / KEY.zoom);
    else if (event.key === "0") this.#reset();
    else return;
    event.preventDefault();
  }

  /** The inside of the picture, in pixels. */
  #box(): { left: number; top: number; right: number; bottom: number } {
    const scale = letterScale();
    return {
      left: this.#margin,
      top: SIZES.top * scale,
      right: Math.max(this.#size.width - SIZES.right * scale, this.#margin + 1),
      bottom: Math.max(this.#size.height - SIZES.bottom * scale, SIZES.top * scale + 1),
    };
  }

  /** The scales of the picture as it is zoomed now. */
  #scales(record: Findings): { x: Scale; y: Scale } {
    const { left, top, right, bottom } = this.#box();
    const frame: Window = frameOf(record.view, right - left, bottom - top);
    const x = scaleLinear([...frame.re], [left, right]);
    const y = scaleLinear([...frame.im], [bottom, top]);
    return { x: this.#transform.rescaleX(x), y: this.#transform.rescaleY(y) };
  }

  #draw(): void {
    const picture = this.#picture;
    if (!picture || this.#size.width === 0) return;
    this.#margin = this.#marginFor(picture.record);
    const { left, top, right, bottom } = this.#box();
    setAttributes(this.#element, { viewBox: `0 0 ${this.#size.width} ${this.#size.height}`, ...this.#size });
    setAttributes(this.#element, { "aria-label": describe(picture) });
    setAttributes(this.#clip, { x: left, y: top, width: right - left, height: bottom - top });
    this.#zoom.extent([
      [left, top],
      [right, bottom],
    ]);
    const { x, y } = this.#scales(picture.record);
    const limits = limitsOf(picture.record);
    const still = JSON.stringify([this.#drawn, x.domain(), x.range(), y.domain(), y.range(), letterScale(), limits]);
    // Only the poles at the setting move with the pointer.
    if (still !== this.#still) {
      this.#still = still;
      this.#drawAxes(picture.record, x, y);
      this.#layers.limits.replaceChildren(...limits.map((limit) => limitArea(limit, x, y, clipBox(x, y))));
      this.#layers.locus.replaceChildren(...asymptoteLines(picture, x, y), ...pieceLines(picture.pieces, x, y));
      this.#layers.marks.replaceChildren(...rootMarks(picture, x, y), ...meetingMarks(picture, x, y));
    }
    this.#layers.poles.replaceChildren(...settingMarks(picture.record, x, y));
  }

  /** The room that the longest figure on the imaginary axis needs. */
  #marginFor(record: Findings): number {
    const { top, bottom } = this.#box();
    const figures = this.#scales(record).y.ticks(tickCount(bottom - top)).map(tickText);
    return (SIZES.name + 12 + SIZES.letter * Math.max(...figures.map((text) => text.length), 3)) * letterScale();
  }

  #drawAxes({ timing }: Findings, x: Scale, y: Scale): void {
    const { left, top, right, bottom } = this.#box();
    const scale = letterScale();
    const horizontal = svg("g", { transform: `translate(0 ${bottom})` });
    const vertical = svg("g", { transform: `translate(${left} 0)` });
    const across = axisBottom<number>(x).ticks(tickCount(right - left)).tickSize(top - bottom).tickPadding(10).tickFormat(tickText);
    const up = axisLeft<number>(y).ticks(tickCount(bottom - top)).tickSize(left - right).tickPadding(8).tickFormat(tickText);
    select(horizontal).call(across).select(".domain").remove();
    select(vertical).call(up).select(".domain").remove();
    const unit = timing.plane === "z" ? " of z" : ", 1/s";
    const name = (text: string, place: string): SVGTextElement => svg("text", { class: "axis-name", transform: place }, text);
    this.#layers.axes.replaceChildren(
      unstableArea(timing.plane, x, y, [left, top, right, bottom]),
      horizontal,
      vertical,
      name(`real part${unit}`, `translate(${(left + right) / 2} ${bottom + 36 * scale})`),
      name(`imaginary part${unit}`, `translate(${12 * scale} ${(top + bottom) / 2}) rotate(-90)`),
    );
    for (const group of [horizontal, vertical]) select(group).attr("font-size", null).attr("font-family", null).attr("class", "grid");
    this.#layers.back.replaceChildren(
      svg("line", { class: "axis-line", x1: left, x2: right, y1: y(0), y2: y(0) }),
      svg("line", { class: "axis-line", x1: x(0), x2: x(0), y1: top, y2: bottom }),
      ...(timing.plane === "z" ? [svg("circle", { class: "axis-line", cx: x(0), cy: y(0), r: Math.abs(x(1) - x(0)) })] : []),
    );
  }

  #pick(event: Event): ReturnType<typeof nearestPoint> {
    if (!this.#picture) return null;
    const { x, y } = this.#scales(this.#picture.record);
    const [px, py] = pointer(event, this.#element);
    const scale = Math.abs(x(1) - x(0));
    const found = nearestPoint(this.#picture.branches, { re: x.invert(px), im: y.invert(py) }, scale);
    return found && found.distance <= REACH ? found : null;
  }

  #point(event: PointerEvent): void {
    const found = this.#pick(event);
    if (!found || !this.#picture) {
      this.#leave();
      return;
    }
    this.#pointed = found;
    const { record } = this.#picture;
    const { re, im, knob } = found.point;
    const { x, y } = this.#scales(record);
    this.#layers.hover.replaceChildren(svg("circle", { class: "hover", cx: x(re), cy: y(im), r: 5 }));
    // The polar coordinates of the place under the pointer, read off the drawing as x and y are; in the z-plane those of ln z.
    const { plane, sampling } = record.timing;
    const size = Math.hypot(re, im);
    const s = plane === "z" && sampling ? { re: Math.log(size) / sampling.period, im: Math.atan2(im, re) / sampling.period } : { re, im };
    const frequency = Math.hypot(s.re, s.im);
    const parts = [
      `${plane} = ${pairText(roundTo(re, size), roundTo(im, size))}`,
      `${settingName(record)} = ${withUnit(figure(toSetting(record.scale, knob)), settingUnit(record))}`,
      frequency === 0 ? "" : `damping ratio ${figure(-s.re / frequency, 3)}`,
      `natural frequency ${figure(frequency, 3)}${THIN_SPACE}rad/s`,
    ];
    this.#readout.replaceChildren(...parts.filter((part) => part !== "").map((part) => html("li", {}, part)));
    this.#readout.hidden = false;
  }

  #leave(): void {
    this.#pointed = null;
    this.#layers.hover.replaceChildren();
    this.#readout.hidden = true;
  }
}

/** So many ticks fit on an axis. */
function tickCount(length: number): number {
  return Math.max(2, Math.round(length / (SIZES.tick * letterScale())));
}

/** The picture in words, for those who cannot see it; the tables beside it hold the figures. */
function describe({ record, signs, pieces }: Picture): string {
  const halves = signs.map((sign) => `${sign} ${record.project.knob}`).join(" and ");
  const some = (verdict: Piece["verdict"]): boolean => pieces.some((piece) => piece.verdict === verdict);
  const good = some("stable") || some("permitted");
  const verdicts = good ? (some("unstable") ? "stable in part" : "stable throughout") : "nowhere stable";
  const permitted = some("permitted") ? ", permitted in part" : "";
  const limits = limitsOf(record).map(({ words }) => words);
  const drawn = limits.length > 0 ? ` Limits drawn: ${limits.join(", ")}.` : "";
  return `Root locus for ${halves}: ${verdicts}${permitted}.${drawn} Landmarks and poles are listed in the tables.`;
}

/** Leaves out the digits of a part that are too small to be seen beside the whole. */
function roundTo(part: number, whole: number): number {
  return Math.abs(part) < whole * 1e-4 ? 0 : part;
}

/** A little more than the picture, so that cut ends are not seen. */
function clipBox(x: Scale, y: Scale): [number, number, number, number] {
  const [left = 0, right = 0] = x.range();
  const [bottom = 0, top = 0] = y.range();
  return [left - 20, top - 20, right + 20, bottom + 20];
}

function pieceLines(pieces: readonly Piece[], x: Scale, y: Scale): SVGPathElement[] {
  const box = clipBox(x, y);
  const order = [...pieces].sort((left, right) => Number(left.verdict === "permitted") - Number(right.verdict === "permitted"));
  return order.map(({ verdict, points }) => {
    const pixels = points.map((value, index) => (index % 2 === 0 ? x(value) : y(value)));
    return svg("path", { class: `branch ${verdict}`, d: clipLine(pixels, box).map(pathOf).join("") });
  });
}

function pathOf(points: readonly number[]): string {
  const indices = points.flatMap((_, index) => (index % 2 === 0 ? [index] : []));
  const draw = line<number>()
    .x((index) => points[index] ?? 0)
    .y((index) => points[index + 1] ?? 0)
    .digits(2);
  return draw(indices) ?? "";
}

function asymptoteLines({ record, signs }: Picture, x: Scale, y: Scale): SVGElement[] {
  const { asymptotes } = record;
  if (!asymptotes) return [];
  const box = clipBox(x, y);
  const reach = 2 * Math.hypot(box[2] - box[0], box[3] - box[1]);
  return signs.flatMap((sign) => {
    const { centroid, angles } = asymptotes[sign];
    if (centroid === null) return [];
    return angles.map((degrees) => {
      const angle = (degrees * Math.PI) / 180;
      const [cx, cy] = [x(centroid), y(0)];
      const far = reach + Math.hypot(cx - box[0], cy - box[1]);
      const points = [cx, cy, cx + far * Math.cos(angle), cy - far * Math.sin(angle)];
      return svg("path", { class: "asymptote", d: clipLine(points, box).map(pathOf).join("") });
    });
  });
}

function rootMarks({ record }: Picture, x: Scale, y: Scale): SVGElement[] {
  const size = SIZES.mark * letterScale();
  const cross = `M${-size} ${-size}L${size} ${size}M${-size} ${size}L${size} ${-size}`;
  return [
    ...record.poles.map((root) => mark(root, "pole", svg("path", { d: cross }), "pole of the open loop", x, y)),
    ...record.zeros.map((root) => mark(root, "zero", svg("circle", { r: size }), "zero of the open loop", x, y)),
  ];
}

function mark(root: Root, look: string, shape: SVGElement, name: string, x: Scale, y: Scale): SVGElement {
  const size = SIZES.mark * letterScale();
  const many = root.multiplicity > 1 ? svg("text", { class: "many", x: size + 2, y: -size }, String(root.multiplicity)) : null;
  const title = svg("title", {}, `${name}, ${pairText(root.re, root.im, root.radius)}`);
  return svg("g", { class: look, transform: `translate(${x(root.re)} ${y(root.im)})` }, title, shape, many);
}

/** Breakaway and break-in points. */
function meetingMarks({ record, signs }: Picture, x: Scale, y: Scale): SVGElement[] {
  const meetings = record.landmarks.filter(({ kind, sign }) => (kind === "breakaway" || kind === "break-in") && signs.includes(sign));
  return meetings.flatMap(({ s }) => {
    const places = s.im === 0 ? [0] : [s.im, -s.im];
    return places.map((im) => svg("circle", { class: "meeting", cx: x(s.re), cy: y(im), r: 2.5 * letterScale() }));
  });
}

function settingMarks(record: Findings, x: Scale, y: Scale): SVGElement[] {
  const size = 5.5 * letterScale();
  const diamond = `M0 ${-size}L${size} 0L0 ${size}L${-size} 0Z`;
  const poles = record.closedLoop?.poles ?? [];
  return poles.map((root) => mark(root, "closed", svg("path", { d: diamond }), "pole of the closed loop at the setting", x, y));
}
