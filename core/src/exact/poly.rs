//! Polynomials with integer coefficients, lowest power first.

use super::dyadic::{Dyadic, Interval, sign_of};
use alloc::vec;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_int::ops::{BitTest, DivRem, Gcd};
use dashu_ratio::RBig;

/// Significant bits kept by interval evaluation. More costs time; fewer leaves edges of high-order loops undecided
/// until the argument is refined further.
const EVALUATION_BITS: usize = 512;

/// A polynomial with integer coefficients; the last one is not zero. No coefficients: the zero polynomial.
#[derive(Clone, Debug, PartialEq, Eq, Default)]
pub struct IntPoly {
    coefficients: Vec<IBig>,
}

impl IntPoly {
    /// From coefficients, lowest power first; zeros on top are dropped.
    pub fn new(mut coefficients: Vec<IBig>) -> Self {
        while coefficients.last().is_some_and(IBig::is_zero) {
            coefficients.pop();
        }
        Self { coefficients }
    }

    /// From machine integers, lowest power first.
    pub fn from_i64(coefficients: &[i64]) -> Self {
        Self::new(coefficients.iter().map(|c| IBig::from(*c)).collect())
    }

    /// The coefficients, lowest power first; the last one is not zero.
    pub fn coefficients(&self) -> &[IBig] {
        &self.coefficients
    }

    /// The coefficient of x^i; zero above the degree.
    pub fn coefficient(&self, i: usize) -> IBig {
        self.coefficients.get(i).cloned().unwrap_or(IBig::ZERO)
    }

    /// True for the zero polynomial.
    pub fn is_zero(&self) -> bool {
        self.coefficients.is_empty()
    }

    /// The degree; 0 for constants and for the zero polynomial.
    pub fn degree(&self) -> usize {
        self.coefficients.len().saturating_sub(1)
    }

    /// The leading coefficient; 0 for the zero polynomial.
    pub fn leading(&self) -> IBig {
        self.coefficients.last().cloned().unwrap_or(IBig::ZERO)
    }

    /// The sign of the leading coefficient.
    pub fn leading_sign(&self) -> i32 {
        self.coefficients.last().map_or(0, sign_of)
    }

    /// The sign of the lowest coefficient that is not zero: the sign of p(x) for small x > 0.
    pub fn lowest_sign(&self) -> i32 {
        self.coefficients.iter().map(sign_of).find(|s| *s != 0).unwrap_or(0)
    }

    /// The largest bit length of a coefficient.
    pub fn bits(&self) -> usize {
        self.coefficients.iter().map(BitTest::bit_len).max().unwrap_or(0)
    }

    /// Sum.
    pub fn plus(&self, other: &Self) -> Self {
        self.combined(&IBig::ONE, other, &IBig::ONE)
    }

    /// Difference.
    pub fn minus(&self, other: &Self) -> Self {
        self.combined(&IBig::ONE, other, &IBig::NEG_ONE)
    }

    /// a·self + b·other.
    pub fn combined(&self, a: &IBig, other: &Self, b: &IBig) -> Self {
        let length = self.coefficients.len().max(other.coefficients.len());
        Self::new(
            (0..length)
                .map(|i| {
                    let first = self.coefficients.get(i).map_or(IBig::ZERO, |c| c * a);
                    other.coefficients.get(i).map_or(first.clone(), |c| first + c * b)
                })
                .collect(),
        )
    }

    /// Product.
    pub fn times(&self, other: &Self) -> Self {
        if self.is_zero() || other.is_zero() {
            return Self::default();
        }
        let mut product = vec![IBig::ZERO; self.coefficients.len() + other.coefficients.len() - 1];
        for (i, a) in self.coefficients.iter().enumerate() {
            for (j, b) in other.coefficients.iter().enumerate() {
                product[i + j] += a * b;
            }
        }
        Self::new(product)
    }

    /// The negative polynomial.
    pub fn negated(&self) -> Self {
        Self { coefficients: self.coefficients.iter().map(|c| -c).collect() }
    }

    /// The derivative.
    pub fn derivative(&self) -> Self {
        Self::new(self.coefficients.iter().enumerate().skip(1).map(|(i, c)| c * i).collect())
    }

