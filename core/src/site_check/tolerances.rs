//! Stated tolerances: reading them, and what they allow the open loop to be off at one frequency.

use crate::answer::{Field, Problem};
use crate::exact::ExactError;
use crate::model;
use crate::notation;
use crate::project::{Project, Quantity};
use crate::response::{LoopAt, Setup};
use crate::sheet::Allowed;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;
use nalgebra::Complex;

/// Checks all tolerances of a project.
///
/// # Errors
/// What must be put right, at its row.
pub fn check(project: &Project) -> Result<(), Vec<Problem>> {
    let problems: Vec<Problem> = project.quantities.iter().filter_map(|row| read(row).err()).collect();
    if problems.is_empty() { Ok(()) } else { Err(problems) }
}

/// How far a value may be off in either direction, in its own unit; None where nothing is stated.
fn read(row: &Quantity) -> Result<Option<RBig>, Problem> {
    let fail =
        |message: String| Problem { field: Field::Quantity, symbol: Some(row.symbol.clone()), span: None, message };
    let text = row.tolerance.trim().trim_start_matches('±');
    if text.is_empty() {
        return Ok(None);
    }
    let (number, relative) = match text.strip_suffix('%') {
        Some(number) => (number, true),
        None => (text, false),
    };
    let wrong = "type the tolerance as a percentage such as 5 %, or as a number above zero in the quantity's unit";
    let number = notation::decimal(number).ok().filter(|number| *number > RBig::ZERO);
    let number = number.ok_or_else(|| fail(wrong.to_string()))?;
    if !relative {
        return Ok(Some(number));
    }
    let value = notation::decimal(&row.value).unwrap_or(RBig::ZERO);
    let size = if value < RBig::ZERO { -value } else { value };
    Ok(Some(number * size / RBig::from(100)))
}

/// What the tolerances allow gain and lag to be off at ω, one quantity after the other; None where none are stated.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub(super) fn allowed(project: &Project, at: &LoopAt, omega: f64) -> Result<Option<Allowed>, ExactError> {
    let here = at.open_loop_at(Complex::new(0.0, omega));
    let own = dead_time(project, at);
    let (mut gain, mut lag) = ([0.0_f64; 2], [0.0_f64; 2]);
    let mut stated = false;
    for (i, row) in project.quantities.iter().enumerate().filter(|(_, row)| row.symbol.trim() != project.knob.trim()) {
        let Ok(Some(off)) = read(row) else { continue };
        let Ok(value) = notation::decimal(&row.value) else { continue };
        stated = true;
        let (mut own_gain, mut own_lag) = ([0.0_f64; 2], [0.0_f64; 2]);
        for value in [&value - &off, &value + &off] {
            let mut changed = project.clone();
            changed.quantities[i].value = written(&value);
            // At such a value the loop makes no sense: no machine is there.
            let Ok(model) = model::build(&changed) else { continue };
            let there = LoopAt::new(Setup::from(&model), at.knob.clone())?.open_loop_at(Complex::new(0.0, omega));
            let ratio = there / here;
            let time = model.open_loop.dead_time.at(&at.knob).to_f64().value() - own;
            widen(&mut own_gain, libm::log(libm::hypot(ratio.re, ratio.im)));
            widen(&mut own_lag, time - libm::atan2(ratio.im, ratio.re) / omega);
        }
        for side in 0..2 {
            gain[side] += own_gain[side];
            lag[side] += own_lag[side];
        }
    }
    Ok(stated.then(|| Allowed { gain: gain.map(libm::exp), dead_time: lag }))
}

fn dead_time(project: &Project, at: &LoopAt) -> f64 {
    model::build(project).map_or(0.0, |model| model.open_loop.dead_time.at(&at.knob).to_f64().value())
}

fn widen(range: &mut [f64; 2], value: f64) {
    if value.is_finite() {
        *range = [range[0].min(value), range[1].max(value)];
    }
}

/// A number for the quantities table. What has no short decimal is a product of decimals, so that this is exact.
fn written(value: &RBig) -> String {
    crate::exact::dyadic::decimal_below(value, 30)
}
