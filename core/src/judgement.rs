//! What the requirements and the controller's scale make of an analysed loop: lanes, permitted settings, and everything
//! at the chosen setting.

use crate::analysis::Analysis;
use crate::answer::{Field, Problem};
use crate::exact::ExactError;
use crate::notation;
use crate::project::{Project, RequirementKind};
use crate::ranges::permitted::{conflict, permitted};
use crate::ranges::pieces::{Border, Piece};
use crate::ranges::requirements::{Lane, Limit, at_least, check_limit, describe, meets, unit};
use crate::record::{
    Conflict, EdgeCurve, FigureRecord, LimitEdge, LimitRange, LoadRecord, Margins, Notice, Permitted, PhaseCrossing,
    RequirementRecord, StepRecord, Suggestion,
};
use crate::response::{Figure, LoopAt};
use crate::sampled::warnings;
use crate::setting::{Scale, controller_range, suggest, typed};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// Digits of a bracket's decimals.
const BRACKET_DIGITS: u32 = 19;

/// Curves at the edges of the permitted range are drawn for at most this many times the horizon of the one at the setting.
const LONGEST: f64 = 2.5;

/// The parts of the record that depend on requirements, scale and setting.
pub struct Judgement {
    /// One for each requirement, in the project's order.
    pub requirements: Vec<RequirementRecord>,
    /// Where all agree.
    pub permitted: Permitted,
    /// At the setting.
    pub figures: Vec<FigureRecord>,
    /// At the setting.
    pub margins: Option<Margins>,
    /// At the setting.
    pub step: Option<StepRecord>,
    /// At the setting.
    pub load: Option<LoadRecord>,
    /// Warnings at the setting.
    pub notices: Vec<Notice>,
}

/// Reads the requirements of a project.
///
/// # Errors
/// All limits that must be put right.
pub fn limits(project: &Project) -> Result<Vec<Limit>, Vec<Problem>> {
    let mut limits: Vec<Limit> = Vec::new();
    let mut problems = Vec::new();
    for requirement in &project.requirements {
        let kind = requirement.kind;
        let mut complain = |span: Option<[usize; 2]>, message: String| {
            problems.push(Problem { field: Field::Requirement, symbol: Some(name_of(kind)), span, message });
        };
        if limits.iter().any(|limit| limit.kind == kind) {
            complain(None, format!("the requirement on {} stands twice: keep one", describe(kind)));
            continue;
        }
        match notation::decimal(&requirement.limit) {
            Err(error) => complain(Some(error.span().into()), error.to_string()),
            Ok(value) => match check_limit(kind, &value) {
                Some(message) => complain(None, message.to_string()),
                None => limits.push(Limit { kind, value }),
            },
        }
    }
    if problems.is_empty() { Ok(limits) } else { Err(problems) }
}

/// A kind as it stands in the project document.
fn name_of(kind: RequirementKind) -> String {
    serde_json::to_string(&kind).map(|text| text.trim_matches('"').to_string()).unwrap_or_default()
}