    /// The greatest common divisor of the coefficients; 0 for the zero polynomial.
    pub fn content(&self) -> IBig {
        let mut content = IBig::ZERO;
        for c in self.coefficients.iter().filter(|c| !c.is_zero()) {
            content = if content.is_zero() { c.clone() } else { (&content).gcd(c).into() };
            if content.is_one() {
                break;
            }
        }
        if sign_of(&content) < 0 { -content } else { content }
    }

    /// The polynomial over its content; signs are kept.
    pub fn primitive(&self) -> Self {
        let content = self.content();
        if content.is_zero() || content.is_one() {
            return self.clone();
        }
        Self { coefficients: self.coefficients.iter().map(|c| c / &content).collect() }
    }

    /// The remainder of |lc|^k·self by `divisor` for some k ≥ 0: a positive multiple of the remainder over the rationals.
    ///
    /// # Panics
    /// If `divisor` is zero.
    pub fn positive_remainder(&self, divisor: &Self) -> Self {
        assert!(!divisor.is_zero(), "remainder by the zero polynomial");
        let leading = divisor.leading();
        let (magnitude, sign) = if sign_of(&leading) < 0 { (-leading, -1) } else { (leading, 1) };
        let mut rest = self.coefficients.clone();
        while rest.len() >= divisor.coefficients.len() {
            let top = rest[rest.len() - 1].clone() * sign;
            let shift = rest.len() - divisor.coefficients.len();
            for c in &mut rest {
                *c *= &magnitude;
            }
            for (i, c) in divisor.coefficients.iter().enumerate() {
                rest[shift + i] -= &top * c;
            }
            rest.pop();
            while rest.last().is_some_and(IBig::is_zero) {
                rest.pop();
            }
        }
        Self { coefficients: rest }
    }

    /// The quotient where `divisor` divides exactly over the integers; None where it does not.
    pub fn exactly_over(&self, divisor: &Self) -> Option<Self> {
        if divisor.is_zero() {
            return None;
        }
        let mut rest = self.coefficients.clone();
        let mut quotient = Vec::new();
        let leading = divisor.leading();
        while rest.len() >= divisor.coefficients.len() {
            let top = rest.pop()?;
            let (factor, remainder) = top.div_rem(&leading);
            if !remainder.is_zero() {
                return None;
            }
            let shift = rest.len() + 1 - divisor.coefficients.len();
            for (i, c) in divisor.coefficients[..divisor.degree()].iter().enumerate() {
                rest[shift + i] -= &factor * c;
            }
            quotient.push(factor);
        }
        quotient.reverse();
        rest.iter().all(IBig::is_zero).then(|| Self::new(quotient))
    }

    /// p(−x).
    pub fn mirrored(&self) -> Self {
        Self {
            coefficients: self
                .coefficients
                .iter()
                .enumerate()
                .map(|(i, c)| if i % 2 == 1 { -c } else { c.clone() })
                .collect(),
        }
    }

    /// x^degree·p(1/x), without the roots at zero.
    pub fn reversed(&self) -> Self {
        Self::new(self.coefficients.iter().rev().cloned().collect())
    }

    /// The polynomial without its roots at zero, and how many there were.
    pub fn without_zero_roots(&self) -> (Self, usize) {
        let zeros = self.coefficients.iter().take_while(|c| c.is_zero()).count();
        (Self { coefficients: self.coefficients[zeros..].to_vec() }, zeros)
    }

    /// On s = jw, with x = w²: p(jw) = e(x) + jw·o(x). Returns e and o.
    pub fn axis_parts(&self) -> (Self, Self) {
        let part = |offset: usize| {
            Self::new(
                self.coefficients
                    .iter()
                    .skip(offset)
                    .step_by(2)
                    .enumerate()
                    .map(|(i, c)| if i % 2 == 1 { -c } else { c.clone() })
                    .collect(),
            )
        };
        (part(0), part(1))
    }

    /// The sign of p at a dyadic number.
    pub fn sign_at(&self, x: &Dyadic) -> i32 {
        sign_of(&self.scaled_value(x).mantissa)
    }

    /// The exact value of p at a dyadic number.
    pub fn scaled_value(&self, x: &Dyadic) -> Dyadic {
        if x.exponent >= 0 {
            let x = &x.mantissa << (x.exponent as usize);
            let value = self.coefficients.iter().rev().fold(IBig::ZERO, |sum, c| sum * &x + c);
            return Dyadic::new(value, 0);
        }
        let step = -x.exponent as usize;
        let mut value = IBig::ZERO;
        for (k, c) in self.coefficients.iter().rev().enumerate() {
            value = value * &x.mantissa + (c << (step * k));
        }
        Dyadic::new(value, x.exponent * self.degree() as i64)
    }

