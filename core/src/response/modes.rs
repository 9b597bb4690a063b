//! The answer to a unit step as a sum of modes, y(t) = y(∞) + Σ c_k·e^(p_k·t), and its extremes.
//!
//! c_k = N(p_k)/(p_k·F′(p_k)) with F′ in factored form. Poles that (nearly) coincide are spread evenly on a small circle
//! around their middle: for m poles on radius δ the answer changes by δ^m of itself, and the residues stay bounded.

use crate::exact::scaled::{Scaled, Wide};
use crate::model::BlockAt;
use crate::record::Curve;
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::{Complex, ComplexField};

/// Poles nearer to each other than this fraction of their magnitude are spread. Smaller loses digits to the residues
/// (1e-16/δ), larger to the spreading (δ²): both are 1e-11 here for a double pole.
const TOGETHER: f64 = 1e-5;

/// Time steps for one turn of the fastest active mode, divided by 2π.
const STEP: f64 = 0.12;

/// A mode below this part of the largest one no longer sets the step.
const ACTIVE: f64 = 1e-6;

/// Steps before the search for extremes ends. Extremes lie in the first oscillations; this many are needed only where
/// fast and slow modes are both strong.
const STEP_CAP: usize = 20_000;

/// Points of a curve for drawing.
const CURVE_POINTS: usize = 480;

/// One real mode or one complex pair.
#[derive(Clone, Copy, Debug)]
struct Mode {
    pole: Complex<f64>,
    /// Twice the coefficient for a pair, so that the real part of the sum is the answer.
    coefficient: Complex<f64>,
}

/// An answer to a unit step.
#[derive(Clone, Debug)]
pub struct Modes {
    /// y(∞).
    pub final_value: f64,
    modes: Vec<Mode>,
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
            modes.push(Mode { pole: *pole, coefficient });
        }
        Some(Self { final_value: at_zero.to_f64().value(), modes })
    }

    /// y(t), t ≥ 0 in s.
    pub fn value(&self, t: f64) -> f64 {
        self.final_value + self.modes.iter().map(|mode| (mode.coefficient * (mode.pole * t).exp()).re).sum::<f64>()
    }

    /// A bound on |y(τ) − y(∞)| for every τ ≥ t.
    fn envelope(&self, t: f64) -> f64 {
        self.modes.iter().map(|mode| mode.coefficient.modulus() * libm::exp(mode.pole.re * t)).sum()
    }

    /// The step that resolves the modes still alive at t.
    fn step_at(&self, t: f64) -> f64 {
        let size = |mode: &Mode| mode.coefficient.modulus() * libm::exp(mode.pole.re * t);
        let largest = self.modes.iter().map(size).fold(0.0, f64::max).max(ACTIVE * self.final_value.abs());
        let fastest =
            self.modes.iter().filter(|m| size(m) > ACTIVE * largest).map(|m| m.pole.modulus()).fold(0.0, f64::max);
        if fastest > 0.0 { STEP / fastest } else { f64::INFINITY }
    }

    /// The earliest time after which the envelope stays below `bound` > 0.
    fn quiet_after(&self, bound: f64) -> f64 {
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
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            if self.envelope(middle) > bound { low = middle } else { high = middle }
        }
        high
    }

    /// The highest and the lowest value.
    pub fn peaks(&self) -> Peaks {
        let start = self.value(0.0);
        let end = self.final_value;
        let mut walk = Walk::new(self);
        let mut highest = if start > end { (start, 0.0) } else { (end, f64::INFINITY) };
        let mut lowest = if start < end { (start, 0.0) } else { (end, f64::INFINITY) };
        let (mut before, mut here) = ((0.0, start), walk.next());
        let tiny = 1e-9 * self.envelope(0.0);
        for _ in 0..STEP_CAP {
            let next = walk.next();
            let top = |a: f64, b: f64, c: f64| b >= a && b > c;
            if top(before.1, here.1, next.1) {
                let peak = self.refined(before.0, next.0, 1.0);
                if peak.0 > highest.0 {
                    highest = peak;
                }
            }
            if top(-before.1, -here.1, -next.1) {
                let peak = self.refined(before.0, next.0, -1.0);
                if peak.0 < lowest.0 {
                    lowest = peak;
                }
            }
            let envelope = walk.envelope;
            if envelope <= tiny || (end + envelope <= highest.0 && end - envelope >= lowest.0) {
                break;
            }
            (before, here) = (here, next);
        }
        Peaks { highest, lowest }
    }

    /// The largest (sign 1) or smallest (−1) value between two times around it, by golden sections.
    fn refined(&self, mut low: f64, mut high: f64, sign: f64) -> (f64, f64) {
        const GOLDEN: f64 = 0.618_033_988_749_894_9;
        for _ in 0..40 {
            let (a, b) = (high - GOLDEN * (high - low), low + GOLDEN * (high - low));
            if sign * self.value(a) > sign * self.value(b) { high = b } else { low = a }
        }
        let t = 0.5 * (low + high);
        (self.value(t), t)
    }

    /// The first time at which y reaches `level` from its side at t = 0. None where it does not within the search.
    pub fn first_reach(&self, level: f64) -> Option<f64> {
        let start = self.value(0.0) - level;
        if start == 0.0 {
            return Some(0.0);
        }
        let mut walk = Walk::new(self);
        let mut before = 0.0;
        for _ in 0..STEP_CAP {
            let (t, y) = walk.next();
            if (y - level) * start <= 0.0 {
                return Some(self.crossing(before, t, level));
            }
            if (self.final_value - level).abs() > walk.envelope && (self.final_value - level) * start > 0.0 {
                return None;
            }
            before = t;
        }
        None
    }

    /// The last time at which |y − y(∞)| is `band`, 0 where it never is more. None where the search meets its cap.
    pub fn last_outside(&self, band: f64) -> Option<f64> {
        if band <= 0.0 {
            return None;
        }
        let outside = |t: f64| (self.value(t) - self.final_value).abs() - band;
        // From where the envelope is inside for good, backwards.
        let mut t = self.quiet_after(band);
        for _ in 0..STEP_CAP {
            if t <= 0.0 {
                return Some(0.0);
            }
            let earlier = (t - self.step_at(t)).max(0.0);
            if outside(earlier) > 0.0 {
                let (mut low, mut high) = (earlier, t);
                for _ in 0..50 {
                    let middle = 0.5 * (low + high);
                    if outside(middle) > 0.0 { low = middle } else { high = middle }
                }
                return Some(high);
            }
            t = earlier;
        }
        None
    }

    fn crossing(&self, mut low: f64, mut high: f64, level: f64) -> f64 {
        let start = self.value(low) - level;
        for _ in 0..50 {
            let middle = 0.5 * (low + high);
            if (self.value(middle) - level) * start > 0.0 { low = middle } else { high = middle }
        }
        0.5 * (low + high)
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

/// A walk along an answer, with steps that grow as fast modes die out. Between two changes of the step each mode is
/// advanced by one multiplication.
struct Walk<'a> {
    modes: &'a Modes,
    t: f64,
    step: f64,
    state: Vec<Complex<f64>>,
    factors: Vec<Complex<f64>>,
    until_check: usize,
    envelope: f64,
}

