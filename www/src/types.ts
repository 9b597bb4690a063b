// Made by `cargo page` from the types of the core (core/src/project.rs, record.rs, answer.rs). Do not edit.

/**
 * What Stayband says to a project: a record, or what must be put right before there can be one.
 */
export type Answer = {
/**
 * What could be read of the blocks, even where something is wrong.
 */
reading: Reading,
/**
 * What must be put right; empty where there is a record.
 */
problems: Array<Problem>,
/**
 * The result; None where there are problems.
 */
record: Record | null, };

/**
 * The straight lines the branches approach.
 */
export type Asymptotes = {
/**
 * The number of branches that go to infinity.
 */
count: number,
/**
 * Where the asymptotes meet, on the real axis, 1/s. None where there are none.
 */
centroid: number | null,
/**
 * Degrees in (−180, 180], ascending.
 */
angles: Array<number>, };

/**
 * A value for each sign of the knob.
 */
export type BothSigns<T> = {
/**
 * Knob from 0 to +∞.
 */
positive: T,
/**
 * Knob from 0 to −∞.
 */
negative: T, };

/**
 * The trade's word for the kinds of poles.
 */
export type CharacterName = "overdamped" | "critically damped" | "underdamped" | "marginally stable" | "unstable";

/**
 * A range of the knob in which the kinds of poles do not change. Its ends do not belong to it.
 */
export type CharacterRange = {
/**
 * The lower end; None is −∞.
 */
from: Edge | null,
/**
 * The upper end; None is +∞.
 */
to: Edge | null,
/**
 * Real poles, with multiplicity.
 */
realPoles: number,
/**
 * Pairs of complex poles, with multiplicity.
 */
pairs: number,
/**
 * The trade's word.
 */
name: CharacterName, };

/**
 * The closed loop at the chosen setting.
 */
export type ClosedLoop = {
/**
 * The knob's value.
 */
knob: number,
/**
 * Poles of the closed loop.
 */
poles: Array<Root>,
/**
 * Poles in the open right half plane; exact.
 */
unstablePoles: number,
/**
 * Poles on the imaginary axis; exact.
 */
axisPoles: number,
/**
 * The trade's word for the kinds of poles; exact.
 */
name: CharacterName, };

/**
 * An end of a range.
 */
export type Edge = {
/**
 * The knob at the edge, to f64 precision.
 */
value: number,
/**
 * Decimal numbers between which the edge lies, no wider than 1e-15 of its value.
 */
bracket: [string, string],
/**
 * The edge itself where it is a rational number: a decimal such as "0.5" where one of 20 digits is exact, otherwise a
 * fraction such as "-2/15".
 */
exact: string | null,
/**
 * True where bracket and counts are proven by exact arithmetic.
 */
proven: boolean,
/**
 * What happens here.
 */
kind: EdgeKind,
/**
 * rad/s; the first pole pair ±jω on the axis here.
 */
omega: number | null,
/**
 * Every ω > 0 of the pole pairs that reach the axis here, rad/s.
 */
omegas: Array<number>,
/**
 * True where the count of unstable poles is the same on both sides: the locus touches the axis and returns.
 */
touching: boolean,
/**
 * Poles in the open right half plane exactly at the edge.
 */
unstablePoles: number,
/**
 * Poles on the imaginary axis exactly at the edge.
 */
axisPoles: number,
/**
 * The character exactly at the edge.
 */
name: CharacterName, };

/**
 * What happens at an edge.
 */
export type EdgeKind = "axis crossing" | "origin crossing" | "degree drop" | "breakaway" | "break-in" | "repeated pole";

/**
 * The sign of the feedback.
 */
export type Feedback = "negative" | "positive";

/**
 * A field of the form.
 */
export type Field = "controller" | "plant" | "sensor" | "quantity" | "knob" | "setting" | "loop" | "document";

/**
 * Which half of the locus.
 */
export type KnobSign = "positive" | "negative";

/**
 * A special point of the locus.
 */
export type Landmark = {
/**
 * What it is.
 */
kind: LandmarkKind,
/**
 * Where it is, 1/s. Of a conjugate pair only the upper one is listed.
 */
s: Point,
/**
 * The knob there; None is infinity (arrivals).
 */
knob: number | null,
/**
 * How many poles meet there.
 */
multiplicity: number,
/**
 * Degrees in (−180, 180], for departures and arrivals: the direction in which the branch leaves a pole, or from
 * which, seen from the zero, it arrives.
 */
angle: number | null,
/**
 * The sign of the knob on this part of the locus.
 */
sign: KnobSign, };

/**
 * What a landmark is.
 */
export type LandmarkKind = "breakaway" | "break-in" | "departure" | "arrival" | "axis crossing" | "origin crossing";

/**
 * The blocks as typed.
 */
export type LoopText = {
/**
 * The controller, a ratio of polynomials in s.
 */
controller: string,
/**
 * The plant, a ratio of polynomials in s.
 */
plant: string,
/**
 * The sensor in the feedback path, a ratio of polynomials in s.
 */
sensor: string,
/**
 * The sign with which the sensor's signal enters the comparison.
 */
feedback: Feedback, };

/**
 * The characteristic polynomial F(s, q) of the loop, in exact integers; q is the knob.
 */
export type ModelRecord = {
/**
 * Degree in s.
 */
order: number,
/**
 * Degree in the knob; 1 is the affine case, 0 a knob without effect.
 */
knobDegree: number,
/**
 * `coefficients[i][k]` multiplies s^i q^k; decimal integers.
 */
coefficients: Array<Array<string>>,
/**
 * "F(s) = 0" as MathML.
 */
mathml: string, };

