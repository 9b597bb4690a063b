// The closed loop at the setting, in figures.
import { knobUnit, settingText, verdictWords } from "./answer.ts";
import { byId, html } from "./dom.ts";
import { dampingOf, figure, knownDigits, pairText, withUnit } from "./format.ts";
import type { Session } from "./session.ts";
import type { ClosedLoop, Root } from "./types.ts";

/** A row of the table of poles, as text; units stand in the head of the table. */
export interface PoleRow {
  readonly s: string;
  readonly ratio: string;
  readonly frequency: string;
  readonly time: string;
}

/** Digits of the figures drawn from a pole. */
const DIGITS = 3;

/** The poles of the closed loop, slowest first, each pair once. */
export function poleRows(loop: ClosedLoop): PoleRow[] {
  return loop.poles
    .filter((root) => root.im >= 0)
    .sort((left, right) => right.re - left.re)
    .map(poleRow);
}

function poleRow(root: Root): PoleRow {
  const { re, im, radius, multiplicity } = root;
  const { ratio, frequency } = dampingOf(re, im);
  const digits = Math.min(DIGITS, knownDigits(frequency, radius));
  const onAxis = Math.abs(re) <= radius;
  const many = multiplicity > 1 ? ` (${multiplicity} times)` : "";
  return {
    s: pairText(re, im, radius) + many,
    ratio: ratio === null || frequency <= radius ? "–" : onAxis ? "0" : figure(ratio, digits),
    frequency: frequency <= radius ? "0" : figure(frequency, digits),
    time: onAxis ? "∞" : re > 0 ? "grows" : figure(-1 / re, Math.min(DIGITS, knownDigits(re, radius))),
  };
}

/** Keeps the figures in step with the session. */
export function figuresTable(session: Session): void {
  const heading = byId("figures-heading", HTMLElement);
  const verdict = byId("figures-verdict", HTMLElement);
  const table = byId("figures-table", HTMLTableElement);
  const body = byId("figures", HTMLTableSectionElement);
  session.onChange(({ good }) => {
    if (!good) return;
    const { record } = good;
    const loop = record.closedLoop;
    table.hidden = loop === null;
    heading.textContent = loop ? `At setting ${withUnit(settingText(record), knobUnit(record))}` : "At the setting";
    verdict.textContent = loop ? `${capital(verdictWords(loop))}.` : "No setting is chosen yet.";
    body.replaceChildren(
      ...(loop ? poleRows(loop) : []).map(({ s, ratio, frequency, time }) =>
        html("tr", {}, ...[s, ratio, frequency, time].map((text) => html("td", { class: "number" }, text))),
      ),
    );
  });
}

function capital(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1);
}