/// Judges an analysed loop.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn judge(
    analysis: &Analysis,
    limits: &[Limit],
    scale: &Scale,
    setting: Option<&RBig>,
) -> Result<Judgement, ExactError> {
    let lanes = limits.iter().map(|limit| analysis.lane(limit)).collect::<Result<Vec<_>, _>>()?;
    let knob = setting.and_then(|setting| scale.knob(setting));
    let here = knob.map(|knob| LoopAt::new(analysis.setup(), knob)).transpose()?;
    let requirements =
        limits.iter().zip(&lanes).map(|(limit, lane)| requirement(limit, lane, scale, here.as_ref())).collect();
    let stable = &analysis.findings.stable;
    let controller = controller_range(scale);
    let pieces = permitted(stable, controller.as_ref(), &lanes);
    let advice = suggest(scale, &pieces);
    let conflict = pieces.is_empty().then(|| {
        let found = conflict(stable, controller.as_ref(), limits, &lanes, scale);
        Conflict { requirements: found.kinds, text: found.text }
    });
    let edges = || pieces.iter().flat_map(|piece| [&piece.from, &piece.to]).flatten();
    let permitted = Permitted {
        knob: pieces.iter().map(|piece| range(piece, scale)).collect(),
        setting: advice.ends.iter().map(|ends| ends.each_ref().map(|end| end.as_ref().map(typed))).collect(),
        proven: edges().all(|border| border.proven) && lanes.iter().all(|lane| lane.proven),
        suggested: advice.suggested.map(|s| Suggestion {
            setting: typed(&s.setting),
            knob: s.knob.to_f64().value(),
            reason: s.reason,
        }),
        conflict,
    };
    let step = here.as_ref().and_then(|here| step(analysis, here, &pieces));
    // What could not be found is not shown; the ranges are not touched by it.
    let margins = here.as_ref().and_then(|here| margins(here).ok().flatten());
    let load = here.as_ref().and_then(load);
    let of_kind = |at: &LoopAt| RequirementKind::ALL.map(|kind| FigureRecord { kind, value: at.figure(kind).value() });
    let figures = here.as_ref().map(|at| of_kind(at).to_vec()).unwrap_or_default();
    let sampled = here.as_ref().and_then(LoopAt::sampled);
    let notices = sampled.and_then(warnings::of_the_closed_loop).into_iter().collect();
    Ok(Judgement { requirements, permitted, figures, margins, step, load, notices })
}

fn requirement(limit: &Limit, lane: &Lane, scale: &Scale, here: Option<&LoopAt>) -> RequirementRecord {
    let value = limit.value.to_f64().value();
    let figure = here.map(|here| here.figure(limit.kind));
    // A proven lane decides; of a computed one the figure itself, which the lane's edges approach to seven digits.
    let by_figure = |figure: Option<Figure>| figure.is_some_and(|figure| meets(limit, figure));
    let met = here
        .map(|here| here.is_stable() && if lane.proven { here.knob_within(&lane.pieces) } else { by_figure(figure) });
    RequirementRecord {
        kind: limit.kind,
        limit: value,
        at_least: at_least(limit.kind),
        unit: unit(limit.kind).to_string(),
        ranges: lane.pieces.iter().map(|piece| range(piece, scale)).collect(),
        proven: lane.proven,
        figure: figure.and_then(Figure::value),
        met,
        remark: lane.remark.clone(),
    }
}

impl LoopAt {
    fn knob_within(&self, pieces: &[Piece]) -> bool {
        pieces.iter().any(|piece| piece.surely_holds(&self.knob))
    }
}

fn range(piece: &Piece, scale: &Scale) -> LimitRange {
    let edge = |border: &Border| LimitEdge {
        knob: border.value(),
        setting: scale.setting_f64(border.value()),
        bracket: border.bracket.decimal_bracket(BRACKET_DIGITS),
        proven: border.proven,
        cause: border.cause,
    };
    LimitRange { from: piece.from.as_ref().map(edge), to: piece.to.as_ref().map(edge) }
}

fn margins(here: &LoopAt) -> Result<Option<Margins>, ExactError> {
    let Some(found) = here.frequency() else { return Ok(None) };
    let finite = |value: f64| value.is_finite().then_some(value);
    let at_finite = |c: &&PhaseCrossing| c.omega.is_finite();
    Ok(Some(Margins {
        gain_up: finite(found.gain_up()?),
        gain_down: finite(found.gain_down()?),
        phase: finite(found.phase_margin()?),
        delay: finite(found.delay_margin()?),
        peak_sensitivity: found.peak()?.1,
        peak_frequency: found.peak()?.0,
        bandwidth: found.bandwidth()?.and_then(finite),
        gain_crossings: found.gain_crossings()?,
        phase_crossings: found.phase_crossings()?.iter().filter(at_finite).copied().collect(),
        response: found.response()?,
    }))
}

