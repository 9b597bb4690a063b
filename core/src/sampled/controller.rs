//! The controller in z: as typed, or made from one in s by a named method.
//!
//! - Tustin (the trapezoidal rule): s = (2/h)(z − 1)/(z + 1); prewarped at ω: s = ω/tan(ωh/2)·(z − 1)/(z + 1).
//! - Backward difference: s = (z − 1)/(h z).
//! - Matched: every pole and zero goes to e^(s h); the polynomial with these roots is det(zI − e^(Ah)) of a companion
//!   matrix A, so that no root is computed. A root at s = 0 becomes one at z = 1. Where there are more poles than zeros,
//!   the missing zeros are put at z = −1, all of them, so that the controller stays as quick as it was. The gain is
//!   matched at low frequency, integrators and differentiators taken as (z − 1)/h.
//!
//! (K. J. Åström, B. Wittenmark, Computer-Controlled Systems, Prentice Hall, chapter on translating analog designs; from
//! memory.)

use super::enclosed::Enclosed;
use super::factored::Factored;
use super::fixed::Matrix;
use super::plant::taken_along;
use crate::exact::gcd::{gcd, squarefree_part};
use crate::exact::half_plane::{HalfPlaneCount, count};
use crate::exact::{ExactError, IntPoly};
use crate::model::KnobPolynomial;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;

/// How the controller is given.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Given {
    /// As a ratio in z.
    InZ,
    /// As a ratio in s, with the method that makes one in z of it.
    InS(Method),
}

/// The methods.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Method {
    /// The trapezoidal rule.
    Tustin,
    /// The trapezoidal rule, exact at this frequency in rad/s, above zero and below π/h.
    Prewarped(RBig),
    /// The backward difference.
    BackwardDifference,
    /// Matched poles and zeros.
    Matched,
}

/// Why a controller cannot be taken to z.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Unmatched {
    /// The knob moves poles or zeros.
    KnobInRoots,
    /// There are more zeros than poles.
    Improper,
}

/// A ratio whose parts are polynomials in the knob: entry k of each list multiplies the knob's k-th power.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct KnobRatio {
    /// The numerator.
    pub above: Vec<IntPoly>,
    /// The denominator.
    pub below: Vec<IntPoly>,
}

impl KnobRatio {
    /// From numerator and denominator.
    pub fn new(above: &KnobPolynomial, below: &KnobPolynomial) -> Self {
        let powers = |p: &KnobPolynomial| (0..=p.knob_degree()).map(|k| IntPoly::new(p.at_knob_power(k))).collect();
        Self { above: powers(above), below: powers(below) }
    }

    fn degree(&self) -> usize {
        self.above.iter().chain(&self.below).map(IntPoly::degree).max().unwrap_or(0)
    }

    /// Without the factor that all parts share, and that factor.
    fn reduced(&self) -> (Self, IntPoly) {
        let common = self.above.iter().chain(&self.below).fold(IntPoly::default(), |g, p| gcd(&g, p));
        if common.degree() == 0 {
            return (self.clone(), IntPoly::from_i64(&[1]));
        }
        let over =
            |parts: &[IntPoly]| parts.iter().map(|p| p.exactly_over(&common).unwrap_or_else(|| p.clone())).collect();
        (Self { above: over(&self.above), below: over(&self.below) }, common)
    }
}

/// A controller in z.
#[derive(Clone, Debug)]
pub struct Controller {
    /// The numerator, by powers of the knob.
    pub above: Vec<Factored>,
    /// The denominator likewise.
    pub below: Vec<Factored>,
    /// Poles that no knob moves because a zero hides them, and how many of them lie outside of the unit circle and on it.
    pub fixed: (Factored, HalfPlaneCount),
}

