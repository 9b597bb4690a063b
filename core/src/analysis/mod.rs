//! Everything about a loop that does not depend on the chosen setting.

mod dead_time;
mod error;
mod rational;
mod sampled;

use crate::exact::ExactError;
use crate::locus::Branch;
use crate::model::{self, Loop};
use crate::ranges::pieces::Piece;
use crate::ranges::requirements::{Ground, Lane, Limit, Samples, lane};
use crate::ranges::{Family, Partition};
use crate::record::{
    Asymptotes, BothSigns, CharacterRange, ClosedLoop, KnobSign, Landmark, Notice, NoticeKind, Root, Segment,
    StabilityRange, Timing, View,
};
use crate::response::Setup;
use alloc::boxed::Box;
use alloc::format;
use alloc::vec::Vec;
use core::cell::{OnceCell, RefCell};
use dashu_ratio::RBig;
use dead_time::DeadTime;
pub use error::AnalysisError;
pub use rational::AffineParts;
use rational::Rational;
use sampled::Sampled;

/// A loop, analysed.
pub struct Analysis {
    /// The loop as built from the project.
    pub model: Loop,
    /// What was found out about it.
    pub findings: Findings,
    method: Method,
    /// The loop at many settings, computed when the first requirement asks.
    samples: OnceCell<Samples>,
    /// Lanes computed so far.
    lanes: RefCell<Vec<(Limit, Lane)>>,
}

/// What is known of a loop at every setting.
pub struct Findings {
    /// The whole real line of the knob.
    pub stability: Vec<StabilityRange>,
    /// Likewise; empty where it could not be told.
    pub character: Vec<CharacterRange>,
    /// The special points.
    pub landmarks: Vec<Landmark>,
    /// Where branches go to infinity; None where that is not told.
    pub asymptotes: Option<BothSigns<Asymptotes>>,
    /// The parts of the real axis that belong to the locus; None where that is not told.
    pub real_axis: Option<BothSigns<Vec<Segment>>>,
    /// Poles of the open loop, fixed modes included.
    pub poles: Vec<Root>,
    /// Zeros of the open loop, fixed modes included; empty unless affine.
    pub zeros: Vec<Root>,
    /// The default view.
    pub view: View,
    /// Warnings, most serious first.
    pub notices: Vec<Notice>,
    /// Both halves of the locus.
    pub branches: Vec<Branch>,
    /// The stable ranges.
    pub stable: Vec<Piece>,
}

/// What kind of loop it is, with what its questions need.
enum Method {
    /// A ratio of polynomials in s.
    Rational(Box<Rational>),
    /// With dead time, controlled continuously.
    DeadTime(Box<DeadTime>),
    /// With a sampled controller.
    Sampled(Sampled),
}

/// Lanes kept; more than there are kinds, so that a limit may be changed back and forth.
const LANES_KEPT: usize = 64;

impl Analysis {
    /// Analyses a loop.
    ///
    /// # Errors
    /// Where the loop is not treated, or a cap is met before the ranges are proven.
    pub fn new(model: Loop) -> Result<Self, AnalysisError> {
        let (mut findings, method) = if let Some(sampling) = &model.sampling {
            let (findings, sampled) = Sampled::analyse(&model, sampling)?;
            (findings, Method::Sampled(sampled))
        } else if model.open_loop.dead_time.is_none() {
            let (findings, rational) = Rational::analyse(&model)?;
            (findings, Method::Rational(Box::new(rational)))
        } else {
            let (findings, dead_time) = DeadTime::analyse(&model)?;
            (findings, Method::DeadTime(Box::new(dead_time)))
        };
        findings.notices.sort_by_key(|notice| notice.kind);
        Ok(Self { model, findings, method, samples: OnceCell::new(), lanes: RefCell::default() })
    }

    /// D and N of the moving part with their roots, where the loop is a ratio of polynomials and affine in the knob.
    pub fn affine(&self) -> Option<AffineParts<'_>> {
        match &self.method {
            Method::Rational(rational) => rational.affine(),
            Method::DeadTime(_) | Method::Sampled(_) => None,
        }
    }

    /// The characteristic polynomial over the knob and the line of the knob, where the loop is a ratio of polynomials.
    pub fn rational(&self) -> Option<(&Family, &Partition)> {
        match &self.method {
            Method::Rational(rational) => Some((&rational.family, &rational.partition)),
            Method::DeadTime(_) | Method::Sampled(_) => None,
        }
    }

    /// For a look at single settings.
    pub fn setup(&self) -> Setup<'_> {
        Setup {
            model: &self.model,
            sampled: match &self.method {
                Method::Sampled(sampled) => Some(&sampled.ranges),
                _ => None,
            },
        }
    }

    /// Where a requirement is met; kept for the next time.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    pub fn lane(&self, limit: &Limit) -> Result<Lane, ExactError> {
        if let Some((_, lane)) = self.lanes.borrow().iter().find(|(known, _)| known == limit) {
            return Ok(lane.clone());
        }
        let stable = &self.findings.stable;
        let samples = match self.samples.get() {
            Some(samples) => samples,
            None => {
                let samples = Samples::new(self.setup(), stable)?;
                self.samples.get_or_init(|| samples)
            }
        };
        let family = self.rational().map(|(family, _)| family);
        let ground = Ground { model: &self.model, setup: self.setup(), family, stable, samples };
        let found = lane(&ground, limit)?;
        let mut lanes = self.lanes.borrow_mut();
        if lanes.len() >= LANES_KEPT {
            lanes.remove(0);
        }
        lanes.push((limit.clone(), found.clone()));
        Ok(found)
    }

    /// Dead time and sampling for the record.
    pub fn timing(&self, knob: Option<&RBig>) -> Timing {
        let mut timing = model::timing(&self.model);
        if let (Method::Sampled(sampled), Some(record)) = (&self.method, &mut timing.sampling) {
            record.by_period = sampled.by_period();
            record.longest_period = knob.and_then(|knob| sampled.longest_period(knob));
        }
        timing
    }

    /// The closed loop at a value of the knob.
    ///
    /// # Errors
    /// From the exact methods, when a cap is met.
    pub fn closed_loop(&self, knob: &RBig) -> Result<ClosedLoop, AnalysisError> {
        match &self.method {
            Method::Rational(rational) => Ok(rational.closed_loop(knob)?),
            Method::DeadTime(dead_time) => dead_time.closed_loop(knob),
            Method::Sampled(sampled) => sampled.closed_loop(knob),
        }
    }
}

fn not_computed(what: &str, error: &ExactError) -> Notice {
    Notice { kind: NoticeKind::NotComputed, text: format!("{what} could not be computed: {error}") }
}

fn lost_branches(sign: KnobSign) -> Notice {
    let half = match sign {
        KnobSign::Positive => "positive",
        KnobSign::Negative => "negative",
    };
    let text = format!(
        "the branches of the {half} half of the locus could not be followed with certainty and are not drawn; the ranges are not touched by this"
    );
    Notice { kind: NoticeKind::NotComputed, text }
}
