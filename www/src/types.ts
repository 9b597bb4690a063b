// Made by `cargo page` from the types of the core (core/src/project.rs, record/, answer.rs). Do not edit.

/**
 * What tolerances allow at the observed frequency, to first order: the sum of what each quantity does alone.
 */
export type Allowed = {
/**
 * Smallest and largest factor of the loop gain.
 */
gain: [number, number],
/**
 * Smallest and largest lag, as a dead time in s.
 */
deadTime: [number, number], };

/**
 * The line from another pole or zero.
 */
export type AngleTerm = {
/**
 * Where it begins.
 */
s: Point,
/**
 * Whether a pole is there; else a zero.
 */
pole: boolean,
/**
 * How many.
 */
multiplicity: number,
/**
 * Degrees, of one.
 */
angle: number, };

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
 * The asymptotes.
 */
export type AsymptoteStep = {
/**
 * Moving poles and zeros of the open loop.
 */
counts: [number, number],
/**
 * Their sums, exact.
 */
sums: [string, string],
/**
 * The centroid, exact; None without asymptotes.
 */
centroid: string | null,
/**
 * As the record has them.
 */
lines: BothSigns<Asymptotes>, };

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
 * F(jω, q) = 0 in its real and its imaginary part.
 */
export type AxisEquations = {
/**
 * What the square of ω is called.
 */
variable: string,
/**
 * The real part, of x = ω² and the knob.
 */
even: Formula,
/**
 * The imaginary part over ω, likewise.
 */
odd: Formula,
/**
 * The knob eliminated: a polynomial in x. None unless affine, and where it vanishes identically.
 */
eliminated: Formula | null,
/**
 * Its real roots x, as s = jω where x > 0.
 */
candidates: Array<Candidate>, };

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
 * Where poles meet.
 */
export type Breakaway = {
/**
 * D′·N − D·N′, a polynomial in s, of an affine loop; else the discriminant of F, a polynomial in the knob.
 */
equation: Formula,
/**
 * Whether the equation is the discriminant.
 */
discriminant: boolean,
/**
 * Its roots, of a conjugate pair the upper one; of the discriminant the real ones.
 */
candidates: Array<Candidate>, };

/**
 * A solution, kept or rejected.
 */
export type Candidate = {
/**
 * The knob. None: infinite.
 */
knob: number | null,
/**
 * The point of the s-plane, where it is known.
 */
s: Point | null,
/**
 * How often it is a root of the equation.
 */
multiplicity: number,
/**
 * Whether it is what was sought.
 */
kept: boolean,
/**
 * What it is, or why it was rejected.
 */
reason: string, };

/**
 * What fails behind an edge.
 */
export type Cause = { "kind": "stability" } | { "kind": "requirement", "requirement": RequirementKind } | { "kind": "controller" };

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
poles: Array<ClosedPole>,
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
 * A pole of the closed loop: a [`Root`] with the trade's figures of it.
 */
export type ClosedPole = {
/**
 * The real part, 1/s.
 */
re: number,
/**
 * The imaginary part, 1/s; exactly 0 for a real pole.
 */
im: number,
/**
 * The true pole is no farther than this, 1/s.
 */
radius: number,
/**
 * How many poles coincide here.
 */
multiplicity: number,
/**
 * Of a pole in the z-plane the point of the s-plane it comes from, 1/s; the figures below are those of it.
 */
equivalent: EquivalentPole | null,
/**
 * −re/|s|: 1 for a stable real pole, 0 on the imaginary axis, negative right of it. None where the pole cannot be
 * told from the origin.
 */
dampingRatio: number | null,
/**
 * |s|, rad/s; 0 where the pole cannot be told from the origin.
 */
naturalFrequency: number, };

/**
 * An equation in the knob, with its real solutions.
 */
export type Condition = {
/**
 * What the solutions mean.
 */
kind: ConditionKind,
/**
 * This polynomial in the knob is zero.
 */
equation: Formula,
/**
 * The real solutions, ascending.
 */
candidates: Array<Candidate>, };

/**
 * What the solutions of a condition mean.
 */
export type ConditionKind = "origin" | "degree-drop" | "row-of-zeros";

/**
 * Requirements that exclude each other.
 */
export type Conflict = {
/**
 * The smallest such set; empty where the loop is never stable, or the controller's limits exclude every setting.
 */
requirements: Array<RequirementKind>,
/**
 * By how much, a sentence in the controller's scale.
 */
text: string, };

