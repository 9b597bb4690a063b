//! Places of an affine family D + q·N: where the knob brings a pole to the axis, to infinity, or two together.
//!
//! On s = jw, with x = w², D = De(x) + jw·Do(x) and N alike; q is real there exactly where P = Do·Ne − De·No vanishes,
//! and then q = −De/Ne = −Do/No. Multiple poles lie where W = D′N − DN′ vanishes, with q = −D/N.

use super::place::{Contact, Place, Quotient, knob_at};
use crate::exact::gcd::{gcd, squarefree_factors, squarefree_part, without_common_roots};
use crate::exact::real_roots::{positive_roots, real_roots};
use crate::exact::{ExactError, IntPoly};
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;

/// Where a pole reaches the imaginary axis or infinity, for finite q, in no particular order; D and N have no common root.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn stability_places(d: &IntPoly, n: &IntPoly) -> Result<Vec<Place>, ExactError> {
    let mut places = Vec::new();
    places.extend(ratio_place(&d.coefficient(0), &n.coefficient(0), Contact::Origin));
    let order = d.degree().max(n.degree());
    if order > 0 {
        places.extend(ratio_place(&d.coefficient(order), &n.coefficient(order), Contact::DegreeDrop));
    }
    let (d_parts, n_parts) = (d.axis_parts(), n.axis_parts());
    match boundary_places(&d_parts, &n_parts, |x| Contact::Axis { omega: libm::sqrt(x) })? {
        Some(found) => places.extend(found),
        // D and N depend on s² only: a pole on the axis stays there until it meets another one.
        None => return even_places(&d_parts.0, &n_parts.0, places),
    }
    Ok(places)
}

/// Where D + q·N vanishes on a line from the origin: D = D1(x) + i·D2(x) there, N alike, with real D1, D2 and x > 0 along
/// the line; `contact` tells what happens at x. None where D/N is real on the whole line.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn boundary_places(
    d: &(IntPoly, IntPoly),
    n: &(IntPoly, IntPoly),
    contact: impl Fn(f64) -> Contact,
) -> Result<Option<Vec<Place>>, ExactError> {
    let ((d1, d2), (n1, n2)) = (d, n);
    let crossing = boundary_polynomial(d, n);
    if crossing.is_zero() {
        return Ok(None);
    }
    let mut places = Vec::new();
    // Where N vanishes the knob is infinite; where D does it is zero, and a relative bracket would never close.
    let finite = without_common_roots(&squarefree_part(&crossing), &gcd(n1, n2));
    let at_zero = gcd(&finite, &gcd(d1, d2));
    for mut root in positive_roots(&at_zero)? {
        root.refine_to(&at_zero, super::EDGE_BITS)?;
        places.push(Place::exactly(RBig::ZERO, contact(root.to_f64())));
    }
    let rest = without_common_roots(&finite, &at_zero);
    let quotients = [Quotient { above: d1, below: n1 }, Quotient { above: d2, below: n2 }];
    for mut root in positive_roots(&rest)? {
        let bracket = knob_at(&rest, &mut root, &quotients)?;
        places.push(Place::within(bracket, contact(root.to_f64())));
    }
    Ok(Some(places))
}

/// D2·N1 − D1·N2, whose positive roots are the x of [`boundary_places`].
pub fn boundary_polynomial((d1, d2): &(IntPoly, IntPoly), (n1, n2): &(IntPoly, IntPoly)) -> IntPoly {
    d2.times(n1).minus(&d1.times(n2))
}

/// The place q = −d/n, if n is not zero.
fn ratio_place(d: &IBig, n: &IBig, contact: Contact) -> Option<Place> {
    (*n != IBig::ZERO).then(|| Place::exactly(RBig::from_parts_signed(-d, n.clone()), contact))
}

fn zero_place(mut root: crate::exact::RealRoot, p: &IntPoly) -> Result<Place, ExactError> {
    root.refine_to(p, super::EDGE_BITS)?;
    Ok(Place::exactly(RBig::ZERO, Contact::Axis { omega: libm::sqrt(root.to_f64()) }))
}

/// The places of De(x) + q·Ne(x): where two axis pairs meet, or one meets the origin (found by the caller) or infinity.
fn even_places(d: &IntPoly, n: &IntPoly, mut places: Vec<Place>) -> Result<Vec<Place>, ExactError> {
    let meeting = squarefree_part(&d.derivative().times(n).minus(&d.times(&n.derivative())));
    let finite = without_common_roots(&meeting, n);
    let at_zero = gcd(&finite, d);
    for root in positive_roots(&at_zero)? {
        places.push(zero_place(root, &at_zero)?);
    }
    let rest = without_common_roots(&finite, &at_zero);
    for mut root in positive_roots(&rest)? {
        let bracket = knob_at(&rest, &mut root, &[Quotient { above: d, below: n }])?;
        places.push(Place::within(bracket, Contact::Axis { omega: libm::sqrt(root.to_f64()) }));
    }
    Ok(places)
}

/// Where poles meet on the real axis, for finite q, in no particular order; D and N have no common root.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn real_meetings(d: &IntPoly, n: &IntPoly) -> Result<Vec<Place>, ExactError> {
    let mut places = Vec::new();
    for (factor, order) in squarefree_factors(&meeting_polynomial(d, n)) {
        let finite = without_common_roots(&factor, n);
        let at_zero = gcd(&finite, d);
        for mut root in real_roots(&at_zero)? {
            root.refine_to(&at_zero, super::EDGE_BITS)?;
            let contact = Contact::RealMeeting { s: root.to_f64(), multiplicity: order + 1 };
            places.push(Place::exactly(RBig::ZERO, contact));
        }
        let rest = without_common_roots(&finite, &at_zero);
        for mut root in real_roots(&rest)? {
            let bracket = knob_at(&rest, &mut root, &[Quotient { above: d, below: n }])?;
            let contact = Contact::RealMeeting { s: root.to_f64(), multiplicity: order + 1 };
            places.push(Place::within(bracket, contact));
        }
    }
    Ok(places)
}

/// W = D′N − DN′: its roots are the multiple poles, of multiplicity one more than in W.
pub fn meeting_polynomial(d: &IntPoly, n: &IntPoly) -> IntPoly {
    d.derivative().times(n).minus(&d.times(&n.derivative()))
}
