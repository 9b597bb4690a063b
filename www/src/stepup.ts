// The step-up plan as a table, on the screen and on the sheet.
import { typedSetting } from "./answer.ts";
import { CAUTION } from "./caution.ts";
import { byId, html } from "./dom.ts";
import { figure, withUnit } from "./format.ts";
import type { Paper, SheetFindings } from "./paper.ts";
import { settingName, settingUnit } from "./scale.ts";
import type { StepUpRow } from "./types.ts";

/** Digits of what is predicted: more is read off no machine. */
const DIGITS = 3;

/** Keeps the plan on the screen in step with the sheet. */
export function stepUpPanel(paper: Paper): void {
  const place = byId("step-up-plan", HTMLElement);
  paper.onSheet((record) => place.replaceChildren(...(record ? planParts(record) : ["There is no plan while the loop cannot be read."])));
}

/** Remarks, the edge ahead and the table; the caution stands over them. */
export function planParts(record: SheetFindings): HTMLElement[] {
  const { remarks, edge, rows } = record.sheet.stepUp;
  const unit = settingUnit(record);
  const caution = html("p", { class: "caution" }, CAUTION);
  const list = remarks.length > 0 ? html("ul", {}, ...remarks.map((text) => html("li", {}, `${capital(text)}.`))) : null;
  if (rows.length === 0) return [caution, ...(list ? [list] : [])];
  const ahead = edge
    ? `The edge ahead is at ${settingName(record)} = ${edge.setting === null ? "∞" : withUnit(figure(edge.setting), unit)}` +
      (edge.period === null
        ? "; no oscillation belongs to it."
        : `: there an oscillation with a period of ${withUnit(figure(edge.period), "s")} no longer dies out.`)
    : "";
  const note = edge?.period
    ? " Stop, and go back one row, when an oscillation comes near the period in the column “stop” and a swing is at least that part of the one a period before."
    : "";
  const heads = [
    withUnit(settingName(record), unit && `(${unit})`),
    "overshoot, %",
    "frequency, rad/s",
    "period, s",
    "damping ratio",
    "swing to swing",
    "settles, s",
    "gain left, dB",
    "stop: period, s; swing to swing",
    "seen: overshoot, %",
    "seen: period, s",
    "name, time",
  ];
  const table = html(
    "table",
    { class: "figures plan" },
    html("thead", {}, html("tr", {}, ...heads.map((text) => html("th", { scope: "col" }, text)))),
    html("tbody", {}, ...rows.map(planRow)),
  );
  return [caution, ...(list ? [list] : []), html("p", {}, ahead, note), html("div", { class: "scroll", tabindex: 0, role: "group", "aria-label": "Step-up plan" }, table)];
}

function planRow(row: StepUpRow): HTMLTableRowElement {
  const shown = (value: number | null): string => (value === null ? "–" : figure(value, DIGITS));
  const decibels = row.room === null ? null : 20 * Math.log10(row.room);
  const stop = row.stop ? `${figure(row.stop.period, DIGITS)}; ${figure(row.stop.decay, DIGITS)}` : "–";
  const values = [row.overshoot, row.omega, row.period, row.damping, row.decay, row.settling, decibels].map(shown);
  return html(
    "tr",
    {},
    html("th", { scope: "row" }, typedSetting(row.setting), row.permitted ? null : html("small", {}, " not permitted")),
    ...[...values, stop, "", "", ""].map((text) => html("td", { class: "number" }, text)),
  );
}

/** With a large first letter. */
export function capital(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1);
}
