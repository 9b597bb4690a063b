//! The three equations in the knob whose solutions hold every edge of stability: a pole at the origin, a pole at infinity,
//! poles opposite each other.

use super::{Ground, written};
use crate::exact::gcd::{squarefree_factors, squarefree_part};
use crate::exact::real_roots::real_roots;
use crate::exact::{ExactError, IntPoly, Interval};
use crate::ranges::{Contact, EDGE_BITS, polynomial};
use crate::sheet::{Candidate, Condition, ConditionKind};
use alloc::string::ToString;
use alloc::vec::Vec;

pub(super) fn conditions(ground: &Ground<'_>) -> Result<Vec<Condition>, ExactError> {
    let family = ground.family;
    let order = family.moving_order();
    let mut equations = Vec::new();
    if order > 0 && family.knob_degree() > 0 {
        equations.push((ConditionKind::Origin, family.in_knob(0)));
        equations.push((ConditionKind::DegreeDrop, family.in_knob(order)));
        equations.push((ConditionKind::RowOfZeros, polynomial::axis_resultant(family)));
    }
    equations
        .into_iter()
        .filter(|(_, p)| p.degree() > 0)
        .map(|(kind, p)| {
            let candidates = candidates(ground, kind, &p)?;
            let equation = written::equation(&p, ground.knob);
            Ok(Condition { kind, equation, candidates })
        })
        .collect()
}

/// The real roots, each compared with the places of the partition: what is no place is no edge.
fn candidates(ground: &Ground<'_>, kind: ConditionKind, p: &IntPoly) -> Result<Vec<Candidate>, ExactError> {
    let mut found = Vec::new();
    let whole = squarefree_part(p);
    let factors = squarefree_factors(p);
    for mut root in real_roots(&whole)? {
        root.refine_to(&whole, EDGE_BITS)?;
        let multiplicity = factors
            .iter()
            .find(|(factor, _)| factor.over_interval(&root.bracket).sign().is_none_or(|sign| sign == 0))
            .map_or(1, |(_, multiplicity)| *multiplicity);
        let (kept, reason) = verdict(ground, kind, &root.bracket);
        found.push(Candidate { knob: Some(root.to_f64()), s: None, multiplicity, kept, reason: reason.to_string() });
    }
    Ok(found)
}

fn verdict(ground: &Ground<'_>, kind: ConditionKind, bracket: &Interval) -> (bool, &'static str) {
    let partition = ground.partition;
    let wanted = |contact: &Contact| match kind {
        ConditionKind::Origin => matches!(contact, Contact::Origin),
        ConditionKind::DegreeDrop => matches!(contact, Contact::DegreeDrop),
        ConditionKind::RowOfZeros => matches!(contact, Contact::Axis { .. } | Contact::Origin | Contact::DegreeDrop),
    };
    let place = partition.places.iter().find(|place| place.bracket.meets(bracket));
    match place.filter(|place| place.contacts.iter().any(wanted)) {
        Some(_) if kind == ConditionKind::Origin => (true, "an edge: a pole is at the origin"),
        Some(_) if kind == ConditionKind::DegreeDrop => (true, "an edge: a pole passes infinity"),
        Some(place) if place.contacts.iter().any(|c| matches!(c, Contact::Axis { .. })) => {
            (true, "an edge: a pole pair is on the axis")
        }
        Some(_) => (true, "an edge, of another condition as well"),
        None => (false, "no edge: the poles opposite each other lie left and right of the axis"),
    }
}
