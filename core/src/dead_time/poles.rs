//! Every pole of a loop with dead time in a rectangle, or right of a line: none missed.
//!
//! The argument principle on the rectangle, halved until Newton's method finds what is inside (L. M. Delves, J. N. Lyness,
//! "A numerical method for locating the zeros of an analytic function", Mathematics of Computation 21, 1967). The turn of F
//! along a side is followed with steps that F′/F at both ends must explain. Rectangles astride the real axis need only their
//! upper half, for the poles are conjugate.
//! In f64: a count is refused where it is not near a whole number; it is not a proof as the ranges are.

use super::DeadTimeError;
use super::function::{Quasi, Value};
use crate::numerics::magnitude;
use crate::record::{Root, View};
use alloc::vec::Vec;
use nalgebra::{Complex, ComplexField};

/// Evaluations of F before the search gives up: some hundred milliseconds.
const EVALUATION_CAP: usize = 400_000;

/// The largest |h·F′/F| of one step, radians. Larger is faster; at 3 a turn could be lost.
const LARGEST_TURN: f64 = 1.2;

/// How far the change of ln F may be from what F′/F at both ends says.
const UNEXPLAINED: f64 = 0.25;

/// A step below this part of a side means that a pole lies on the side.
const SMALLEST_STEP: f64 = 1e-9;

/// How far a count may be from a whole number.
const UNEVEN: f64 = 0.05;

/// Where a rectangle is cut, one after the other, until no pole lies on the cut.
const CUTS: [f64; 6] = [0.5, 0.46, 0.55, 0.41, 0.6, 0.37];

/// Parts by which an outer rectangle grows, one after the other, until no pole lies on its sides.
const GROWTH: [f64; 5] = [0.0, 1e-6, 1e-4, 1e-3, 1e-2];

/// Newton steps for a pole.
const NEWTON_CAP: usize = 24;

/// Poles that share a rectangle of this part of their magnitude count as one, or, next to the origin, of this part of a
/// hundredth of the whole rectangle.
const TOGETHER: f64 = 1e-7;

/// e^(−T·s) is followed to the left up to this exponent: far from overflow of products.
pub(super) const LARGEST_EXPONENT: f64 = 250.0;

/// A pole counts as dominant when it fades at most this many times as fast as the slowest.
const DOMINANT: f64 = 3.0;

/// Doublings of the distance to the left until a pole is found.
const LEFTWARD_CAP: usize = 40;

/// The poles in a view, by real part from the right.
///
/// # Errors
/// [`DeadTimeError::TooManySteps`] where the rectangle holds thousands of poles.
pub fn in_view(f: &Quasi, view: &View) -> Result<Vec<Root>, DeadTimeError> {
    let left = view.re[0].max(-LARGEST_EXPONENT / f.dead_time);
    let top = view.im[1].max(-view.im[0]);
    let inside = |root: &Root| root.re >= view.re[0] && root.re <= view.re[1] && root.im.abs() <= top;
    Ok(within(f, left, view.re[1], top)?.into_iter().filter(inside).collect())
}

/// The poles with Re s ≥ `line`, by real part from the right.
///
/// # Errors
/// As [`in_view`].
pub fn right_of(f: &Quasi, line: f64) -> Result<Vec<Root>, DeadTimeError> {
    let radius = f.radius_right_of(line) * 1.01;
    Ok(within(f, line, radius.max(line + radius), radius)?.into_iter().filter(|root| root.re >= line).collect())
}

/// The poles that shape the answers: the rightmost and all that fade at most three times as fast, by real part from the
/// right; where one is unstable, all up to the axis. Where thousands fade like that, only those found with the rightmost.
///
/// Far to the left a loop with dead time has infinitely many poles, of ever smaller damping ratio and without weight.
///
/// # Errors
/// As [`in_view`].
pub fn dominant(f: &Quasi) -> Result<Vec<Root>, DeadTimeError> {
    let mut line = -0.25 / f.dead_time;
    for _ in 0..LEFTWARD_CAP {
        let found = right_of(f, line)?;
        if let Some(first) = found.first() {
            let wanted = if first.re < 0.0 { DOMINANT * first.re } else { 0.0 };
            let all = if wanted < line { right_of(f, wanted).unwrap_or(found) } else { found };
            return Ok(all.into_iter().filter(|root| root.re >= wanted).collect());
        }
        line *= 2.0;
        if line * f.dead_time < -LARGEST_EXPONENT {
            break;
        }
    }
    Ok(Vec::new())
}

/// A rectangle; astride the real axis where `bottom` is none.
#[derive(Clone, Copy, Debug)]
struct Rectangle {
    left: f64,
    right: f64,
    bottom: Option<f64>,
    top: f64,
}

/// A pole lies on a side, or too near it.
struct OnSide;

struct Search<'a> {
    f: &'a Quasi,
    /// The extent of the whole rectangle.
    size: f64,
    evaluations: usize,
    found: Vec<Root>,
}

