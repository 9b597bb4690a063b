//! Products of polynomials in s and the knob as lists of factors.

use super::polynomial::KnobPolynomial;
use super::{MAXIMUM_BITS, MAXIMUM_KNOB_DEGREE, MAXIMUM_ORDER};
use crate::exact::gcd::gcd;
use alloc::vec::Vec;
use dashu_int::IBig;

/// A polynomial and how often it is a factor.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Factor {
    /// Primitive, not constant; positive where the highest power of s meets the lowest power of the knob.
    pub polynomial: KnobPolynomial,
    /// At least 1.
    pub exponent: u64,
}

/// What is too large to be treated.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Excess {
    /// The degree in s.
    Order(u64),
    /// The degree in the knob.
    KnobDegree(u64),
    /// The size of the numbers.
    Digits,
}

/// The degree of the product in s.
pub(super) fn order(factors: &[Factor]) -> u64 {
    factors.iter().map(|factor| factor.polynomial.order() as u64 * factor.exponent).sum()
}

/// The degree of the product in the knob.
pub(super) fn knob_degree(factors: &[Factor]) -> u64 {
    factors.iter().map(|factor| factor.polynomial.knob_degree() as u64 * factor.exponent).sum()
}

/// The product of two lists.
pub(super) fn merged(left: &[Factor], right: &[Factor]) -> Vec<Factor> {
    let mut factors = left.to_vec();
    for added in right {
        match factors.iter_mut().find(|factor| factor.polynomial == added.polynomial) {
            Some(factor) => factor.exponent += added.exponent,
            None => factors.push(added.clone()),
        }
    }
    factors
}

/// The factors that stand as such in both lists.
pub(super) fn shared(left: &[Factor], right: &[Factor]) -> Vec<Factor> {
    let partner = |factor: &Factor| right.iter().find(|other| other.polynomial == factor.polynomial);
    let both = |factor: &Factor| {
        Some(Factor { exponent: factor.exponent.min(partner(factor)?.exponent), polynomial: factor.polynomial.clone() })
    };
    left.iter().filter_map(both).collect()
}

/// The list without factors that are all in it.
pub(super) fn without(factors: &[Factor], removed: &[Factor]) -> Vec<Factor> {
    let mut rest = factors.to_vec();
    for gone in removed {
        if let Some(factor) = rest.iter_mut().find(|factor| factor.polynomial == gone.polynomial) {
            factor.exponent = factor.exponent.saturating_sub(gone.exponent);
        }
    }
    rest.retain(|factor| factor.exponent > 0);
    rest
}

/// Both lists without their greatest common divisor.
pub(super) fn without_common(left: &[Factor], right: &[Factor]) -> (Vec<Factor>, Vec<Factor>) {
    let (mut left, mut right) = (left.to_vec(), right.to_vec());
    // The loop ends: every turn takes a divisor out of both lists.
    while let Some((i, j, parts)) = first_common(&left, &right) {
        let (a, b) = (left.swap_remove(i), right.swap_remove(j));
        let cancelled = a.exponent.min(b.exponent);
        for (list, factor, rest) in [(&mut left, a, parts.left), (&mut right, b, parts.right)] {
            let remaining = [(rest, factor.exponent), (parts.divisor.clone(), factor.exponent - cancelled)]
                .map(|(polynomial, exponent)| Factor { polynomial, exponent });
            let remaining: Vec<Factor> = remaining
                .into_iter()
                .filter(|factor| factor.exponent > 0 && !factor.polynomial.is_constant())
                .collect();
            *list = merged(list, &remaining);
        }
    }
    (left, right)
}

/// Two polynomials as a common divisor times the rest of each.
struct CommonParts {
    divisor: KnobPolynomial,
    left: KnobPolynomial,
    right: KnobPolynomial,
}

fn first_common(left: &[Factor], right: &[Factor]) -> Option<(usize, usize, CommonParts)> {
    for (i, a) in left.iter().enumerate() {
        for (j, b) in right.iter().enumerate() {
            if let Some(parts) = common_parts(&a.polynomial, &b.polynomial) {
                return Some((i, j, parts));
            }
        }
    }
    None
}

/// None where no common divisor is found.
fn common_parts(a: &KnobPolynomial, b: &KnobPolynomial) -> Option<CommonParts> {
    if a == b {
        return Some(CommonParts { divisor: a.clone(), left: KnobPolynomial::one(), right: KnobPolynomial::one() });
    }
    if a.order() == 0 && b.order() == 0 {
        let parts = common_parts(&a.transposed(), &b.transposed())?;
        // Signs are multiplicative, so that making every part's sign the usual one keeps the products.
        let [divisor, left, right] =
            [parts.divisor, parts.left, parts.right].map(|part| part.transposed().primitive().0);
        return Some(CommonParts { divisor, left, right });
    }
    let (a, b) = (a.in_laplace()?, b.in_laplace()?);
    let divisor = gcd(&a, &b);
    if divisor.degree() == 0 {
        return None;
    }
    let [left, right] = [a.exactly_over(&divisor)?, b.exactly_over(&divisor)?];
    let [divisor, left, right] = [divisor, left, right].map(|part| KnobPolynomial::in_knob(&part).transposed());
    Some(CommonParts { divisor, left, right })
}

/// The factors of a polynomial: what depends on the knob alone, on s alone, and the rest; and the constant.
pub(super) fn split(polynomial: &KnobPolynomial) -> (Vec<Factor>, IBig) {
    let (polynomial, constant) = polynomial.primitive();
    let (rest, in_knob) = without_knob_content(polynomial);
    let (rest, in_laplace) = without_knob_content(rest.transposed());
    // Of primitive polynomials the quotients are primitive too (Gauss's lemma), but their signs may differ.
    let mut factors = Vec::new();
    let mut sign = IBig::ONE;
    for part in [in_knob, in_laplace.transposed(), rest.transposed()] {
        let (polynomial, unit) = part.primitive();
        sign *= unit;
        if !polynomial.is_constant() {
            factors = merged(&factors, &[Factor { polynomial, exponent: 1 }]);
        }
    }
    (factors, constant * sign)
}

/// The polynomial over its content in the knob, and the content.
fn without_knob_content(polynomial: KnobPolynomial) -> (KnobPolynomial, KnobPolynomial) {
    let content = polynomial.knob_content();
    match polynomial.over_knob_polynomial(&content) {
        Some(rest) if content.degree() > 0 => (rest, KnobPolynomial::in_knob(&content)),
        _ => (polynomial, KnobPolynomial::one()),
    }
}

/// The product, multiplied out. Its size is checked before the work is done.
pub(super) fn expanded(factors: &[Factor]) -> Result<KnobPolynomial, Excess> {
    if order(factors) > MAXIMUM_ORDER as u64 {
        return Err(Excess::Order(order(factors)));
    }
    if knob_degree(factors) > MAXIMUM_KNOB_DEGREE as u64 {
        return Err(Excess::KnobDegree(knob_degree(factors)));
    }
    let size: u64 = factors.iter().map(|factor| factor.polynomial.bits() as u64 * factor.exponent).sum();
    if size > MAXIMUM_BITS as u64 {
        return Err(Excess::Digits);
    }
    let mut product = KnobPolynomial::one();
    for factor in factors {
        // A factor is not constant, so that the degrees checked above bound its exponent.
        for _ in 0..factor.exponent {
            product = product.times(&factor.polynomial);
        }
    }
    Ok(product)
}
