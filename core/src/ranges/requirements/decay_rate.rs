//! Decay rate: every pole lies left of Re s = −σ. Exact: the stability of F(s − σ).

use super::super::{affine, polynomial};
use super::{Ground, Lane, Limit, judged, sampled};
use crate::exact::ExactError;
use crate::exact::half_plane::count;
use alloc::vec::Vec;
use dashu_int::IBig;

pub(super) fn lane(ground: &Ground<'_>, limit: &Limit) -> Result<Lane, ExactError> {
    let Some(family) = ground.family else { return sampled::lane(ground, limit) };
    let (a, c) = (limit.value.numerator().clone(), IBig::from(limit.value.denominator().clone()));
    let shifted = family.mapped(|p, degree| p.shifted_right(&a, &c, degree));
    let places = match shifted.affine() {
        Some((d, n)) => affine::stability_places(d, n)?,
        None if shifted.knob_degree() == 0 => Vec::new(),
        None => polynomial::stability_places(&shifted)?,
    };
    // A fixed mode exactly on the line is allowed.
    let fixed_met = count(&shifted.fixed)?.right == 0;
    judged(ground, limit.kind, places, |q| Ok(fixed_met && count(&shifted.at(q))?.right == 0))
}
