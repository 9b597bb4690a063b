//! Answers of a loop with dead time to a unit step, stepped exactly.
//!
//! Y = M(s)·e^(−L·s)/(A + B·e^(−T·s))·1/s: z solves A(d/dt)·z(t) + B(d/dt)·z(t − T) = 1 from rest, and y = M(d/dt)·z, L later.
//! Over one dead time the delayed term is known from the time before (the method of steps; R. Bellman, K. L. Cooke,
//! Differential-Difference Equations, Academic Press 1963, chapter 3). Each dead time is cut into equal segments that resolve
//! the fastest pole of A; in each, z and the delayed term are Taylor polynomials of an order at which the rest is below
//! rounding. Nothing is interpolated between a segment and its delayed image: their ends coincide.
//! Where slow modes outlast thousands of segments, the rest is the sum of these modes, which must continue the answer.

use super::function::{Quasi, horner, scaled};
use super::{DeadTimeError, poles};
use crate::exact::{Dyadic, IntPoly};
use crate::numerics::magnitude;
use crate::response::{Trace, TracePoint};
use alloc::collections::VecDeque;
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::{Complex, ComplexField};

/// The order of the Taylor polynomials. Time is scaled so that the coefficients of A are at most 1 and its roots at most 2:
/// 2^22/22! is 4e-15.
const ORDER: usize = 22;

/// The longest segment in that time.
const LONGEST: f64 = 1.0;

/// Segments before an answer is given up: a few milliseconds.
const SEGMENT_CAP: usize = 8_000;

/// Segments after which the rest is tried as a sum of the slow modes.
const SEGMENTS_BEFORE_MODES: usize = 1500;

/// Modes that have faded to e^-this by then are left out of that sum.
const FADED: f64 = 25.0;

/// The modes must continue the stepped answer within this part of its largest distance from rest.
const CONTINUED: f64 = 1e-7;

/// Points for one time constant, or one radian, of the fastest of the modes: the error of the cubics is 1e-9.
const POINTS_FOR_MODES: f64 = 40.0;

/// Points of such a rest.
const MODE_POINT_CAP: usize = 8_000;

/// The answer has settled when, over a whole dead time, state and outputs stay within this part of their largest distance from
/// rest. The figures speak of parts in a hundred; peaks of 1e-9.
const SETTLED: f64 = 1e-8;

/// The error of the cubics between two points, beside the output's largest distance from rest so far.
const CUBIC_ERROR: f64 = 2e-10;

/// Points of one segment at most: the error falls with the fourth power, so that 12 of them reach 5e-5/384 of the fastest mode.
const POINTS_CAP: usize = 12;

/// What is asked for.
#[derive(Clone, Debug)]
pub struct Output {
    /// M; its degree is at most that of A.
    pub above: IntPoly,
    /// L ≥ 0, s: the dead time between the step and the output that is outside of the loop, or on its way.
    pub lag: f64,
}

