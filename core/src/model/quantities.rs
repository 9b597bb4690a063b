//! The rows of the quantities table: every name gets its exact value, or the user gets to know what is missing.

use crate::answer::{Field, Problem};
use crate::notation;
use crate::project::{Project, Quantity};
use alloc::collections::btree_map::Entry;
use alloc::collections::{BTreeMap, BTreeSet};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// What the names in the blocks stand for.
pub(super) struct Quantities {
    /// The quantity left to choose. None where none is chosen.
    pub(super) knob: Option<String>,
    /// Values by canonical name, for the names used in the blocks.
    pub(super) values: BTreeMap<String, Value>,
}

/// The value of a quantity.
pub(super) struct Value {
    /// The exact value.
    pub(super) exact: RBig,
    /// The decimal as typed.
    pub(super) typed: String,
}

/// Reads the table for the names used in the blocks.
pub(super) fn read(project: &Project, used: &[String]) -> (Quantities, Vec<Problem>) {
    let (knob, knob_problem) = knob(&project.knob);
    let mut problems = Vec::new();
    let mut rows: BTreeMap<String, &Quantity> = BTreeMap::new();
    let mut repeated = BTreeSet::new();
    for row in &project.quantities {
        if row.symbol.trim() == "s" {
            let message = "s is the Laplace variable and has no value: remove this row";
            problems.push(row_problem(&row.symbol, None, message.to_string()));
        }
        // A row whose symbol is no name cannot be used by a block.
        let Ok(symbol) = notation::symbol(&row.symbol) else {
            continue;
        };
        match rows.entry(symbol.clone()) {
            Entry::Vacant(free) => {
                free.insert(row);
            }
            Entry::Occupied(_) if repeated.insert(symbol.clone()) => {
                problems.push(row_problem(&row.symbol, None, format!("{symbol} stands in two rows: keep one")));
            }
            Entry::Occupied(_) => {}
        }
    }
    let mut values = BTreeMap::new();
    for name in used.iter().filter(|name| Some(*name) != knob.as_ref()) {
        match rows.get(name).filter(|row| !row.value.trim().is_empty()) {
            Some(row) => match notation::decimal(&row.value) {
                Ok(exact) => {
                    values.insert(name.clone(), Value { exact, typed: row.value.trim().to_string() });
                }
                Err(error) => {
                    problems.push(row_problem(&row.symbol, Some(error.span().into()), error.to_string()));
                }
            },
            // Without a knob the name may well be the one left to choose.
            None if knob.is_none() => {}
            None => problems.push(row_problem(name, None, missing_value(name))),
        }
    }
    problems.extend(knob_problem);
    (Quantities { knob, values }, problems)
}

fn row_problem(symbol: &str, span: Option<[usize; 2]>, message: String) -> Problem {
    Problem { field: Field::Quantity, symbol: Some(symbol.to_string()), span, message }
}

/// `s2` is most likely a power that lost its sign on the way through the clipboard.
fn missing_value(name: &str) -> String {
    let ask = format!("give a value for {name}: type a number in the quantities table");
    match name.strip_prefix('s') {
        Some(digits) if digits.bytes().all(|byte| byte.is_ascii_digit()) => {
            format!("{ask}, or s^{digits} for the power")
        }
        _ => ask,
    }
}

fn knob(text: &str) -> (Option<String>, Option<Problem>) {
    let problem =
        |message: &str| Problem { field: Field::Knob, symbol: None, span: None, message: message.to_string() };
    match text.trim() {
        "" => (None, Some(problem("choose the knob: the quantity left to choose"))),
        "s" => (None, Some(problem("s is the Laplace variable: choose a quantity as the knob"))),
        name => match notation::symbol(name) {
            Ok(symbol) => (Some(symbol), None),
            Err(error) => (None, Some(problem(&format!("choose one quantity as the knob: {error}")))),
        },
    }
}
