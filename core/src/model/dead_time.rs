//! Dead times: how long a block holds its signal back.

use dashu_ratio::RBig;

/// The dead time fixed + per_knob·knob, in s.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct DeadTime {
    /// The part that no knob changes.
    pub fixed: RBig,
    /// What one unit of the knob adds.
    pub per_knob: RBig,
}

impl DeadTime {
    /// True for no dead time at all.
    #[must_use]
    pub fn is_none(&self) -> bool {
        self.fixed.is_zero() && self.per_knob.is_zero()
    }

    /// True where neither part is below zero.
    #[must_use]
    pub fn is_possible(&self) -> bool {
        self.fixed >= RBig::ZERO && self.per_knob >= RBig::ZERO
    }

    /// The dead time at a value of the knob.
    #[must_use]
    pub fn at(&self, knob: &RBig) -> RBig {
        &self.fixed + &self.per_knob * knob
    }

    /// One after the other.
    #[must_use]
    pub fn plus(&self, other: &Self) -> Self {
        Self { fixed: &self.fixed + &other.fixed, per_knob: &self.per_knob + &other.per_knob }
    }

    /// `count` times the dead time.
    pub(super) fn times(&self, count: i32) -> Self {
        let count = RBig::from(count);
        Self { fixed: &self.fixed * &count, per_knob: &self.per_knob * &count }
    }
}
