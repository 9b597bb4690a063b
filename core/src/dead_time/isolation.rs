//! Every zero of Im(P(w)·e^(jwT)) + C(w) on a stretch of frequencies, isolated without doubt.
//!
//! P = A(jw)·conj B(jw), and C = Im(B0·conj B1). On a short stretch the function is its Taylor polynomial in the middle,
//! up to an error that is bounded: a stretch is dismissed where the constant coefficient outweighs all others, and holds at
//! most one zero where the linear one does; everything else is halved. The signs at the ends decide.
//! Arithmetic in f64 with a bound on all its rounding errors; what that leaves open is an error, never a guess.

use super::DeadTimeError;
use crate::exact::{Dyadic, IntPoly};
use alloc::vec::Vec;
use nalgebra::Complex;

/// Terms of the exponential's series on a stretch with |wT| ≤ 1 from its middle: the rest is below 1/21!·1.05.
const EXPONENTIAL_TERMS: usize = 21;

/// That rest.
const EXPONENTIAL_REST: f64 = 2.1e-20;

/// Stretches looked at before the search gives up: some ten thousand periods of e^(jwT), and a few tens of milliseconds.
pub(super) const STRETCH_CAP: usize = 40_000;

/// Halvings of one stretch before its zeros count as one: by then f64 has no number between.
const HALVING_CAP: u32 = 60;

/// Halvings of the first stretch, [0, w], before it is free of zeros.
const FIRST_CAP: usize = 2000;

/// A polynomial in w as f64 mantissas with powers of two.
#[derive(Clone, Debug)]
struct Coefficients(Vec<(f64, i64)>);

impl Coefficients {
    fn new(p: &[Dyadic]) -> Self {
        Self(p.iter().map(Dyadic::to_f64_parts).collect())
    }

    /// The largest exponent at scale 2^e of the argument.
    fn top(&self, e: i64) -> Option<i64> {
        let sizes = self.0.iter().enumerate().filter(|(_, c)| c.0 != 0.0);
        sizes.map(|(i, c)| c.1 + e * i as i64).max()
    }

    /// Taylor coefficients at `middle`·2^e in units of `radius`·2^e, over 2^top; and those of the absolute values.
    fn shifted(&self, e: i64, top: i64, middle: f64, radius: f64) -> (Vec<f64>, Vec<f64>) {
        let scaled =
            |(i, c): (usize, &(f64, i64))| libm::ldexp(c.0, (c.1 + e * i as i64 - top).clamp(-2000, 2000) as i32);
        let mut value: Vec<f64> = self.0.iter().enumerate().map(scaled).collect();
        let mut size: Vec<f64> = value.iter().map(|c| c.abs()).collect();
        let n = value.len();
        for round in 0..n {
            for i in (round..n.saturating_sub(1)).rev() {
                value[i] += middle * value[i + 1];
                size[i] += middle.abs() * size[i + 1];
            }
        }
        let mut power = 1.0;
        for (v, s) in value.iter_mut().zip(&mut size) {
            *v *= power;
            *s *= power;
            power *= radius;
        }
        (value, size)
    }
}

/// The function u(w)·sin(wT) + v(w)·cos(wT) + c(w).
#[derive(Clone, Debug)]
pub(super) struct AxisFunction {
    sine: Coefficients,
    cosine: Coefficients,
    plain: Coefficients,
    dead_time: f64,
    /// The order of the zero at w = 0.
    order_at_zero: usize,
}

/// A stretch with exactly one zero.
#[derive(Clone, Copy, Debug)]
pub(super) struct Isolated {
    pub(super) low: f64,
    pub(super) high: f64,
    /// About where.
    pub(super) estimate: f64,
    /// 1 where the function rises through the zero, −1 where it falls.
    pub(super) direction: i32,
}

/// The Taylor polynomial on a stretch, in t from −1 to 1, with a bound on the error of every coefficient.
struct Local {
    coefficients: Vec<f64>,
    error: f64,
}

impl AxisFunction {
    /// From u(x), v(x) and c(x) with x = w²: w-polynomials u(x), w·v(x) and w·c(x).
    pub(super) fn new(u: &IntPoly, v: &IntPoly, c: &IntPoly, dead_time: f64, order_at_zero: usize) -> Self {
        let in_w = |p: &IntPoly, odd: usize| -> Vec<Dyadic> {
            let mut all = alloc::vec![Dyadic::ZERO; if p.is_zero() { 0 } else { 2 * p.degree() + odd + 1 }];
            for (i, a) in p.coefficients().iter().enumerate() {
                all[2 * i + odd] = Dyadic::new(a.clone(), 0);
            }
            all
        };
        Self {
            sine: Coefficients::new(&in_w(u, 0)),
            cosine: Coefficients::new(&in_w(v, 1)),
            plain: Coefficients::new(&in_w(c, 1)),
            dead_time,
            order_at_zero,
        }
    }

    /// Every zero in (from, to), ascending; `from` = 0 leaves out the zero there. The ends must be no zeros.
    ///
    /// `sign` tells the sign of the function at a number without doubt, where f64 cannot.
    pub(super) fn zeros(
        &self,
        from: f64,
        to: f64,
        sign: impl Fn(f64) -> Option<i32>,
        looked: &mut usize,
    ) -> Result<Vec<Isolated>, DeadTimeError> {
        let mut found = Vec::new();
        let mut low = if from > 0.0 { from } else { self.first_stretch(to)? };
        while low < to {
            let length = (2.0 / self.dead_time).min(low);
            let high = if low + 1.5 * length >= to { to } else { low + length };
            self.search(low, high, HALVING_CAP, &sign, looked, &mut found)?;
            low = high;
        }
        Ok(found)
    }

