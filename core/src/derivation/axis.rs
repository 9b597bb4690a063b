//! F(jω, q) = 0: its real and imaginary part, and, where the knob can be eliminated, the equation for ω².

use super::{Ground, written};
use crate::exact::gcd::squarefree_factors;
use crate::exact::real_roots::real_roots;
use crate::exact::{ExactError, IntPoly};
use crate::model::Variables;
use crate::ranges::affine::boundary_polynomial;
use crate::ranges::{Contact, EDGE_BITS};
use crate::record::Point;
use crate::sheet::{AxisEquations, Candidate};
use alloc::string::ToString;
use alloc::vec::Vec;

/// A frequency found here is that of a place within this part: both come from the same root, refined differently.
const SAME: f64 = 1e-12;

pub(super) fn equations(ground: &Ground<'_>) -> Result<Option<AxisEquations>, ExactError> {
    let family = ground.family;
    if family.knob_degree() == 0 || family.moving_order() == 0 {
        return Ok(None);
    }
    let knob = ground.knob;
    let variable = written::fresh(["x", "y"], knob);
    let parts: Vec<(IntPoly, IntPoly)> = family.parts.iter().map(IntPoly::axis_parts).collect();
    let shown = |pick: fn(&(IntPoly, IntPoly)) -> IntPoly| {
        let picked: Vec<IntPoly> = parts.iter().map(pick).collect();
        written::polynomial(&written::family(&picked), Variables { main: variable, knob })
    };
    // As the ranges solve it.
    let crossing = match &parts[..] {
        [d, n] => boundary_polynomial(d, n),
        _ => IntPoly::default(),
    };
    let eliminated = (!crossing.is_zero()).then(|| written::equation(&crossing, variable));
    Ok(Some(AxisEquations {
        variable: variable.to_string(),
        even: shown(|part| part.0.clone()),
        odd: shown(|part| part.1.clone()),
        eliminated,
        candidates: if crossing.degree() > 0 { candidates(ground, &crossing)? } else { Vec::new() },
    }))
}

fn candidates(ground: &Ground<'_>, crossing: &IntPoly) -> Result<Vec<Candidate>, ExactError> {
    let mut found: Vec<(f64, Candidate)> = Vec::new();
    for (factor, multiplicity) in squarefree_factors(crossing) {
        for mut root in real_roots(&factor)? {
            root.refine_to(&factor, EDGE_BITS)?;
            let x = root.to_f64();
            found.push((x, candidate(ground, x, multiplicity)));
        }
    }
    found.sort_by(|a, b| a.0.total_cmp(&b.0));
    Ok(found.into_iter().map(|(_, candidate)| candidate).collect())
}

fn candidate(ground: &Ground<'_>, x: f64, multiplicity: usize) -> Candidate {
    let omega = libm::sqrt(x.abs());
    let of = |knob: Option<f64>, s: Point, kept: bool, reason: &str| Candidate {
        knob,
        s: Some(s),
        multiplicity,
        kept,
        reason: reason.to_string(),
    };
    let here = |contact: &Contact| match contact {
        Contact::Axis { omega: known } => (known - omega).abs() <= SAME * omega,
        _ => false,
    };
    let place = ground.partition.places.iter().find(|place| place.contacts.iter().any(here));
    let on_axis = Point { re: 0.0, im: omega };
    if x < 0.0 {
        return of(None, Point { re: omega, im: 0.0 }, false, "rejected: ω² is negative, so that ω is not real");
    }
    match place {
        _ if x == 0.0 => of(None, on_axis, false, "the origin: see the constant coefficient"),
        Some(place) => of(Some(place.value()), on_axis, true, "an edge: a pole pair is on the axis"),
        None => {
            of(None, on_axis, false, "rejected: a zero of the open loop on the axis, reached at an infinite knob only")
        }
    }
}
