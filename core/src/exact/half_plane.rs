//! How many roots of a polynomial lie right of the imaginary axis, and how many on it: an exact count.
//!
//! On s = jw with x = w², p(jw) = e(x) + jw·o(x). The Cauchy index I of o/e over x > 0, from a signed remainder
//! sequence, gives the count (F. R. Gantmacher, The Theory of Matrices, vol. 2, Chelsea 1959, chapter XV, sections 3-5;
//! the singular cases by taking out g = gcd(e, o)):
//! right = (n − 2·deg g − σ)/2 + I + (deg g − r), axis = k + 2r, with k roots at the origin stripped first, r the
//! roots x > 0 of g with multiplicity, and σ = sgn(lc e · lc o) for odd n, else 0.
//! It covers the zero first element, the zero row and the dropped degree of a Routh array.

use super::dyadic::sign_of;
use super::real_roots::count_positive;
use super::{ExactError, IntPoly, gcd};

/// Roots of a polynomial by half plane, with multiplicity.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Default)]
pub struct HalfPlaneCount {
    /// Roots with a positive real part.
    pub right: usize,
    /// Roots with real part zero.
    pub axis: usize,
}

impl HalfPlaneCount {
    /// The counts of a product.
    pub fn plus(self, other: Self) -> Self {
        Self { right: self.right + other.right, axis: self.axis + other.axis }
    }

    /// True where every root has a negative real part.
    pub fn is_stable(self) -> bool {
        self.right == 0 && self.axis == 0
    }
}

/// Counts the roots of any polynomial but zero; a constant has none.
///
/// # Errors
/// [`ExactError::RootsNotSeparated`] when roots on the axis cannot be counted within the caps.
pub fn count(p: &IntPoly) -> Result<HalfPlaneCount, ExactError> {
    let (p, at_origin) = p.without_zero_roots();
    let degree = p.degree();
    if degree == 0 {
        return Ok(HalfPlaneCount { right: 0, axis: at_origin });
    }
    let (even, odd) = p.axis_parts();
    let common = gcd::gcd(&even, &odd);
    let common_degree = common.degree();
    let on_axis = count_positive(&common)?;
    let sigma = if degree % 2 == 1 { even.leading_sign() * odd.leading_sign() } else { 0 };
    let index = cauchy_index(&even, &odd);
    let doubled = degree as i64 - 2 * common_degree as i64 - i64::from(sigma) + 2 * index;
    let right = doubled / 2 + common_degree as i64 - on_axis as i64;
    Ok(HalfPlaneCount { right: right.max(0) as usize, axis: at_origin + 2 * on_axis })
}

/// The Cauchy index of numerator/denominator over x > 0: jumps from −∞ to +∞ minus jumps from +∞ to −∞.
fn cauchy_index(denominator: &IntPoly, numerator: &IntPoly) -> i64 {
    let mut before = denominator.clone();
    let mut current = numerator.clone();
    let mut at_zero = Variations::default();
    let mut at_infinity = Variations::default();
    at_zero.push(before.lowest_sign_at_zero());
    at_infinity.push(before.leading_sign());
    while !current.is_zero() {
        at_zero.push(current.lowest_sign_at_zero());
        at_infinity.push(current.leading_sign());
        let next = before.positive_remainder(&current).negated().primitive();
        before = current;
        current = next;
    }
    at_zero.changes - at_infinity.changes
}

impl IntPoly {
    /// The sign of the constant coefficient, or, where it vanishes, of p just right of zero.
    fn lowest_sign_at_zero(&self) -> i32 {
        match self.coefficients().first().map_or(0, sign_of) {
            0 => self.lowest_sign(),
            sign => sign,
        }
    }
}

/// Sign changes of a sequence, counted as it comes.
#[derive(Default)]
struct Variations {
    last: i32,
    changes: i64,
}

impl Variations {
    fn push(&mut self, sign: i32) {
        if sign != 0 {
            self.changes += i64::from(self.last != 0 && self.last != sign);
            self.last = sign;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use alloc::vec::Vec;
    use proptest::prelude::*;

    fn p(c: &[i64]) -> IntPoly {
        IntPoly::from_i64(c)
    }

    fn counts(c: &[i64]) -> (usize, usize) {
        let n = count(&p(c)).expect("counted");
        (n.right, n.axis)
    }

    #[test]
    fn counts_low_orders() {
        assert_eq!(counts(&[7]), (0, 0));
        assert_eq!(counts(&[1, 1]), (0, 0));
        assert_eq!(counts(&[-1, 1]), (1, 0));
        assert_eq!(counts(&[0, 0, 1]), (0, 2));
        assert_eq!(counts(&[1, 0, 1]), (0, 2));
        assert_eq!(counts(&[-1, 0, 1]), (1, 0));
        assert_eq!(counts(&[1, -1, 1]), (2, 0));
        assert_eq!(counts(&[1, 0, 0, 0, 1]), (2, 0));
        assert_eq!(counts(&[4, 0, 5, 0, 1]), (0, 4));
    }

    proptest! {
        #[test]
        fn planted_roots_are_counted(
            real in prop::collection::vec(-9i64..10, 0..6),
            pairs in prop::collection::vec((-4i64..5, 0i64..5), 0..5),
            negative in any::<bool>(),
        ) {
            let mut product = p(&[if negative { -3 } else { 2 }]);
            let mut expected = HalfPlaneCount::default();
            for r in real {
                product = product.times(&p(&[-r, 1]));
                expected.right += usize::from(r > 0);
                expected.axis += usize::from(r == 0);
            }
            for (re, im) in pairs {
                // (s − re)² + im²
                product = product.times(&p(&[re * re + im * im, -2 * re, 1]));
                expected.right += 2 * usize::from(re > 0);
                expected.axis += 2 * usize::from(re == 0);
            }
            prop_assert_eq!(count(&product).expect("counted"), expected, "{:?}", product);
        }

        #[test]
        fn reversing_the_coefficients_keeps_the_count(c in prop::collection::vec(-20i64..20, 2..14)) {
            // s → 1/s maps each half plane onto itself.
            prop_assume!(c[0] != 0 && c[c.len() - 1] != 0);
            let reversed: Vec<i64> = c.iter().rev().copied().collect();
            prop_assert_eq!(counts(&c), counts(&reversed));
        }
    }
}
