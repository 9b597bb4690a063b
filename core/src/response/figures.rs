//! The figures that requirements speak of, at one value of the knob.

use super::loop_at::{Answer, LoopAt};
use super::modes::Peaks;
use super::motion::Motion;
use crate::exact::IntPoly;
use crate::project::RequirementKind;
use crate::sampled::SampledAt;
use dashu_ratio::RBig;
use nalgebra::ComplexField;

/// An excess below this part of the final value is none but for rounding.
const NO_EXCESS: f64 = 1e-9;

/// A figure.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Figure {
    /// A finite number in the kind's unit.
    Value(f64),
    /// Infinite: no limit in this direction, or an error that grows without bound.
    Infinite,
    /// It has no meaning for this loop at this knob.
    Undefined,
    /// It was not found within the caps of the search.
    NotComputed,
}

/// How near the output must stay.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SettlingBand {
    /// 2 % of the final value.
    TwoPercent,
    /// 5 % of the final value.
    FivePercent,
}

impl SettlingBand {
    fn part(self) -> f64 {
        match self {
            Self::TwoPercent => 0.02,
            Self::FivePercent => 0.05,
        }
    }
}

impl From<Option<f64>> for Figure {
    /// None is undefined, infinity is infinite.
    fn from(value: Option<f64>) -> Self {
        match value {
            Some(v) if v.is_finite() => Self::Value(v),
            Some(_) => Self::Infinite,
            None => Self::Undefined,
        }
    }
}

impl Figure {
    /// The number, where it is finite.
    pub fn value(self) -> Option<f64> {
        match self {
            Self::Value(v) => Some(v),
            _ => None,
        }
    }
}

impl LoopAt {
    /// A requirement's figure; undefined where the loop is unstable.
    pub fn figure(&self, kind: RequirementKind) -> Figure {
        use RequirementKind as Kind;
        if !self.is_stable() {
            return Figure::Undefined;
        }
        let decibel = |factor: f64| 20.0 * libm::log10(factor);
        let frequency = || self.frequency();
        if let Some(found) = self.sampled().and_then(|sampled| sampled_figure(sampled, kind)) {
            return found;
        }
        match kind {
            Kind::DampingRatio => self.over_poles(|p| -p.re / p.modulus()),
            Kind::DecayRate => self.over_poles(|p| -p.re),
            Kind::NaturalFrequencyMinimum | Kind::NaturalFrequencyMaximum => self.over_poles(|p| p.modulus()),
            Kind::GainMarginUp => frequency().and_then(|f| f.gain_up().ok()).map(decibel).into(),
            Kind::GainMarginDown => frequency().and_then(|f| f.gain_down().ok()).map(decibel).into(),
            Kind::PhaseMargin => frequency().and_then(|f| f.phase_margin().ok()).into(),
            Kind::DelayMargin => frequency().and_then(|f| f.delay_margin().ok()).into(),
            Kind::PeakSensitivity => frequency().and_then(|f| f.peak().ok()).map(|peak| peak.1).into(),
            Kind::Bandwidth => frequency().and_then(|f| f.bandwidth().ok().flatten()).into(),
            Kind::Overshoot => self.output().figure(|m, p| overshoot(m, p).into()),
            Kind::Undershoot => self.output().figure(|m, p| undershoot(m, p).into()),
            Kind::RiseTime => self.output().figure(|m, _| searched(m, rise_time(m))),
            Kind::SettlingTime2 => self.output().figure(|m, _| searched(m, settling_time(m, SettlingBand::TwoPercent))),
            Kind::SettlingTime5 => {
                self.output().figure(|m, _| searched(m, settling_time(m, SettlingBand::FivePercent)))
            }
            Kind::PeakTime => self.output().figure(|m, p| peak_time(m, p).into()),
            Kind::StepError => match self.static_error(0) {
                Figure::Value(v) => Figure::Value(100.0 * v),
                other => other,
            },
            Kind::RampError => self.static_error(1),
            Kind::ParabolaError => self.static_error(2),
            Kind::LoadPeak => self.load().figure(|_, p| Figure::Value(largest(p))),
            Kind::LoadFinal => self.load().figure(|m, _| Figure::Value(m.final_value().abs())),
            Kind::ControllerPeak => self.control().figure(|_, p| Figure::Value(largest(p))),
        }
    }

