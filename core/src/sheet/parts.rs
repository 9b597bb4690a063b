//! What the printed sheet needs beside the rest of the record. It is computed only when asked for.

use crate::project::{Observation, Project, RequirementKind};
use crate::record::{Asymptotes, BothSigns, Edge, LandmarkKind, Point};
use alloc::string::String;
use alloc::vec::Vec;
use serde::Serialize;

/// The sheet's own part of the record.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct SheetRecord {
    /// SHA-256 of the project document as it was handed in, byte for byte.
    pub project_hash: String,
    /// The derivation for a check by hand. None where it does not apply; `remark` says why.
    pub derivation: Option<Derivation>,
    /// Why there is no derivation.
    pub remark: Option<String>,
    /// The way from a low setting to the last one.
    pub step_up: StepUpPlan,
    /// What the observation on the machine says about the model. None while nothing was entered.
    pub site_check: Option<SiteCheck>,
}

/// A formula.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Formula {
    /// For display: integers of more than 12 digits are rounded to 10.
    pub mathml: String,
    /// In the notation of the blocks, exact.
    pub text: String,
}

/// The derivation for a check by hand.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Derivation {
    /// D and N of the moving part F = D + q·N of the characteristic polynomial; None unless affine.
    pub affine: Option<[Formula; 2]>,
    /// The moving part of the characteristic polynomial.
    pub moving: Formula,
    /// The factor that no knob moves, where there is one.
    pub fixed: Option<Formula>,
    /// The Routh arrays with the knob in them: that of the moving part, and, where it ends early, the one used instead.
    pub routh: Vec<RouthTable>,
    /// Why there is no Routh array with the knob in it.
    pub routh_remark: Option<String>,
    /// The equations whose solutions are the edges.
    pub conditions: Vec<Condition>,
    /// On the imaginary axis.
    pub axis: Option<AxisEquations>,
    /// The edges between the ranges of stability, ascending.
    pub edges: Vec<Edge>,
    /// The count of every range, by the Routh array at one number.
    pub ranges: Vec<RangeCheck>,
    /// Asymptotes; None unless affine.
    pub asymptotes: Option<AsymptoteStep>,
    /// Where poles meet.
    pub breakaway: Option<Breakaway>,
    /// Angles at complex poles and zeros; empty unless affine.
    pub directions: Vec<DirectionStep>,
    /// The requirements, in the project's order.
    pub requirements: Vec<RequirementStep>,
}

/// A Routh array.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct RouthTable {
    /// The a of (s + a)·F(s), where the array is that of this product.
    pub added_pole: Option<i32>,
    /// The rows, highest power first.
    pub rows: Vec<RouthRow>,
}

/// A row of a Routh array.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct RouthRow {
    /// The power of s the row begins with.
    pub power: usize,
    /// The elements in lowest terms.
    pub elements: Vec<Formula>,
    /// What is special about the row.
    pub special: Option<SpecialCase>,
}

/// A special case of the Routh array.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "kebab-case", tag = "kind", content = "auxiliary")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum SpecialCase {
    /// The row was zero and was replaced by the derivative of this auxiliary polynomial, the row above.
    ZeroRow(Formula),
    /// The first element is zero and another one is not: the array ends here.
    ZeroFirstElement,
}

/// An equation in the knob, with its real solutions.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Condition {
    /// What the solutions mean.
    pub kind: ConditionKind,
    /// This polynomial in the knob is zero.
    pub equation: Formula,
    /// The real solutions, ascending.
    pub candidates: Vec<Candidate>,
}

/// What the solutions of a condition mean.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum ConditionKind {
    /// The constant coefficient vanishes: a pole is at the origin.
    Origin,
    /// The highest coefficient vanishes: a pole passes infinity.
    DegreeDrop,
    /// The last Hurwitz determinant but one, which stands in row s^1 of the Routh array, vanishes: poles lie opposite each
    /// other, on the axis or to both sides of it.
    RowOfZeros,
}

