//! The record: all that comes out. Angles in degrees, frequencies in rad/s, poles in 1/s.

use crate::project::{Direction, Project, RequirementKind};
use crate::sheet::SheetRecord;
use alloc::string::String;
use alloc::vec::Vec;
use serde::Serialize;

/// The name and version of the record document.
pub const RECORD_FORMAT: &str = "stayband-record/1";

/// Everything Stayband found out about one project.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Record {
    /// Always [`RECORD_FORMAT`].
    pub format: String,
    /// The program that made the record.
    pub program: Program,
    /// The input.
    pub project: Project,
    /// What was read, for display.
    pub reading: Reading,
    /// The characteristic polynomial.
    pub model: ModelRecord,
    /// The whole real line of the knob, from −∞ to +∞, in ranges with a constant count of unstable poles.
    pub stability: Vec<StabilityRange>,
    /// The whole real line of the knob in ranges of constant character.
    pub character: Vec<CharacterRange>,
    /// The special points of the locus.
    pub landmarks: Vec<Landmark>,
    /// Where branches go to infinity. None unless the characteristic polynomial is affine in the knob.
    pub asymptotes: Option<BothSigns<Asymptotes>>,
    /// The parts of the real axis that belong to the locus. None unless affine.
    pub real_axis: Option<BothSigns<Vec<Segment>>>,
    /// Poles of the open loop (of the knob at zero), fixed modes included.
    pub poles: Vec<Root>,
    /// Zeros of the open loop (of the knob at infinity), fixed modes included. Empty unless affine.
    pub zeros: Vec<Root>,
    /// The closed loop at the chosen setting. None while no setting is given.
    pub closed_loop: Option<ClosedLoop>,
    /// The controller's scale.
    pub scale: Scale,
    /// The requirements with the ranges in which they are met, in the project's order.
    pub requirements: Vec<RequirementRecord>,
    /// Where stability and all requirements agree.
    pub permitted: Permitted,
    /// Margins and frequency response at the chosen setting. None without a setting, or where the loop is unstable there.
    pub margins: Option<Margins>,
    /// The answer to a unit step of the command at the chosen setting. None likewise.
    pub step: Option<StepRecord>,
    /// The answer to a unit step at the plant's input at the chosen setting. None likewise.
    pub load: Option<LoadRecord>,
    /// The part of the s-plane that shows what matters.
    pub view: View,
    /// Warnings about the loop, most serious first.
    pub notices: Vec<Notice>,
    /// What the printed sheet needs beside the rest. None unless it was asked for.
    pub sheet: Option<SheetRecord>,
}

/// The program that made a record.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Program {
    /// The version of Stayband.
    pub version: String,
    /// SHA-256 of the page, computed with this very field blank. None outside the page.
    pub hash: Option<String>,
}

/// What was read from the typed blocks, for display.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Reading {
    /// The controller as MathML. None where it could not be read.
    pub controller: Option<String>,
    /// The plant as MathML. None where it could not be read.
    pub plant: Option<String>,
    /// The sensor as MathML. None where it could not be read.
    pub sensor: Option<String>,
    /// Every name but `s`, in order of first appearance.
    pub names: Vec<String>,
}

/// The characteristic polynomial F(s, q) of the loop, in exact integers; q is the knob.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct ModelRecord {
    /// Degree in s.
    pub order: usize,
    /// Degree in the knob; 1 is the affine case, 0 a knob without effect.
    pub knob_degree: usize,
    /// `coefficients[i][k]` multiplies s^i q^k; decimal integers.
    pub coefficients: Vec<Vec<String>>,
    /// "F(s) = 0" as MathML.
    pub mathml: String,
}

/// An end of a range.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Edge {
    /// The knob at the edge, to f64 precision.
    pub value: f64,
    /// Decimal numbers between which the edge lies, no wider than 1e-15 of its value.
    pub bracket: [String; 2],
    /// The edge itself where it is a rational number: a decimal such as "0.5" where one of 20 digits is exact, otherwise a
    /// fraction such as "-2/15".
    pub exact: Option<String>,
    /// True where bracket and counts are proven by exact arithmetic.
    pub proven: bool,
    /// What happens here.
    pub kind: EdgeKind,
    /// rad/s; the first pole pair ±jω on the axis here.
    pub omega: Option<f64>,
    /// Every ω > 0 of the pole pairs that reach the axis here, rad/s.
    pub omegas: Vec<f64>,
    /// True where the count of unstable poles is the same on both sides: the locus touches the axis and returns.
    pub touching: bool,
    /// Poles in the open right half plane exactly at the edge.
    pub unstable_poles: usize,
    /// Poles on the imaginary axis exactly at the edge.
    pub axis_poles: usize,
    /// The character exactly at the edge.
    pub name: CharacterName,
}