/**
 * A correction of the model: the loop gain times a factor, and a dead time more.
 */
export type Correction = {
/**
 * The factor of the loop gain.
 */
gain: number,
/**
 * The added dead time, s. Below zero the machine is faster than the model.
 */
deadTime: number,
/**
 * What the stated tolerances allow; None where none are stated.
 */
allowed: Allowed | null,
/**
 * Whether the correction lies within. None where no tolerances are stated.
 */
within: boolean | null,
/**
 * The project with the correction put in; None where that cannot be written down.
 */
project: Project | null,
/**
 * The stable ranges of the corrected project: ends in the knob, None for infinite ones.
 */
stable: Array<[number | null, number | null]>,
/**
 * The permitted settings of the corrected project, as in the record.
 */
permitted: Array<[string | null, string | null]>,
/**
 * Why there are no new ranges, or what is left out in them.
 */
remark: string | null, };

/**
 * A curve over time.
 */
export type Curve = {
/**
 * s, ascending.
 */
time: Array<number>,
/**
 * The value at each time.
 */
value: Array<number>, };

/**
 * The derivation for a check by hand.
 */
export type Derivation = {
/**
 * D and N of the moving part F = D + q·N of the characteristic polynomial; None unless affine.
 */
affine: [Formula, Formula] | null,
/**
 * The moving part of the characteristic polynomial.
 */
moving: Formula,
/**
 * The factor that no knob moves, where there is one.
 */
fixed: Formula | null,
/**
 * The Routh arrays with the knob in them: that of the moving part, and, where it ends early, the one used instead.
 */
routh: Array<RouthTable>,
/**
 * Why there is no Routh array with the knob in it.
 */
routhRemark: string | null,
/**
 * The equations whose solutions are the edges.
 */
conditions: Array<Condition>,
/**
 * On the imaginary axis.
 */
axis: AxisEquations | null,
/**
 * The edges between the ranges of stability, ascending.
 */
edges: Array<Edge>,
/**
 * The count of every range, by the Routh array at one number.
 */
ranges: Array<RangeCheck>,
/**
 * Asymptotes; None unless affine.
 */
asymptotes: AsymptoteStep | null,
/**
 * Where poles meet.
 */
breakaway: Breakaway | null,
/**
 * Angles at complex poles and zeros; empty unless affine.
 */
directions: Array<DirectionStep>,
/**
 * The requirements, in the project's order.
 */
requirements: Array<RequirementStep>, };

/**
 * How the knob follows from the setting.
 */
export type Direction = "proportional" | "reciprocal";

/**
 * The angle of departure from a pole, or of arrival at a zero.
 */
export type DirectionStep = {
/**
 * Departure or arrival.
 */
kind: LandmarkKind,
/**
 * The pole or zero, in the upper half plane.
 */
s: Point,
/**
 * How many coincide.
 */
multiplicity: number,
/**
 * The angles of the lines from the other poles and zeros to it.
 */
terms: Array<AngleTerm>,
/**
 * The directions for each sign of the knob, degrees.
 */
angles: BothSigns<Array<number>>, };

/**
 * The published methods by which a controller in s becomes one in z.
 */
export type Discretisation = "tustin" | "tustin-prewarped" | "backward-difference" | "matched";

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
 * The edge a plan moves towards.
 */
export type EdgeAhead = {
/**
 * The knob there.
 */
knob: number,
/**
 * The setting there; None where the scale has none.
 */
setting: number | null,
/**
 * rad/s of the oscillation that begins there; None where the answer drifts away without one.
 */
omega: number | null,
/**
 * Its period, s.
 */
period: number | null, };

/**
 * A curve at another setting, for comparison.
 */
export type EdgeCurve = {
/**
 * The knob.
 */
knob: number,
/**
 * The curve.
 */
curve: Curve, };

/**
 * What happens at an edge.
 */
export type EdgeKind = "axis crossing" | "origin crossing" | "alternation crossing" | "no dead time" | "degree drop" | "breakaway" | "break-in" | "repeated pole";

/**
 * The pole of the s-plane that a pole of the z-plane comes from.
 */
export type EquivalentPole = {
/**
 * The real part, 1/s.
 */
re: number,
/**
 * The imaginary part, 1/s.
 */
im: number,
/**
 * The true pole is no farther than this, 1/s.
 */
radius: number, };