/// The answers of a stable loop A + B·e^(−T·s), T > 0, deg B < deg A, to a unit step.
///
/// # Errors
/// [`DeadTimeError::NotRetarded`] where B or an output has too high a degree; [`DeadTimeError::AlwaysAtOrigin`] where the loop
/// has a pole at the origin; [`DeadTimeError::TooManySteps`] where the fastest pole is too fast beside the time to settle, or
/// the loop does not settle.
pub fn to_step(a: &IntPoly, b: &IntPoly, dead_time: &RBig, outputs: &[Output]) -> Result<Vec<Trace>, DeadTimeError> {
    let degree = a.degree();
    let highest = outputs.iter().map(|output| output.above.degree()).max().unwrap_or(0);
    if (!b.is_zero() && b.degree() >= degree) || highest > degree || a.is_zero() {
        return Err(DeadTimeError::NotRetarded { delayed: b.degree().max(highest), undelayed: degree });
    }
    let at_rest = a.coefficient(0) + b.coefficient(0);
    if at_rest.is_zero() {
        return Err(DeadTimeError::AlwaysAtOrigin);
    }
    let final_value = |m: &IntPoly| RBig::from_parts_signed(m.coefficient(0), at_rest.clone()).to_f64().value();
    let mut stepper = Stepper::new(a, b, dead_time.to_f64().value());
    let rest = RBig::from_parts_signed(a.leading(), at_rest.clone()).to_f64().value();
    stepper.rest = rest * libm::pow(stepper.rate, degree as f64);
    let mut writers: Vec<Writer> = outputs
        .iter()
        .map(|output| Writer::new(stepper.scaled(&output.above), final_value(&output.above), output.lag))
        .collect();
    if let Run::Slow(start) = stepper.run(&mut writers, SEGMENTS_BEFORE_MODES)? {
        let slow = SlowModes::new(a, b, dead_time, start / stepper.rate, outputs);
        if !slow.is_some_and(|slow| slow.finish(start / stepper.rate, &mut writers)) {
            writers.iter_mut().for_each(Writer::restart);
            stepper.run(&mut writers, SEGMENT_CAP)?;
        }
    }
    let traces = writers.into_iter().map(|w| Trace::new(w.final_value, w.points));
    traces.collect::<Option<Vec<_>>>().ok_or(DeadTimeError::TooManySteps { cap: SEGMENT_CAP })
}

/// The loop in scaled time.
struct Stepper {
    /// rad/s: time is counted in 1/rate.
    rate: f64,
    /// The leading coefficient of A as mantissa and exponent.
    leading: (f64, i64),
    degree: usize,
    /// a_k·rate^(k−n)/a_n for k < n, and b alike.
    a: Vec<f64>,
    b: Vec<f64>,
    /// z in the end.
    rest: f64,
    segments: usize,
    length: f64,
}

impl Stepper {
    fn new(a: &IntPoly, b: &IntPoly, dead_time: f64) -> Self {
        let degree = a.degree();
        let leading = Dyadic::new(a.leading(), 0).to_f64_parts();
        let mut rate = 0.0_f64;
        for (k, c) in a.coefficients().iter().take(degree).enumerate() {
            let part = ratio(Dyadic::new(c.clone(), 0).to_f64_parts(), leading);
            rate = rate.max(libm::pow(part.abs(), 1.0 / (degree - k) as f64));
        }
        // A loop of integrators alone has no rate of its own.
        let rate = rate.max(1.0 / dead_time);
        let whole = dead_time * rate;
        let segments = libm::ceil(whole / LONGEST).max(1.0);
        let mut stepper = Self {
            rate,
            leading,
            degree,
            a: Vec::new(),
            b: Vec::new(),
            rest: 0.0,
            segments: segments.min(1e9) as usize,
            length: whole / segments,
        };
        stepper.a = stepper.scaled(a);
        stepper.a.truncate(degree);
        stepper.b = stepper.scaled(b);
        stepper
    }

    fn scaled(&self, p: &IntPoly) -> Vec<f64> {
        let scale = |(k, c): (usize, &dashu_int::IBig)| {
            ratio(Dyadic::new(c.clone(), 0).to_f64_parts(), self.leading)
                * libm::pow(self.rate, k as f64 - self.degree as f64)
        };
        p.coefficients().iter().enumerate().map(scale).collect()
    }

