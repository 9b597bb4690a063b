//! The answer to a unit step as a sum of modes, y(t) = y(∞) + Σ c_k·e^(p_k·t).
//!
//! c_k = N(p_k)/(p_k·F′(p_k)) with F′ in factored form. Poles that (nearly) coincide are spread evenly on a small circle
//! around their middle: for m poles on radius δ the answer changes by δ^m of itself, and the residues stay bounded.

use crate::exact::scaled::{Scaled, Wide};
use crate::model::BlockAt;
use crate::numerics::magnitude;
use crate::record::Curve;
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// Poles nearer to each other than this fraction of their magnitude are spread. Smaller loses digits to the residues
/// (1e-16/δ), larger to the spreading (δ²): both are 1e-11 here for a double pole.
const TOGETHER: f64 = 1e-5;

/// Points of a curve for drawing.
pub(super) const CURVE_POINTS: usize = 480;

/// A mode is dead below this part of the final value, and of the largest mode.
const DEAD: f64 = 1e-18;

/// Halvings towards the time at which the envelope has fallen to a bound: any later time does as well.
const QUIET_HALVINGS: usize = 14;

/// One real mode or one complex pair.
#[derive(Clone, Copy, Debug)]
pub(super) struct Mode {
    pub(super) pole: Complex<f64>,
    /// Twice the coefficient for a pair, so that the real part of the sum is the answer.
    coefficient: Complex<f64>,
    /// |pole|.
    pub(super) rate: f64,
    /// |coefficient|.
    share: f64,
    /// s, from when on it is lost in the rounding of everything.
    pub(super) dead_after: f64,
}

impl Mode {
    fn new(pole: Complex<f64>, coefficient: Complex<f64>) -> Self {
        let dead_after = f64::INFINITY;
        Self { pole, coefficient, rate: magnitude(pole), share: magnitude(coefficient), dead_after }
    }

    /// Its part of the answer at t, as a complex number whose real part counts.
    pub(super) fn at(&self, t: f64) -> Complex<f64> {
        let decay = libm::exp(self.pole.re * t);
        if self.pole.im == 0.0 {
            return self.coefficient * decay;
        }
        let (sin, cos) = libm::sincos(self.pole.im * t);
        self.coefficient * Complex::new(decay * cos, decay * sin)
    }

    /// A bound on its part at t and later.
    pub(super) fn size(&self, t: f64) -> f64 {
        self.share * libm::exp(self.pole.re * t)
    }
}

/// An answer to a unit step.
#[derive(Clone, Debug)]
pub struct Modes {
    /// y(0), right after the step.
    pub start: f64,
    /// y(∞).
    pub final_value: f64,
    pub(super) modes: Vec<Mode>,
}

/// The extremes of an answer.
#[derive(Clone, Copy, Debug)]
pub struct Peaks {
    /// The highest value, and when; the final value and infinity where it is never exceeded.
    pub highest: (f64, f64),
    /// The lowest value, and when.
    pub lowest: (f64, f64),
}

impl Modes {
    /// The answer of a stable transfer function with the given poles. None where it is improper or not finite.
    pub fn of_step(transfer: &BlockAt, poles: &[Complex<f64>]) -> Option<Self> {
        let BlockAt { above, below } = transfer;
        if above.degree() > below.degree() {
            return None;
        }
        let at_zero = RBig::from_parts_signed(above.coefficient(0), below.coefficient(0));
        let numerator = Scaled::new(above);
        let leading = Wide::from_integer(&below.leading());
        let spread = spread(poles);
        let mut modes = Vec::new();
        for (k, pole) in spread.iter().enumerate().filter(|(_, p)| p.im >= 0.0) {
            if above.is_zero() {
                break;
            }
            let slope = spread
                .iter()
                .enumerate()
                .filter(|(j, _)| *j != k)
                .fold(leading, |product, (_, other)| product.times(Wide::new(pole - other)));
            let coefficient = numerator.value(*pole).over(slope.times(Wide::new(*pole))).to_complex();
            let coefficient = if pole.im > 0.0 { coefficient * 2.0 } else { Complex::new(coefficient.re, 0.0) };
            if !(coefficient.re.is_finite() && coefficient.im.is_finite()) {
                return None;
            }
            modes.push(Mode::new(*pole, coefficient));
        }
        let at_start = RBig::from_parts_signed(above.coefficient(below.degree()), below.leading());
        let final_value = at_zero.to_f64().value();
        let largest = modes.iter().map(|mode| mode.share).fold(0.0, f64::max);
        let lost = DEAD * if final_value == 0.0 { largest } else { largest.min(final_value.abs()) };
        for mode in &mut modes {
            mode.dead_after = (libm::log(mode.share / lost) / -mode.pole.re).max(0.0);
        }
        Some(Self { start: at_start.to_f64().value(), final_value, modes })
    }

