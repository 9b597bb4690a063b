//! The model: from the blocks as typed and the table of quantities to the characteristic polynomial.
//!
//! Every number is exact: typed decimals become rationals, and F(s, q) has integer coefficients. F is the denominator of
//! the open loop plus (negative feedback) or minus (positive feedback) its numerator, over the greatest common divisor of
//! its integers and over any factor in the knob q alone; where the highest power of s meets the lowest power of q, its
//! coefficient is positive. The knob itself is not scaled: in the affine case F = D + q N.

mod characteristic;
mod display;
mod evaluate;
mod factors;
mod polynomial;
mod quantities;
mod ratio;
#[cfg(test)]
mod tests;

pub use display::formula;
pub use factors::Factor;
pub use polynomial::KnobPolynomial;
pub use ratio::Ratio;

use crate::answer::{Field, Problem};
use crate::notation::{self, Expression, NotationError};
use crate::project::Project;
use crate::record::{ModelRecord, Notice, NoticeKind, Reading};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;
use evaluate::{Block, evaluate};

/// The highest order of a loop. Up to here the exact methods are tried and fast.
pub const MAXIMUM_ORDER: usize = 40;

/// The highest power of the knob in the characteristic polynomial. Products of three gains give 3; 12 leaves room, and
/// keeps the expanded polynomials small.
pub const MAXIMUM_KNOB_DEGREE: usize = 12;

/// The most bits of an integer in the model. A loop of order 40 with time constants of 1e-9 needs about 2400; the exact
/// methods slow down with the square of this.
pub const MAXIMUM_BITS: usize = 8192;

/// The loop, ready for analysis.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Loop {
    /// The knob's canonical symbol.
    pub knob: String,
    /// The chosen knob value, if one was typed.
    pub setting: Option<RBig>,
    /// Controller times plant times sensor, in factors as typed.
    pub open_loop: Ratio,
    /// F(s, q), of order 1 or more. Normalised as the module's head says.
    pub characteristic: KnobPolynomial,
    /// A factor in the knob alone that was divided out of F, as text. Where it is zero, the loop as typed makes no
    /// sense.
    pub knob_factor: Option<String>,
    /// Warnings about the blocks.
    pub notices: Vec<Notice>,
}

/// The three blocks of a project with their fields, names and texts.
fn blocks(project: &Project) -> [(Field, &'static str, &str); 3] {
    [
        (Field::Controller, "controller", &project.blocks.controller),
        (Field::Plant, "plant", &project.blocks.plant),
        (Field::Sensor, "sensor", &project.blocks.sensor),
    ]
}

/// What can be read of the blocks, each by itself; also where others have faults.
#[must_use]
pub fn reading(project: &Project) -> Reading {
    let read = blocks(project).map(|(_, _, text)| notation::read(text).ok());
    let names = names(read.iter().flatten());
    let [controller, plant, sensor] = read.map(|block| block.as_ref().map(notation::mathml));
    Reading { controller, plant, sensor, names }
}

/// The names in all blocks, in order of first appearance.
fn names<'a>(expressions: impl Iterator<Item = &'a Expression>) -> Vec<String> {
    let mut found: Vec<String> = Vec::new();
    for name in expressions.flat_map(notation::names) {
        if !found.contains(&name) {
            found.push(name);
        }
    }
    found
}

/// Builds the loop from everything typed.
///
/// # Errors
/// All that must be put right, in the order of the form.
pub fn build(project: &Project) -> Result<Loop, Vec<Problem>> {
    let texts = blocks(project);
    let read = texts.map(|(_, _, text)| notation::read(text));
    let used = names(read.iter().flatten());
    let (quantities, table_problems) = quantities::read(project, &used);

    let mut problems = Vec::new();
    let mut ratios = Vec::new();
    for ((field, _, text), expression) in texts.iter().zip(&read) {
        let evaluated = match expression {
            Ok(expression) => evaluate(&Block { field: *field, text, expression }, &quantities),
            Err(error) => Err([fault(*field, error)].into()),
        };
        match evaluated {
            Ok(ratio) => ratios.push(ratio),
            Err(found) => problems.extend(found),
        }
    }
    problems.extend(table_problems);
    let setting = setting(&project.setting.value).unwrap_or_else(|problem| {
        problems.push(problem);
        None
    });
    let ([controller, plant, sensor], Some(knob)) = (ratios.as_slice(), quantities.knob) else {
        return Err(problems);
    };
    if !problems.is_empty() {
        return Err(problems);
    }

    let about_loop = |message| [Problem { field: Field::Loop, symbol: None, span: None, message }].to_vec();
    let open_loop = controller.times(plant).and_then(|path| path.times(sensor));
    let open_loop = open_loop.map_err(|excess| about_loop(characteristic::too_large(excess)))?;
    let found = characteristic::characteristic(&open_loop, project.blocks.feedback).map_err(about_loop)?;
    let mut notices: Vec<Notice> =
        texts.iter().zip(&ratios).filter_map(|((_, name, _), ratio)| improper(name, ratio)).collect();
    if found.loses_order {
        let text = "algebraic loop: at high frequencies the loop returns exactly its own signal at every setting; add a \
                    filter pole, such as 1/(0.01 s + 1)";
        notices.push(Notice { kind: NoticeKind::AlgebraicLoop, text: text.to_string() });
    }
    let knob_factor = found.knob_factor.map(|factor| display::formula(&factor, &knob));
    Ok(Loop { knob, setting, open_loop, characteristic: found.polynomial, knob_factor, notices })
}

fn fault(field: Field, error: &NotationError) -> Problem {
    Problem { field, symbol: None, span: Some(error.span().into()), message: error.to_string() }
}

/// The typed setting; None where nothing is typed.
fn setting(text: &str) -> Result<Option<RBig>, Problem> {
    if text.trim().is_empty() {
        return Ok(None);
    }
    notation::decimal(text).map(Some).map_err(|error| fault(Field::Setting, &error))
}

/// A warning about a block with more zeros than poles.
fn improper(name: &str, ratio: &Ratio) -> Option<Notice> {
    let (zeros, poles) = (ratio.zero_count(), ratio.pole_count());
    let missing = zeros.checked_sub(poles).filter(|missing| *missing > 0)?;
    let counted = |count: u64, one: &str| format!("{count} {one}{}", if count == 1 { "" } else { "s" });
    let text = format!(
        "the {name} is improper, with {} and {}: no device can be built like that; add {}, such as 1/(0.01 s + 1)",
        counted(zeros, "zero"),
        counted(poles, "pole"),
        counted(missing, "filter pole"),
    );
    Some(Notice { kind: NoticeKind::ImproperBlock, text })
}

/// The characteristic polynomial for the record.
#[must_use]
pub fn record(model: &Loop) -> ModelRecord {
    let polynomial = &model.characteristic;
    let row = |row: &Vec<dashu_int::IBig>| row.iter().map(ToString::to_string).collect();
    ModelRecord {
        order: polynomial.order(),
        knob_degree: polynomial.knob_degree(),
        coefficients: polynomial.coefficients().iter().map(row).collect(),
        mathml: display::equation(polynomial, &model.knob),
    }
}
