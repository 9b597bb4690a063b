//! Greatest common divisors of integer polynomials, by small primes, and what follows from them.
//!
//! Method: W. S. Brown, "On Euclid's algorithm and the computation of polynomial greatest common divisors", Journal of
//! the ACM 18 (1971): images modulo primes, Chinese remainders, and a trial division that proves the result. An image
//! of degree 0 modulo one prime is already a proof of coprimality, and the usual case.
//! Square-free factors: D. Y. Y. Yun, "On square-free decomposition algorithms", SYMSAC 1976.

use super::IntPoly;
use super::dyadic::sign_of;
use alloc::vec;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_int::ops::Gcd;

/// The first prime tried: 2^31 − 1. Products of two residues fit in 64 bits.
const FIRST_PRIME: u64 = 2_147_483_647;

/// The greatest common divisor: primitive, with a positive leading coefficient; 1 for coprime polynomials.
/// Of zero and p it is the primitive part of p.
pub fn gcd(a: &IntPoly, b: &IntPoly) -> IntPoly {
    if a.is_zero() || b.is_zero() {
        return oriented(if a.is_zero() { b } else { a });
    }
    if a.degree() == 0 || b.degree() == 0 {
        return IntPoly::from_i64(&[1]);
    }
    let (a, b) = (a.primitive(), b.primitive());
    let leading: IBig = (&a.leading()).gcd(&b.leading()).into();
    let mut image = Image { degree: usize::MAX, modulus: IBig::ONE, coefficients: Vec::new() };
    let mut prime = FIRST_PRIME;
    // The loop ends: only finitely many primes are unlucky, and the true coefficients are bounded.
    loop {
        if residue(&a.leading(), prime) != 0 && residue(&b.leading(), prime) != 0 {
            let monic = gcd_modulo(reduce(&a, prime), reduce(&b, prime), prime);
            if monic.len() == 1 {
                return IntPoly::from_i64(&[1]);
            }
            let scale = residue(&leading, prime);
            let scaled: Vec<u64> = monic.iter().map(|c| c * scale % prime).collect();
            if image.take_in(&scaled, prime) {
                let candidate = oriented(&image.symmetric());
                if a.exactly_over(&candidate).is_some() && b.exactly_over(&candidate).is_some() {
                    return candidate;
                }
            }
        }
        prime = previous_prime(prime);
    }
}

/// The product of the distinct irreducible factors.
pub fn squarefree_part(p: &IntPoly) -> IntPoly {
    let common = gcd(p, &p.derivative());
    without(p, &common)
}

/// The factors of p with all their common roots with q taken out.
pub fn without_common_roots(p: &IntPoly, q: &IntPoly) -> IntPoly {
    let mut rest = p.clone();
    loop {
        let common = gcd(&rest, q);
        if common.degree() == 0 {
            return rest;
        }
        rest = without(&rest, &common);
    }
}

/// The primitive, square-free, pairwise coprime factors of p with their multiplicities; constants are left out.
pub fn squarefree_factors(p: &IntPoly) -> Vec<(IntPoly, usize)> {
    let mut factors = Vec::new();
    if p.degree() == 0 {
        return factors;
    }
    let p = oriented(p);
    let common = gcd(&p, &p.derivative());
    if common.degree() == 0 {
        return vec![(p, 1)];
    }
    // Invariant: `distinct` is the product of the factors of multiplicity ≥ m, `rest` = Π f_i^(i−m).
    let mut distinct = without(&p, &common);
    let mut rest = common;
    let mut multiplicity = 1;
    while distinct.degree() > 0 {
        let higher = gcd(&distinct, &rest);
        let exactly = without(&distinct, &higher);
        if exactly.degree() > 0 {
            factors.push((exactly, multiplicity));
        }
        rest = without(&rest, &higher);
        distinct = higher;
        multiplicity += 1;
    }
    factors
}

/// The primitive part of p over a primitive divisor of it.
fn without(p: &IntPoly, divisor: &IntPoly) -> IntPoly {
    let p = oriented(p);
    // By Gauss's lemma a primitive divisor over the rationals divides the primitive part over the integers.
    p.exactly_over(divisor).unwrap_or(p)
}

/// The primitive part with a positive leading coefficient.
fn oriented(p: &IntPoly) -> IntPoly {
    let p = p.primitive();
    if p.leading_sign() < 0 { p.negated() } else { p }
}

/// A gcd known modulo the product of the primes taken in so far.
struct Image {
    degree: usize,
    modulus: IBig,
    coefficients: Vec<IBig>,
}