/**
 * The sign of the feedback.
 */
export type Feedback = "negative" | "positive";

/**
 * A field of the form.
 */
export type Field = "controller" | "plant" | "sensor" | "deadTime" | "sampling" | "quantity" | "knob" | "setting" | "requirement" | "loop" | "document";

/**
 * A figure at the chosen setting.
 */
export type FigureRecord = {
/**
 * What it is.
 */
kind: RequirementKind,
/**
 * In the kind's unit. None where it is infinite, has no meaning for this loop, or could not be computed.
 */
value: number | null, };

/**
 * A formula.
 */
export type Formula = {
/**
 * For display: integers of more than 12 digits are rounded to 10.
 */
mathml: string,
/**
 * In the notation of the blocks, exact.
 */
text: string, };

/**
 * The open loop L(jω), the same number of entries in each.
 */
export type FrequencyResponse = {
/**
 * rad/s, ascending.
 */
omega: Array<number>,
/**
 * dB.
 */
magnitude: Array<number>,
/**
 * Degrees, continuous.
 */
phase: Array<number>, };

/**
 * Where the open loop has magnitude 1.
 */
export type GainCrossing = {
/**
 * rad/s.
 */
omega: number,
/**
 * Degrees above −180 (below where negative), in (−180, 180].
 */
phaseMargin: number,
/**
 * s.
 */
delayMargin: number, };

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
 * Where it is, 1/s; in the z-plane without unit. Of a conjugate pair only the upper one is listed.
 */
s: Point,
/**
 * Of a landmark in the z-plane the point of the s-plane it comes from, 1/s.
 */
equivalent: Point | null,
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
export type LandmarkKind = "breakaway" | "break-in" | "departure" | "arrival" | "axis crossing" | "origin crossing" | "alternation crossing";

/**
 * An end of a requirement's or a permitted range.
 */
export type LimitEdge = {
/**
 * The knob.
 */
knob: number,
/**
 * The setting; None where the scale has none for this knob.
 */
setting: number | null,
/**
 * Decimal numbers between which the knob lies; for a computed edge the uncertainty of the computation.
 */
bracket: [string, string],
/**
 * True where the bracket is proven.
 */
proven: boolean,
/**
 * What fails behind the edge.
 */
cause: Cause, };

/**
 * A range of the knob in which a requirement is met. None is an infinite end.
 */
export type LimitRange = {
/**
 * The lower end.
 */
from: LimitEdge | null,
/**
 * The upper end.
 */
to: LimitEdge | null, };

/**
 * The answer of the output to a unit step at the plant's input, in the output's own units.
 */
export type LoadRecord = {
/**
 * At the setting.
 */
curve: Curve,
/**
 * The largest deviation.
 */
peak: number,
/**
 * The remaining deviation.
 */
finalValue: number, };

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
feedback: Feedback,
/**
 * The plant's dead time in s, beside those typed into the blocks as e^(−T s): an expression in numbers and quantities.
 * Empty: none.
 */
deadTime: string,
/**
 * The controller's sampling. None: the controller works continuously.
 */
sampling: SamplingText | null, };

/**
 * Margins of the open loop at one setting.
 */
export type Margins = {
/**
 * The factor by which the loop gain may rise. None: without limit.
 */
gainUp: number | null,
/**
 * The factor by which the loop gain may be divided. None: without limit.
 */
gainDown: number | null,
/**
 * Degrees. None: no turn of the phase makes the loop marginal.
 */
phase: number | null,
/**
 * s. None: no dead time makes the loop marginal.
 */
delay: number | null,
/**
 * The largest |1/(1 + L(jω))|.
 */
peakSensitivity: number,
/**
 * rad/s, where the peak is.
 */
peakFrequency: number,
/**
 * rad/s. None: the closed loop does not fall 3 dB below its static gain.
 */
bandwidth: number | null,
/**
 * Every ω with |L(jω)| = 1.
 */
gainCrossings: Array<GainCrossing>,
/**
 * Every ω ≥ 0 with L(jω) real and negative.
 */
phaseCrossings: Array<PhaseCrossing>,
/**
 * The open loop over frequency.
 */
response: FrequencyResponse, };

