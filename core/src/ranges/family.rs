//! The characteristic polynomial as a family over the knob, with its fixed factor taken out.

use crate::exact::{Dyadic, IntPoly, gcd};
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;

/// F(s, q) = fixed(s)·Σ q^k·parts\[k\](s), where the parts have no common root.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Family {
    /// The factor that no knob moves; its roots are the fixed modes.
    pub fixed: IntPoly,
    /// The moving part, by powers of the knob; the last one is not zero.
    pub parts: Vec<IntPoly>,
}

impl Family {
    /// From F by powers of the knob, F = Σ q^k·parts\[k\](s). None where F vanishes identically.
    pub fn new(mut parts: Vec<IntPoly>) -> Option<Self> {
        while parts.last().is_some_and(IntPoly::is_zero) {
            parts.pop();
        }
        if parts.is_empty() {
            return None;
        }
        let fixed = parts.iter().fold(IntPoly::default(), |common, part| gcd::gcd(&common, part));
        if fixed.degree() > 0 {
            // A primitive common divisor divides each part over the integers.
            parts = parts.iter().map(|part| part.exactly_over(&fixed).unwrap_or_else(|| part.clone())).collect();
        }
        Some(Self { fixed, parts })
    }

    /// The degree of the moving part in s, for all but finitely many knob values.
    pub fn moving_order(&self) -> usize {
        self.parts.iter().map(IntPoly::degree).max().unwrap_or(0)
    }

    /// The degree in the knob.
    pub fn knob_degree(&self) -> usize {
        self.parts.len() - 1
    }

    /// The moving part at a rational knob value, times a positive integer.
    pub fn at(&self, q: &RBig) -> IntPoly {
        let numerator = q.numerator();
        let denominator: IBig = q.denominator().clone().into();
        let top = self.knob_degree();
        let mut sum = IntPoly::default();
        for (k, part) in self.parts.iter().enumerate() {
            sum = sum.combined(&IBig::ONE, part, &(numerator.pow(k) * denominator.pow(top - k)));
        }
        sum
    }

    /// The moving part at a dyadic knob value, times a positive integer.
    pub fn at_dyadic(&self, q: &Dyadic) -> IntPoly {
        self.at(&q.to_rational())
    }

    /// The coefficient of s^i as a polynomial in the knob.
    pub fn in_knob(&self, i: usize) -> IntPoly {
        IntPoly::new(self.parts.iter().map(|part| part.coefficient(i)).collect())
    }

    /// The family of p ↦ map(p, degree) for every part and the fixed factor, each with its common degree in s.
    pub fn mapped(&self, map: impl Fn(&IntPoly, usize) -> IntPoly) -> Self {
        let order = self.moving_order();
        let parts = self.parts.iter().map(|part| map(part, order)).collect();
        Self { fixed: map(&self.fixed, self.fixed.degree()), parts }
    }

    /// D and N of the moving part D + q·N, in the affine case.
    pub fn affine(&self) -> Option<(&IntPoly, &IntPoly)> {
        match &self.parts[..] {
            [d, n] => Some((d, n)),
            _ => None,
        }
    }
}
