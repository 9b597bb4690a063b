//! Places: values of the knob where something happens, each in a proven bracket.

use crate::exact::{Dyadic, ExactError, IntPoly, Interval, RealRoot};
use alloc::vec::Vec;
use core::cmp::Ordering;
use dashu_int::IBig;
use dashu_int::ops::BitTest;
use dashu_ratio::RBig;

/// Brackets are narrowed to 2^−200 of their value. The record needs 2^−53; the rest tells edges apart that f64 cannot,
/// shows which of them are rational, and keeps poles that meet there within 2^−100 of each other.
pub const EDGE_BITS: i64 = 200;

/// Bits of refinement of the argument tried before an edge is given up: far beyond what any cancellation in an order
/// of 40 asks for.
const ARGUMENT_BITS_CAP: i64 = 8192;

/// A rational number this short in a bracket of [`EDGE_BITS`] is no accident: it is tried as the edge itself.
const RATIONAL_BITS: usize = 150;

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
    /// A pole is at z = −1: the loop alternates from sample to sample. Of sampled loops only.
    Alternation,
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

    /// Whether poles reach the axis, the origin or infinity here.
    pub fn is_of_stability(&self) -> bool {
        self.contacts.iter().any(|contact| !matches!(contact, Contact::RealMeeting { .. }))
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
/// at x, and where several are they must agree there. The root is refined on the way.
///
/// # Errors
/// [`ExactError::EdgeNotNarrow`] when the cap on refinement is met.
pub(super) fn knob_at(p: &IntPoly, root: &mut RealRoot, quotients: &[Quotient<'_>]) -> Result<Interval, ExactError> {
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
            return Ok(q);
        }
        bits *= 2;
    }
    Err(ExactError::EdgeNotNarrow)
}

/// The short rational number in a narrow bracket, if there is one: the last convergent of the continued fraction that
/// both ends share. Whether it is the edge itself must be checked.
pub(super) fn short_rational(bracket: &Interval) -> Option<RBig> {
    let (mut low, mut high) = (bracket.low.to_rational(), bracket.high.to_rational());
    if low == high {
        return Some(low).filter(is_short);
    }
    // Convergents h/k, of which the last two are carried.
    let (mut h, mut h_before) = (IBig::ONE, IBig::ZERO);
    let (mut k, mut k_before) = (IBig::ZERO, IBig::ONE);
    while h.bit_len() + k.bit_len() <= RATIONAL_BITS {
        let (floor, above) = (low.floor(), high.floor());
        let last = floor != above || low == RBig::from(floor.clone());
        // The simplest number between two whose whole parts differ is the whole number above the lower one.
        let term = if last && low != RBig::from(floor.clone()) { &floor + 1 } else { floor.clone() };
        (h, h_before) = (&term * &h + &h_before, h);
        (k, k_before) = (&term * &k + &k_before, k);
        if last {
            return Some(RBig::from_parts_signed(h, k)).filter(is_short);
        }
        // The fractional parts, turned over, exchange their order.
        let whole = RBig::from(floor);
        (low, high) = (RBig::ONE / (high - &whole), RBig::ONE / (low - &whole));
    }
    None
}

fn is_short(value: &RBig) -> bool {
    value.numerator().bit_len() + value.denominator().bit_len() <= RATIONAL_BITS
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
    fn a_short_rational_is_recognised_and_no_other() {
        let around = |n: i64, d: u64| Interval::around(&RBig::from_parts(n.into(), d.into()), EDGE_BITS as usize);
        for (n, d) in [(3, 7), (-2, 15), (1386, 1), (-1, 1_000_003), (5120, 9)] {
            assert_eq!(short_rational(&around(n, d)), Some(RBig::from_parts(n.into(), d.into())), "{n}/{d}");
        }
        let p = IntPoly::from_i64(&[-2, 0, 1]);
        let mut root = positive_roots(&p).expect("isolated").remove(0);
        root.refine_to(&p, EDGE_BITS).expect("refined");
        assert_eq!(short_rational(&root.bracket), None);
    }

    #[test]
    fn places_in_the_same_spot_become_one() {
        let at = |q: i64| Place::exactly(RBig::from(q), Contact::Origin);
        let merged = merge([at(3), at(-1), at(3)].into());
        assert_eq!(merged.iter().map(|p| p.contacts.len()).collect::<Vec<_>>(), [1, 2]);
    }
}
