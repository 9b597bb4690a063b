//! Ratios of polynomials on the imaginary axis from exact values: a resonance may be narrower than f64 tells frequencies
//! apart, and then only an exact frequency shows what happens there.

use crate::exact::real_roots::RealRoot;
use crate::exact::scaled::Wide;
use crate::exact::{Dyadic, ExactError, IntPoly};
use crate::numerics::magnitude;
use nalgebra::Complex;

/// Squares of frequencies are refined to this many bits, and by as many more at a time while the ratio still changes
/// within the bracket.
const FIRST_BITS: i64 = 44;
const MORE_BITS: i64 = 30;

/// Bits after which a ratio counts as found all the same: the resonance is then 1e-90 of its frequency wide.
const MOST_BITS: i64 = 300;

/// A ratio is found where both ends of the bracket give it within this relative distance.
const AGREEMENT: f64 = 1e-11;

/// A polynomial p, ready for p(jω) at exact ω².
#[derive(Clone, Debug)]
struct OnAxis {
    even: IntPoly,
    odd: IntPoly,
}

impl OnAxis {
    fn new(p: &IntPoly) -> Self {
        let (even, odd) = p.axis_parts();
        Self { even, odd }
    }

    /// p(jω) for ω² = x; each part is rounded once.
    fn value(&self, x: &Dyadic) -> Wide {
        let omega = libm::sqrt(x.to_f64());
        let (re, im) = (self.even.scaled_value(x).to_f64_parts(), self.odd.scaled_value(x).to_f64_parts());
        Wide::from_parts(re, (im.0 * omega, im.1))
    }
}

/// above(jω)/below(jω).
#[derive(Clone, Debug)]
pub(super) struct AxisRatio {
    above: OnAxis,
    below: OnAxis,
}

impl AxisRatio {
    pub(super) fn new(above: &IntPoly, below: &IntPoly) -> Self {
        Self { above: OnAxis::new(above), below: OnAxis::new(below) }
    }

    /// The ratio at ω² = x; not finite where `below` vanishes.
    pub(super) fn at(&self, x: &Dyadic) -> Complex<f64> {
        self.above.value(x).over(self.below.value(x)).to_complex()
    }

    /// ω and the ratio where ω² is a root of p, refined until the ratio is told.
    ///
    /// # Errors
    /// From the refinement, when a cap is met.
    pub(super) fn at_root(&self, p: &IntPoly, mut root: RealRoot) -> Result<(f64, Complex<f64>), ExactError> {
        let mut bits = FIRST_BITS;
        loop {
            root.refine_to(p, bits)?;
            let (low, high) = (self.at(&root.bracket.low), self.at(&root.bracket.high));
            let apart = magnitude(high - low) > AGREEMENT * magnitude(low);
            if !apart || bits >= MOST_BITS {
                return Ok((libm::sqrt(root.to_f64()), self.at(&root.bracket.midpoint())));
            }
            bits += MORE_BITS;
        }
    }
}
