//! Tracking the moving poles over one stretch of the knob in which none of them meet.
//!
//! Predictor and corrector on all poles at once: a step is taken only where every pole stays far nearer to its own
//! prediction than to any other pole, so branches cannot be swapped, and where the curve between two rows (cubic Hermite,
//! from the exact direction of motion at both ends) stays within a fraction of a pixel of its chord.
//! Real poles stay exactly real; of a complex pair only the upper one is carried.

use super::position::{Position, ROUNDING};
use super::stretch::{Arrival, Carried, Lost, Parameter, Row, Stretch, Track, Way};
use super::system::{Newton, System};
use super::view::Pixels;
use crate::numerics::magnitude;
use alloc::vec::Vec;
use nalgebra::Complex;

/// Newton steps for one pole after a good prediction; two or three are the rule.
pub(super) const NEWTON_CAP: usize = 12;

/// Rows on one stretch before giving up: a hundred times what ordinary loops need.
const ROW_CAP: usize = 20_000;

/// A pole may end up this far from its prediction, as a part of the distance to the nearest other pole.
pub(super) const DRIFT: f64 = 0.15;

/// A correction below this part of the distance to what is near is the last one.
const SETTLED: f64 = 1e-9;

/// Chord to curve, in pixels of the default view; a quarter is promised.
pub(super) const SAGITTA: f64 = 0.08;

/// The smallest step in ln τ: f64 cannot tell smaller ones apart.
const SMALLEST_STEP: f64 = 1e-15;

/// Parts of the knob by which a near miss is jumped that no step can follow: far below a pixel.
const LEAPS: [f64; 4] = [1e-13, 1e-12, 1e-11, 1e-10];

/// The largest step in ln τ while a pole is in the picture: keeps the knob readable by interpolation between two rows.
const LARGEST_STEP: f64 = 0.7;

/// The largest step once every moving pole is out of it, or at its end.
const LARGEST_STEP_OUTSIDE: f64 = 3.0;

/// Follows one stretch in both directions from its middle.
///
/// # Errors
/// [`Lost`] when a cap is met; nothing uncertain is returned.
pub(super) fn track(system: &System, stretch: &Stretch, pixels: &Pixels, first: &[Position]) -> Result<Track, Lost> {
    let tracker = Tracker { system, stretch, pixels, typical: system.typical_knob() };
    let start = tracker.row(0.0, first)?;
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

/// What stays the same along a stretch.
pub(super) struct Tracker<'a> {
    pub(super) system: &'a System,
    pub(super) stretch: &'a Stretch,
    pub(super) pixels: &'a Pixels,
    typical: f64,
}

