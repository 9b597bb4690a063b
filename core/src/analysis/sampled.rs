//! The analysis of a loop with a sampled controller.

use super::{AnalysisError, Findings};
use crate::exact::complex_roots::roots;
use crate::locus::view;
use crate::model::{Loop, Sampling};
use crate::ranges::requirements::stable_pieces;
use crate::record::{CharacterName, ClosedLoop, ClosedPole, Notice, NoticeKind, Point, Root};
use crate::sampled::{SampledLoop, SampledRanges, ranges};
use alloc::format;
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// What the questions about such a loop need.
pub(super) struct Sampled {
    found: SampledRanges,
    period: f64,
}

impl Sampled {
    /// Analyses a loop.
    ///
    /// # Errors
    /// Where the loop is not treated, or a cap is met.
    pub(super) fn analyse(model: &Loop, sampling: &Sampling) -> Result<(Findings, Self), AnalysisError> {
        let input = SampledLoop::new(model, sampling)?;
        let found = ranges(&input)?;
        let poles = roots(&found.family.middle_at(&RBig::ZERO))?;
        let mut notices = model.notices.clone();
        for value in &found.unresolved {
            let text = format!(
                "near {} = {} poles come so close to the unit circle that a contact could not be told from a near miss",
                model.knob,
                crate::ranges::permitted::short(*value)
            );
            notices.push(Notice { kind: NoticeKind::NotComputed, text });
        }
        let circle = [Point { re: -1.0, im: 1.0 }, Point { re: 1.0, im: 1.0 }];
        let findings = Findings {
            stability: found.partition.stability(),
            character: found.partition.character(),
            landmarks: Vec::new(),
            asymptotes: None,
            real_axis: None,
            view: view::frame(circle.into_iter().chain(poles.iter().map(|r| Point { re: r.re, im: r.im }))),
            poles,
            zeros: Vec::new(),
            notices,
            branches: Vec::new(),
            stable: stable_pieces(&found.partition),
        };
        let period = sampling.period.to_f64().value();
        Ok((findings, Self { found, period }))
    }

    /// The closed loop at a value of the knob.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    pub(super) fn closed_loop(&self, knob: &RBig) -> Result<ClosedLoop, AnalysisError> {
        let poles: Vec<Root> = roots(&self.found.family.middle_at(knob))?;
        let count = self.found.partition.verdict_at(knob).half_plane;
        let (unstable_poles, axis_poles) = (count.right, count.axis);
        // A pole left of z = 0 changes its sign from sample to sample.
        let aperiodic = poles.iter().all(|r| r.im == 0.0 && r.re >= -r.radius);
        let name = match (unstable_poles, axis_poles) {
            (0, 0) if aperiodic => CharacterName::Overdamped,
            (0, 0) => CharacterName::Underdamped,
            _ => self.found.partition.verdict_at(knob).name,
        };
        Ok(ClosedLoop {
            knob: knob.to_f64().value(),
            poles: poles.iter().map(|r| ClosedPole::sampled(*r, self.period)).collect(),
            unstable_poles,
            axis_poles,
            name,
        })
    }
}