    /// y(t), t ≥ 0 in s.
    pub fn value(&self, t: f64) -> f64 {
        self.final_value + self.alive(t).map(|mode| mode.at(t).re).sum::<f64>()
    }

    fn alive(&self, t: f64) -> impl Iterator<Item = &Mode> {
        self.modes.iter().filter(move |mode| t < mode.dead_after)
    }

    /// y′(t).
    pub(super) fn slope(&self, t: f64) -> f64 {
        self.alive(t).map(|mode| (mode.at(t) * mode.pole).re).sum()
    }

    /// y″(t).
    pub(super) fn bend(&self, t: f64) -> f64 {
        self.alive(t).map(|mode| (mode.at(t) * mode.pole * mode.pole).re).sum()
    }

    /// A bound on |y(τ) − y(∞)| for every τ ≥ t.
    pub(super) fn envelope(&self, t: f64) -> f64 {
        self.alive(t).map(|mode| mode.size(t)).sum()
    }

    /// A time after which the envelope stays below `bound` > 0; not much later than the earliest one.
    pub(super) fn quiet_after(&self, bound: f64) -> f64 {
        if self.envelope(0.0) <= bound {
            return 0.0;
        }
        let slowest = self.modes.iter().map(|m| -m.pole.re).fold(f64::INFINITY, f64::min);
        let mut high = 1.0 / slowest;
        // The envelope falls by a factor e at least every 1/slowest: doubling ends.
        while self.envelope(high) > bound && high.is_finite() {
            high *= 2.0;
        }
        let mut low = 0.0;
        for _ in 0..QUIET_HALVINGS {
            let middle = 0.5 * (low + high);
            if self.envelope(middle) > bound { low = middle } else { high = middle }
        }
        high
    }

    /// A time by which the answer has settled well, for drawing.
    pub fn horizon(&self) -> f64 {
        let scale = self.final_value.abs().max(0.02 * self.envelope(0.0));
        let quiet = self.quiet_after(0.01 * scale);
        if quiet > 0.0 && quiet.is_finite() { 1.15 * quiet } else { 1.0 }
    }

    /// The curve from 0 to `end`, evenly spaced.
    pub fn curve(&self, end: f64) -> Curve {
        let time: Vec<f64> = (0..=CURVE_POINTS).map(|k| end * k as f64 / CURVE_POINTS as f64).collect();
        let value = time.iter().map(|t| self.value(*t)).collect();
        Curve { time, value }
    }
}

/// The poles, with groups that nearly coincide spread evenly on a circle around their middle, symmetric to the real axis.
fn spread(poles: &[Complex<f64>]) -> Vec<Complex<f64>> {
    let mut groups: Vec<Vec<Complex<f64>>> = Vec::new();
    for pole in poles {
        let near = |other: &Complex<f64>| magnitude(pole - other) <= 4.0 * TOGETHER * magnitude(*pole);
        match groups.iter_mut().find(|group| group.iter().any(near)) {
            Some(group) => group.push(*pole),
            None => groups.push([*pole].into()),
        }
    }
    let mut all = Vec::with_capacity(poles.len());
    for group in groups {
        let count = group.len();
        if count == 1 {
            all.extend(group);
            continue;
        }
        let middle = group.iter().sum::<Complex<f64>>() / count as f64;
        let on_axis = middle.im.abs() <= TOGETHER * magnitude(middle);
        let middle = if on_axis { Complex::new(middle.re, 0.0) } else { middle };
        // δ^m and eps/δ^(m−1) balance.
        let radius = magnitude(middle) * libm::pow(1e-16, 1.0 / (2.0 * count as f64 - 1.0)).max(TOGETHER);
        for k in 0..count {
            // Odd groups on the axis keep one pole on it; the others are exact conjugates.
            let angle = core::f64::consts::TAU * k as f64 / count as f64;
            let offset = Complex::new(radius * libm::cos(angle), radius * libm::sin(angle));
            let mut z = middle + offset;
            if on_axis && 2 * k == count {
                z.im = 0.0;
            } else if on_axis && 2 * k > count {
                let mirror: Complex<f64> = all[all.len() - (2 * k - count)];
                z = mirror.conj();
            }
            all.push(z);
        }
    }
    all
}
