// The answer in words: which settings are permitted, where the loop is stable, and what it is at the chosen setting.
import { fromRational, printedText } from "./decimal.ts";
import { counted, figure, listed, withUnit } from "./format.ts";
import { printedEnds, stableSpans, type PrintedEnd, type StableSpan } from "./ranges.ts";
import { beyondWords, borderWords } from "./planewords.ts";
import { nameInSentence } from "./requirements.ts";
import { limitSpan, onScale, settingName, settingUnit } from "./scale.ts";
import type { ClosedLoop, Edge, LimitEdge, Plane, Record as Findings } from "./types.ts";

/** An edge of a lane, of stability and character or of a requirement. */
export type AnyEdge = Edge | LimitEdge;

/** A piece of a sentence; one with an edge can be asked for its reason. */
export interface Piece {
  readonly text: string;
  readonly edge?: AnyEdge;
  /** True for a remark behind the answer itself. */
  readonly aside?: boolean;
}

/** Pieces with a word between them. */
type Phrase = Piece[];

/** What the page says first: the permitted settings where anything is required, else the stable ones. */
export function answerSentence(record: Findings): Piece[] {
  return record.requirements.length === 0 ? stabilitySentence(record) : permittedSentence(record);
}

/** "Use 30 to 44 (permitted, computed)." or why there is nothing to use. */
export function permittedSentence(record: Findings): Piece[] {
  const { permitted } = record;
  const unit = settingUnit(record);
  const proof = permitted.proven ? "proven" : "computed";
  if (permitted.conflict) return [{ text: `No setting is permitted (${proof}): ${permitted.conflict.text.replace(/\.$/, "")}.` }];
  const usable = permitted.knob.flatMap((range, index) => {
    const [low, high] = permitted.setting[index] ?? [null, null];
    const { lowEdge = null, highEdge = null } = limitSpan(record.scale, range) ?? {};
    // A side that has an edge, but no setting of the controller's grid inside, cannot be used at all.
    return (lowEdge && low === null) || (highEdge && high === null) ? [] : [{ low, high, lowEdge, highEdge }];
  });
  if (usable.length === 0) {
    return [{ text: `No setting can be typed in: the controller’s resolution leaves none within the permitted ranges (${proof}).` }];
  }
  const phrases = usable.map(({ low, high, lowEdge, highEdge }, index): Phrase => {
    const last = index === usable.length - 1 ? unit : "";
    const end = (text: string, edge: LimitEdge | null, behind: string): Piece => {
      const shown = withUnit(typedSetting(text), behind);
      return edge ? { text: shown, edge } : { text: shown };
    };
    if (low !== null && high !== null) {
      if (low === high) return [{ text: "only " }, end(low, lowEdge, last)];
      return [end(low, lowEdge, ""), { text: " to " }, end(high, highEdge, last)];
    }
    if (low !== null) return [end(low, lowEdge, last), { text: " and more" }];
    return high === null ? [{ text: "any setting" }] : [{ text: "up to " }, end(high, highEdge, last)];
  });
  return [{ text: "Use " }, ...joined(phrases, "or"), { text: ` (permitted, ${proof}).`, aside: true }];
}

/** "At the suggested 36: midway …" */
export function suggestionReason(record: Findings): string {
  const { suggested } = record.permitted;
  if (!suggested) return "";
  const setting = withUnit(typedSetting(suggested.setting), settingUnit(record));
  return `${setting} is ${suggested.reason.trim().replace(/\.$/, "")}.`;
}

/** A setting of the record as it is printed. */
export function typedSetting(text: string): string {
  const decimal = fromRational(text);
  return decimal ? printedText(decimal) : text.replace("-", "−");
}

/** "Stable for K from 3.858 to 236.7 (proven; ends rounded to the safe side)." */
export function stabilitySentence(record: Findings): Piece[] {
  const knob = settingName(record);
  const ranges = onScale(record).stability;
  const spans = stableSpans(ranges);
  const edges = record.stability.flatMap((range) => (range.to ? [range.to] : []));
  const proof = edges.every((edge) => edge.proven) ? "proven" : "not proven";
  if (spans.length === 0) {
    const fixed = record.notices.some((notice) => notice.kind === "unstable-fixed-mode");
    const reason = fixed ? `: a fixed mode lies on ${borderWords(record.timing.plane)} or ${beyondWords(record.timing.plane)}` : "";
    return [{ text: `No value of ${knob} makes this loop stable (${proof})${reason}.` }];
  }
  const exceptions = exceptionPhrase(spans, record.timing.plane);
  const [only] = spans;
  if (spans.length === 1 && only && !only.from && !only.to) {
    return [{ text: `Stable for every value of ${knob}` }, ...exceptions, { text: ` (${proof}).` }];
  }
  const ends = spans.map(printedEnds);
  const rounded = ends.some(({ from, to }) => from?.exact === false || to?.exact === false);
  const phrases = ends.map(({ from, to }, index): Phrase => {
    const written = (end: PrintedEnd, unit: string): Piece => ({ text: withUnit(printedText(end.decimal), unit), edge: end.edge });
    // The unit stands once, behind the last figure.
    const last = index === ends.length - 1 ? settingUnit(record) : "";
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

/** "At K = 37 V/mm the loop is stable, underdamped. Not met: overshoot." */
export function settingSentence(record: Findings): string {
  const loop = record.closedLoop;
  const name = settingName(record);
  if (!loop) return `No setting of ${name} is chosen yet: drag the pointer or type one.`;
  const judged = requirementsSentence(record);
  return `At ${name} = ${withUnit(settingText(record), settingUnit(record))} the loop is ${verdictWords(loop, record.timing.plane)}.${judged && ` ${judged}`}`;
}

/** "All 4 requirements are met." or "Not met: overshoot and damping ratio." */
export function requirementsSentence({ requirements }: Findings): string {
  if (requirements.length === 0) return "";
  const failed = requirements.filter(({ met }) => met === false).map(({ kind }) => nameInSentence(kind));
  if (failed.length > 0) return `Not met: ${listed(failed)}.`;
  if (!requirements.every(({ met }) => met === true)) return "";
  return requirements.length === 1 ? "The requirement is met." : `All ${requirements.length} requirements are met.`;
}

/** The character of the closed loop in words. */
export function verdictWords(loop: ClosedLoop, plane: Plane): string {
  if (loop.name === "marginally stable") return `marginally stable: ${counted(loop.axisPoles, "pole")} on ${borderWords(plane)}`;
  if (loop.name !== "unstable") return `stable, ${loop.name}`;
  if (loop.unstablePoles > 0) return `unstable: ${counted(loop.unstablePoles, "pole")} ${beyondWords(plane)}`;
  return `unstable: ${counted(loop.axisPoles, "pole")} on ${borderWords(plane)}, some repeated`;
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

function exceptionPhrase(spans: readonly StableSpan[], plane: Plane): Piece[] {
  const edges = spans.flatMap((span) => span.touching);
  if (edges.length === 0) return [];
  const phrases = edges.map((edge): Phrase => [{ text: figure(edge.value), edge }]);
  return [{ text: ", except at " }, ...joined(phrases), { text: `, where poles touch ${borderWords(plane)}` }];
}

function joined(phrases: readonly Phrase[], conjunction: "and" | "or" = "and"): Piece[] {
  const words = listed(phrases.map((_, index) => `\u0000${index}\u0000`), conjunction).split("\u0000");
  return words.flatMap((word, place): Piece[] => (place % 2 === 1 ? (phrases[Number(word)] ?? []) : word ? [{ text: word }] : []));
}
