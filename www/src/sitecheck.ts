// The site check: what was seen, what the model says, and the correction that explains it.
import { typedSetting } from "./answer.ts";
import { LIMIT_CAUTION } from "./caution.ts";
import { button, byId, html } from "./dom.ts";
import { figure, listed, withUnit } from "./format.ts";
import type { Paper, SheetFindings } from "./paper.ts";
import { completed } from "./project.ts";
import { settingName, settingUnit, toSetting } from "./scale.ts";
import type { Session } from "./session.ts";
import { capital } from "./stepup.ts";
import type { Correction, SiteCheck } from "./types.ts";

/** Connects the fields and the result. */
export function siteCheckPanel(session: Session, paper: Paper): void {
  const place = byId("site-check-result", HTMLElement);
  const overshoot = byId("seen-overshoot", HTMLElement);
  session.onChange(({ project }) => {
    overshoot.hidden = project.siteCheck.seen !== "step";
  });
  paper.onSheet((record) => {
    const check = record?.sheet.siteCheck;
    const corrected = check?.correction?.project;
    const open = corrected ? button("Open the corrected project", () => void session.open(completed(corrected))) : null;
    place.replaceChildren(...(record && check ? [...checkParts(record, check), ...(open ? [open] : [])] : []));
  });
}

/** The result in words. */
export function checkParts(record: SheetFindings, check: SiteCheck): HTMLElement[] {
  const lines = [...check.remarks.map((text) => `${capital(text)}.`), predictedWords(record, check)];
  if (check.correction) lines.push(...correctionWords(record, check.correction));
  return [html("p", { class: "caution" }, LIMIT_CAUTION), ...lines.filter(Boolean).map((text) => html("p", {}, text))];
}

function predictedWords(record: SheetFindings, { predicted, seen }: SiteCheck): string {
  if (!predicted) return "";
  const time = (value: number | null): string => (value === null ? "no second peak" : `a period of ${withUnit(figure(value), "s")}`);
  if (seen === "step") {
    const peak = predicted.overshoot === null ? "no overshoot" : `an overshoot of ${withUnit(figure(predicted.overshoot, 3), "%")}`;
    return `The model says ${peak} and ${time(predicted.period)} at this setting.`;
  }
  if (predicted.period === null || predicted.setting === null) return "In the model no oscillation sustains itself on this side.";
  return `In the model it oscillates at ${settingName(record)} = ${withUnit(figure(predicted.setting), settingUnit(record))}, with ${time(predicted.period)}.`;
}

function correctionWords(record: SheetFindings, correction: Correction): string[] {
  const { gain, deadTime, allowed, within } = correction;
  const time = withUnit(figure(Math.abs(deadTime)), "s");
  const lag = deadTime < 0 ? `${time} less dead time` : `${time} more dead time`;
  const found = `What was seen is explained by a loop gain of ${figure(gain)} times the model’s and ${lag} (computed).`;
  const range = ([low, high]: readonly number[]): string => `${figure(low ?? NaN, 3)} to ${figure(high ?? NaN, 3)}`;
  const judged = allowed
    ? `The stated tolerances allow a gain of ${range(allowed.gain)} times and a dead time of ${range(allowed.deadTime)} s more (to first order): the correction lies ${within ? "within" : "outside of"} them.`
    : "No tolerances are stated for the quantities, so that nothing can be said of them.";
  const remark = correction.remark ? `${capital(correction.remark)}.` : "";
  return [found, judged, newRanges(record, correction), remark];
}

function newRanges({ scale, ...record }: SheetFindings, { stable, permitted }: Correction): string {
  if (stable.length === 0) return "";
  const name = settingName({ scale, ...record });
  const end = (knob: number | null, open: string): string => (knob === null ? open : figure(toSetting(scale, knob)));
  const ranges = stable.map(([low, high]) => {
    const ends = [end(low, "−∞"), end(high, "∞")];
    return (scale.direction === "reciprocal" || scale.factor < 0 ? ends.reverse() : ends).join(" to ");
  });
  const settings = permitted.flatMap(([low, high]) => (low !== null || high !== null ? [`${low === null ? "…" : typedSetting(low)} to ${high === null ? "…" : typedSetting(high)}`] : []));
  const use = settings.length > 0 ? ` Permitted: ${listed(settings, "or")}.` : " No setting is permitted then.";
  return `With the correction the loop is stable for ${name} ${listed(ranges)}.${use}`;
}
