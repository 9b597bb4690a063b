//! The line of the knob in the record: ranges of stability and of character, and the edges between them.

use alloc::string::String;
use alloc::vec::Vec;
use serde::Serialize;

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
    /// A pole is at the origin; in the z-plane at 1.
    #[serde(rename = "origin crossing")]
    OriginCrossing,
    /// A pole is at z = −1: the signals change their sign from sample to sample.
    #[serde(rename = "alternation crossing")]
    AlternationCrossing,
    /// The knob is the dead time, which is never below zero.
    #[serde(rename = "no dead time")]
    NoDeadTime,
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
    /// Poles in the open right half plane, or outside the unit circle, with multiplicity.
    pub unstable_poles: usize,
    /// Poles on the imaginary axis throughout the range, with multiplicity.
    pub axis_poles: usize,
    /// True where there are this many or more: dead time brings ever more of them over the axis as the knob grows.
    pub at_least: bool,
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
