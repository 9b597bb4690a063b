// Why an edge is an edge, in words.
import { fromRational, printedText, readDecimal } from "./decimal.ts";
import type { AnyEdge } from "./answer.ts";
import { counted, figure, listed, THIN_SPACE, withUnit } from "./format.ts";
import { kindWords, stabilityWords } from "./lanes.ts";
import { borderWords } from "./planewords.ts";
import { kindOf, nameInSentence } from "./requirements.ts";
import { isPlain, originOf, settingName, settingUnit, toSetting } from "./scale.ts";
import type { CharacterRange, Edge, LimitEdge, Plane, Record as Findings } from "./types.ts";

/** A line of the explanation. */
export interface ReasonLine {
  readonly term: string;
  readonly text: string;
}

/** What happens at an edge, in one sentence. */
export function happening(edge: Edge, plane: Plane): string {
  switch (edge.kind) {
    case "axis crossing": {
      const border = borderWords(plane);
      const verb = edge.touching ? `touches ${border} and returns` : `crosses ${border}`;
      const places = edge.omegas.length > 0 ? edge.omegas : edge.omega === null ? [] : [edge.omega];
      const at = listed(places.map((omega) => `±${figure(omega)}${THIN_SPACE}j`));
      if (places.length > 1) return `Pole pairs reach ${border} at ${at} rad/s.`;
      return `A pole pair ${verb} at ${at} rad/s.`;
    }
    case "origin crossing":
      if (plane === "z") return edge.touching ? "A pole touches the unit circle at z = 1 and returns." : "A pole passes z = 1: nothing holds the output any more.";
      return edge.touching ? "A pole touches the origin, s = 0, and returns." : "A pole passes the origin, s = 0.";
    case "alternation crossing":
      return "A pole passes z = −1: the signals change their sign from sample to sample.";
    case "no dead time":
      return "There is no dead time here, and there can be none below zero.";
    case "degree drop":
      return "The leading coefficient of the characteristic polynomial vanishes: a pole passes infinity.";
    case "breakaway":
      return "Real poles meet and leave the real axis.";
    case "break-in":
      return "A pole pair meets on the real axis and becomes real.";
    case "repeated pole":
      return "At zero gain the open loop has a repeated pole.";
  }
}

/** True for an edge of a requirement or of the permitted range. */
export function isLimit(edge: AnyEdge): edge is LimitEdge {
  return "cause" in edge;
}

/** "Edge at setting 29.62": the heading of the explanation. */
export function reasonHeading(record: Findings, edge: AnyEdge): string {
  const knob = isLimit(edge) ? edge.knob : originOf(edge).value;
  const setting = isPlain(record.scale) ? knob : toSetting(record.scale, knob);
  return `Edge at ${settingName(record)} = ${withUnit(figure(setting, 6), settingUnit(record))}`;
}

/** What fails behind an edge, in one sentence. */
export function failing(record: Findings, { cause }: LimitEdge): string {
  if (cause.kind === "stability") return "Behind it the loop is no longer stable.";
  if (cause.kind === "controller") return "Behind it the controller takes no such setting.";
  const judged = record.requirements.find((requirement) => requirement.kind === cause.requirement);
  const name = nameInSentence(cause.requirement);
  return judged ? `Behind it the requirement on ${name}, ${limitWords(judged)}, is not met.` : `Behind it the requirement on ${name} is not met.`;
}

/** "at least 0.5", "at most 15 %". */
export function limitWords({ kind, limit, atLeast }: Pick<Findings["requirements"][number], "kind" | "limit" | "atLeast">): string {
  return `${atLeast ? "at least" : "at most"} ${quantity(limit, kindOf(kind).unit)}`;
}

/** A figure with its unit; degrees stand close. */
export function quantity(value: number, unit: string, digits = 4): string {
  return unit === "°" ? `${figure(value, digits)}°` : withUnit(figure(value, digits), unit);
}

