//! The analysis of a loop with dead time.

use super::{AnalysisError, Findings};
use crate::answer::Field;
use crate::dead_time::gain::GainFamily;
use crate::dead_time::{DeadTimeError, DeadTimePartition, Quasi, branches, delay, landmarks, poles};
use crate::exact::complex_roots::roots;
use crate::exact::dyadic::{exact_text, rational_bracket};
use crate::exact::{ExactError, IntPoly, Interval};
use crate::locus::{Branch, view};
use crate::model::Loop;
use crate::ranges::pieces::{Border, Piece};
use crate::record::{
    Cause, CharacterName, ClosedLoop, Edge, EdgeKind, Landmark, Notice, NoticeKind, Point, Root, StabilityRange, View,
};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// Digits of a bracket's decimals.
const BRACKET_DIGITS: u32 = 19;

/// Poles are listed in a rectangle this many times as large as the default view.
const AROUND: f64 = 2.0;

/// Bits of the bracket of the first knob value.
const EDGE_BITS: usize = 200;

/// What the questions about such a loop need.
pub(super) struct DeadTime {
    parts: Parts,
    time: crate::model::DeadTime,
    partition: DeadTimePartition,
    view: View,
}

/// The parts of the characteristic function, by what moves them.
enum Parts {
    /// A + (B0 + q·B1)·e^(−T·s).
    Gain(GainFamily),
    /// D + N·e^(−T·s), where T grows with the knob.
    Delay { d: IntPoly, n: IntPoly },
}

impl Parts {
    fn of(model: &Loop) -> Result<Self, AnalysisError> {
        let refused = |message: &str| AnalysisError::Refused(Field::Knob, message.to_string());
        let (above, below) = model.open_loop.multiplied_out().ok_or_else(|| {
            AnalysisError::Refused(Field::Loop, "the numbers of the loop are out of range".to_string())
        })?;
        let part = |p: &crate::model::KnobPolynomial, k: usize| IntPoly::new(p.at_knob_power(k));
        let signed = |p: IntPoly| IntPoly::new(p.coefficients().iter().map(|c| c * model.feedback_sign()).collect());
        let time = &model.open_loop.dead_time;
        if below.knob_degree() > 0 || above.knob_degree() > 1 {
            return Err(refused(
                "with dead time the knob must be a gain, once and in a numerator, or the dead time itself: choose another \
                 quantity; for an integral time type K_i/s in place of K/(T_i s)",
            ));
        }
        if time.per_knob.is_zero() {
            let (b0, b1) = (signed(part(&above, 0)), signed(part(&above, 1)));
            return Ok(Self::Gain(GainFamily::new(&part(&below, 0), &b0, &b1, &time.fixed)?));
        }
        if above.knob_degree() > 0 {
            return Err(refused("this quantity is a gain and a dead time at once: give the two different names"));
        }
        Ok(Self::Delay { d: part(&below, 0), n: signed(part(&above, 0)) })
    }

    /// The undelayed and the delayed part at a value of the knob, fixed factors included.
    fn at(&self, knob: &RBig) -> (IntPoly, IntPoly) {
        match self {
            Self::Gain(family) => {
                let (a, b) = family.at(knob);
                (a.times(&family.fixed), b.times(&family.fixed))
            }
            Self::Delay { d, n } => (d.clone(), n.clone()),
        }
    }

    fn partition(&self, model: &Loop) -> Result<DeadTimePartition, AnalysisError> {
        match self {
            Self::Gain(family) => Ok(family.partition()?),
            Self::Delay { d, n } => {
                let time = &model.open_loop.dead_time;
                let partition = delay::ranges(d, n)?;
                Ok(delay::in_knob(partition, &time.fixed, &time.per_knob).ok_or(ExactError::EdgeNotNarrow)?)
            }
        }
    }
}

impl DeadTime {
    /// Analyses a loop.
    ///
    /// # Errors
    /// Where the loop is not treated, or a cap is met.
    pub(super) fn analyse(model: &Loop) -> Result<(Findings, Self), AnalysisError> {
        let parts = Parts::of(model)?;
        let partition = parts.partition(model)?;
        let (poles, zeros) = open_loop(&parts)?;
        let crossings = partition.places.iter().flat_map(|place| &place.contacts).filter_map(|contact| contact.omega());
        let crossings = crossings.map(|im| Point { re: 0.0, im });
        let roots = poles.iter().chain(&zeros).map(|root| Point { re: root.re, im: root.im });
        let view = view::frame(roots.chain(crossings));
        let mut notices = model.notices.clone();
        let (landmarks, branches) = drawn(&parts, &partition, &view).unwrap_or_else(|reason| {
            let text = format!("the branches of the locus are not drawn: {reason}; the ranges are not touched by this");
            notices.push(Notice { kind: NoticeKind::NotComputed, text });
            (landmarks::crossings(&partition), Vec::new())
        });
        let start = first_knob(&model.open_loop.dead_time);
        let findings = Findings {
            stability: stability(&partition, start.as_ref()),
            character: Vec::new(),
            landmarks,
            asymptotes: None,
            real_axis: None,
            view,
            poles,
            zeros,
            notices,
            branches,
            stable: stable_pieces(&partition, start.as_ref()),
        };
        let time = model.open_loop.dead_time.clone();
        Ok((findings, Self { parts, time, partition, view }))
    }

