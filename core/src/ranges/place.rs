//! Places: values of the knob where something happens, each in a proven bracket.

use crate::exact::{Dyadic, ExactError, IntPoly, Interval, RealRoot};
use alloc::vec::Vec;
use core::cmp::Ordering;
use dashu_int::IBig;
use dashu_int::ops::BitTest;
use dashu_ratio::RBig;

/// Brackets are narrowed to 2^−56 of their value: two of them merged are still within 1e-15.
pub const EDGE_BITS: i64 = 56;

/// Bits of refinement of the argument tried before an edge is given up: far beyond what any cancellation in an order
/// of 40 asks for.
const ARGUMENT_BITS_CAP: i64 = 8192;

/// Denominators longer than this are not tried when looking for a rational root: nobody would read the fraction.
const RATIONAL_BITS: usize = 96;

/// What happens at a place.
#[derive(Clone, Debug, PartialEq)]
pub enum Contact {
    /// A pole pair is at ±jω, ω > 0 in rad/s.
    Axis {
        /// rad/s.
        omega: f64,
    },
    /// A pole is at the origin.
    Origin,
    /// The leading coefficient vanishes.
    DegreeDrop,
    /// Poles meet on the real axis, 1/s.
    RealMeeting {
        /// Where, 1/s.
        s: f64,
        /// How many poles meet.
        multiplicity: usize,
    },
}

/// A value of the knob where something happens.
#[derive(Clone, Debug, PartialEq)]
pub struct Place {
    /// The knob lies in this bracket.
    pub bracket: Interval,
    /// The knob itself, where it is known to be rational.
    pub exact: Option<RBig>,
    /// What happens, one entry for each point of the s-plane.
    pub contacts: Vec<Contact>,
}

impl Place {
    /// At a rational value of the knob.
    pub fn exactly(value: RBig, contact: Contact) -> Self {
        Self {
            bracket: Interval::around(&value, EDGE_BITS as usize + 8),
            exact: Some(value),
            contacts: [contact].into(),
        }
    }

    /// Inside of a bracket.
    pub fn within(bracket: Interval, contact: Contact) -> Self {
        Self { bracket, exact: None, contacts: [contact].into() }
    }

    /// The knob as f64.
    pub fn value(&self) -> f64 {
        self.bracket.midpoint().to_f64()
    }
}

/// Puts places in order; those whose brackets meet become one.
pub fn merge(mut places: Vec<Place>) -> Vec<Place> {
    places.sort_by(|a, b| a.bracket.low.cmp(&b.bracket.low));
    let mut merged: Vec<Place> = Vec::with_capacity(places.len());
    for place in places {
        match merged.last_mut() {
            Some(last) if last.bracket.meets(&place.bracket) => {
                // An exact value inside of the other bracket is the sharper statement about both.
                last.bracket = match (&last.exact, &place.exact) {
                    (Some(_), None) => last.bracket.clone(),
                    (None, Some(_)) => place.bracket.clone(),
                    _ => last.bracket.hull(&place.bracket),
                };
                last.exact = last.exact.take().or(place.exact);
                last.contacts.extend(place.contacts);
            }
            _ => merged.push(place),
        }
    }
    merged
}

/// One short rational in every range that the places leave: before the first, between two, behind the last.
pub fn samples(places: &[Place]) -> Vec<RBig> {
    let (Some(first), Some(last)) = (places.first(), places.last()) else { return [RBig::ZERO].into() };
    let mut samples = Vec::with_capacity(places.len() + 1);
    samples.push(-beyond(&(-first.bracket.low.clone())));
    samples.extend(places.windows(2).map(|pair| shortest_between(&pair[0].bracket.high, &pair[1].bracket.low)));
    samples.push(beyond(&last.bracket.high));
    samples
}

/// A power of two above `value`, or 0 where that is above.
fn beyond(value: &Dyadic) -> RBig {
    match (value.signum(), value.magnitude()) {
        (1, Some(magnitude)) => Dyadic::new(IBig::ONE, magnitude + 1).to_rational(),
        (0, _) => RBig::ONE,
        _ => RBig::ZERO,
    }
}

/// The dyadic number with the shortest mantissa strictly between two others.
fn shortest_between(low: &Dyadic, high: &Dyadic) -> RBig {
    if low.signum() < 0 && high.signum() > 0 {
        return RBig::ZERO;
    }
    let mut exponent = low.magnitude().max(high.magnitude()).unwrap_or(0);
    loop {
        // The smallest multiple of 2^exponent above `low`.
        let shift = low.exponent - exponent;
        let floor = if shift >= 0 { &low.mantissa << (shift as usize) } else { &low.mantissa >> (-shift as usize) };
        let candidate = Dyadic::new(floor + 1, exponent);
        if candidate.cmp(high) == Ordering::Less {
            return candidate.to_rational();
        }
        exponent -= 1;
    }
}

