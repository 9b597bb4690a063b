//! Asymptotes, breakaway points and angles, as they are worked out by hand.

use super::{Ground, written};
use crate::exact::complex_roots::{ComplexDyadic, negative_ratio_at, roots};
use crate::exact::dyadic::exact_text;
use crate::exact::{ExactError, IntPoly};
use crate::locus::trade::{asymptotes as lines, directions as angles, for_both_signs, gain_sign, root_sum};
use crate::ranges::permitted::short;
use crate::ranges::{Contact, affine, polynomial};
use crate::record::{Landmark, LandmarkKind, Point, Root};
use crate::sheet::{AngleTerm, AsymptoteStep, Breakaway, Candidate, DirectionStep};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// A root found here is a landmark within this part of its magnitude: both come from the same polynomial, enclosed
/// to different widths.
const SAME: f64 = 1e-9;

pub(super) fn asymptotes(ground: &Ground<'_>) -> Option<AsymptoteStep> {
    let parts = ground.analysis.affine()?;
    let (poles, zeros) = (parts.d.degree(), parts.n.degree());
    let sums = [parts.d, parts.n].map(root_sum);
    let count = poles.abs_diff(zeros);
    let difference = if poles >= zeros { &sums[0] - &sums[1] } else { &sums[1] - &sums[0] };
    Some(AsymptoteStep {
        counts: [poles, zeros],
        sums: sums.each_ref().map(exact_text),
        centroid: (count > 0).then(|| exact_text(&(difference / RBig::from(count)))),
        lines: for_both_signs(|sign| lines(parts.d, parts.n, sign)),
    })
}

pub(super) fn breakaway(ground: &Ground<'_>) -> Result<Option<Breakaway>, ExactError> {
    let family = ground.family;
    let knob = ground.knob;
    if family.knob_degree() == 0 {
        return Ok(None);
    }
    let Some((d, n)) = family.affine() else {
        let equation = written::equation(&polynomial::discriminant(family), knob);
        return Ok(Some(Breakaway { equation, discriminant: true, candidates: meetings(ground) }));
    };
    let w = affine::meeting_polynomial(d, n);
    let equation = written::equation(&w, "s");
    let candidates = match w.degree() {
        0 => Vec::new(),
        _ => {
            let found: Vec<Root> = roots(&w)?.into_iter().filter(|root| root.im >= 0.0).collect();
            found.iter().map(|root| candidate(ground, (d, n), root, meeting_at(ground, root, &found))).collect()
        }
    };
    Ok(Some(Breakaway { equation, discriminant: false, candidates }))
}

fn distance(root: &Root, s: Point) -> f64 {
    libm::hypot(s.re - root.re, s.im - root.im)
}

/// The meeting to which this root is nearer than all others.
fn meeting_at<'a>(ground: &Ground<'a>, root: &Root, all: &[Root]) -> Option<&'a Landmark> {
    let is_meeting = |l: &&Landmark| matches!(l.kind, LandmarkKind::Breakaway | LandmarkKind::BreakIn);
    let is_here = |l: &&Landmark| {
        let own = distance(root, l.s);
        own <= SAME * libm::hypot(root.re, root.im) && all.iter().all(|other| distance(other, l.s) >= own)
    };
    ground.analysis.findings.landmarks.iter().filter(is_meeting).find(is_here)
}

/// What a root of D′·N − D·N′ is.
fn candidate(ground: &Ground<'_>, (d, n): (&IntPoly, &IntPoly), root: &Root, meeting: Option<&Landmark>) -> Candidate {
    let near = |s: Point| distance(root, s) <= SAME * libm::hypot(root.re, root.im);
    let here = |roots: &[Root]| roots.iter().any(|r| near(Point { re: r.re, im: r.im }));
    let parts = ground.analysis.affine();
    let at = ComplexDyadic::from_f64(Complex::new(root.re, root.im));
    let knob = at.and_then(|z| negative_ratio_at(d, n, &z));
    let (value, kept, reason): (Option<f64>, bool, String) = match meeting {
        Some(l) => {
            let what = if l.kind == LandmarkKind::Breakaway { "breakaway point" } else { "break-in point" };
            (l.knob, true, format!("{what}, {} poles meet", l.multiplicity))
        }
        None if parts.is_some_and(|p| here(p.poles)) => {
            (Some(0.0), false, "a repeated pole of the open loop, at knob 0".to_string())
        }
        None if parts.is_some_and(|p| here(p.zeros)) => {
            (None, false, "a repeated zero of the open loop, at an infinite knob".to_string())
        }
        None => {
            let told = knob.map_or_else(
                || "rejected: the knob is infinite there".to_string(),
                |q| {
                    format!(
                        "rejected: the knob would be {} {} {} j, which is not real",
                        short(q.re),
                        sign(q.im),
                        short(q.im.abs())
                    )
                },
            );
            (None, false, told)
        }
    };
    let s = Some(Point { re: root.re, im: root.im });
    Candidate { knob: value, s, multiplicity: root.multiplicity, kept, reason }
}

fn sign(value: f64) -> char {
    if value < 0.0 { '−' } else { '+' }
}

/// Where poles of a polynomial knob meet: the real roots of the discriminant at which they do, from the landmarks.
fn meetings(ground: &Ground<'_>) -> Vec<Candidate> {
    let repeated = |contact: &Contact| matches!(contact, Contact::RealMeeting { .. });
    let at_zero = ground
        .partition
        .places
        .iter()
        .any(|place| place.contacts.iter().any(repeated) && place.bracket.midpoint().signum() == 0);
    let mut found: Vec<Candidate> = ground
        .analysis
        .findings
        .landmarks
        .iter()
        .filter(|l| matches!(l.kind, LandmarkKind::Breakaway | LandmarkKind::BreakIn))
        .map(|l| Candidate {
            knob: l.knob,
            s: Some(l.s),
            multiplicity: l.multiplicity - 1,
            kept: true,
            reason: if l.kind == LandmarkKind::Breakaway { "breakaway point" } else { "break-in point" }.to_string(),
        })
        .collect();
    if at_zero {
        let reason = "a repeated pole of the open loop, at knob 0".to_string();
        found.push(Candidate { knob: Some(0.0), s: None, multiplicity: 1, kept: false, reason });
    }
    found
}

/// The angles at complex poles and zeros; those at real ones are 0 or 180 degrees.
pub(super) fn directions(ground: &Ground<'_>) -> Vec<DirectionStep> {
    let Some(parts) = ground.analysis.affine() else { return Vec::new() };
    let mut found = Vec::new();
    for (kind, own, other) in
        [(LandmarkKind::Departure, parts.poles, parts.zeros), (LandmarkKind::Arrival, parts.zeros, parts.poles)]
    {
        for root in own.iter().filter(|root| root.im > 0.0) {
            let is_own = |r: &Root| core::ptr::eq(r, root);
            let term = |r: &Root, pole: bool| AngleTerm {
                s: Point { re: r.re, im: r.im },
                pole,
                multiplicity: r.multiplicity,
                angle: libm::atan2(root.im - r.im, root.re - r.re).to_degrees(),
            };
            let poles = parts.poles.iter().filter(|r| !is_own(r)).map(|r| term(r, true));
            let zeros = parts.zeros.iter().filter(|r| !is_own(r)).map(|r| term(r, false));
            found.push(DirectionStep {
                kind,
                s: Point { re: root.re, im: root.im },
                multiplicity: root.multiplicity,
                terms: poles.chain(zeros).collect(),
                angles: for_both_signs(|sign| angles(root, own, other, gain_sign(parts.d, parts.n, sign))),
            });
        }
    }
    found
}
