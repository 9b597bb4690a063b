// The derivation for a check by hand, typeset for paper: long formulas break between their terms.
import { happening } from "./reason.ts";
import { angleText, counted, figure, listed, pairText, THIN_SPACE } from "./format.ts";
import { html, type Content } from "./dom.ts";
import { mathElement } from "./mathml.ts";
import { kindOf } from "./requirements.ts";
import type { Candidate, Derivation, DirectionStep, Edge, Formula, Plane, RangeCheck, RequirementStep, RouthRow, RouthTable } from "./types.ts";

/** Digits to check a solution with: as many as a pocket calculator shows. */
const DIGITS = 10;
/** A fraction longer than this, in letters, stands in one line that can break. */
const LONGEST_FRACTION = 44;

const MATHML = "http://www.w3.org/1998/Math/MathML";

/** A formula whose terms can stand in several lines. */
export function formula(text: string): HTMLElement {
  const root = mathElement(text);
  return html("span", { class: "formula" }, ...(root ? pieces([...root.childNodes]) : []));
}

/** `math` elements of one term each, signs in front. */
function pieces(nodes: readonly ChildNode[]): Element[] {
  const flat = nodes.flatMap((node) => (node instanceof Element && isSum(node) ? [...node.childNodes] : [node]));
  const groups: ChildNode[][] = [[]];
  for (const node of flat) {
    if (/^[+−=≈]$/.test(node.textContent ?? "") && (groups.at(-1)?.length ?? 0) > 0) groups.push([]);
    groups.at(-1)?.push(node);
  }
  return groups.map((group, index) => {
    const math = document.createElementNS(MATHML, "math");
    const row = document.createElementNS(MATHML, "mrow");
    row.append(...group);
    // A sign that begins a piece stands between two terms all the same.
    const [first] = row.children;
    if (index > 0 && first?.localName === "mo") first.setAttribute("form", "infix");
    math.append(row);
    return math;
  });
}

/** A row with a sign among its parts. */
function isSum(element: Element): boolean {
  return element.localName === "mrow" && [...element.children].some((part) => part.localName === "mo" && /^[+−]$/.test(part.textContent ?? ""));
}

/** An element of a Routh array: a fraction, in one line that can break where it is long. */
function element({ mathml, text }: Formula): HTMLElement {
  const root = mathElement(mathml);
  const fraction = root?.firstElementChild;
  if (!fraction || fraction.localName !== "mfrac" || text.length <= LONGEST_FRACTION) return formula(mathml);
  const [above, below] = [...fraction.children];
  const side = (part: Element | undefined): Content[] => (part ? ["(", ...spaced(pieces([part])), ")"] : []);
  return html("span", { class: "formula" }, ...side(above), " / ", ...side(below));
}

function spaced(parts: readonly Element[]): Content[] {
  return parts.flatMap((part, index) => (index > 0 ? [" ", part] : [part]));
}

function equation(left: string, text: Formula, right = "\u00a0=\u00a00"): HTMLElement {
  return html("p", { class: "equation" }, left, formula(text.mathml), right);
}

/** The whole derivation; `knob` is the knob's name. */
export function derivationParts(derivation: Derivation, knob: string): HTMLElement[] {
  const { affine, moving, fixed, axis, breakaway } = derivation;
  return [
    heading("Characteristic polynomial"),
    equation("F(s) = ", moving),
    ...(fixed ? [equation(`A factor that ${knob} does not move is taken out: `, fixed, "; its roots are fixed modes.")] : []),
    ...(affine ? [equation(`F = D + ${knob} N with D = `, affine[0], ""), equation("N = ", affine[1], "")] : []),
    heading(`Routh array with ${knob} in it`),
    ...(derivation.routhRemark ? [html("p", {}, `${derivation.routhRemark}.`)] : []),
    ...derivation.routh.map((table) => routhTable(table)),
    heading("Edges of stability"),
    html("p", {}, "A pole can reach the axis only where one of these vanishes; what is kept is an edge, proven."),
    ...derivation.conditions.flatMap(({ kind, equation: text, candidates }) => [
      equation(`${CONDITIONS[kind]}: `, text),
      candidateTable(candidates, knob),
    ]),
    ...(axis
      ? [
          html("p", {}, `On s = jω, with ${axis.variable} = ω², real part and imaginary part over ω of F vanish:`),
          equation("", axis.even),
          equation("", axis.odd),
          ...(axis.eliminated ? [equation(`Without ${knob}: `, axis.eliminated), candidateTable(axis.candidates, knob)] : []),
        ]
      : []),
    ...edgeTable(derivation.edges, knob, "s"),
    heading("Every range, counted at one number"),
    rangeTable(derivation.ranges, knob),
    ...asymptoteParts(derivation, knob),
    ...(breakaway
      ? [
          heading("Breakaway and break-in points"),
          equation(breakaway.discriminant ? "The discriminant of F vanishes: " : "D′ N − D N′ = ", breakaway.equation),
          candidateTable(breakaway.candidates, knob),
        ]
      : []),
    ...(derivation.directions.length > 0 ? [heading("Angles of departure and arrival"), ...derivation.directions.map((step) => direction(step, knob))] : []),
    ...(derivation.requirements.length > 0 ? [heading("Requirements"), ...derivation.requirements.flatMap((step) => requirement(step, knob))] : []),
  ];
}

