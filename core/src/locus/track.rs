//! Tracking the moving poles over one stretch of the knob in which none of them meet.
//!
//! Predictor and corrector on all poles at once: a step is taken only where every pole stays far nearer to its own
//! prediction than to any other pole, so branches cannot be swapped, and where the curve between two rows (cubic Hermite,
//! from the exact direction of motion at both ends) stays within a fraction of a pixel of its chord.
//! Real poles stay exactly real; of a complex pair only the upper one is carried.

use super::system::System;
use super::view::Pixels;
use crate::numerics::magnitude;
use alloc::vec::Vec;
use nalgebra::Complex;

/// Newton steps for one pole after a good prediction; two or three are the rule.
const NEWTON_CAP: usize = 12;

/// Rows on one stretch before giving up: a hundred times what ordinary loops need.
const ROW_CAP: usize = 20_000;

/// A pole may end up this far from its prediction, as a part of the distance to the nearest other pole.
const DRIFT: f64 = 0.15;

/// Chord to curve, in pixels of the default view; a quarter is promised.
const SAGITTA: f64 = 0.08;

/// The smallest exponent of an approach: at order 40 forty poles may meet.
const SLOWEST_APPROACH: f64 = 0.02;

/// |ln τ| from which a meeting of several poles may be joined: farther away the terms of higher order can hide in the
/// motion at one point.
const NEAR_MEETING: f64 = 2.5;

/// |ln τ| from which the way to an end is not looked at halfway any more: there rounding decides what is found.
const VERY_NEAR_MEETING: f64 = 10.0;

/// The smallest step in ln τ: f64 cannot tell smaller ones apart.
const SMALLEST_STEP: f64 = 1e-15;

/// The largest step in ln τ while a pole is in the picture: keeps the knob readable by interpolation between two rows.
const LARGEST_STEP: f64 = 0.7;

/// The largest step once every moving pole is out of it, or at its end.
const LARGEST_STEP_OUTSIDE: f64 = 3.0;

/// Beyond this |ln τ| an end at knob 0 or infinity is joined even where the prediction is poor: the knob leaves the range
/// of f64. At other ends that is so where f64 cannot tell the knob from the end's.
const LOG_CAP: f64 = 600.0;

/// Where poles meet.
#[derive(Clone, Copy, Debug)]
pub(super) struct Cluster {
    /// In the closed upper half plane; on the real axis with imaginary part exactly 0.
    pub(super) s: Complex<f64>,
    /// How many poles meet.
    pub(super) multiplicity: usize,
    /// Where two poles only just miss each other, the side to which they turn: the sign of [`super::Meeting::miss`]; 0
    /// where they meet.
    pub(super) turn: f64,
}

/// One end of a stretch.
#[derive(Clone, Debug)]
pub(super) struct End {
    /// The knob: 0, a value where poles meet or vanish, or infinity.
    pub(super) knob: f64,
    /// Where poles meet; at 0 and infinity every pole's or zero's place, simple ones included.
    pub(super) clusters: Vec<Cluster>,
    /// True where poles without a cluster keep a finite place (not at 0 and infinity).
    pub(super) others_stay: bool,
    /// How many poles are at infinity there.
    pub(super) at_infinity: usize,
}

/// A stretch of the knob between two ends, with the number of real poles in it.
#[derive(Clone, Debug)]
pub(super) struct Stretch {
    /// The end nearer to zero.
    pub(super) inner: End,
    /// The end farther from zero.
    pub(super) outer: End,
    /// Moving poles on the real axis.
    pub(super) real: usize,
    /// Knob values inside at which a row is wanted.
    pub(super) stops: Vec<f64>,
}

/// One carried pole.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Carried {
    /// Where it is; on the real axis or in the upper half plane.
    pub(super) s: Complex<f64>,
    /// ds/dv of the stretch's parameter v.
    velocity: Complex<f64>,
}

