// The sheet: the record on paper, so that another engineer can check it by hand and sign it.
import { answerSentence, plain, settingSentence, stabilitySentence, suggestionReason } from "./answer.ts";
import { CAUTION } from "./caution.ts";
import { chartOf, type ChartName } from "./charts.ts";
import { fromNumber, printedText, roundDigits } from "./decimal.ts";
import { derivationParts, edgeTable, formula } from "./derivation.ts";
import { byId, html, type Content } from "./dom.ts";
import { withUnit } from "./format.ts";
import type { Paper, SheetFindings } from "./paper.ts";
import { limitWords } from "./reason.ts";
import { kindOf } from "./requirements.ts";
import { chartPicture } from "./responses.ts";
import { permittedLane, requirementLane } from "./lanes.ts";
import { rulerPicture } from "./ruler.ts";
import { isPlain, settingName, settingUnit } from "./scale.ts";
import { checkParts } from "./sitecheck.ts";
import { planParts } from "./stepup.ts";

/** The size of a picture of a response, in its own units; it is scaled to the paper. */
const PICTURE = { width: 620, height: 250 };
const TWO_PANES = { width: 620, height: 400 };

/** Digits of an end of a range. */
const END_DIGITS = 6;
/** The width of the ruler, likewise. */
const RULER = 720;

/** Keeps the sheet in step and connects its button. */
export function sheetPanel(paper: Paper): void {
  const page = byId("sheet-page", HTMLElement);
  const part = byId("sheet", HTMLDetailsElement);
  let record: SheetFindings | null = null;
  const draw = (): void => {
    page.replaceChildren(...(record && part.open ? sheetParts(record) : []));
    document.body.classList.toggle("with-sheet", record !== null && part.open);
    if (record) runningHead(record);
  };
  paper.onSheet((found) => {
    record = found;
    draw();
  });
  part.addEventListener("toggle", draw);
  byId("print", HTMLButtonElement).addEventListener("click", () => {
    void paper.refresh().then(() => {
      draw();
      window.print();
    });
  });
}

/** The whole sheet. */
export function sheetParts(record: SheetFindings): HTMLElement[] {
  const { derivation, remark } = record.sheet;
  return [
    html("h2", {}, record.project.title || "Loop without a title"),
    identification(record),
    ...section("Answer", ...answerParts(record)),
    ...section("The loop", ...loopParts(record)),
    ...(record.project.requirements.length > 0 ? section("Requirements", requirementTable(record)) : []),
    ...section("Ranges", html("figure", {}, rulerPicture(record, RULER))),
    ...section("Root locus", html("figure", {}, copy("plane")), copy("landmarks", "table"), copy("landmarks-more")),
    ...(record.closedLoop ? section(byId("figures-heading", HTMLElement).textContent ?? "", copy("figures-verdict"), copy("figures-table"), copy("poles-table")) : []),
    ...responseParts(record),
    ...section("Derivation for a check by hand", ...(derivation ? derivationParts(derivation, record.project.knob) : [html("p", {}, remark ?? ""), ...edgesOf(record)])),
    ...section("Step-up plan", ...planParts(record)),
    ...(record.sheet.siteCheck ? section("Site check", ...checkParts(record, record.sheet.siteCheck)) : []),
    ...section("What this rests on", ...groundParts(record)),
  ];
}

/** The edges of a loop that has no derivation by hand. */
function edgesOf(record: SheetFindings): HTMLElement[] {
  const edges = record.stability.flatMap(({ to }) => (to ? [to] : []));
  return edgeTable(edges, record.project.knob, record.timing.plane);
}

function section(title: string, ...content: readonly HTMLElement[]): HTMLElement[] {
  const [first, ...rest] = content;
  // A heading never stands alone at the foot of a page.
  return [html("div", { class: "together" }, html("h3", {}, title), first ?? null), ...rest];
}

function identification({ project }: SheetFindings): HTMLElement {
  const { machine, revision, date, preparedBy, checkedBy } = project.sheet;
  const rows: readonly (readonly [string, string])[] = [
    ["Project", project.title],
    ["Machine", machine],
    ["Revision", revision],
    ["Date", date],
    ["Prepared by", preparedBy],
    ["Checked by", checkedBy],
  ];
  return html("dl", { class: "identification" }, ...rows.map(([name, text]) => html("div", {}, html("dt", {}, name), html("dd", {}, text))));
}

