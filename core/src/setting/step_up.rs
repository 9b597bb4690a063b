//! The step-up plan: settings from a low one to the last, each with what to expect there and what means stop.
//!
//! Rows grow by a ratio of the knob and are rounded on the controller's grid to the smaller knob. What means stop at a row
//! is the oscillation predicted halfway, on a logarithmic scale, to the edge ahead: half of the room is then used up
//! (common practice, no source).

use super::suggestion::{step_near, with_step};
use super::{Rounding, Scale, suggest, typed};
use crate::analysis::Analysis;
use crate::exact::{Dyadic, ExactError};
use crate::notation;
use crate::project::{Direction, RequirementKind, StepUpText};
use crate::ranges::permitted::short;
use crate::ranges::pieces::{Border, Piece};
use crate::response::LoopAt;
use crate::sheet::{EdgeAhead, StepUpPlan, StepUpRow, StopSign};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// The ratio where none is typed.
const USUAL_RATIO: f64 = 1.5;

/// The smallest and the largest ratio: below, the rows are too many to walk; above, one row may leap over the room.
const RATIOS: core::ops::RangeInclusive<f64> = 1.02..=4.0;

/// The start is this part of the suggestion.
const START_PART: f64 = 0.25;

/// Rows of a plan. More fit on no sheet; a larger ratio helps.
const ROW_CAP: usize = 60;

/// Digits of the settings where the controller has no grid.
const FREE_DIGITS: i32 = 3;

/// The middle of an edge's bracket, rounded in two ways.
const SAME: f64 = 1e-14;

/// How often the rest of the way to the edge is halved: a sixteenth of it, on a logarithmic scale, is then left.
const HALVES: usize = 4;

/// Knobs between settings are rounded to this many bits: short numbers keep the exact polynomials short.
const KNOB_BITS: usize = 40;

/// What a plan is made of.
pub struct Ground<'a> {
    /// The analysed loop.
    pub analysis: &'a Analysis,
    /// The controller's scale.
    pub scale: &'a Scale,
    /// The permitted ranges.
    pub permitted: &'a [Piece],
    /// The chosen setting, if there is one.
    pub setting: Option<&'a RBig>,
}

/// The plan to the chosen setting, else to the suggestion.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn step_up(ground: &Ground<'_>, text: &StepUpText) -> Result<StepUpPlan, ExactError> {
    let without = |remark: &str| StepUpPlan { remarks: [remark.to_string()].into(), edge: None, rows: Vec::new() };
    if ground.analysis.model.sampling.is_some() {
        return Ok(without("the step-up plan does not know sampled loops yet"));
    }
    let ratio = match typed_number(&text.ratio) {
        Ok(ratio) => ratio.map_or(USUAL_RATIO, |ratio| ratio.to_f64().value()),
        Err(fault) => return Ok(without(&format!("ratio: {fault}"))),
    };
    if !RATIOS.contains(&ratio) {
        return Ok(without(&format!("type a ratio from {} to {}, such as 1.5", RATIOS.start(), RATIOS.end())));
    }
    let suggested = suggest(ground.scale, ground.permitted).suggested;
    let Some(last) = ground.setting.cloned().or(suggested.as_ref().map(|s| s.setting.clone())) else {
        return Ok(without("choose a setting first: the plan ends there"));
    };
    let knob = ground.scale.knob(&last).filter(|knob| !knob.is_zero());
    let stable =
        knob.as_ref().and_then(|knob| ground.analysis.findings.stable.iter().find(|piece| piece.surely_holds(knob)));
    let (Some(knob), Some(stable)) = (knob, stable) else {
        return Ok(without("the last setting is not stable: choose another one"));
    };
    let suggested = suggested.map_or_else(|| knob.clone(), |s| s.knob);
    let way = Way { ground, stable, last: (last, knob), ratio, remarks: Vec::new() };
    way.plan(&text.start, &suggested)
}

