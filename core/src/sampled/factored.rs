//! Enclosed polynomials in z with what is known about them without error: their roots at 0, 1 and −1.
//!
//! An enclosure alone never shows that a coefficient vanishes. An integrator is a pole at z = 1 exactly, a whole period of
//! delay a pole at z = 0, a zero that the trapezoidal rule takes from infinity a zero at z = −1; these are kept as counts.

use super::enclosed::{Enclosed, Unit};
use crate::exact::IntPoly;

/// z^zeros·(z − 1)^ones·(z + 1)^minus_ones·rest.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Factored {
    /// Roots at z = 0.
    pub zeros: usize,
    /// Roots at z = 1.
    pub ones: usize,
    /// Roots at z = −1.
    pub minus_ones: usize,
    /// The rest.
    pub rest: Enclosed,
    /// Pairs of the rest that are known to lie on the unit circle, all different.
    pub circle_pairs: usize,
}

impl Factored {
    /// A polynomial about whose roots nothing is known.
    pub fn plain(rest: Enclosed) -> Self {
        Self { zeros: 0, ones: 0, minus_ones: 0, rest, circle_pairs: 0 }
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
        Self { zeros, ones, minus_ones, rest: Enclosed::exact(rest), circle_pairs: 0 }
    }

    /// True for the polynomial that is zero without doubt.
    pub fn is_zero(&self) -> bool {
        self.rest.is_zero()
    }

    /// The degree, as far as the highest coefficient may differ from zero.
    pub fn degree(&self) -> usize {
        self.zeros + self.ones + self.minus_ones + self.rest.degree()
    }

    /// Product.
    pub fn times(&self, other: &Self) -> Self {
        Self {
            zeros: self.zeros + other.zeros,
            ones: self.ones + other.ones,
            minus_ones: self.minus_ones + other.minus_ones,
            rest: self.rest.times(&other.rest),
            circle_pairs: self.circle_pairs + other.circle_pairs,
        }
    }

    /// Product with an enclosed constant.
    pub fn scaled(&self, constant: &Enclosed) -> Self {
        Self { rest: self.rest.times(constant), ..self.clone() }
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
        Self { zeros, ones, minus_ones, rest: remaining(self).plus(&remaining(other)), circle_pairs: 0 }
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
        self.rest.times_exact(&known_factor(self.zeros, self.ones, self.minus_ones))
    }

    /// The rest is known to vanish at z = 1 or z = −1.
    pub fn with_root(self, at: Unit) -> Self {
        let rest = self.rest.without_root(at);
        match at {
            Unit::Plus => Self { ones: self.ones + 1, rest, ..self },
            Unit::Minus => Self { minus_ones: self.minus_ones + 1, rest, ..self },
        }
    }

    /// (1 − v)^degree·p((1 + v)/(1 − v)), with coefficients that vanish without doubt where roots are at z = ±1.
    pub fn from_circle(&self, degree: usize) -> Enclosed {
        let own = self.rest.degree();
        let missing = degree.saturating_sub(self.degree());
        let power = |factor: &[i64; 2], count: usize| {
            (0..count).fold(IntPoly::from_i64(&[1]), |p, _| p.times(&IntPoly::from_i64(factor)))
        };
        // z is (1 + v)/(1 − v), z − 1 is 2v/(1 − v), z + 1 is 2/(1 − v).
        let known = power(&[1, 1], self.zeros)
            .times(&power(&[0, 2], self.ones))
            .times(&power(&[2, 0], self.minus_ones))
            .times(&power(&[1, -1], missing));
        self.rest.from_circle(own).times_exact(&known)
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
    use dashu_int::IBig;

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
