//! The controller's own scale: from setting to knob and back, rounding to the safe side, and a suggestion.

pub mod step_up;
mod suggestion;

pub use suggestion::{Advice, Suggested, controller_range, suggest};

use crate::exact::dyadic::exact_text;
use crate::project::Direction;
use crate::record;
use alloc::string::String;
use dashu_int::IBig;
use dashu_ratio::RBig;

/// The scale of a controller, checked: factor and step are not zero, step is positive, minimum ≤ maximum.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Scale {
    /// What the controller calls the setting.
    pub name: String,
    /// Its unit; may be empty.
    pub unit: String,
    /// How the knob follows from the setting.
    pub direction: Direction,
    /// knob = factor × setting, or factor / setting.
    pub factor: RBig,
    /// The smallest setting.
    pub minimum: Option<RBig>,
    /// The largest setting.
    pub maximum: Option<RBig>,
    /// Settings are whole multiples of this.
    pub step: Option<RBig>,
}

/// To which side a setting is rounded.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Rounding {
    /// To the next setting of the grid that is not below.
    Up,
    /// To the next setting of the grid that is not above.
    Down,
}

impl Scale {
    /// The knob at a setting; None for setting 0 on a reciprocal scale.
    pub fn knob(&self, setting: &RBig) -> Option<RBig> {
        match self.direction {
            Direction::Proportional => Some(&self.factor * setting),
            Direction::Reciprocal => (!setting.is_zero()).then(|| &self.factor / setting),
        }
    }

    /// The setting for a knob; None for knob 0 on a reciprocal scale.
    pub fn setting(&self, knob: &RBig) -> Option<RBig> {
        match self.direction {
            Direction::Proportional => Some(knob / &self.factor),
            Direction::Reciprocal => (!knob.is_zero()).then(|| &self.factor / knob),
        }
    }

    /// The setting for a knob in f64; None where it is not finite, or would be negative on a reciprocal scale.
    pub fn setting_f64(&self, knob: f64) -> Option<f64> {
        let factor = self.factor.to_f64().value();
        let setting = match self.direction {
            Direction::Proportional => knob / factor,
            Direction::Reciprocal => Some(factor / knob).filter(|setting| *setting > 0.0)?,
        };
        setting.is_finite().then_some(setting)
    }

    /// Whether a larger setting means a larger knob, for knobs of one sign.
    pub fn rises(&self) -> bool {
        let positive = self.factor > RBig::ZERO;
        match self.direction {
            Direction::Proportional => positive,
            Direction::Reciprocal => !positive,
        }
    }

    /// The setting on the grid next to a number; the number itself where there is no grid.
    pub fn rounded(&self, setting: &RBig, rounding: Rounding) -> RBig {
        let Some(step) = &self.step else { return setting.clone() };
        let steps = setting / step;
        let whole: IBig = match rounding {
            Rounding::Up => steps.ceil(),
            Rounding::Down => steps.floor(),
        };
        RBig::from(whole) * step
    }

    /// Whether the controller takes a setting, but for its grid.
    pub fn takes(&self, setting: &RBig) -> bool {
        self.minimum.as_ref().is_none_or(|m| m <= setting) && self.maximum.as_ref().is_none_or(|m| setting <= m)
    }

    /// For the record.
    pub fn record(&self) -> record::Scale {
        let float = |value: &RBig| value.to_f64().value();
        record::Scale {
            name: self.name.clone(),
            unit: self.unit.clone(),
            direction: self.direction,
            factor: float(&self.factor),
            minimum: self.minimum.as_ref().map(float),
            maximum: self.maximum.as_ref().map(float),
            step: self.step.as_ref().map(float),
        }
    }
}

/// The setting as an exact decimal to type in; settings off the grid and without a short decimal are fractions.
pub fn typed(setting: &RBig) -> String {
    exact_text(setting)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn rational(n: i64, d: u64) -> RBig {
        RBig::from_parts(IBig::from(n), d.into())
    }

    fn scale(direction: Direction, factor: RBig) -> Scale {
        Scale {
            name: "band".into(),
            unit: "%".into(),
            direction,
            factor,
            minimum: None,
            maximum: None,
            step: Some(rational(1, 2)),
        }
    }

    #[test]
    fn a_proportional_band_turns_the_order_round() {
        let band = scale(Direction::Reciprocal, rational(100, 1));
        assert_eq!(band.knob(&rational(25, 1)), Some(rational(4, 1)));
        assert_eq!(band.setting(&rational(8, 1)), Some(rational(25, 2)));
        assert!(!band.rises());
        assert_eq!(band.knob(&RBig::ZERO), None);
    }

    #[test]
    fn rounding_goes_to_the_wanted_side() {
        let gain = scale(Direction::Proportional, rational(1, 3));
        assert_eq!(gain.rounded(&rational(17, 10), Rounding::Down), rational(3, 2));
        assert_eq!(gain.rounded(&rational(-17, 10), Rounding::Down), rational(-2, 1));
        assert_eq!(gain.rounded(&rational(17, 10), Rounding::Up), rational(2, 1));
        assert_eq!(gain.rounded(&rational(3, 2), Rounding::Up), rational(3, 2));
    }
}
