//! A(s) + B(s)·e^(−T·s) and its derivative in f64.

use crate::exact::{Dyadic, IntPoly};
use crate::numerics::magnitude;
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::{Complex, ComplexField};

/// A quasi-polynomial, scaled so that its largest coefficient is about 1.
#[derive(Clone, Debug)]
pub struct Quasi {
    /// Undelayed and delayed coefficients, lowest power first.
    pub(super) a: Vec<f64>,
    pub(super) b: Vec<f64>,
    /// s.
    pub dead_time: f64,
}

/// Its value at a point.
#[derive(Clone, Copy, Debug)]
pub(super) struct Value {
    pub(super) value: Complex<f64>,
    pub(super) slope: Complex<f64>,
    /// The sum of the magnitudes of all terms: rounding errors are some units in the last place of this.
    pub(super) size: f64,
}

impl Value {
    /// F′/F.
    pub(super) fn rate(&self) -> Complex<f64> {
        self.slope / self.value
    }

    /// F/F′, the step of Newton's method.
    pub(super) fn step(&self) -> Complex<f64> {
        self.value / self.slope
    }

    /// The part of that step that may be rounding.
    pub(super) fn rounding(&self, degree: usize) -> f64 {
        4.0 * (degree + 4) as f64 * f64::EPSILON * self.size / magnitude(self.slope)
    }
}

impl Quasi {
    /// From exact parts.
    pub fn new(a: &IntPoly, b: &IntPoly, dead_time: &RBig) -> Self {
        let [a, b] = scaled([a, b]);
        Self { a, b, dead_time: dead_time.to_f64().value() }
    }

    /// The degree of the undelayed part.
    pub(super) fn degree(&self) -> usize {
        self.a.len().saturating_sub(1)
    }

    pub(super) fn at(&self, s: Complex<f64>) -> Value {
        let modulus = magnitude(s);
        let ((a, da, a_size), (b, db, b_size)) = (horner(&self.a, s, modulus), horner(&self.b, s, modulus));
        let delay = (-s * self.dead_time).exp();
        Value {
            value: a + b * delay,
            slope: da + (db - b * self.dead_time) * delay,
            size: a_size + b_size * magnitude(delay),
        }
    }

    /// A radius that no root with Re s ≥ `line` exceeds.
    pub(super) fn radius_right_of(&self, line: f64) -> f64 {
        let weight = libm::exp(-self.dead_time * line);
        let degree = self.degree();
        let leading = self.a.last().map_or(0.0, |c| c.abs());
        let lower = |r: f64| {
            let term = |k: usize, c: &f64, factor: f64| factor * c.abs() * libm::pow(r, k as f64 - degree as f64);
            let a: f64 = self.a.iter().enumerate().take(degree).map(|(k, c)| term(k, c, 1.0)).sum();
            a + self.b.iter().enumerate().map(|(k, c)| term(k, c, weight)).sum::<f64>()
        };
        let mut radius = 1e-12;
        // Doubles 400 times at most before f64 ends; the terms fall with every doubling.
        while lower(radius) >= leading && radius < 1e100 {
            radius *= 1.25;
        }
        radius
    }
}

/// Coefficients over one common power of two, so that the largest is about 1.
pub(super) fn scaled<const N: usize>(polynomials: [&IntPoly; N]) -> [Vec<f64>; N] {
    let parts = polynomials.map(|p| -> Vec<(f64, i64)> {
        p.coefficients().iter().map(|c| Dyadic::new(c.clone(), 0).to_f64_parts()).collect()
    });
    let top = parts.iter().flatten().filter(|c| c.0 != 0.0).map(|c| c.1).max().unwrap_or(0);
    parts.map(|p| p.into_iter().map(|(m, e)| libm::ldexp(m, (e - top).max(-2000) as i32)).collect())
}

/// p(s), p′(s) and Σ |c_k|·|s|^k.
pub(super) fn horner(p: &[f64], s: Complex<f64>, modulus: f64) -> (Complex<f64>, Complex<f64>, f64) {
    let (mut value, mut slope, mut size) = (Complex::new(0.0, 0.0), Complex::new(0.0, 0.0), 0.0);
    for c in p.iter().rev() {
        slope = slope * s + value;
        value = value * s + *c;
        size = size * modulus + c.abs();
    }
    (value, slope, size)
}