/**
 * The characteristic polynomial F(s, q) of the loop, in exact integers; q is the knob. Of a loop with dead time it is the
 * one without it, of a sampled loop that of the continuous one; there the equation says how the loop differs.
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
export type NoticeKind = "unstable-fixed-mode" | "cancelled-factor" | "knob-without-effect" | "improper-block" | "algebraic-loop" | "sampling" | "not-computed";

/**
 * What kind of observation was made on the machine.
 */
export type Observation = "step" | "oscillation";

/**
 * Where stability and all requirements agree.
 */
export type Permitted = {
/**
 * The permitted ranges of the knob, ascending.
 */
knob: Array<LimitRange>,
/**
 * For each of them the smallest and the largest setting on the controller's grid, rounded inward, as exact
 * decimals; None where no setting of the grid lies inside, or the side is open.
 */
setting: Array<[string | null, string | null]>,
/**
 * True where every edge is proven.
 */
proven: boolean,
/**
 * The suggestion.
 */
suggested: Suggestion | null,
/**
 * Which requirements exclude each other, where nothing is permitted.
 */
conflict: Conflict | null, };

/**
 * Where the open loop is real and negative.
 */
export type PhaseCrossing = {
/**
 * rad/s.
 */
omega: number,
/**
 * The factor of the loop gain at which −1 is met here.
 */
factor: number, };

/**
 * The plane of the poles.
 */
export type Plane = "s" | "z";

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
 * What the model says to the observed setting.
 */
export type Predicted = {
/**
 * s: of the step between its first two peaks; of the oscillation at the nearest edge ahead.
 */
period: number | null,
/**
 * %; of a step.
 */
overshoot: number | null,
/**
 * The setting of the nearest edge ahead; of an oscillation.
 */
setting: number | null, };

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
 * The chosen setting, in the controller's own scale.
 */
setting: Setting,
/**
 * What the loop must do besides being stable.
 */
requirements: Array<Requirement>,
/**
 * What identifies the printed sheet.
 */
sheet: SheetText,
/**
 * How the step-up plan goes.
 */
stepUp: StepUpText,
/**
 * What was seen on the machine.
 */
siteCheck: SiteCheckText, };

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
meaning: string,
/**
 * How far the true value may be off in either direction: "5 %" of the value, or a plain decimal in its unit. Empty:
 * not stated.
 */
tolerance: string, };

/**
 * A range of the knob, checked at one number by the Routh array.
 */
export type RangeCheck = {
/**
 * The knob, exact.
 */
sample: string,
/**
 * The first column, to six digits, rounded down.
 */
firstColumn: Array<string>,
/**
 * The a of (s + a)·F(s), where the column is that of this product's array.
 */
addedPole: number | null,
/**
 * Changes of sign. None where no array came to its end.
 */
changes: number | null,
/**
 * Poles on the axis, from the auxiliary polynomial.
 */
onAxis: number | null,
/**
 * Powers of s whose rows were zero.
 */
zeroRows: Array<number>,
/**
 * Poles right of the axis as the ranges claim them, fixed modes included.
 */
unstablePoles: number,
/**
 * Of them fixed modes.
 */
fixedUnstable: number, };

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
 * Dead time and sampling.
 */
timing: Timing,
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
 * The controller's scale.
 */
scale: Scale,
/**
 * The requirements with the ranges in which they are met, in the project's order.
 */
requirements: Array<RequirementRecord>,
/**
 * Where stability and all requirements agree.
 */
permitted: Permitted,
/**
 * What requirements can be put on, at the chosen setting, in the kinds' units; empty without one.
 */
figures: Array<FigureRecord>,
/**
 * Margins and frequency response at the chosen setting. None without a setting, or where the loop is unstable there.
 */
margins: Margins | null,
/**
 * The answer to a unit step of the command at the chosen setting. None likewise.
 */
step: StepRecord | null,
/**
 * The answer to a unit step at the plant's input at the chosen setting. None likewise.
 */
load: LoadRecord | null,
/**
 * The part of the s-plane that shows what matters.
 */
view: View,
/**
 * Warnings about the loop, most serious first.
 */
notices: Array<Notice>,
/**
 * What the printed sheet needs beside the rest. None unless it was asked for.
 */
sheet: SheetRecord | null, };

/**
 * One requirement with its limit.
 */
export type Requirement = {
/**
 * What is required.
 */
kind: RequirementKind,
/**
 * The limit, an exact decimal in the kind's unit, as typed.
 */
limit: string, };

/**
 * An edge that a requirement sets.
 */
