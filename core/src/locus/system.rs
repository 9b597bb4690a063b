//! The moving poles as a function of the knob, in f64: one Newton step, its rounding error, and the direction of motion.

use super::position::{Position, ROUNDING};
use crate::exact::{Dyadic, IntPoly};
use crate::numerics::magnitude;
use crate::ranges::Family;
use alloc::vec::Vec;
use nalgebra::Complex;

/// Products are brought back to this magnitude before they can over- or underflow.
const LARGE: f64 = 1e100;

/// F(s, q) = 0 for q > 0, ready for f64 work. The negative half of the locus has the odd powers of q negated.
#[derive(Clone, Debug)]
pub(super) enum System {
    /// D + q·N by poles and zeros: no digits are lost to coefficients (measured: 2e-16 at order 20, where coefficients
    /// lose 1e-6).
    Factored {
        /// Roots of D with multiplicity written out.
        poles: Vec<Position>,
        /// Roots of N likewise.
        zeros: Vec<Position>,
        /// Ratio of the leading coefficients of N and D.
        gain: f64,
    },
    /// Any degree in the knob, by coefficients of (s/scale)^i, each a polynomial in the knob.
    Expanded {
        /// `coefficients[i][k]` multiplies (s/scale)^i·q^k.
        coefficients: Vec<Vec<f64>>,
        /// 1/s.
        scale: f64,
    },
}

/// What one evaluation yields.
#[derive(Clone, Copy, Debug)]
pub(super) struct Newton {
    /// Subtract this from s.
    pub(super) correction: Complex<f64>,
    /// |correction| below this is rounding error.
    pub(super) floor: f64,
    /// q·ds/dq.
    pub(super) motion: Complex<f64>,
}

impl System {
    /// The factored system of an affine family; `sign` is that of the knob.
    pub(super) fn factored(d: &IntPoly, n: &IntPoly, poles: Vec<Position>, zeros: Vec<Position>, sign: f64) -> Self {
        let (n_lead, d_lead) = (Dyadic::new(n.leading(), 0), Dyadic::new(d.leading(), 0));
        let ((nm, ne), (dm, de)) = (n_lead.to_f64_parts(), d_lead.to_f64_parts());
        let gain = sign * libm::ldexp(nm / dm, (ne - de).clamp(-1070, 1020) as i32);
        Self::Factored { poles, zeros, gain }
    }

    /// The expanded system of any family. None where its coefficients do not fit into f64.
    pub(super) fn expanded(family: &Family, sign: f64) -> Option<Self> {
        let order = family.moving_order();
        let size = |i: usize| {
            let magnitudes = family.parts.iter().filter_map(|part| Dyadic::new(part.coefficient(i), 0).magnitude());
            magnitudes.max()
        };
        // Scale s so that the outer coefficients have the same size.
        let lowest = (0..order).find_map(|i| size(i).map(|m| (i, m)));
        let exponent = match (lowest, size(order)) {
            (Some((i, low)), Some(top)) => (low - top) / (order - i) as i64,
            _ => 0,
        };
        let top = (0..=order).filter_map(|i| size(i).map(|m| m + exponent * i as i64)).max()?;
        let coefficients: Vec<Vec<f64>> = (0..=order)
            .map(|i| {
                let scaled = |part: &IntPoly| Dyadic::new(part.coefficient(i), exponent * i as i64 - top).to_f64();
                let signs = core::iter::successors(Some(1.0), |s| Some(s * sign));
                family.parts.iter().zip(signs).map(|(part, s)| s * scaled(part)).collect()
            })
            .collect();
        let scale = libm::ldexp(1.0, exponent.clamp(-1000, 1000) as i32);
        coefficients.iter().flatten().all(|c| c.is_finite()).then_some(Self::Expanded { coefficients, scale })
    }

    /// One evaluation at s and q > 0. None where it is singular in f64.
    pub(super) fn newton(&self, s: Position, q: f64) -> Option<Newton> {
        let result = match self {
            Self::Factored { poles, zeros, gain } => factored_newton(poles, zeros, gain * q, s),
            Self::Expanded { coefficients, scale } => expanded_newton(coefficients, *scale, s.rounded(), q),
        };
        let finite = |z: Complex<f64>| z.re.is_finite() && z.im.is_finite();
        (finite(result.correction) && finite(result.motion) && result.floor.is_finite()).then_some(result)
    }

