//! Enclosed polynomials in z with what is known about them without error: their roots at 0, 1 and −1.
//!
//! An enclosure alone never shows that a coefficient vanishes. An integrator is a pole at z = 1 exactly, a whole period of
//! delay a pole at z = 0, a zero that the trapezoidal rule takes from infinity a zero at z = −1; these are kept as counts.

use super::enclosed::{Enclosed, Unit};
use crate::exact::IntPoly;
use alloc::vec::Vec;
use dashu_int::IBig;

/// z^zeros·(z − 1)^ones·(z + 1)^minus_ones·Π factors.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Factored {
    /// Roots at z = 0.
    pub zeros: usize,
    /// Roots at z = 1.
    pub ones: usize,
    /// Roots at z = −1.
    pub minus_ones: usize,
    /// The rest; a factor that stands several times is known to be repeated.
    pub factors: Vec<Enclosed>,
    /// Pairs of the rest that are known to lie on the unit circle, all different.
    pub circle_pairs: usize,
}

impl Factored {
    /// A polynomial about whose roots nothing is known.
    pub fn plain(rest: Enclosed) -> Self {
        Self { zeros: 0, ones: 0, minus_ones: 0, factors: [rest].into(), circle_pairs: 0 }
    }

    /// An exact polynomial, its roots at 0, 1 and −1 taken out.
    pub fn from_exact(p: &IntPoly) -> Self {
        let (mut rest, zeros) = p.without_zero_roots();
        let mut strip = |root: &[i64; 2]| {
            let mut count = 0;
            while let Some(quotient) = rest.exactly_over(&IntPoly::from_i64(root)).filter(|_| !rest.is_zero()) {
                rest = quotient;
                count += 1;
            }
            count
        };
        let (ones, minus_ones) = (strip(&[-1, 1]), strip(&[1, 1]));
        Self { zeros, ones, minus_ones, factors: [Enclosed::exact(rest)].into(), circle_pairs: 0 }
    }

    /// True for the polynomial that is zero without doubt.
    pub fn is_zero(&self) -> bool {
        self.factors.iter().any(Enclosed::is_zero)
    }

    /// The factors multiplied.
    pub fn rest(&self) -> Enclosed {
        self.factors.iter().skip(1).fold(self.factors.first().cloned().unwrap_or_else(Enclosed::one), |p, f| p.times(f))
    }

    /// The degree, as far as the highest coefficient may differ from zero.
    pub fn degree(&self) -> usize {
        self.zeros + self.ones + self.minus_ones + self.factors.iter().map(Enclosed::degree).sum::<usize>()
    }

    /// Product.
    pub fn times(&self, other: &Self) -> Self {
        Self {
            zeros: self.zeros + other.zeros,
            ones: self.ones + other.ones,
            minus_ones: self.minus_ones + other.minus_ones,
            factors: self.factors.iter().chain(&other.factors).cloned().collect(),
            circle_pairs: self.circle_pairs + other.circle_pairs,
        }
    }

    /// Product with an enclosed constant.
    pub fn scaled(&self, constant: &Enclosed) -> Self {
        let mut found = self.clone();
        match found.factors.first_mut() {
            // A repeated factor must stay recognisable.
            Some(first) if self.factors.len() == 1 => *first = first.times(constant),
            _ => found.factors.push(constant.clone()),
        }
        found
    }

    /// Sum. Known roots that both have stay known.
    pub fn plus(&self, other: &Self) -> Self {
        if self.is_zero() {
            return other.clone();
        }
        if other.is_zero() {
            return self.clone();
        }
        let zeros = self.zeros.min(other.zeros);
        let ones = self.ones.min(other.ones);
        let minus_ones = self.minus_ones.min(other.minus_ones);
        let remaining = |p: &Self| p.without(zeros, ones, minus_ones).expanded();
        Self { zeros, ones, minus_ones, ..Self::plain(remaining(self).plus(&remaining(other))) }
    }

    /// The quotient by known roots.
    pub fn without(&self, zeros: usize, ones: usize, minus_ones: usize) -> Self {
        Self {
            zeros: self.zeros - zeros,
            ones: self.ones - ones,
            minus_ones: self.minus_ones - minus_ones,
            ..self.clone()
        }
    }

    /// Multiplied out.
    pub fn expanded(&self) -> Enclosed {
        self.rest().times_exact(&known_factor(self.zeros, self.ones, self.minus_ones))
    }

    /// The rest is known to vanish at z = 1 or z = −1.
    pub fn with_root(self, at: Unit) -> Self {
        let factors = [self.rest().without_root(at)].into();
        match at {
            Unit::Plus => Self { ones: self.ones + 1, factors, ..self },
            Unit::Minus => Self { minus_ones: self.minus_ones + 1, factors, ..self },
        }
    }

    /// The middle of the product, each factor cut to `bits` bits by itself so that what is known of roots stays true, as an
    /// integer polynomial and a power of two.
    pub fn middle(&self, bits: usize) -> (IntPoly, i64) {
        let known = known_factor(self.zeros, self.ones, self.minus_ones);
        self.factors.iter().fold((known, 0), |(product, exponent), factor| {
            let excess = factor.center.bits().saturating_sub(bits);
            let cut = |c: &IBig| if excess == 0 { c.clone() } else { c >> excess };
            let center = IntPoly::new(factor.center.coefficients().iter().map(cut).collect());
            (product.times(&center), exponent + factor.exponent + excess as i64)
        })
    }

    /// (1 − v)^degree·p((1 + v)/(1 − v)), with coefficients that vanish without doubt where roots are at z = ±1.
    pub fn from_circle(&self, degree: usize) -> Enclosed {
        let rest = self.rest();
        let missing = degree.saturating_sub(self.degree());
        let power = |factor: &[i64; 2], count: usize| {
            (0..count).fold(IntPoly::from_i64(&[1]), |p, _| p.times(&IntPoly::from_i64(factor)))
        };
        // z is (1 + v)/(1 − v), z − 1 is 2v/(1 − v), z + 1 is 2/(1 − v).
        let known = power(&[1, 1], self.zeros)
            .times(&power(&[0, 2], self.ones))
            .times(&power(&[2, 0], self.minus_ones))
            .times(&power(&[1, -1], missing));
        rest.from_circle(rest.degree()).times_exact(&known)
    }
}

/// z^zeros·(z − 1)^ones·(z + 1)^minus_ones.
fn known_factor(zeros: usize, ones: usize, minus_ones: usize) -> IntPoly {
    let power = |factor: &[i64], count: usize| {
        (0..count).fold(IntPoly::from_i64(&[1]), |p, _| p.times(&IntPoly::from_i64(factor)))
    };
    power(&[0, 1], zeros).times(&power(&[-1, 1], ones)).times(&power(&[1, 1], minus_ones))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn known_roots_are_taken_out_and_come_back() {
        // 3 z² (z − 1)² (z + 1) (2z − 5)
        let p = [[0, 1], [0, 1], [-1, 1], [-1, 1], [1, 1], [-5, 2]]
            .iter()
            .fold(IntPoly::from_i64(&[3]), |p, f| p.times(&IntPoly::from_i64(f)));
        let found = Factored::from_exact(&p);
        assert_eq!((found.zeros, found.ones, found.minus_ones), (2, 2, 1));
        assert_eq!(found.expanded().center, p);
        assert_eq!(found.from_circle(7).center, p.from_circle(&IBig::ONE, &IBig::ONE, 7));
    }
}
