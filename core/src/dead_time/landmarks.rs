//! The special points of the locus of a loop with dead time in a view.

use super::gain::GainFamily;
use super::plane::Plane;
use super::{DeadTimeError, DeadTimePartition};
use crate::locus::landmarks::sign_of_knob;
use crate::ranges::Contact;
use crate::record::{KnobSign, Landmark, LandmarkKind, Point, Root, View};
use alloc::vec::Vec;

/// Departures, arrivals and meetings on the real axis in a view, and every crossing of the axis.
///
/// # Errors
/// Where poles or meetings in the view are not all found.
pub fn landmarks(
    family: &GainFamily,
    partition: &DeadTimePartition,
    view: &View,
) -> Result<Vec<Landmark>, DeadTimeError> {
    let mut found = crossings(partition);
    if family.b1.is_zero() {
        return Ok(found);
    }
    let plane = Plane::new(family, view)?;
    for meeting in &plane.meetings {
        let kind = if meeting.leaves_axis() { LandmarkKind::Breakaway } else { LandmarkKind::BreakIn };
        found.push(Landmark {
            kind,
            s: Point { re: meeting.s, im: 0.0 },
            knob: Some(meeting.knob),
            multiplicity: meeting.multiplicity,
            equivalent: None,
            angle: None,
            sign: meeting.sign(),
        });
    }
    let mut list = |kind: LandmarkKind, root: &Root, knob: Option<f64>, sign: KnobSign, angles: Vec<f64>| {
        found.extend(angles.into_iter().map(|angle| Landmark {
            kind,
            s: Point { re: root.re, im: root.im },
            knob,
            multiplicity: root.multiplicity,
            equivalent: None,
            angle: Some(angle.to_degrees()),
            sign,
        }));
    };
    for sign in KnobSign::BOTH {
        for pole in plane.poles.iter().filter(|root| root.im >= 0.0) {
            list(LandmarkKind::Departure, pole, Some(0.0), sign, plane.departures(pole, sign));
        }
        for zero in plane.zeros.iter().filter(|root| root.im >= 0.0) {
            list(LandmarkKind::Arrival, zero, None, sign, plane.arrivals(zero, sign));
        }
    }
    Ok(found)
}

/// Every crossing of the axis and passage through the origin.
pub fn crossings(partition: &DeadTimePartition) -> Vec<Landmark> {
    let mut found = Vec::new();
    for place in &partition.places {
        let knob = place.value();
        for contact in &place.contacts {
            let (kind, im) = match contact {
                Contact::Axis { omega } => (LandmarkKind::AxisCrossing, *omega),
                _ => (LandmarkKind::OriginCrossing, 0.0),
            };
            let sign = sign_of_knob(knob);
            found.push(Landmark {
                kind,
                s: Point { re: 0.0, im },
                knob: Some(knob),
                multiplicity: 1,
                equivalent: None,
                angle: None,
                sign,
            });
        }
    }
    found
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::exact::IntPoly;
    use dashu_ratio::RBig;

    #[test]
    fn a_delayed_integrator_breaks_away_at_minus_one() {
        // shared/checks L02b: double root at −1/T for K·T = 1/e.
        let p = IntPoly::from_i64;
        let family = GainFamily::new(&p(&[0, 1]), &p(&[]), &p(&[1]), &RBig::ONE).expect("retarded");
        let view = View { re: [-4.0, 2.0], im: [-3.0, 3.0] };
        let found = landmarks(&family, &family.partition().expect("cut"), &view).expect("found");
        let breakaway: Vec<&Landmark> = found.iter().filter(|l| l.kind == LandmarkKind::Breakaway).collect();
        assert_eq!(breakaway.len(), 1);
        assert!((breakaway[0].s.re + 1.0).abs() < 1e-12 && breakaway[0].multiplicity == 2);
        assert!((breakaway[0].knob.expect("finite") - libm::exp(-1.0)).abs() < 1e-14);
        let departures: Vec<(KnobSign, f64)> = found
            .iter()
            .filter(|l| l.kind == LandmarkKind::Departure)
            .filter_map(|l| Some((l.sign, l.angle?)))
            .collect();
        assert_eq!(departures, [(KnobSign::Positive, 180.0), (KnobSign::Negative, 0.0)]);
    }
}