/** All that is known about an edge. */
export function reasonLines(record: Findings, asked: AnyEdge): ReasonLine[] {
  return isLimit(asked) ? limitLines(record, asked) : edgeLines(record, originOf(asked));
}

function limitLines(record: Findings, edge: LimitEdge): ReasonLine[] {
  const { cause, bracket, proven } = edge;
  const stability = cause.kind === "stability" ? stabilityEdge(record, edge.knob) : undefined;
  if (stability) return [{ term: "condition", text: failing(record, edge) }, ...edgeLines(record, stability)];
  const knob = withUnit(figure(edge.knob, 6), knobUnitOf(record));
  return [
    { term: "condition", text: failing(record, edge) },
    ...(isPlain(record.scale) ? [] : [{ term: "knob there", text: `${record.project.knob} = ${knob}` }]),
    { term: isPlain(record.scale) ? "lies between" : "knob between", text: bracket.map(bracketText).join(" and ") },
    { term: "proof", text: proven ? "proven by exact arithmetic" : "computed from the true response, refined in floating point" },
  ];
}

function knobUnitOf({ project }: Findings): string {
  return project.quantities.find((row) => row.symbol === project.knob)?.unit ?? "";
}

/** The edge of the stability lane at a knob. */
function stabilityEdge(record: Findings, knob: number): Edge | undefined {
  const near = (edge: Edge): boolean => Math.abs(edge.value - knob) <= Math.abs(knob) * 1e-12;
  return record.stability.flatMap(({ to }) => (to ? [to] : [])).find(near);
}

function edgeLines(record: Findings, edge: Edge): ReasonLine[] {
  const knob = record.project.knob;
  const exactly = `${edge.name}; ${counted(edge.unstablePoles, "unstable pole")}, ${edge.axisPoles} on ${borderWords(record.timing.plane)}`;
  return [
    { term: "what happens", text: happening(edge, record.timing.plane) },
    ...neighbours(record, edge),
    { term: "exactly there", text: exactly },
    ...(isPlain(record.scale) ? [] : [{ term: "knob there", text: `${knob} = ${withUnit(figure(edge.value, 6), knobUnitOf(record))}` }]),
    ...(edge.exact === null ? [] : [{ term: "exact value", text: exactText(knob, edge.exact) }]),
    { term: isPlain(record.scale) ? "lies between" : "knob between", text: edge.bracket.map(bracketText).join(" and ") },
    { term: "proof", text: edge.proven ? provenBy(record) : "not proven; computed in floating point" },
  ];
}

/** Exponentials have no exact numbers: those of dead time and sampling are enclosed. */
function provenBy({ timing }: Findings): string {
  const enclosed = timing.sampling !== null || timing.deadTime > 0 || timing.deadTimePerKnob > 0;
  return enclosed ? "proven by rigorous enclosures" : "proven by exact arithmetic";
}

/** The ranges below and above an edge, as the lane says them. */
function neighbours(record: Findings, edge: Edge): ReasonLine[] {
  const below = record.stability.find((range) => range.to?.value === edge.value);
  const above = record.stability.find((range) => range.from?.value === edge.value);
  if (below && above) return around(stabilityWords(below), stabilityWords(above));
  const before = record.character.find((range) => range.to?.value === edge.value);
  const after = record.character.find((range) => range.from?.value === edge.value);
  return before && after ? around(characterText(before), characterText(after)) : [];
}

function around(below: string, above: string): ReasonLine[] {
  return [
    { term: "below", text: below },
    { term: "above", text: above },
  ];
}

function characterText(range: CharacterRange): string {
  return `${kindWords(range.realPoles, range.pairs)}, ${range.name}`;
}

function exactText(knob: string, exact: string): string {
  const decimal = fromRational(exact);
  const fraction = exact.replace("-", "−");
  const same = decimal && exact.includes("/") ? ` = ${printedText(decimal)}` : "";
  return `${knob} = ${fraction}${same}`;
}

function bracketText(text: string): string {
  const decimal = readDecimal(text);
  return decimal ? printedText(decimal) : text;
}
