// The landmarks of the locus in words and as a table; a row sets the pointer to its place.
import { fromNumber, roundDigits, typedText } from "./decimal.ts";
import { byId, button, html } from "./dom.ts";
import { angleText, counted, figure, listed, pairText, withUnit } from "./format.ts";
import { shownSigns } from "./halves.ts";
import type { Plane } from "./plane.ts";
import { borderWords } from "./planewords.ts";
import { withSetting } from "./project.ts";
import { settingName, settingUnit, toSetting } from "./scale.ts";
import type { Session, Situation } from "./session.ts";
import type { KnobSign, Landmark, Plane as PolePlane, Record as Findings, Segment } from "./types.ts";

/** Digits of a setting taken from the table; the landmark itself lies between two such numbers. */
const PICKED_DIGITS = 6;

/** The landmarks worth a row: on the shown halves, without simple real poles and zeros, whose branch follows the axis. */
export function notable(landmarks: readonly Landmark[], signs: readonly KnobSign[]): Landmark[] {
  const trivial = ({ kind, s, multiplicity }: Landmark): boolean =>
    (kind === "departure" || kind === "arrival") && s.im === 0 && multiplicity === 1;
  const size = ({ knob }: Landmark): number => (knob === null ? Infinity : Math.abs(knob));
  return landmarks
    .filter((landmark) => signs.includes(landmark.sign) && !trivial(landmark))
    .sort((left, right) => size(left) - size(right) || 0);
}

/** A row of the table: a landmark, or all branches that leave one pole or arrive at one zero. */
export interface LandmarkRow extends Landmark {
  /** Degrees, for departures and arrivals. */
  readonly angles: readonly number[];
}

/** The landmarks as rows, in the same order. */
export function grouped(landmarks: readonly Landmark[]): LandmarkRow[] {
  const rows: (Landmark & { angles: number[] })[] = [];
  for (const landmark of landmarks) {
    const { kind, s, sign, angle } = landmark;
    const row = rows.find((other) => other.kind === kind && other.s.re === s.re && other.s.im === s.im && other.sign === sign);
    if (angle !== null && row) row.angles.push(angle);
    else rows.push({ ...landmark, angles: angle === null ? [] : [angle] });
  }
  for (const row of rows) row.angles.sort((left, right) => left - right);
  return rows;
}

/** A row in words. */
export function landmarkWords({ kind, s, angles, multiplicity }: LandmarkRow, plane: PolePlane): string {
  const together = multiplicity > 2 ? ` (${multiplicity} poles)` : "";
  switch (kind) {
    case "breakaway":
      return (s.im === 0 ? "leaves the real axis" : "branches meet") + together;
    case "break-in":
      return `joins the real axis${together}`;
    case "axis crossing":
      return `crosses ${borderWords(plane)}`;
    case "origin crossing":
      return plane === "z" ? "passes z = 1" : "passes the origin";
    case "alternation crossing":
      return "passes z = −1";
    case "departure":
      return `leaves the pole at ${anglesText(angles)}`;
    case "arrival":
      return `arrives at the zero at ${anglesText(angles)}`;
  }
}

/** Angles as a phrase; two opposite ones as one with both signs. */
function anglesText(angles: readonly number[]): string {
  const [first = 0, second = 0] = angles;
  if (angles.length === 2 && angleText(-first) === angleText(second)) return `±${angleText(second)}`;
  return listed(angles.map(angleText));
}

/** The asymptotes of one half in words; null where the half has none. */
export function asymptoteWords(record: Findings, sign: KnobSign): string | null {
  const found = record.asymptotes?.[sign];
  if (!found || found.count === 0) return null;
  const from = found.centroid === null ? "" : ` from ${figure(found.centroid)}`;
  return `${counted(found.count, "branch").replace("branchs", "branches")} to infinity${from} at ${listed(found.angles.map(angleText))}`;
}

/** The parts of the real axis on the locus in words; null where there are none. */
export function realAxisWords(record: Findings, sign: KnobSign): string | null {
  const segments = record.realAxis?.[sign] ?? [];
  if (segments.length === 0) return null;
  const end = (value: number | null, infinite: string): string => (value === null ? infinite : figure(value));
  return listed(segments.map(([from, to]: Segment) => `${end(from, "−∞")} to ${end(to, "+∞")}`));
}

/** Keeps the table in step with the session and the half that is shown. */
export function landmarksTable(session: Session, plane: Plane): void {
  const body = byId("landmarks", HTMLTableSectionElement);
  const head = byId("landmarks-knob", HTMLElement);
  const place = byId("landmarks-place", HTMLElement);
  const none = byId("landmarks-none", HTMLElement);
  const more = byId("landmarks-more", HTMLElement);
  let drawn = "";
  const show = ({ good }: Situation): void => {
    if (!good) return;
    const { record } = good;
    const signs = shownSigns(record, plane.half);
    const unit = settingUnit(record);
    const key = [good.picture, signs.join(), JSON.stringify(record.scale), record.project.knob, unit].join(" ");
    if (key === drawn) return;
    drawn = key;
    head.textContent = withUnit(settingName(record), unit && `(${unit})`);
    place.textContent = record.timing.plane === "z" ? "z" : "s, 1/s";
    const rows = grouped(notable(record.landmarks, signs));
    body.replaceChildren(...rows.map((landmark) => tableRow(landmark, record, session)));
    none.hidden = rows.length > 0;
    more.replaceChildren(...signs.flatMap((sign) => summary(record, sign, signs.length > 1)));
  };
  session.onChange(show);
  plane.onHalf(() => {
    plane.show(session.situation);
    show(session.situation);
  });
}

function tableRow(landmark: LandmarkRow, record: Findings, session: Session): HTMLTableRowElement {
  const { knob, s, sign } = landmark;
  const words = landmarkWords(landmark, record.timing.plane);
  const setting = toSetting(record.scale, knob ?? (sign === "positive" ? Infinity : -Infinity));
  const choose = (): void => {
    const text = typedText(roundDigits(fromNumber(setting), PICKED_DIGITS, "nearest"));
    session.change(withSetting(session.situation.project, text), "setting");
  };
  const text = figure(setting);
  const value =
    knob === null || !Number.isFinite(setting) ? text : button(text, choose, { class: "figure", title: `Set the pointer here: ${words}` });
  return html(
    "tr",
    {},
    html("td", {}, words),
    html("td", { class: "number", title: equivalentWords(landmark) }, pairText(s.re, s.im)),
    html("td", { class: "number" }, value),
  );
}

/** "from s = −3 ± 4 j" for a place in the z-plane. */
function equivalentWords({ equivalent }: Landmark): string | null {
  return equivalent && `from s = ${pairText(equivalent.re, equivalent.im)}`;
}

function summary(record: Findings, sign: KnobSign, named: boolean): HTMLElement[] {
  const side = named ? `, ${record.project.knob} ${sign === "positive" ? ">" : "<"} 0` : "";
  const lines = [
    { term: `asymptotes${side}`, text: asymptoteWords(record, sign) },
    { term: `real axis${side}`, text: realAxisWords(record, sign) },
  ];
  return lines.flatMap(({ term, text }) => (text === null ? [] : [html("dt", {}, term), html("dd", {}, text)]));
}