    /// Steps until everything is at rest, or the limit is met.
    fn run(&self, writers: &mut [Writer], limit: usize) -> Result<Run, DeadTimeError> {
        if self.segments > SEGMENT_CAP {
            return Err(DeadTimeError::TooManySteps { cap: SEGMENT_CAP });
        }
        let mut state = alloc::vec![0.0; self.degree];
        let mut delayed: VecDeque<[f64; ORDER]> = VecDeque::with_capacity(self.segments + 1);
        let mut series = alloc::vec![[0.0; ORDER + 1]; self.degree + 1];
        let (mut largest, mut quiet) = (0.0_f64, 0);
        for number in 0..limit {
            let mut force = [0.0; ORDER];
            force[0] = 1.0;
            if delayed.len() == self.segments
                && let Some(past) = delayed.pop_front()
            {
                force.iter_mut().zip(&past).for_each(|(f, p)| *f -= p);
            }
            self.segment(&state, &force, &mut series);
            let mut past = [0.0; ORDER];
            for (b, row) in self.b.iter().zip(&series) {
                past.iter_mut().zip(row).for_each(|(p, c)| *p += b * c);
            }
            delayed.push_back(past);
            for (value, row) in state.iter_mut().zip(&series) {
                *value = row.iter().rev().sum();
            }
            let off = (state[0] - self.rest).abs() + state.iter().skip(1).map(|v| v.abs()).sum::<f64>();
            largest = largest.max(off).max(self.rest.abs());
            if !off.is_finite() {
                break;
            }
            let mut still = off <= SETTLED * largest;
            let start = number as f64 * self.length;
            for writer in writers.iter_mut() {
                still &= writer.write(&series, start, self.length, self.rate);
            }
            quiet = if still { quiet + 1 } else { 0 };
            if quiet > self.segments {
                return Ok(Run::Settled);
            }
        }
        if limit < SEGMENT_CAP && largest.is_finite() && state.iter().all(|v| v.is_finite()) {
            return Ok(Run::Slow(limit as f64 * self.length));
        }
        Err(DeadTimeError::TooManySteps { cap: SEGMENT_CAP })
    }

    /// The Taylor coefficients, in units of the segment, of z and its first n derivatives.
    fn segment(&self, state: &[f64], force: &[f64; ORDER], series: &mut [[f64; ORDER + 1]]) {
        let n = self.degree;
        for (row, value) in series.iter_mut().zip(state) {
            row[0] = *value;
        }
        for i in 0..ORDER {
            let own: f64 = self.a.iter().zip(series.iter()).map(|(a, row)| a * row[i]).sum();
            series[n][i] = force[i] - own;
            let step = self.length / (i + 1) as f64;
            for k in 0..n {
                series[k][i + 1] = series[k + 1][i] * step;
            }
        }
        series[n][ORDER] = 0.0;
    }
}

/// How a run of segments ended.
enum Run {
    Settled,
    /// Not settled by this scaled time.
    Slow(f64),
}

/// The slow modes of the answers: y = y(∞) + Σ c·e^(p·(t − lag)), c = M(p)/(p·F′(p)).
struct SlowModes {
    /// With Im p ≥ 0; a pair counts twice.
    poles: Vec<Complex<f64>>,
    /// For each output, one coefficient a pole.
    coefficients: Vec<Vec<Complex<f64>>>,
}

impl SlowModes {
    /// The modes that are alive at a time, s. None where poles coincide, or cannot be found.
    fn new(a: &IntPoly, b: &IntPoly, dead_time: &RBig, time: f64, outputs: &[Output]) -> Option<Self> {
        let found = poles::right_of(&Quasi::new(a, b, dead_time), -FADED / time).ok()?;
        if found.is_empty() || found.iter().any(|root| root.multiplicity > 1 || root.re >= 0.0) {
            return None;
        }
        let poles: Vec<Complex<f64>> =
            found.iter().filter(|root| root.im >= 0.0).map(|root| Complex::new(root.re, root.im)).collect();
        let seconds = dead_time.to_f64().value();
        let of = |output: &Output| {
            let [a, b, m] = scaled([a, b, &output.above]);
            let f = Quasi { a, b, dead_time: seconds };
            let coefficient = |p: &Complex<f64>| {
                let above = horner(&m, *p, magnitude(*p)).0;
                above / (p * f.at(*p).slope) * if p.im > 0.0 { 2.0 } else { 1.0 }
            };
            poles.iter().map(coefficient).collect()
        };
        let coefficients = outputs.iter().map(of).collect();
        Some(Self { poles, coefficients })
    }

    /// Value and slope of an output at a time, from its lag on.
    fn at(&self, output: usize, t: f64, final_value: f64) -> (f64, f64) {
        let (mut value, mut slope) = (final_value, 0.0);
        for (p, c) in self.poles.iter().zip(&self.coefficients[output]) {
            let mode = c * (p * t).exp();
            value += mode.re;
            slope += (mode * p).re;
        }
        (value, slope)
    }

