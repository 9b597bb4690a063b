//! Points of the s-plane to twice the digits of f64.

use crate::exact::complex_roots::ComplexDyadic;
use nalgebra::Complex;

/// What f64 keeps of a number that is written as the sum of two.
pub(super) const ROUNDING: f64 = f64::EPSILON * f64::EPSILON;

/// A point as the sum of two complex numbers, the second below the rounding of the first: poles and zeros nearer to each
/// other than f64 can tell keep their distance to full precision.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Position {
    high: Complex<f64>,
    low: Complex<f64>,
}

impl Position {
    /// A point that f64 can tell.
    pub(super) fn new(s: Complex<f64>) -> Self {
        Self { high: s, low: Complex::new(0.0, 0.0) }
    }

    /// The nearest point.
    pub(super) fn nearest(s: &ComplexDyadic) -> Self {
        let high = s.to_f64();
        let low = ComplexDyadic::from_f64(high).map_or_else(Complex::default, |h| s.minus(&h));
        Self { high, low }
    }

    /// Rounded to f64.
    pub(super) fn rounded(self) -> Complex<f64> {
        self.high
    }

    /// The way from another point to this one, rounded once.
    pub(super) fn minus(self, other: Self) -> Complex<f64> {
        // Where the high parts are near to each other their difference is exact.
        (self.high - other.high) + (self.low - other.low)
    }

    /// The point a step away.
    pub(super) fn plus(self, step: Complex<f64>) -> Self {
        let (re, re_low) = sum((self.high.re, self.low.re), step.re);
        let (im, im_low) = sum((self.high.im, self.low.im), step.im);
        Self { high: Complex::new(re, im), low: Complex::new(re_low, im_low) }
    }

    /// The point on the other side of the real axis.
    pub(super) fn mirrored(self) -> Self {
        Self { high: self.high.conj(), low: self.low.conj() }
    }

    /// Whether it is on the real axis.
    pub(super) fn is_real(self) -> bool {
        self.high.im == 0.0
    }

    /// Moved to the real axis.
    pub(super) fn on_real_axis(self) -> Self {
        Self { high: Complex::new(self.high.re, 0.0), low: Complex::new(self.low.re, 0.0) }
    }
}

/// A sum of two parts plus one number, again in two parts (T. J. Dekker, "A floating-point technique for extending the
/// available precision", Numerische Mathematik 18, 1971; D. E. Knuth, The Art of Computer Programming, vol. 2, 4.2.2).
fn sum((high, low): (f64, f64), step: f64) -> (f64, f64) {
    let total = high + step;
    let part = total - high;
    let low = low + ((high - (total - part)) + (step - part));
    let rounded = total + low;
    (rounded, low - (rounded - total))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::numerics::magnitude;

    #[test]
    fn small_steps_are_not_lost() {
        let start = Position::new(Complex::new(-680.0, 3.0));
        let step = Complex::new(1e-25, -3e-24);
        let moved = start.plus(step);
        assert_eq!(moved.rounded(), start.rounded());
        assert!(magnitude(moved.minus(start) - step) < 1e-38);
        assert_eq!(moved.plus(-step).minus(start), Complex::new(0.0, 0.0));
    }

    #[test]
    fn the_real_axis_is_kept() {
        let on = Position::new(Complex::new(1.0, 0.0)).plus(Complex::new(1e-20, 0.0));
        assert!(on.is_real());
        assert!(!on.plus(Complex::new(0.0, 1e-40)).is_real());
        assert!(on.plus(Complex::new(0.0, 1e-40)).on_real_axis().is_real());
    }
}