export type RequirementEdge = {
/**
 * The knob.
 */
knob: number,
/**
 * The pole that is on the limit there, where poles decide.
 */
pole: Point | null,
/**
 * The figure there, in the requirement's unit.
 */
figure: number | null, };

/**
 * What can be required. Speeds and times are those of the output for a unit step of the command.
 */
export type RequirementKind = "damping-ratio" | "decay-rate" | "natural-frequency-minimum" | "natural-frequency-maximum" | "gain-margin-up" | "gain-margin-down" | "phase-margin" | "delay-margin" | "peak-sensitivity" | "bandwidth" | "overshoot" | "undershoot" | "rise-time" | "settling-time-2" | "settling-time-5" | "peak-time" | "step-error" | "ramp-error" | "parabola-error" | "load-peak" | "load-final" | "controller-peak";

/**
 * A requirement, judged.
 */
export type RequirementRecord = {
/**
 * What is required.
 */
kind: RequirementKind,
/**
 * The limit, in `unit`.
 */
limit: number,
/**
 * True where the figure must be at least the limit, false where at most.
 */
atLeast: boolean,
/**
 * The unit of limit and figure; may be empty.
 */
unit: string,
/**
 * Where the requirement and stability are met, ascending.
 */
ranges: Array<LimitRange>,
/**
 * True where the ranges are proven, false where they are computed.
 */
proven: boolean,
/**
 * The figure at the chosen setting. None where it is undefined, infinite, or there is no setting.
 */
figure: number | null,
/**
 * Whether the requirement is met at the chosen setting. None without a setting.
 */
met: boolean | null,
/**
 * In words: why no setting meets it, or why it is undefined for this loop.
 */
remark: string | null, };

/**
 * A requirement's governing equation.
 */
export type RequirementStep = {
/**
 * What is required.
 */
kind: RequirementKind,
/**
 * The condition in words.
 */
condition: string,
/**
 * The expression the condition speaks of.
 */
equation: Formula | null,
/**
 * True where the edges are solutions of the equation, proven; false where they were found by computing the figure.
 */
proven: boolean,
/**
 * The edges that the requirement sets.
 */
edges: Array<RequirementEdge>, };

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
 * A row of a Routh array.
 */
export type RouthRow = {
/**
 * The power of s the row begins with.
 */
power: number,
/**
 * The elements in lowest terms.
 */
elements: Array<Formula>,
/**
 * What is special about the row.
 */
special: SpecialCase | null, };

/**
 * A Routh array.
 */
export type RouthTable = {
/**
 * The a of (s + a)·F(s), where the array is that of this product.
 */
addedPole: number | null,
/**
 * The rows, highest power first.
 */
rows: Array<RouthRow>, };

/**
 * How the controller samples.
 */
export type SamplingRecord = {
/**
 * s.
 */
period: number,
/**
 * The computation delay in sample periods.
 */
delay: number,
/**
 * How the controller was converted. None where it was typed in z.
 */
method: Discretisation | null,
/**
 * The stable ranges at other periods, with the period, ascending.
 */
byPeriod: Array<StableAtPeriod>,
/**
 * The longest period up to which the chosen setting is stable without a break, s. None without a setting, where it is
 * not stable, or where no limit was found.
 */
longestPeriod: number | null, };

/**
 * How the controller samples, as typed: expressions in numbers and quantities.
 */
export type SamplingText = {
/**
 * The sample period in s.
 */
period: string,
/**
 * From a sample to the output computed from it, in sample periods, 0 to 3. Empty: 0.
 */
delay: string,
/**
 * How a controller in s becomes one in z.
 */
method: Discretisation,
/**
 * rad/s: where [`Discretisation::TustinPrewarped`] is exact.
 */
prewarp: string, };

/**
 * The controller's scale: what setting belongs to what knob.
 */
export type Scale = {
/**
 * What the controller calls the setting; the knob's symbol where it has no name of its own.
 */
name: string,
/**
 * The controller's unit; may be empty.
 */
unit: string,
/**
 * How the knob follows from the setting.
 */
direction: Direction,
/**
 * knob = factor × setting, or factor / setting.
 */
factor: number,
/**
 * The smallest setting the controller takes.
 */
minimum: number | null,
/**
 * The largest setting the controller takes.
 */
maximum: number | null,
/**
 * The resolution.
 */
step: number | null, };

/**
 * A part of the real axis; None is an infinite end.
 */
export type Segment = [number | null, number | null];