/// A solution, kept or rejected.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Candidate {
    /// The knob. None: infinite.
    pub knob: Option<f64>,
    /// The point of the s-plane, where it is known.
    pub s: Option<Point>,
    /// How often it is a root of the equation.
    pub multiplicity: usize,
    /// Whether it is what was sought.
    pub kept: bool,
    /// What it is, or why it was rejected.
    pub reason: String,
}

/// F(jω, q) = 0 in its real and its imaginary part.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct AxisEquations {
    /// What the square of ω is called.
    pub variable: String,
    /// The real part, of x = ω² and the knob.
    pub even: Formula,
    /// The imaginary part over ω, likewise.
    pub odd: Formula,
    /// The knob eliminated: a polynomial in x. None unless affine, and where it vanishes identically.
    pub eliminated: Option<Formula>,
    /// Its real roots x, as s = jω where x > 0.
    pub candidates: Vec<Candidate>,
}

/// A range of the knob, checked at one number by the Routh array.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct RangeCheck {
    /// The knob, exact.
    pub sample: String,
    /// The first column, to six digits, rounded down.
    pub first_column: Vec<String>,
    /// The a of (s + a)·F(s), where the column is that of this product's array.
    pub added_pole: Option<i32>,
    /// Changes of sign. None where no array came to its end.
    pub changes: Option<usize>,
    /// Poles on the axis, from the auxiliary polynomial.
    pub on_axis: Option<usize>,
    /// Powers of s whose rows were zero.
    pub zero_rows: Vec<usize>,
    /// Poles right of the axis as the ranges claim them, fixed modes included.
    pub unstable_poles: usize,
    /// Of them fixed modes.
    pub fixed_unstable: usize,
}

/// The asymptotes.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct AsymptoteStep {
    /// Moving poles and zeros of the open loop.
    pub counts: [usize; 2],
    /// Their sums, exact.
    pub sums: [String; 2],
    /// The centroid, exact; None without asymptotes.
    pub centroid: Option<String>,
    /// As the record has them.
    pub lines: BothSigns<Asymptotes>,
}

/// Where poles meet.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Breakaway {
    /// D′·N − D·N′, a polynomial in s, of an affine loop; else the discriminant of F, a polynomial in the knob.
    pub equation: Formula,
    /// Whether the equation is the discriminant.
    pub discriminant: bool,
    /// Its roots, of a conjugate pair the upper one; of the discriminant the real ones.
    pub candidates: Vec<Candidate>,
}

/// The angle of departure from a pole, or of arrival at a zero.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct DirectionStep {
    /// Departure or arrival.
    pub kind: LandmarkKind,
    /// The pole or zero, in the upper half plane.
    pub s: Point,
    /// How many coincide.
    pub multiplicity: usize,
    /// The angles of the lines from the other poles and zeros to it.
    pub terms: Vec<AngleTerm>,
    /// The directions for each sign of the knob, degrees.
    pub angles: BothSigns<Vec<f64>>,
}

/// The line from another pole or zero.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct AngleTerm {
    /// Where it begins.
    pub s: Point,
    /// Whether a pole is there; else a zero.
    pub pole: bool,
    /// How many.
    pub multiplicity: usize,
    /// Degrees, of one.
    pub angle: f64,
}

/// A requirement's governing equation.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct RequirementStep {
    /// What is required.
    pub kind: RequirementKind,
    /// The condition in words.
    pub condition: String,
    /// The expression the condition speaks of.
    pub equation: Option<Formula>,
    /// True where the edges are solutions of the equation, proven; false where they were found by computing the figure.
    pub proven: bool,
    /// The edges that the requirement sets.
    pub edges: Vec<RequirementEdge>,
}

