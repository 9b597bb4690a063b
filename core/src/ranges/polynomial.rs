//! Places of a family of any degree in the knob, by resultants.
//!
//! A pole on the axis makes the even and the odd part of F vanish together (L. Orlando, "Sul problema di Hurwitz relativo
//! alle parti reali delle radici di un'equazione algebrica", Mathematische Annalen 71, 1911): their resultant over x = w²
//! is a polynomial in the knob. It vanishes also where two real poles are ±r; such candidates are recognised by equal
//! counts on both sides and no pole near the axis, and dropped. Multiple poles make the discriminant vanish.

use super::Family;
use super::place::{Contact, EDGE_BITS, Place};
use crate::exact::complex_roots::{Disc, enclose_all};
use crate::exact::gcd::{squarefree_part, without_common_roots};
use crate::exact::real_roots::real_roots;
use crate::exact::resultant::{interpolated, resultant};
use crate::exact::{Dyadic, ExactError, IntPoly, Interval};
use crate::numerics::magnitude;
use alloc::vec::Vec;
use dashu_int::IBig;
use nalgebra::Complex;

/// A candidate's knob is refined to this many bits before the poles there are looked at: a pole within 2^−100 of the axis
/// then belongs to it.
const CANDIDATE_BITS: i64 = 320;

/// Poles nearer to each other than this fraction of their magnitude at a refined candidate meet there: a double pole is
/// split by about the square root of 2^−320, a fourfold one by 2^−80.
const TOGETHER: f64 = 1e-20;

/// Poles at a candidate are enclosed to this many bits, well below [`ON_AXIS`].
const POLE_BITS: i64 = 128;

/// A pole whose real part is below this fraction of its magnitude at a refined candidate is on the axis there.
const ON_AXIS: f64 = 1e-30;

/// Where a pole may reach the axis or infinity, in no particular order. Spurious axis candidates have been dropped.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn stability_places(family: &Family) -> Result<Vec<Place>, ExactError> {
    let order = family.moving_order();
    let mut places = knob_places(&family.in_knob(0), &Contact::Origin)?;
    if order > 0 {
        places.extend(knob_places(&family.in_knob(order), &Contact::DegreeDrop)?);
    }
    let orlando = axis_resultant(family);
    if orlando.is_zero() {
        return Err(ExactError::AlwaysOnAxis);
    }
    let orlando = squarefree_part(&orlando);
    // Zeros of the outer coefficients are places already.
    let outer = family.in_knob(0).times(&family.in_knob(order));
    let rest = without_common_roots(&orlando, &outer);
    for mut root in real_roots(&rest)? {
        root.refine_to(&rest, CANDIDATE_BITS)?;
        let omegas = axis_frequencies(&enclose_at(family, &root.bracket.midpoint())?);
        if omegas.is_empty() {
            continue;
        }
        let bracket = root.bracket.rounded(EDGE_BITS as usize + 8);
        places.push(Place {
            bracket,
            exact: None,
            contacts: omegas.into_iter().map(|omega| Contact::Axis { omega }).collect(),
        });
    }
    Ok(places)
}

/// Poles that meet at a real value of the knob.
pub struct Meeting {
    /// The knob lies in this bracket.
    pub bracket: Interval,
    /// Where they meet, in the closed upper half plane, 1/s; the imaginary part is exactly 0 on the real axis.
    pub s: Complex<f64>,
    /// How many meet.
    pub multiplicity: usize,
}

/// Where poles meet, in the closed upper half plane and for finite q, in no particular order.
///
/// # Errors
/// From the exact methods, when a cap is met; [`ExactError::AlwaysRepeated`] where poles coincide at every knob value.
pub fn meetings(family: &Family) -> Result<Vec<Meeting>, ExactError> {
    let discriminant = discriminant(family);
    if discriminant.is_zero() {
        return Err(ExactError::AlwaysRepeated);
    }
    let rest = without_common_roots(&squarefree_part(&discriminant), &family.in_knob(family.moving_order()));
    let mut found = Vec::new();
    for mut root in real_roots(&rest)? {
        root.refine_to(&rest, CANDIDATE_BITS)?;
        let bracket = root.bracket.rounded(EDGE_BITS as usize + 8);
        for (s, multiplicity) in meeting_points(&enclose_at(family, &root.bracket.midpoint())?) {
            found.push(Meeting { bracket: bracket.clone(), s, multiplicity });
        }
    }
    Ok(found)
}

