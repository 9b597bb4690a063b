//! Inputs that are one number: an expression in numbers and quantities, with neither s nor z.

use super::dead_time::DeadTime;
use super::evaluate::{Block, Variable, evaluate};
use super::polynomial::KnobPolynomial;
use super::quantities::Quantities;
use super::ratio::Ratio;
use crate::answer::{Field, Problem};
use crate::notation;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// A number that does not depend on the knob; None where nothing is typed. `part` is the input's name in the document.
///
/// # Errors
/// What is wrong, told at that input.
pub(super) fn number(
    field: Field,
    part: &str,
    text: &str,
    quantities: &Quantities,
) -> Result<Option<RBig>, Vec<Problem>> {
    let Some(ratio) = ratio(field, Some(part), text, quantities)? else { return Ok(None) };
    if ratio.numerator.is_empty() && ratio.denominator.is_empty() && ratio.dead_time.is_none() {
        return Ok(Some(ratio.constant));
    }
    let message = "this must be a number: use quantities with values, neither s, z nor the knob".to_string();
    Err([problem(field, Some(part), message)].into())
}

/// The field Dead time: a number, or one that grows in proportion to the knob.
///
/// # Errors
/// What is wrong, told at the field.
pub(super) fn dead_time(text: &str, quantities: &Quantities) -> Result<DeadTime, Vec<Problem>> {
    let complain = |message: &str| [problem(Field::DeadTime, None, message.to_string())].into();
    let Some(ratio) = ratio(Field::DeadTime, None, text, quantities)? else { return Ok(DeadTime::default()) };
    let found = in_knob(&ratio).filter(|_| ratio.dead_time.is_none());
    let found = found.ok_or_else(|| complain("type a time in seconds, such as 0.2, or the name of a quantity"))?;
    if !found.is_possible() {
        return Err(complain("a dead time is never negative: type the time as a positive number"));
    }
    Ok(found)
}

/// A ratio that is a polynomial of degree 0 or 1 in the knob, with no s in it, as a dead time.
fn in_knob(ratio: &Ratio) -> Option<DeadTime> {
    if !ratio.denominator.is_empty() || ratio.zero_count() > 0 {
        return None;
    }
    let (above, below) = ratio.polynomials().ok()?;
    affine(&above, &below, 0)
}

/// The coefficient of s^power over a constant, as a polynomial of degree 0 or 1 in the knob.
pub(super) fn affine(above: &KnobPolynomial, below: &KnobPolynomial, power: usize) -> Option<DeadTime> {
    if !below.is_constant() || below.is_zero() || above.knob_degree() > 1 {
        return None;
    }
    let (row, unit) = (above.coefficient_of(power), below.coefficient_of(0).coefficient(0));
    let part = |k: usize| RBig::from(row.coefficient(k)) / RBig::from(unit.clone());
    Some(DeadTime { fixed: part(0), per_knob: part(1) })
}

fn ratio(field: Field, part: Option<&str>, text: &str, quantities: &Quantities) -> Result<Option<Ratio>, Vec<Problem>> {
    if text.trim().is_empty() {
        return Ok(None);
    }
    let symbol = part.map(String::from);
    let expression = notation::read(text).map_err(|error| {
        let span = Some(error.span().into());
        Vec::from([Problem { field, symbol: symbol.clone(), span, message: error.to_string() }])
    })?;
    let block = Block { field, text, expression: &expression, variable: Variable::Laplace };
    let found = evaluate(&block, quantities).map_err(|mut found| {
        found.iter_mut().for_each(|problem| problem.symbol = symbol.clone());
        found
    })?;
    Ok(Some(found))
}

fn problem(field: Field, part: Option<&str>, message: String) -> Problem {
    Problem { field, symbol: part.map(String::from), span: None, message }
}
