//! The analysis of a loop with a sampled controller.

use super::{AnalysisError, Findings, lost_branches, not_computed};
use crate::exact::complex_roots::roots;
use crate::model::{Loop, Sampling};
use crate::ranges::permitted::short;
use crate::ranges::requirements::stable_pieces;
use crate::record::{CharacterName, ClosedLoop, ClosedPole, Notice, NoticeKind, Root, StableAtPeriod, View};
use crate::sampled::period::{by_period, longest_period};
use crate::sampled::{SampledLocus, SampledLoop, SampledRanges, locus, ranges, warnings};
use alloc::format;
use alloc::rc::Rc;
use alloc::vec::Vec;
use core::cell::OnceCell;
use dashu_ratio::RBig;

/// What the questions about such a loop need.
pub(super) struct Sampled {
    /// The ranges, with the loop they were found from.
    pub(super) ranges: Rc<SampledRanges>,
    period: f64,
    by_period: OnceCell<Vec<StableAtPeriod>>,
}

impl Sampled {
    /// Analyses a loop.
    ///
    /// # Errors
    /// Where the loop is not treated, or a cap is met.
    pub(super) fn analyse(model: &Loop, sampling: &Sampling) -> Result<(Findings, Self), AnalysisError> {
        let found = ranges(&SampledLoop::new(model, sampling)?)?;
        let mut notices = model.notices.clone();
        notices.extend(warnings::of_the_plant(&found.input));
        for value in &found.unresolved {
            let text = format!(
                "near {} = {} poles come so close to the unit circle that a contact could not be told from a near miss",
                model.knob,
                short(*value)
            );
            notices.push(Notice { kind: NoticeKind::NotComputed, text });
        }
        let drawn = locus(&found).unwrap_or_else(|error| {
            notices.push(not_computed("the branches of the locus", &error));
            without_branches()
        });
        notices.extend(drawn.lost.iter().map(|sign| lost_branches(*sign)));
        let findings = Findings {
            stability: found.partition.stability(),
            character: Vec::new(),
            landmarks: drawn.landmarks,
            asymptotes: drawn.asymptotes,
            real_axis: drawn.real_axis,
            view: drawn.view,
            poles: drawn.poles,
            zeros: drawn.zeros,
            notices,
            branches: drawn.branches,
            stable: stable_pieces(&found.partition),
        };
        let period = sampling.period.to_f64().value();
        Ok((findings, Self { ranges: Rc::new(found), period, by_period: OnceCell::new() }))
    }

    /// The stable ranges at other periods.
    pub(super) fn by_period(&self) -> Vec<StableAtPeriod> {
        self.by_period.get_or_init(|| by_period(&self.ranges)).clone()
    }

    /// The longest period up to which the loop is stable at a value of the knob.
    pub(super) fn longest_period(&self, knob: &RBig) -> Option<f64> {
        longest_period(&self.ranges.input, knob)
    }

    /// The closed loop at a value of the knob.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    pub(super) fn closed_loop(&self, knob: &RBig) -> Result<ClosedLoop, AnalysisError> {
        let poles: Vec<Root> = roots(&self.ranges.characteristic_at(knob))?;
        let verdict = self.ranges.partition.verdict_at(knob);
        // A pole left of z = 0 changes its sign from sample to sample.
        let aperiodic = poles.iter().all(|r| r.im == 0.0 && r.re >= -r.radius);
        let name = match verdict.half_plane.is_stable() {
            true if aperiodic => CharacterName::Overdamped,
            true => CharacterName::Underdamped,
            false => verdict.name,
        };
        Ok(ClosedLoop {
            knob: knob.to_f64().value(),
            poles: poles.iter().map(|r| ClosedPole::sampled(*r, self.period)).collect(),
            unstable_poles: verdict.half_plane.right,
            axis_poles: verdict.half_plane.axis,
            name,
        })
    }
}

/// A picture with the unit circle alone.
fn without_branches() -> SampledLocus {
    SampledLocus {
        branches: Vec::new(),
        landmarks: Vec::new(),
        poles: Vec::new(),
        zeros: Vec::new(),
        asymptotes: None,
        real_axis: None,
        view: View { re: [-1.3, 1.3], im: [-1.3, 1.3] },
        lost: Vec::new(),
    }
}