/// An edge that a requirement sets.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct RequirementEdge {
    /// The knob.
    pub knob: f64,
    /// The pole that is on the limit there, where poles decide.
    pub pole: Option<Point>,
    /// The figure there, in the requirement's unit.
    pub figure: Option<f64>,
}

/// A plan of settings from a low one to the last.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct StepUpPlan {
    /// What must be known before the plan is used.
    pub remarks: Vec<String>,
    /// The edge the plan moves towards.
    pub edge: Option<EdgeAhead>,
    /// The rows, from the first to the last setting. Empty where there is no plan; the remarks say why.
    pub rows: Vec<StepUpRow>,
}

/// The edge a plan moves towards.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct EdgeAhead {
    /// The knob there.
    pub knob: f64,
    /// The setting there; None where the scale has none.
    pub setting: Option<f64>,
    /// rad/s of the oscillation that begins there; None where the answer drifts away without one.
    pub omega: Option<f64>,
    /// Its period, s.
    pub period: Option<f64>,
}

/// A row of a step-up plan.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct StepUpRow {
    /// The setting, an exact decimal.
    pub setting: String,
    /// The knob there.
    pub knob: f64,
    /// Whether all requirements are met there.
    pub permitted: bool,
    /// % of the final value.
    pub overshoot: Option<f64>,
    /// rad/s of the least damped pole pair; None where all poles are real.
    pub omega: Option<f64>,
    /// Its period, s.
    pub period: Option<f64>,
    /// Its damping ratio.
    pub damping: Option<f64>,
    /// Each swing over the one before, one period earlier.
    pub decay: Option<f64>,
    /// Settling time to 2 %, s.
    pub settling: Option<f64>,
    /// By what factor the knob may still be multiplied; None without an edge ahead.
    pub room: Option<f64>,
    /// What means stop.
    pub stop: Option<StopSign>,
}

/// An oscillation that means stop: that of the setting on the way from the row to the edge: halfway,
/// on a logarithmic scale, or nearer to the edge where the loop is better damped halfway.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct StopSign {
    /// The period, s.
    pub period: f64,
    /// Each swing over the one before.
    pub decay: f64,
}

/// What the observation on the machine says about the model.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct SiteCheck {
    /// What was observed.
    pub seen: Observation,
    /// What must be put right, or why nothing was found.
    pub remarks: Vec<String>,
    /// What the model says to the same setting.
    pub predicted: Option<Predicted>,
    /// The correction that explains the observation.
    pub correction: Option<Correction>,
}

/// What the model says to the observed setting.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Predicted {
    /// s: of the step between its first two peaks; of the oscillation at the nearest edge ahead.
    pub period: Option<f64>,
    /// %; of a step.
    pub overshoot: Option<f64>,
    /// The setting of the nearest edge ahead; of an oscillation.
    pub setting: Option<f64>,
}

/// A correction of the model: the loop gain times a factor, and a dead time more.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Correction {
    /// The factor of the loop gain.
    pub gain: f64,
    /// The added dead time, s. Below zero the machine is faster than the model.
    pub dead_time: f64,
    /// What the stated tolerances allow; None where none are stated.
    pub allowed: Option<Allowed>,
    /// Whether the correction lies within. None where no tolerances are stated.
    pub within: Option<bool>,
    /// The project with the correction put in; None where that cannot be written down.
    pub project: Option<Project>,
    /// The stable ranges of the corrected project: ends in the knob, None for infinite ones.
    pub stable: Vec<[Option<f64>; 2]>,
    /// The permitted settings of the corrected project, as in the record.
    pub permitted: Vec<[Option<String>; 2]>,
    /// Why there are no new ranges, or what is left out in them.
    pub remark: Option<String>,
}

/// What tolerances allow at the observed frequency, to first order: the sum of what each quantity does alone.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Allowed {
    /// Smallest and largest factor of the loop gain.
    pub gain: [f64; 2],
    /// Smallest and largest lag, as a dead time in s.
    pub dead_time: [f64; 2],
}