fn typed_number(text: &str) -> Result<Option<RBig>, String> {
    if text.trim().is_empty() {
        return Ok(None);
    }
    notation::decimal(text).map(Some).map_err(|error| error.to_string())
}

/// The way to one last setting.
struct Way<'a> {
    ground: &'a Ground<'a>,
    /// The stable range that holds the last setting.
    stable: &'a Piece,
    /// Setting and knob.
    last: (RBig, RBig),
    ratio: f64,
    remarks: Vec<String>,
}

impl Way<'_> {
    fn plan(mut self, start: &str, suggested: &RBig) -> Result<StepUpPlan, ExactError> {
        let start = match self.start(start, suggested) {
            Ok(start) => start,
            Err(remark) => {
                self.remarks.push(remark);
                return Ok(StepUpPlan { remarks: self.remarks, edge: None, rows: Vec::new() });
            }
        };
        let Some(settings) = self.settings(start) else {
            self.remarks.push(format!("the plan would have more than {ROW_CAP} rows: choose a larger ratio or start"));
            return Ok(StepUpPlan { remarks: self.remarks, edge: None, rows: Vec::new() });
        };
        let edge = self.edge();
        match &edge {
            None => self.remarks.push(
                "no edge of stability lies ahead in the model; stop when an oscillation does not die out all the same"
                    .into(),
            ),
            Some(edge) if edge.omega.is_none() => {
                self.remarks.push(
                    "at the edge ahead the answer drifts away without oscillation: stop when it no longer returns"
                        .into(),
                );
            }
            Some(_) => {}
        }
        let rows = settings.iter().map(|setting| self.row(setting, edge.as_ref())).collect::<Result<_, _>>()?;
        Ok(StepUpPlan { remarks: self.remarks, edge, rows })
    }

    fn sign(&self) -> f64 {
        if self.last.1 < RBig::ZERO { -1.0 } else { 1.0 }
    }

    /// The ends of a piece nearer to knob 0 and farther from it; None where that is 0, of the other sign, or infinite.
    fn ends<'b>(&self, piece: &'b Piece) -> (Option<&'b Border>, Option<&'b Border>) {
        let (near, far) = if self.sign() > 0.0 { (&piece.from, &piece.to) } else { (&piece.to, &piece.from) };
        (near.as_ref().filter(|border| border.value() * self.sign() > 0.0), far.as_ref())
    }

    /// The first setting: the typed one, or a quarter of the suggestion, but not below the permitted or the stable range.
    fn start(&mut self, text: &str, suggested: &RBig) -> Result<RBig, String> {
        let scale = self.ground.scale;
        let unstable_below = self.ends(self.stable).0.map(Border::value);
        if let Some(low) = unstable_below {
            let at = scale.setting_f64(low).map(short).unwrap_or_default();
            self.remarks.push(format!(
                "the loop is unstable at low gain, up to {} = {at}: the plan starts inside of the stable range, and the loop \
                 must not be closed below it",
                scale.name
            ));
        }
        if let Some(start) = typed_number(text).map_err(|fault| format!("start: {fault}"))? {
            let knob = scale.knob(&start).filter(|knob| self.stable.surely_holds(knob) && !knob.is_zero());
            return match knob {
                Some(knob) if self.is_before(&knob, &self.last.1) => Ok(start),
                Some(_) => Err("the start must come before the last setting".into()),
                None => Err("the start must lie in the stable range of the last setting".into()),
            };
        }
        let quarter = START_PART * suggested.to_f64().value().abs();
        let at = |knob: &RBig| self.ground.permitted.iter().find(|piece| piece.holds(knob.to_f64().value()));
        let holding = at(&self.last.1).or_else(|| at(suggested));
        let low = holding.and_then(|piece| self.ends(piece).0).map_or(0.0, |border| border.value().abs());
        let (wanted, inward) = if low > quarter { (low, true) } else { (quarter, false) };
        let start = self
            .on_grid(self.sign() * wanted, inward)
            .map(|start| self.taken(start))
            .filter(|start| scale.knob(start).is_some_and(|knob| self.stable.surely_holds(&knob) && !knob.is_zero()));
        let start = match (start, unstable_below) {
            (Some(start), _) => start,
            // Nothing is permitted, or the quarter is unstable: a quarter of the way up from the edge.
            (None, Some(low)) => {
                let last = self.last.1.to_f64().value();
                let inside = low * libm::pow(last / low, START_PART);
                self.on_grid(inside, true).unwrap_or_else(|| self.last.0.clone())
            }
            (None, None) => self.last.0.clone(),
        };
        let before = scale.knob(&start).is_some_and(|knob| self.is_before(&knob, &self.last.1));
        Ok(if before { start } else { self.last.0.clone() })
    }

    /// Whether one knob is nearer to 0 than another.
    fn is_before(&self, a: &RBig, b: &RBig) -> bool {
        if self.sign() > 0.0 { a < b } else { b < a }
    }

    /// The setting of the grid next to a knob: on the side of the smaller knob, or inward, of the larger one.
    fn on_grid(&self, knob: f64, inward: bool) -> Option<RBig> {
        let scale = self.ground.scale;
        let wanted = scale.setting_f64(knob).and_then(Dyadic::from_f64)?.to_rational();
        let grid = with_step(scale, &step_near(scale, &wanted, FREE_DIGITS));
        let larger_size = (scale.direction == Direction::Reciprocal) != inward;
        let upward = larger_size == (wanted > RBig::ZERO);
        Some(grid.rounded(&wanted, if upward { Rounding::Up } else { Rounding::Down }))
    }

    /// The setting, or the nearest one on the grid that the controller takes.
    fn taken(&self, setting: RBig) -> RBig {
        let scale = self.ground.scale;
        match (&scale.minimum, &scale.maximum) {
            (Some(minimum), _) if setting < *minimum => scale.rounded(minimum, Rounding::Up),
            (_, Some(maximum)) if setting > *maximum => scale.rounded(maximum, Rounding::Down),
            _ => setting,
        }
    }

    /// The settings from the first to the last; None where they are too many.
    fn settings(&self, start: RBig) -> Option<Vec<RBig>> {
        let scale = self.ground.scale;
        let first = scale.knob(&start)?.to_f64().value();
        let steps = libm::log(self.last.1.to_f64().value() / first) / libm::log(self.ratio);
        if steps > ROW_CAP as f64 {
            return None;
        }
        let mut settings = Vec::from([start]);
        for k in 1..=ROW_CAP {
            let Some(setting) = self.on_grid(first * libm::pow(self.ratio, k as f64), false) else { continue };
            let Some(knob) = scale.knob(&setting) else { continue };
            let before = settings.last().and_then(|last| scale.knob(last))?;
            if !self.is_before(&knob, &self.last.1) {
                break;
            }
            if self.is_before(&before, &knob) {
                settings.push(setting);
            }
        }
        if settings.last() != Some(&self.last.0) {
            settings.push(self.last.0.clone());
        }
        Some(settings)
    }

    fn edge(&self) -> Option<EdgeAhead> {
        let knob = self.ends(self.stable).1?.value();
        let edges = self.ground.analysis.findings.stability.iter().filter_map(|range| range.to.as_ref());
        let omega = edges.filter(|edge| (edge.value - knob).abs() <= SAME * knob.abs()).find_map(|edge| edge.omega);
        let period = omega.map(|omega| core::f64::consts::TAU / omega);
        Some(EdgeAhead { knob, setting: self.ground.scale.setting_f64(knob), omega, period })
    }

    fn row(&self, setting: &RBig, edge: Option<&EdgeAhead>) -> Result<StepUpRow, ExactError> {
        let knob = self.ground.scale.knob(setting).unwrap_or(RBig::ZERO);
        let at = LoopAt::new(self.ground.analysis.setup(), knob.clone())?;
        let swing = Swing::least_damped(at.poles());
        let value = knob.to_f64().value();
        let stop = match edge.filter(|edge| edge.omega.is_some()) {
            Some(edge) => self.stop(value, edge.knob, swing.map_or(0.0, Swing::decay))?,
            None => None,
        };
        Ok(StepUpRow {
            setting: typed(setting),
            knob: value,
            permitted: self.ground.permitted.iter().any(|piece| piece.surely_holds(&knob)),
            overshoot: at.figure(RequirementKind::Overshoot).value(),
            omega: swing.map(|swing| swing.pole.im),
            period: swing.map(Swing::period),
            damping: swing.map(Swing::damping),
            decay: swing.map(Swing::decay),
            settling: at.figure(RequirementKind::SettlingTime2).value(),
            room: edge.map(|edge| edge.knob / value),
            stop,
        })
    }
}