/// A rational function −above/below whose value at a root is wanted.
pub(super) struct Quotient<'a> {
    /// The numerator.
    pub(super) above: &'a IntPoly,
    /// The denominator.
    pub(super) below: &'a IntPoly,
}

/// The knob −above(x)/below(x) at a root x of the square-free `p`, narrow; at least one of the quotients must be defined
/// at x, and where several are they must agree there.
///
/// # Errors
/// [`ExactError::EdgeNotNarrow`] when the cap on refinement is met.
pub(super) fn knob_at(
    p: &IntPoly,
    root: &mut RealRoot,
    quotients: &[Quotient<'_>],
) -> Result<(Interval, Option<RBig>), ExactError> {
    if let Some(x) = rational_root(p, root)? {
        for quotient in quotients {
            let below = value_at(quotient.below, &x);
            if !below.is_zero() {
                let q = -value_at(quotient.above, &x) / below;
                return Ok((Interval::around(&q, EDGE_BITS as usize + 8), Some(q)));
            }
        }
        return Err(ExactError::EdgeNotNarrow);
    }
    let mut bits = EDGE_BITS + 8;
    while bits <= ARGUMENT_BITS_CAP {
        root.refine_to(p, bits)?;
        let mut known: Option<Interval> = None;
        for quotient in quotients {
            let above = quotient.above.over_interval(&root.bracket).negated();
            let below = quotient.below.over_interval(&root.bracket);
            if let Some(q) = above.over(&below, EDGE_BITS as usize + 16) {
                known = Some(known.map_or(q.clone(), |k| if k.meets(&q) { k.common(&q) } else { k }));
            }
        }
        if let Some(q) = known.filter(|q| q.narrow(EDGE_BITS)) {
            return Ok((q, None));
        }
        bits *= 2;
    }
    Err(ExactError::EdgeNotNarrow)
}

/// p at a rational number.
pub(super) fn value_at(p: &IntPoly, x: &RBig) -> RBig {
    p.coefficients().iter().rev().fold(RBig::ZERO, |sum, c| sum * x + RBig::from(c.clone()))
}

/// The root as a rational number, where it is one with a short denominator.
///
/// # Errors
/// As [`RealRoot::refine_until`].
pub(super) fn rational_root(p: &IntPoly, root: &mut RealRoot) -> Result<Option<RBig>, ExactError> {
    if root.is_exact() {
        return Ok(Some(root.bracket.low.to_rational()));
    }
    let leading = p.leading();
    if leading.bit_len() > RATIONAL_BITS {
        return Ok(None);
    }
    // The denominator of a rational root divides the leading coefficient: lc·x is then an integer.
    let scale = Dyadic::new(leading.clone(), 0);
    root.refine_until(p, |bracket| {
        let width = &(&bracket.high - &bracket.low) * &scale;
        width.magnitude().is_none_or(|m| m < 0)
    })?;
    let scaled = &root.bracket.high * &scale;
    let scaled = if scale.signum() < 0 { &root.bracket.low * &scale } else { scaled };
    let shift = -scaled.exponent.min(0) as usize;
    let numerator = (scaled.mantissa << (scaled.exponent.max(0) as usize)) >> shift;
    let candidate = RBig::from_parts_signed(numerator, leading);
    Ok(value_at(p, &candidate).is_zero().then_some(candidate))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::exact::real_roots::positive_roots;

    fn dyadic(text: f64) -> Dyadic {
        Dyadic::from_f64(text).expect("finite")
    }

    #[test]
    fn the_shortest_sample_lies_between() {
        for (low, high) in [(1.0, 3.0), (0.1, 0.11), (-7.5, -7.25), (1e-9, 2e-9), (-1.0, 1e9), (5.0, 5.5)] {
            let sample = shortest_between(&dyadic(low), &dyadic(high));
            assert!(dyadic(low).to_rational() < sample && sample < dyadic(high).to_rational(), "{low} {sample} {high}");
        }
    }

    #[test]
    fn a_rational_root_is_recognised() {
        // (7x − 3)(x² − 2)
        let p = IntPoly::from_i64(&[-3, 7]).times(&IntPoly::from_i64(&[-2, 0, 1]));
        let mut roots = positive_roots(&p).expect("isolated");
        let found: Vec<_> = roots.iter_mut().map(|r| rational_root(&p, r).expect("refined")).collect();
        assert_eq!(found, [Some(RBig::from_parts(3.into(), 7u8.into())), None]);
    }

    #[test]
    fn places_in_the_same_spot_become_one() {
        let at = |q: i64| Place::exactly(RBig::from(q), Contact::Origin);
        let merged = merge([at(3), at(-1), at(3)].into());
        assert_eq!(merged.iter().map(|p| p.contacts.len()).collect::<Vec<_>>(), [1, 2]);
    }
}