    /// An enclosure of the values of p over an interval.
    pub fn over_interval(&self, x: &Interval) -> Interval {
        let mut value = Interval::point(Dyadic::ZERO);
        for c in self.coefficients.iter().rev() {
            value = value.times(x).plus(&Interval::point(Dyadic::new(c.clone(), 0))).rounded(EVALUATION_BITS);
        }
        value
    }

    /// c^degree·p(s − a/c), with degree at least that of p, as a polynomial in s.
    pub fn shifted_right(&self, a: &IBig, c: &IBig, degree: usize) -> Self {
        // Horner's scheme in (c·s − a).
        let factor = Self::new(vec![-a, c.clone()]);
        let mut power = IBig::ONE;
        let mut sum = Self::default();
        for i in (0..=degree).rev() {
            let coefficient = Self::new(vec![self.coefficient(i) * &power]);
            sum = sum.times(&factor).plus(&coefficient);
            power *= c;
        }
        sum
    }

    /// c^degree·(1 − v)^degree·p(r·(1 + v)/(1 − v)), r = a/c: the circle |s| = r becomes the imaginary axis of v, its
    /// inside the left half plane.
    pub fn from_circle(&self, a: &IBig, c: &IBig, degree: usize) -> Self {
        let (up, down) = (Self::from_i64(&[1, 1]), Self::from_i64(&[1, -1]));
        let mut sum = Self::default();
        let mut power = IBig::ONE;
        let mut below = Self::from_i64(&[1]);
        for i in (0..=degree).rev() {
            // Σ c_i·a^i·c^(n−i)·(1 + v)^i·(1 − v)^(n−i), by Horner's scheme in a·(1 + v).
            let term = below.times(&Self::new(vec![self.coefficient(i) * &power]));
            sum = sum.times(&up).times(&Self::new(vec![a.clone()])).plus(&term);
            power *= c;
            below = below.times(&down);
        }
        sum
    }

    /// A positive integer multiple of a + (n/d)·b, where n/d is the given rational.
    pub fn with_rational_multiple(&self, factor: &RBig, other: &Self) -> Self {
        self.combined(&factor.denominator().clone().into(), other, factor.numerator())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn p(c: &[i64]) -> IntPoly {
        IntPoly::from_i64(c)
    }

    #[test]
    fn division_undoes_the_product() {
        let (a, b) = (p(&[3, -1, 4]), p(&[-2, 0, 0, 5]));
        assert_eq!(a.times(&b).exactly_over(&b), Some(a.clone()));
        assert_eq!(a.times(&b).plus(&p(&[1])).exactly_over(&b), None);
    }

    #[test]
    fn a_remainder_keeps_its_sign() {
        // x² by −2x + 1: remainder 1/4 > 0.
        assert_eq!(p(&[0, 0, 1]).positive_remainder(&p(&[1, -2])).lowest_sign(), 1);
        // −x² by −2x + 1: remainder −1/4.
        assert_eq!(p(&[0, 0, -1]).positive_remainder(&p(&[1, -2])).lowest_sign(), -1);
    }

    #[test]
    fn the_axis_parts_are_real_and_imaginary_part() {
        // (jw)³ + 6(jw)² + 11jw + 6 = (6 − 6x) + jw(11 − x)
        let (e, o) = p(&[6, 11, 6, 1]).axis_parts();
        assert_eq!((e, o), (p(&[6, -6]), p(&[11, -1])));
    }

    #[test]
    fn values_at_dyadic_numbers_are_exact() {
        let x = Dyadic::new(IBig::from(3), -1);
        assert_eq!(p(&[1, 0, 4]).scaled_value(&x).to_f64().to_bits(), 10f64.to_bits());
        assert_eq!(p(&[-9, 0, 4]).sign_at(&x), 0);
        let around = p(&[1, 0, 4])
            .over_interval(&Interval { low: Dyadic::new(IBig::from(1), 0), high: Dyadic::new(IBig::from(2), 0) });
        assert!(around.low.to_f64() <= 5.0 && around.high.to_f64() >= 17.0);
    }
}
