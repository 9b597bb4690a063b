//! The branches of a loop with dead time in a rectangle of the s-plane, both signs of the knob.
//!
//! The locus is where q(s) = −(A·e^(T·s) + B0)/B1 is real, and |q| grows along every branch. Branches begin at the poles of
//! q = 0, at the rectangle's sides (infinitely many come from Re s → −∞), and where real branches meet and leave the real
//! axis; they end at the zeros of B1, on the real axis, or outside. On the real axis they are the stretches between poles,
//! zeros and meetings. Elsewhere each is followed by a predictor of second order and Newton's method across the branch.

use super::DeadTimeError;
use super::gain::GainFamily;
use super::plane::{Plane, RealMeeting};
use crate::exact::complex_roots::roots;
use crate::locus::{Branch, BranchPoint};
use crate::numerics::magnitude;
use crate::record::{KnobSign, View};
use alloc::vec::Vec;
use core::f64::consts::PI;
use nalgebra::{Complex, ComplexField};

/// Branches are followed this many view sizes out of the picture on each side.
const BEYOND: f64 = 0.25;

/// Points of one branch.
const POINT_CAP: usize = 4000;

/// Steps along the rectangle's sides.
const SIDE_CAP: usize = 40_000;

/// The largest turn of q between two points of a side, radians: at 3 a crossing could be lost.
const SIDE_TURN: f64 = 0.4;

/// The longest step, in pixels.
const LONGEST: f64 = 25.0;

/// A step is refused where the branch bends more than this, radians.
const LARGEST_BEND: f64 = 0.35;

/// The product of a step, in pixels, and its bend: the sagitta is an eighth of it.
const BEND_LENGTH: f64 = 1.2;

/// A branch is given up at a step of this many pixels: something is nearer to it than that.
const SHORTEST: f64 = 1e-5;

/// The first step from a pole or a meeting, in pixels.
const FIRST: f64 = 0.02;

/// A branch has arrived within this many pixels.
const ARRIVED: f64 = 0.25;

/// Points of a stretch of the real axis.
const REAL_POINTS: usize = 24;

/// A point this near to the branch, in pixels, is on it.
const ON_BRANCH: f64 = 1e-3;

/// Newton steps across a branch.
const CORRECTIONS: usize = 3;

/// The branches of both signs; fixed modes stand still.
///
/// # Errors
/// Where poles or meetings in the rectangle are not all found.
pub fn branches(family: &GainFamily, view: &View) -> Result<Vec<Branch>, DeadTimeError> {
    let mut all = Vec::new();
    if family.fixed.degree() > 0 {
        for root in roots(&family.fixed)? {
            for sign in KnobSign::BOTH {
                let point = |knob: f64| BranchPoint { re: root.re, im: root.im, knob };
                let points = [point(0.0), point(sign.factor() * f64::INFINITY)].into();
                all.extend(core::iter::repeat_n(Branch { sign, points }, root.multiplicity));
            }
        }
    }
    if family.b1.is_zero() {
        return Ok(all);
    }
    let plane = Plane::new(family, &extended(view))?;
    all.extend(real_branches(&plane));
    let follower = Follower { plane: &plane, pixel: plane.pixel() * (1.0 + 2.0 * BEYOND).recip() };
    for start in starts(&plane, follower.pixel)? {
        let branch = follower.follow(&start);
        let mirrored = branch.points.iter().map(|p| BranchPoint { im: -p.im, ..*p }).collect();
        all.push(Branch { sign: branch.sign, points: mirrored });
        all.push(branch);
    }
    Ok(all)
}

fn extended(view: &View) -> View {
    let by = |range: [f64; 2]| BEYOND * (range[1] - range[0]);
    let (x, y) = (by(view.re), by(view.im));
    let top = view.im[1].max(-view.im[0]) + y;
    View { re: [view.re[0] - x, view.re[1] + x], im: [-top, top] }
}