    /// A knob value in the middle of the action: where |D| and |q·N| balance at the mean distance of poles and zeros.
    pub(super) fn typical_knob(&self) -> f64 {
        match self {
            Self::Factored { poles, zeros, gain } => {
                let logs = |roots: &[Position]| -> (f64, usize) {
                    let sizes = roots.iter().map(|r| magnitude(r.rounded())).filter(|m| *m > 0.0);
                    sizes.fold((0.0, 0), |(sum, count), m| (sum + libm::log(m), count + 1))
                };
                let ((a, i), (b, k)) = (logs(poles), logs(zeros));
                let radius = if i + k == 0 { 1.0 } else { libm::exp((a + b) / (i + k) as f64) };
                let log_product = |roots: &[Position]| -> f64 {
                    let log = |r: &Position| 0.5 * libm::log(r.rounded().norm_sqr() + radius * radius);
                    roots.iter().map(log).sum()
                };
                let log = log_product(poles) - log_product(zeros) - libm::log(libm::fabs(*gain));
                libm::exp(log.clamp(-600.0, 600.0))
            }
            Self::Expanded { .. } => 1.0,
        }
    }
}

/// With L = q·N/D: F/F′ = (1 + L)/(σD + L·σN) and q·ds/dq = −L/(σD + L·σN), σ the sums of 1/(s − root).
fn factored_newton(poles: &[Position], zeros: &[Position], gain: f64, s: Position) -> Newton {
    let (mut sigma_d, mut sigma_n) = (Complex::new(0.0, 0.0), Complex::new(0.0, 0.0));
    let mut product = Complex::new(gain, 0.0);
    let mut exponent = 0;
    let mut keep_in_range = |product: &mut Complex<f64>| {
        let size = product.re.abs().max(product.im.abs());
        if !(1.0 / LARGE..LARGE).contains(&size) && size > 0.0 && size.is_finite() {
            let shift = libm::ilogb(size);
            *product *= libm::ldexp(1.0, -shift);
            exponent += i64::from(shift);
        }
    };
    for k in 0..poles.len().max(zeros.len()) {
        if let Some(p) = poles.get(k) {
            let inverse = reciprocal(distance(s, *p));
            sigma_d += inverse;
            product *= inverse;
            keep_in_range(&mut product);
        }
        if let Some(z) = zeros.get(k) {
            let difference = distance(s, *z);
            let inverse = reciprocal(difference);
            sigma_n += inverse;
            product *= difference;
            keep_in_range(&mut product);
        }
    }
    // The ratio alone decides: for |L| > 1 both numerator and denominator are divided by L.
    let size = magnitude(product);
    let log = libm::log2(size) + exponent as f64;
    let (top, bottom, l) = if log <= 0.0 {
        let l = product * libm::ldexp(1.0, exponent.max(-2000) as i32);
        (Complex::new(1.0, 0.0) + l, sigma_d + l * sigma_n, l)
    } else {
        let m = reciprocal(product) * libm::ldexp(1.0, (-exponent).max(-2000) as i32);
        (m + 1.0, m * sigma_d + sigma_n, Complex::new(1.0, 0.0))
    };
    let slope = reciprocal(bottom);
    // Every factor rounds its distance, its reciprocal and the product.
    let doubt = 8.0 * (poles.len() + zeros.len() + 1) as f64;
    Newton {
        correction: top * slope,
        floor: doubt * f64::EPSILON * magnitude(slope) * magnitude(l).min(1.0),
        motion: -l * slope,
    }
}

/// s − root, or a quarter of a rounding unit where it is less: a pole of the closed loop may be nearer to one of the open
/// loop than a [`Position`] can tell, and is then found there.
fn distance(s: Position, root: Position) -> Complex<f64> {
    let difference = s.minus(root);
    let place = root.rounded();
    let least = (0.25 * ROUNDING * (place.re.abs() + place.im.abs())).max(1e-300);
    if difference.re.abs() + difference.im.abs() < least { Complex::new(least, 0.0) } else { difference }
}

/// Horner's scheme for F, its slope and its derivative by the knob.
fn expanded_newton(coefficients: &[Vec<f64>], scale: f64, s: Complex<f64>, q: f64) -> Newton {
    let u = s / scale;
    let modulus = magnitude(u);
    let zero = Complex::new(0.0, 0.0);
    let (mut value, mut slope, mut by_knob, mut total) = (zero, zero, zero, 0.0);
    for row in coefficients.iter().rev() {
        let (mut c, mut dc, mut size) = (0.0, 0.0, 0.0);
        for a in row.iter().rev() {
            // dc collects the derivative Σ k·a_k·q^(k−1).
            dc = dc * q + c;
            c = c * q + a;
            size = size * q + libm::fabs(*a);
        }
        slope = slope * u + value;
        value = value * u + c;
        by_knob = by_knob * u + dc * q;
        total = total * modulus + size;
    }
    let inverse = reciprocal(slope) * scale;
    Newton {
        correction: value * inverse,
        // The rounding of the evaluation, and of s itself.
        floor: f64::EPSILON * (4.0 * coefficients.len() as f64 * total * magnitude(inverse) + magnitude(s)),
        motion: -by_knob * inverse,
    }
}

/// 1/z without overflow of the squared modulus.
fn reciprocal(z: Complex<f64>) -> Complex<f64> {
    let scale = z.re.abs().max(z.im.abs());
    let unit = z / scale;
    unit.conj() / (unit.norm_sqr() * scale)
}
