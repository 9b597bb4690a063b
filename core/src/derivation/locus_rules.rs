//! Asymptotes, breakaway points and angles, as they are worked out by hand.

use super::Source;
use super::written;
use crate::exact::complex_roots::{ComplexDyadic, negative_ratio_at, roots};
use crate::exact::dyadic::exact_text;
use crate::exact::{ExactError, IntPoly};
use crate::locus::trade::{asymptotes as lines, directions as angles, for_both_signs, gain_sign, root_sum};
use crate::ranges::permitted::short;
use crate::ranges::{Contact, affine, polynomial};
use crate::record::{LandmarkKind, Point, Root};
use crate::sheet::{AngleTerm, AsymptoteStep, Breakaway, Candidate, DirectionStep};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// A root found here is a landmark within this part of its magnitude: both come from the same polynomial, enclosed
/// to different widths.
const SAME: f64 = 1e-9;

pub(super) fn asymptotes(analysis: &Source<'_>) -> Option<AsymptoteStep> {
    let parts = analysis.affine()?;
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

pub(super) fn breakaway(analysis: &Source<'_>) -> Result<Option<Breakaway>, ExactError> {
    let family = analysis.family();
    let knob = analysis.model.knob.as_str();
    if family.knob_degree() == 0 {
        return Ok(None);
    }
    let Some((d, n)) = family.affine() else {
        let equation = written::equation(&polynomial::discriminant(family), knob);
        return Ok(Some(Breakaway { equation, discriminant: true, candidates: meetings(analysis) }));
    };
    let w = affine::meeting_polynomial(d, n);
    let equation = written::equation(&w, "s");
    let candidates = match w.degree() {
        0 => Vec::new(),
        _ => roots(&w)?.iter().filter(|root| root.im >= 0.0).map(|root| candidate(analysis, (d, n), root)).collect(),
    };
    Ok(Some(Breakaway { equation, discriminant: false, candidates }))
}

/// What a root of D′·N − D·N′ is.
fn candidate(analysis: &Source<'_>, (d, n): (&IntPoly, &IntPoly), root: &Root) -> Candidate {
    let near = |s: Point| libm::hypot(s.re - root.re, s.im - root.im) <= SAME * libm::hypot(root.re, root.im);
    let is_meeting = |kind: LandmarkKind| matches!(kind, LandmarkKind::Breakaway | LandmarkKind::BreakIn);
    let landmark = analysis.landmarks.iter().find(|l| is_meeting(l.kind) && near(l.s));
    let here = |roots: &[Root]| roots.iter().any(|r| near(Point { re: r.re, im: r.im }));
    let parts = analysis.affine();
    let at = ComplexDyadic::from_f64(Complex::new(root.re, root.im));
    let knob = at.and_then(|z| negative_ratio_at(d, n, &z));
    let (value, kept, reason): (Option<f64>, bool, String) = match landmark {
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
fn meetings(analysis: &Source<'_>) -> Vec<Candidate> {
    let repeated = |contact: &Contact| matches!(contact, Contact::RealMeeting { .. });
    let at_zero = analysis
        .partition()
        .places
        .iter()
        .any(|place| place.contacts.iter().any(repeated) && place.bracket.midpoint().signum() == 0);
    let mut found: Vec<Candidate> = analysis
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
pub(super) fn directions(analysis: &Source<'_>) -> Vec<DirectionStep> {
    let Some(parts) = analysis.affine() else { return Vec::new() };
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
