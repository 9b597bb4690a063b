// Why an edge is an edge, in words.
import { fromRational, printedText, readDecimal } from "./decimal.ts";
import { counted, figure, listed, THIN_SPACE } from "./format.ts";
import { kindWords, stabilityWords } from "./lanes.ts";
import type { CharacterRange, Edge, Record as Findings } from "./types.ts";

/** A line of the explanation. */
export interface ReasonLine {
  readonly term: string;
  readonly text: string;
}

/** What happens at an edge, in one sentence. */
export function happening(edge: Edge): string {
  switch (edge.kind) {
    case "axis crossing": {
      const verb = edge.touching ? "touches the imaginary axis and returns" : "crosses the imaginary axis";
      const places = edge.omegas.length > 0 ? edge.omegas : edge.omega === null ? [] : [edge.omega];
      const at = listed(places.map((omega) => `±${figure(omega)}${THIN_SPACE}j`));
      if (places.length > 1) return `Pole pairs reach the imaginary axis at ${at} rad/s.`;
      return `A pole pair ${verb} at ${at} rad/s.`;
    }
    case "origin crossing":
      return edge.touching ? "A pole touches the origin, s = 0, and returns." : "A pole passes the origin, s = 0.";
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

/** All that is known about an edge. */
export function reasonLines(record: Findings, edge: Edge): ReasonLine[] {
  const knob = record.project.knob;
  const exactly = `${edge.name}; ${counted(edge.unstablePoles, "unstable pole")}, ${edge.axisPoles} on the imaginary axis`;
  return [
    { term: "what happens", text: happening(edge) },
    ...neighbours(record, edge),
    { term: "exactly there", text: exactly },
    ...(edge.exact === null ? [] : [{ term: "exact value", text: exactText(knob, edge.exact) }]),
    { term: "lies between", text: edge.bracket.map(bracketText).join(" and ") },
    { term: "proof", text: edge.proven ? "proven by exact arithmetic" : "not proven; computed in floating point" },
  ];
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
