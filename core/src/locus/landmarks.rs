//! The special points of the locus, as the record lists them.

use super::meetings::Meeting;
use super::trade::{directions, gain_sign};
use crate::exact::IntPoly;
use crate::ranges::{Contact, Partition};
use crate::record::{KnobSign, Landmark, LandmarkKind, Point, Root};
use alloc::vec::Vec;

/// Breakaway and break-in points, real and complex.
pub fn from_meetings(meetings: &[Meeting]) -> Vec<Landmark> {
    meetings
        .iter()
        .filter(|meeting| meeting.is_true())
        .map(|meeting| Landmark {
            kind: if meeting.leaves_axis { LandmarkKind::Breakaway } else { LandmarkKind::BreakIn },
            s: Point { re: meeting.s.re, im: meeting.s.im },
            equivalent: None,
            knob: Some(meeting.knob),
            multiplicity: meeting.multiplicity,
            angle: None,
            sign: sign_of_knob(meeting.knob),
        })
        .collect()
}

/// Crossings of the imaginary axis and passages through the origin.
pub fn from_places(partition: &Partition) -> Vec<Landmark> {
    let mut found = Vec::new();
    for place in &partition.places {
        let knob = place.value();
        for contact in &place.contacts {
            let (kind, im) = match contact {
                Contact::Axis { omega } => (LandmarkKind::AxisCrossing, *omega),
                Contact::Origin => (LandmarkKind::OriginCrossing, 0.0),
                Contact::DegreeDrop | Contact::Alternation | Contact::RealMeeting { .. } => continue,
            };
            let s = Point { re: 0.0, im };
            found.push(Landmark {
                kind,
                s,
                equivalent: None,
                knob: Some(knob),
                multiplicity: 1,
                angle: None,
                sign: sign_of_knob(knob),
            });
        }
    }
    found
}

/// Departures from the poles and arrivals at the zeros of D + q·N, one landmark for every direction.
pub fn from_roots(d: &IntPoly, n: &IntPoly, poles: &[Root], zeros: &[Root]) -> Vec<Landmark> {
    let mut found = Vec::new();
    for sign in KnobSign::BOTH {
        let gain = gain_sign(d, n, sign);
        let mut list = |kind: LandmarkKind, own: &[Root], other: &[Root], knob: Option<f64>| {
            for root in own.iter().filter(|r| r.im >= 0.0) {
                found.extend(directions(root, own, other, gain).into_iter().map(|angle| Landmark {
                    kind,
                    s: Point { re: root.re, im: root.im },
                    equivalent: None,
                    knob,
                    multiplicity: root.multiplicity,
                    angle: Some(angle),
                    sign,
                }));
            }
        };
        list(LandmarkKind::Departure, poles, zeros, Some(0.0));
        list(LandmarkKind::Arrival, zeros, poles, None);
    }
    found
}

/// The half of the locus a knob value belongs to.
pub fn sign_of_knob(knob: f64) -> KnobSign {
    if knob < 0.0 { KnobSign::Negative } else { KnobSign::Positive }
}