function answerParts(record: SheetFindings): HTMLElement[] {
  const suggested = record.permitted.suggested ? `Suggested: ${suggestionReason(record)}` : "";
  const limited = record.requirements.length > 0 ? plain(stabilitySentence(record)) : "";
  const lines = [plain(answerSentence(record)), suggested, limited, settingSentence(record)];
  return [
    ...lines.filter(Boolean).map((text, index) => html("p", { class: index === 0 ? "answer" : "" }, text)),
    html("p", { class: "caution" }, CAUTION),
    ...(record.notices.length > 0 ? [html("ul", { class: "notices" }, ...record.notices.map((notice) => html("li", {}, notice.text)))] : []),
  ];
}

function loopParts(record: SheetFindings): HTMLElement[] {
  const { reading, project, model, scale } = record;
  const block = (name: string, mathml: string | null): HTMLElement | null => (mathml ? html("p", { class: "equation" }, name, formula(mathml)) : null);
  const { feedback, deadTime, sampling } = project.loop;
  const facts = [
    `${feedback === "positive" ? "Positive" : "Negative"} feedback.`,
    deadTime.trim() ? `Dead time of the plant: ${deadTime} s.` : "",
    sampling ? `Sampled with the period ${sampling.period} s, delay ${sampling.delay || "0"} periods.` : "",
    isPlain(scale)
      ? `The knob is ${project.knob}; the setting ${settingName(record)} is the knob itself.`
      : `The knob is ${project.knob}; ${project.knob} = ${project.setting.factor.trim() || "1"} ${scale.direction === "reciprocal" ? "÷" : "×"} ${settingName(record)}${settingUnit(record) && ` in ${settingUnit(record)}`}.`,
  ];
  const rows = project.quantities.map(({ symbol, value, unit, tolerance, meaning }) => [symbol, symbol === project.knob ? "the knob" : value, unit, tolerance && `± ${tolerance}`, meaning]);
  return [
    html("div", { class: "together" }, block("C(s) = ", reading.controller), block("P(s) = ", reading.plant), block("H(s) = ", reading.sensor)),
    html("p", {}, facts.filter(Boolean).join(" ")),
    ...(rows.length > 0 ? [table(["quantity", "value", "unit", "tolerance", "meaning"], rows)] : []),
    // With dead time or sampling the characteristic equation is no polynomial in s.
    ...(record.sheet.derivation ? [html("p", { class: "equation" }, formula(model.mathml))] : []),
  ];
}

function table(heads: readonly string[], rows: readonly (readonly Content[])[]): HTMLElement {
  const head = html("thead", {}, html("tr", {}, ...heads.map((text) => html("th", { scope: "col" }, text))));
  return html("table", { class: "figures" }, head, html("tbody", {}, ...rows.map((row) => html("tr", {}, ...row.map((cell) => html("td", {}, cell))))));
}

function requirementTable(record: SheetFindings): HTMLElement {
  const unit = settingUnit(record);
  const spans = (segments: ReturnType<typeof requirementLane>["segments"]): string => segments.map(({ from, to }) => `${inside(from, "up")} to ${inside(to, "down")}`).join("; ");
  const rows = record.requirements.map((requirement) => {
    const lane = requirementLane(record, requirement);
    const met = requirement.met === null ? "–" : requirement.met ? "✓ met" : "✗ not met";
    return [kindOf(requirement.kind).name, limitWords(requirement), spans(lane.segments) || lane.empty, requirement.proven ? "proven" : "computed", met];
  });
  const all = permittedLane(record);
  rows.push(["all together", "", spans(all.segments) || all.empty, record.permitted.proven ? "proven" : "computed", ""]);
  return table(["requirement", "limit", `met for ${withUnit(settingName(record), unit && `(${unit})`)}`, "", "at the setting"], rows);
}

/** An end of a range, rounded inward. */
function inside(value: number, direction: "up" | "down"): string {
  return Number.isFinite(value) ? printedText(roundDigits(fromNumber(value), END_DIGITS, direction)) : value < 0 ? "−∞" : "∞";
}

