//! Gain factor and dead time from overshoot and period of a step, by a damped Newton's method in ln g and θ.

use super::{Change, explaining};
use crate::exact::{Dyadic, ExactError};
use crate::response::{FirstSwing, LoopAt};
use dashu_ratio::RBig;
use nalgebra::Complex;

/// The residuals are logarithms of ratios: this far the observation is met.
const MET: f64 = 1e-6;

/// An observation met no better than this was not explained: 1 % of overshoot and period.
const EXPLAINED: f64 = 1e-2;

/// Steps of Newton's method; from a fair start five are enough.
const STEPS: usize = 30;

/// Halvings of one step that leads nowhere.
const HALVINGS: usize = 8;

/// Where the derivatives are taken, in ln g and in parts of the period.
const DIFFERENCE: f64 = 1e-4;

/// Other starts: factors of the gain, and dead times in parts of the period.
const GAINS: [f64; 5] = [1.0, 0.8, 1.25, 0.6, 1.6];
const DEAD_TIMES: [f64; 4] = [0.0, 0.05, 0.12, 0.25];

/// Gain and dead time are rounded to this many bits: short numbers keep the exact polynomials short.
const BITS: usize = 34;

/// The change that makes the model's first swing the observed one. None where there is none.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub(super) fn from_step(at: &LoopAt, own: f64, overshoot: f64, omega: f64) -> Result<Option<Change>, ExactError> {
    let search = Search { at, own, period: core::f64::consts::TAU / omega, overshoot };
    let Some(mut best) = search.start(omega)? else { return Ok(None) };
    for _ in 0..STEPS {
        if best.off() <= MET {
            break;
        }
        let Some(better) = search.step(&best)? else { break };
        best = better;
    }
    Ok((best.off() <= EXPLAINED).then_some(best.change))
}

/// The first swing of the changed model.
pub(super) fn swing(at: &LoopAt, own: f64, change: Change) -> Result<Option<FirstSwing>, ExactError> {
    let rational = |value: f64| Dyadic::from_f64(value).map(|value| value.round_down(BITS).to_rational());
    let (Some(gain), Some(dead_time)) = (rational(change.gain), rational(own + change.dead_time)) else {
        return Ok(None);
    };
    if gain <= RBig::ZERO || dead_time < RBig::ZERO {
        return Ok(None);
    }
    at.altered_swing(&gain, &dead_time)
}

/// A change with how far the model's swing is off: logarithms of the ratios of overshoot and of period.
#[derive(Clone, Copy)]
struct Trial {
    change: Change,
    residual: [f64; 2],
}

impl Trial {
    fn off(&self) -> f64 {
        libm::hypot(self.residual[0], self.residual[1])
    }
}

struct Search<'a> {
    at: &'a LoopAt,
    own: f64,
    period: f64,
    overshoot: f64,
}

impl Search<'_> {
    fn trial(&self, change: Change) -> Result<Option<Trial>, ExactError> {
        let swing = swing(self.at, self.own, change)?;
        Ok(swing.map(|swing| Trial {
            change,
            residual: [libm::log(swing.overshoot / self.overshoot), libm::log(swing.period / self.period)],
        }))
    }

    /// The best of several starts.
    fn start(&self, omega: f64) -> Result<Option<Trial>, ExactError> {
        // Of a pair the overshoot is e^(−πσ/ω).
        let decay = libm::log(100.0 / self.overshoot).max(0.05) * omega / core::f64::consts::PI;
        let from_pole = explaining(self.at, self.own, Complex::new(-decay, omega))
            .map(|change| Change { dead_time: change.dead_time.max(-self.own), ..change });
        let others = GAINS
            .iter()
            .flat_map(|gain| DEAD_TIMES.iter().map(|part| Change { gain: *gain, dead_time: part * self.period }));
        let mut best: Option<Trial> = None;
        for change in from_pole.into_iter().chain(others) {
            let trial = self.trial(change)?;
            best = [best, trial].into_iter().flatten().min_by(|a, b| a.off().total_cmp(&b.off()));
        }
        Ok(best)
    }

    /// A better trial, if Newton's direction has one.
    fn step(&self, from: &Trial) -> Result<Option<Trial>, ExactError> {
        let moved = |ln_gain: f64, time: f64| Change {
            gain: from.change.gain * libm::exp(ln_gain),
            dead_time: (from.change.dead_time + time * self.period).max(-self.own),
        };
        let (Some(by_gain), Some(by_time)) = (self.trial(moved(DIFFERENCE, 0.0))?, self.trial(moved(0.0, DIFFERENCE))?)
        else {
            return Ok(None);
        };
        let slope = |trial: &Trial, i: usize| (trial.residual[i] - from.residual[i]) / DIFFERENCE;
        let (a, b, c, d) = (slope(&by_gain, 0), slope(&by_time, 0), slope(&by_gain, 1), slope(&by_time, 1));
        let determinant = a * d - b * c;
        if determinant == 0.0 {
            return Ok(None);
        }
        let [r, s] = from.residual;
        let (mut ln_gain, mut time) = (-(d * r - b * s) / determinant, -(a * s - c * r) / determinant);
        for _ in 0..HALVINGS {
            let trial = self.trial(moved(ln_gain, time))?;
            if let Some(trial) = trial.filter(|trial| trial.off() < from.off()) {
                return Ok(Some(trial));
            }
            ln_gain *= 0.5;
            time *= 0.5;
        }
        Ok(None)
    }
}
