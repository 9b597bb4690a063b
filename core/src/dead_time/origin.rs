//! What happens at s = 0 while a gain moves, from exact power series.

use super::DeadTimeError;
use super::gain::GainFamily;
use super::partition::Crossing;
use crate::exact::IntPoly;
use crate::exact::dyadic::sign_of;
use crate::ranges::{Contact, Place};
use core::f64::consts::PI;
use dashu_ratio::RBig;

/// Coefficients of a power series looked at for the first that is not zero.
const SERIES_CAP: usize = 80;

/// The order in ω of h's zero at 0, and the sign of h right of it, from the exact power series.
pub(super) fn order_at_zero(
    u: &IntPoly,
    v: &IntPoly,
    c: &IntPoly,
    dead_time: &RBig,
) -> Result<(usize, i32), DeadTimeError> {
    let square = dead_time * dead_time;
    for m in 0..SERIES_CAP {
        // h/ω = u·T·Σ (−xT²)^k/(2k+1)! + v·Σ (−xT²)^k/(2k)! + c, the coefficient of x^m.
        let mut sum = RBig::from(c.coefficient(m));
        let mut term = RBig::ONE;
        for k in 0..=m {
            sum += &term * RBig::from(v.coefficient(m - k));
            let odd = &term / RBig::from(2 * k + 1);
            sum += odd * dead_time * RBig::from(u.coefficient(m - k));
            term = -term * &square / RBig::from((2 * k + 1) * (2 * k + 2));
        }
        if !sum.is_zero() {
            return Ok((2 * m + 1, sign_of(sum.numerator())));
        }
    }
    Err(DeadTimeError::AlwaysZero)
}

/// The crossing of the origin; `sign` is that of h right of 0.
pub(super) fn origin_crossing(family: &GainFamily, sign: i32) -> Result<Option<Crossing>, DeadTimeError> {
    let (above, below) = (family.a.coefficient(0) + family.b0.coefficient(0), family.b1.coefficient(0));
    if below.is_zero() {
        return if above.is_zero() { Err(DeadTimeError::AlwaysAtOrigin) } else { Ok(None) };
    }
    let q = RBig::from_parts_signed(-above, below.clone());
    let change = i64::from(-sign);
    let place = Place::exactly(q.clone(), Contact::Origin);
    let (a, b) = family.at(&q);
    let Some((multiplicity, leading)) = order_at_origin(&a, &b, &family.dead_time) else {
        return Err(DeadTimeError::AlwaysZero);
    };
    if multiplicity == 1 {
        return Ok(Some(Crossing::simple(place, change)));
    }
    // Near it leading·s^m + (q − q0)·B1(0) = 0: the roots leave along the m-th roots of a number of known sign.
    let direction = -leading * sign_of(&below);
    let (lower, upper) = (to_the_right(multiplicity, -direction), to_the_right(multiplicity, direction));
    let from_right = match (lower, upper) {
        (Some(right), _) => Some(right),
        (None, Some(right)) => usize::try_from(right as i64 - change).ok(),
        (None, None) => None,
    };
    Ok(Some(Crossing { place, change, axis: multiplicity, from_right }))
}

/// The order of the zero at s = 0 of A + B·e^(−sT), and the sign of its first coefficient; with e^(+sT)·A + B the same.
fn order_at_origin(a: &IntPoly, b: &IntPoly, dead_time: &RBig) -> Option<(usize, i32)> {
    for i in 0..SERIES_CAP {
        let mut sum = RBig::from(a.coefficient(i));
        let mut term = RBig::ONE;
        for k in 0..=i {
            sum += &term * RBig::from(b.coefficient(i - k));
            term = -term * dead_time / RBig::from(k + 1);
        }
        if !sum.is_zero() {
            return Some((i, sign_of(sum.numerator())));
        }
    }
    None
}

/// How many m-th roots of a positive (or negative) number have a positive real part; None where some have none.
fn to_the_right(m: usize, sign: i32) -> Option<usize> {
    let mut right = 0;
    for k in 0..m {
        let cos = libm::cos((2.0 * k as f64 + if sign < 0 { 1.0 } else { 0.0 }) * PI / m as f64);
        if cos.abs() < 1e-9 {
            return None;
        }
        right += usize::from(cos > 0.0);
    }
    Some(right)
}