    /// The smallest value over all poles; of a sampled loop over those of the s-plane that they come from.
    fn over_poles(&self, value: impl Fn(&nalgebra::Complex<f64>) -> f64) -> Figure {
        match self.poles() {
            [] => Figure::NotComputed,
            poles => Some(poles.iter().map(value).fold(f64::INFINITY, f64::min)).into(),
        }
    }

    /// The static error at the comparison, |lim s·E(s)| for the command 1/s^(order + 1) and E = D/F·1/s^(order + 1): the
    /// command minus (with positive feedback, plus) what the sensor shows. On a ramp or a parabola the output's own error
    /// differs from it where the sensor lags: for C·P = k/s and H = 1/(τs + 1) it is 1/k − τ, here it is 1/k.
    fn static_error(&self, order: usize) -> Figure {
        match static_error(&self.open.below, &self.closed, order) {
            Some(error) => Figure::Value(error.to_f64().value().abs()),
            None => Figure::Infinite,
        }
    }
}

/// D/(F·s^order) at s = 0, exactly; None where it is infinite.
fn static_error(below: &IntPoly, closed: &IntPoly, order: usize) -> Option<RBig> {
    let at = |p: &IntPoly, i: usize| p.coefficient(i);
    // A factor s common to both is a fixed mode at the origin: the loop is then not stable, and nobody asks.
    if (0..order).any(|i| !at(below, i).is_zero()) || at(closed, 0).is_zero() {
        return None;
    }
    Some(RBig::from_parts_signed(at(below, order), at(closed, 0)))
}

/// What a sampled loop says itself: figures of its poles, and static errors.
fn sampled_figure(sampled: &SampledAt, kind: RequirementKind) -> Option<Figure> {
    use RequirementKind as Kind;
    let value = match kind {
        Kind::DampingRatio => sampled.damping_ratio(),
        Kind::DecayRate => sampled.decay_rate(),
        Kind::NaturalFrequencyMinimum | Kind::NaturalFrequencyMaximum => sampled.natural_frequency(),
        Kind::StepError => 100.0 * sampled.static_error(0).abs(),
        Kind::RampError => sampled.static_error(1).abs(),
        Kind::ParabolaError => sampled.static_error(2).abs(),
        _ => return None,
    };
    Some(Some(value).into())
}

impl Answer {
    fn figure(&self, make: impl Fn(&Motion, &Peaks) -> Figure) -> Figure {
        match self {
            Self::Found(motion, peaks) => make(motion, peaks),
            Self::Undefined => Figure::Undefined,
            Self::NotComputed => Figure::NotComputed,
        }
    }
}

/// A figure that a search may not find; undefined without a final value.
fn searched(motion: &Motion, found: Option<f64>) -> Figure {
    match found {
        _ if !has_final_value(motion) => Figure::Undefined,
        Some(value) => Figure::Value(value),
        None => Figure::NotComputed,
    }
}

/// s, until the output stays within the band. None where the search meets its cap, or there is no final value.
fn settling_time(motion: &Motion, band: SettlingBand) -> Option<f64> {
    motion.last_outside(band.part() * motion.final_value().abs())
}

/// s, until the highest point beyond the final value. None without one.
fn peak_time(motion: &Motion, peaks: &Peaks) -> Option<f64> {
    let (_, time) = if motion.final_value() > 0.0 { peaks.highest } else { peaks.lowest };
    (has_final_value(motion) && time.is_finite()).then_some(time)
}

/// The final value is the ratio of two exact coefficients, so that zero is zero.
fn has_final_value(motion: &Motion) -> bool {
    motion.final_value() != 0.0
}

fn largest(peaks: &Peaks) -> f64 {
    peaks.highest.0.abs().max(peaks.lowest.0.abs())
}

/// % of the final value beyond it.
fn overshoot(motion: &Motion, peaks: &Peaks) -> Option<f64> {
    let end = motion.final_value();
    let beyond = if end > 0.0 { peaks.highest.0 - end } else { end - peaks.lowest.0 };
    has_final_value(motion).then(|| percentage(beyond, end))
}

