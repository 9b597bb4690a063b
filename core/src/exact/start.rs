//! First approximations of all complex roots in f64, for coefficients of any size.
//!
//! Starting points from the Newton polygon (D. A. Bini, "Numerical computation of polynomial zeros by means of Aberth's
//! method", Numerical Algorithms 13, 1996), then simultaneous iteration (O. Aberth, "Iteration methods for finding all
//! zeros of a polynomial simultaneously", Mathematics of Computation 27, 1973; L. W. Ehrlich, CACM 10, 1967).
//! The start is complex on purpose: from real points the iteration never leaves the real axis.

use super::IntPoly;
use super::scaled::Scaled;
use crate::numerics::magnitude;
use alloc::vec::Vec;
use nalgebra::Complex;

/// Sweeps over all roots. Simple roots take about ten; clusters stop improving long before this, and are left to the
/// exact iteration that follows.
const SWEEP_CAP: usize = 60;

/// Turns the starting points off the axes of symmetry; any angle that is no simple fraction of a turn does.
const START_ANGLE: f64 = 0.7;

impl Scaled {
    /// The upper convex hull of (i, log2 |a_i|): index pairs with the radius of the circle that their slope gives.
    fn circles(&self) -> Vec<(usize, usize, f64)> {
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
        let radius = |a: usize, b: usize| libm::exp2((log(a) - log(b)) / (b - a) as f64);
        hull.windows(2).map(|pair| (pair[0], pair[1], radius(pair[0], pair[1]))).collect()
    }

    /// About the magnitudes of the roots, ascending; each within a factor of twice the degree.
    pub fn radii(&self) -> impl Iterator<Item = f64> {
        self.circles().into_iter().map(|(_, _, radius)| radius)
    }

    /// Points on those circles.
    fn starting_points(&self) -> Vec<Complex<f64>> {
        let mut points = Vec::with_capacity(self.mantissas.len());
        for (from, to, radius) in self.circles() {
            let count = to - from;
            for k in 0..count {
                let turn =
                    core::f64::consts::TAU * (k as f64 / count as f64 + from as f64 / self.mantissas.len() as f64);
                let angle = turn + START_ANGLE;
                points.push(Complex::new(radius * libm::cos(angle), radius * libm::sin(angle)));
            }
        }
        points
    }
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
