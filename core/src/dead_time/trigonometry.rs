//! Sine, cosine and π with a known error, in fixed-point integers.
//!
//! π by J. Machin's formula 16·atan(1/5) − 4·atan(1/239) (1706); sine and cosine by their power series after the multiple of
//! π/2 has been taken off.

use crate::exact::dyadic::sign_of;
use crate::exact::{Dyadic, Interval};
use dashu_int::IBig;
use dashu_int::ops::DivRem;

/// Bits behind the binary point. The brackets of edges want about 90 of them; arguments up to 2^60 take 60 more.
const BITS: usize = 192;

/// Terms of a series before it must have ended: 0.8^n/n! is below 2^-192 from n = 42 on, (1/5)^n from n = 83 on.
const TERM_CAP: usize = 200;

/// The kernel with its constant.
#[derive(Clone, Debug)]
pub(super) struct Trigonometry {
    /// floor(π/2·2^BITS), but for a few units.
    half_pi: IBig,
}

/// Rounding errors of π/2 as computed here, in units of 2^-BITS: each term of the two series loses less than 1, weighted by
/// 8 and 2.
const HALF_PI_ERROR: i64 = 1024;

/// Rounding errors of one sine or cosine series: less than two units a term.
const SERIES_ERROR: i64 = 128;

impl Trigonometry {
    pub(super) fn new() -> Self {
        Self { half_pi: inverse_tangent_of_inverse(5) * 8 - inverse_tangent_of_inverse(239) * 2 }
    }

    /// An enclosure of 2π.
    pub(super) fn full_turn(&self) -> Interval {
        let error = IBig::from(HALF_PI_ERROR);
        let at = |value: IBig| Dyadic::new(value, 2 - BITS as i64);
        Interval { low: at(&self.half_pi - &error), high: at(&self.half_pi + error) }
    }

    /// Enclosures of cos and sin over an interval, good for narrow ones: each is the value in the middle, give or take half of
    /// the width.
    pub(super) fn cos_sin(&self, x: &Interval) -> (Interval, Interval) {
        let middle = fixed(&x.midpoint());
        let half_width = fixed(&(&x.high - &x.low)) / 2 + 2;
        let shifted: IBig = &middle * 2 + &self.half_pi;
        let (turns, beyond) = shifted.div_rem(&self.half_pi * 2);
        let turns = if sign_of(&beyond) < 0 { turns - 1 } else { turns };
        let rest = &middle - &turns * &self.half_pi;
        let magnitude = if sign_of(&turns) < 0 { -&turns } else { turns.clone() };
        let error = magnitude * HALF_PI_ERROR + SERIES_ERROR + half_width;
        let (cos, sin) = series(&rest);
        let quadrant = ((&turns % IBig::from(4)) + 4) % IBig::from(4);
        let (cos, sin) = match i64::try_from(quadrant).unwrap_or(0) {
            0 => (cos, sin),
            1 => (-sin, cos),
            2 => (-cos, -sin),
            _ => (sin, -cos),
        };
        let around = |value: IBig| Interval {
            low: Dyadic::new(&value - &error, -(BITS as i64)),
            high: Dyadic::new(value + &error, -(BITS as i64)),
        };
        (around(cos), around(sin))
    }
}

/// floor(x·2^BITS).
fn fixed(x: &Dyadic) -> IBig {
    let shift = x.exponent + BITS as i64;
    if shift >= 0 { &x.mantissa << (shift as usize) } else { &x.mantissa >> (-shift as usize) }
}

/// cos and sin of a fixed-point number of about ±0.8.
fn series(x: &IBig) -> (IBig, IBig) {
    let (mut cos, mut sin) = (IBig::ZERO, IBig::ZERO);
    let mut term = IBig::ONE << BITS;
    for n in 0..TERM_CAP {
        match n % 4 {
            0 => cos += &term,
            1 => sin += &term,
            2 => cos -= &term,
            _ => sin -= &term,
        }
        term = ((&term * x) >> BITS) / IBig::from(n + 1);
        // A negative term never shifts to zero, but to −1, and the division then ends it.
        if term.is_zero() {
            break;
        }
    }
    (cos, sin)
}

/// atan(1/n)·2^BITS.
fn inverse_tangent_of_inverse(n: i64) -> IBig {
    let square = IBig::from(n * n);
    let mut power = (IBig::ONE << BITS) / IBig::from(n);
    let mut sum = IBig::ZERO;
    for k in 0..TERM_CAP {
        let term = &power / IBig::from(2 * k + 1);
        sum += if k % 2 == 0 { term } else { -term };
        power /= &square;
        if power.is_zero() {
            break;
        }
    }
    sum
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn pi_is_enclosed_to_fifty_digits() {
        let turn = Trigonometry::new().full_turn();
        // 2π from memory, 50 digits: both printed ends agree with it.
        let bracket = turn.decimal_bracket(50);
        let expected = "6.2831853071795864769252867665590057683943387987502";
        assert_eq!(bracket[0], expected);
        assert!(turn.narrow(170));
    }

    proptest! {
        #[test]
        fn values_are_enclosed(x in -1e6f64..1e6) {
            let x = Interval::point(Dyadic::from_f64(x).expect("finite"));
            let (cos, sin) = Trigonometry::new().cos_sin(&x);
            let value = x.low.to_f64();
            prop_assert!((cos.low.to_f64() - libm::cos(value)).abs() < 1e-15);
            prop_assert!((sin.low.to_f64() - libm::sin(value)).abs() < 1e-15);
            // cos² + sin² = 1 to all bits, and each narrow.
            let square = cos.times(&cos).plus(&sin.times(&sin));
            let one = Dyadic::new(IBig::ONE, 0);
            prop_assert!(square.low <= one && one <= square.high);
            prop_assert!((&square.high - &square.low).to_f64() < 1e-45);
        }
    }
}