/// All carried poles at one knob value.
#[derive(Clone, Debug)]
pub(super) struct Row {
    /// The knob.
    pub(super) knob: f64,
    v: f64,
    /// The poles, in an order kept along the stretch.
    pub(super) poles: Vec<Carried>,
}

/// Where a carried pole is at an end.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Arrival {
    /// In the cluster of that number.
    Cluster(usize),
    /// At a simple place.
    Place(Complex<f64>),
    /// At infinity.
    Infinity,
}

/// A tracked stretch.
#[derive(Clone, Debug)]
pub(super) struct Track {
    /// Rows with growing knob.
    pub(super) rows: Vec<Row>,
    /// What each carried pole does at the inner end.
    pub(super) inner: Vec<Arrival>,
    /// What each carried pole does at the outer end.
    pub(super) outer: Vec<Arrival>,
}

/// Which way along a stretch.
#[derive(Clone, Copy, PartialEq)]
enum Way {
    Inward,
    Outward,
}

/// The tracking could not be finished within its caps.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Lost;

/// Follows one stretch in both directions from its middle.
///
/// # Errors
/// [`Lost`] when a cap is met; nothing uncertain is returned.
pub(super) fn track(
    system: &System,
    stretch: &Stretch,
    pixels: &Pixels,
    first: &[Complex<f64>],
) -> Result<Track, Lost> {
    let tracker = Tracker { system, stretch, pixels, typical: system.typical_knob() };
    let start = tracker.first_row(first)?;
    let (mut rows, inner) = tracker.run(&start, Way::Inward)?;
    rows.reverse();
    let (more, outer) = tracker.run(&start, Way::Outward)?;
    rows.push(start);
    rows.extend(more);
    Ok(Track { rows, inner, outer })
}

/// The knob in the middle of a stretch, where the first row is taken.
pub(super) fn middle(system: &System, stretch: &Stretch) -> f64 {
    Parameter { inner: stretch.inner.knob, outer: stretch.outer.knob, typical: system.typical_knob() }.knob(0.0)
}

/// The parameter v = ln τ of a stretch (a, b): τ = (q − a)/(b − q); for b = ∞, τ = (q − a)/a, or q/typical for a = 0.
/// Near a meeting of m poles their distance from it goes like e^(v/m): the tracking slows down by itself.
struct Parameter {
    inner: f64,
    outer: f64,
    typical: f64,
}

impl Parameter {
    fn unit(&self) -> f64 {
        if self.inner > 0.0 { self.inner } else { self.typical }
    }

    fn knob(&self, v: f64) -> f64 {
        let tau = libm::exp(v);
        if self.outer.is_finite() {
            // Written so that neither end is lost to cancellation.
            if tau < 1.0 {
                self.inner + (self.outer - self.inner) * (tau / (1.0 + tau))
            } else {
                self.outer - (self.outer - self.inner) / (1.0 + tau)
            }
        } else {
            self.inner + self.unit() * tau
        }
    }

    fn at(&self, knob: f64) -> f64 {
        if self.outer.is_finite() {
            libm::log((knob - self.inner) / (self.outer - knob))
        } else {
            libm::log((knob - self.inner) / self.unit())
        }
    }

    /// dq/dv.
    fn speed(&self, v: f64) -> f64 {
        let tau = libm::exp(v);
        if self.outer.is_finite() {
            (self.outer - self.inner) * tau / ((1.0 + tau) * (1.0 + tau))
        } else {
            self.unit() * tau
        }
    }
}

struct Tracker<'a> {
    system: &'a System,
    stretch: &'a Stretch,
    pixels: &'a Pixels,
    typical: f64,
}

