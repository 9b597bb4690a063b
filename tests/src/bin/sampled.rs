//! Reads projects with sampling as lines of JSON and writes what Stayband finds of them as lines of JSON, for the oracle.
//!
//! A line out: `{"stability": …, "setting": …, …}`, or `{"trouble": "…"}`. The setting is the knob.

use dashu_ratio::RBig;
use serde_json::{Value, json};
use stayband_core::model::build;
use stayband_core::project::Project;
use stayband_core::response::Trace;
use stayband_core::sampled::period::{by_period, longest_period};
use stayband_core::sampled::{SampledAt, SampledLoop, SampledRanges, Trouble, locus, ranges, warnings};
use std::collections::HashMap;
use std::io::{BufRead, Write, stdin, stdout};
use std::time::Instant;

fn main() -> std::io::Result<()> {
    let mut out = stdout().lock();
    for line in stdin().lock().lines() {
        let reply = solved(&line?).unwrap_or_else(|text| json!({ "trouble": text }));
        writeln!(out, "{reply}")?;
        out.flush()?;
    }
    Ok(())
}

fn solved(line: &str) -> Result<Value, String> {
    let project: Project = serde_json::from_str(line).map_err(|error| error.to_string())?;
    let model = build(&project).map_err(|problems| format!("{problems:?}"))?;
    let sampling = model.sampling.as_ref().ok_or("no sampling")?;
    let told = |trouble: Trouble| format!("{trouble:?}");
    let mut clock = Clock { start: Instant::now(), laps: Vec::new() };
    let input = SampledLoop::new(&model, sampling).map_err(told)?;
    let found = ranges(&input).map_err(told)?;
    clock.lap("ranges");
    let drawn = locus(&found).map_err(|error| error.to_string());
    clock.lap("locus");
    let mut reply = json!({
        "stability": found.partition.stability(),
        "unresolved": found.unresolved,
        "bits": found.bits,
        "lost": drawn.as_ref().map_or(json!(2), |drawn| json!(drawn.lost.len())),
        "openPoles": drawn.as_ref().map_or(Value::Null, |drawn| json!(drawn.poles)),
    });
    if let Some(setting) = &model.setting {
        reply["setting"] = at_setting(&found, setting.clone(), &mut clock)?;
        reply["longestPeriod"] = json!(longest_period(&input, setting));
        clock.lap("longest period");
    }
    reply["byPeriod"] = json!(by_period(&found));
    clock.lap("by period");
    reply["warnings"] = json!(warnings::of_the_plant(&input));
    reply["milliseconds"] = json!(clock.laps.iter().cloned().collect::<HashMap<_, _>>());
    Ok(reply)
}

/// Measures the parts.
struct Clock {
    start: Instant,
    laps: Vec<(&'static str, f64)>,
}

impl Clock {
    fn lap(&mut self, name: &'static str) {
        self.laps.push((name, 1e3 * self.start.elapsed().as_secs_f64()));
        self.start = Instant::now();
    }
}

/// Times off any grid at which answers are told, in sample periods.
const LOOKS: [f64; 8] = [0.137, 0.5, 0.983, 1.211, 2.777, 4.04, 7.59, 12.31];

fn at_setting(found: &SampledRanges, knob: RBig, clock: &mut Clock) -> Result<Value, String> {
    let at = SampledAt::new(found, knob).map_err(|error| error.to_string())?;
    clock.lap("poles");
    let mut reply = json!({
        "stable": at.is_stable(),
        "poles": at.poles.iter().map(|z| [z.re, z.im]).collect::<Vec<_>>(),
        "dampingRatio": at.damping_ratio(),
        "staticErrors": [at.static_error(0), at.static_error(1), at.static_error(2)],
    });
    clock.lap("stable");
    if let Some(answers) = at.answers() {
        let read = |trace: &Trace| LOOKS.map(|k| trace.value(k * at.period()));
        reply["output"] = json!({ "values": read(&answers.output), "final": answers.output.final_value });
        reply["control"] = json!({ "values": read(&answers.control), "final": answers.control.final_value });
        reply["load"] = json!({ "values": read(&answers.load), "final": answers.load.final_value });
        reply["points"] = json!(answers.output.points().len());
    }
    clock.lap("answers");
    if let Some(frequency) = at.frequency() {
        let told = |error: stayband_core::exact::ExactError| error.to_string();
        reply["margins"] = json!({
            "gainUp": frequency.gain_up().map_err(told)?,
            "gainDown": frequency.gain_down().map_err(told)?,
            "gainCrossings": frequency.gain_crossings().map_err(told)?,
            "phaseCrossings": frequency.phase_crossings().map_err(told)?,
            "peak": frequency.peak(),
            "bandwidth": frequency.bandwidth().map_err(told)?,
        });
        reply["curvePoints"] = json!(frequency.response().map_err(told)?.omega.len());
    }
    clock.lap("frequency");
    Ok(reply)
}