/// What happens at an edge.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum EdgeKind {
    /// A pole pair is at ±jω.
    #[serde(rename = "axis crossing")]
    AxisCrossing,
    /// A pole is at the origin.
    #[serde(rename = "origin crossing")]
    OriginCrossing,
    /// The leading coefficient vanishes: a pole passes infinity.
    #[serde(rename = "degree drop")]
    DegreeDrop,
    /// Real poles meet and leave the real axis.
    Breakaway,
    /// A pole pair meets on the real axis and becomes real.
    BreakIn,
    /// A repeated pole of the open loop, at zero gain.
    #[serde(rename = "repeated pole")]
    RepeatedPole,
}

/// A range of the knob with a constant count of unstable poles. Its ends do not belong to it.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct StabilityRange {
    /// The lower end; None is −∞.
    pub from: Option<Edge>,
    /// The upper end; None is +∞.
    pub to: Option<Edge>,
    /// Poles in the open right half plane, with multiplicity.
    pub unstable_poles: usize,
    /// Poles on the imaginary axis throughout the range, with multiplicity.
    pub axis_poles: usize,
    /// True where both counts are zero.
    pub stable: bool,
}

/// A range of the knob in which the kinds of poles do not change. Its ends do not belong to it.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct CharacterRange {
    /// The lower end; None is −∞.
    pub from: Option<Edge>,
    /// The upper end; None is +∞.
    pub to: Option<Edge>,
    /// Real poles, with multiplicity.
    pub real_poles: usize,
    /// Pairs of complex poles, with multiplicity.
    pub pairs: usize,
    /// The trade's word.
    pub name: CharacterName,
}

/// The trade's word for the kinds of poles.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum CharacterName {
    /// Stable; all poles real and distinct.
    Overdamped,
    /// Stable; all poles real, some repeated.
    #[serde(rename = "critically damped")]
    CriticallyDamped,
    /// Stable with at least one oscillating pair.
    Underdamped,
    /// No pole right of the axis, some on it.
    #[serde(rename = "marginally stable")]
    MarginallyStable,
    /// A pole right of the axis, or a repeated one on it.
    Unstable,
}

/// A special point of the locus.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Landmark {
    /// What it is.
    pub kind: LandmarkKind,
    /// Where it is, 1/s. Of a conjugate pair only the upper one is listed.
    pub s: Point,
    /// The knob there; None is infinity (arrivals).
    pub knob: Option<f64>,
    /// How many poles meet there.
    pub multiplicity: usize,
    /// Degrees in (−180, 180], for departures and arrivals: the direction in which the branch leaves a pole, or from
    /// which, seen from the zero, it arrives.
    pub angle: Option<f64>,
    /// The sign of the knob on this part of the locus.
    pub sign: KnobSign,
}

/// What a landmark is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum LandmarkKind {
    /// Branches meet; away from the real axis, or leaving it as |knob| grows.
    Breakaway,
    /// Branches meet on the real axis and stay on it as |knob| grows.
    BreakIn,
    /// A branch leaves a pole of the open loop.
    Departure,
    /// A branch arrives at a zero of the open loop.
    Arrival,
    /// A pole pair is on the imaginary axis.
    #[serde(rename = "axis crossing")]
    AxisCrossing,
    /// A pole is at the origin.
    #[serde(rename = "origin crossing")]
    OriginCrossing,
}

/// Which half of the locus.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum KnobSign {
    /// Knob from 0 to +∞.
    Positive,
    /// Knob from 0 to −∞.
    Negative,
}

/// A value for each sign of the knob.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct BothSigns<T> {
    /// Knob from 0 to +∞.
    pub positive: T,
    /// Knob from 0 to −∞.
    pub negative: T,
}

/// The straight lines the branches approach.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Asymptotes {
    /// The number of branches that go to infinity.
    pub count: usize,
    /// Where the asymptotes meet, on the real axis, 1/s. None where there are none.
    pub centroid: Option<f64>,
    /// Degrees in (−180, 180], ascending.
    pub angles: Vec<f64>,
}