/// % of the final value on the other side of zero.
fn undershoot(motion: &Motion, peaks: &Peaks) -> Option<f64> {
    let end = motion.final_value();
    let opposite = if end > 0.0 { -peaks.lowest.0 } else { peaks.highest.0 };
    has_final_value(motion).then(|| percentage(opposite, end))
}

fn percentage(excess: f64, end: f64) -> f64 {
    let part = excess / end.abs();
    if part > NO_EXCESS { 100.0 * part } else { 0.0 }
}

/// s, from 10 % to 90 % of the final value.
fn rise_time(motion: &Motion) -> Option<f64> {
    Some(motion.first_reach(0.9)? - motion.first_reach(0.1)?)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::model::BlockAt;
    use crate::response::Modes;
    use nalgebra::Complex;

    /// ωn²/(s² + 2ζωn s + ωn²), ωn = 1.
    fn second_order(damping: f64) -> Motion {
        let tenths = libm::round(10.0 * damping) as i64;
        let transfer = BlockAt { above: IntPoly::from_i64(&[5]), below: IntPoly::from_i64(&[5, tenths, 5]) };
        let zeta = tenths as f64 / 10.0;
        let im = libm::sqrt(1.0 - zeta * zeta);
        let modes = Modes::of_step(&transfer, &[Complex::new(-zeta, im), Complex::new(-zeta, -im)]);
        Motion::Modes(modes.expect("proper"))
    }

    #[test]
    fn second_order_figures_follow_the_formulas() {
        for zeta in [0.1, 0.3, 0.5, 0.7, 0.9] {
            let modes = second_order(zeta);
            let peaks = modes.peaks().expect("found");
            let root = libm::sqrt(1.0 - zeta * zeta);
            let expected = 100.0 * libm::exp(-core::f64::consts::PI * zeta / root);
            assert!((overshoot(&modes, &peaks).expect("defined") - expected).abs() < 1e-8, "{zeta}");
            assert!((peaks.highest.1 - core::f64::consts::PI / root).abs() < 1e-6, "{zeta}");
            assert!(undershoot(&modes, &peaks).expect("defined") < 1e-9);
        }
    }

    #[test]
    fn rise_times_agree_with_the_table() {
        // N. S. Nise, Control Systems Engineering, table of normalised rise time; as in shared/checks T02, to the
        // digits computed there.
        for (zeta, expected) in [(0.3, 1.321_339_979), (0.5, 1.637_572_947), (0.9, 2.882_955_406)] {
            let found = rise_time(&second_order(zeta)).expect("defined");
            assert!((found - expected).abs() < 1e-8, "{zeta}: {found}");
        }
    }

    #[test]
    fn a_double_pole_is_as_good_as_two() {
        // 1/(s + 1)²: y = 1 − (1 + t)·e^−t
        let transfer = BlockAt { above: IntPoly::from_i64(&[1]), below: IntPoly::from_i64(&[1, 2, 1]) };
        let modes = Modes::of_step(&transfer, &[Complex::new(-1.0, 0.0); 2]).expect("proper");
        for t in [0.0, 0.3, 1.0, 4.0] {
            let expected = 1.0 - (1.0 + t) * libm::exp(-t);
            assert!((modes.value(t) - expected).abs() < 1e-9, "{t}: {} {expected}", modes.value(t));
        }
        let settled = modes.last_outside(0.02).expect("settles");
        assert!(((1.0 + settled) * libm::exp(-settled) - 0.02).abs() < 1e-9);
    }

    #[test]
    fn a_triple_pair_keeps_eight_digits() {
        // 1/(s² + s + 1)³ against its own value from a slightly different spreading: the step's integral identity
        // y(0) = 0, y′(0) = 0 must hold.
        let base = IntPoly::from_i64(&[1, 1, 1]);
        let transfer = BlockAt { above: IntPoly::from_i64(&[1]), below: base.times(&base).times(&base) };
        let p = Complex::new(-0.5, libm::sqrt(0.75));
        let modes = Modes::of_step(&transfer, &[p, p, p, p.conj(), p.conj(), p.conj()]).expect("proper");
        assert!(modes.value(0.0).abs() < 1e-7, "{}", modes.value(0.0));
        assert!(modes.value(1e-3).abs() < 1e-7);
        assert!((modes.value(80.0) - 1.0).abs() < 1e-7);
    }
}
