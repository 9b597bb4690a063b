//! The derivation for a check by hand: what was solved for every claimed edge, from the same exact objects that the ranges
//! come from, so that the numbers cannot disagree.
//!
//! The Routh array goes with the knob in it: E. J. Routh 1877 (see [`routh`]). That an edge of stability needs a zero of
//! the highest coefficient, of the constant one, or of the last Hurwitz determinant but one: L. Orlando, Mathematische
//! Annalen 71, 1911. Rules for the locus: W. R. Evans, Transactions of the AIEE 67, 1948.

mod axis;
mod conditions;
mod locus_rules;
mod range_checks;
mod requirement_steps;
pub mod routh;
mod written;

use crate::analysis::Analysis;
use crate::exact::{ExactError, IntPoly};
use crate::model::Variables;
use crate::ranges::requirements::Limit;
use crate::ranges::{Family, Partition};
use crate::sheet::{Derivation, RouthRow, RouthTable, SpecialCase};
use alloc::format;
use alloc::string::String;
use alloc::vec::Vec;
use routh::{Array, Row, Special};

/// The order up to which the array is written with the knob in it. Beyond, its elements fill a page each.
const ROUTH_ORDER: usize = 8;

/// Likewise for the order times the degree in the knob, which is the degree of the last elements.
const ROUTH_DEGREE: usize = 12;

/// What the derivation speaks of.
struct Ground<'a> {
    analysis: &'a Analysis,
    family: &'a Family,
    partition: &'a Partition,
    /// The knob's name.
    knob: &'a str,
}

/// The derivation of an analysed loop; None where it is no ratio of polynomials in s.
///
/// # Errors
/// From the exact methods, when a cap is met.
pub fn derivation(analysis: &Analysis, limits: &[Limit]) -> Result<Option<Derivation>, ExactError> {
    let Some((family, partition)) = analysis.rational() else { return Ok(None) };
    let knob = analysis.model.knob.as_str();
    let ground = &Ground { analysis, family, partition, knob };
    let names = Variables { main: "s", knob };
    let (routh, routh_remark) = arrays(family, knob);
    Ok(Some(Derivation {
        affine: family.affine().map(|(d, n)| [d, n].map(|part| written::in_variable(part, "s"))),
        moving: written::polynomial(&written::family(&family.parts), names),
        fixed: (family.fixed.degree() > 0).then(|| written::in_variable(&family.fixed, "s")),
        routh,
        routh_remark,
        conditions: conditions::conditions(ground)?,
        axis: axis::equations(ground)?,
        edges: partition.stability_places().into_iter().map(|i| partition.edge(i)).collect(),
        ranges: range_checks::checks(ground)?,
        asymptotes: locus_rules::asymptotes(ground),
        breakaway: locus_rules::breakaway(ground)?,
        directions: locus_rules::directions(ground),
        requirements: limits.iter().map(|limit| requirement_steps::step(ground, limit)).collect::<Result<_, _>>()?,
    }))
}

/// The arrays with the knob in them, or why there are none.
fn arrays(family: &Family, knob: &str) -> (Vec<RouthTable>, Option<String>) {
    let order = family.moving_order();
    if order > ROUTH_ORDER || order * family.knob_degree() > ROUTH_DEGREE {
        let remark = format!(
            "of order {order} and degree {} in {knob} the array with {knob} in it is too long for paper; it is given at one \
             number in every range",
            family.knob_degree()
        );
        return (Vec::new(), Some(remark));
    }
    let coefficients: Vec<IntPoly> = (0..=order).map(|i| family.in_knob(i)).collect();
    let found = routh::arrays(&coefficients);
    let remark = found.last().is_some_and(|array| !array.is_complete()).then(|| {
        "the first element of a row is zero, and no added pole helps; the counts of the ranges are proven by another method"
            .into()
    });
    (found.iter().map(|array| table(array, knob)).collect(), remark)
}

fn table(array: &Array, knob: &str) -> RouthTable {
    let element = |row: &Row, j: usize| {
        let (above, below) = row.element(j);
        written::ratio(&above, &below, knob)
    };
    let rows = array
        .rows
        .iter()
        .enumerate()
        .map(|(i, row)| RouthRow {
            power: row.power,
            elements: (0..row.numerators.len()).map(|j| element(row, j)).collect(),
            special: row.special.map(|special| match special {
                Special::ZeroRow => SpecialCase::ZeroRow(auxiliary(&array.rows[i - 1], knob)),
                Special::ZeroFirstElement => SpecialCase::ZeroFirstElement,
            }),
        })
        .collect();
    RouthTable { added_pole: array.added_pole.map(|a| a as i32), rows }
}

/// The auxiliary polynomial that a row stands for, over its denominator.
fn auxiliary(row: &Row, knob: &str) -> crate::sheet::Formula {
    let mut coefficients = alloc::vec![IntPoly::default(); row.power + 1];
    for (j, numerator) in row.numerators.iter().enumerate() {
        if let Some(place) = row.power.checked_sub(2 * j).and_then(|power| coefficients.get_mut(power)) {
            *place = numerator.clone();
        }
    }
    let rows = coefficients.iter().map(|c| c.coefficients().to_vec()).collect();
    written::polynomial(&crate::model::KnobPolynomial::new(rows), Variables { main: "s", knob })
}
