//! Loops with dead time, as they are: quasi-polynomials A(s) + B(s)·e^(−T·s), never a rational approximation.
//!
//! All are of the retarded kind, deg B < deg A: right of any vertical line there are finitely many poles, and the others come
//! from Re s → −∞. T is rational, coefficients are integers. Then, by the theorem of F. Lindemann and K. Weierstrass (1885),
//! e^(jωT) is transcendental for every algebraic ω ≠ 0; so no crossing of the axis at ω > 0 has an algebraic ω or knob,
//! and none is a mere touch.

pub mod branches;
pub mod delay;
pub mod frequency;
mod function;
pub mod gain;
mod isolation;
pub mod landmarks;
mod partition;
mod plane;
pub mod poles;
pub mod response;
mod trigonometry;

pub use function::Quasi;
pub use partition::{Count, DeadTimePartition};

use crate::exact::ExactError;

/// A method of this folder met one of its caps, or a case it does not cover.
#[derive(Clone, Debug, PartialEq, Eq)]
#[non_exhaustive]
pub enum DeadTimeError {
    /// From the exact methods for polynomials.
    Exact(ExactError),
    /// The delayed part has at least the degree of the undelayed one: infinitely many poles near a vertical line.
    NotRetarded {
        /// The degree of the delayed part.
        delayed: usize,
        /// The degree of the undelayed part.
        undelayed: usize,
    },
    /// The characteristic function vanishes for every value of the knob.
    AlwaysZero,
    /// A pole stays at the origin for every value of the knob.
    AlwaysAtOrigin,
    /// The dead time is too long beside the fastest dynamics: more steps along the axis than the cap allows.
    TooManySteps {
        /// The cap.
        cap: usize,
    },
    /// Two crossings of the axis lie too near each other to be told apart, or one touches it but for rounding.
    CrossingsNotSeparated,
    /// No setting was found beyond which the loop is unstable for ever.
    NoOuterBound,
}

impl From<ExactError> for DeadTimeError {
    fn from(error: ExactError) -> Self {
        Self::Exact(error)
    }
}

impl core::fmt::Display for DeadTimeError {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        match self {
            Self::Exact(error) => error.fmt(f),
            Self::NotRetarded { delayed, undelayed } => write!(
                f,
                "the delayed part has degree {delayed}, the undelayed one {undelayed}; the open loop must be strictly proper"
            ),
            Self::AlwaysZero => write!(f, "the characteristic function vanishes identically"),
            Self::AlwaysAtOrigin => write!(f, "a pole stays at the origin for every value of the knob"),
            Self::TooManySteps { cap } => {
                write!(f, "the dead time is too long beside the fastest dynamics: more than {cap} steps along the axis")
            }
            Self::CrossingsNotSeparated => write!(f, "crossings of the axis lie too near each other to be told apart"),
            Self::NoOuterBound => write!(f, "no setting was found beyond which the loop is unstable for ever"),
        }
    }
}

impl core::error::Error for DeadTimeError {}