/// Where a branch in the upper half plane begins.
struct Start {
    /// The first vertex.
    from: BranchPoint,
    /// Next to it on the branch.
    s: Complex<f64>,
    sign: KnobSign,
}

fn starts(plane: &Plane, pixel: f64) -> Result<Vec<Start>, DeadTimeError> {
    let mut found = Vec::new();
    let upward = |angle: f64| angle > 1e-6 && angle < PI - 1e-6;
    for pole in plane.poles.iter().filter(|p| p.im >= 0.0) {
        let place = Complex::new(pole.re, pole.im);
        for sign in KnobSign::BOTH {
            for angle in plane.departures(pole, sign).into_iter().filter(|a| pole.im > 0.0 || upward(*a)) {
                let s = place + Complex::new(libm::cos(angle), libm::sin(angle)) * (FIRST * pixel);
                found.push(Start { from: BranchPoint { re: pole.re, im: pole.im, knob: 0.0 }, s, sign });
            }
        }
    }
    for meeting in &plane.meetings {
        for angle in meeting.directions(Course::Away).into_iter().filter(|a| upward(*a)) {
            let offset = Complex::new(libm::cos(angle), libm::sin(angle)) * (FIRST * pixel);
            let from = BranchPoint { re: meeting.s, im: 0.0, knob: meeting.knob };
            found.push(Start { from, s: Complex::new(meeting.s, 0.0) + offset, sign: meeting.sign() });
        }
    }
    let ([left, right], [_, top]) = (plane.view.re, plane.view.im);
    let corners = [(right, 0.0), (right, top), (left, top), (left, 0.0)].map(|(x, y)| Complex::new(x, y));
    for (side, inward) in corners.windows(2).zip([(-1.0, 0.0), (0.0, -1.0), (1.0, 0.0)]) {
        entries(plane, side[0], side[1], Complex::new(inward.0, inward.1), &mut found)?;
    }
    Ok(found)
}

/// Where |q| grows from a side of the rectangle inward.
fn entries(
    plane: &Plane,
    from: Complex<f64>,
    to: Complex<f64>,
    inward: Complex<f64>,
    found: &mut Vec<Start>,
) -> Result<(), DeadTimeError> {
    let way = to - from;
    let length = magnitude(way);
    let (mut done, mut before) = (0.0, plane.at(from));
    for _ in 0..SIDE_CAP {
        if done >= 1.0 {
            return Ok(());
        }
        let mut step = (SIDE_TURN / (length * before.turning).max(SIDE_TURN)).min(1.0 - done);
        let mut here = plane.at(from + way * (done + step));
        // Where the rate grows on the way, a shorter step.
        while here.turning * length * step > 2.0 * SIDE_TURN && step > 1e-12 {
            step *= 0.5;
            here = plane.at(from + way * (done + step));
        }
        let (a, b) = (before.value.im, here.value.im);
        if (a > 0.0) != (b > 0.0) && here.value.im.is_finite() {
            let (mut low, mut high) = (done, done + step);
            for _ in 0..50 {
                let middle = 0.5 * (low + high);
                if (plane.at(from + way * middle).value.im > 0.0) == (a > 0.0) { low = middle } else { high = middle }
            }
            let s = from + way * (0.5 * (low + high));
            let knob = plane.at(s);
            let direction = knob.rate.conj();
            // The real axis itself is no side, and its ends are taken care of elsewhere.
            if s.im > 1e-9 * length && direction.re * inward.re + direction.im * inward.im > 0.0 {
                let sign = if knob.value.re < 0.0 { KnobSign::Negative } else { KnobSign::Positive };
                found.push(Start { from: BranchPoint { re: s.re, im: s.im, knob: knob.value.re }, s, sign });
            }
        }
        done += step;
        before = here;
    }
    Err(DeadTimeError::TooManySteps { cap: SIDE_CAP })
}

/// Whether a branch goes away from a meeting as |q| grows, or comes to it.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Course {
    Away,
    Toward,
}