fn step(analysis: &Analysis, here: &LoopAt, pieces: &[Piece]) -> Option<StepRecord> {
    let (modes, _) = here.output().found()?;
    let own = modes.horizon();
    let knob = here.knob.to_f64().value();
    let chosen = pieces.iter().find(|piece| piece.holds(knob)).or(pieces.first());
    let borders = chosen.into_iter().flat_map(|piece| [&piece.from, &piece.to]).flatten();
    let at_edges: Vec<LoopAt> = borders
        .filter(|border| border.cause != crate::record::Cause::Stability)
        .filter_map(|border| LoopAt::new(analysis.setup(), border.bracket.midpoint().to_rational()).ok())
        .collect();
    let horizons = at_edges.iter().filter_map(|at| at.output().found()).map(|(modes, _)| modes.horizon());
    let end = horizons.fold(own, f64::max).min(LONGEST * own);
    let edge_curve = |at: &LoopAt| {
        let (modes, _) = at.output().found()?;
        Some(EdgeCurve { knob: at.knob.to_f64().value(), curve: modes.curve(end) })
    };
    let figure = |kind: RequirementKind| here.figure(kind).value();
    Some(StepRecord {
        curve: modes.curve(end),
        at_edges: at_edges.iter().filter_map(edge_curve).collect(),
        controller: here.control().found().map(|(modes, _)| modes.curve(end)),
        final_value: modes.final_value(),
        overshoot: figure(RequirementKind::Overshoot),
        undershoot: figure(RequirementKind::Undershoot),
        rise_time: figure(RequirementKind::RiseTime),
        settling_time2: figure(RequirementKind::SettlingTime2),
        settling_time5: figure(RequirementKind::SettlingTime5),
        peak_time: figure(RequirementKind::PeakTime),
        controller_peak: figure(RequirementKind::ControllerPeak),
    })
}

fn load(here: &LoopAt) -> Option<LoadRecord> {
    let (modes, _) = here.load().found()?;
    let peak = here.figure(RequirementKind::LoadPeak).value()?;
    Some(LoadRecord { curve: modes.curve(modes.horizon()), peak, final_value: modes.final_value() })
}

#[cfg(test)]
mod tests {
    use crate::answer::{Answer, Field, Session};
    use crate::record::Record;
    use alloc::format;
    use alloc::string::String;

    fn answer(loop_: &str, setting: &str, requirements: &str) -> Answer {
        let json = format!(
            r#"{{"format": "stayband-project/1", "loop": {loop_}, "knob": "K", "setting": {setting}, "requirements": [{requirements}]}}"#
        );
        Session::new().solve(&json, None).answer
    }

    fn record(loop_: &str, setting: &str, requirements: &str) -> Record {
        let answer = answer(loop_, setting, requirements);
        answer.record.unwrap_or_else(|| panic!("{:?}", answer.problems))
    }

    /// A levitated roller, invented: unstable at zero gain.
    const ROLLER: &str = r#"{"controller": "K (0.12 s + 1)/(0.012 s + 1)", "plant": "14/((s - 3)(s + 9)(0.008 s + 1))", "sensor": "0.5"}"#;

