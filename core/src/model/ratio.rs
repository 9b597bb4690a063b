//! Ratios of polynomials in s and the knob, kept in factored form.
//!
//! Products, quotients and powers only move factors about. A sum is brought to the least common denominator, so that
//! `1/(s + 1) + 1/(s + 1)` gets no second pole. Denominators common to both sides of a compound fraction are cleared, as
//! on paper. Any other factor common to numerator and denominator stays in both: it is a fixed mode of the machine.
//!
//! Known limit: least common denominators find common parts of factors in s alone or in the knob alone by their greatest
//! common divisor; factors that mix s and the knob are compared as wholes.

use super::MAXIMUM_BITS;
use super::dead_time::DeadTime;
use super::factors::{Excess, Factor, expanded, knob_degree, merged, order, shared, split, without, without_common};
use super::polynomial::KnobPolynomial;
use crate::exact::IntPoly;
use crate::notation::Sign;
use alloc::vec;
use alloc::vec::Vec;
use dashu_int::ops::BitTest;
use dashu_int::{IBig, UBig};
use dashu_ratio::RBig;

/// The highest degree that a product may have while it is only a list of factors. Expanded polynomials have far stricter
/// limits; this one keeps exponents small, and the order in the message true.
const MAXIMUM_FACTORED_DEGREE: u64 = 1_000_000;

/// A constant times a product of factors over a product of factors, held back by a dead time.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Ratio {
    /// The constant; zero makes the whole ratio zero.
    pub constant: RBig,
    /// Factors of the numerator, all different; empty for a ratio that is zero.
    pub numerator: Vec<Factor>,
    /// Factors of the denominator, all different. A ratio that is zero keeps them: they are poles of the machine.
    pub denominator: Vec<Factor>,
    /// The dead time T of the factor e^(−T s).
    pub dead_time: DeadTime,
}

/// A block at one value of the knob.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct BlockAt {
    /// The numerator.
    pub above: IntPoly,
    /// The denominator.
    pub below: IntPoly,
}

impl Ratio {
    /// A number.
    #[must_use]
    pub fn constant(constant: RBig) -> Self {
        Self { constant, numerator: Vec::new(), denominator: Vec::new(), dead_time: DeadTime::default() }
    }

    /// A polynomial that is not constant, primitive and of the right sign.
    pub(super) fn factor(polynomial: KnobPolynomial) -> Self {
        Self { numerator: vec![Factor { polynomial, exponent: 1 }], ..Self::constant(RBig::ONE) }
    }

    /// e^(−T s).
    pub(super) fn delay(dead_time: DeadTime) -> Self {
        Self { dead_time, ..Self::constant(RBig::ONE) }
    }

    /// True where the ratio is zero for every s and knob.
    #[must_use]
    pub fn is_zero(&self) -> bool {
        self.constant.is_zero()
    }

    /// The number of zeros: the degree of the numerator in s.
    #[must_use]
    pub fn zero_count(&self) -> u64 {
        order(&self.numerator)
    }

    /// The number of poles: the degree of the denominator in s.
    #[must_use]
    pub fn pole_count(&self) -> u64 {
        order(&self.denominator)
    }

    pub(super) fn negated(mut self) -> Self {
        self.constant = -self.constant;
        self
    }

    pub(super) fn times(&self, other: &Self) -> Result<Self, Excess> {
        let product = Self::checked(
            &self.constant * &other.constant,
            merged(&self.numerator, &other.numerator),
            merged(&self.denominator, &other.denominator),
        )?;
        Ok(product.delayed(self.dead_time.plus(&other.dead_time)))
    }

    /// self/other, cleared of factors common to both denominators. None where `other` is zero.
    pub(super) fn over(&self, other: &Self) -> Option<Result<Self, Excess>> {
        if other.is_zero() {
            return None;
        }
        let (below, above) = without_common(&self.denominator, &other.denominator);
        let quotient = Self::checked(
            &self.constant / &other.constant,
            merged(&self.numerator, &above),
            merged(&below, &other.numerator),
        );
        Some(quotient.map(|quotient| quotient.delayed(self.dead_time.plus(&other.dead_time.times(-1)))))
    }

    /// self^exponent. None where zero is raised to a negative power.
    pub(super) fn power(&self, exponent: i32) -> Option<Result<Self, Excess>> {
        if exponent < 0 {
            return match Self::constant(RBig::ONE).over(self)? {
                Ok(inverse) => inverse.power(-exponent),
                Err(excess) => Some(Err(excess)),
            };
        }
        let times = exponent.unsigned_abs();
        if bits(&self.constant).saturating_mul(times as usize) > MAXIMUM_BITS {
            return Some(Err(Excess::Digits));
        }
        let raised = |factors: &[Factor]| {
            let raise = |factor: &Factor| Factor { exponent: factor.exponent * u64::from(times), ..factor.clone() };
            if times == 0 { Vec::new() } else { factors.iter().map(raise).collect() }
        };
        let power =
            Self::checked(self.constant.pow(times as isize), raised(&self.numerator), raised(&self.denominator));
        Some(power.map(|power| power.delayed(self.dead_time.times(exponent))))
    }

    fn delayed(self, dead_time: DeadTime) -> Self {
        Self { dead_time, ..self }
    }

