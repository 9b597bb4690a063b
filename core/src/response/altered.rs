//! The loop with its gain multiplied and a dead time added: what the site check holds against an observation.
//!
//! The dead time goes in as its diagonal Padé approximation (H. Padé 1892), which is off by less than 1e-6 in phase up to
//! ωT = 4 at the order used here: far below what anybody reads off a record, and no claim rests on it. A dead time moves
//! the answer to a step as a whole, so that its place in the loop has no part in overshoot and period.

use super::loop_at::LoopAt;
use super::modes::Modes;
use crate::exact::complex_roots::polished;
use crate::exact::half_plane::count;
use crate::exact::{ExactError, IntPoly};
use crate::model::BlockAt;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// The order of the approximation.
const ORDER: usize = 7;

/// The first swing of an answer to a step.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FirstSwing {
    /// The first peak beyond the final value, % of it.
    pub overshoot: f64,
    /// From the first to the second peak, s.
    pub period: f64,
}

impl LoopAt {
    /// The open loop without its dead time at s; that of positive feedback with its sign turned, so that 1 + L is zero at
    /// a pole.
    pub fn open_loop_at(&self, s: Complex<f64>) -> Complex<f64> {
        use crate::exact::scaled::Scaled;
        Scaled::new(&self.open.above).value(s).over(Scaled::new(&self.open.below).value(s)).to_complex()
    }

    /// The first swing of the output after a step of the command, with the loop gain times `gain` > 0 and all of the dead
    /// time given. None where the loop is unstable then, or the answer has no two peaks.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    pub fn altered_swing(&self, gain: &RBig, dead_time: &RBig) -> Result<Option<FirstSwing>, ExactError> {
        let (pade_above, pade_below) = pade(dead_time);
        let scaled = |p: &IntPoly, factor: &IBig| IntPoly::new(p.coefficients().iter().map(|c| c * factor).collect());
        let above = scaled(&self.open.above, gain.numerator()).times(&pade_above);
        let below = scaled(&self.open.below, &IBig::from(gain.denominator().clone())).times(&pade_below);
        let closed = above.plus(&below);
        if closed.is_zero() || !count(&closed)?.is_stable() {
            return Ok(None);
        }
        let transfer = BlockAt { above: self.output_transfer().above.times(&pade_below), below: closed.clone() };
        Ok(Modes::of_step(&transfer, &polished(&closed)?).and_then(|modes| first_swing(&modes)))
    }
}

fn first_swing(modes: &Modes) -> Option<FirstSwing> {
    let end = modes.final_value;
    let peaks: Vec<(f64, f64)> = modes.first_peaks(2)?;
    let ([first, second], false) = (&peaks[..], end == 0.0) else { return None };
    let overshoot = 100.0 * (first.1 / end - 1.0);
    (overshoot > 0.0).then_some(FirstSwing { overshoot, period: second.0 - first.0 })
}

/// Numerator and denominator of the approximation of e^(−T s), times a positive integer.
fn pade(dead_time: &RBig) -> (IntPoly, IntPoly) {
    let (a, b) = (dead_time.numerator().clone(), IBig::from(dead_time.denominator().clone()));
    // (2m − k)!/(k!·(m − k)!) from k = m down: each is the next one times (2m − k)·(k + 1)/(m − k).
    let mut weights = Vec::from([IBig::ONE; 1]);
    for k in (0..ORDER).rev() {
        let last = weights[weights.len() - 1].clone();
        weights.push(last * IBig::from((2 * ORDER - k) * (k + 1)) / IBig::from(ORDER - k));
    }
    weights.reverse();
    let below: Vec<IBig> = weights.iter().enumerate().map(|(k, w)| w * a.pow(k) * b.pow(ORDER - k)).collect();
    let below = IntPoly::new(below);
    (below.mirrored(), below)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::exact::scaled::Scaled;
    use crate::response::Setup;

    #[test]
    fn the_approximation_turns_the_phase_like_a_dead_time() {
        let (above, below) = pade(&RBig::from_parts(IBig::from(3), 10u8.into()));
        for omega_t in [0.1, 1.0, 2.0, 4.0] {
            let s = Complex::new(0.0, omega_t / 0.3);
            let value = Scaled::new(&above).value(s).over(Scaled::new(&below).value(s)).to_complex();
            let exact = Complex::new(libm::cos(omega_t), -libm::sin(omega_t));
            let off = value - exact;
            assert!(libm::hypot(off.re, off.im) < 1e-6, "{omega_t}: {value} {exact}");
        }
    }

    #[test]
    fn the_first_swing_of_a_pair_follows_the_formulas() {
        // 1/(s² + 2ζs + 1), ζ = 0.2, closed by L = 1/(s(s + 2ζ)): overshoot e^(−πζ/√(1 − ζ²)), peaks 2π/√(1 − ζ²) apart.
        let json =
            r#"{"format": "stayband-project/1", "loop": {"controller": "K", "plant": "1/(s (s + 0.4))"}, "knob": "K"}"#;
        let project = serde_json::from_str(json).expect("a project");
        let model = crate::model::build(&project).expect("a loop");
        let at = LoopAt::new(Setup::from(&model), RBig::ONE).expect("poles");
        let swing = at.altered_swing(&RBig::ONE, &RBig::ZERO).expect("poles").expect("a swing");
        let root = libm::sqrt(1.0 - 0.04);
        assert!((swing.overshoot - 100.0 * libm::exp(-core::f64::consts::PI * 0.2 / root)).abs() < 1e-6, "{swing:?}");
        assert!((swing.period - core::f64::consts::TAU / root).abs() < 1e-6, "{swing:?}");
    }
}
