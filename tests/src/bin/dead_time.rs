//! Reads loops with dead time as lines of JSON and writes what the core finds as lines of JSON, for the oracles.
//!
//! A line in: a task with integer coefficients, lowest power first, and `"deadTime": [numerator, denominator]`. Tasks: `gain`
//! (`a`, `b0`, `b1`), `delay` (`d`, `n`), `poles` (`a`, `b`, `view`: left, right, top), `dominant` (`a`, `b`), `locus` (as
//! gain, with `view`), `response` (`a`, `b`, `outputs` with `above` and `lag`, `times`), `margins` (`above`, `below`,
//! `transfer`). A line out: the answer, or `{"error": …}`; always with `milliseconds`.

use serde_json::{Value, json};
use stayband_core::dead_time::frequency::DelayFrequency;
use stayband_core::dead_time::gain::GainFamily;
use stayband_core::dead_time::response::{Output, to_step};
use stayband_core::dead_time::{DeadTimeError, DeadTimePartition, Quasi, branches, delay, landmarks, poles};
use stayband_core::exact::IntPoly;
use stayband_core::record::{Root, View};
use stayband_core::response::OpenLoop;
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
    let time = rational(&task["deadTime"]);
    let quasi = || Quasi::new(&poly("a"), &poly("b"), &time);
    let family = || GainFamily::new(&poly("a"), &poly("b0"), &poly("b1"), &time);
    match task["task"].as_str() {
        Some("gain") => Ok(partition(&family()?.partition()?)),
        Some("delay") => Ok(partition(&delay::ranges(&poly("d"), &poly("n"))?)),
        Some("poles") => Ok(json!({ "poles": roots(&poles::in_view(&quasi(), &view(task))?) })),
        Some("dominant") => Ok(json!({ "poles": roots(&poles::dominant(&quasi())?) })),
        Some("locus") => {
            let (family, view) = (family()?, view(task));
            let found = branches::branches(&family, &view)?;
            let points = |b: &stayband_core::locus::Branch| -> Vec<[f64; 3]> {
                b.points.iter().map(|p| [p.re, p.im, p.knob]).collect()
            };
            let all: Vec<Value> = found.iter().map(|b| json!({ "sign": b.sign, "points": points(b) })).collect();
            let marks = landmarks::landmarks(&family, &family.partition()?, &view)?;
            Ok(json!({ "branches": all, "landmarks": marks }))
        }
        Some("response") => response(task, &poly("a"), &poly("b"), &time),
        Some("margins") => {
            let closed = poles::dominant(&Quasi::new(&poly("below"), &poly("above"), &time))?;
            let resonances = closed.iter().map(|r| nalgebra::Complex::new(r.re, r.im));
            let f = DelayFrequency::new(&poly("above"), &poly("below"), &time, &poly("transfer"), resonances);
            Ok(json!({
                "gainUp": f.gain_up()?, "gainDown": f.gain_down()?, "phase": f.phase_margin()?,
                "delay": f.delay_margin()?, "peak": f.peak()?, "bandwidth": f.bandwidth()?,
                "points": f.response()?.omega.len(),
            }))
        }
        _ => Ok(json!({ "error": "unknown task" })),
    }
}

fn response(task: &Value, a: &IntPoly, b: &IntPoly, time: &dashu_ratio::RBig) -> Result<Value, DeadTimeError> {
    let output = |o: &Value| Output { above: polynomial(&o["above"]), lag: o["lag"].as_f64().unwrap_or(0.0) };
    let outputs: Vec<Output> = task["outputs"].as_array().map_or_else(Vec::new, |all| all.iter().map(output).collect());
    let times: Vec<f64> =
        task["times"].as_array().map_or_else(Vec::new, |all| all.iter().filter_map(Value::as_f64).collect());
    let traces = to_step(a, b, time, &outputs)?;
    let of = |trace: &stayband_core::response::Trace| {
        let peaks = trace.peaks();
        json!({
            "final": trace.final_value, "values": times.iter().map(|t| trace.value(*t)).collect::<Vec<f64>>(),
            "points": trace.points().len(), "end": trace.points().last().map(|p| p.time),
            "highest": peaks.map(|p| p.highest), "lowest": peaks.map(|p| p.lowest),
            "settled": trace.last_outside(0.02 * trace.final_value.abs()),
        })
    };
    Ok(json!({ "outputs": traces.iter().map(of).collect::<Vec<Value>>() }))
}

fn roots(found: &[Root]) -> Vec<(f64, f64, f64, usize)> {
    found.iter().map(|r| (r.re, r.im, r.radius, r.multiplicity)).collect()
}

fn view(task: &Value) -> View {
    let at = |i: usize| task["view"][i].as_f64().unwrap_or(1.0);
    View { re: [at(0), at(1)], im: [-at(2), at(2)] }
}

fn partition(found: &DeadTimePartition) -> Value {
    json!({ "stability": found.stability(), "openBelow": found.open_below, "openAbove": found.open_above })
}

fn polynomial(value: &Value) -> IntPoly {
    let integer = |c: &Value| c.to_string().trim_matches('"').parse().unwrap_or_default();
    IntPoly::new(value.as_array().map_or_else(Vec::new, |all| all.iter().map(integer).collect()))
}

/// [numerator, denominator]; 1 where there is none.
fn rational(value: &Value) -> dashu_ratio::RBig {
    let part = |i: usize| value[i].to_string().parse::<dashu_int::IBig>().unwrap_or(dashu_int::IBig::ONE);
    dashu_ratio::RBig::from_parts_signed(part(0), part(1))
}