/// Steps between two looks at which modes are still alive.
const CHECK_EVERY: usize = 16;

impl<'a> Walk<'a> {
    fn new(modes: &'a Modes) -> Self {
        Self {
            modes,
            t: 0.0,
            step: 0.0,
            state: Vec::new(),
            factors: Vec::new(),
            until_check: 0,
            envelope: f64::INFINITY,
        }
    }

    /// The next time and value.
    fn next(&mut self) -> (f64, f64) {
        if self.until_check == 0 {
            self.step = self.modes.step_at(self.t);
            if !self.step.is_finite() {
                self.step = 1.0;
            }
            self.state.clear();
            self.state.extend(self.modes.modes.iter().map(|m| m.coefficient * (m.pole * self.t).exp()));
            self.factors.clear();
            self.factors.extend(self.modes.modes.iter().map(|m| (m.pole * self.step).exp()));
            self.envelope = self.state.iter().map(|z| z.modulus()).sum();
            self.until_check = CHECK_EVERY;
        }
        self.until_check -= 1;
        self.t += self.step;
        let mut sum = self.modes.final_value;
        for (z, factor) in self.state.iter_mut().zip(&self.factors) {
            *z *= *factor;
            sum += z.re;
        }
        (self.t, sum)
    }
}

/// The poles, with groups that nearly coincide spread evenly on a circle around their middle, symmetric to the real axis.
fn spread(poles: &[Complex<f64>]) -> Vec<Complex<f64>> {
    let mut groups: Vec<Vec<Complex<f64>>> = Vec::new();
    for pole in poles {
        let near = |other: &Complex<f64>| (pole - other).modulus() <= 4.0 * TOGETHER * pole.modulus();
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
        let on_axis = middle.im.abs() <= TOGETHER * middle.modulus();
        let middle = if on_axis { Complex::new(middle.re, 0.0) } else { middle };
        // δ^m and eps/δ^(m−1) balance.
        let radius = middle.modulus() * libm::pow(1e-16, 1.0 / (2.0 * count as f64 - 1.0)).max(TOGETHER);
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
