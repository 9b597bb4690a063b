//! Polynomials in s and the knob with integer coefficients.

use crate::exact::IntPoly;
use crate::exact::gcd::gcd;
use alloc::vec;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_int::ops::{BitTest, Gcd};
use dashu_ratio::RBig;

/// A polynomial in s whose coefficients are polynomials in the knob q.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct KnobPolynomial {
    /// `rows[i][k]` multiplies s^i q^k. No row ends in a zero, and the last row is not empty.
    rows: Vec<Vec<IBig>>,
}

impl KnobPolynomial {
    /// From coefficients: `rows[i][k]` multiplies s^i q^k. Zeros on top are dropped.
    #[must_use]
    pub fn new(mut rows: Vec<Vec<IBig>>) -> Self {
        for row in &mut rows {
            while row.last().is_some_and(IBig::is_zero) {
                row.pop();
            }
        }
        while rows.last().is_some_and(Vec::is_empty) {
            rows.pop();
        }
        Self { rows }
    }

    /// The constant 1.
    #[must_use]
    pub fn one() -> Self {
        Self { rows: vec![vec![IBig::ONE]] }
    }

    /// The Laplace variable s.
    #[must_use]
    pub fn laplace() -> Self {
        Self { rows: vec![Vec::new(), vec![IBig::ONE]] }
    }

    /// The knob q.
    #[must_use]
    pub fn knob() -> Self {
        Self { rows: vec![vec![IBig::ZERO, IBig::ONE]] }
    }

    /// The coefficients: `[i][k]` multiplies s^i q^k. A row ends with its last coefficient that is not zero.
    #[must_use]
    pub fn coefficients(&self) -> &[Vec<IBig>] {
        &self.rows
    }

    /// True for the zero polynomial.
    #[must_use]
    pub fn is_zero(&self) -> bool {
        self.rows.is_empty()
    }

    /// True for polynomials of degree 0 in both s and the knob.
    #[must_use]
    pub fn is_constant(&self) -> bool {
        self.order() == 0 && self.knob_degree() == 0
    }

    /// The degree in s; 0 for the zero polynomial.
    #[must_use]
    pub fn order(&self) -> usize {
        self.rows.len().saturating_sub(1)
    }

    /// The degree in the knob; 0 for the zero polynomial.
    #[must_use]
    pub fn knob_degree(&self) -> usize {
        self.rows.iter().map(Vec::len).max().unwrap_or(0).saturating_sub(1)
    }

    /// The factor of q^k: coefficients of s, lowest power first, without zeros on top.
    #[must_use]
    pub fn at_knob_power(&self, k: usize) -> Vec<IBig> {
        let mut column: Vec<IBig> = self.rows.iter().map(|row| row.get(k).cloned().unwrap_or(IBig::ZERO)).collect();
        while column.last().is_some_and(IBig::is_zero) {
            column.pop();
        }
        column
    }

    /// The polynomial in s at a rational knob value, times the value's denominator to the power of the knob's degree.
    pub(super) fn scaled_at(&self, knob: &RBig) -> IntPoly {
        let (numerator, denominator) = (knob.numerator(), IBig::from(knob.denominator().clone()));
        let degree = self.knob_degree();
        let value = |row: &Vec<IBig>| {
            row.iter().enumerate().map(|(k, c)| c * numerator.pow(k) * denominator.pow(degree - k)).sum()
        };
        IntPoly::new(self.rows.iter().map(value).collect())
    }

    /// The coefficient of s^i as a polynomial in the knob.
    pub(super) fn coefficient_of(&self, i: usize) -> IntPoly {
        IntPoly::new(self.rows.get(i).cloned().unwrap_or_default())
    }

    /// The bits of the largest coefficient.
    pub(super) fn bits(&self) -> usize {
        self.rows.iter().flatten().map(BitTest::bit_len).max().unwrap_or(0)
    }

    /// a·self + b·other.
    pub(super) fn combined(&self, a: &IBig, other: &Self, b: &IBig) -> Self {
        let mut rows = vec![Vec::new(); self.rows.len().max(other.rows.len())];
        for (source, factor) in [(self, a), (other, b)] {
            for (row, added) in rows.iter_mut().zip(&source.rows) {
                if row.len() < added.len() {
                    row.resize(added.len(), IBig::ZERO);
                }
                for (sum, coefficient) in row.iter_mut().zip(added) {
                    *sum += coefficient * factor;
                }
            }
        }
        Self::new(rows)
    }

    /// self·other.
    pub(super) fn times(&self, other: &Self) -> Self {
        if self.is_zero() || other.is_zero() {
            return Self::default();
        }
        let width = self.knob_degree() + other.knob_degree() + 1;
        let mut rows = vec![vec![IBig::ZERO; width]; self.order() + other.order() + 1];
        for (i, left) in self.rows.iter().enumerate() {
            for (j, right) in other.rows.iter().enumerate() {
                let Some(row) = rows.get_mut(i + j) else {
                    continue;
                };
                for (k, a) in left.iter().enumerate() {
                    for (sum, b) in row.iter_mut().skip(k).zip(right) {
                        *sum += a * b;
                    }
                }
            }
        }
        Self::new(rows)
    }

    /// The primitive part and the factor taken out. The sign is such that, of the highest power of s, the coefficient
    /// with the lowest power of the knob is positive. Zero gives zero and 1.
    pub(super) fn primitive(&self) -> (Self, IBig) {
        let mut content = IBig::ZERO;
        for coefficient in self.rows.iter().flatten().filter(|coefficient| !coefficient.is_zero()) {
            content = if content.is_zero() { coefficient.clone() } else { (&content).gcd(coefficient).into() };
            if content.is_one() {
                break;
            }
        }
        if content.is_zero() {
            return (Self::default(), IBig::ONE);
        }
        let leading = self.rows.last().and_then(|row| row.iter().find(|coefficient| !coefficient.is_zero()));
        if leading.is_some_and(|leading| leading.sign() != content.sign()) {
            content = -content;
        }
        let rows = self.rows.iter().map(|row| row.iter().map(|coefficient| coefficient / &content).collect()).collect();
        (Self { rows }, content)
    }

    /// The greatest common divisor of the coefficients of all powers of s, a polynomial in the knob.
    pub(super) fn knob_content(&self) -> IntPoly {
        let mut content = IntPoly::default();
        for row in self.rows.iter().filter(|row| !row.is_empty()) {
            content = gcd(&content, &IntPoly::new(row.clone()));
            if content.degree() == 0 {
                break;
            }
        }
        content
    }

    /// The quotient by a polynomial in the knob that divides exactly; None where it does not.
    pub(super) fn over_knob_polynomial(&self, divisor: &IntPoly) -> Option<Self> {
        let quotient = |row: &Vec<IBig>| Some(IntPoly::new(row.clone()).exactly_over(divisor)?.coefficients().to_vec());
        Some(Self::new(self.rows.iter().map(quotient).collect::<Option<_>>()?))
    }

    /// The polynomial with s and the knob exchanged.
    pub(super) fn transposed(&self) -> Self {
        Self::new((0..=self.knob_degree()).map(|k| self.at_knob_power(k)).collect())
    }

    /// A polynomial in the knob alone.
    pub(super) fn in_knob(polynomial: &IntPoly) -> Self {
        Self::new(vec![polynomial.coefficients().to_vec()])
    }

    /// The polynomial as one in s alone; None where the knob appears.
    pub(super) fn in_laplace(&self) -> Option<IntPoly> {
        (self.knob_degree() == 0).then(|| IntPoly::new(self.at_knob_power(0)))
    }
}
