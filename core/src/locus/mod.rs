//! The root locus in f64: branches, landmarks, and the rules of the trade for drawing it by hand.

mod arrivals;
mod branches;
pub mod landmarks;
mod meetings;
mod position;
mod stretch;
mod system;
mod track;
pub mod trade;
pub mod view;

pub use branches::{LocusInput, branches};
pub use meetings::{Encounters, Meeting, encounters};

use crate::record::KnobSign;
use alloc::vec::Vec;

/// One branch of the locus: from a pole of the open loop (knob 0) or from infinity, to a zero or to infinity. Where a pole
/// passes infinity at a finite knob value, one branch ends and another begins there.
#[derive(Clone, Debug, PartialEq)]
pub struct Branch {
    /// The half of the locus it belongs to.
    pub sign: KnobSign,
    /// The vertices, in order of growing |knob|.
    pub points: Vec<BranchPoint>,
}

/// A vertex of a branch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BranchPoint {
    /// Real part, 1/s.
    pub re: f64,
    /// Imaginary part, 1/s.
    pub im: f64,
    /// The knob here; infinite where the branch ends in a zero.
    pub knob: f64,
}

impl KnobSign {
    /// Both halves of the locus.
    pub const BOTH: [Self; 2] = [Self::Positive, Self::Negative];

    /// 1 or −1.
    pub fn factor(self) -> f64 {
        match self {
            Self::Positive => 1.0,
            Self::Negative => -1.0,
        }
    }
}
