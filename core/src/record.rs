//! The record: all that comes out. Angles in degrees, frequencies in rad/s, poles in 1/s.

use crate::project::Project;
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
    /// The part of the s-plane that shows what matters.
    pub view: View,
    /// Warnings about the loop, most serious first.
    pub notices: Vec<Notice>,
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