    /// The closed loop at a value of the knob, with every pole in the default view and around it.
    ///
    /// # Errors
    /// Where the poles cannot be found.
    pub(super) fn closed_loop(&self, knob: &RBig) -> Result<ClosedLoop, AnalysisError> {
        let count = match self.partition.locate(knob) {
            Ok(range) => self.partition.ranges[range],
            Err(place) => self.partition.at_places[place],
        };
        let name = match (count.right, count.axis) {
            // Infinitely many pairs oscillate, however fast they die away.
            (0, 0) => CharacterName::Underdamped,
            (0, _) => CharacterName::MarginallyStable,
            _ => CharacterName::Unstable,
        };
        let (a, b) = self.parts.at(knob);
        let time = self.time.at(knob);
        let poles = if time > RBig::ZERO {
            poles::in_view(&Quasi::new(&a, &b, &time), &self.around())?
        } else {
            roots(&a.plus(&b))?
        };
        Ok(ClosedLoop {
            knob: knob.to_f64().value(),
            poles: poles.into_iter().map(Into::into).collect(),
            unstable_poles: count.right,
            axis_poles: count.axis,
            name,
        })
    }

    /// What the page shows of the plane: it widens the view to equal scales.
    fn around(&self) -> View {
        let wider = |[low, high]: [f64; 2]| {
            let (middle, half) = (0.5 * (low + high), 0.5 * (high - low) * AROUND);
            [middle - half, middle + half]
        };
        View { re: wider(self.view.re), im: wider(self.view.im) }
    }
}

/// Landmarks and branches.
///
/// # Errors
/// Why there are no branches.
fn drawn(parts: &Parts, partition: &DeadTimePartition, view: &View) -> Result<(Vec<Landmark>, Vec<Branch>), String> {
    let Parts::Gain(family) = parts else {
        return Err("the knob is the dead time, and poles come from infinity as it grows from zero".to_string());
    };
    let told = |error: DeadTimeError| error.to_string();
    Ok((landmarks::landmarks(family, partition, view).map_err(told)?, branches::branches(family, view).map_err(told)?))
}

/// Poles and zeros of the open loop; zeros where the knob is a factor of it.
fn open_loop(parts: &Parts) -> Result<(Vec<Root>, Vec<Root>), ExactError> {
    match parts {
        Parts::Gain(family) => {
            let (a, delayed) = family.at(&RBig::ZERO);
            let gain = delayed.is_zero();
            let (_, b) = family.at(&RBig::ONE);
            Ok((roots(&a.times(&family.fixed))?, if gain { roots(&b.times(&family.fixed))? } else { Vec::new() }))
        }
        Parts::Delay { d, n } => Ok((roots(d)?, roots(n)?)),
    }
}

/// The smallest value of a knob that is the dead time, or part of it: the dead time is never below zero.
fn first_knob(time: &crate::model::DeadTime) -> Option<RBig> {
    (!time.per_knob.is_zero()).then(|| -&time.fixed / &time.per_knob)
}

/// The ranges for the record, from `start` on if there is one.
fn stability(partition: &DeadTimePartition, start: Option<&RBig>) -> Vec<StabilityRange> {
    let mut ranges = partition.stability();
    if let (Some(start), Some(first)) = (start, ranges.first_mut()) {
        first.from = Some(Edge {
            value: start.to_f64().value(),
            bracket: rational_bracket(start, BRACKET_DIGITS),
            exact: Some(exact_text(start)),
            proven: true,
            kind: EdgeKind::NoDeadTime,
            omega: None,
            omegas: Vec::new(),
            touching: false,
            unstable_poles: first.unstable_poles,
            axis_poles: first.axis_poles,
            name: if first.stable { CharacterName::Underdamped } else { CharacterName::Unstable },
        });
    }
    ranges
}

/// The stable ranges, from `start` on if there is one.
fn stable_pieces(partition: &DeadTimePartition, start: Option<&RBig>) -> Vec<Piece> {
    let border =
        |i: usize| Border { bracket: partition.places[i].bracket.clone(), proven: true, cause: Cause::Stability };
    // Without dead time the loop may run as well: the start belongs to its range.
    let first =
        start.map(|q| Border { bracket: Interval::around(q, EDGE_BITS), proven: true, cause: Cause::Controller });
    let count = partition.ranges.len();
    let stable = |i: &usize| partition.ranges[*i].right == 0 && partition.ranges[*i].axis == 0;
    let piece = |i: usize| Piece {
        from: i.checked_sub(1).map_or_else(|| first.clone(), |k| Some(border(k))),
        to: (i + 1 < count).then(|| border(i)),
    };
    (0..count).filter(stable).map(piece).collect()
}
