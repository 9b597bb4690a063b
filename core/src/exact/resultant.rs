//! Resultants of integer polynomials, and of families of them that depend on the knob.
//!
//! The subresultant remainder sequence (W. S. Brown, J. F. Traub, "On Euclid's algorithm and the theory of
//! subresultants", Journal of the ACM 18, 1971; as in H. Cohen, A Course in Computational Algebraic Number Theory,
//! Springer 1993, algorithm 3.3.7) keeps every division exact. A family is sampled at integers and interpolated.

use super::IntPoly;
use super::dyadic::sign_of;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;

/// The resultant of two polynomials, by their actual degrees; 0 if one of them is zero.
pub fn resultant(a: &IntPoly, b: &IntPoly) -> IBig {
    if a.is_zero() || b.is_zero() {
        return IBig::ZERO;
    }
    let mut sign = 1;
    let (mut a, mut b) = (a.clone(), b.clone());
    if a.degree() < b.degree() {
        if a.degree() % 2 == 1 && b.degree() % 2 == 1 {
            sign = -sign;
        }
        core::mem::swap(&mut a, &mut b);
    }
    let (content_a, content_b) = (a.content(), b.content());
    let scale = content_a.pow(b.degree()) * content_b.pow(a.degree());
    a = a.primitive();
    b = b.primitive();
    let (mut g, mut h) = (IBig::ONE, IBig::ONE);
    while b.degree() > 0 {
        let delta = a.degree() - b.degree();
        if a.degree() % 2 == 1 && b.degree() % 2 == 1 {
            sign = -sign;
        }
        let rest = pseudo_remainder(&a, &b);
        a = b;
        let divisor = &g * h.pow(delta);
        b = IntPoly::new(rest.coefficients().iter().map(|c| c / &divisor).collect());
        if b.is_zero() {
            return IBig::ZERO;
        }
        g = a.leading();
        h = step(&h, &g, delta);
    }
    scale * sign * step(&h, &b.leading(), a.degree())
}

/// h^(1−delta)·g^delta, an integer.
fn step(h: &IBig, g: &IBig, delta: usize) -> IBig {
    match delta {
        0 => h.clone(),
        _ => g.pow(delta) / h.pow(delta - 1),
    }
}

/// lc(b)^(deg a − deg b + 1)·a modulo b, with exactly that power.
fn pseudo_remainder(a: &IntPoly, b: &IntPoly) -> IntPoly {
    let leading = b.leading();
    let mut rest = a.coefficients().to_vec();
    let mut owed = a.degree() - b.degree() + 1;
    while rest.len() > b.degree() {
        let top = rest[rest.len() - 1].clone();
        let shift = rest.len() - 1 - b.degree();
        for c in &mut rest {
            *c *= &leading;
        }
        for (i, c) in b.coefficients().iter().enumerate() {
            rest[shift + i] -= &top * c;
        }
        rest.pop();
        while rest.last().is_some_and(IBig::is_zero) {
            rest.pop();
        }
        owed -= 1;
    }
    let factor = leading.pow(owed);
    IntPoly::new(rest.into_iter().map(|c| c * &factor).collect())
}

/// The primitive integer polynomial R of degree at most `degree` with R(q) proportional to `value(q)`, from integer q;
/// `value` returns None at arguments that must not be used (finitely many).
pub fn interpolated(degree: usize, mut value: impl FnMut(&IBig) -> Option<IBig>) -> IntPoly {
    let mut nodes: Vec<IBig> = Vec::with_capacity(degree + 1);
    let mut values: Vec<RBig> = Vec::with_capacity(degree + 1);
    let mut next = 0i64;
    while nodes.len() <= degree {
        // 0, 1, −1, 2, −2, …
        let node = IBig::from(if next % 2 == 1 { (next + 1) / 2 } else { -next / 2 });
        next += 1;
        if let Some(v) = value(&node) {
            nodes.push(node);
            values.push(RBig::from(v));
        }
    }
    // Newton's divided differences, then Horner's scheme in (q − node).
    for round in 1..=degree {
        for i in (round..=degree).rev() {
            let run = RBig::from(&nodes[i] - &nodes[i - round]);
            values[i] = (&values[i] - &values[i - 1]) / run;
        }
    }
    let mut coefficients: Vec<RBig> = Vec::with_capacity(degree + 1);
    for i in (0..=degree).rev() {
        let node = RBig::from(nodes[i].clone());
        coefficients.insert(0, RBig::ZERO);
        for k in 1..coefficients.len() {
            let moved = &coefficients[k] * &node;
            coefficients[k - 1] -= moved;
        }
        coefficients[0] += values[i].clone();
    }
    from_rationals(&coefficients)
}

/// The primitive integer polynomial that is a positive multiple of the given one.
pub fn from_rationals(coefficients: &[RBig]) -> IntPoly {
    use dashu_int::ops::Gcd;
    let common = coefficients.iter().fold(IBig::ONE, |lcm, c| {
        let d: IBig = c.denominator().clone().into();
        let shared: IBig = (&lcm).gcd(&d).into();
        lcm * d / shared
    });
    debug_assert!(sign_of(&common) > 0, "denominators are positive");
    let scaled = coefficients.iter().map(|c| c.numerator() * (&common / IBig::from(c.denominator().clone())));
    IntPoly::new(scaled.collect()).primitive()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn from_roots(roots: &[i64]) -> IntPoly {
        roots.iter().fold(IntPoly::from_i64(&[1]), |p, r| p.times(&IntPoly::from_i64(&[-r, 1])))
    }

    #[test]
    fn a_common_root_makes_it_zero() {
        assert_eq!(resultant(&from_roots(&[1, 2]), &from_roots(&[5, 2])), IBig::ZERO);
    }

    #[test]
    fn interpolation_finds_the_polynomial_again() {
        let p = IntPoly::from_i64(&[-7, 0, 3, 5]);
        let found = interpolated(5, |q| {
            (*q != IBig::from(1)).then(|| p.scaled_value(&super::super::Dyadic::new(q.clone(), 0)).mantissa)
        });
        assert_eq!(found, p);
    }

    proptest! {
        #[test]
        fn equals_the_product_of_root_differences(
            a in prop::collection::vec(-9i64..9, 1..6),
            b in prop::collection::vec(-9i64..9, 1..6),
        ) {
            let product: IBig = a.iter().flat_map(|x| b.iter().map(move |y| IBig::from(x - y))).product();
            prop_assert_eq!(resultant(&from_roots(&a), &from_roots(&b)), product);
        }
    }
}