/// The controller in z.
///
/// # Errors
/// Why the method does not apply, inside; from the exact counts outside.
pub fn controller(
    ratio: &KnobRatio,
    given: &Given,
    period: &RBig,
    bits: usize,
) -> Result<Result<Controller, Unmatched>, ExactError> {
    let (ratio, common) = ratio.reduced();
    let parts = |parts: &[IntPoly], map: &dyn Fn(&IntPoly) -> Factored| parts.iter().map(map).collect();
    let by = |map: &dyn Fn(&IntPoly) -> Factored, fixed| Controller {
        above: parts(&ratio.above, map),
        below: parts(&ratio.below, map),
        fixed,
    };
    let (rule, fixed) = match given {
        Given::InZ => {
            let fixed = (Factored::from_exact(&common), circle_count(&common)?);
            return Ok(Ok(by(&on_the_circle, fixed)));
        }
        Given::InS(Method::Matched) => {
            let fixed = (roots_taken_along(&common, period, bits), count(&common)?);
            return Ok(matched(&ratio, period, bits, fixed));
        }
        Given::InS(Method::BackwardDifference) => {
            let rule = Rule::backward(period);
            let image = rule.apply(&common, common.degree()).expanded().center;
            let fixed = (Factored::from_exact(&image), circle_count(&image)?);
            (rule, fixed)
        }
        Given::InS(method) => {
            let rule = match method {
                Method::Prewarped(omega) => Rule::prewarped(omega, period, bits),
                _ => Rule::tustin(period),
            };
            let fixed = (rule.apply(&common, common.degree()), count(&common)?);
            (rule, fixed)
        }
    };
    let degree = ratio.degree();
    Ok(Ok(by(&|p| rule.apply(p, degree), fixed)))
}

/// Roots of an exact polynomial in z outside of the unit circle (`right`) and on it (`axis`).
fn circle_count(p: &IntPoly) -> Result<HalfPlaneCount, ExactError> {
    let mapped = p.from_circle(&IBig::ONE, &IBig::ONE, p.degree());
    let at_minus_one = p.degree() - mapped.degree();
    let found = count(&mapped)?;
    Ok(HalfPlaneCount { axis: found.axis + at_minus_one, ..found })
}

/// An exact polynomial in z, with what is known of its roots on the unit circle.
fn on_the_circle(p: &IntPoly) -> Factored {
    let known = Factored::from_exact(p);
    let rest = squarefree_part(&known.rest().center);
    let circle_pairs = circle_count(&rest).map_or(0, |count| count.axis / 2);
    Factored { circle_pairs, ..known }
}

/// s = a·(z − 1)/(b·w), w = z + 1 or z.
struct Rule {
    a: Enclosed,
    b: Enclosed,
    /// Whether w is z + 1.
    trapezoid: bool,
}

impl Rule {
    fn tustin(period: &RBig) -> Self {
        let (a, b) = parts(period);
        Self { a: constant(a * 2), b: constant(b), trapezoid: true }
    }

    fn backward(period: &RBig) -> Self {
        let (a, b) = parts(period);
        Self { a: constant(a), b: constant(b), trapezoid: false }
    }

    /// s = ω·cos φ/sin φ·(z − 1)/(z + 1) with φ = ωh/2.
    fn prewarped(omega: &RBig, period: &RBig, bits: usize) -> Self {
        let angle = omega * period / RBig::from(2);
        let turn = Matrix::from_rationals(2, &[RBig::ZERO, -angle.clone(), angle, RBig::ZERO], bits).exponential();
        let entry = |row: usize, factor: IBig| {
            let number = Enclosed {
                center: IntPoly::new([turn.at(row, 0).clone()].into()),
                radius: IntPoly::new([turn.radius.clone()].into()),
                exponent: -(bits as i64),
            };
            number.scaled(&factor)
        };
        let numerator = omega.numerator().clone();
        Self { a: entry(0, numerator), b: entry(1, omega.denominator().clone().into()), trapezoid: true }
    }

    /// b^degree·w^degree·p(s) as a polynomial in z.
    fn apply(&self, p: &IntPoly, degree: usize) -> Factored {
        if p.is_zero() {
            return Factored::plain(Enclosed::default());
        }
        let (stripped, at_zero) = p.without_zero_roots();
        let own = stripped.degree();
        let missing = degree - at_zero - own;
        let w = IntPoly::from_i64(if self.trapezoid { &[1, 1] } else { &[0, 1] });
        let up = IntPoly::from_i64(&[-1, 1]);
        // Horner's scheme in a·(z − 1), with a factor b·w more at every step.
        let mut sum = Enclosed::default();
        let mut below = Enclosed::one();
        for c in stripped.coefficients().iter().rev() {
            sum = sum.times_exact(&up).times(&self.a).plus(&below.scaled(c));
            below = below.times_exact(&w).times(&self.b);
        }
        let power = |number: &Enclosed, count: usize| (0..count).fold(Enclosed::one(), |p, _| p.times(number));
        let rest = sum.times(&power(&self.a, at_zero)).times(&power(&self.b, missing));
        let circle_pairs =
            if self.trapezoid { count(&squarefree_part(&stripped)).map_or(0, |count| count.axis / 2) } else { 0 };
        let (zeros, minus_ones) = if self.trapezoid { (0, missing) } else { (missing, 0) };
        Factored { zeros, ones: at_zero, minus_ones, circle_pairs, ..Factored::plain(rest) }
    }
}

