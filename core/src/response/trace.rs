//! The answer to a unit step as points of a simulation, with a cubic between each two, and its extremes.
//!
//! Between two points the cubic takes both values and both slopes (Hermite): its error is h⁴/384 times the fourth
//! derivative, so that whoever makes the points chooses h. Two points at one time are a jump; the later one holds there.

use super::modes::{CURVE_POINTS, Peaks};
use super::searches::root_between;
use crate::record::Curve;
use alloc::vec::Vec;

/// An answer counts as settled for drawing within this part of its scale.
const QUIET: f64 = 0.01;

/// The scale is at least this part of the largest distance from the final value: an answer that returns to zero has no other.
const SCALE_OF_DEVIATION: f64 = 0.02;

/// Drawn beyond the time at which it is quiet, as a factor.
const BEYOND_QUIET: f64 = 1.15;

/// A point of an answer.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TracePoint {
    /// s.
    pub time: f64,
    /// The value.
    pub value: f64,
    /// Its derivative, 1/s.
    pub slope: f64,
}

/// An answer to a unit step that has settled by its last point; before the first it is that point's value, behind the last
/// the final value.
#[derive(Clone, Debug)]
pub struct Trace {
    /// y(∞).
    pub final_value: f64,
    /// Not empty; times never fall; every number is finite.
    points: Vec<TracePoint>,
}

impl Trace {
    /// From points in order of time. None where there are none, one is not finite, or time runs back.
    pub fn new(final_value: f64, points: Vec<TracePoint>) -> Option<Self> {
        let finite = |p: &TracePoint| p.time.is_finite() && p.value.is_finite() && p.slope.is_finite();
        let ordered = points.windows(2).all(|pair| pair[0].time <= pair[1].time);
        (final_value.is_finite() && !points.is_empty() && ordered && points.iter().all(finite))
            .then_some(Self { final_value, points })
    }

    /// The points.
    pub fn points(&self) -> &[TracePoint] {
        &self.points
    }

    /// y(t), t ≥ 0 in s; at a jump the later value.
    pub fn value(&self, t: f64) -> f64 {
        let behind = self.points.partition_point(|p| p.time <= t);
        match (behind.checked_sub(1), self.points.get(behind)) {
            (None, _) => self.points[0].value,
            (Some(i), Some(next)) => Stretch::new(self.points[i], *next).value(t),
            (Some(i), None) if self.points[i].time < t => self.final_value,
            (Some(i), None) => self.points[i].value,
        }
    }

    fn stretches(&self) -> impl DoubleEndedIterator<Item = Stretch> {
        self.points.windows(2).map(|pair| Stretch::new(pair[0], pair[1]))
    }

    /// The largest |y − y(∞)|.
    fn largest_deviation(&self) -> f64 {
        self.points.iter().map(|p| (p.value - self.final_value).abs()).fold(0.0, f64::max)
    }

    /// The highest and the lowest value; always found.
    pub fn peaks(&self) -> Option<Peaks> {
        let end = self.final_value;
        let mut peaks = Peaks { highest: (end, f64::INFINITY), lowest: (end, f64::INFINITY) };
        let mut take = |time: f64, value: f64| {
            if value > peaks.highest.0 {
                peaks.highest = (value, time);
            }
            if value < peaks.lowest.0 {
                peaks.lowest = (value, time);
            }
        };
        take(self.points[0].time, self.points[0].value);
        for stretch in self.stretches() {
            for t in stretch.turns().into_iter().flatten() {
                take(t, stretch.value(t));
            }
            take(stretch.to.time, stretch.to.value);
        }
        Some(peaks)
    }

    /// The first time at which the answer, taken in the direction of its final value, is at `part` of it. None where it never
    /// is, or the final value is zero.
    pub fn first_reach(&self, part: f64) -> Option<f64> {
        if self.final_value == 0.0 {
            return None;
        }
        let missing = |y: f64| part - y / self.final_value;
        if missing(self.points[0].value) <= 0.0 {
            return Some(self.points[0].time);
        }
        for stretch in self.stretches() {
            let mut before = stretch.from.time;
            for (t, y) in stretch.looks() {
                if missing(y) <= 0.0 {
                    return Some(root_between((before, missing(stretch.value(before))), (t, missing(y)), |t| {
                        missing(stretch.value(t))
                    }));
                }
                before = t;
            }
        }
        None
    }

