//! Reads loops with dead time as lines of JSON and writes what the core finds as lines of JSON, for the oracles.
//!
//! A line in: `{"task": "gain", "a": […], "b0": […], "b1": […], "deadTime": [numerator, denominator]}` with integer
//! coefficients, lowest power first; `"task": "delay"` takes `d` and `n`. A line out: the answer, or `{"error": …}`.

use serde_json::{Value, json};
use stayband_core::dead_time::gain::GainFamily;
use stayband_core::dead_time::{DeadTimeError, DeadTimePartition, delay};
use stayband_core::exact::IntPoly;
use std::io::{BufRead, Write, stdin, stdout};
use std::time::Instant;

fn main() -> std::io::Result<()> {
    let mut out = stdout().lock();
    for line in stdin().lock().lines() {
        let task: Value = serde_json::from_str(&line?)?;
        let start = Instant::now();
        let mut reply = answer(&task).unwrap_or_else(|error| json!({ "error": error.to_string() }));
        reply["milliseconds"] = json!(start.elapsed().as_secs_f64() * 1e3);
        writeln!(out, "{reply}")?;
        out.flush()?;
    }
    Ok(())
}

fn answer(task: &Value) -> Result<Value, DeadTimeError> {
    let poly = |name: &str| polynomial(&task[name]);
    match task["task"].as_str() {
        Some("gain") => {
            let family = GainFamily::new(&poly("a"), &poly("b0"), &poly("b1"), &rational(&task["deadTime"]))?;
            Ok(partition(&family.partition()?))
        }
        Some("delay") => Ok(partition(&delay::ranges(&poly("d"), &poly("n"))?)),
        _ => Ok(json!({ "error": "unknown task" })),
    }
}

fn partition(found: &DeadTimePartition) -> Value {
    json!({ "stability": found.stability(), "openBelow": found.open_below, "openAbove": found.open_above })
}

fn polynomial(value: &Value) -> IntPoly {
    let integer = |c: &Value| c.to_string().trim_matches('"').parse().unwrap_or_default();
    IntPoly::new(value.as_array().map_or_else(Vec::new, |all| all.iter().map(integer).collect()))
}

fn rational(value: &Value) -> dashu_ratio::RBig {
    let part = |i: usize| value[i].to_string().parse::<dashu_int::IBig>().unwrap_or_default();
    dashu_ratio::RBig::from_parts_signed(part(0), part(1))
}