/// A part of the real axis; None is an infinite end.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Segment(
    /// The left end, 1/s; None is −∞.
    pub Option<f64>,
    /// The right end, 1/s; None is +∞.
    pub Option<f64>,
);

/// A point of the s-plane, 1/s.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Point {
    /// The real part.
    pub re: f64,
    /// The imaginary part.
    pub im: f64,
}

/// A root with the radius of a disc that surely holds it.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Root {
    /// The real part, 1/s.
    pub re: f64,
    /// The imaginary part, 1/s; exactly 0 for a real root.
    pub im: f64,
    /// The true root is no farther than this, 1/s.
    pub radius: f64,
    /// How many roots coincide here.
    pub multiplicity: usize,
}

/// The closed loop at the chosen setting.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct ClosedLoop {
    /// The knob's value.
    pub knob: f64,
    /// Poles of the closed loop.
    pub poles: Vec<Root>,
    /// Poles in the open right half plane; exact.
    pub unstable_poles: usize,
    /// Poles on the imaginary axis; exact.
    pub axis_poles: usize,
    /// The trade's word for the kinds of poles; exact.
    pub name: CharacterName,
}

/// A rectangle of the s-plane, 1/s.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct View {
    /// Left and right.
    pub re: [f64; 2],
    /// Bottom and top.
    pub im: [f64; 2],
}

/// A warning about the loop.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Notice {
    /// What it is about.
    pub kind: NoticeKind,
    /// A sentence for the user.
    pub text: String,
}

/// What a notice is about.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize)]
#[serde(rename_all = "kebab-case")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum NoticeKind {
    /// A fixed mode on or right of the axis: no setting is stable.
    UnstableFixedMode,
    /// A factor common to numerator and denominator.
    CancelledFactor,
    /// The knob appears, but moves no pole; or it does not appear.
    KnobWithoutEffect,
    /// A block with more zeros than poles.
    ImproperBlock,
    /// The leading coefficient vanishes at some knob value.
    AlgebraicLoop,
    /// Something could not be computed; the text says what.
    NotComputed,
}

/// The controller's scale: what setting belongs to what knob.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Scale {
    /// What the controller calls the setting; the knob's symbol where it has no name of its own.
    pub name: String,
    /// The controller's unit; may be empty.
    pub unit: String,
    /// How the knob follows from the setting.
    pub direction: Direction,
    /// knob = factor × setting, or factor / setting.
    pub factor: f64,
    /// The smallest setting the controller takes.
    pub minimum: Option<f64>,
    /// The largest setting the controller takes.
    pub maximum: Option<f64>,
    /// The resolution.
    pub step: Option<f64>,
}

/// An end of a requirement's or a permitted range.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct LimitEdge {
    /// The knob.
    pub knob: f64,
    /// The setting; None where the scale has none for this knob.
    pub setting: Option<f64>,
    /// Decimal numbers between which the knob lies; for a computed edge the uncertainty of the computation.
    pub bracket: [String; 2],
    /// True where the bracket is proven.
    pub proven: bool,
    /// What fails behind the edge.
    pub cause: Cause,
}

/// What fails behind an edge.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case", tag = "kind", content = "requirement")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum Cause {
    /// Stability.
    Stability,
    /// A requirement.
    Requirement(RequirementKind),
    /// The controller takes no such setting.
    Controller,
}

/// A range of the knob in which a requirement is met. None is an infinite end.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct LimitRange {
    /// The lower end.
    pub from: Option<LimitEdge>,
    /// The upper end.
    pub to: Option<LimitEdge>,
}

/// A requirement, judged.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct RequirementRecord {
    /// What is required.
    pub kind: RequirementKind,
    /// The limit, in `unit`.
    pub limit: f64,
    /// True where the figure must be at least the limit, false where at most.
    pub at_least: bool,
    /// The unit of limit and figure; may be empty.
    pub unit: String,
    /// Where the requirement and stability are met, ascending.
    pub ranges: Vec<LimitRange>,
    /// True where the ranges are proven, false where they are computed.
    pub proven: bool,
    /// The figure at the chosen setting. None where it is undefined, infinite, or there is no setting.
    pub figure: Option<f64>,
    /// Whether the requirement is met at the chosen setting. None without a setting.
    pub met: Option<bool>,
    /// In words: why no setting meets it, or why it is undefined for this loop.
    pub remark: Option<String>,
}