impl RealMeeting {
    pub(super) fn sign(&self) -> KnobSign {
        if self.knob < 0.0 { KnobSign::Negative } else { KnobSign::Positive }
    }

    /// The angles, in [0, π], at which branches leave or reach the meeting: q/q* − 1 ≈ c·(s − s*)^m with real c.
    fn directions(&self, course: Course) -> Vec<f64> {
        let m = self.multiplicity;
        let offset = if self.grows_right == (course == Course::Away) { 0.0 } else { 1.0 };
        (0..=m).map(|k| (2.0 * k as f64 + offset) * PI / m as f64).filter(|angle| *angle <= PI + 1e-9).collect()
    }

    /// Whether poles leave the real axis here as |q| grows.
    pub(super) fn leaves_axis(&self) -> bool {
        self.directions(Course::Away).iter().any(|angle| *angle > 1e-6 && *angle < PI - 1e-6)
    }

    /// Whether poles come to the real axis here as |q| grows.
    fn reaches_axis(&self) -> bool {
        self.directions(Course::Toward).iter().any(|angle| *angle > 1e-6 && *angle < PI - 1e-6)
    }
}

/// The stretches of the real axis between special points, in the direction of growing |q|.
fn real_branches(plane: &Plane) -> Vec<Branch> {
    let [left, right] = plane.view.re;
    let inside = |x: &f64| *x > left && *x < right;
    let real = |im: f64| im == 0.0;
    let poles = plane.poles.iter().filter(|r| real(r.im)).map(|r| (r.re, 0.0));
    let zeros = plane.zeros.iter().filter(|r| real(r.im)).map(|r| (r.re, f64::INFINITY));
    let meetings = plane.meetings.iter().map(|m| (m.s, m.knob));
    let mut ends: Vec<(f64, f64)> = poles.chain(zeros).chain(meetings).filter(|(x, _)| inside(x)).collect();
    ends.extend([left, right].map(|x| (x, plane.on_axis(x))));
    ends.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut found = Vec::new();
    for pair in ends.windows(2) {
        let ((from, first), (to, last)) = (pair[0], pair[1]);
        let middle = plane.on_axis(0.5 * (from + to));
        if to <= from || middle == 0.0 || !middle.is_finite() {
            continue;
        }
        let sign = if middle < 0.0 { KnobSign::Negative } else { KnobSign::Positive };
        let point = |x: f64, knob: f64| BranchPoint { re: x, im: 0.0, knob: sign.factor() * knob.abs() + 0.0 };
        let mut points = alloc::vec![point(from, first)];
        for k in 1..REAL_POINTS {
            // Denser at the ends, where the knob changes fastest.
            let part = 0.5 - 0.5 * libm::cos(PI * k as f64 / REAL_POINTS as f64);
            let x = from + part * (to - from);
            points.push(point(x, plane.on_axis(x)));
        }
        points.push(point(to, last));
        if last.abs() < first.abs() {
            points.reverse();
        }
        found.push(Branch { sign, points });
    }
    found
}

/// Follows branches in the upper half plane.
struct Follower<'a> {
    plane: &'a Plane,
    /// Of the picture, 1/s.
    pixel: f64,
}

/// A vertex with the direction of growing |q|.
#[derive(Clone, Copy)]
struct Here {
    s: Complex<f64>,
    knob: f64,
    direction: Complex<f64>,
    /// |q′/q|.
    rate: f64,
}

