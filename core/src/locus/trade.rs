//! The rules of the trade for an affine knob: asymptotes, segments of the real axis, angles of departure and arrival.
//!
//! W. R. Evans, "Graphical analysis of control systems", Transactions of the AIEE 67 (1948).

use crate::exact::IntPoly;
use crate::exact::dyadic::sign_of;
use crate::record::{Asymptotes, BothSigns, KnobSign, Root, Segment};
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::{Complex, ComplexField};

/// A function of each sign of the knob.
pub fn for_both_signs<T>(make: impl Fn(KnobSign) -> T) -> BothSigns<T> {
    BothSigns { positive: make(KnobSign::Positive), negative: make(KnobSign::Negative) }
}

/// Where the branches of D + q·N go to infinity as q → ∞, or come from it as q grows from 0 where N has the higher degree.
pub fn asymptotes(d: &IntPoly, n: &IntPoly, sign: KnobSign) -> Asymptotes {
    let (more, fewer) = if d.degree() >= n.degree() { (d, n) } else { (n, d) };
    let count = more.degree() - fewer.degree();
    // (s − centroid)^count ≈ −q·lc(N)/lc(D).
    let real_positive = f64::from(d.leading_sign() * n.leading_sign()) * sign.factor() < 0.0;
    let first = if real_positive { 0.0 } else { 180.0 };
    let angles = spread(first, count);
    let centroid = (count > 0).then(|| {
        let sum = root_sum(more) - root_sum(fewer);
        (sum / RBig::from(count)).to_f64().value()
    });
    Asymptotes { count, centroid, angles }
}

/// The sum of the roots.
pub fn root_sum(p: &IntPoly) -> RBig {
    match p.degree() {
        0 => RBig::ZERO,
        degree => RBig::from_parts_signed(-p.coefficient(degree - 1), p.leading()),
    }
}

/// The `count` angles (first + 360·k)/count in (−180, 180], ascending.
pub fn spread(first: f64, count: usize) -> Vec<f64> {
    let mut angles: Vec<f64> = (0..count)
        .map(|k| {
            let angle = (first + 360.0 * k as f64) / count as f64;
            if angle > 180.0 { angle - 360.0 } else { angle }
        })
        .map(|angle| if angle <= -180.0 { angle + 360.0 } else { angle })
        .collect();
    angles.sort_by(f64::total_cmp);
    angles
}

/// The parts of the real axis on the locus: where q = −D/N has the wanted sign. Ascending.
pub fn real_axis(d: &IntPoly, n: &IntPoly, poles: &[Root], zeros: &[Root], sign: KnobSign) -> Vec<Segment> {
    // Only a root of odd multiplicity changes the sign.
    let mut changes: Vec<f64> =
        poles.iter().chain(zeros).filter(|r| r.im == 0.0 && r.multiplicity % 2 == 1).map(|r| r.re).collect();
    changes.sort_by(f64::total_cmp);
    let mut on_locus = f64::from(d.leading_sign() * n.leading_sign()) * sign.factor() < 0.0;
    let mut segments = Vec::new();
    let mut right = None;
    for change in changes.into_iter().rev() {
        if on_locus {
            segments.push(Segment(Some(change), right));
        }
        right = Some(change);
        on_locus = !on_locus;
    }
    if on_locus {
        segments.push(Segment(None, right));
    }
    segments.reverse();
    segments
}

/// The directions, in degrees, in which branches leave a pole, or, seen from a zero, arrive at it: near a root r of
/// multiplicity m, one of `own`, (s − r)^m is a positive multiple of −sign·(rest), rest the other side's product over the own one's.
pub fn directions(at: &Root, own: &[Root], other: &[Root], gain_sign: f64) -> Vec<f64> {
    let place = Complex::new(at.re, at.im);
    let angle_to = |r: &Root| {
        let difference = place - Complex::new(r.re, r.im);
        r.multiplicity as f64 * difference.argument().to_degrees()
    };
    let same = |r: &Root| core::ptr::eq(r, at);
    let turn: f64 =
        other.iter().map(angle_to).sum::<f64>() - own.iter().filter(|r| !same(r)).map(angle_to).sum::<f64>();
    let first = if gain_sign > 0.0 { turn + 180.0 } else { turn };
    // On the real axis the angles of conjugate roots cancel: only 0 and 180 are possible.
    let first = if at.im == 0.0 { 180.0 * libm::round(first / 180.0) } else { first };
    spread(first - 360.0 * libm::floor(first / 360.0), at.multiplicity)
}

/// The sign of the ratio of the leading coefficients of N and D, times that of the knob.
pub fn gain_sign(d: &IntPoly, n: &IntPoly, sign: KnobSign) -> f64 {
    f64::from(sign_of(&d.leading()) * sign_of(&n.leading())) * sign.factor()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn three_more_poles_than_zeros_give_sixty_degrees() {
        // Common practice, no source.
        let d = IntPoly::from_i64(&[0, 77, 18, 1]);
        let found = asymptotes(&d, &IntPoly::from_i64(&[1]), KnobSign::Positive);
        assert_eq!(found, Asymptotes { count: 3, centroid: Some(-6.0), angles: [-60.0, 60.0, 180.0].into() });
        let negative = asymptotes(&d, &IntPoly::from_i64(&[1]), KnobSign::Negative);
        assert_eq!(negative.angles, [-120.0, 0.0, 120.0]);
    }

    #[test]
    fn the_real_axis_belongs_left_of_an_odd_number() {
        // Common practice, no source: (s + 2)(s + 3)/(s (s + 1)).
        let root = |re: f64| Root { re, im: 0.0, radius: 0.0, multiplicity: 1 };
        let (d, n) = (IntPoly::from_i64(&[0, 1, 1]), IntPoly::from_i64(&[6, 5, 1]));
        let (poles, zeros) = ([root(0.0), root(-1.0)], [root(-2.0), root(-3.0)]);
        let positive = real_axis(&d, &n, &poles, &zeros, KnobSign::Positive);
        assert_eq!(positive, [Segment(Some(-3.0), Some(-2.0)), Segment(Some(-1.0), Some(0.0))]);
        let negative = real_axis(&d, &n, &poles, &zeros, KnobSign::Negative);
        assert_eq!(negative, [Segment(None, Some(-3.0)), Segment(Some(-2.0), Some(-1.0)), Segment(Some(0.0), None)]);
    }
}
