//! The answer to a unit step as a sum of modes, y(t) = y(∞) + Σ c_k·e^(p_k·t), and its extremes.
//!
//! c_k = N(p_k)/(p_k·F′(p_k)) with F′ in factored form. Poles that (nearly) coincide are spread evenly on a small circle
//! around their middle: for m poles on radius δ the answer changes by δ^m of itself, and the residues stay bounded.

use crate::exact::scaled::{Scaled, Wide};
use crate::model::BlockAt;
use crate::numerics::magnitude;
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
const ACTIVE: f64 = 1e-8;

/// Steps before a search ends without an answer. Extremes lie in the first oscillations; this many are needed only where
/// fast modes with next to no damping ride on slow ones.
const STEP_CAP: usize = 300_000;

/// A turn is looked at where the answer is nearer to the band's border than this part of the band.
const NEAR_BAND: f64 = 0.1;

/// No peak is looked for where the answer stays this near to its final value: nobody sees it on a record.
const SETTLED: f64 = 1e-6;

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
        self.modes.iter().map(|mode| magnitude(mode.coefficient) * libm::exp(mode.pole.re * t)).sum()
    }

    /// The step that resolves the modes still alive at t.
    fn step_at(&self, t: f64) -> f64 {
        let size = |mode: &Mode| magnitude(mode.coefficient) * libm::exp(mode.pole.re * t);
        let largest = self.modes.iter().map(size).fold(0.0, f64::max).max(ACTIVE * self.final_value.abs());
        let fastest =
            self.modes.iter().filter(|m| size(m) > ACTIVE * largest).map(|m| magnitude(m.pole)).fold(0.0, f64::max);
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

    /// y′(t).
    fn slope(&self, t: f64) -> f64 {
        self.modes.iter().map(|mode| (mode.coefficient * mode.pole * (mode.pole * t).exp()).re).sum()
    }

    /// The highest and the lowest value. None where the search meets its cap.
    pub fn peaks(&self) -> Option<Peaks> {
        let start = self.value(0.0);
        let end = self.final_value;
        let mut highest = if start > end { (start, 0.0) } else { (end, f64::INFINITY) };
        let mut lowest = if start < end { (start, 0.0) } else { (end, f64::INFINITY) };
        let tiny = 1e-9 * self.envelope(0.0);
        let mut walk = Walk::new(self, 0.0, Heading::Later);
        let mut before = Look { t: 0.0, y: start, slope: self.slope(0.0) };
        for _ in 0..STEP_CAP {
            let here = walk.next();
            if let Some((y, t)) = self.turn(&before, &here) {
                if y > highest.0 {
                    highest = (y, t);
                }
                if y < lowest.0 {
                    lowest = (y, t);
                }
            }
            let envelope = walk.envelope;
            if envelope <= tiny || (end + envelope <= highest.0 && end - envelope >= lowest.0) {
                return Some(Peaks { highest, lowest });
            }
            before = here;
        }
        None
    }

    /// Time and value of the first `count` turns at which the answer, taken in the direction of its final value, is highest.
    /// None where there are not so many before it has settled, or within the cap.
    pub fn first_peaks(&self, count: usize) -> Option<Vec<(f64, f64)>> {
        let direction = self.final_value.signum();
        let settled = SETTLED * self.final_value.abs();
        let mut walk = Walk::new(self, 0.0, Heading::Later);
        let mut before = Look { t: 0.0, y: self.value(0.0), slope: self.slope(0.0) };
        let mut peaks = Vec::new();
        for _ in 0..STEP_CAP {
            let here = walk.next();
            if before.slope * direction > 0.0
                && let Some((y, t)) = self.turn(&before, &here)
            {
                peaks.push((t, y));
            }
            if peaks.len() == count {
                return Some(peaks);
            }
            if walk.envelope <= settled {
                return None;
            }
            before = here;
        }
        None
    }

    /// The value and time of the turn between two looks, if there is one.
    fn turn(&self, a: &Look, b: &Look) -> Option<(f64, f64)> {
        if a.slope * b.slope >= 0.0 {
            return None;
        }
        let t = root_between(a.t, b.t, |t| self.slope(t));
        Some((self.value(t), t))
    }

    /// The first time at which the answer, taken in the direction of its final value, is at `part` of it. None where the
    /// search meets its cap, or the final value is zero.
    pub fn first_reach(&self, part: f64) -> Option<f64> {
        let scale = self.final_value;
        if scale == 0.0 {
            return None;
        }
        let missing = |y: f64| part - y / scale;
        if missing(self.value(0.0)) <= 0.0 {
            return Some(0.0);
        }
        let mut walk = Walk::new(self, 0.0, Heading::Later);
        let mut before = Look { t: 0.0, y: self.value(0.0), slope: self.slope(0.0) };
        for _ in 0..STEP_CAP {
            let here = walk.next();
            // Between two looks the answer may reach the level and turn.
            let turn = self.turn(&before, &here).filter(|(y, _)| missing(*y) <= 0.0);
            let reached = turn.map(|(_, t)| t).or((missing(here.y) <= 0.0).then_some(here.t));
            if let Some(t) = reached {
                return Some(root_between(before.t, t, |t| missing(self.value(t))));
            }
            before = here;
        }
        None
    }

    /// The last time at which |y − y(∞)| is `band`, 0 where it never is more. None where the search meets its cap.
    pub fn last_outside(&self, band: f64) -> Option<f64> {
        if band <= 0.0 {
            return None;
        }
        let outside = |y: f64| (y - self.final_value).abs() - band;
        // From where the envelope is inside for good, backwards.
        let quiet = self.quiet_after(band);
        let mut walk = Walk::new(self, quiet, Heading::Earlier);
        let mut later = Look { t: quiet, y: self.value(quiet), slope: self.slope(quiet) };
        for _ in 0..STEP_CAP {
            if later.t <= 0.0 {
                return Some(0.0);
            }
            let mut earlier = walk.next();
            if earlier.t < 0.0 {
                earlier = Look { t: 0.0, y: self.value(0.0), slope: self.slope(0.0) };
            }
            let near = outside(earlier.y).max(outside(later.y)) > -NEAR_BAND * band;
            let turn = if near { self.turn(&earlier, &later) } else { None };
            let peak = turn.filter(|(y, _)| outside(*y) > 0.0).map(|(_, t)| t);
            if let Some(t) = peak.or((outside(earlier.y) > 0.0).then_some(earlier.t)) {
                return Some(root_between(t, later.t, |t| outside(self.value(t))));
            }
            later = earlier;
        }
        None
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

/// A zero of a function between two arguments with values of different sign, by bisection.
fn root_between(mut low: f64, mut high: f64, value: impl Fn(f64) -> f64) -> f64 {
    let sign = value(low) > 0.0;
    // f64 has 52 bits; a few more rounds do no harm.
    for _ in 0..56 {
        let middle = 0.5 * (low + high);
        if (value(middle) > 0.0) == sign { low = middle } else { high = middle }
    }
    0.5 * (low + high)
}

/// The answer and its slope at one time.
#[derive(Clone, Copy, Debug)]
struct Look {
    t: f64,
    y: f64,
    slope: f64,
}

/// Which way a walk goes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Heading {
    Later,
    Earlier,
}

/// A walk along an answer, with steps that grow as fast modes die out. Between two changes of the step each mode is
/// advanced by one multiplication.
struct Walk<'a> {
    modes: &'a Modes,
    heading: Heading,
    t: f64,
    step: f64,
    state: Vec<Complex<f64>>,
    factors: Vec<Complex<f64>>,
    until_check: usize,
    /// A bound on |y − y(∞)| from the last check on, going later.
    envelope: f64,
}