/// The discriminant in s, up to a factor, as a polynomial in the knob.
pub fn discriminant(family: &Family) -> IntPoly {
    let order = family.moving_order();
    interpolated(family.knob_degree() * (2 * order).saturating_sub(1), |q| {
        let p = family.at_dyadic(&Dyadic::new(q.clone(), 0));
        (p.degree() == order).then(|| resultant(&p, &p.derivative()))
    })
}

/// The roots of the moving part at a dyadic knob value.
fn enclose_at(family: &Family, q: &Dyadic) -> Result<Vec<Disc>, ExactError> {
    enclose_all(&family.at_dyadic(q), POLE_BITS)
}

/// Frequencies ω > 0 of the roots that are on the axis within [`ON_AXIS`].
fn axis_frequencies(discs: &[Disc]) -> Vec<f64> {
    let mut omegas: Vec<f64> = discs
        .iter()
        .map(|disc| disc.center.to_f64())
        .filter(|z| z.im > 0.0 && z.re.abs() <= ON_AXIS * z.im)
        .map(|z| z.im)
        .collect();
    omegas.sort_by(f64::total_cmp);
    omegas
}

/// Groups of roots of the closed upper half plane that lie within [`TOGETHER`] of each other, with their number.
fn meeting_points(discs: &[Disc]) -> Vec<(Complex<f64>, usize)> {
    let mut groups: Vec<(Complex<f64>, usize)> = Vec::new();
    for disc in discs {
        let mut z = disc.center.to_f64();
        if z.im.abs() <= TOGETHER * magnitude(z) {
            z.im = 0.0;
        }
        match groups.iter_mut().find(|(center, _)| magnitude(*center - z) <= TOGETHER * magnitude(z)) {
            Some((_, count)) => *count += disc.multiplicity,
            None => groups.push((z, disc.multiplicity)),
        }
    }
    groups.retain(|(z, count)| *count > 1 && z.im >= 0.0);
    groups
}

/// Places at the real roots of a polynomial in the knob.
fn knob_places(p: &IntPoly, contact: &Contact) -> Result<Vec<Place>, ExactError> {
    let mut places = Vec::new();
    if p.degree() == 0 {
        return Ok(places);
    }
    let p = squarefree_part(p);
    for mut root in real_roots(&p)? {
        root.refine_to(&p, EDGE_BITS + 8)?;
        let bracket = root.bracket.rounded(EDGE_BITS as usize + 8);
        places.push(Place::within(bracket, contact.clone()));
    }
    Ok(places)
}

/// The resultant over x of the even and the odd part, as a polynomial in the knob; for a family in s² alone, whose poles
/// stay on the axis until two of them meet, the discriminant of the even part.
pub fn axis_resultant(family: &Family) -> IntPoly {
    let parts: Vec<(IntPoly, IntPoly)> = family.parts.iter().map(IntPoly::axis_parts).collect();
    let even_degree = parts.iter().map(|(e, _)| e.degree()).max().unwrap_or(0);
    let odd_degree = parts.iter().map(|(_, o)| o.degree()).max().unwrap_or(0);
    if parts.iter().all(|(_, odd)| odd.is_zero()) {
        let even = parts.iter().map(|(even, _)| even.clone()).collect();
        return Family::new(even).map_or_else(IntPoly::default, |family| discriminant(&family));
    }
    let degree = family.knob_degree() * (even_degree + odd_degree);
    interpolated(degree, |q: &IBig| {
        let (even, odd) = family.at_dyadic(&Dyadic::new(q.clone(), 0)).axis_parts();
        let generic = even.degree() == even_degree && odd.degree() == odd_degree && !even.is_zero() && !odd.is_zero();
        generic.then(|| resultant(&even, &odd))
    })
}