const CONDITIONS = {
  origin: "Constant coefficient, a pole at the origin",
  "degree-drop": "Highest coefficient, a pole passes infinity",
  "row-of-zeros": "Last Hurwitz determinant but one (row s¹ of the array), poles opposite each other",
} as const;

function heading(text: string): HTMLElement {
  return html("h4", {}, text);
}

function routhTable({ addedPole, rows }: RouthTable): HTMLElement {
  const about = addedPole === null ? "" : `The first element of a row is zero for every value; the array of (s + ${addedPole}) F(s), which has the same unstable poles, goes on:`;
  const body = rows.flatMap((row) => {
    const note = specialWords(row);
    const cells = html("td", {}, html("div", { class: "elements" }, ...row.elements.map(element)), note);
    return html("tr", {}, html("th", { scope: "row" }, power(row.power)), cells);
  });
  return html("div", {}, about ? html("p", {}, about) : null, html("table", { class: "routh" }, html("tbody", {}, ...body)));
}

function specialWords({ special }: RouthRow): HTMLElement | null {
  if (!special) return null;
  if (special.kind === "zero-first-element") return html("p", {}, "Special case: zero first element. The array ends here.");
  return html("p", {}, "Special case: zero row, replaced by the derivative of the auxiliary polynomial ", formula(special.auxiliary.mathml), ", the row above up to its denominator.");
}

function power(exponent: number): HTMLElement {
  return html("span", {}, "s", html("sup", {}, String(exponent)));
}

function plainTable(heads: readonly string[], rows: readonly (readonly Content[])[]): HTMLElement {
  return html(
    "table",
    { class: "figures" },
    html("thead", {}, html("tr", {}, ...heads.map((text) => html("th", { scope: "col" }, text)))),
    html("tbody", {}, ...rows.map((row) => html("tr", {}, ...row.map((cell) => html("td", {}, cell))))),
  );
}

function candidateTable(candidates: readonly Candidate[], knob: string): HTMLElement {
  if (candidates.length === 0) return html("p", {}, "It has no real solution.");
  const place = ({ s }: Candidate): string => (s === null ? "" : s.im === 0 || s.re !== 0 ? pairText(s.re, s.im) : `± ${figure(s.im, DIGITS)}${THIN_SPACE}j`);
  const value = ({ knob: q }: Candidate): string => (q === null ? "–" : figure(q, DIGITS));
  const times = ({ multiplicity }: Candidate): string => (multiplicity > 1 ? ` (${multiplicity}-fold)` : "");
  const places = candidates.some(({ s }) => s !== null);
  return plainTable(
    [...(places ? ["s, 1/s"] : []), knob, ""],
    candidates.map((candidate) => [...(places ? [place(candidate)] : []), value(candidate), `${candidate.kept ? "✓ " : "✗ "}${candidate.reason}${times(candidate)}`]),
  );
}

/** The edges with their brackets. */
export function edgeTable(edges: readonly Edge[], knob: string, plane: Plane): HTMLElement[] {
  if (edges.length === 0) return [];
  const rows = edges.map((edge) => [
    edge.exact === null ? figure(edge.value, DIGITS) : `${figure(edge.value, DIGITS)} = ${edge.exact.replace("-", "−")} exactly`,
    edge.bracket.map((text) => text.replace("-", "−")).join(" … "),
    edge.omega === null ? "–" : figure(edge.omega, DIGITS),
    happening(edge, plane),
    edge.proven ? "proven" : "not proven",
  ]);
  return [html("p", {}, "The edges with the decimal numbers between which they surely lie:"), plainTable([knob, "bracket", "ω, rad/s", "what happens", ""], rows)];
}