impl Tracker<'_> {
    fn parameter(&self) -> Parameter {
        Parameter { inner: self.stretch.inner.knob, outer: self.stretch.outer.knob, typical: self.typical }
    }

    /// The first row from uncertified approximations of all poles.
    fn first_row(&self, approximations: &[Complex<f64>]) -> Result<Row, Lost> {
        let knob = self.parameter().knob(0.0);
        let mut s = approximations.to_vec();
        simultaneous(self.system, knob, &mut s)?;
        // The exact count of real poles says how many belong on the axis.
        s.sort_by(|a, b| (libm::fabs(a.im) / magnitude(*a)).total_cmp(&(libm::fabs(b.im) / magnitude(*b))));
        let real = self.stretch.real;
        let mut carried: Vec<Complex<f64>> = s[..real].iter().map(|z| Complex::new(z.re, 0.0)).collect();
        carried.extend(s[real..].iter().filter(|z| z.im > 0.0));
        if real + 2 * (carried.len() - real) != s.len() {
            return Err(Lost);
        }
        let poles = carried
            .iter()
            .map(|z| self.corrected(*z, *z, f64::INFINITY, 0.0))
            .collect::<Option<Vec<_>>>()
            .ok_or(Lost)?;
        Ok(Row { knob, v: 0.0, poles })
    }

    /// Newton's iteration for one pole from a prediction; None where it leaves the allowance or does not settle.
    fn corrected(&self, start: Complex<f64>, predicted: Complex<f64>, allowance: f64, v: f64) -> Option<Carried> {
        let parameter = self.parameter();
        let knob = parameter.knob(v);
        let real = start.im == 0.0;
        let mut s = predicted;
        for _ in 0..NEWTON_CAP {
            let newton = self.system.newton(s, knob)?;
            s -= newton.correction;
            if real {
                s.im = 0.0;
            }
            if magnitude(s - predicted) > allowance {
                return None;
            }
            let step = magnitude(newton.correction);
            if step <= newton.floor.max(1e-13 * magnitude(s)) {
                let mut velocity = newton.motion * (parameter.speed(v) / knob);
                if real {
                    velocity.im = 0.0;
                }
                return Some(Carried { s, velocity });
            }
        }
        None
    }

    /// Rows from `start` to one end, and what each pole does there.
    fn run(&self, start: &Row, way: Way) -> Result<(Vec<Row>, Vec<Arrival>), Lost> {
        let mut rows: Vec<Row> = Vec::new();
        let mut stops: Vec<f64> = self.stretch.stops.clone();
        let here = |knob: f64| if way == Way::Inward { knob < start.knob } else { knob > start.knob };
        stops.retain(|knob| here(*knob));
        // The next stop is the last of the list.
        stops.sort_by(|a, b| if way == Way::Inward { a.total_cmp(b) } else { b.total_cmp(a) });
        let mut step = 0.25;
        while rows.len() < ROW_CAP {
            let last = rows.last().unwrap_or(start);
            if stops.is_empty()
                && let Some(arrivals) = self.arrivals(last, way)
            {
                return Ok((rows, arrivals));
            }
            let signed = |h: f64| if way == Way::Inward { -h } else { h };
            let mut v = last.v + signed(step);
            let mut stop = None;
            if let Some(knob) = stops.last() {
                let at = self.parameter().at(*knob);
                if (at - last.v).abs() <= step {
                    v = at;
                    stop = Some(*knob);
                }
            }
            match self.step(last, v) {
                Some((mut row, ease)) => {
                    if let Some(knob) = stop {
                        row.knob = knob;
                        stops.pop();
                    }
                    rows.push(row);
                    step = (step * ease).min(self.largest_step(rows.last().unwrap_or(start)));
                }
                None => step *= 0.4,
            }
            if step < SMALLEST_STEP * (1.0 + v.abs()) {
                return Err(Lost);
            }
        }
        Err(Lost)
    }

    /// How far the next step may go at the most.
    fn largest_step(&self, row: &Row) -> f64 {
        let moving = |pole: &Carried| magnitude(pole.velocity) > 1e-3 * magnitude(pole.s);
        let seen = |pole: &Carried| moving(pole) && self.pixels.remoteness(pole.s) == 0.0;
        if row.poles.iter().any(seen) { LARGEST_STEP } else { LARGEST_STEP_OUTSIDE }
    }

    /// One step to v: the new row and by how much the next step may grow. None where the step was too bold.
    fn step(&self, from: &Row, v: f64) -> Option<(Row, f64)> {
        let h = v - from.v;
        let predictions: Vec<Complex<f64>> = from.poles.iter().map(|pole| pole.s + pole.velocity * h).collect();
        let before: Vec<Complex<f64>> = from.poles.iter().map(|pole| pole.s).collect();
        let mut poles = Vec::with_capacity(from.poles.len());
        let mut worst: f64 = 0.01;
        for (k, pole) in from.poles.iter().enumerate() {
            let predicted = predictions[k];
            // Both where the poles are and where they are thought to go: no two of them can end up in the same place.
            let room = nearest_other(&before, k).min(nearest_other(&predictions, k));
            let next = self.corrected(pole.s, predicted, DRIFT * room, v)?;
            // A complex pole never crosses to the lower half plane inside of a stretch.
            if (pole.s.im > 0.0) != (next.s.im > 0.0) {
                return None;
            }
            let drift = magnitude(next.s - predicted) / (DRIFT * room);
            let sagitta = self.pixels.sagitta(pole.s, next.s, pole.velocity * h, next.velocity * h) / SAGITTA;
            if sagitta > 1.6 {
                return None;
            }
            worst = worst.max(sagitta).max(drift);
            poles.push(next);
        }
        // Both drift and sagitta grow with the square of the step.
        let ease = (0.85 / libm::sqrt(worst)).clamp(0.3, 2.0);
        Some((Row { knob: self.parameter().knob(v), v, poles }, ease))
    }

    /// |ln τ| beyond which an end is joined in any case.
    fn log_cap(&self, way: Way) -> f64 {
        let Parameter { inner, outer, .. } = self.parameter();
        let end = if way == Way::Inward { inner } else { outer };
        if end == 0.0 || end.is_infinite() {
            return LOG_CAP;
        }
        let width = if outer.is_finite() { outer - inner } else { inner };
        libm::log(width / (8.0 * f64::EPSILON * end)).max(0.0)
    }

    /// Whether the end can be joined to this row by straight chords; then how.
    fn arrivals(&self, row: &Row, way: Way) -> Option<Vec<Arrival>> {
        let end = if way == Way::Inward { &self.stretch.inner } else { &self.stretch.outer };
        let forced = row.v.abs() > self.log_cap(way);
        let mut arrivals: Vec<Option<Arrival>> = alloc::vec![None; row.poles.len()];
        self.send_to_infinity(row, end, forced, &mut arrivals)?;
        for (number, cluster) in end.clusters.iter().enumerate() {
            self.gather(row, way, (number, cluster), forced, &mut arrivals)?;
        }
        for (k, arrival) in arrivals.iter_mut().enumerate().filter(|(_, a)| a.is_none()) {
            if !end.others_stay {
                return None;
            }
            *arrival = Some(Arrival::Place(self.settled(row, k, end.knob, forced)?));
        }
        arrivals.into_iter().collect()
    }

    /// The farthest poles go to infinity, once they are far out of the picture.
    fn send_to_infinity(&self, row: &Row, end: &End, forced: bool, arrivals: &mut [Option<Arrival>]) -> Option<()> {
        let mut order: Vec<usize> = (0..row.poles.len()).collect();
        let far = |k: &usize| self.pixels.remoteness(row.poles[*k].s);
        order.sort_by(|a, b| far(b).total_cmp(&far(a)));
        let mut left = end.at_infinity;
        for k in order {
            if left == 0 {
                break;
            }
            let weight = if row.poles[k].s.im > 0.0 { 2 } else { 1 };
            if weight > left {
                continue;
            }
            if !forced && !self.pixels.is_far(row.poles[k].s) {
                return None;
            }
            arrivals[k] = Some(Arrival::Infinity);
            left -= weight;
        }
        (left == 0).then_some(())
    }

    /// Assigns the poles nearest to a cluster to it, where their straight prediction hits it well enough.
    fn gather(
        &self,
        row: &Row,
        way: Way,
        cluster: (usize, &Cluster),
        forced: bool,
        arrivals: &mut [Option<Arrival>],
    ) -> Option<()> {
        let (number, Cluster { s, multiplicity, .. }) = cluster;
        let mut order: Vec<usize> = (0..row.poles.len()).filter(|k| arrivals[*k].is_none()).collect();
        let distance = |k: usize| magnitude(row.poles[k].s - s);
        order.sort_by(|a, b| distance(*a).total_cmp(&distance(*b)));
        let mut left = *multiplicity;
        let mut farthest: f64 = 0.0;
        for k in order {
            if left == 0 {
                // The next pole must be clearly outside.
                return (forced || distance(k) > 2.0 * farthest).then_some(());
            }
            // A pair meets a point of the real axis with both poles.
            let weight = if s.im == 0.0 && row.poles[k].s.im > 0.0 { 2 } else { 1 };
            if weight > left {
                return None;
            }
            if !forced && !self.hits(row, way, k, *s, *multiplicity) {
                return None;
            }
            farthest = farthest.max(distance(k));
            arrivals[k] = Some(Arrival::Cluster(number));
            left -= weight;
        }
        (left == 0).then_some(())
    }

    /// Near a meeting of m poles s − s* ~ (q − q*)^α, so that s − (q − q*)·ds/dq/α points at s*. For an affine knob
    /// α = 1/m; otherwise any fraction may occur, and is read off the motion itself.
    fn hits(&self, row: &Row, way: Way, k: usize, s: Complex<f64>, multiplicity: usize) -> bool {
        let pole = row.poles[k];
        let chord = s - pole.s;
        let distance = magnitude(chord);
        if distance == 0.0 {
            return true;
        }
        // (q − q*)·ds/dq, or −q·ds/dq towards infinity: dv is d ln|q − q*| near the end.
        let end_speed = self.end_motion(row, way, pole);
        let exponent = match self.system {
            System::Factored { .. } => 1.0 / multiplicity as f64,
            System::Expanded { .. } => -(end_speed / chord).re,
        };
        if exponent < SLOWEST_APPROACH || (multiplicity > 1 && row.v.abs() < NEAR_MEETING) {
            return false;
        }
        // The parabola that leaves with this velocity and ends in s.
        let out = -end_speed / exponent;
        let bend = self.pixels.sagitta(pole.s, s, out, chord * 2.0 - out);
        magnitude(out - chord) <= 0.2 * distance
            && bend <= 0.8 * SAGITTA
            && (row.v.abs() > VERY_NEAR_MEETING || self.halfway_is_near(row, way, pole.s, s, exponent))
    }

    /// Whether the pole halfway to the end is where the chord says: terms of higher order can hide in the motion at one
    /// point.
    fn halfway_is_near(&self, row: &Row, way: Way, from: Complex<f64>, to: Complex<f64>, exponent: f64) -> bool {
        let Parameter { inner, outer, .. } = self.parameter();
        // s − s* halves where q − q* (or 1/q, towards infinity) falls by this factor.
        let factor = libm::pow(0.5, 1.0 / exponent);
        let knob = match way {
            Way::Inward => inner + (row.knob - inner) * factor,
            Way::Outward if outer.is_finite() => outer + (row.knob - outer) * factor,
            Way::Outward => row.knob / factor,
        };
        let middle = (from + to) * 0.5;
        let mut s = middle;
        for _ in 0..NEWTON_CAP {
            let Some(newton) = self.system.newton(s, knob) else { return false };
            s -= newton.correction;
            if magnitude(newton.correction) <= newton.floor.max(1e-9 * magnitude(s)) {
                break;
            }
        }
        magnitude(s - middle) <= 0.25 * magnitude(to - from) && self.pixels.off_chord(from, to, s) <= 1.6 * SAGITTA
    }

    /// ds/d ln|q − q*| at the end the row is heading for.
    fn end_motion(&self, row: &Row, way: Way, pole: Carried) -> Complex<f64> {
        let parameter = self.parameter();
        let by_knob = pole.velocity / parameter.speed(row.v);
        match way {
            Way::Inward => by_knob * (row.knob - parameter.inner),
            Way::Outward if parameter.outer.is_finite() => by_knob * (row.knob - parameter.outer),
            Way::Outward => -by_knob * row.knob,
        }
    }

    /// The place of a pole that neither meets another nor vanishes, at the end's knob.
    fn settled(&self, row: &Row, k: usize, knob: f64, forced: bool) -> Option<Complex<f64>> {
        let pole = row.poles[k];
        let by_knob = pole.velocity / self.parameter().speed(row.v);
        let predicted = pole.s + by_knob * (knob - row.knob);
        let places: Vec<Complex<f64>> = row.poles.iter().map(|pole| pole.s).collect();
        let room = nearest_other(&places, k);
        let mut s = predicted;
        for _ in 0..NEWTON_CAP {
            let newton = self.system.newton(s, knob)?;
            s -= newton.correction;
            if pole.s.im == 0.0 {
                s.im = 0.0;
            }
            if magnitude(s - predicted) > DRIFT * room {
                return None;
            }
            if magnitude(newton.correction) <= newton.floor.max(1e-13 * magnitude(s)) {
                let motion = newton.motion * ((knob - row.knob) / knob);
                let bend = self.pixels.sagitta(pole.s, s, by_knob * (knob - row.knob), motion);
                return (forced || bend <= 1.6 * SAGITTA).then_some(s);
            }
        }
        None
    }
}