fn within(f: &Quasi, left: f64, right: f64, top: f64) -> Result<Vec<Root>, DeadTimeError> {
    let size = (right - left).max(top);
    let mut search = Search { f, size, evaluations: 0, found: Vec::new() };
    for growth in GROWTH {
        let by = growth * size;
        let outer = Rectangle { left: left - by, right: right + by, bottom: None, top: top + by };
        if let Ok(count) = search.count(&outer)? {
            search.resolve(outer, count)?;
            search.found.sort_by(|a, b| b.re.total_cmp(&a.re).then(a.im.total_cmp(&b.im)));
            return Ok(search.found);
        }
    }
    Err(DeadTimeError::CrossingsNotSeparated)
}

impl Search<'_> {
    fn value(&mut self, s: Complex<f64>) -> Result<Value, DeadTimeError> {
        self.evaluations += 1;
        if self.evaluations > EVALUATION_CAP {
            return Err(DeadTimeError::TooManySteps { cap: EVALUATION_CAP });
        }
        Ok(self.f.at(s))
    }

    /// The turn of F along a straight side.
    fn turn(&mut self, from: Complex<f64>, to: Complex<f64>) -> Result<Result<f64, OnSide>, DeadTimeError> {
        let way = to - from;
        let length = magnitude(way);
        if length == 0.0 {
            return Ok(Ok(0.0));
        }
        let (mut done, mut turned) = (0.0, 0.0);
        let mut here = self.value(from)?;
        let mut step = 0.5 / (length * magnitude(here.rate())).max(0.5);
        while done < 1.0 {
            let next = (done + step).min(1.0);
            let there = self.value(from + way * next)?;
            let h = way * (next - done);
            let (first, last) = (h * here.rate(), h * there.rate());
            let change = (there.value / here.value).ln();
            let explained = magnitude(change - (first + last) * 0.5) < UNEXPLAINED;
            if explained && magnitude(first) < LARGEST_TURN && magnitude(last) < LARGEST_TURN {
                turned += change.im;
                let turn = magnitude(last).max(magnitude(first)).max(0.1);
                step = (next - done) * (0.9 * LARGEST_TURN / turn).min(4.0);
                done = next;
                here = there;
            } else {
                // What is not a number fails here, too.
                step = 0.5 * (next - done);
                if step.is_nan() || step < SMALLEST_STEP {
                    return Ok(Err(OnSide));
                }
            }
        }
        Ok(Ok(turned))
    }

    fn count(&mut self, r: &Rectangle) -> Result<Result<usize, OnSide>, DeadTimeError> {
        let bottom = r.bottom.unwrap_or(0.0);
        let corner = Complex::new;
        let mut path = [
            corner(r.right, bottom),
            corner(r.right, r.top),
            corner(r.left, r.top),
            corner(r.left, bottom),
            corner(r.right, bottom),
        ]
        .to_vec();
        if r.bottom.is_none() {
            path.truncate(4);
        }
        let mut turned = 0.0;
        for side in path.windows(2) {
            match self.turn(side[0], side[1])? {
                Ok(turn) => turned += turn,
                Err(OnSide) => return Ok(Err(OnSide)),
            }
        }
        let unit = if r.bottom.is_none() { core::f64::consts::PI } else { core::f64::consts::TAU };
        let count = turned / unit;
        let whole = libm::round(count);
        let clear = (count - whole).abs() < UNEVEN && whole >= 0.0;
        Ok(if clear { Ok(whole as usize) } else { Err(OnSide) })
    }

    fn resolve(&mut self, outer: Rectangle, count: usize) -> Result<(), DeadTimeError> {
        let mut open = [(outer, count)].to_vec();
        // Each round spends evaluations, which are capped.
        while let Some((rectangle, count)) = open.pop() {
            if count == 0 || self.found_by_newton(&rectangle, count)? {
                continue;
            }
            let (width, height) = (rectangle.right - rectangle.left, rectangle.top - rectangle.bottom.unwrap_or(0.0));
            let magnitude = rectangle.left.abs().max(rectangle.right.abs()).max(rectangle.top);
            let scale = magnitude.max(0.01 * self.size);
            if width.max(height) <= TOGETHER * scale {
                self.take_together(&rectangle, count);
                continue;
            }
            open.extend(self.halves(&rectangle, count)?);
        }
        Ok(())
    }

    /// The two parts with their counts.
    fn halves(&mut self, r: &Rectangle, count: usize) -> Result<[(Rectangle, usize); 2], DeadTimeError> {
        let bottom = r.bottom.unwrap_or(0.0);
        let tall = r.top - bottom > r.right - r.left;
        for cut in CUTS {
            let (first, second) = if tall {
                let at = bottom + cut * (r.top - bottom);
                (Rectangle { top: at, ..*r }, Rectangle { bottom: Some(at), ..*r })
            } else {
                let at = r.left + cut * (r.right - r.left);
                (Rectangle { right: at, ..*r }, Rectangle { left: at, ..*r })
            };
            // A part above the axis stands for its mirror, too.
            let weight = if tall && r.bottom.is_none() { 2 } else { 1 };
            if let Ok(upper) = self.count(&second)?
                && let Some(rest) = count.checked_sub(weight * upper)
            {
                return Ok([(first, rest), (second, upper)]);
            }
        }
        Err(DeadTimeError::CrossingsNotSeparated)
    }

    /// Tries to finish a rectangle with one pole, or one conjugate pair astride the axis.
    fn found_by_newton(&mut self, r: &Rectangle, count: usize) -> Result<bool, DeadTimeError> {
        let middle = 0.5 * (r.left + r.right);
        let start = match (r.bottom, count) {
            (Some(bottom), 1) => Complex::new(middle, 0.5 * (bottom + r.top)),
            (None, 1) => Complex::new(middle, 0.0),
            (None, 2) => Complex::new(middle, 0.5 * r.top),
            _ => return Ok(false),
        };
        let mut s = start;
        for _ in 0..NEWTON_CAP {
            let here = self.value(s)?;
            let step = here.step();
            if !(step.re.is_finite() && step.im.is_finite()) {
                return Ok(false);
            }
            s -= step;
            let rounding = here.rounding(self.f.degree());
            if magnitude(step) <= rounding.max(f64::EPSILON * magnitude(s)) {
                let real = r.bottom.is_none() && count == 1;
                let pair_is_apart = count == 1 || s.im.abs() > 10.0 * rounding;
                if !r.holds(s) || !pair_is_apart {
                    return Ok(false);
                }
                let im = if real { 0.0 } else { s.im.abs() };
                self.take(s.re, im, 1, 2.0 * rounding + f64::EPSILON * magnitude(s));
                return Ok(true);
            }
        }
        Ok(false)
    }

    fn take(&mut self, re: f64, im: f64, multiplicity: usize, radius: f64) {
        self.found.push(Root { re, im, radius, multiplicity });
        if im > 0.0 {
            self.found.push(Root { re, im: -im, radius, multiplicity });
        }
    }

    /// Poles that f64 does not tell apart.
    fn take_together(&mut self, r: &Rectangle, count: usize) {
        let re = 0.5 * (r.left + r.right);
        let (im, height) = match r.bottom {
            Some(bottom) => (0.5 * (bottom + r.top), r.top - bottom),
            None => (0.0, r.top),
        };
        self.take(re, im, count, libm::hypot(r.right - r.left, height));
    }
}