/// Where stability and all requirements agree.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Permitted {
    /// The permitted ranges of the knob, ascending.
    pub knob: Vec<LimitRange>,
    /// For each of them the smallest and the largest setting on the controller's grid, rounded inward, as exact
    /// decimals; None where no setting of the grid lies inside, or the side is open.
    pub setting: Vec<[Option<String>; 2]>,
    /// True where every edge is proven.
    pub proven: bool,
    /// The suggestion.
    pub suggested: Option<Suggestion>,
    /// Which requirements exclude each other, where nothing is permitted.
    pub conflict: Option<Conflict>,
}

/// A suggested setting.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Suggestion {
    /// On the controller's grid, an exact decimal.
    pub setting: String,
    /// The knob there.
    pub knob: f64,
    /// How it was chosen, a sentence.
    pub reason: String,
}

/// Requirements that exclude each other.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Conflict {
    /// The smallest such set; empty where the loop is never stable, or the controller's limits exclude every setting.
    pub requirements: Vec<RequirementKind>,
    /// By how much, a sentence in the controller's scale.
    pub text: String,
}

/// Margins of the open loop at one setting.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Margins {
    /// The factor by which the loop gain may rise. None: without limit.
    pub gain_up: Option<f64>,
    /// The factor by which the loop gain may be divided. None: without limit.
    pub gain_down: Option<f64>,
    /// Degrees. None: no turn of the phase makes the loop marginal.
    pub phase: Option<f64>,
    /// s. None: no dead time makes the loop marginal.
    pub delay: Option<f64>,
    /// The largest |1/(1 + L(jω))|.
    pub peak_sensitivity: f64,
    /// rad/s, where the peak is.
    pub peak_frequency: f64,
    /// rad/s. None: the closed loop does not fall 3 dB below its static gain.
    pub bandwidth: Option<f64>,
    /// Every ω with |L(jω)| = 1.
    pub gain_crossings: Vec<GainCrossing>,
    /// Every ω ≥ 0 with L(jω) real and negative.
    pub phase_crossings: Vec<PhaseCrossing>,
    /// The open loop over frequency.
    pub response: FrequencyResponse,
}

/// Where the open loop has magnitude 1.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct GainCrossing {
    /// rad/s.
    pub omega: f64,
    /// Degrees above −180 (below where negative), in (−180, 180].
    pub phase_margin: f64,
    /// s.
    pub delay_margin: f64,
}

/// Where the open loop is real and negative.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct PhaseCrossing {
    /// rad/s.
    pub omega: f64,
    /// The factor of the loop gain at which −1 is met here.
    pub factor: f64,
}

/// The open loop L(jω), the same number of entries in each.
#[derive(Clone, Debug, Default, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct FrequencyResponse {
    /// rad/s, ascending.
    pub omega: Vec<f64>,
    /// dB.
    pub magnitude: Vec<f64>,
    /// Degrees, continuous.
    pub phase: Vec<f64>,
}

/// A curve over time.
#[derive(Clone, Debug, Default, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Curve {
    /// s, ascending.
    pub time: Vec<f64>,
    /// The value at each time.
    pub value: Vec<f64>,
}

/// A curve at another setting, for comparison.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct EdgeCurve {
    /// The knob.
    pub knob: f64,
    /// The curve.
    pub curve: Curve,
}

/// The answer of the output to a unit step of the command. The output is in the command's units: what the sensor shows
/// of it at rest.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct StepRecord {
    /// At the setting.
    pub curve: Curve,
    /// At the ends of the permitted range that holds the setting, or of the first one.
    pub at_edges: Vec<EdgeCurve>,
    /// The controller's output at the setting. None where the controller is improper.
    pub controller: Option<Curve>,
    /// The final value.
    pub final_value: f64,
    /// % of the final value. None where that is zero.
    pub overshoot: Option<f64>,
    /// % of the final value. None where that is zero.
    pub undershoot: Option<f64>,
    /// s, from 10 % to 90 %.
    pub rise_time: Option<f64>,
    /// s, to 2 %.
    pub settling_time2: Option<f64>,
    /// s, to 5 %.
    pub settling_time5: Option<f64>,
    /// s. None where the final value is never exceeded.
    pub peak_time: Option<f64>,
    /// The largest controller output. None where the controller is improper.
    pub controller_peak: Option<f64>,
}

/// The answer of the output to a unit step at the plant's input, in the output's own units.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct LoadRecord {
    /// At the setting.
    pub curve: Curve,
    /// The largest deviation.
    pub peak: f64,
    /// The remaining deviation.
    pub final_value: f64,
}