/// The distance to the nearest other pole, mirrored ones included.
fn nearest_other(places: &[Complex<f64>], k: usize) -> f64 {
    let s = places[k];
    let own_mirror = if s.im == 0.0 { f64::INFINITY } else { 2.0 * s.im.abs() };
    places.iter().enumerate().filter(|(j, _)| *j != k).fold(own_mirror, |nearest, (_, other)| {
        // In the closed upper half plane the mirrored pole is never the nearer one.
        nearest.min(magnitude(other - s))
    })
}

/// Aberth's simultaneous iteration on the system itself, until every pole is at its rounding floor.
fn simultaneous(system: &System, knob: f64, s: &mut [Complex<f64>]) -> Result<(), Lost> {
    /// Sweeps before the start is called lost.
    const SWEEP_CAP: usize = 60;
    for _ in 0..SWEEP_CAP {
        let mut settled = true;
        for i in 0..s.len() {
            let Some(newton) = system.newton(s[i], knob) else {
                // On a pole of the open loop: step aside.
                let aside = magnitude(s[i]).max(f64::MIN_POSITIVE) * 1e-9;
                s[i] += Complex::new(aside, aside);
                settled = false;
                continue;
            };
            let repulsion: Complex<f64> =
                (0..s.len()).filter(|j| *j != i && s[*j] != s[i]).map(|j| Complex::new(1.0, 0.0) / (s[i] - s[j])).sum();
            let step = newton.correction / (Complex::new(1.0, 0.0) - newton.correction * repulsion);
            if !(step.re.is_finite() && step.im.is_finite()) {
                return Err(Lost);
            }
            s[i] -= step;
            settled &= magnitude(newton.correction) <= newton.floor.max(1e-13 * magnitude(s[i]));
        }
        if settled {
            return Ok(());
        }
    }
    Err(Lost)
}