/// Denominator and numerator.
fn parts(period: &RBig) -> (IBig, IBig) {
    (period.denominator().clone().into(), period.numerator().clone())
}

fn constant(value: IBig) -> Enclosed {
    Enclosed::exact(IntPoly::new([value].into()))
}

/// The polynomial with a root e^(r h) for every root r of p, leading coefficient 1.
fn roots_taken_along(p: &IntPoly, period: &RBig, bits: usize) -> Factored {
    let (rest, ones) = p.without_zero_roots();
    Factored { ones, ..taken_along(&rest, period, bits) }
}

/// p(s)·κ(q), where the parts are multiples of one polynomial.
fn separated(parts: &[IntPoly]) -> Option<(IntPoly, Vec<IBig>)> {
    let p = parts.iter().find(|p| !p.is_zero())?.primitive();
    let gains = parts.iter().map(|part| {
        if part.is_zero() {
            return Some(IBig::ZERO);
        }
        let quotient = part.exactly_over(&p)?;
        (quotient.degree() == 0).then(|| quotient.leading())
    });
    let gains: Option<Vec<IBig>> = gains.collect();
    Some((p, gains?))
}

fn matched(
    ratio: &KnobRatio,
    period: &RBig,
    bits: usize,
    fixed: (Factored, HalfPlaneCount),
) -> Result<Controller, Unmatched> {
    if ratio.above.iter().all(IntPoly::is_zero) {
        let zero = Factored::plain(Enclosed::default());
        let below = separated(&ratio.below).ok_or(Unmatched::KnobInRoots)?;
        let poles = roots_taken_along(&below.0, period, bits);
        let below = below.1.iter().map(|gain| poles.scaled(&constant(gain.clone()))).collect();
        return Ok(Controller { above: [zero].into(), below, fixed });
    }
    let (zeros, zero_gains) = separated(&ratio.above).ok_or(Unmatched::KnobInRoots)?;
    let (poles, pole_gains) = separated(&ratio.below).ok_or(Unmatched::KnobInRoots)?;
    let missing = poles.degree().checked_sub(zeros.degree()).ok_or(Unmatched::Improper)?;
    let above = Factored { minus_ones: missing, ..roots_taken_along(&zeros, period, bits) };
    let below = roots_taken_along(&poles, period, bits);
    // κ·s^i·p(s) → s^i·p(0) for small s, and (z − 1)^i·P(1) in z, with s = (z − 1)/h: each side gets the other's value
    // at z = 1 and the other's power of h.
    let (denominator, numerator) = parts(period);
    let power = |base: &IBig, count: usize| base.pow(count);
    let at_one = |p: &Factored| value_at_one(&p.rest()).scaled(&power(&IBig::from(2), p.minus_ones));
    let lowest = |p: &IntPoly| p.without_zero_roots().0.coefficient(0);
    let above_gain =
        at_one(&below).scaled(&(lowest(&zeros) * power(&denominator, above.ones) * power(&numerator, below.ones)));
    let below_gain =
        at_one(&above).scaled(&(lowest(&poles) * power(&denominator, below.ones) * power(&numerator, above.ones)));
    let with = |p: &Factored, gain: &Enclosed, knob: &[IBig]| knob.iter().map(|k| p.scaled(&gain.scaled(k))).collect();
    Ok(Controller {
        above: with(&above, &above_gain, &zero_gains),
        below: with(&below, &below_gain, &pole_gains),
        fixed,
    })
}

