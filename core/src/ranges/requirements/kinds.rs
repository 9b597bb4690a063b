//! The kinds of requirements: unit, direction, allowed limits, and how they are called in a sentence.

use crate::project::RequirementKind as Kind;
use dashu_ratio::RBig;

/// The unit of limit and figure.
pub fn unit(kind: Kind) -> &'static str {
    match kind {
        Kind::DampingRatio | Kind::PeakSensitivity | Kind::ControllerPeak => "",
        Kind::RampError | Kind::ParabolaError | Kind::LoadPeak | Kind::LoadFinal => "",
        Kind::DecayRate => "1/s",
        Kind::NaturalFrequencyMinimum | Kind::NaturalFrequencyMaximum | Kind::Bandwidth => "rad/s",
        Kind::GainMarginUp | Kind::GainMarginDown => "dB",
        Kind::PhaseMargin => "°",
        Kind::DelayMargin | Kind::RiseTime | Kind::SettlingTime2 | Kind::SettlingTime5 | Kind::PeakTime => "s",
        Kind::Overshoot | Kind::Undershoot | Kind::StepError => "%",
    }
}

/// Whether the figure must be at least the limit.
pub fn at_least(kind: Kind) -> bool {
    matches!(
        kind,
        Kind::DampingRatio
            | Kind::DecayRate
            | Kind::NaturalFrequencyMinimum
            | Kind::GainMarginUp
            | Kind::GainMarginDown
            | Kind::PhaseMargin
            | Kind::DelayMargin
            | Kind::Bandwidth
    )
}

/// What the requirement is called in a sentence.
pub fn describe(kind: Kind) -> &'static str {
    match kind {
        Kind::DampingRatio => "damping ratio",
        Kind::DecayRate => "decay rate",
        Kind::NaturalFrequencyMinimum => "natural frequency, at least",
        Kind::NaturalFrequencyMaximum => "natural frequency, at most",
        Kind::GainMarginUp => "gain margin upward",
        Kind::GainMarginDown => "gain margin downward",
        Kind::PhaseMargin => "phase margin",
        Kind::DelayMargin => "delay margin",
        Kind::PeakSensitivity => "peak sensitivity",
        Kind::Bandwidth => "bandwidth",
        Kind::Overshoot => "overshoot",
        Kind::Undershoot => "undershoot",
        Kind::RiseTime => "rise time",
        Kind::SettlingTime2 => "settling time to 2 %",
        Kind::SettlingTime5 => "settling time to 5 %",
        Kind::PeakTime => "peak time",
        Kind::StepError => "static error on a step",
        Kind::RampError => "static error on a ramp",
        Kind::ParabolaError => "static error on a parabola",
        Kind::LoadPeak => "peak deviation under load",
        Kind::LoadFinal => "remaining deviation under load",
        Kind::ControllerPeak => "peak controller output",
    }
}

/// What is wrong with a limit, if anything.
pub fn check_limit(kind: Kind, limit: &RBig) -> Option<&'static str> {
    let (zero, one) = (RBig::ZERO, RBig::ONE);
    match kind {
        Kind::DampingRatio if *limit <= zero || *limit >= one => {
            Some("type a damping ratio between 0 and 1, such as 0.5")
        }
        Kind::PeakSensitivity if *limit <= one => Some("peak sensitivity is never below 1: type a limit such as 2"),
        Kind::PhaseMargin if *limit <= zero || *limit >= RBig::from(180) => {
            Some("type a phase margin between 0 and 180 degrees, such as 45")
        }
        Kind::Overshoot | Kind::Undershoot if *limit < zero => Some("type a percentage of zero or more, such as 10"),
        Kind::Overshoot | Kind::Undershoot => None,
        _ if *limit <= zero => Some("type a limit above zero"),
        _ => None,
    }
}
