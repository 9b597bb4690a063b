//! First approximations of all complex roots in f64, for coefficients of any size.
//!
//! Starting points from the Newton polygon (D. A. Bini, "Numerical computation of polynomial zeros by means of Aberth's
//! method", Numerical Algorithms 13, 1996), then simultaneous iteration (O. Aberth, "Iteration methods for finding all
//! zeros of a polynomial simultaneously", Mathematics of Computation 27, 1973; L. W. Ehrlich, CACM 10, 1967).
//! The start is complex on purpose: from real points the iteration never leaves the real axis.

use super::IntPoly;
use super::dyadic::Dyadic;
use crate::numerics::magnitude;
use alloc::vec::Vec;
use nalgebra::Complex;

/// Sweeps over all roots. Simple roots take about ten; clusters stop improving long before this, and are left to the
/// exact iteration that follows.
const SWEEP_CAP: usize = 60;

/// Turns the starting points off the axes of symmetry; any angle that is no simple fraction of a turn does.
const START_ANGLE: f64 = 0.7;

/// Coefficients as mantissas in ±[0.5, 1] with powers of two, so that no size overflows.
pub(super) struct Scaled {
    mantissas: Vec<f64>,
    exponents: Vec<i64>,
}

impl Scaled {
    pub(super) fn new(p: &IntPoly) -> Self {
        let parts = p.coefficients().iter().map(|c| Dyadic::new(c.clone(), 0).to_f64_parts());
        let (mantissas, exponents) = parts.unzip();
        Self { mantissas, exponents }
    }

    /// p(z)/p'(z), and whether p(z) is beyond its rounding error. None where p' vanishes in f64.
    fn newton(&self, z: Complex<f64>) -> Option<(Complex<f64>, bool)> {
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

    /// Points on circles whose radii are the slopes of the upper convex hull of (i, log2 |a_i|).
    fn starting_points(&self) -> Vec<Complex<f64>> {
        let log = |i: usize| libm::log2(libm::fabs(self.mantissas[i])) + self.exponents[i] as f64;
        let mut hull: Vec<usize> = Vec::new();
        for i in (0..self.mantissas.len()).filter(|i| self.mantissas[*i] != 0.0) {
            while let [.., a, b] = hull[..] {
                if (log(b) - log(a)) * (i - a) as f64 > (log(i) - log(a)) * (b - a) as f64 {
                    break;
                }
                hull.pop();
            }
            hull.push(i);
        }
        let mut points = Vec::with_capacity(self.mantissas.len());
        for pair in hull.windows(2) {
            let count = pair[1] - pair[0];
            let radius = libm::exp2((log(pair[0]) - log(pair[1])) / count as f64);
            for k in 0..count {
                let turn =
                    core::f64::consts::TAU * (k as f64 / count as f64 + pair[0] as f64 / self.mantissas.len() as f64);
                let angle = turn + START_ANGLE;
                points.push(Complex::new(radius * libm::cos(angle), radius * libm::sin(angle)));
            }
        }
        points
    }
}

/// The power of two just below a positive number.
fn binary_exponent(value: f64) -> i64 {
    i64::from(libm::ilogb(value.max(f64::MIN_POSITIVE)))
}

/// Approximations of all roots of a polynomial without roots at zero; not certified, clusters are poor.
pub(super) fn approximate_roots(p: &IntPoly) -> Vec<Complex<f64>> {
    let scaled = Scaled::new(p);
    let mut z = scaled.starting_points();
    let mut settled = alloc::vec![false; z.len()];
    for _ in 0..SWEEP_CAP {
        for i in 0..z.len() {
            if settled[i] {
                continue;
            }
            let Some((newton, certain)) = scaled.newton(z[i]) else { continue };
            let correction = newton / (Complex::new(1.0, 0.0) - newton * repulsion(&z, i));
            if correction.re.is_finite() && correction.im.is_finite() {
                z[i] -= correction;
            }
            settled[i] = !certain || magnitude(correction) <= f64::EPSILON * magnitude(z[i]);
        }
        if settled.iter().all(|done| *done) {
            break;
        }
    }
    z
}

/// Σ 1/(z_i − z_j) over the other roots.
fn repulsion(z: &[Complex<f64>], i: usize) -> Complex<f64> {
    let mut sum = Complex::new(0.0, 0.0);
    for (j, other) in z.iter().enumerate() {
        let difference = z[i] - other;
        if j != i && difference != Complex::new(0.0, 0.0) {
            sum += Complex::new(1.0, 0.0) / difference;
        }
    }
    sum
}