impl Tracker<'_> {
    pub(super) fn parameter(&self) -> Parameter {
        Parameter { inner: self.stretch.inner.knob, outer: self.stretch.outer.knob, typical: self.typical }
    }

    /// A row from uncertified approximations of all poles.
    fn row(&self, v: f64, approximations: &[Position]) -> Result<Row, Lost> {
        let knob = self.parameter().knob(v);
        let mut s = approximations.to_vec();
        simultaneous(self.system, knob, &mut s)?;
        // The exact count of real poles says how many belong on the axis.
        let above_rounding = |z: &Position| {
            let floor = self.system.newton(*z, knob).map_or(0.0, |newton| newton.floor);
            libm::fabs(z.rounded().im) / floor.max(ROUNDING * magnitude(z.rounded()))
        };
        s.sort_by(|a, b| above_rounding(a).total_cmp(&above_rounding(b)));
        let real = self.stretch.real;
        let mut carried: Vec<Position> = s[..real].iter().map(|z| z.on_real_axis()).collect();
        carried.extend(s[real..].iter().filter(|z| z.rounded().im > 0.0));
        if real + 2 * (carried.len() - real) != s.len() {
            return Err(Lost);
        }
        let pole = |k: usize| self.corrected(carried[k], nearest_other(&carried, k), v);
        let poles = (0..carried.len()).map(pole).collect::<Option<Vec<_>>>().ok_or(Lost)?;
        Ok(Row { knob, v, poles })
    }

    /// One pole at v, from a prediction with that much room around it.
    fn corrected(&self, predicted: Position, room: f64, v: f64) -> Option<Carried> {
        let parameter = self.parameter();
        let knob = parameter.knob(v);
        let (s, newton) = settled(self.system, predicted, room, knob)?;
        let mut velocity = newton.motion * (parameter.speed(v) / knob);
        if s.is_real() {
            velocity.im = 0.0;
        }
        Some(Carried { s, velocity })
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
                let row = self.leap(rows.last().unwrap_or(start), way).ok_or(Lost)?;
                stops.retain(|knob| if way == Way::Inward { *knob < row.knob } else { *knob > row.knob });
                step = (row.v - rows.last().unwrap_or(start).v).abs();
                rows.push(row);
            }
        }
        Err(Lost)
    }

    /// Across a near miss in which poles change faster than f64 can follow. Real poles keep their order there, and complex
    /// ones have only each other to be taken for.
    fn leap(&self, from: &Row, way: Way) -> Option<Row> {
        LEAPS.iter().find_map(|leap| {
            let knob = from.knob * if way == Way::Inward { 1.0 - leap } else { 1.0 + leap };
            if knob <= self.stretch.inner.knob || knob >= self.stretch.outer.knob {
                return None;
            }
            let v = self.parameter().at(knob);
            let (before, predictions) = predicted(from, v - from.v);
            let mirrored = predictions.iter().filter(|s| !s.is_real()).map(|s| s.mirrored());
            let all: Vec<Position> = predictions.iter().copied().chain(mirrored).collect();
            let mut row = self.row(v, &all).ok()?;
            let (real, complex): (Vec<Carried>, Vec<Carried>) = row.poles.iter().partition(|pole| pole.s.is_real());
            let mut real = real.into_iter();
            let off_axis = |places: &[Position]| places.iter().filter(|s| !s.is_real()).copied().collect::<Vec<_>>();
            let (complex_before, complex_ahead) = (off_axis(&before), off_axis(&predictions));
            let mut next = |k: usize| {
                if before[k].is_real() {
                    return real.next();
                }
                let away = |pole: &&Carried| magnitude(pole.s.minus(predictions[k]));
                let others = distances(&complex_before, before[k]).chain(distances(&complex_ahead, predictions[k]));
                let room = others.fold(f64::INFINITY, f64::min);
                complex.iter().min_by(|a, b| away(a).total_cmp(&away(b))).filter(|p| away(p) <= DRIFT * room).copied()
            };
            row.poles = (0..before.len()).map(&mut next).collect::<Option<Vec<Carried>>>()?;
            keep_order(&before, &mut row.poles);
            Some(row)
        })
    }

    /// How far the next step may go at the most.
    fn largest_step(&self, row: &Row) -> f64 {
        let moving = |pole: &Carried| magnitude(pole.velocity) > 1e-3 * magnitude(pole.s.rounded());
        let seen = |pole: &Carried| moving(pole) && self.pixels.remoteness(pole.s.rounded()) == 0.0;
        if row.poles.iter().any(seen) { LARGEST_STEP } else { LARGEST_STEP_OUTSIDE }
    }

    /// One step to v: the new row and by how much the next step may grow. None where the step was too bold.
    fn step(&self, from: &Row, v: f64) -> Option<(Row, f64)> {
        let h = v - from.v;
        let (before, predictions) = predicted(from, h);
        let mut poles = Vec::with_capacity(from.poles.len());
        let mut worst: f64 = 0.01;
        for (k, predicted) in predictions.iter().enumerate() {
            // Both where the poles are and where they are thought to go: no two of them can end up in the same place.
            let room = nearest_other(&before, k).min(nearest_other(&predictions, k));
            let next = self.corrected(*predicted, room, v)?;
            // A complex pole never crosses to the lower half plane inside of a stretch.
            if !before[k].is_real() && next.s.rounded().im <= 0.0 {
                return None;
            }
            worst = worst.max(magnitude(next.s.minus(*predicted)) / (DRIFT * room));
            poles.push(next);
        }
        keep_order(&before, &mut poles);
        for (pole, next) in from.poles.iter().zip(&poles) {
            let (out, into) = (pole.velocity * h, next.velocity * h);
            let sagitta = self.pixels.sagitta(pole.s.rounded(), next.s.rounded(), out, into) / SAGITTA;
            if sagitta > 1.6 {
                return None;
            }
            worst = worst.max(sagitta);
        }
        // Both drift and sagitta grow with the square of the step.
        let ease = (0.85 / libm::sqrt(worst)).clamp(0.3, 2.0);
        Some((Row { knob: self.parameter().knob(v), v, poles }, ease))
    }
}

