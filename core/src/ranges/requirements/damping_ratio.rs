//! Damping ratio: every pole lies in the sector −Re s ≥ ζ|s|. Edges exact, without rotation and without doubling the degree.
//!
//! For rational ζ = p/c take σ = −p + j√(c² − p²), so that σ² = −2p·σ − c². On the ray s = tσ every power is a combination
//! of 1 and σ with integer coefficients, F = A(t) + B(t)·σ, and F vanishes where A and B do.

use super::super::affine::boundary_places;
use super::super::place::Contact;
use super::{Ground, Lane, Limit, judged, sampled};
use crate::exact::complex_roots::roots;
use crate::exact::{ExactError, IntPoly};
use crate::record::Root;
use alloc::vec::Vec;
use dashu_int::IBig;

pub(super) fn lane(ground: &Ground<'_>, limit: &Limit) -> Result<Lane, ExactError> {
    let Some(family) = ground.family else { return sampled::lane(ground, limit) };
    let Some((d, n)) = family.affine() else { return sampled::lane(ground, limit) };
    let (p, c) = (limit.value.numerator().clone(), IBig::from(limit.value.denominator().clone()));
    let parts = |poly: &IntPoly| on_ray(poly, &p, &c);
    let contact = |_| Contact::Axis { omega: 0.0 };
    let Some(mut places) = boundary_places(&parts(d), &parts(n), contact)? else {
        // ζ = 1/2 with D/N a function of s³: poles may stay on the ray.
        return sampled::lane(ground, limit);
    };
    // The sector's tip and its far end.
    places.extend(super::super::affine::stability_places(d, n)?);
    let zeta = limit.value.to_f64().value();
    judged(ground, limit.kind, places, |q| {
        let poles = roots(&family.at(q).times(&family.fixed))?;
        Ok(poles.iter().all(|pole| inside(pole, zeta)))
    })
}

/// Whether a root's disc meets the sector. At a sample between two places no moving pole is on the border, so that its
/// tiny disc lies on one side; a fixed mode exactly on the border is allowed.
fn inside(pole: &Root, zeta: f64) -> bool {
    -pole.re + pole.radius >= zeta * (libm::hypot(pole.re, pole.im) - pole.radius)
}

/// A and B of a polynomial on the ray.
pub fn on_ray(poly: &IntPoly, p: &IBig, c: &IBig) -> (IntPoly, IntPoly) {
    let (mut a, mut b) = (IBig::ONE, IBig::ZERO);
    let (mut first, mut second) = (Vec::new(), Vec::new());
    for coefficient in poly.coefficients() {
        first.push(coefficient * &a);
        second.push(coefficient * &b);
        (a, b) = (-(c * c) * &b, a - IBig::from(2) * p * &b);
    }
    (IntPoly::new(first), IntPoly::new(second))
}
