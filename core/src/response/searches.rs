//! Searches along an answer: its extremes, the first time at a level, the last time outside of a band.
//!
//! Time is halved until a stretch is dull, since bounds on the answer say that it holds nothing of interest, or simple:
//! monotone, or with one turn. Over a stretch short to a mode its Taylor expansion is bounded, over a long one its
//! envelope; so fast modes do not make small steps where only slow ones matter, and no turn is ever missed.

use super::modes::{Modes, Peaks};
use crate::numerics::magnitude;
use alloc::vec::Vec;

/// A mode is expanded over stretches of at most so many radians to each side of the middle.
const EXPANDED: f64 = 1.0;

/// Stretches looked at in one search before it ends without an answer. Ordinary answers need some hundred.
const STRETCH_CAP: usize = 60_000;

/// A stretch this short, relative to its end, is not halved any more: in f64 the phase of faster modes is blurred, and
/// the bounds themselves count.
const SHORTEST: f64 = 1e-11;

/// Extremes are right to this part of the answer's largest known value; closer ones are not told apart.
const PEAK_ERROR: f64 = 1e-13;

/// Rounding of the sum of modes, as a part of the sum of their sizes.
const ROUNDING: f64 = 1e-15;

/// No peak is looked for where the answer stays this near to its final value: nobody sees it on a record.
const SETTLED: f64 = 1e-6;

/// Evaluations for one root: chord steps need some eight, halving alone 52.
const ROOT_CAP: usize = 80;

impl Modes {
    /// The highest and the lowest value. None where the search meets its cap.
    pub fn peaks(&self) -> Option<Peaks> {
        let (start, end) = (self.start, self.final_value);
        let highest = if start > end { (start, 0.0) } else { (end, f64::INFINITY) };
        let lowest = if start < end { (start, 0.0) } else { (end, f64::INFINITY) };
        let rounding = ROUNDING * self.envelope(0.0);
        let mut extremes = Extremes { peaks: Peaks { highest, lowest }, end, rounding };
        let quiet = self.quiet_after(extremes.error().max(f64::MIN_POSITIVE));
        self.search(quiet, &mut extremes)?;
        let Peaks { highest, lowest } = extremes.peaks;
        Some(Peaks { highest: self.at_turn(highest), lowest: self.at_turn(lowest) })
    }

    /// An extreme whose value is found, moved to the turn beside it: nearer than the error of values, times still differ.
    fn at_turn(&self, (y, t): (f64, f64)) -> (f64, f64) {
        if t == 0.0 || !t.is_finite() {
            return (y, t);
        }
        let (slope, bend) = (self.slope(t), self.bend(t));
        let beyond = t - 2.0 * slope / bend;
        if !(beyond >= 0.0 && slope * self.slope(beyond) < 0.0) {
            return (y, t);
        }
        let turn = self.turn(t, beyond);
        (self.value(turn), turn)
    }

    /// The first time at which the answer, taken in the direction of its final value, is at `part` < 1 of it. None where
    /// the search meets its cap, or the final value is zero.
    pub fn first_reach(&self, part: f64) -> Option<f64> {
        let scale = self.final_value;
        if scale == 0.0 {
            return None;
        }
        if self.start / scale >= part {
            return Some(0.0);
        }
        let quiet = self.quiet_after((1.0 - part) * scale.abs());
        let mut reach = FirstReach { scale, part, found: None };
        self.search(quiet, &mut reach)?;
        // At the quiet time the level is reached but for rounding.
        Some(reach.found.unwrap_or(quiet))
    }

    /// The last time at which |y − y(∞)| is `band`, 0 where it never is more. None where the search meets its cap.
    pub fn last_outside(&self, band: f64) -> Option<f64> {
        if band <= 0.0 {
            return None;
        }
        let mut outside = LastOutside { end: self.final_value, band, found: None };
        self.search(self.quiet_after(band), &mut outside)?;
        Some(outside.found.unwrap_or(0.0))
    }

    /// Time and value of the first `count` turns at which the answer, taken in the direction of its final value, is highest.
    /// None where there are not so many before it has settled, or the search meets its cap.
    pub fn first_peaks(&self, count: usize) -> Option<Vec<(f64, f64)>> {
        let direction = self.final_value.signum();
        let seen = SETTLED * self.final_value.abs();
        let swing = Swing::Down(direction * self.start);
        let mut peaks = FirstPeaks { direction, seen, count, swing, found: Vec::with_capacity(count) };
        self.search(self.quiet_after(seen), &mut peaks)?;
        (peaks.found.len() == count).then_some(peaks.found)
    }

