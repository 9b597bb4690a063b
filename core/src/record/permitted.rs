//! Requirements, the controller's scale and the permitted settings in the record.

use crate::project::{Direction, RequirementKind};
use alloc::string::String;
use alloc::vec::Vec;
use serde::Serialize;

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

/// A figure at the chosen setting.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct FigureRecord {
    /// What it is.
    pub kind: RequirementKind,
    /// In the kind's unit. None where it is infinite, has no meaning for this loop, or could not be computed.
    pub value: Option<f64>,
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
