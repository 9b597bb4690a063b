//! Polynomials whose coefficients are known up to an error: (center ± radius)·2^exponent, coefficient by coefficient.
//!
//! Sums and products of these are exact integer arithmetic on centers and radii, so that nothing is rounded here. Where
//! center and radius are both zero the coefficient is zero without doubt.

use crate::exact::{Dyadic, IntPoly, Interval};
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_int::ops::BitTest;

/// Bits of the smallest radius that are kept: its relative growth by trimming is below 2^−this.
const RADIUS_BITS: usize = 8;

/// A polynomial with enclosed coefficients, lowest power first.
#[derive(Clone, Debug, PartialEq, Eq, Default)]
pub struct Enclosed {
    /// The middles.
    pub center: IntPoly,
    /// The largest deviations from the middles; none is negative.
    pub radius: IntPoly,
    /// The power of two that multiplies both.
    pub exponent: i64,
}

/// A point of the real axis where the unit circle crosses it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Unit {
    /// z = 1.
    Plus,
    /// z = −1.
    Minus,
}

impl Enclosed {
    /// A polynomial without error.
    pub fn exact(center: IntPoly) -> Self {
        Self { center, radius: IntPoly::default(), exponent: 0 }
    }

    /// The constant 1.
    pub fn one() -> Self {
        Self::exact(IntPoly::from_i64(&[1]))
    }

    /// The degree, as far as any coefficient may differ from zero.
    pub fn degree(&self) -> usize {
        self.center.degree().max(self.radius.degree())
    }

    /// True for the polynomial that is zero without doubt.
    pub fn is_zero(&self) -> bool {
        self.center.is_zero() && self.radius.is_zero()
    }

    /// True where the coefficient of x^i is zero without doubt.
    pub fn vanishes_at(&self, i: usize) -> bool {
        self.center.coefficient(i).is_zero() && self.radius.coefficient(i).is_zero()
    }

    /// The coefficient of x^i.
    pub fn coefficient(&self, i: usize) -> Interval {
        let (center, radius) = (self.center.coefficient(i), self.radius.coefficient(i));
        Interval {
            low: Dyadic::new(&center - &radius, self.exponent),
            high: Dyadic::new(center + radius, self.exponent),
        }
    }

    /// Product.
    pub fn times(&self, other: &Self) -> Self {
        let sizes = |p: &IntPoly| absolute(p);
        let mut radius = self.radius.times(&other.radius);
        if !other.radius.is_zero() {
            radius = radius.plus(&sizes(&self.center).times(&other.radius));
        }
        if !self.radius.is_zero() {
            radius = radius.plus(&self.radius.times(&sizes(&other.center)));
        }
        Self { center: self.center.times(&other.center), radius, exponent: self.exponent + other.exponent }
    }

    /// Product with an exact polynomial.
    pub fn times_exact(&self, other: &IntPoly) -> Self {
        Self {
            center: self.center.times(other),
            radius: if self.radius.is_zero() { IntPoly::default() } else { self.radius.times(&absolute(other)) },
            exponent: self.exponent,
        }
    }

    /// a·self.
    pub fn scaled(&self, a: &IBig) -> Self {
        self.times_exact(&IntPoly::new([a.clone()].into()))
    }

    /// Sum.
    pub fn plus(&self, other: &Self) -> Self {
        let (a, b) = (self, other);
        if a.is_zero() {
            return b.clone();
        }
        if b.is_zero() {
            return a.clone();
        }
        let exponent = a.exponent.min(b.exponent);
        let aligned = |p: &IntPoly, own: i64, other: &IntPoly, theirs: i64| {
            let factor = |e: i64| IBig::ONE << ((e - exponent) as usize);
            p.combined(&factor(own), other, &factor(theirs))
        };
        Self {
            center: aligned(&a.center, a.exponent, &b.center, b.exponent),
            radius: aligned(&a.radius, a.exponent, &b.radius, b.exponent),
            exponent,
        }
    }

    /// The negative polynomial.
    pub fn negated(&self) -> Self {
        Self { center: self.center.negated(), radius: self.radius.clone(), exponent: self.exponent }
    }

    /// Difference.
    pub fn minus(&self, other: &Self) -> Self {
        self.plus(&other.negated())
    }

    /// The quotient by z ∓ 1, of a polynomial that is known to vanish at z = ±1.
    pub fn without_root(&self, at: Unit) -> Self {
        let quotient = |p: &IntPoly, sign: &IBig| {
            let mut rest = IBig::ZERO;
            let mut found: Vec<IBig> = Vec::with_capacity(p.degree());
            for c in p.coefficients().iter().skip(1).rev() {
                rest = c + sign * rest;
                found.push(rest.clone());
            }
            found.reverse();
            IntPoly::new(found)
        };
        let sign = match at {
            Unit::Plus => IBig::ONE,
            Unit::Minus => IBig::NEG_ONE,
        };
        Self {
            center: quotient(&self.center, &sign),
            radius: quotient(&self.radius, &IBig::ONE),
            exponent: self.exponent,
        }
    }