    /// Looks through the times from 0 to `until`. None where the cap is met.
    fn search(&self, until: f64, quest: &mut impl Quest) -> Option<()> {
        let mut stack = alloc::vec![self.over(0.0, until)];
        for _ in 0..STRETCH_CAP {
            let Some(stretch) = stack.pop() else { return Some(()) };
            if quest.is_dull(&stretch) {
                continue;
            }
            let Stretch { from, to, .. } = stretch;
            if stretch.is_monotone() {
                if quest.look(self, from, to) {
                    return Some(());
                }
            } else if to - from <= SHORTEST * to {
                if quest.take(&stretch) {
                    return Some(());
                }
            } else if stretch.has_one_turn() {
                let turn = self.turn(from, to);
                let parts =
                    if quest.later_first(None) { [(turn, to), (from, turn)] } else { [(from, turn), (turn, to)] };
                if parts.into_iter().any(|(from, to)| quest.look(self, from, to)) {
                    return Some(());
                }
            } else {
                let middle = 0.5 * (from + to);
                let halves = [self.over(from, middle), self.over(middle, to)];
                let [earlier, later] = halves;
                if quest.later_first(Some((&earlier, &later))) {
                    stack.extend([earlier, later]);
                } else {
                    stack.extend([later, earlier]);
                }
            }
        }
        None
    }

    /// Bounds over a stretch of time.
    fn over(&self, from: f64, to: f64) -> Stretch {
        let (middle, h) = (0.5 * (from + to), 0.5 * (to - from));
        let (mut y, mut slope, mut bend, mut third) = (self.final_value, 0.0, 0.0, 0.0);
        let mut long = [0.0; 3];
        for mode in self.modes.iter().filter(|mode| from < mode.dead_after) {
            let rate = mode.rate;
            if rate * h <= EXPANDED {
                let z = mode.at(middle);
                let first = z * mode.pole;
                y += z.re;
                slope += first.re;
                bend += (first * mode.pole).re;
                // Back at `from` it is larger by e^(−σh) ≤ 1 + (e − 1)·|σ|h.
                let size = magnitude(z) * (1.0 - (core::f64::consts::E - 1.0) * mode.pole.re * h);
                third += size * rate * rate * rate;
            } else {
                let size = mode.size(from);
                long[0] += size;
                long[1] += size * rate;
                long[2] += size * rate * rate;
            }
        }
        let steep = slope.abs() * h + third * h * h * h / 6.0 + long[0];
        let bow = 0.5 * bend * h * h;
        Stretch {
            from,
            to,
            low: y - steep + bow.min(0.0),
            high: y + steep + bow.max(0.0),
            slope,
            slope_error: bend.abs() * h + 0.5 * third * h * h + long[1],
            bend,
            bend_error: third * h + long[2],
        }
    }

    /// The time at which the slope passes zero on a stretch with at most one turn; an end where it does not.
    fn turn(&self, from: f64, to: f64) -> f64 {
        root_between((from, self.slope(from)), (to, self.slope(to)), |t| self.slope(t))
    }
}

/// What is known of the answer over a stretch of time.
#[derive(Clone, Copy, Debug)]
struct Stretch {
    from: f64,
    to: f64,
    /// y ≥ low.
    low: f64,
    /// y ≤ high.
    high: f64,
    /// y′ is this but for the error.
    slope: f64,
    slope_error: f64,
    /// y″ is this but for the error.
    bend: f64,
    bend_error: f64,
}

impl Stretch {
    fn is_monotone(&self) -> bool {
        self.slope.abs() > self.slope_error
    }

    fn has_one_turn(&self) -> bool {
        self.bend.abs() > self.bend_error
    }
}

/// What is searched for.
trait Quest {
    /// Whether a stretch holds nothing of interest.
    fn is_dull(&self, stretch: &Stretch) -> bool;

    /// Looks at a monotone stretch; true ends the search.
    fn look(&mut self, modes: &Modes, from: f64, to: f64) -> bool;

    /// Takes a stretch by its bounds; true ends the search.
    fn take(&mut self, stretch: &Stretch) -> bool;

    /// Whether the later of two neighbours is looked at first.
    fn later_first(&self, halves: Option<(&Stretch, &Stretch)>) -> bool;
}

struct Extremes {
    peaks: Peaks,
    end: f64,
    rounding: f64,
}

impl Extremes {
    fn error(&self) -> f64 {
        let largest = self.peaks.highest.0.abs().max(self.peaks.lowest.0.abs()).max(self.end.abs());
        (PEAK_ERROR * largest).max(self.rounding)
    }

    /// How far a stretch may reach beyond what is known.
    fn promise(&self, stretch: &Stretch) -> f64 {
        (stretch.high - self.peaks.highest.0).max(self.peaks.lowest.0 - stretch.low)
    }
}