    /// The last time at which |y − y(∞)| is `band`, 0 where it never is more. None where the band is empty, or the last point
    /// lies outside of it.
    pub fn last_outside(&self, band: f64) -> Option<f64> {
        let outside = |y: f64| (y - self.final_value).abs() - band;
        let last = self.points[self.points.len() - 1];
        if band <= 0.0 || outside(last.value) > 0.0 {
            return None;
        }
        for stretch in self.stretches().rev() {
            let mut later = stretch.to.time;
            let mut looks: Vec<(f64, f64)> = [(stretch.from.time, stretch.from.value)].into();
            looks.extend(stretch.looks());
            for (t, y) in looks.into_iter().rev().skip(1) {
                if outside(y) > 0.0 {
                    return Some(root_between((t, outside(y)), (later, outside(stretch.value(later))), |t| {
                        outside(stretch.value(t))
                    }));
                }
                later = t;
            }
        }
        Some(0.0)
    }

    /// A time by which the answer has settled well, for drawing.
    pub fn horizon(&self) -> f64 {
        let scale = self.final_value.abs().max(SCALE_OF_DEVIATION * self.largest_deviation());
        let last = self.points[self.points.len() - 1].time;
        let quiet = self.last_outside(QUIET * scale).unwrap_or(last);
        if quiet > 0.0 { BEYOND_QUIET * quiet } else { 1.0 }
    }

    /// The curve from 0 to `end`, evenly spaced, with both values of every jump.
    pub fn curve(&self, end: f64) -> Curve {
        let even = (0..=CURVE_POINTS).map(|k| end * k as f64 / CURVE_POINTS as f64);
        let mut points: Vec<(f64, f64)> = even.map(|t| (t, self.value(t))).collect();
        // From the last one: of several at one time the first ends up in front.
        for stretch in self.stretches().rev().filter(|s| s.is_jump() && s.to.time <= end) {
            let (from, to) = (stretch.from, stretch.to);
            let place = points.partition_point(|(t, _)| *t < from.time);
            // An even point at the very time of the jump shows the later value already.
            let after = (points.get(place).is_none_or(|(t, _)| *t > to.time)).then_some((to.time, to.value));
            points.splice(place..place, [(from.time, from.value)].into_iter().chain(after));
        }
        let (time, value) = points.into_iter().unzip();
        Curve { time, value }
    }
}

/// Two neighbouring points with the cubic between them.
#[derive(Clone, Copy, Debug)]
struct Stretch {
    from: TracePoint,
    to: TracePoint,
}

impl Stretch {
    fn new(from: TracePoint, to: TracePoint) -> Self {
        Self { from, to }
    }

    fn is_jump(&self) -> bool {
        self.from.time >= self.to.time
    }

    /// y = from.value + c1·u + c2·u² + c3·u³, u from 0 to 1.
    fn cubic(&self) -> [f64; 3] {
        let (width, rise) = (self.to.time - self.from.time, self.to.value - self.from.value);
        let (first, last) = (width * self.from.slope, width * self.to.slope);
        [first, 3.0 * rise - 2.0 * first - last, first + last - 2.0 * rise]
    }

    fn value(&self, t: f64) -> f64 {
        if t >= self.to.time {
            return self.to.value;
        }
        let u = (t - self.from.time) / (self.to.time - self.from.time);
        let [c1, c2, c3] = self.cubic();
        self.from.value + u * (c1 + u * (c2 + u * c3))
    }

    /// Where the cubic turns, ascending.
    fn turns(&self) -> [Option<f64>; 2] {
        if self.is_jump() {
            return [None; 2];
        }
        let [c1, c2, c3] = self.cubic();
        // c1 + 2·c2·u + 3·c3·u² = 0, by the form that does not cancel.
        let discriminant = c2 * c2 - 3.0 * c1 * c3;
        if discriminant <= 0.0 {
            return [None; 2];
        }
        let sum = -(c2 + libm::copysign(libm::sqrt(discriminant), c2));
        let (a, b) = (sum / (3.0 * c3), c1 / sum);
        let inside = |u: f64| (u > 0.0 && u < 1.0).then_some(self.from.time + u * (self.to.time - self.from.time));
        if a < b { [inside(a), inside(b)] } else { [inside(b), inside(a)] }
    }