    /// A frequency up to which, from 0 on, there is no zero.
    fn first_stretch(&self, to: f64) -> Result<f64, DeadTimeError> {
        let mut high = to.min(1.0 / self.dead_time);
        for _ in 0..FIRST_CAP {
            if let Some(Local { coefficients, error }) = self.local(0.0, high) {
                // What lies below the order of the zero is rounding.
                let mut sizes = coefficients.iter().skip(self.order_at_zero).map(|c| c.abs());
                let lowest = sizes.next().unwrap_or(0.0);
                if lowest > sizes.sum::<f64>() + error {
                    return Ok(high);
                }
            }
            high *= 0.5;
        }
        Err(DeadTimeError::CrossingsNotSeparated)
    }

    fn search(
        &self,
        low: f64,
        high: f64,
        halvings: u32,
        sign: &impl Fn(f64) -> Option<i32>,
        looked: &mut usize,
        found: &mut Vec<Isolated>,
    ) -> Result<(), DeadTimeError> {
        *looked += 1;
        if *looked > STRETCH_CAP {
            return Err(DeadTimeError::TooManySteps { cap: STRETCH_CAP });
        }
        let (middle, radius) = (0.5 * (low + high), 0.5 * (high - low));
        // One more unit in the last place, so that the stretch is surely covered.
        let local = self.local(middle, radius * (1.0 + 1e-14));
        if let Some(Local { coefficients: h, error }) = local {
            let rest: f64 = h.iter().skip(1).map(|c| c.abs()).sum();
            if h[0].abs() > rest + error {
                return Ok(());
            }
            let slope = h.get(1).map_or(0.0, |c| c.abs());
            let others: f64 = h.iter().enumerate().skip(2).map(|(k, c)| k as f64 * c.abs()).sum();
            if slope > others + h.len() as f64 * error {
                let direction = if h[1] > 0.0 { 1 } else { -1 };
                let at_end = |t: f64, w: f64| {
                    let value: f64 = h.iter().rev().fold(0.0, |sum, c| sum * t + c);
                    if value.abs() > 2.0 * error { Some(if value > 0.0 { 1 } else { -1 }) } else { sign(w) }
                };
                let ends = (at_end(-1.0, low), at_end(1.0, high));
                let (Some(a), Some(b)) = ends else { return Err(DeadTimeError::CrossingsNotSeparated) };
                if a != b {
                    let value = |t: f64| h.iter().rev().fold(0.0, |sum, c| sum * t + c) * f64::from(direction);
                    let estimate = middle + radius * rising_zero(value);
                    found.push(Isolated { low, high, estimate, direction });
                }
                return Ok(());
            }
        }
        if halvings == 0 || middle <= low || middle >= high {
            return Err(DeadTimeError::CrossingsNotSeparated);
        }
        self.search(low, middle, halvings - 1, sign, looked, found)?;
        self.search(middle, high, halvings - 1, sign, looked, found)
    }

    /// The Taylor polynomial around `middle`; None where |wT| goes beyond 1 from there.
    fn local(&self, middle: f64, radius: f64) -> Option<Local> {
        let turn = self.dead_time * radius;
        if turn > 1.0 + 1e-12 {
            return None;
        }
        let e = i64::from(libm::ilogb(middle + radius));
        let unit = libm::ldexp(1.0, -(e.clamp(-1000, 1000)) as i32);
        let top = [&self.sine, &self.cosine, &self.plain].into_iter().filter_map(|c| c.top(e)).max()?;
        let shifted = |c: &Coefficients| c.shifted(e, top, middle * unit, radius * unit);
        let ((u, u_size), (v, v_size), (c, c_size)) =
            (shifted(&self.sine), shifted(&self.cosine), shifted(&self.plain));
        let degree = u.len().max(v.len());
        let angle = self.dead_time * middle;
        // Im((v + …): u·sin + v·cos = Im((u + j·v)·e^(jwT)).
        let turned = Complex::new(libm::cos(angle), libm::sin(angle));
        let at = |p: &[f64], i: usize| p.get(i).copied().unwrap_or(0.0);
        let start: Vec<Complex<f64>> = (0..degree).map(|i| Complex::new(at(&u, i), at(&v, i)) * turned).collect();
        let mut h = alloc::vec![0.0; (degree + EXPONENTIAL_TERMS).max(c.len())];
        // (jτ)^k/k!, one k at a time.
        let mut term = 1.0;
        for k in 0..EXPONENTIAL_TERMS {
            for (i, z) in start.iter().enumerate() {
                let part = match k % 4 {
                    0 => z.im,
                    1 => z.re,
                    2 => -z.im,
                    _ => -z.re,
                };
                h[i + k] += part * term;
            }
            term *= turn / (k + 1) as f64;
        }
        for (i, value) in c.iter().enumerate() {
            h[i] += value;
        }
        let size: f64 = u_size.iter().chain(&v_size).sum::<f64>();
        let plain: f64 = c_size.iter().sum();
        // Each coefficient of a shift passes 2 operations a degree and the scaling; the series adds another hundred roundings
        // at most, and the angle is off by its own rounding twice over.
        let roundings = 2.0 * (degree + c.len()) as f64 + 160.0 + 4.0 * angle.abs();
        let error = core::f64::consts::E * (size + plain) * (roundings * f64::EPSILON + EXPONENTIAL_REST);
        Some(Local { coefficients: h, error })
    }
}

/// A zero in [−1, 1] of a rising function, by bisection.
fn rising_zero(value: impl Fn(f64) -> f64) -> f64 {
    let (mut low, mut high) = (-1.0, 1.0);
    for _ in 0..52 {
        let middle = 0.5 * (low + high);
        if value(middle) < 0.0 { low = middle } else { high = middle }
    }
    0.5 * (low + high)
}