function rangeTable(ranges: readonly RangeCheck[], knob: string): HTMLElement {
  const rows = ranges.map((range) => [
    range.sample.replace("-", "−"),
    range.firstColumn.map((text) => text.replace("-", "−")).join("; ") +
      (range.addedPole === null ? "" : ` (of (s + ${range.addedPole}) F)`) +
      range.zeroRows.map((at) => `; row s^${at} was zero`).join(""),
    range.changes === null ? "–" : String(range.changes),
    (range.fixedUnstable > 0 ? `${range.unstablePoles}, of them ${range.fixedUnstable} fixed` : String(range.unstablePoles)) +
      (range.onAxis ? `; ${range.onAxis} on the axis` : ""),
  ]);
  return plainTable([knob, "first column, rounded down", "changes of sign", "unstable poles claimed"], rows);
}

function asymptoteParts({ asymptotes }: Derivation, knob: string): HTMLElement[] {
  if (!asymptotes) return [];
  const [poles, zeros] = asymptotes.counts;
  const [poleSum, zeroSum] = asymptotes.sums.map((text) => text.replace("-", "−"));
  const count = Math.abs(poles - zeros);
  const [more, fewer] = poles >= zeros ? [poleSum, zeroSum] : [zeroSum, poleSum];
  const angles = (sign: "positive" | "negative"): string => listed(asymptotes.lines[sign].angles.map(angleText));
  const counts = `${counted(poles, "pole")} with the sum ${poleSum}, ${counted(zeros, "zero")} with the sum ${zeroSum}: `;
  const text =
    count === 0 || asymptotes.centroid === null
      ? `${counts}no asymptotes.`
      : `${counts}${count} to infinity, from the centroid (${more} − (${fewer}))/${count} = ${asymptotes.centroid.replace("-", "−")}, at ${angles("positive")} for ${knob} > 0 and ${angles("negative")} for ${knob} < 0.`;
  return [heading("Asymptotes"), html("p", {}, text)];
}

function direction({ kind, s, multiplicity, terms, angles }: DirectionStep, knob: string): HTMLElement {
  const departs = kind === "departure";
  const term = (t: DirectionStep["terms"][number]): string =>
    `${t.pole === departs ? "−" : "+"} ${t.multiplicity > 1 ? `${t.multiplicity} · ` : ""}${t.angle < 0 ? `(${angleText(t.angle)})` : angleText(t.angle)} (${t.pole ? "pole" : "zero"} ${pointText(t.s)})`;
  const sum = terms.map(term).join(" ");
  const over = multiplicity > 1 ? `, over ${multiplicity}` : "";
  return html(
    "p",
    {},
    `${departs ? "From the pole" : "At the zero"} ${pointText(s)}: ${sum}, and 180° where the ratio of the leading coefficients of N and D times ${knob} is positive${over}: ` +
      `${listed(angles.positive.map(angleText))} for ${knob} > 0, ${listed(angles.negative.map(angleText))} for ${knob} < 0.`,
  );
}

function pointText({ re, im }: { re: number; im: number }): string {
  if (im === 0) return figure(re);
  return `${figure(re)} ${im < 0 ? "−" : "+"} ${figure(Math.abs(im))}${THIN_SPACE}j`;
}

function requirement({ kind, condition, equation: text, proven, edges }: RequirementStep, knob: string): HTMLElement[] {
  const { name, unit } = kindOf(kind);
  const proof = proven ? "The edges are solutions of it, proven." : "The edges are computed.";
  const head = html("p", {}, html("strong", {}, `${name}: `), `${condition}. ${proof}`);
  const rows = edges.map((edge) => [
    figure(edge.knob, DIGITS),
    edge.pole ? pairText(edge.pole.re, edge.pole.im) : "–",
    edge.figure === null ? "–" : `${figure(edge.figure, 6)}${unit && THIN_SPACE}${unit}`,
  ]);
  return [head, ...(text ? [html("p", { class: "equation" }, formula(text.mathml))] : []), ...(rows.length > 0 ? [plainTable([knob, "pole on the limit, 1/s", "figure there, or beside a jump"], rows)] : [])];
}