/**
 * The chosen setting, and the controller's scale on which it stands.
 */
export type Setting = {
/**
 * An exact decimal, as typed. Empty while not yet chosen.
 */
value: string,
/**
 * What the controller calls it. Empty: the knob's own symbol.
 */
name: string,
/**
 * The controller's unit, as a note to the reader.
 */
unit: string,
/**
 * How the knob follows from the setting.
 */
direction: Direction,
/**
 * Knob per setting, or knob times setting: an expression in numbers and quantities. Empty: 1.
 */
factor: string,
/**
 * The smallest setting the controller takes, an exact decimal. Empty: none.
 */
minimum: string,
/**
 * The largest setting the controller takes, an exact decimal. Empty: none.
 */
maximum: string,
/**
 * The resolution: settings are whole multiples of it, an exact decimal. Empty: any number can be set.
 */
step: string, };

/**
 * The sheet's own part of the record.
 */
export type SheetRecord = {
/**
 * SHA-256 of the project document as it was handed in, byte for byte.
 */
projectHash: string,
/**
 * The derivation for a check by hand. None where it does not apply; `remark` says why.
 */
derivation: Derivation | null,
/**
 * Why there is no derivation.
 */
remark: string | null,
/**
 * The way from a low setting to the last one.
 */
stepUp: StepUpPlan,
/**
 * What the observation on the machine says about the model. None while nothing was entered.
 */
siteCheck: SiteCheck | null, };

/**
 * What stands at the head of the printed sheet beside the title; notes to the reader.
 */
export type SheetText = {
/**
 * The machine.
 */
machine: string,
/**
 * The revision of the sheet.
 */
revision: string,
/**
 * The date, as it shall stand there.
 */
date: string,
/**
 * Who made the sheet.
 */
preparedBy: string,
/**
 * Who checked it.
 */
checkedBy: string, };

/**
 * What the observation on the machine says about the model.
 */
export type SiteCheck = {
/**
 * What was observed.
 */
seen: Observation,
/**
 * What must be put right, or why nothing was found.
 */
remarks: Array<string>,
/**
 * What the model says to the same setting.
 */
predicted: Predicted | null,
/**
 * The correction that explains the observation.
 */
correction: Correction | null, };

/**
 * What was seen on the machine, as typed; every number an exact decimal.
 */
export type SiteCheckText = {
/**
 * What kind of observation it is.
 */
seen: Observation,
/**
 * The setting at which it was seen. Empty: nothing was seen yet.
 */
setting: string,
/**
 * The period of the oscillation, s; of a step the time from its first to its second peak.
 */
period: string,
/**
 * Of a step: the first peak beyond the final value, % of it.
 */
overshoot: string, };

/**
 * A special case of the Routh array.
 */
export type SpecialCase = { "kind": "zero-row", "auxiliary": Formula } | { "kind": "zero-first-element" };

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
 * Poles in the open right half plane, or outside the unit circle, with multiplicity.
 */
unstablePoles: number,
/**
 * Poles on the imaginary axis throughout the range, with multiplicity.
 */
axisPoles: number,
/**
 * True where there are this many or more: dead time brings ever more of them over the axis as the knob grows.
 */
atLeast: boolean,
/**
 * True where both counts are zero.
 */
stable: boolean, };

/**
 * The stable ranges at another sample period.
 */
export type StableAtPeriod = {
/**
 * s.
 */
period: number,
/**
 * The ends of the stable ranges of the knob; None is an infinite end.
 */
ranges: Array<[number | null, number | null]>, };

/**
 * The answer of the output to a unit step of the command. The output is in the command's units: what the sensor shows
 * of it at rest.
 */
export type StepRecord = {
/**
 * At the setting.
 */
curve: Curve,
/**
 * At the ends of the permitted range that holds the setting, or of the first one.
 */
atEdges: Array<EdgeCurve>,
/**
 * The controller's output at the setting. None where the controller is improper.
 */
controller: Curve | null,
/**
 * The final value.
 */
finalValue: number,
/**
 * % of the final value. None where that is zero.
 */
overshoot: number | null,
/**
 * % of the final value. None where that is zero.
 */
undershoot: number | null,
/**
 * s, from 10 % to 90 %.
 */
riseTime: number | null,
/**
 * s, to 2 %.
 */
settlingTime2: number | null,
/**
 * s, to 5 %.
 */
settlingTime5: number | null,
/**
 * s. None where the final value is never exceeded.
 */
peakTime: number | null,
/**
 * The largest controller output. None where the controller is improper.
 */
controllerPeak: number | null, };

