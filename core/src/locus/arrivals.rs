//! Joining the rows of a stretch to its ends: which pole arrives where.

use super::position::{Position, ROUNDING};
use super::stretch::{Arrival, Carried, Cluster, End, Parameter, Row, Way};
use super::system::System;
use super::track::{NEWTON_CAP, SAGITTA, Tracker, nearest_other, settled};
use crate::numerics::magnitude;
use alloc::vec::Vec;
use nalgebra::Complex;

/// The smallest exponent of an approach: at order 40 forty poles may meet.
const SLOWEST_APPROACH: f64 = 0.02;

/// |ln τ| from which a meeting of several poles may be joined: farther away the terms of higher order can hide in the
/// motion at one point.
const NEAR_MEETING: f64 = 2.5;

/// |ln τ| from which the way to an end is not looked at halfway any more: there rounding decides what is found.
const VERY_NEAR_MEETING: f64 = 10.0;

/// Poles that are nearer to a meeting than all others by this factor are the ones that meet.
const TAKEN: f64 = 1e3;

/// Beyond this |ln τ| an end at knob 0 or infinity is joined even where the prediction is poor: the knob leaves the range
/// of f64. At other ends that is so where f64 cannot tell the knob from the end's.
const LOG_CAP: f64 = 600.0;

impl Tracker<'_> {
    fn end(&self, way: Way) -> &End {
        if way == Way::Inward { &self.stretch.inner } else { &self.stretch.outer }
    }

    /// |ln τ| beyond which an end is joined in any case.
    fn log_cap(&self, way: Way) -> f64 {
        let Parameter { inner, outer, .. } = self.parameter();
        let end = self.end(way);
        if end.knob == 0.0 || end.knob.is_infinite() {
            return LOG_CAP;
        }
        let width = if outer.is_finite() { outer - inner } else { inner };
        libm::log(width / end.blur).max(0.0)
    }

    /// Whether the end can be joined to this row by straight chords; then how.
    pub(super) fn arrivals(&self, row: &Row, way: Way) -> Option<Vec<Arrival>> {
        let end = self.end(way);
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
            *arrival = Some(Arrival::Place(self.place(row, k, end.knob, forced)?));
        }
        arrivals.into_iter().collect()
    }

    /// The farthest poles go to infinity, once they are far out of the picture.
    fn send_to_infinity(&self, row: &Row, end: &End, forced: bool, arrivals: &mut [Option<Arrival>]) -> Option<()> {
        let mut order: Vec<usize> = (0..row.poles.len()).collect();
        let far = |k: &usize| self.pixels.remoteness(row.poles[*k].s.rounded());
        order.sort_by(|a, b| far(b).total_cmp(&far(a)));
        let mut left = end.at_infinity;
        for k in order {
            if left == 0 {
                break;
            }
            let weight = if row.poles[k].s.is_real() { 1 } else { 2 };
            if weight > left {
                continue;
            }
            if !forced && !self.pixels.is_far(row.poles[k].s.rounded()) {
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
        let distance = |k: usize| magnitude(s.minus(row.poles[k].s));
        let nearest = |taken: bool| {
            let mut found: Vec<usize> = (0..row.poles.len()).filter(|k| arrivals[*k].is_some() == taken).collect();
            found.sort_by(|a, b| distance(*a).total_cmp(&distance(*b)));
            found
        };
        let order = nearest(false);
        // Where the same poles meet twice within what f64 tells of the knob, the first meeting has taken them.
        let far_from = |other: usize| order.first().is_none_or(|own| distance(*own) > TAKEN * distance(other));
        let taken = nearest(true).first().is_some_and(|other| far_from(*other));
        if number > 0 && self.end(way).others_stay && taken {
            return Some(());
        }
        let mut left = *multiplicity;
        let mut farthest: f64 = 0.0;
        for k in order {
            if left == 0 {
                // The next pole must be clearly outside.
                return (forced || distance(k) > 2.0 * farthest).then_some(());
            }
            // A pair meets a point of the real axis with both poles.
            let weight = if s.is_real() && !row.poles[k].s.is_real() { 2 } else { 1 };
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
    fn hits(&self, row: &Row, way: Way, k: usize, s: Position, multiplicity: usize) -> bool {
        let pole = row.poles[k];
        let chord = s.minus(pole.s);
        let distance = magnitude(chord);
        let size = magnitude(pole.s.rounded());
        // What is left may be rounding alone.
        let floor = || self.system.newton(pole.s, row.knob).map_or(0.0, |newton| newton.floor);
        if distance <= 16.0 * ROUNDING * size || (distance <= 1e-6 * size && distance <= 4.0 * floor()) {
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
        let bend = self.pixels.sagitta(pole.s.rounded(), s.rounded(), out, chord * 2.0 - out);
        magnitude(out - chord) <= 0.2 * distance
            && bend <= 0.8 * SAGITTA
            && (row.v.abs() > VERY_NEAR_MEETING || self.halfway_is_near(row, way, pole.s, s, exponent))
    }

    /// Whether the pole halfway to the end is where the chord says: terms of higher order can hide in the motion at one
    /// point.
    fn halfway_is_near(&self, row: &Row, way: Way, from: Position, to: Position, exponent: f64) -> bool {
        let Parameter { inner, outer, .. } = self.parameter();
        // s − s* halves where q − q* (or 1/q, towards infinity) falls by this factor.
        let factor = libm::pow(0.5, 1.0 / exponent);
        let knob = match way {
            Way::Inward => inner + (row.knob - inner) * factor,
            Way::Outward if outer.is_finite() => outer + (row.knob - outer) * factor,
            Way::Outward => row.knob / factor,
        };
        let way = to.minus(from);
        let middle = from.plus(way * 0.5);
        let mut s = middle;
        for _ in 0..NEWTON_CAP {
            let Some(newton) = self.system.newton(s, knob) else { return false };
            s = s.plus(-newton.correction);
            if magnitude(newton.correction) <= newton.floor.max(1e-6 * magnitude(way)) {
                break;
            }
        }
        magnitude(s.minus(middle)) <= 0.25 * magnitude(way)
            && self.pixels.off_chord(from.rounded(), to.rounded(), s.rounded()) <= 1.6 * SAGITTA
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
    fn place(&self, row: &Row, k: usize, knob: f64, forced: bool) -> Option<Complex<f64>> {
        let pole = row.poles[k];
        let way = pole.velocity / self.parameter().speed(row.v) * (knob - row.knob);
        let places: Vec<Position> = row.poles.iter().map(|pole| pole.s).collect();
        let (s, newton) = settled(self.system, pole.s.plus(way), nearest_other(&places, k), knob)?;
        let motion = newton.motion * ((knob - row.knob) / knob);
        let bend = self.pixels.sagitta(pole.s.rounded(), s.rounded(), way, motion);
        (forced || bend <= 1.6 * SAGITTA).then_some(s.rounded())
    }
}