impl Follower<'_> {
    fn follow(&self, start: &Start) -> Branch {
        let mut branch = Branch { sign: start.sign, points: [start.from].into() };
        let Some(mut here) = self.corrected(start.s, start.sign) else { return branch };
        let point = |h: &Here| BranchPoint { re: h.s.re, im: h.s.im, knob: h.knob };
        // A start on a side of the rectangle is on the branch already.
        if magnitude(here.s - Complex::new(start.from.re, start.from.im)) > 0.5 * FIRST * self.pixel {
            branch.points.push(point(&here));
        }
        let mut step = FIRST * self.pixel;
        for _ in 0..POINT_CAP {
            if let Some(end) = self.arrival(&here, step, start.sign) {
                branch.points.push(end);
                return branch;
            }
            step = step.min(LONGEST * self.pixel).min(0.7 / here.rate);
            let Some((next, bend)) = self.step(&here, &mut step, start.sign) else { return branch };
            if next.s.im <= 0.0 {
                // Between two meetings no branch reaches the axis: the nearest one it is.
                branch.points.extend(self.nearest_meeting(next.s.re, start.sign));
                return branch;
            }
            branch.points.push(point(&next));
            if !self.plane.holds(next.s) {
                return branch;
            }
            let easy = (bend * step / self.pixel).max(1e-3);
            step *= libm::sqrt(BEND_LENGTH / easy).clamp(0.5, 2.0);
            here = next;
        }
        branch
    }

    /// The next vertex and the bend to it, with the step halved until both are good. None where it becomes too short.
    fn step(&self, here: &Here, step: &mut f64, sign: KnobSign) -> Option<(Here, f64)> {
        while *step > SHORTEST * self.pixel {
            let middle = direction(self.plane.at(here.s + here.direction * (0.5 * *step)).rate);
            let predicted = here.s + middle * *step;
            if let Some(next) = self.corrected(predicted, sign) {
                let bend = (next.direction / here.direction).argument().abs();
                let moved = magnitude(next.s - predicted);
                let grows = next.knob.abs() > here.knob.abs();
                if grows && moved < 0.2 * *step && bend < LARGEST_BEND && bend * *step < 2.0 * BEND_LENGTH * self.pixel
                {
                    return Some((next, bend));
                }
            }
            *step *= 0.5;
        }
        None
    }

    /// The point of the locus next to a guess, by Newton's method on the argument of q.
    fn corrected(&self, guess: Complex<f64>, sign: KnobSign) -> Option<Here> {
        let mut s = guess;
        for _ in 0..CORRECTIONS {
            let knob = self.plane.at(s);
            let off = (knob.value * sign.factor()).argument();
            s -= Complex::new(0.0, off) / knob.rate;
        }
        let knob = self.plane.at(s);
        let off = (knob.value * sign.factor()).argument().abs();
        let rate = magnitude(knob.rate);
        let good = off < LARGEST_BEND && off < ON_BRANCH * self.pixel * rate;
        (good && rate.is_finite() && rate > 0.0).then(|| Here {
            s,
            knob: knob.value.re,
            direction: direction(knob.rate),
            rate,
        })
    }

    /// The end of the branch, where it is within reach and straight ahead.
    fn arrival(&self, here: &Here, step: f64, sign: KnobSign) -> Option<BranchPoint> {
        let ahead = |target: Complex<f64>, reach: f64| {
            let way = target - here.s;
            let length = magnitude(way);
            length < reach && (way.conj() * here.direction).re > 0.9 * length
        };
        for zero in &self.plane.zeros {
            let target = Complex::new(zero.re, zero.im);
            if ahead(target, ARRIVED * self.pixel) {
                return Some(BranchPoint { re: zero.re, im: zero.im, knob: sign.factor() * f64::INFINITY });
            }
        }
        let reach = (1.2 * step).min(2.0 * self.pixel).max(ARRIVED * self.pixel);
        let comes = |m: &&RealMeeting| m.sign() == sign && m.reaches_axis() && m.knob.abs() > here.knob.abs();
        for meeting in self.plane.meetings.iter().filter(comes) {
            if ahead(Complex::new(meeting.s, 0.0), reach) {
                return Some(BranchPoint { re: meeting.s, im: 0.0, knob: meeting.knob });
            }
        }
        None
    }

    fn nearest_meeting(&self, x: f64, sign: KnobSign) -> Option<BranchPoint> {
        let all = self.plane.meetings.iter().filter(|m| m.sign() == sign && m.reaches_axis());
        let nearest = all.min_by(|a, b| (a.s - x).abs().total_cmp(&(b.s - x).abs()))?;
        Some(BranchPoint { re: nearest.s, im: 0.0, knob: nearest.knob })
    }
}