/**
 * A plan of settings from a low one to the last.
 */
export type StepUpPlan = {
/**
 * What must be known before the plan is used.
 */
remarks: Array<string>,
/**
 * The edge the plan moves towards.
 */
edge: EdgeAhead | null,
/**
 * The rows, from the first to the last setting. Empty where there is no plan; the remarks say why.
 */
rows: Array<StepUpRow>, };

/**
 * A row of a step-up plan.
 */
export type StepUpRow = {
/**
 * The setting, an exact decimal.
 */
setting: string,
/**
 * The knob there.
 */
knob: number,
/**
 * Whether all requirements are met there.
 */
permitted: boolean,
/**
 * % of the final value.
 */
overshoot: number | null,
/**
 * rad/s of the least damped pole pair; None where all poles are real.
 */
omega: number | null,
/**
 * Its period, s.
 */
period: number | null,
/**
 * Its damping ratio.
 */
damping: number | null,
/**
 * Each swing over the one before, one period earlier.
 */
decay: number | null,
/**
 * Settling time to 2 %, s.
 */
settling: number | null,
/**
 * By what factor the knob may still be multiplied; None without an edge ahead.
 */
room: number | null,
/**
 * What means stop.
 */
stop: StopSign | null, };

/**
 * How the step-up plan goes from its first to its last setting.
 */
export type StepUpText = {
/**
 * The first setting, an exact decimal. Empty: chosen by the plan.
 */
start: string,
/**
 * The knob of one row over that of the row before, an exact decimal above 1. Empty: 1.5.
 */
ratio: string, };

/**
 * An oscillation that means stop: that of the setting on the way from the row to the edge: halfway,
 * on a logarithmic scale, or nearer to the edge where the loop is better damped halfway.
 */
export type StopSign = {
/**
 * The period, s.
 */
period: number,
/**
 * Each swing over the one before.
 */
decay: number, };

/**
 * A suggested setting.
 */
export type Suggestion = {
/**
 * On the controller's grid, an exact decimal.
 */
setting: string,
/**
 * The knob there.
 */
knob: number,
/**
 * How it was chosen, a sentence.
 */
reason: string, };

/**
 * How the loop's signals travel in time.
 */
export type Timing = {
/**
 * The plane in which poles, zeros, branches and landmarks of this record lie.
 */
plane: Plane,
/**
 * The dead time of the whole loop in s, without the sampling's own; the part that does not change with the knob.
 */
deadTime: number,
/**
 * What one unit of the knob adds to it, s.
 */
deadTimePerKnob: number,
/**
 * The controller's sampling; None for one that works continuously.
 */
sampling: SamplingRecord | null, };

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

/** Unit of limit and figure, and whether the figure must be at least the limit, for every kind. */
export const REQUIREMENT_FACTS: { readonly [kind in RequirementKind]: { readonly unit: string; readonly atLeast: boolean } } = {
  "damping-ratio": { unit: "", atLeast: true },
  "decay-rate": { unit: "1/s", atLeast: true },
  "natural-frequency-minimum": { unit: "rad/s", atLeast: true },
  "natural-frequency-maximum": { unit: "rad/s", atLeast: false },
  "gain-margin-up": { unit: "dB", atLeast: true },
  "gain-margin-down": { unit: "dB", atLeast: true },
  "phase-margin": { unit: "°", atLeast: true },
  "delay-margin": { unit: "s", atLeast: true },
  "peak-sensitivity": { unit: "", atLeast: false },
  "bandwidth": { unit: "rad/s", atLeast: true },
  "overshoot": { unit: "%", atLeast: false },
  "undershoot": { unit: "%", atLeast: false },
  "rise-time": { unit: "s", atLeast: false },
  "settling-time-2": { unit: "s", atLeast: false },
  "settling-time-5": { unit: "s", atLeast: false },
  "peak-time": { unit: "s", atLeast: false },
  "step-error": { unit: "%", atLeast: false },
  "ramp-error": { unit: "", atLeast: false },
  "parabola-error": { unit: "", atLeast: false },
  "load-peak": { unit: "", atLeast: false },
  "load-final": { unit: "", atLeast: false },
  "controller-peak": { unit: "", atLeast: false },
};