/// p(1), as a constant.
fn value_at_one(p: &Enclosed) -> Enclosed {
    let sum = |p: &IntPoly| IntPoly::new([p.coefficients().iter().sum()].into());
    Enclosed { center: sum(&p.center), radius: sum(&p.radius), exponent: p.exponent }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn p(c: &[i64]) -> IntPoly {
        IntPoly::from_i64(c)
    }

    /// above(z)/below(z) in f64 for the knob's power 0 of the denominator and `power` of the numerator.
    fn value(c: &Controller, power: usize, z: f64) -> f64 {
        let at = |p: &Factored| {
            let p = p.expanded();
            (0..=p.degree()).rev().fold(0.0, |sum, i| sum * z + p.coefficient(i).midpoint().to_f64())
        };
        at(&c.above[power]) / at(&c.below[0])
    }

    fn made(above: &[IntPoly], below: &[IntPoly], method: Method, period: &RBig) -> Controller {
        let ratio = KnobRatio { above: above.to_vec(), below: below.to_vec() };
        controller(&ratio, &Given::InS(method), period, 192).expect("counted").expect("applies")
    }

    /// K (s + 2)/(s (s + 5)) at h = 1/10.
    fn lead(method: Method) -> Controller {
        made(&[p(&[]), p(&[2, 1])], &[p(&[0, 5, 1])], method, &RBig::from_parts(1.into(), 10u8.into()))
    }

    fn continuous(s: f64) -> f64 {
        (s + 2.0) / (s * (s + 5.0))
    }

    #[test]
    fn substitutions_are_what_they_say() {
        for z in [0.3, 1.7, -2.5] {
            let tustin = continuous(20.0 * (z - 1.0) / (z + 1.0));
            assert!((value(&lead(Method::Tustin), 1, z) / tustin - 1.0).abs() < 1e-13, "{z}");
            let backward = continuous(10.0 * (z - 1.0) / z);
            assert!((value(&lead(Method::BackwardDifference), 1, z) / backward - 1.0).abs() < 1e-13, "{z}");
            let warped = 4.0 / libm::tan(0.2) * (z - 1.0) / (z + 1.0);
            let found = value(&lead(Method::Prewarped(RBig::from(4))), 1, z);
            assert!((found / continuous(warped) - 1.0).abs() < 1e-13, "{z}");
        }
    }

    #[test]
    fn integrators_and_zeros_at_infinity_are_known() {
        let found = lead(Method::Tustin);
        assert_eq!((found.below[0].ones, found.above[1].minus_ones), (1, 1));
        let found = lead(Method::Matched);
        assert_eq!((found.below[0].ones, found.above[1].minus_ones), (1, 1));
        let found = lead(Method::BackwardDifference);
        assert_eq!((found.below[0].ones, found.above[1].zeros), (1, 1));
    }

    #[test]
    fn matched_poles_and_zeros_have_the_same_gain_at_low_frequency() {
        let found = lead(Method::Matched);
        // Near z = 1, s = (z − 1)/h; the relative difference is of the order of z − 1.
        let z = 1.0 + 1e-9;
        let s = 1e-8;
        assert!((value(&found, 1, z) / continuous(s) - 1.0).abs() < 1e-6);
        let zero = found.above[1].rest().coefficient(0).midpoint().to_f64()
            / found.above[1].rest().coefficient(1).midpoint().to_f64();
        assert!((zero + libm::exp(-0.2)).abs() < 1e-14);
    }

    #[test]
    fn what_cannot_be_matched_is_told() {
        let refused = |above: &[IntPoly], below: &[IntPoly]| {
            let ratio = KnobRatio { above: above.to_vec(), below: below.to_vec() };
            controller(&ratio, &Given::InS(Method::Matched), &RBig::ONE, 192).expect("counted").err()
        };
        // 3 + K/s, and K (s + 1).
        assert_eq!(refused(&[p(&[0, 3]), p(&[1])], &[p(&[0, 1])]), Some(Unmatched::KnobInRoots));
        assert_eq!(refused(&[p(&[]), p(&[1, 1])], &[p(&[1])]), Some(Unmatched::Improper));
    }

    #[test]
    fn a_hidden_unstable_pole_is_counted() {
        let ratio = KnobRatio { above: [p(&[]), p(&[-2, 1])].into(), below: [p(&[-6, 1, 1])].into() };
        let found =
            controller(&ratio, &Given::InS(Method::Tustin), &RBig::ONE, 192).expect("counted").expect("applies");
        assert_eq!((found.fixed.1.right, found.fixed.1.axis), (1, 0));
    }
}