/// Where the poles of a row are, and where they would be a step later by their velocities.
fn predicted(from: &Row, h: f64) -> (Vec<Position>, Vec<Position>) {
    from.poles.iter().map(|pole| (pole.s, pole.s.plus(pole.velocity * h))).unzip()
}

/// Real poles that do not meet keep their order on the axis: where a step went past the moment in which one pushes the
/// other away, each was taken for the other.
fn keep_order(before: &[Position], after: &mut [Carried]) {
    let mut ranks: Vec<usize> = (0..before.len()).filter(|k| before[*k].is_real()).collect();
    ranks.sort_by(|a, b| before[*a].minus(before[*b]).re.total_cmp(&0.0));
    let mut real: Vec<Carried> = ranks.iter().map(|k| after[*k]).collect();
    real.sort_by(|a, b| a.s.minus(b.s).re.total_cmp(&0.0));
    for (k, pole) in ranks.into_iter().zip(real) {
        after[k] = pole;
    }
}

/// Newton's iteration for one pole from a prediction with that much room around it; None where it leaves its part of the
/// room or does not settle. From the real axis it does not leave it.
pub(super) fn settled(system: &System, predicted: Position, room: f64, knob: f64) -> Option<(Position, Newton)> {
    let mut s = predicted;
    for _ in 0..NEWTON_CAP {
        let newton = system.newton(s, knob)?;
        s = s.plus(-newton.correction);
        if predicted.is_real() {
            s = s.on_real_axis();
        }
        if magnitude(s.minus(predicted)) > DRIFT * room {
            return None;
        }
        // The next one would be of the order of the square of this one, in parts of the distance to what is near: another
        // pole of the closed loop, or, as the motion tells, one of the open loop or a zero.
        let scale = room.min(magnitude(newton.motion));
        let enough = newton.floor.max(SETTLED * scale).max(4.0 * ROUNDING * magnitude(s.rounded()));
        if magnitude(newton.correction) <= enough {
            return Some((s, newton));
        }
    }
    None
}

/// The distance to the nearest other pole, mirrored ones included.
pub(super) fn nearest_other(places: &[Position], k: usize) -> f64 {
    let s = places[k];
    let own_mirror = if s.is_real() { f64::INFINITY } else { 2.0 * s.rounded().im.abs() };
    places.iter().enumerate().filter(|(j, _)| *j != k).fold(own_mirror, |nearest, (_, other)| {
        // In the closed upper half plane the mirrored pole is never the nearer one.
        nearest.min(magnitude(other.minus(s)))
    })
}

/// The distances of a place from the others.
fn distances(places: &[Position], s: Position) -> impl Iterator<Item = f64> {
    places.iter().filter(move |other| **other != s).map(move |other| magnitude(other.minus(s)))
}

/// Aberth's simultaneous iteration on the system itself, until every pole is at its rounding floor.
fn simultaneous(system: &System, knob: f64, s: &mut [Position]) -> Result<(), Lost> {
    /// Sweeps before the start is called lost.
    const SWEEP_CAP: usize = 60;
    for _ in 0..SWEEP_CAP {
        let mut settled = true;
        for i in 0..s.len() {
            let Some(newton) = system.newton(s[i], knob) else {
                // On a pole of the open loop: step aside.
                let aside = magnitude(s[i].rounded()).max(f64::MIN_POSITIVE) * 1e-9;
                s[i] = s[i].plus(Complex::new(aside, aside));
                settled = false;
                continue;
            };
            let ways = (0..s.len()).filter(|j| *j != i).map(|j| s[i].minus(s[j]));
            let repulsion: Complex<f64> =
                ways.filter(|way| magnitude(*way) > 0.0).map(|way| Complex::new(1.0, 0.0) / way).sum();
            let step = newton.correction / (Complex::new(1.0, 0.0) - newton.correction * repulsion);
            if !(step.re.is_finite() && step.im.is_finite()) {
                return Err(Lost);
            }
            s[i] = s[i].plus(-step);
            let enough = newton.floor.max(4.0 * ROUNDING * magnitude(s[i].rounded()));
            settled &= magnitude(newton.correction) <= enough;
        }
        if settled {
            return Ok(());
        }
    }
    Err(Lost)
}
