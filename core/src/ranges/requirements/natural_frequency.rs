//! Natural frequency of the slowest poles: all outside of the circle |s| = ω, or one inside. Exact: the circle is mapped to
//! the imaginary axis of v by s = ω(1 + v)/(1 − v).

use super::super::{affine, polynomial};
use super::{Ground, Lane, Limit, judged, sampled};
use crate::exact::half_plane::count;
use crate::exact::{ExactError, IntPoly};
use crate::project::RequirementKind;
use alloc::vec::Vec;
use dashu_int::IBig;

pub(super) fn lane(ground: &Ground<'_>, limit: &Limit) -> Result<Lane, ExactError> {
    let Some(family) = ground.family else { return sampled::lane(ground, limit) };
    let (a, c) = (limit.value.numerator().clone(), IBig::from(limit.value.denominator().clone()));
    let mapped = family.mapped(|p, degree| p.from_circle(&a, &c, degree));
    let places = match mapped.affine() {
        Some((d, n)) => affine::stability_places(d, n)?,
        None if mapped.knob_degree() == 0 => Vec::new(),
        None => polynomial::stability_places(&mapped)?,
    };
    // Roots strictly inside of the circle, and on it; v = ∞ is s = −ω, on it too.
    let inside = |p: &IntPoly| -> Result<usize, ExactError> {
        let count = count(p)?;
        Ok(p.degree() - count.right - count.axis)
    };
    let order = family.moving_order();
    let fixed_order = family.fixed.degree();
    let fixed_inside = inside(&mapped.fixed)?;
    let fixed_outside = count(&mapped.fixed)?.right;
    let at_least = limit.kind == RequirementKind::NaturalFrequencyMinimum;
    judged(ground, limit.kind, places, |q| {
        let moving = mapped.at(q);
        if at_least {
            Ok(fixed_inside == 0 && inside(&moving)? == 0)
        } else {
            Ok(fixed_outside < fixed_order || count(&moving)?.right < order)
        }
    })
}