    /// Writes the rest from a time on; false where it does not continue what is there, or is too long.
    fn finish(&self, start: f64, writers: &mut [Writer]) -> bool {
        let continues = |(k, w): (usize, &Writer)| {
            let last = w.points.last().map_or(0.0, |p| p.value);
            (self.at(k, start, w.final_value).0 - last).abs() <= CONTINUED * w.largest
        };
        let slowest = self.poles.iter().map(|p| -p.re).fold(f64::INFINITY, f64::min);
        let step = 1.0 / (POINTS_FOR_MODES * self.poles.iter().map(|p| magnitude(*p)).fold(0.0, f64::max));
        let count = libm::ceil(-libm::log(SETTLED) / (slowest * step));
        if !writers.iter().enumerate().all(continues) || count >= MODE_POINT_CAP as f64 {
            return false;
        }
        for (k, writer) in writers.iter_mut().enumerate() {
            for i in 1..=(count as usize) {
                let t = start + i as f64 * step;
                let (value, slope) = self.at(k, t, writer.final_value);
                writer.points.push(TracePoint { time: writer.lag + t, value, slope });
            }
        }
        true
    }
}

/// Quotient of two numbers given as mantissa and exponent.
fn ratio(above: (f64, i64), below: (f64, i64)) -> f64 {
    libm::ldexp(above.0 / below.0, (above.1 - below.1).clamp(-4000, 4000) as i32)
}

/// One output, as it comes.
struct Writer {
    weights: Vec<f64>,
    final_value: f64,
    lag: f64,
    points: Vec<TracePoint>,
    /// The largest |y − y(∞)| so far.
    largest: f64,
}

impl Writer {
    fn new(weights: Vec<f64>, final_value: f64, lag: f64) -> Self {
        let mut writer = Self { weights, final_value, lag, points: Vec::new(), largest: 0.0 };
        writer.restart();
        writer
    }

    fn restart(&mut self) {
        self.points.clear();
        self.largest = self.final_value.abs();
        if self.lag > 0.0 {
            self.points.push(TracePoint { time: 0.0, value: 0.0, slope: 0.0 });
            self.points.push(TracePoint { time: self.lag, value: 0.0, slope: 0.0 });
        }
    }