/**
 * A warning about the loop.
 */
export type Notice = {
/**
 * What it is about.
 */
kind: NoticeKind,
/**
 * A sentence for the user.
 */
text: string, };

/**
 * What a notice is about.
 */
export type NoticeKind = "unstable-fixed-mode" | "cancelled-factor" | "knob-without-effect" | "improper-block" | "algebraic-loop" | "not-computed";

/**
 * A point of the s-plane, 1/s.
 */
export type Point = {
/**
 * The real part.
 */
re: number,
/**
 * The imaginary part.
 */
im: number, };

/**
 * Something to be put right in the project, with the place and what to type instead.
 */
export type Problem = {
/**
 * The field of the form.
 */
field: Field,
/**
 * The quantity's symbol, where the field is a row of the quantities table.
 */
symbol: string | null,
/**
 * First character and the one behind the last, counted in characters of the field's text.
 */
span: [number, number] | null,
/**
 * What is wrong and what to type instead.
 */
message: string, };

/**
 * The program that made a record.
 */
export type Program = {
/**
 * The version of Stayband.
 */
version: string,
/**
 * SHA-256 of the page, computed with this very field blank. None outside the page.
 */
hash: string | null, };

/**
 * Everything the user typed.
 */
export type Project = {
/**
 * Always [`PROJECT_FORMAT`].
 */
format: string,
/**
 * Free text: the machine and the axis.
 */
title: string,
/**
 * The blocks of the loop.
 */
loop: LoopText,
/**
 * One row for every name used in the blocks, but for `s`. The knob's row may be missing: its value is the setting.
 */
quantities: Array<Quantity>,
/**
 * The symbol of the quantity left to choose.
 */
knob: string,
/**
 * The chosen setting.
 */
setting: Setting, };

/**
 * A named quantity of the loop.
 */
export type Quantity = {
/**
 * The name as it stands in the blocks.
 */
symbol: string,
/**
 * An exact decimal, as typed. Empty while not yet given.
 */
value: string,
/**
 * The unit, as a note to the reader; no conversion is made.
 */
unit: string,
/**
 * What the quantity is, as a note to the reader.
 */
meaning: string, };

/**
 * What was read from the typed blocks, for display.
 */
export type Reading = {
/**
 * The controller as MathML. None where it could not be read.
 */
controller: string | null,
/**
 * The plant as MathML. None where it could not be read.
 */
plant: string | null,
/**
 * The sensor as MathML. None where it could not be read.
 */
sensor: string | null,
/**
 * Every name but `s`, in order of first appearance.
 */
names: Array<string>, };

/**
 * Everything Stayband found out about one project.
 */
export type Record = {
/**
 * Always [`RECORD_FORMAT`].
 */
format: string,
/**
 * The program that made the record.
 */
program: Program,
/**
 * The input.
 */
project: Project,
/**
 * What was read, for display.
 */
reading: Reading,
/**
 * The characteristic polynomial.
 */
model: ModelRecord,
/**
 * The whole real line of the knob, from −∞ to +∞, in ranges with a constant count of unstable poles.
 */
stability: Array<StabilityRange>,
/**
 * The whole real line of the knob in ranges of constant character.
 */
character: Array<CharacterRange>,
/**
 * The special points of the locus.
 */
landmarks: Array<Landmark>,
/**
 * Where branches go to infinity. None unless the characteristic polynomial is affine in the knob.
 */
asymptotes: BothSigns<Asymptotes> | null,
/**
 * The parts of the real axis that belong to the locus. None unless affine.
 */
realAxis: BothSigns<Array<Segment>> | null,
/**
 * Poles of the open loop (of the knob at zero), fixed modes included.
 */
poles: Array<Root>,
/**
 * Zeros of the open loop (of the knob at infinity), fixed modes included. Empty unless affine.
 */
zeros: Array<Root>,
/**
 * The closed loop at the chosen setting. None while no setting is given.
 */
closedLoop: ClosedLoop | null,
/**
 * The part of the s-plane that shows what matters.
 */
view: View,
/**
 * Warnings about the loop, most serious first.
 */
notices: Array<Notice>, };

/**
 * A root with the radius of a disc that surely holds it.
 */
export type Root = {
/**
 * The real part, 1/s.
 */
re: number,
/**
 * The imaginary part, 1/s; exactly 0 for a real root.
 */
im: number,
/**
 * The true root is no farther than this, 1/s.
 */
radius: number,
/**
 * How many roots coincide here.
 */
multiplicity: number, };

/**
 * A part of the real axis; None is an infinite end.
 */
export type Segment = [number | null, number | null];

/**
 * The chosen setting of the knob.
 */
export type Setting = {
/**
 * An exact decimal, as typed. Empty while not yet chosen.
 */
value: string, };

/**
 * A range of the knob with a constant count of unstable poles. Its ends do not belong to it.
 */
export type StabilityRange = {
/**
 * The lower end; None is −∞.
 */
from: Edge | null,
/**
 * The upper end; None is +∞.
 */
to: Edge | null,
/**
 * Poles in the open right half plane, with multiplicity.
 */
unstablePoles: number,
/**
 * Poles on the imaginary axis throughout the range, with multiplicity.
 */
axisPoles: number,
/**
 * True where both counts are zero.
 */
stable: boolean, };

/**
 * A rectangle of the s-plane, 1/s.
 */
export type View = {
/**
 * Left and right.
 */
re: [number, number],
/**
 * Bottom and top.
 */
im: [number, number], };