/// Steps between two looks at which modes are still alive.
const CHECK_EVERY: usize = 16;

impl<'a> Walk<'a> {
    fn new(modes: &'a Modes, t: f64, heading: Heading) -> Self {
        let (state, factors) = (Vec::new(), Vec::new());
        Self { modes, heading, t, step: 0.0, state, factors, until_check: 0, envelope: f64::INFINITY }
    }

    /// The next time, value and slope.
    fn next(&mut self) -> Look {
        if self.until_check == 0 {
            self.check();
        }
        self.until_check -= 1;
        self.t += self.step;
        let (mut y, mut slope) = (self.modes.final_value, 0.0);
        for ((z, factor), mode) in self.state.iter_mut().zip(&self.factors).zip(&self.modes.modes) {
            *z *= *factor;
            y += z.re;
            slope += z.re * mode.pole.re - z.im * mode.pole.im;
        }
        Look { t: self.t, y, slope }
    }

    /// Chooses the step anew and removes the rounding errors of the multiplications.
    fn check(&mut self) {
        let finite = |step: f64| if step.is_finite() { step } else { 1.0 };
        let step = finite(self.modes.step_at(self.t));
        self.step = match self.heading {
            Heading::Later => step,
            // Faster modes may be alive at the earlier end of this round.
            Heading::Earlier => -step.min(finite(self.modes.step_at((self.t - CHECK_EVERY as f64 * step).max(0.0)))),
        };
        self.state.clear();
        self.state.extend(self.modes.modes.iter().map(|m| m.coefficient * (m.pole * self.t).exp()));
        self.factors.clear();
        self.factors.extend(self.modes.modes.iter().map(|m| (m.pole * self.step).exp()));
        self.envelope = self.state.iter().map(|z| magnitude(*z)).sum();
        self.until_check = CHECK_EVERY;
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