    /// The turns and the end, as time and value: between two looks the answer only rises or only falls.
    fn looks(&self) -> impl Iterator<Item = (f64, f64)> + use<> {
        let stretch = *self;
        let turns = stretch.turns().into_iter().flatten().map(move |t| (t, stretch.value(t)));
        turns.chain([(stretch.to.time, stretch.to.value)])
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// y = 1 − e^(−t/5)·cos t at steps of 0.1, until 100 s.
    fn damped() -> Trace {
        let point = |k: i32| {
            let t = 0.1 * f64::from(k);
            let decay = libm::exp(-0.2 * t);
            TracePoint {
                time: t,
                value: 1.0 - decay * libm::cos(t),
                slope: decay * (0.2 * libm::cos(t) + libm::sin(t)),
            }
        };
        Trace::new(1.0, (0..=1000).map(point).collect()).expect("ordered")
    }

    #[test]
    fn extremes_and_times_follow_the_formulas() {
        let trace = damped();
        // y′ = 0 where tan t = −1/5.
        let peak = core::f64::consts::PI - libm::atan(0.2);
        let highest = 1.0 - libm::exp(-0.2 * peak) * libm::cos(peak);
        let peaks = trace.peaks().expect("found");
        assert!((peaks.highest.0 - highest).abs() < 1e-6 && (peaks.highest.1 - peak).abs() < 1e-4, "{peaks:?}");
        assert_eq!(peaks.lowest, (0.0, 0.0));
        let half_pi = core::f64::consts::FRAC_PI_2;
        assert!((trace.first_reach(1.0).expect("reached") - half_pi).abs() < 1e-6);
        let settled = trace.last_outside(0.02).expect("settles");
        let deviation = |t: f64| libm::exp(-0.2 * t) * libm::cos(t);
        assert!((deviation(settled).abs() - 0.02).abs() < 1e-7, "{settled}");
        assert!((1..100_000).all(|k| deviation(settled + 1e-3 * f64::from(k)).abs() < 0.02));
    }

    #[test]
    fn a_jump_shows_both_values_and_is_reached_at_once() {
        let point = |time: f64, value: f64| TracePoint { time, value, slope: 0.0 };
        let trace = Trace::new(
            1.0,
            [point(0.0, 0.0), point(2.0, 0.0), point(2.0, 1.5), point(2.0, 1.5), point(3.0, 1.0)].into(),
        )
        .expect("ordered");
        assert_eq!((trace.value(1.999), trace.value(2.0), trace.value(9.0)), (0.0, 1.5, 1.0));
        assert_eq!(trace.first_reach(0.9), Some(2.0));
        assert_eq!(trace.peaks().map(|p| (p.highest, p.lowest)), Some(((1.5, 2.0), (0.0, 0.0))));
        for end in [4.8, 5.1] {
            let curve = trace.curve(end);
            let at_jump: Vec<f64> = curve
                .time
                .iter()
                .zip(&curve.value)
                .filter(|(t, _)| (**t - 2.0).abs() < 1e-9)
                .map(|(_, y)| *y)
                .collect();
            assert_eq!(at_jump.first().zip(at_jump.last()), Some((&0.0, &1.5)), "{end}");
            assert!(curve.time.windows(2).all(|pair| pair[0] <= pair[1]));
        }
        assert_eq!(trace.last_outside(1e9), Some(0.0));
    }

    #[test]
    fn what_is_no_answer_is_refused() {
        let point = |time: f64| TracePoint { time, value: 0.0, slope: 0.0 };
        assert!(Trace::new(1.0, Vec::new()).is_none());
        assert!(Trace::new(f64::NAN, [point(0.0)].into()).is_none());
        assert!(Trace::new(1.0, [point(1.0), point(0.0)].into()).is_none());
    }
}
