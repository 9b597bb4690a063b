//! The record: all that comes out. Angles in degrees, frequencies in rad/s, poles in 1/s.

mod locus;
mod permitted;
mod ranges;
mod responses;
mod timing;

pub use locus::{
    Asymptotes, BothSigns, ClosedLoop, ClosedPole, EquivalentPole, KnobSign, Landmark, LandmarkKind, Point, Root,
    Segment, View,
};
pub use permitted::{
    Cause, Conflict, FigureRecord, LimitEdge, LimitRange, Permitted, RequirementRecord, Scale, Suggestion,
};
pub use ranges::{CharacterName, CharacterRange, Edge, EdgeKind, StabilityRange};
pub use responses::{
    Curve, EdgeCurve, FrequencyResponse, GainCrossing, LoadRecord, Margins, PhaseCrossing, StepRecord,
};

pub use timing::{Plane, SamplingRecord, StableAtPeriod, Timing, equivalent};

use crate::project::Project;
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
    /// Dead time and sampling.
    pub timing: Timing,
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
    /// What requirements can be put on, at the chosen setting, in the kinds' units; empty without one.
    pub figures: Vec<FigureRecord>,
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

/// The characteristic polynomial F(s, q) of the loop, in exact integers; q is the knob. Of a loop with dead time it is the
/// one without it, of a sampled loop that of the continuous one; there the equation says how the loop differs.
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
    /// The sample period is long for this loop.
    Sampling,
    /// Something could not be computed; the text says what.
    NotComputed,
}