    #[test]
    fn the_permitted_range_is_where_all_agree_on_the_controllers_grid() {
        let limits = r#"{"kind": "damping-ratio", "limit": "0.5"}, {"kind": "step-error", "limit": "15"}"#;
        let found = record(ROLLER, r#"{"value": "37", "step": "1"}"#, limits);
        // |1/(1 − 7K/27)| ≤ 0.15 for K ≥ 27·(1 + 1/0.15)/7 = 207/7.
        let low = found.permitted.knob[0].from.as_ref().expect("an end");
        assert!((low.knob - 207.0 / 7.0).abs() < 1e-12 && low.proven, "{low:?}");
        assert_eq!(found.permitted.setting, [[Some("30".into()), Some("44".into())]]);
        assert!(found.permitted.proven && found.permitted.conflict.is_none());
        assert!(found.requirements.iter().all(|r| r.met == Some(true)));
    }

    #[test]
    fn requirements_that_exclude_each_other_are_named_with_their_ranges() {
        let limits = r#"{"kind": "overshoot", "limit": "30"}, {"kind": "damping-ratio", "limit": "0.8"}, {"kind": "step-error", "limit": "15"}"#;
        let found = record(ROLLER, "{}", limits).permitted;
        let conflict = found.conflict.expect("a conflict");
        let kinds: alloc::vec::Vec<String> = conflict.requirements.iter().map(|kind| super::name_of(*kind)).collect();
        assert_eq!(kinds, ["damping-ratio", "step-error"]);
        assert!(conflict.text.contains("29.57"), "{}", conflict.text);
    }

    #[test]
    fn a_proportional_band_turns_the_limits_round() {
        let lag = r#"{"controller": "K", "plant": "2/((s + 1)(0.5 s + 1)(0.2 s + 1))"}"#;
        let gain = record(lag, r#"{"value": "1", "step": "0.01"}"#, r#"{"kind": "phase-margin", "limit": "45"}"#);
        let band = record(
            lag,
            r#"{"value": "100", "direction": "reciprocal", "factor": "100", "step": "0.1"}"#,
            r#"{"kind": "phase-margin", "limit": "45"}"#,
        );
        let (edge, same) = (&gain.permitted.knob[0].to, &band.permitted.knob[0].to);
        let (edge, same) = (edge.as_ref().expect("an end"), same.as_ref().expect("an end"));
        assert!((edge.knob - same.knob).abs() < 1e-12);
        assert!((same.setting.expect("a setting") - 100.0 / edge.knob).abs() < 1e-9);
        assert!(band.permitted.setting[0][0].is_some());
    }

    #[test]
    fn an_older_project_still_opens_and_a_wrong_limit_is_told_at_its_row() {
        let json = format!(
            r#"{{"format": "stayband-project/1", "loop": {ROLLER}, "knob": "K", "setting": {{"value": "37"}}}}"#
        );
        assert!(Session::new().solve(&json, None).answer.record.is_some());
        let problems = answer(ROLLER, "{}", r#"{"kind": "damping-ratio", "limit": "1.5"}"#).problems;
        assert_eq!((problems[0].field, problems[0].symbol.as_deref()), (Field::Requirement, Some("damping-ratio")));
    }

    #[test]
    fn an_error_that_no_setting_makes_finite_says_why() {
        let found = record(ROLLER, "{}", r#"{"kind": "ramp-error", "limit": "1"}"#);
        assert!(found.requirements[0].ranges.is_empty());
        assert!(found.requirements[0].remark.as_deref().is_some_and(|text| text.contains("one integrator")));
    }

    #[test]
    fn a_range_much_narrower_than_the_samples_is_found_with_its_jump() {
        // K/(s(s + 1)): the overshoot touches the band of 2 % at x = ln 50/π, ζ = x/√(1 + x²), K = 1/(4ζ²), where the
        // settling time is shortest and jumps.
        let axis = r#"{"controller": "K", "plant": "1/(s (s + 1))"}"#;
        let x = libm::log(50.0) / core::f64::consts::PI;
        let touching = (1.0 + x * x) / (4.0 * x * x);
        let beside = format!(r#"{{"value": "{}"}}"#, touching * (1.0 - 1e-4));
        let settled = record(axis, &beside, "").step.and_then(|step| step.settling_time2).expect("settles");
        let limit = format!(r#"{{"kind": "settling-time-2", "limit": "{settled}"}}"#);
        let ranges = record(axis, "{}", &limit).requirements.remove(0).ranges;
        let [range] = &ranges[..] else { panic!("{ranges:?}") };
        let ends = [&range.from, &range.to].map(|end| end.as_ref().map_or(f64::NAN, |edge| edge.knob / touching - 1.0));
        assert!((ends[0] + 1e-4).abs() < 1e-7 && ends[1].abs() < 1e-7, "{ends:?}");
    }
}
