//! Static figures: errors on a step, a ramp and a parabola, each at the comparison, and what a load leaves. Each is a ratio
//! of two polynomials in the knob, |above(q)| ≤ limit·|below(q)|, so that the edges are exact.

use super::super::EDGE_BITS;
use super::super::place::{Contact, Place, short_rational};
use super::{Ground, Lane, Limit, judged, sampled};
use crate::exact::dyadic::sign_of;
use crate::exact::gcd::squarefree_part;
use crate::exact::real_roots::real_roots;
use crate::exact::{ExactError, IntPoly};
use crate::model::StaticRatio;
use crate::project::RequirementKind;
use alloc::vec::Vec;
use dashu_int::IBig;
use dashu_ratio::RBig;

pub(super) fn lane(ground: &Ground<'_>, limit: &Limit) -> Result<Lane, ExactError> {
    // Dead time and the conversions of a controller in s leave the static figures as they are.
    if ground.model.sampling.as_ref().is_some_and(|sampling| sampling.controller_in_z) {
        return sampled::lane(ground, limit);
    }
    let ratio = match limit.kind {
        RequirementKind::StepError => ground.model.static_error(0),
        RequirementKind::RampError => ground.model.static_error(1),
        RequirementKind::ParabolaError => ground.model.static_error(2),
        _ => Some(ground.model.static_load()),
    };
    let Some(StaticRatio { above, below }) = ratio else {
        let needed = if limit.kind == RequirementKind::RampError { "one integrator" } else { "two integrators" };
        let remark = alloc::format!("infinite at every setting: the open loop needs {needed} for this");
        return Ok(Lane { pieces: Vec::new(), proven: true, remark: Some(remark) });
    };
    // A percentage is a hundredth.
    let hundred = if limit.kind == RequirementKind::StepError { 100 } else { 1 };
    let top = limit.value.numerator().clone();
    let bottom: IBig = IBig::from(limit.value.denominator().clone()) * IBig::from(hundred);
    // (top·below)² − (bottom·above)² ≥ 0
    let difference = below.times(&below).combined(&(&top * &top), &above.times(&above), &-bottom.pow(2));
    let mut places = Vec::new();
    if difference.degree() > 0 {
        let p = squarefree_part(&difference);
        for mut root in real_roots(&p)? {
            root.refine_to(&p, EDGE_BITS + 8)?;
            let contact = Contact::Axis { omega: 0.0 };
            let exact = short_rational(&root.bracket).filter(|q| sign_at(&p, q) == 0);
            places.push(match exact {
                Some(q) => Place::exactly(q, contact),
                None => Place::within(root.bracket.rounded(EDGE_BITS as usize + 8), contact),
            });
        }
    }
    judged(ground, limit.kind, places, |q| Ok(sign_at(&difference, q) >= 0))
}

fn sign_at(p: &IntPoly, q: &RBig) -> i32 {
    let value = p.coefficients().iter().rev().fold(RBig::ZERO, |sum, c| sum * q + RBig::from(c.clone()));
    sign_of(value.numerator())
}
