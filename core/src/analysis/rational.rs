//! The analysis of a loop that is a ratio of polynomials in s.

use super::{Findings, lost_branches, not_computed};
use crate::exact::complex_roots::roots;
use crate::exact::gcd::squarefree_factors;
use crate::exact::half_plane::count;
use crate::exact::{ExactError, IntPoly};
use crate::locus::{LocusInput, Meeting, branches, encounters, landmarks, trade, view};
use crate::model::{self, KnobPolynomial, Loop};
use crate::ranges::permitted::short;
use crate::ranges::requirements::stable_pieces;
use crate::ranges::{Contact, Family, Partition, verdict};
use crate::record::{ClosedLoop, KnobSign, Landmark, Notice, NoticeKind, Point, Root};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// What the questions about such a loop need.
pub(super) struct Rational {
    /// The characteristic polynomial over the knob, its fixed factor taken out.
    pub(super) family: Family,
    /// The line of the knob, cut where something happens.
    pub(super) partition: Partition,
    /// The moving poles and zeros of an affine loop.
    moving: (Vec<Root>, Vec<Root>),
}

impl Rational {
    /// Analyses a loop.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met before the ranges are proven.
    pub(super) fn analyse(model: &Loop) -> Result<(Findings, Self), ExactError> {
        let polynomial = &model.characteristic;
        let parts = (0..=polynomial.knob_degree()).map(|k| IntPoly::new(polynomial.at_knob_power(k))).collect();
        let family =
            Family::new(parts).unwrap_or(Family { fixed: IntPoly::default(), parts: [IntPoly::from_i64(&[1])].into() });
        let partition = Partition::new(&family)?;
        let mut notices = notices(model, &family, &partition)?;
        let encounters = encounters(&family, &partition);
        if let Err(error) = &encounters {
            notices.push(not_computed("breakaway points and the character of the ranges", error));
        }
        let last = &family.parts[family.knob_degree()];
        let moving = (roots(&family.parts[0])?, if family.knob_degree() > 0 { roots(last)? } else { Vec::new() });
        let followed = encounters.is_ok();
        let encounters = encounters.unwrap_or_default();
        let landmarks = all_landmarks(&family, &partition, &encounters.meetings, &moving);
        let (poles, zeros) = open_loop(&family, &moving)?;
        let view = view::frame(poles.iter().chain(&zeros).map(place).chain(landmarks.iter().map(|l| l.s)));
        let fixed = roots(&family.fixed)?;
        let input = LocusInput {
            family: &family,
            partition: &partition,
            encounters: &encounters,
            fixed: &fixed,
            poles: &moving.0,
            zeros: &moving.1,
            view,
        };
        let mut all = Vec::new();
        for sign in KnobSign::BOTH {
            match branches(&input, sign).filter(|_| followed) {
                Some(found) => all.extend(found),
                None => notices.push(lost_branches(sign)),
            }
        }
        let stable = stable_pieces(&partition);
        let own = Self { family, partition, moving };
        let (partition, affine) = (&own.partition, own.affine());
        let findings = Findings {
            stability: partition.stability(),
            character: partition.character(),
            landmarks,
            asymptotes: affine.map(|p| trade::for_both_signs(|sign| trade::asymptotes(p.d, p.n, sign))),
            real_axis: affine.map(|p| trade::for_both_signs(|sign| trade::real_axis(p.d, p.n, p.poles, p.zeros, sign))),
            poles,
            zeros,
            view,
            notices,
            branches: all,
            stable,
        };
        Ok((findings, own))
    }

    /// D and N of the moving part with their roots, where the loop is affine in the knob.
    pub(super) fn affine(&self) -> Option<AffineParts<'_>> {
        let (d, n) = self.family.affine()?;
        Some(AffineParts { d, n, poles: &self.moving.0, zeros: &self.moving.1 })
    }

    /// The closed loop at a value of the knob.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    pub(super) fn closed_loop(&self, knob: &RBig) -> Result<ClosedLoop, ExactError> {
        let polynomial = self.family.at(knob).times(&self.family.fixed);
        let verdict = verdict(&polynomial, &IntPoly::from_i64(&[1]))?;
        Ok(ClosedLoop {
            knob: knob.to_f64().value(),
            poles: roots(&polynomial)?.into_iter().map(Into::into).collect(),
            unstable_poles: verdict.half_plane.right,
            axis_poles: verdict.half_plane.axis,
            name: verdict.name,
        })
    }
}