    /// (1 − v)^degree·p((1 + v)/(1 − v)): the unit circle becomes the imaginary axis, its inside the left half plane.
    pub fn from_circle(&self, degree: usize) -> Self {
        // Σ r_i·(1 + v)^i·(1 + v)^(degree − i) bounds every coefficient of the error.
        let total: IBig = self.radius.coefficients().iter().sum();
        let radius = (0..degree).fold(IntPoly::new([total].into()), |p, _| p.times(&IntPoly::from_i64(&[1, 1])));
        Self { center: self.center.from_circle(&IBig::ONE, &IBig::ONE, degree), radius, exponent: self.exponent }
    }

    /// On v = jw with x = w²: p(jw) = e(x) + jw·o(x). Returns e and o.
    pub fn axis_parts(&self) -> (Self, Self) {
        let (even, odd) = self.center.axis_parts();
        let part =
            |offset: usize| IntPoly::new(self.radius.coefficients().iter().skip(offset).step_by(2).cloned().collect());
        let of = |center: IntPoly, radius: IntPoly| Self { center, radius, exponent: self.exponent };
        (of(even, part(0)), of(odd, part(1)))
    }

    /// An enclosure of the values over an interval of x ≥ 0.
    pub fn over_interval(&self, x: &Interval) -> Interval {
        let center = self.center.over_interval(x);
        let error = self.radius.over_interval(x).high;
        let scaled = |d: Dyadic| Dyadic::new(d.mantissa, d.exponent + self.exponent);
        Interval { low: scaled(&center.low - &error), high: scaled(&center.high + &error) }
    }

    /// Polynomials below and above on x ≥ 0, both times 2^−exponent.
    pub fn bounds(&self) -> [IntPoly; 2] {
        [self.center.minus(&self.radius), self.center.plus(&self.radius)]
    }

    /// The same without the bits that the smallest radius makes meaningless.
    pub fn trimmed(&self) -> Self {
        let sizes = self.radius.coefficients().iter().filter(|r| !r.is_zero()).map(BitTest::bit_len);
        let excess = sizes.min().unwrap_or(0).saturating_sub(RADIUS_BITS);
        if excess == 0 {
            return self.clone();
        }
        // A coefficient that is zero without doubt stays so.
        let top = self.degree();
        let center = IntPoly::new(self.center.coefficients().iter().map(|c| c >> excess).collect());
        let radius = (0..=top).map(|i| {
            let grown = (self.radius.coefficient(i) >> excess) + 2;
            if self.vanishes_at(i) { IBig::ZERO } else { grown }
        });
        Self { center, radius: IntPoly::new(radius.collect()), exponent: self.exponent + excess as i64 }
    }
}

/// |c_i| for every coefficient.
fn absolute(p: &IntPoly) -> IntPoly {
    let size = |c: &IBig| if *c < IBig::ZERO { -c } else { c.clone() };
    IntPoly::new(p.coefficients().iter().map(size).collect())
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn enclosed(center: &[i64], radius: &[i64]) -> Enclosed {
        Enclosed { center: IntPoly::from_i64(center), radius: IntPoly::from_i64(radius), exponent: -2 }
    }

    /// A member of the enclosure, times 4.
    fn member(p: &Enclosed, part: i64) -> IntPoly {
        IntPoly::new((0..=p.degree()).map(|i| p.center.coefficient(i) * 4 + p.radius.coefficient(i) * part).collect())
    }

    fn holds(p: &Enclosed, value: &IntPoly, scale: i64) -> bool {
        (0..=p.degree().max(value.degree())).all(|i| {
            let off = p.center.coefficient(i) * scale - value.coefficient(i);
            off.clone() <= p.radius.coefficient(i) * scale && -off <= p.radius.coefficient(i) * scale
        })
    }

    proptest! {
        #[test]
        fn every_member_stays_inside(
            a in prop::collection::vec(-50i64..50, 1..6), ra in prop::collection::vec(0i64..5, 1..6),
            b in prop::collection::vec(-50i64..50, 1..6), rb in prop::collection::vec(0i64..5, 1..6),
            i in -4i64..5, k in -4i64..5,
        ) {
            let (p, q) = (enclosed(&a, &ra), enclosed(&b, &rb));
            let (x, y) = (member(&p, i), member(&q, k));
            prop_assert!(holds(&p.times(&q), &x.times(&y), 16));
            prop_assert!(holds(&p.minus(&q), &x.minus(&y), 4));
            let degree = p.degree();
            prop_assert!(holds(&p.from_circle(degree), &x.from_circle(&IBig::ONE, &IBig::ONE, degree), 4));
            let root = IntPoly::from_i64(&[1, 1]);
            prop_assert!(holds(&p.times_exact(&root).without_root(Unit::Minus), &x, 4));
        }
    }
}
