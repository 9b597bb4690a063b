//! Polynomials in f64 with coefficients of any size: mantissas with powers of two.

use super::IntPoly;
use super::dyadic::Dyadic;
use crate::numerics::magnitude;
use alloc::vec::Vec;
use nalgebra::Complex;

/// A complex number z·2^exponent, for values beyond the range of f64.
#[derive(Clone, Copy, Debug)]
pub struct Wide {
    z: Complex<f64>,
    exponent: i64,
}

impl Wide {
    /// From a number of ordinary size.
    pub fn new(z: Complex<f64>) -> Self {
        Self { z, exponent: 0 }.normalised()
    }

    /// From an integer.
    pub fn from_integer(value: &dashu_int::IBig) -> Self {
        let (mantissa, exponent) = Dyadic::new(value.clone(), 0).to_f64_parts();
        Self { z: Complex::new(mantissa, 0.0), exponent }
    }

    /// From two parts, each a mantissa and a power of two.
    pub fn from_parts(re: (f64, i64), im: (f64, i64)) -> Self {
        let exponent = match (re.0 == 0.0, im.0 == 0.0) {
            (false, false) => re.1.max(im.1),
            (false, true) => re.1,
            _ => im.1,
        };
        let part = |(mantissa, own): (f64, i64)| libm::ldexp(mantissa, (own - exponent).clamp(-2000, 2000) as i32);
        Self { z: Complex::new(part(re), part(im)), exponent }.normalised()
    }

    fn normalised(self) -> Self {
        let size = self.z.re.abs().max(self.z.im.abs());
        if size == 0.0 || !size.is_finite() {
            return self;
        }
        let shift = libm::ilogb(size);
        Self { z: self.z * libm::ldexp(1.0, -shift), exponent: self.exponent + i64::from(shift) }
    }

    /// Product.
    pub fn times(self, other: Self) -> Self {
        Self { z: self.z * other.z, exponent: self.exponent + other.exponent }.normalised()
    }

    /// Quotient; not finite for a zero divisor.
    pub fn over(self, other: Self) -> Self {
        Self { z: self.z / other.z, exponent: self.exponent - other.exponent }.normalised()
    }

    /// As an ordinary number; 0 or infinite where it does not fit.
    pub fn to_complex(self) -> Complex<f64> {
        self.z * libm::ldexp(1.0, self.exponent.clamp(-2000, 2000) as i32)
    }
}

/// Coefficients as mantissas in ±[0.5, 1] with powers of two, so that no size overflows.
#[derive(Clone, Debug)]
pub struct Scaled {
    pub(super) mantissas: Vec<f64>,
    pub(super) exponents: Vec<i64>,
}

impl Scaled {
    /// From exact coefficients.
    pub fn new(p: &IntPoly) -> Self {
        let parts = p.coefficients().iter().map(|c| Dyadic::new(c.clone(), 0).to_f64_parts());
        let (mantissas, exponents) = parts.unzip();
        Self { mantissas, exponents }
    }

    /// p(z)/p'(z), and whether p(z) is beyond its rounding error. None where p' vanishes in f64.
    pub(super) fn newton(&self, z: Complex<f64>) -> Option<(Complex<f64>, bool)> {
        let scale = binary_exponent(magnitude(z));
        let u = z * libm::ldexp(1.0, -scale as i32);
        let size = |i: usize| self.exponents[i] + scale * i as i64;
        let top = (0..self.mantissas.len()).filter(|i| self.mantissas[*i] != 0.0).map(size).max()?;
        let (mut value, mut slope) = (Complex::new(0.0, 0.0), Complex::new(0.0, 0.0));
        let mut total = 0.0;
        let modulus = magnitude(u);
        for i in (0..self.mantissas.len()).rev() {
            let c = libm::ldexp(self.mantissas[i], (size(i) - top).max(-2000) as i32);
            slope = slope * u + value;
            value = value * u + c;
            total = total * modulus + libm::fabs(c);
        }
        let ratio = value / slope * libm::ldexp(1.0, scale as i32);
        let certain = magnitude(value) > 4.0 * f64::EPSILON * self.mantissas.len() as f64 * total;
        (ratio.re.is_finite() && ratio.im.is_finite()).then_some((ratio, certain))
    }

    /// p(z).
    pub fn value(&self, z: Complex<f64>) -> Wide {
        let scale = binary_exponent(magnitude(z));
        let u = z * libm::ldexp(1.0, -scale as i32);
        let size = |i: usize| self.exponents[i] + scale * i as i64;
        let top = (0..self.mantissas.len()).filter(|i| self.mantissas[*i] != 0.0).map(size).max().unwrap_or(0);
        let value = (0..self.mantissas.len()).rev().fold(Complex::new(0.0, 0.0), |sum, i| {
            sum * u + libm::ldexp(self.mantissas[i], (size(i) - top).max(-2000) as i32)
        });
        Wide { z: value, exponent: top }.normalised()
    }
}

/// The power of two just below a positive number.
fn binary_exponent(value: f64) -> i64 {
    i64::from(libm::ilogb(value.max(f64::MIN_POSITIVE)))
}