impl Way<'_> {
    /// The oscillation halfway from a knob to the edge, on a logarithmic scale; of a loop that gets better damped on the
    /// way there, halfway of what is left, and so on.
    fn stop(&self, knob: f64, edge: f64, decay: f64) -> Result<Option<StopSign>, ExactError> {
        let mut at = knob;
        for _ in 0..HALVES {
            at = self.sign() * libm::sqrt(at * edge);
            let Some(q) = Dyadic::from_f64(at) else { return Ok(None) };
            let there = LoopAt::new(self.ground.analysis.setup(), q.round_down(KNOB_BITS).to_rational())?;
            let swing = Swing::least_damped(there.poles()).filter(|swing| swing.decay() > decay);
            if let Some(swing) = swing {
                return Ok(Some(StopSign { period: swing.period(), decay: swing.decay() }));
            }
        }
        Ok(None)
    }
}

/// The oscillation of one pole pair.
#[derive(Clone, Copy, Debug)]
struct Swing {
    pole: Complex<f64>,
}

impl Swing {
    fn least_damped(poles: &[Complex<f64>]) -> Option<Self> {
        let pairs = poles.iter().filter(|p| p.im > 0.0).map(|pole| Self { pole: *pole });
        pairs.min_by(|a, b| a.damping().total_cmp(&b.damping()))
    }

