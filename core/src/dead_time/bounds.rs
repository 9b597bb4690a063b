//! Frequencies beyond which a gain loop's crossings are all alike, from polynomial inequalities.

use super::delay::squared;
use crate::exact::IntPoly;
use crate::exact::real_roots::sign_changes;
use dashu_int::IBig;
use dashu_int::ops::BitTest;
use dashu_ratio::RBig;

/// Halvings of a bound on roots.
const BOUND_CAP: usize = 4000;

/// A frequency beyond which every crossing adds two unstable poles as |q| grows, rad/s.
///
/// With z = A·conj B1·e^(jωT), S = |z|² and θ its phase, S·θ′ = T·S + u·(v + 2x·v′) − 2x·u′·v. At a crossing
/// Im z = −ωc and h′ = θ′·Re z + (S′/2S)·Im z + (ωc)′. Without B0, θ′ > 0 is enough. With it, these four together are:
/// |A| ≥ 2|B0|, so that Re z has the sign of −q and at least √3/2 of |z|; θ′ ≥ T/2; and two that leave the other terms
/// below that.
pub(super) fn inner_frequency(
    a: &IntPoly,
    b0: &IntPoly,
    u: &IntPoly,
    v: &IntPoly,
    c: &IntPoly,
    dead_time: &RBig,
) -> f64 {
    let x = IntPoly::from_i64(&[0, 1]);
    let scaled = |p: &IntPoly, k: &IBig| IntPoly::new(p.coefficients().iter().map(|c| c * k).collect());
    let (tn, td) = (dead_time.numerator().clone(), IBig::from(dead_time.denominator().clone()));
    let size = u.times(u).plus(&v.times(v).times(&x));
    let dv = v.plus(&scaled(&v.derivative().times(&x), &IBig::from(2)));
    let turning = u.times(&dv).minus(&scaled(&u.derivative().times(v).times(&x), &IBig::from(2)));
    if b0.is_zero() {
        return libm::sqrt(bound_of_positive_roots(&size.combined(&tn, &turning, &td)));
    }
    let (tn2, td2) = (&tn * &tn * 3, &td * &td);
    let dc = c.plus(&scaled(&c.derivative().times(&x), &IBig::from(2)));
    let slope = size.derivative();
    let conditions = [
        squared(a).combined(&IBig::ONE, &squared(b0), &IBig::from(-4)),
        size.combined(&tn, &turning, &(&td * 2)),
        size.times(&size).combined(&tn2, &slope.times(&slope).times(&x), &(&td2 * -16)),
        size.combined(&tn2, &dc.times(&dc), &(&td2 * -64)),
    ];
    libm::sqrt(conditions.iter().map(bound_of_positive_roots).fold(0.0, f64::max))
}

/// A number that no positive root exceeds, at most about twice the largest by Descartes' rule: beyond it the coefficients of
/// the shifted polynomial show no change of sign.
fn bound_of_positive_roots(p: &IntPoly) -> f64 {
    if sign_changes(p.coefficients()) == 0 {
        return 0.0;
    }
    let top = p.leading().bit_len() as i64;
    let bits = |(i, c): (usize, &IBig)| (c.bit_len() as i64 - top + 1).div_euclid((p.degree() - i) as i64) + 1;
    let lower = p.coefficients().iter().enumerate().take(p.degree()).filter(|(_, c)| !c.is_zero());
    // Fujiwara's bound, 2^exponent.
    let mut exponent = lower.map(bits).max().unwrap_or(0) + 1;
    for _ in 0..BOUND_CAP {
        let (up, down) = (IBig::ONE << ((exponent - 1).max(0) as usize), IBig::ONE << ((1 - exponent).max(0) as usize));
        if sign_changes(p.shifted_right(&-up, &down, p.degree()).coefficients()) > 0 {
            break;
        }
        exponent -= 1;
    }
    libm::ldexp(1.0, exponent.clamp(-1000, 1000) as i32)
}