    /// Whether the two can be added: a sum of paths with different dead times is no ratio times one dead time.
    pub(super) fn has_dead_time_of(&self, other: &Self) -> bool {
        self.is_zero() || other.is_zero() || self.dead_time == other.dead_time
    }

    /// self ± other over the least common denominator; both with the same dead time, or one of them zero.
    pub(super) fn plus(&self, sign: Sign, other: &Self) -> Result<Self, Excess> {
        // Nothing plus something keeps its factors.
        if self.is_zero() && self.denominator.is_empty() {
            return Ok(if sign == Sign::Minus { other.clone().negated() } else { other.clone() });
        }
        let common = shared(&self.numerator, &other.numerator);
        let (lacking_there, lacking_here) = without_common(&self.denominator, &other.denominator);
        let here = expanded(&merged(&without(&self.numerator, &common), &lacking_here))?;
        let there = expanded(&merged(&without(&other.numerator, &common), &lacking_there))?;
        let (sum, scale) = weighted_sum(&self.constant, &here, sign, &other.constant, &there);
        let (factors, content) = split(&sum);
        let constant = if sum.is_zero() { RBig::ZERO } else { RBig::from_parts(content, scale) };
        let dead_time = if self.is_zero() { &other.dead_time } else { &self.dead_time };
        let sum = Self::checked(constant, merged(&common, &factors), merged(&self.denominator, &lacking_here))?;
        Ok(sum.delayed(dead_time.clone()))
    }

    /// Numerator and denominator over the integers, multiplied out, common factors kept. None where the numbers are too
    /// large.
    #[must_use]
    pub fn multiplied_out(&self) -> Option<(KnobPolynomial, KnobPolynomial)> {
        self.polynomials().ok()
    }

    /// Numerator and denominator over the integers, multiplied out, common factors kept.
    pub(super) fn polynomials(&self) -> Result<(KnobPolynomial, KnobPolynomial), Excess> {
        let (above, below) = (expanded(&self.numerator)?, expanded(&self.denominator)?);
        let scaled = |p: &KnobPolynomial, factor: &IBig| p.combined(factor, &KnobPolynomial::default(), &IBig::ZERO);
        let denominator = IBig::from(self.constant.denominator().clone());
        Ok((scaled(&above, self.constant.numerator()), scaled(&below, &denominator)))
    }

    /// The polynomial denominator ± numerator over the integers, up to a positive factor.
    pub(super) fn characteristic(&self, sign: Sign) -> Result<KnobPolynomial, Excess> {
        let below = expanded(&self.denominator)?;
        let above = expanded(&self.numerator)?;
        let (sum, _) = weighted_sum(&RBig::ONE, &below, sign, &self.constant, &above);
        if sum.bits() > MAXIMUM_BITS { Err(Excess::Digits) } else { Ok(sum) }
    }

    /// Numerator and denominator as polynomials in s at one value of the knob, common factors kept.
    #[must_use]
    pub fn at(&self, knob: &RBig) -> BlockAt {
        let scale = IBig::from(knob.denominator().clone());
        let mut above = IntPoly::new(vec![self.constant.numerator().clone()]);
        let mut below = IntPoly::new(vec![self.constant.denominator().clone().into()]);
        let multiply = |factors: &[Factor], own: &mut IntPoly, other: &mut IntPoly| {
            for factor in factors {
                // A positive multiple of the factor's value; the other side gets the same multiple.
                let value = factor.polynomial.scaled_at(knob);
                let owed = IntPoly::new(vec![scale.pow(factor.polynomial.knob_degree())]);
                for _ in 0..factor.exponent {
                    *own = own.times(&value);
                    *other = other.times(&owed);
                }
            }
        };
        multiply(&self.numerator, &mut above, &mut below);
        multiply(&self.denominator, &mut below, &mut above);
        BlockAt { above, below }
    }

    /// A ratio within the limits.
    fn checked(constant: RBig, mut numerator: Vec<Factor>, denominator: Vec<Factor>) -> Result<Self, Excess> {
        if bits(&constant) > MAXIMUM_BITS {
            return Err(Excess::Digits);
        }
        if constant.is_zero() {
            numerator.clear();
        }
        for factors in [&numerator, &denominator] {
            if order(factors) > MAXIMUM_FACTORED_DEGREE {
                return Err(Excess::Order(order(factors)));
            }
            if knob_degree(factors) > MAXIMUM_FACTORED_DEGREE {
                return Err(Excess::KnobDegree(knob_degree(factors)));
            }
        }
        Ok(Self { constant, numerator, denominator, dead_time: DeadTime::default() })
    }
}

fn bits(constant: &RBig) -> usize {
    constant.numerator().bit_len().max(constant.denominator().bit_len())
}

/// a·left ± b·right, multiplied by the second value to make the coefficients integers.
fn weighted_sum(
    a: &RBig,
    left: &KnobPolynomial,
    sign: Sign,
    b: &RBig,
    right: &KnobPolynomial,
) -> (KnobPolynomial, UBig) {
    let scale_left = a.numerator() * IBig::from(b.denominator().clone());
    let scale_right = b.numerator() * IBig::from(a.denominator().clone());
    let scale_right = if sign == Sign::Minus { -scale_right } else { scale_right };
    (left.combined(&scale_left, right, &scale_right), a.denominator() * b.denominator())
}