/// The moving part D + q·N with its roots.
#[derive(Clone, Copy, Debug)]
pub struct AffineParts<'a> {
    /// D.
    pub d: &'a IntPoly,
    /// N.
    pub n: &'a IntPoly,
    /// Roots of D.
    pub poles: &'a [Root],
    /// Roots of N.
    pub zeros: &'a [Root],
}

fn place(root: &Root) -> Point {
    Point { re: root.re, im: root.im }
}

/// Poles and zeros with the fixed modes.
fn open_loop(family: &Family, moving: &(Vec<Root>, Vec<Root>)) -> Result<(Vec<Root>, Vec<Root>), ExactError> {
    let affine = family.affine().is_some();
    if family.fixed.degree() == 0 {
        return Ok((moving.0.clone(), if affine { moving.1.clone() } else { Vec::new() }));
    }
    let with_fixed = |part: &IntPoly| roots(&part.times(&family.fixed));
    let zeros = match family.affine() {
        Some((_, n)) => with_fixed(n)?,
        None => Vec::new(),
    };
    Ok((with_fixed(&family.parts[0])?, zeros))
}

fn all_landmarks(
    family: &Family,
    partition: &Partition,
    meetings: &[Meeting],
    moving: &(Vec<Root>, Vec<Root>),
) -> Vec<Landmark> {
    let mut all = landmarks::from_meetings(meetings);
    all.extend(landmarks::from_places(partition));
    if let Some((d, n)) = family.affine() {
        all.extend(landmarks::from_roots(d, n, &moving.0, &moving.1));
    }
    all
}

/// What the user should know about the loop, from the model and from the exact counts.
fn notices(model: &Loop, family: &Family, partition: &Partition) -> Result<Vec<Notice>, ExactError> {
    let mut notices = model.notices.clone();
    let knob = &model.knob;
    for (factor, _) in squarefree_factors(&family.fixed) {
        notices.push(fixed_mode(&factor, knob)?);
    }
    if family.knob_degree() == 0 {
        let text = format!("{knob} moves no pole: the characteristic polynomial does not contain it");
        notices.push(Notice { kind: NoticeKind::KnobWithoutEffect, text });
    }
    if let Some(factor) = &model.knob_factor {
        let text = format!(
            "where {factor} = 0 the loop as typed has no meaning; the ranges hold for all other values of {knob}"
        );
        notices.push(Notice { kind: NoticeKind::AlgebraicLoop, text });
    }
    for place in &partition.places {
        let drops = place.contacts.iter().any(|c| matches!(c, Contact::DegreeDrop));
        if drops && place.bracket.midpoint().signum() != 0 {
            let value = short(place.value());
            let text = format!(
                "at {knob} = {value} the highest coefficient vanishes (algebraic loop): a pole passes infinity there; keep well away from it"
            );
            notices.push(Notice { kind: NoticeKind::AlgebraicLoop, text });
        }
    }
    if !partition.with_meetings && model.notices.is_empty() {
        notices.push(Notice {
            kind: NoticeKind::NotComputed,
            text: "the character of the ranges could not be told".to_string(),
        });
    }
    Ok(notices)
}

/// The notice about a factor common to numerator and denominator.
fn fixed_mode(factor: &IntPoly, knob: &str) -> Result<Notice, ExactError> {
    let rows = factor.coefficients().iter().map(|c| [c.clone()].into()).collect();
    let name = model::formula(&KnobPolynomial::new(rows), knob);
    let places: Vec<String> = roots(factor)?.iter().filter(|r| r.im >= 0.0).map(written).collect();
    let at = places.join(", ");
    let stable = count(factor)?.is_stable();
    let (kind, rest) = if stable {
        (NoticeKind::CancelledFactor, format!("no value of {knob} moves it, and the ranges count it"))
    } else {
        (
            NoticeKind::UnstableFixedMode,
            format!("it is not left of the imaginary axis, so that no value of {knob} is stable"),
        )
    };
    Ok(Notice {
        kind,
        text: format!("the factor {name} cancels between numerator and denominator: a fixed mode at s = {at}; {rest}"),
    })
}

/// A root in four digits, for a sentence.
fn written(root: &Root) -> String {
    if root.im == 0.0 { short(root.re) } else { format!("{} ± {} j", short(root.re), short(root.im)) }
}
