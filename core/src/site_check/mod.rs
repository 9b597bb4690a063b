//! The site check: what was seen on the machine against the model, and the correction of the model that explains it.
//!
//! The correction is a factor of the loop gain and an added dead time: two numbers for two observations. An oscillation that
//! neither grows nor dies says that 1 + g·e^(−jωθ)·L(jω) = 0, which gives both at once. Overshoot and period of a step
//! are matched by Newton's method, from where the measured decay and period would be those of a pole.

mod corrected;
mod matching;
mod tolerances;

use crate::analysis::Analysis;
use crate::exact::ExactError;
use crate::notation;
use crate::project::{Observation, Project, RequirementKind};
use crate::response::LoopAt;
use crate::setting::Scale;
use crate::sheet::{Correction, Predicted, SiteCheck};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::Complex;

pub use tolerances::check as check_tolerances;

/// What was observed, read.
struct Seen {
    /// The knob at the observed setting.
    knob: RBig,
    /// rad/s.
    omega: f64,
    /// % of the final value; of a step.
    overshoot: Option<f64>,
}

/// A gain factor and an added dead time, s.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Change {
    gain: f64,
    dead_time: f64,
}

/// The check; None while nothing was entered.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn site_check(project: &Project, analysis: &Analysis, scale: &Scale) -> Result<Option<SiteCheck>, ExactError> {
    let text = &project.site_check;
    if [&text.setting, &text.period, &text.overshoot].iter().all(|typed| typed.trim().is_empty()) {
        return Ok(None);
    }
    let told = |remarks: Vec<String>| SiteCheck { seen: text.seen, remarks, predicted: None, correction: None };
    if analysis.model.sampling.is_some() {
        return Ok(Some(told(["the site check does not know sampled loops yet".to_string()].into())));
    }
    let seen = match read(project, scale) {
        Ok(seen) => seen,
        Err(remarks) => return Ok(Some(told(remarks))),
    };
    let at = LoopAt::new(analysis.setup(), seen.knob.clone())?;
    let own = analysis.model.open_loop.dead_time.at(&seen.knob).to_f64().value();
    let (predicted, change) = match seen.overshoot {
        None => (at_nearest_edge(analysis, scale, &seen), from_oscillation(&at, own, seen.omega)),
        Some(overshoot) => {
            let swing = matching::swing(&at, own, Change { gain: 1.0, dead_time: 0.0 })?;
            let predicted = Predicted {
                period: swing.map(|swing| swing.period),
                overshoot: swing.map(|swing| swing.overshoot).or_else(|| overshoot_of(&at)),
                setting: None,
            };
            (predicted, matching::from_step(&at, own, overshoot, seen.omega)?)
        }
    };
    let Some(change) = change else {
        let remark = "no factor of the loop gain with an added dead time explains this: look for another cause, such as friction, \
                      a limit that was reached, or another wrong value of the model";
        return Ok(Some(SiteCheck { predicted: Some(predicted), ..told([remark.to_string()].into()) }));
    };
    let allowed = tolerances::allowed(project, &at, seen.omega)?;
    let within = allowed.map(|allowed| {
        let inside = |value: f64, [low, high]: [f64; 2]| (low..=high).contains(&value);
        inside(change.gain, allowed.gain) && inside(change.dead_time, allowed.dead_time)
    });
    let corrected = corrected::corrected(project, change, own, core::f64::consts::TAU / seen.omega);
    let correction = Correction {
        gain: change.gain,
        dead_time: change.dead_time,
        allowed,
        within,
        project: corrected.project,
        stable: corrected.stable,
        permitted: corrected.permitted,
        remark: corrected.remark,
    };
    Ok(Some(SiteCheck { predicted: Some(predicted), correction: Some(correction), ..told(Vec::new()) }))
}

/// The overshoot of an answer without a second peak.
fn overshoot_of(at: &LoopAt) -> Option<f64> {
    at.figure(RequirementKind::Overshoot).value()
}

/// The observation in numbers.
fn read(project: &Project, scale: &Scale) -> Result<Seen, Vec<String>> {
    let text = &project.site_check;
    let mut remarks = Vec::new();
    let mut positive = |name: &str, typed: &str| {
        let found = match notation::decimal(typed) {
            _ if typed.trim().is_empty() => Err(format!("type the {name}")),
            Ok(value) if name != "setting" && value <= RBig::ZERO => Err(format!("type a {name} above zero")),
            Ok(value) => Ok(value),
            Err(error) => Err(format!("{name}: {error}")),
        };
        found.map_err(|remark| remarks.push(remark)).ok()
    };
    let setting = positive("setting", &text.setting);
    let period = positive("period", &text.period);
    let overshoot = match text.seen {
        Observation::Step => positive("overshoot", &text.overshoot).map(|value| Some(value.to_f64().value())),
        Observation::Oscillation => Some(None),
    };
    let knob = setting.map(|setting| scale.knob(&setting).filter(|knob| !knob.is_zero()));
    match (knob, period, overshoot) {
        (Some(Some(knob)), Some(period), Some(overshoot)) => {
            Ok(Seen { knob, omega: core::f64::consts::TAU / period.to_f64().value(), overshoot })
        }
        (Some(None), ..) => {
            Err(["at this setting the knob is zero or infinite: nothing can be seen there".to_string()].into())
        }
        _ => Err(remarks),
    }
}

/// From 1 + g·e^(−jωθ)·L(jω) = 0.
fn from_oscillation(at: &LoopAt, own: f64, omega: f64) -> Option<Change> {
    explaining(at, own, Complex::new(0.0, omega))
}

/// g and θ with 1 + g·e^(−θs)·L(s) = 0 at s; of all θ the one nearest to zero.
fn explaining(at: &LoopAt, own: f64, s: Complex<f64>) -> Option<Change> {
    let open = at.open_loop_at(s);
    let size = libm::hypot(open.re, open.im);
    // −L turned by the lag of all dead time must be real and positive.
    let lag = libm::atan2(-open.im, -open.re) / s.im;
    let period = core::f64::consts::TAU / s.im;
    let mut dead_time = lag - own;
    dead_time -= period * libm::round(dead_time / period);
    // The record is read to a few digits: what is nearly none is none.
    if own + dead_time < 0.0 && own + dead_time > -NOISE * period {
        dead_time = -own;
    }
    let gain = libm::exp((own + dead_time) * s.re) / size;
    (gain.is_finite() && gain > 0.0).then_some(Change { gain, dead_time })
}

/// Part of a period below which a dead time is lost in the reading of a record.
const NOISE: f64 = 0.02;

/// Period and setting of the model's own edge with an oscillation nearest to the observed setting.
fn at_nearest_edge(analysis: &Analysis, scale: &Scale, seen: &Seen) -> Predicted {
    let knob = seen.knob.to_f64().value();
    let mut edges: Vec<(f64, f64)> = Vec::new();
    for edge in analysis.findings.stability.iter().filter_map(|range| range.to.as_ref()) {
        if edge.value * knob > 0.0 {
            edges.extend(edge.omegas.iter().map(|omega| (edge.value, *omega)));
        }
    }
    let distance = |edge: &(f64, f64)| libm::log(edge.0 / knob).abs();
    let nearest = edges.into_iter().min_by(|a, b| distance(a).total_cmp(&distance(b)));
    Predicted {
        period: nearest.map(|(_, omega)| core::f64::consts::TAU / omega),
        overshoot: None,
        setting: nearest.and_then(|(knob, _)| scale.setting_f64(knob)),
    }
}