/// The direction in which |q| grows along the locus.
fn direction(rate: Complex<f64>) -> Complex<f64> {
    rate.conj() / magnitude(rate)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::dead_time::{Quasi, poles};
    use crate::exact::{Dyadic, IntPoly};
    use dashu_ratio::RBig;

    /// At several knob values, every pole in the view must lie on a branch of its sign, and as many branches pass each value
    /// as there are poles.
    fn check(a: &[i64], b0: &[i64], b1: &[i64], time: (i64, u64), view: View, knobs: &[f64]) {
        let p = IntPoly::from_i64;
        let time = RBig::from_parts(time.0.into(), time.1.into());
        let family = GainFamily::new(&p(a), &p(b0), &p(b1), &time).expect("retarded");
        let all = branches(&family, &view).expect("followed");
        let pixel = (view.re[1] - view.re[0]).min(view.im[1] - view.im[0]) / 1000.0;
        for knob in knobs {
            let (a, b) = family.at(&Dyadic::from_f64(*knob).expect("finite").to_rational());
            let poles = poles::in_view(&Quasi::new(&a, &b, &time), &view).expect("found");
            for pole in &poles {
                let s = Complex::new(pole.re, pole.im);
                let near = all.iter().filter_map(|b| passing(b, *knob, s)).filter(|d| *d < 0.3 * pixel).count();
                assert_eq!(near, pole.multiplicity, "knob {knob}, pole {s}");
            }
        }
        for branch in &all {
            assert!(branch.points.windows(2).all(|w| w[0].knob.abs() <= w[1].knob.abs()), "{branch:?}");
        }
    }

    /// The distance of a point from the chord on which a branch passes a knob value.
    fn passing(branch: &Branch, knob: f64, s: Complex<f64>) -> Option<f64> {
        if (branch.sign == KnobSign::Positive) != (knob > 0.0) {
            return None;
        }
        let pair = branch.points.windows(2).find(|w| w[0].knob.abs() <= knob.abs() && knob.abs() < w[1].knob.abs())?;
        let [from, to] = [pair[0], pair[1]].map(|p| Complex::new(p.re, p.im));
        let way = to - from;
        let part = ((s - from) * way.conj()).re / (way * way.conj()).re;
        Some(magnitude(s - from - way * part.clamp(0.0, 1.0)))
    }

    const VIEW: View = View { re: [-6.0, 3.0], im: [-20.0, 20.0] };

    #[test]
    fn every_pole_of_a_delayed_integrator_lies_on_a_branch() {
        check(&[0, 1], &[], &[1], (1, 1), VIEW, &[0.01, 0.2, 0.5, 1.0, 3.0, 20.0, -0.1, -1.0, -7.0]);
    }

    #[test]
    fn zeros_poles_and_meetings_are_joined() {
        // (s + 2)(s² + s + 5)·e^(−s/2)/(s(s + 1)(s² + 2s + 9)(s + 3))
        let a = [0, 27, 42, 23, 6, 1];
        check(&a, &[], &[10, 7, 3, 1], (1, 2), VIEW, &[0.05, 0.7, 2.0, 6.0, 30.0, -0.3, -2.5, -12.0]);
    }

    #[test]
    fn a_fixed_delayed_part_and_multiple_poles_are_followed() {
        check(&[0, 0, 1, 1], &[], &[1, 2], (1, 1), VIEW, &[0.05, 0.5, 3.0, -0.05, -2.0]);
        check(&[0, 2, 3, 1], &[1, 1], &[2, 0], (1, 1), VIEW, &[0.05, 0.5, 3.0, -0.05, -2.0]);
    }
}