impl Rectangle {
    fn holds(&self, s: Complex<f64>) -> bool {
        let im = if self.bottom.is_none() { s.im.abs() } else { s.im };
        let bottom = self.bottom.unwrap_or(0.0);
        s.re >= self.left && s.re <= self.right && im <= self.top && im >= bottom
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::exact::IntPoly;
    use dashu_ratio::RBig;

    fn quasi(a: &[i64], b: &[i64], numerator: i64, denominator: u64) -> Quasi {
        let time = RBig::from_parts(numerator.into(), denominator.into());
        Quasi::new(&IntPoly::from_i64(a), &IntPoly::from_i64(b), &time)
    }

    #[test]
    fn the_rightmost_pole_of_a_delayed_integrator_is_lamberts() {
        // s + e^−s = 0: W(−1), published constant, shared/checks L02c.
        let found = dominant(&quasi(&[0, 1], &[1], 1, 1)).expect("found");
        assert!((found[0].re + 0.318_131_505_204_764_1).abs() < 1e-15, "{found:?}");
        assert!((found[0].im.abs() - 1.337_235_701_430_689_4).abs() < 1e-15, "{found:?}");
    }

    #[test]
    fn all_poles_in_a_view_solve_the_equation_and_are_as_many_as_lamberts_branches() {
        // s = W_k(−1): one pair for every odd multiple of π that im brackets; with |im| < 100 there are 16 pairs.
        let f = quasi(&[0, 1], &[1], 1, 1);
        let found = in_view(&f, &View { re: [-8.0, 2.0], im: [-100.0, 100.0] }).expect("found");
        assert_eq!(found.len(), 32);
        for root in &found {
            let value = f.at(Complex::new(root.re, root.im)).value;
            assert!(magnitude(value) < 1e-12 && root.multiplicity == 1, "{root:?} {value}");
        }
    }

    #[test]
    fn a_double_real_pole_counts_twice() {
        // (s + 1)·… : s + e^(−1)·e^(−s) has a double root at −1; here with the delayed part 367879441/10⁹, next to it.
        let found =
            in_view(&quasi(&[0, 1_000_000_000], &[367_879_441], 1, 1), &View { re: [-2.0, 1.0], im: [-2.0, 2.0] })
                .expect("found");
        assert_eq!(found.iter().map(|root| root.multiplicity).sum::<usize>(), 2);
        assert!(found.iter().all(|root| (root.re + 1.0).abs() < 1e-4 && root.im == 0.0), "{found:?}");
    }

    #[test]
    fn an_unstable_loop_shows_its_right_half_plane() {
        // s² + 1 + 100·e^(−s/2)
        let found = right_of(&quasi(&[1, 0, 1], &[100], 1, 2), 0.0).expect("found");
        let count = super::super::delay::count_at(
            &IntPoly::from_i64(&[1, 0, 1]),
            &IntPoly::from_i64(&[100]),
            &RBig::from_parts(1.into(), 2u8.into()),
        );
        assert_eq!(count.map(|c| c.right), Ok(found.len()));
    }
}