function responseParts(record: SheetFindings): HTMLElement[] {
  const charts: readonly ChartName[] = ["step", "load", "controller", "open loop"];
  return charts.flatMap((name, index) => {
    const chart = chartOf(name, record);
    if (typeof chart === "string") return [];
    const drawn = chartPicture(chart, chart.panes.length > 1 ? TWO_PANES : PICTURE);
    renamed(drawn, `sheet-${index}-`);
    return section(chart.title, html("figure", {}, drawn, html("figcaption", {}, chart.words)));
  });
}

function groundParts({ program, sheet, requirements }: SheetFindings): HTMLElement[] {
  const computed = requirements.filter(({ proven }) => !proven).map(({ kind }) => kindOf(kind).name.toLowerCase());
  const facts: readonly (readonly [string, string])[] = [
    ["proven", "edges and ranges of stability, counts of unstable poles, brackets, and what is marked proven: by exact arithmetic on the numbers as typed"],
    ["computed", `figures, pictures, responses, margins, the step-up plan and the site check: in floating point${computed.length > 0 ? `; and the ranges of ${computed.join(", ")}` : ""}`],
    ["program", `Stayband ${program.version}`],
    ["page file, SHA-256", program.hash ?? "unknown"],
    ["project, SHA-256", `${sheet.projectHash} (of the file that Save writes)`],
  ];
  return [html("dl", { class: "facts" }, ...facts.flatMap(([name, text]) => [html("dt", {}, name), html("dd", {}, text)]))];
}

/** A copy of a part of the page, or of the element around it, without what only a pointer can use. */
function copy(id: string, around?: string): HTMLElement {
  const found = byId(id, Element);
  const original = around ? (found.closest(around) ?? found) : found;
  const drawn = original.cloneNode(true) as HTMLElement;
  if (original instanceof SVGSVGElement) fit(drawn, original);
  drawn.querySelectorAll("svg").forEach((picture, index) => fit(picture, original.querySelectorAll("svg")[index]));
  for (const control of drawn.querySelectorAll("button")) control.replaceWith(control.textContent ?? "");
  for (const element of drawn.querySelectorAll("[tabindex], [role=slider], [role=button]")) {
    for (const name of [...element.attributes].map((attribute) => attribute.name)) {
      if (name === "tabindex" || name === "role" || name.startsWith("aria-")) element.removeAttribute(name);
    }
  }
  drawn.removeAttribute("tabindex");
  renamed(drawn, "sheet-");
  return drawn;
}

/** Gives a picture the frame it has on the screen, so that it can be scaled to the paper. */
function fit(picture: Element, original: Element | undefined): void {
  const { width, height } = original?.getBoundingClientRect() ?? { width: 0, height: 0 };
  if (width > 0) picture.setAttribute("viewBox", `0 0 ${Math.round(width)} ${Math.round(height)}`);
  for (const name of ["width", "height"]) picture.removeAttribute(name);
}

/** Ids of a copy get a prefix, and what refers to them follows. */
function renamed(root: Element, prefix: string): void {
  for (const element of [root, ...root.querySelectorAll("*")]) {
    if (element.id) element.id = prefix + element.id;
    for (const { name, value } of [...element.attributes]) {
      if (value.startsWith("url(#")) element.setAttribute(name, value.replace("url(#", `url(#${prefix}`));
      else if (name === "aria-labelledby" || name === "for") element.removeAttribute(name);
    }
  }
}

/** Title and revision at the head of every page, page number and hash at its foot. */
function runningHead({ project, sheet }: SheetFindings): void {
  const [style] = document.styleSheets;
  if (!style) return;
  const text = (value: string): string => JSON.stringify(value).replace(/[<>\n]/g, " ");
  const head = [project.title, project.sheet.revision && `revision ${project.sheet.revision}`].filter(Boolean).join(", ");
  const rule =
    `@page { @top-left { content: ${text(head)} } @top-right { content: "Stayband" } ` +
    `@bottom-left { content: ${text(`project ${sheet.projectHash.slice(0, 16)}`)} } @bottom-right { content: counter(page) " / " counter(pages) } }`;
  const last = style.cssRules.length - 1;
  if (style.cssRules[last]?.cssText.startsWith("@page")) style.deleteRule(last);
  style.insertRule(rule, style.cssRules.length);
}