impl Quest for Extremes {
    fn is_dull(&self, stretch: &Stretch) -> bool {
        self.promise(stretch) <= self.error()
    }

    fn look(&mut self, modes: &Modes, from: f64, to: f64) -> bool {
        for t in [from, to] {
            let y = modes.value(t);
            if y > self.peaks.highest.0 {
                self.peaks.highest = (y, t);
            }
            if y < self.peaks.lowest.0 {
                self.peaks.lowest = (y, t);
            }
        }
        false
    }

    fn take(&mut self, stretch: &Stretch) -> bool {
        if stretch.high > self.peaks.highest.0 {
            self.peaks.highest = (stretch.high, stretch.to);
        }
        if stretch.low < self.peaks.lowest.0 {
            self.peaks.lowest = (stretch.low, stretch.to);
        }
        false
    }

    fn later_first(&self, halves: Option<(&Stretch, &Stretch)>) -> bool {
        halves.is_some_and(|(earlier, later)| self.promise(later) > self.promise(earlier))
    }
}

struct FirstReach {
    scale: f64,
    part: f64,
    found: Option<f64>,
}

impl Quest for FirstReach {
    fn is_dull(&self, stretch: &Stretch) -> bool {
        (stretch.low / self.scale).max(stretch.high / self.scale) < self.part
    }

    fn look(&mut self, modes: &Modes, from: f64, to: f64) -> bool {
        let beyond = |t: f64| modes.value(t) / self.scale - self.part;
        let ends = [(from, beyond(from)), (to, beyond(to))];
        if ends[1].1 >= 0.0 {
            // Where it is reached at the beginning already, that is where the stretch before ended.
            self.found = Some(if ends[0].1 >= 0.0 { from } else { root_between(ends[0], ends[1], beyond) });
        }
        self.found.is_some()
    }

    fn take(&mut self, stretch: &Stretch) -> bool {
        self.found = Some(stretch.to);
        true
    }

    fn later_first(&self, _: Option<(&Stretch, &Stretch)>) -> bool {
        false
    }
}

struct FirstPeaks {
    direction: f64,
    /// Smaller changes are none.
    seen: f64,
    count: usize,
    swing: Swing,
    found: Vec<(f64, f64)>,
}

/// Where an answer goes, in the direction of its final value.
#[derive(Clone, Copy)]
enum Swing {
    /// Up; time and value of its highest point.
    Up(f64, f64),
    /// Down, or not yet up; its lowest value.
    Down(f64),
}

impl Quest for FirstPeaks {
    fn is_dull(&self, _: &Stretch) -> bool {
        false
    }

    fn look(&mut self, modes: &Modes, _: f64, to: f64) -> bool {
        let y = self.direction * modes.value(to);
        self.swing = match self.swing {
            Swing::Up(_, top) if y >= top => Swing::Up(to, y),
            Swing::Up(t, top) if top - y > self.seen => {
                self.found.push((t, self.direction * top));
                Swing::Down(y)
            }
            Swing::Down(low) if y - low > self.seen => Swing::Up(to, y),
            Swing::Down(low) => Swing::Down(low.min(y)),
            up @ Swing::Up(..) => up,
        };
        self.found.len() == self.count
    }

    fn take(&mut self, _: &Stretch) -> bool {
        false
    }

    fn later_first(&self, _: Option<(&Stretch, &Stretch)>) -> bool {
        false
    }
}

struct LastOutside {
    end: f64,
    band: f64,
    found: Option<f64>,
}

impl Quest for LastOutside {
    fn is_dull(&self, stretch: &Stretch) -> bool {
        (stretch.high - self.end).max(self.end - stretch.low) < self.band
    }

    fn look(&mut self, modes: &Modes, from: f64, to: f64) -> bool {
        let beyond = |t: f64| (modes.value(t) - self.end).abs() - self.band;
        let ends = [(from, beyond(from)), (to, beyond(to))];
        if ends[1].1 > 0.0 {
            self.found = Some(to);
        } else if ends[0].1 > 0.0 {
            self.found = Some(root_between(ends[0], ends[1], beyond));
        }
        self.found.is_some()
    }

    fn take(&mut self, stretch: &Stretch) -> bool {
        self.found = Some(stretch.to);
        true
    }

    fn later_first(&self, _: Option<(&Stretch, &Stretch)>) -> bool {
        true
    }
}