    fn damping(self) -> f64 {
        -self.pole.re / libm::hypot(self.pole.re, self.pole.im)
    }

    fn period(self) -> f64 {
        core::f64::consts::TAU / self.pole.im
    }

    /// Each swing over the one a period before.
    fn decay(self) -> f64 {
        libm::exp(self.pole.re * self.period())
    }
}

#[cfg(test)]
mod tests {
    use crate::answer::Session;
    use crate::sheet::StepUpPlan;
    use alloc::format;
    use alloc::vec::Vec;

    fn plan(loop_: &str, setting: &str, rest: &str) -> StepUpPlan {
        let json =
            format!(r#"{{"format": "stayband-project/1", "loop": {loop_}, "knob": "K", "setting": {setting}{rest}}}"#);
        let answer = Session::new().sheet(&json, None);
        let record = answer.record.unwrap_or_else(|| panic!("{:?}", answer.problems));
        record.sheet.expect("a sheet").step_up
    }

    fn settings(plan: &StepUpPlan) -> Vec<&str> {
        plan.rows.iter().map(|row| row.setting.as_str()).collect()
    }

    const LAG: &str = r#"{"controller": "K", "plant": "1/(s (s + 7)(s + 11))"}"#;
    const ROLLER: &str = r#"{"controller": "K (0.12 s + 1)/(0.012 s + 1)", "plant": "14/((s - 3)(s + 9)(0.008 s + 1))", "sensor": "0.5"}"#;

    #[test]
    fn rows_grow_by_the_ratio_and_end_at_the_setting() {
        // The suggestion is half of 1386: 690 to two digits; its quarter is 172.5, 172 in three digits.
        let found = plan(LAG, r#"{"value": "690"}"#, r#", "stepUp": {"ratio": "2"}"#);
        assert_eq!(settings(&found), ["172", "344", "688", "690"]);
        let edge = found.edge.expect("an edge");
        assert!((edge.knob - 1386.0).abs() < 1e-9 && (edge.omega.expect("a frequency") - 77f64.sqrt()).abs() < 1e-9);
        let room = found.rows[1].room.expect("room");
        assert!((room - 1386.0 / 344.0).abs() < 1e-9);
        let stop = found.rows[1].stop.expect("a sign");
        assert!(stop.decay > found.rows[1].decay.expect("a pair") && stop.decay < 1.0);
    }

    #[test]
    fn a_loop_unstable_at_low_gain_starts_inside_and_says_so() {
        let found = plan(
            ROLLER,
            r#"{"value": "37", "step": "1"}"#,
            r#", "requirements": [{"kind": "step-error", "limit": "15"}]"#,
        );
        assert_eq!(settings(&found), ["30", "37"]);
        assert!(found.remarks.iter().any(|remark| remark.contains("unstable at low gain")), "{:?}", found.remarks);
        // Without requirements the quarter of the suggestion decides, or else the stable range itself.
        let free = plan(ROLLER, r#"{"value": "37", "step": "1"}"#, "");
        let first: f64 = free.rows[0].setting.parse().expect("a number");
        assert!(first > 27.0 / 7.0 && free.rows.len() > 3, "{:?}", settings(&free));
        assert!(free.rows.windows(2).all(|pair| pair[0].knob < pair[1].knob));
    }

    #[test]
    fn a_proportional_band_is_walked_downward() {
        let setting = r#"{"value": "20", "direction": "reciprocal", "factor": "100", "step": "1", "minimum": "1"}"#;
        let lag = r#"{"controller": "K", "plant": "2/((s + 1)(0.5 s + 1)(0.2 s + 1))"}"#;
        let found = plan(lag, setting, "");
        let bands: Vec<f64> = found.rows.iter().map(|row| row.setting.parse().expect("a number")).collect();
        assert!(bands.len() > 2 && bands.windows(2).all(|pair| pair[0] > pair[1]), "{bands:?}");
        assert_eq!(bands.last(), Some(&20.0));
    }

    #[test]
    fn a_start_beyond_the_controllers_range_is_its_end() {
        // A quarter of the suggestion would be a band far above 100 %.
        let setting = r#"{"value": "20", "direction": "reciprocal", "factor": "100", "step": "1", "minimum": "5", "maximum": "100"}"#;
        let lag = r#"{"controller": "K", "plant": "2/((s + 1)(0.5 s + 1)(0.2 s + 1))"}"#;
        let found = plan(lag, setting, "");
        assert_eq!((found.rows[0].setting.as_str(), found.rows.len() > 3), ("100", true), "{:?}", settings(&found));
    }

    #[test]
    fn a_negative_knob_is_walked_away_from_zero() {
        let found = plan(r#"{"controller": "K", "plant": "-1/(s (s + 7)(s + 11))"}"#, r#"{"value": "-690"}"#, "");
        assert!(found.rows.len() > 2 && found.rows.windows(2).all(|pair| pair[0].knob > pair[1].knob));
        assert!(found.rows.iter().all(|row| row.room.is_some_and(|room| room > 1.0)));
    }

    #[test]
    fn what_makes_no_plan_is_said() {
        assert!(plan(LAG, r#"{"value": "2000"}"#, "").rows.is_empty());
        assert!(plan(LAG, r#"{"value": "600"}"#, r#", "stepUp": {"ratio": "1"}"#).remarks[0].contains("ratio"));
        assert!(plan(LAG, r#"{"value": "600"}"#, r#", "stepUp": {"start": "700"}"#).remarks[0].contains("before"));
    }
}