impl Image {
    /// Takes in the image modulo one more prime; true when the polynomial did not change, or is the first.
    fn take_in(&mut self, image: &[u64], prime: u64) -> bool {
        let degree = image.len() - 1;
        if degree > self.degree {
            return false;
        }
        if degree < self.degree {
            self.degree = degree;
            self.modulus = IBig::from(prime);
            self.coefficients = image.iter().map(|c| IBig::from(*c)).collect();
            return true;
        }
        let inverse = power(residue(&self.modulus, prime), prime - 2, prime);
        let mut same = true;
        for (known, new) in self.coefficients.iter_mut().zip(image) {
            let step = (new + prime - residue(known, prime)) % prime * inverse % prime;
            // A small negative coefficient shows as the largest residue every time.
            same &= step == 0 || step == prime - 1;
            *known += &self.modulus * step;
        }
        self.modulus *= prime;
        same
    }

    /// Coefficients between −modulus/2 and modulus/2.
    fn symmetric(&self) -> IntPoly {
        let half = &self.modulus / 2;
        IntPoly::new(self.coefficients.iter().map(|c| if c > &half { c - &self.modulus } else { c.clone() }).collect())
    }
}

fn residue(value: &IBig, prime: u64) -> u64 {
    let magnitude = value.as_sign_words().1.iter().rev().fold(0u128, |rest, word| {
        // One machine word at a time; a word has 32 or 64 bits.
        let word_bits = 8 * core::mem::size_of_val(word) as u32;
        ((rest << word_bits) | u128::from(*word)) % u128::from(prime)
    }) as u64;
    if sign_of(value) < 0 && magnitude != 0 { prime - magnitude } else { magnitude }
}

fn reduce(p: &IntPoly, prime: u64) -> Vec<u64> {
    p.coefficients().iter().map(|c| residue(c, prime)).collect()
}

fn power(mut base: u64, mut exponent: u64, prime: u64) -> u64 {
    let mut result = 1;
    while exponent > 0 {
        if exponent & 1 == 1 {
            result = result * base % prime;
        }
        base = base * base % prime;
        exponent >>= 1;
    }
    result
}

/// Euclid's algorithm over the integers modulo a prime; the result is monic.
fn gcd_modulo(mut a: Vec<u64>, mut b: Vec<u64>, prime: u64) -> Vec<u64> {
    while !b.is_empty() {
        let inverse = power(b[b.len() - 1], prime - 2, prime);
        for c in &mut b {
            *c = *c * inverse % prime;
        }
        while a.len() >= b.len() {
            let top = a[a.len() - 1];
            let shift = a.len() - b.len();
            if top != 0 {
                for (i, c) in b.iter().enumerate() {
                    a[shift + i] = (a[shift + i] + (prime - top) * c) % prime;
                }
            }
            a.pop();
        }
        while a.last() == Some(&0) {
            a.pop();
        }
        core::mem::swap(&mut a, &mut b);
    }
    a
}

fn previous_prime(prime: u64) -> u64 {
    let is_prime = |n: u64| (3..).step_by(2).take_while(|d| d * d <= n).all(|d| !n.is_multiple_of(d));
    (3..prime).rev().filter(|n| n % 2 == 1).find(|n| is_prime(*n)).unwrap_or(FIRST_PRIME)
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn p(c: &[i64]) -> IntPoly {
        IntPoly::from_i64(c)
    }

    #[test]
    fn finds_a_common_factor_with_large_and_negative_coefficients() {
        let g = p(&[-9_007_199_254_740_993, 4, -7_000_000_000_019]);
        let (a, b) = (g.times(&p(&[1, 5])), g.times(&p(&[-3, 0, 2])));
        assert_eq!(gcd(&a, &b), g.negated());
    }

    #[test]
    fn a_prime_that_divides_the_factor_does_not_mislead() {
        let q = FIRST_PRIME as i64;
        let g = p(&[1, q]);
        assert_eq!(gcd(&g.times(&p(&[2, 1])), &g.times(&p(&[3, 1]))), g);
    }

    #[test]
    fn splits_by_multiplicity() {
        let (a, b) = (p(&[1, 1]), p(&[2, 0, 1]));
        let product = a.times(&b).times(&b).times(&b);
        assert_eq!(squarefree_factors(&product), vec![(a.clone(), 1), (b.clone(), 3)]);
        assert_eq!(squarefree_part(&product), a.times(&b));
        assert_eq!(without_common_roots(&product, &b), a);
    }

    proptest! {
        #[test]
        fn every_planted_factor_divides_the_gcd(
            g in prop::collection::vec(-50i64..50, 2..5),
            a in prop::collection::vec(-50i64..50, 1..6),
            b in prop::collection::vec(-50i64..50, 1..6),
        ) {
            let (g, a, b) = (p(&g), p(&a), p(&b));
            prop_assume!(!g.is_zero() && !a.is_zero() && !b.is_zero());
            let found = gcd(&g.times(&a), &g.times(&b));
            prop_assert!(found.exactly_over(&oriented(&g)).is_some(), "{found:?} {g:?}");
            prop_assert!(g.times(&a).exactly_over(&found).is_some());
            prop_assert!(g.times(&b).exactly_over(&found).is_some());
        }
    }
}
