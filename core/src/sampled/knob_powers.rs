//! Places of a sampled loop in which the knob appears to a higher power.
//!
//! The exact method for such families needs exact coefficients; it is given the middles of the enclosures, which are right
//! to some fifty digits. The counts in the ranges are proven for the enclosures themselves, but that no two edges lie
//! between two neighbouring ones is not: these places are marked as not proven.

use super::enclosed::Enclosed;
use super::family::{SampledFamily, Trouble};
use super::ranges::Places;
use crate::exact::gcd::squarefree_part;
use crate::exact::real_roots::real_roots;
use crate::exact::{Dyadic, IntPoly, Interval};
use crate::ranges::{Contact, Family, Place, polynomial};
use alloc::vec::Vec;
use dashu_int::IBig;

/// Bits of the middles that are used: resultants take long with more, and edges are printed with 53.
const MIDDLE_BITS: usize = 160;

/// Edges of the middles are widened by this part of their value, in bits.
const WIDENED_BITS: i64 = 58;

/// The places; `parts` are given on the axis.
pub(super) fn places(family: &SampledFamily, parts: &[Enclosed], period: f64) -> Result<Places, Trouble> {
    let mut found = Places { proven: false, ..Places::default() };
    let middle = Family::new(middles(parts, MIDDLE_BITS)).ok_or(Trouble::Undecided)?;
    for place in polynomial::stability_places(&middle)? {
        let contacts = place.contacts.into_iter().map(|contact| match contact {
            Contact::Axis { omega } => Contact::Axis { omega: 2.0 * libm::atan(omega) / period },
            Contact::DegreeDrop => Contact::Alternation,
            other => other,
        });
        found.places.push(Place { bracket: widened(&place.bracket), contacts: contacts.collect(), exact: place.exact });
    }
    let order = family.order();
    let in_z: Vec<Enclosed> = family.parts.iter().map(super::factored::Factored::expanded).collect();
    let leading = IntPoly::new(middles(&in_z, MIDDLE_BITS).iter().map(|part| part.coefficient(order)).collect());
    if leading.degree() > 0 {
        let leading = squarefree_part(&leading);
        for mut root in real_roots(&leading)? {
            root.refine_to(&leading, crate::ranges::EDGE_BITS)?;
            found.places.push(Place::within(widened(&root.bracket), Contact::DegreeDrop));
        }
    }
    Ok(found)
}

/// The middles of all parts over one power of two, the largest coefficient with at most `bits` bits.
pub(super) fn middles(parts: &[Enclosed], bits: usize) -> Vec<IntPoly> {
    let exponent = parts.iter().map(|p| p.exponent).min().unwrap_or(0);
    let aligned: Vec<IntPoly> = parts
        .iter()
        .map(|p| {
            IntPoly::new(p.center.coefficients().iter().map(|c| c << ((p.exponent - exponent) as usize)).collect())
        })
        .collect();
    let excess = aligned.iter().map(IntPoly::bits).max().unwrap_or(0).saturating_sub(bits);
    let cut = |c: &IBig| if excess == 0 { c.clone() } else { c >> excess };
    aligned.iter().map(|p| IntPoly::new(p.coefficients().iter().map(cut).collect())).collect()
}

fn widened(bracket: &Interval) -> Interval {
    let by = |end: &Dyadic| {
        let size = if end.signum() < 0 { -end.clone() } else { end.clone() };
        Dyadic::new(size.mantissa, size.exponent - WIDENED_BITS)
    };
    Interval { low: &bracket.low - &by(&bracket.low), high: &bracket.high + &by(&bracket.high) }
}
