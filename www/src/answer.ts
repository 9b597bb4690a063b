// The answer in words: where the loop is stable, and what it is at the chosen setting.
import { printedText } from "./decimal.ts";
import { counted, figure, listed, withUnit } from "./format.ts";
import { printedEnds, stableSpans, type PrintedEnd, type StableSpan } from "./ranges.ts";
import type { ClosedLoop, Edge, Record as Findings } from "./types.ts";

/** A piece of a sentence; one with an edge can be asked for its reason. */
export interface Piece {
  readonly text: string;
  readonly edge?: Edge;
  /** True for a remark behind the answer itself. */
  readonly aside?: boolean;
}

/** Pieces with a word between them. */
type Phrase = Piece[];

/** "Stable for K from 3.858 to 236.7 (proven; ends rounded to the safe side)." */
export function stabilitySentence(record: Findings): Piece[] {
  const knob = record.project.knob;
  const spans = stableSpans(record.stability);
  const edges = record.stability.flatMap((range) => (range.to ? [range.to] : []));
  const proof = edges.every((edge) => edge.proven) ? "proven" : "not proven";
  if (spans.length === 0) {
    const fixed = record.notices.some((notice) => notice.kind === "unstable-fixed-mode");
    const reason = fixed ? ": a fixed mode lies on or right of the imaginary axis" : "";
    return [{ text: `No value of ${knob} makes this loop stable (${proof})${reason}.` }];
  }
  const exceptions = exceptionPhrase(spans);
  const [only] = spans;
  if (spans.length === 1 && only && !only.from && !only.to) {
    return [{ text: `Stable for every value of ${knob}` }, ...exceptions, { text: ` (${proof}).` }];
  }
  const ends = spans.map(printedEnds);
  const rounded = ends.some(({ from, to }) => from?.exact === false || to?.exact === false);
  const phrases = ends.map(({ from, to }, index): Phrase => {
    const written = (end: PrintedEnd, unit: string): Piece => ({ text: withUnit(printedText(end.decimal), unit), edge: end.edge });
    // The unit stands once, behind the last figure.
    const last = index === ends.length - 1 ? knobUnit(record) : "";
    const start = from && written(from, to ? "" : last);
    const stop = to && written(to, last);
    if (start && stop) return [{ text: "from " }, start, { text: " to " }, stop];
    if (start) return [{ text: "above " }, start];
    return stop ? [{ text: "below " }, stop] : [{ text: "everywhere" }];
  });
  const remark = rounded ? `${proof}; ends rounded to the safe side` : proof;
  return [
    { text: `Stable for ${knob} ` },
    ...joined(phrases),
    ...exceptions,
    { text: ` (${remark}).`, aside: true },
  ];
}

/** "At K = 37 V/mm the loop is stable, underdamped." */
export function settingSentence(record: Findings): string {
  const loop = record.closedLoop;
  const knob = record.project.knob;
  if (!loop) return `No setting of ${knob} is chosen yet: drag the pointer or type one.`;
  return `At ${knob} = ${withUnit(settingText(record), knobUnit(record))} the loop is ${verdictWords(loop)}.`;
}

/** The character of the closed loop in words. */
export function verdictWords(loop: ClosedLoop): string {
  if (loop.name === "marginally stable") return `marginally stable: ${counted(loop.axisPoles, "pole")} on the imaginary axis`;
  if (loop.name !== "unstable") return `stable, ${loop.name}`;
  if (loop.unstablePoles > 0) return `unstable: ${counted(loop.unstablePoles, "pole")} right of the imaginary axis`;
  return `unstable: ${counted(loop.axisPoles, "pole")} on the imaginary axis, some repeated`;
}

/** The setting as typed, with a true minus sign. */
export function settingText(record: Findings): string {
  const typed = record.project.setting.value.trim();
  return (typed === "" ? figure(record.closedLoop?.knob ?? NaN) : typed).replace("-", "−");
}

/** The unit of the knob, as noted in its row. */
export function knobUnit(record: Findings): string {
  return record.project.quantities.find((row) => row.symbol === record.project.knob)?.unit ?? "";
}

/** The pieces as plain text. */
export function plain(pieces: readonly Piece[]): string {
  return pieces.map((piece) => piece.text).join("");
}

function exceptionPhrase(spans: readonly StableSpan[]): Piece[] {
  const edges = spans.flatMap((span) => span.touching);
  if (edges.length === 0) return [];
  const phrases = edges.map((edge): Phrase => [{ text: figure(edge.value), edge }]);
  return [{ text: ", except at " }, ...joined(phrases), { text: ", where poles touch the imaginary axis" }];
}

function joined(phrases: readonly Phrase[]): Piece[] {
  const words = listed(phrases.map((_, index) => `\u0000${index}\u0000`)).split("\u0000");
  return words.flatMap((word, place): Piece[] => (place % 2 === 1 ? (phrases[Number(word)] ?? []) : word ? [{ text: word }] : []));
}
