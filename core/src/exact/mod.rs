//! Exact arithmetic on integer polynomials: what Stayband claims is proven here.
//!
//! Coefficients are integers, lowest power first. Nothing in this folder rounds without saying in which direction.

pub mod complex_roots;
pub mod dyadic;
pub mod gcd;
pub mod half_plane;
pub mod poly;
pub mod real_roots;
pub mod resultant;
pub mod scaled;
mod start;

pub use dyadic::{Dyadic, Interval};
pub use poly::IntPoly;
pub use real_roots::RealRoot;

/// An exact method met one of its caps.
#[derive(Clone, Debug, PartialEq, Eq)]
#[non_exhaustive]
pub enum ExactError {
    /// Two real roots could not be told apart within the cap on bisections.
    RootsNotSeparated {
        /// The degree of the polynomial.
        degree: usize,
    },
    /// Complex roots could not be enclosed in disjoint discs within the cap on precision.
    RootsNotEnclosed {
        /// The degree of the polynomial.
        degree: usize,
    },
    /// The enclosure of an edge did not become narrow within the cap on refinements.
    EdgeNotNarrow,
    /// Poles coincide at every value of the knob, so that their meetings cannot be told.
    AlwaysRepeated,
    /// Poles lie on the axis or opposite each other at every value of the knob, so that crossings cannot be told.
    AlwaysOnAxis,
}

impl core::fmt::Display for ExactError {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        match self {
            Self::RootsNotSeparated { degree } => {
                write!(f, "real roots of a polynomial of degree {degree} lie too close together to be told apart")
            }
            Self::RootsNotEnclosed { degree } => {
                write!(f, "roots of a polynomial of degree {degree} lie too close together to be enclosed")
            }
            Self::AlwaysRepeated => write!(f, "poles coincide at every value of the knob"),
            Self::AlwaysOnAxis => write!(f, "poles lie symmetrically to the axis at every value of the knob"),
            Self::EdgeNotNarrow => write!(f, "an edge could not be enclosed narrowly enough"),
        }
    }
}

impl core::error::Error for ExactError {}