    /// Adds the points of a segment; true where the output is at rest in all of it.
    fn write(&mut self, series: &[[f64; ORDER + 1]], start: f64, length: f64, rate: f64) -> bool {
        let mut y = [0.0; ORDER];
        for (weight, row) in self.weights.iter().zip(series) {
            y.iter_mut().zip(row).for_each(|(y, c)| *y += weight * c);
        }
        let at = |t: f64| {
            let (mut value, mut slope) = (0.0, 0.0);
            for c in y.iter().rev() {
                slope = slope * t + value;
                value = value * t + c;
            }
            TracePoint { time: self.lag + (start + t * length) / rate, value, slope: slope * rate / length }
        };
        let first = at(0.0);
        let before = self.points.last().copied();
        // Where value or slope change at once, the change is two points at one time.
        let jump = before.is_none_or(|b| {
            let large = CUBIC_ERROR * self.largest.max(f64::MIN_POSITIVE);
            (b.value - first.value).abs() > large || (b.slope - first.slope).abs() * length > large * rate
        });
        if jump {
            // The same time to the last bit, so that nothing lies between the two.
            let time = before.map_or(first.time, |b| b.time);
            self.points.push(TracePoint { time, ..first });
        }
        let off = |value: f64| (value - self.final_value).abs();
        let mut furthest = off(first.value);
        // The fourth derivative at most, in units of the segment.
        let fourth: f64 =
            y.iter().enumerate().skip(4).map(|(k, c)| c.abs() * (k * (k - 1) * (k - 2) * (k - 3)) as f64).sum();
        let allowed = 384.0 * CUBIC_ERROR * self.largest.max(furthest).max(f64::MIN_POSITIVE);
        let count = (libm::ceil(libm::sqrt(libm::sqrt(fourth / allowed))) as usize).clamp(1, POINTS_CAP);
        for k in 1..=count {
            let point = at(k as f64 / count as f64);
            furthest = furthest.max(off(point.value));
            self.points.push(point);
        }
        self.largest = self.largest.max(furthest);
        furthest <= SETTLED * self.largest
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn p(c: &[i64]) -> IntPoly {
        IntPoly::from_i64(c)
    }

    fn time(numerator: i64, denominator: u64) -> RBig {
        RBig::from_parts(numerator.into(), denominator.into())
    }

    #[test]
    fn a_delayed_integrator_follows_its_polynomials() {
        // e^(−s)/s closed with gain 2/5: y = Σ −(−2/5)^k·(t − k)^k/k! over k from 1 to t.
        let output = Output { above: p(&[2]), lag: 1.0 };
        let trace = to_step(&p(&[0, 5]), &p(&[2]), &RBig::ONE, &[output]).expect("settles").remove(0);
        for t in [0.0, 0.7, 1.0, 1.3, 2.0, 3.7, 6.2, 11.9] {
            let (mut expected, mut factor) = (0.0, -1.0);
            for k in 1..=(t as i32) {
                factor *= -0.4 / f64::from(k);
                expected += factor * libm::pow(t - f64::from(k), f64::from(k));
            }
            assert!((trace.value(t) - expected).abs() < 1e-8, "{t}: {} {expected}", trace.value(t));
        }
        assert!((trace.final_value - 1.0).abs() < 1e-15);
    }

    #[test]
    fn a_proportional_part_jumps_and_the_answer_stays_within_its_error() {
        // Controller (s + 1)/s before e^(−s/2)/(2s + 1): the controller's output jumps to 1 at 0.
        let a = p(&[0, 1, 2]);
        let outputs = [Output { above: p(&[1, 3, 2]), lag: 0.0 }, Output { above: p(&[1, 1]), lag: 0.5 }];
        let traces = to_step(&a, &p(&[1, 1]), &time(1, 2), &outputs).expect("settles");
        assert!((traces[0].value(0.0) - 1.0).abs() < 1e-14);
        // Until the first echo u = 1 + t and 2y′ + y = u(t − 1/2).
        let y = |t: f64| (t - 1.0) + libm::exp(-0.5 * t);
        assert!((traces[0].value(0.4) - 1.4).abs() < 1e-12);
        for t in [0.1, 0.3, 0.5] {
            assert!((traces[1].value(0.5 + t) - y(t)).abs() < 1e-8, "{t}");
        }
        assert!((traces[0].final_value - 1.0).abs() < 1e-15 && (traces[1].value(200.0) - 1.0).abs() < 1e-15);
    }

    #[test]
    fn a_slow_loop_is_finished_by_its_modes() {
        // e^(−s/10)/(s(s/10 + 1)) with gain 1/1000 settles in 1000 s: the slowest pole is next to −1/1000.
        let (a, b) = (p(&[0, 10_000, 1000]), p(&[10]));
        let output = Output { above: p(&[10]), lag: 0.1 };
        let trace = to_step(&a, &b, &time(1, 10), &[output]).expect("settles").remove(0);
        let pole = poles::dominant(&Quasi::new(&a, &b, &time(1, 10))).expect("found")[0].re;
        let decay = (1.0 - trace.value(2000.0)) / (1.0 - trace.value(1000.0));
        assert!((libm::log(decay) / 1000.0 / pole - 1.0).abs() < 1e-6, "{decay} {pole}");
        assert!(trace.points().windows(2).all(|w| (w[1].value - w[0].value).abs() < 3e-2));
    }

    #[test]
    fn an_unstable_loop_is_no_answer() {
        let output = Output { above: p(&[3]), lag: 0.0 };
        assert!(to_step(&p(&[0, 1]), &p(&[3]), &RBig::ONE, &[output]).is_err());
    }
}
