// How the stable range shrinks with the sample period, and the longest period that still permits the setting.
import { byId, html } from "./dom.ts";
import { figure, listed, withUnit } from "./format.ts";
import { settingName, settingUnit, toSetting } from "./scale.ts";
import type { Session } from "./session.ts";
import type { Record as Findings, SamplingRecord, StableAtPeriod } from "./types.ts";

/** "Stable at this setting up to a sample period of 0.0107 s." */
export function longestWords({ longestPeriod }: SamplingRecord, record: Findings): string {
  if (record.closedLoop === null) return "";
  if (longestPeriod === null) return "No limit of the sample period was found for this setting.";
  return `At this setting the loop stays stable up to a sample period of ${withUnit(figure(longestPeriod), "s")}.`;
}

/** The stable settings at one period in words. */
export function rangesWords(record: Findings, { ranges }: StableAtPeriod): string {
  if (ranges.length === 0) return "none";
  const phrases = ranges.map(([from, to]) => {
    const ends = [from, to].map((knob, side) => (knob === null ? (side === 0 ? -Infinity : Infinity) : toSetting(record.scale, knob)));
    const [low = -Infinity, high = Infinity] = ends.sort((left, right) => left - right);
    if (low === -Infinity) return high === Infinity ? "every setting" : `below ${figure(high)}`;
    return high === Infinity ? `above ${figure(low)}` : `${figure(low)} … ${figure(high)}`;
  });
  return listed(phrases);
}

/** Keeps the table in step with the session. */
export function periodsTable(session: Session): void {
  const table = byId("periods-table", HTMLTableElement);
  const words = byId("periods-words", HTMLElement);
  const head = byId("periods-settings", HTMLElement);
  const body = byId("periods", HTMLTableSectionElement);
  session.onChange(({ good }) => {
    if (!good) return;
    const { record } = good;
    const { sampling } = record.timing;
    table.hidden = words.hidden = sampling === null;
    if (!sampling) return;
    words.textContent = longestWords(sampling, record);
    head.textContent = `stable ${withUnit(settingName(record), settingUnit(record) && `(${settingUnit(record)})`)}`;
    body.replaceChildren(
      ...sampling.byPeriod.map((at) =>
        html(
          "tr",
          { "aria-current": at.period === sampling.period ? "true" : null },
          html("td", { class: "number" }, figure(at.period)),
          html("td", { class: "number" }, rangesWords(record, at)),
        ),
      ),
    );
  });
}
