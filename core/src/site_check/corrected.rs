//! The project with the correction put in, and its ranges.

use super::Change;
use crate::answer::Session;
use crate::project::{Project, SiteCheckText};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;

/// Digits of the correction as it is written into the project.
const DIGITS: usize = 4;

/// A dead time below this part of the observed period is left out: nobody reads a record so well.
const NO_DEAD_TIME: f64 = 1e-3;

#[derive(Default)]
pub(super) struct Corrected {
    pub(super) project: Option<Project>,
    pub(super) stable: Vec<[Option<f64>; 2]>,
    pub(super) permitted: Vec<[Option<String>; 2]>,
    pub(super) remark: Option<String>,
}

/// The plant times the gain factor, the dead time added to the one there is.
pub(super) fn corrected(project: &Project, change: Change, own: f64, period: f64) -> Corrected {
    let mut found = project.clone();
    found.site_check = SiteCheckText::default();
    found.title =
        if project.title.is_empty() { String::new() } else { format!("{} (corrected on site)", project.title) };
    let gain = decimal(change.gain);
    if gain != "1" {
        found.blocks.plant = format!("{gain} ({})", project.blocks.plant);
    }
    if change.dead_time.abs() > NO_DEAD_TIME * period {
        let size = decimal(change.dead_time.abs());
        let old = project.blocks.dead_time.trim();
        found.blocks.dead_time = match (old.is_empty(), change.dead_time > 0.0) {
            (true, true) => size,
            (false, true) => format!("{old} + {size}"),
            (false, false) if own + change.dead_time > NO_DEAD_TIME * period => format!("{old} - {size}"),
            (false, false) => String::new(),
            (true, false) => {
                let remark = "the machine is faster than the model: take lag out of the model by hand".to_string();
                return Corrected { remark: Some(remark), ..Corrected::default() };
            }
        };
    }
    let document = serde_json::to_string(&found).unwrap_or_default();
    let answer = Session::new().solve(&document, None).answer;
    let mut corrected = Corrected { project: Some(found), ..Corrected::default() };
    match answer.record {
        Some(record) => {
            let ends = |range: &crate::record::StabilityRange| {
                [&range.from, &range.to].map(|edge| edge.as_ref().map(|edge| edge.value))
            };
            corrected.stable = record.stability.iter().filter(|range| range.stable).map(ends).collect();
            corrected.permitted = record.permitted.setting;
        }
        None => {
            let messages: Vec<String> = answer.problems.into_iter().map(|problem| problem.message).collect();
            corrected.remark = Some(format!("no new ranges: {}", messages.join("; ")));
        }
    }
    corrected
}

/// A positive number as a decimal of the notation.
fn decimal(value: f64) -> String {
    let text = format!("{value:.*e}", DIGITS - 1);
    let (mantissa, exponent) = text.split_once('e').unwrap_or((&text, "0"));
    let exponent: i32 = exponent.parse().unwrap_or(0);
    if !(-4..=6).contains(&exponent) {
        return text;
    }
    let decimals = (DIGITS as i32 - 1 - exponent).max(0) as usize;
    let rounded: f64 = format!("{mantissa}e{exponent}").parse().unwrap_or(value);
    let plain = format!("{rounded:.decimals$}");
    if plain.contains('.') { plain.trim_end_matches('0').trim_end_matches('.').to_string() } else { plain }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn corrections_are_written_in_four_digits() {
        assert_eq!(
            [1.0, 0.93456, 12.3456, 1e-7, 0.000_012].map(decimal),
            ["1", "0.9346", "12.35", "1.000e-7", "1.200e-5"]
        );
    }
}
