//! Reads projects with sampling as lines of JSON and writes what Stayband finds of them as lines of JSON, for the oracle.
//!
//! A line out: `{"stability": [...], "unresolved": [...], "bits": n}`, or `{"trouble": "..."}`.

use serde_json::{Value, json};
use stayband_core::model::build;
use stayband_core::project::Project;
use stayband_core::sampled::{SampledLoop, Trouble, ranges};
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
    let start = Instant::now();
    let input = SampledLoop::new(&model, sampling).map_err(told)?;
    let found = ranges(&input).map_err(told)?;
    let milliseconds = 1e3 * start.elapsed().as_secs_f64();
    Ok(json!({
        "stability": found.partition.stability(),
        "unresolved": found.unresolved,
        "bits": found.bits,
        "milliseconds": milliseconds,
    }))
}