/// A zero of a function between two arguments, given with their values of different sign: chord steps with the value at
/// an end that stays halved, and a halving every fourth step. Without a change of sign the end with the smaller value.
pub(super) fn root_between(mut a: (f64, f64), mut b: (f64, f64), value: impl Fn(f64) -> f64) -> f64 {
    if a.1 * b.1 > 0.0 {
        return if a.1.abs() < b.1.abs() { a.0 } else { b.0 };
    }
    let mut moved = 0;
    for step in 1..ROOT_CAP {
        let width = b.0 - a.0;
        if a.1 == 0.0 || width.abs() <= 2.0 * f64::EPSILON * b.0.abs() {
            return a.0;
        }
        let chord = a.0 + width * (a.1 / (a.1 - b.1));
        let inside = (chord - a.0) * (b.0 - chord) > 0.0;
        let t = if step % 4 == 0 || !inside { 0.5 * (a.0 + b.0) } else { chord };
        let y = value(t);
        if y == 0.0 {
            return t;
        }
        if (y > 0.0) == (b.1 > 0.0) {
            b = (t, y);
            a.1 = if moved == 1 { 0.5 * a.1 } else { a.1 };
            moved = 1;
        } else {
            a = (t, y);
            b.1 = if moved == -1 { 0.5 * b.1 } else { b.1 };
            moved = -1;
        }
    }
    0.5 * (a.0 + b.0)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::exact::IntPoly;
    use crate::model::BlockAt;
    use nalgebra::Complex;

    fn answer(above: &[i64], below: &IntPoly, poles: &[(f64, f64)]) -> Modes {
        let transfer = BlockAt { above: IntPoly::from_i64(above), below: below.clone() };
        let poles: alloc::vec::Vec<Complex<f64>> = poles.iter().map(|p| Complex::new(p.0, p.1)).collect();
        Modes::of_step(&transfer, &poles).expect("proper")
    }

    /// s² + 2ζs + 1, ζ as given but for 1e-12.
    fn second_order(damping: f64) -> Modes {
        const UNIT: i64 = 1_000_000_000_000;
        let twice = libm::round(2.0 * damping * UNIT as f64) as i64;
        let zeta = 0.5 * twice as f64 / UNIT as f64;
        let im = libm::sqrt(1.0 - zeta * zeta);
        answer(&[UNIT], &IntPoly::from_i64(&[UNIT, twice, UNIT]), &[(-zeta, im), (-zeta, -im)])
    }

    #[test]
    fn a_turn_that_just_touches_the_band_is_told_from_one_that_does_not() {
        // The second turn leaves e^(−2πζ/√(1 − ζ²)) = 2 %.
        let x = libm::log(50.0) / core::f64::consts::TAU;
        let touching = x / libm::sqrt(1.0 + x * x);
        let at = |damping: f64| second_order(damping).last_outside(0.02).expect("settles");
        let turn = core::f64::consts::TAU / libm::sqrt(1.0 - touching * touching);
        assert!((at(touching * (1.0 - 1e-9)) - turn).abs() < 1e-3);
        assert!(at(touching * (1.0 + 1e-9)) < turn - 1.0);
    }

    #[test]
    fn a_fast_mode_long_dead_does_not_disturb_a_slow_one() {
        // 1/((s + 1)(1e-9 s + 1)), seen long after the fast mode: e^(−t) = 2 %.
        let below = IntPoly::from_i64(&[1, 1]).times(&IntPoly::from_i64(&[1_000_000_000, 1]));
        let modes = answer(&[1_000_000_000], &below, &[(-1.0, 0.0), (-1e9, 0.0)]);
        let settled = modes.last_outside(0.02).expect("settles");
        assert!((settled - libm::log(50.0)).abs() < 1e-8, "{settled}");
    }

    #[test]
    fn a_ripple_on_a_slow_mode_is_seen_in_every_figure() {
        // A lag, and a pair a million times faster with next to no damping; data of our own.
        let pair = IntPoly::from_i64(&[1_000_000, 0, 1_000_000]);
        let below = IntPoly::from_i64(&[1, 1_000_000]).times(&pair.plus(&IntPoly::from_i64(&[0, 2])));
        let (sigma, im) = (1e-6, libm::sqrt(1.0 - 1e-12));
        let modes = answer(&[1_000_000, 500_000], &below, &[(-1e-6, 0.0), (-sigma, im), (-sigma, -im)]);
        let reached = modes.first_reach(0.1).expect("reached");
        assert!((modes.value(reached) - 0.1).abs() < 1e-12);
        assert!(
            (0..200_000)
                .all(|k| modes.value(reached * (1.0 - 1e-3) + 1e-9 * f64::from(k) * reached * 5.0) < 0.1 + 1e-12)
        );
        let peaks = modes.peaks().expect("found");
        assert!(peaks.highest.0 >= 1.0 && modes.last_outside(0.02).expect("settles") > 3.9e6);
    }
}
