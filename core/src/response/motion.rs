//! An answer over time, whatever it was found from.

use super::modes::{Modes, Peaks};
use super::trace::Trace;
use crate::record::Curve;

/// An answer to a unit step.
#[derive(Clone, Debug)]
pub enum Motion {
    /// As a sum of modes.
    Modes(Modes),
    /// As points of a simulation.
    Trace(Trace),
}

impl Motion {
    /// y(∞).
    #[must_use]
    pub fn final_value(&self) -> f64 {
        match self {
            Self::Modes(modes) => modes.final_value,
            Self::Trace(trace) => trace.final_value,
        }
    }

    /// The highest and the lowest value. None where the search meets its cap.
    #[must_use]
    pub fn peaks(&self) -> Option<Peaks> {
        match self {
            Self::Modes(modes) => modes.peaks(),
            Self::Trace(trace) => trace.peaks(),
        }
    }

    /// The first time at which the answer, taken in the direction of its final value, is at `part` < 1 of it. None where
    /// the search meets its cap, or the final value is zero.
    #[must_use]
    pub fn first_reach(&self, part: f64) -> Option<f64> {
        match self {
            Self::Modes(modes) => modes.first_reach(part),
            Self::Trace(trace) => trace.first_reach(part),
        }
    }

    /// The last time at which |y − y(∞)| is `band`, 0 where it never is more. None where the search meets its cap.
    #[must_use]
    pub fn last_outside(&self, band: f64) -> Option<f64> {
        match self {
            Self::Modes(modes) => modes.last_outside(band),
            Self::Trace(trace) => trace.last_outside(band),
        }
    }

    /// A time by which the answer has settled well, for drawing.
    #[must_use]
    pub fn horizon(&self) -> f64 {
        match self {
            Self::Modes(modes) => modes.horizon(),
            Self::Trace(trace) => trace.horizon(),
        }
    }

    /// The curve from 0 to `end`, for drawing.
    #[must_use]
    pub fn curve(&self, end: f64) -> Curve {
        match self {
            Self::Modes(modes) => modes.curve(end),
            Self::Trace(trace) => trace.curve(end),
        }
    }
}
