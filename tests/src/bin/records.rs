//! Reads projects as lines of JSON and writes Stayband's answers as lines of JSON, for the oracles.
//!
//! With the argument `--sheet` the records hold what the printed sheet needs, and the branches are left out.
//!
//! A line in: a project. A line out: `{"answer": …, "branches": [{"sign", "points": [[re, im, knob], …]}, …]}`; what is not finite,
//! such as the knob at a zero, is null.

use serde_json::{Value, json};
use stayband_core::answer::Session;
use stayband_core::locus::Branch;
use std::io::{BufRead, Write, stdin, stdout};

fn main() -> std::io::Result<()> {
    let with_sheet = std::env::args().any(|argument| argument == "--sheet");
    let mut session = Session::new();
    let mut out = stdout().lock();
    for line in stdin().lock().lines() {
        let line = line?;
        let reply = if with_sheet {
            json!({ "answer": session.sheet(&line, None) })
        } else {
            let solved = session.solve(&line, None);
            let branches: Vec<Value> = solved.branches.iter().map(branch_json).collect();
            json!({ "answer": solved.answer, "branches": branches })
        };
        writeln!(out, "{reply}")?;
        out.flush()?;
    }
    Ok(())
}

/// A branch with its vertices as triples.
fn branch_json(branch: &Branch) -> Value {
    let points: Vec<[f64; 3]> = branch.points.iter().map(|point| [point.re, point.im, point.knob]).collect();
    json!({ "sign": branch.sign, "points": points })
}
