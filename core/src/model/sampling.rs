//! The controller's sampling, as typed into the form.

use super::quantities::Quantities;
use super::scalar;
use crate::answer::{Field, Problem};
use crate::notation::{Expression, Node};
use crate::project::{Discretisation, Project, SamplingText};
use alloc::format;
use alloc::string::ToString;
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// The longest computation delay, in sample periods.
const MAXIMUM_DELAY: u8 = 3;

/// How the controller samples.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Sampling {
    /// The sample period in s, above zero.
    pub period: RBig,
    /// From a sample to the output computed from it, in sample periods, 0 to 3.
    pub delay: RBig,
    /// How a controller typed in s becomes one in z.
    pub method: Discretisation,
    /// rad/s, above zero; the frequency at which [`Discretisation::TustinPrewarped`] is exact.
    pub prewarp: Option<RBig>,
    /// True where the controller was typed in z.
    pub controller_in_z: bool,
}

/// Reads the inputs of the sampling, where it is on.
///
/// # Errors
/// All that must be put right.
pub(super) fn read(
    project: &Project,
    controller: Option<&Expression>,
    quantities: &Quantities,
) -> Result<Option<Sampling>, Vec<Problem>> {
    let Some(text) = &project.blocks.sampling else { return Ok(None) };
    let mut problems = Vec::new();
    let mut number = |part: &str, text: &str| {
        scalar::number(Field::Sampling, part, text, quantities).unwrap_or_else(|found| {
            problems.extend(found);
            None
        })
    };
    let period = number("period", &text.period);
    let delay = number("delay", &text.delay).unwrap_or(RBig::ZERO);
    let prewarp = if text.method == Discretisation::TustinPrewarped { number("prewarp", &text.prewarp) } else { None };
    if problems.is_empty() {
        problems.extend(complaint(text, period.as_ref(), &delay, prewarp.as_ref()));
    }
    match period {
        Some(period) if problems.is_empty() => {
            let controller_in_z = controller.is_some_and(contains_advance);
            Ok(Some(Sampling { period, delay, method: text.method, prewarp, controller_in_z }))
        }
        _ => Err(problems),
    }
}

/// What is wrong with the numbers.
fn complaint(text: &SamplingText, period: Option<&RBig>, delay: &RBig, prewarp: Option<&RBig>) -> Option<Problem> {
    let (part, message) = match period {
        None => ("period", "type the sample period in seconds, such as 0.002".to_string()),
        Some(period) if *period <= RBig::ZERO => ("period", "the sample period must be above zero".to_string()),
        _ if *delay < RBig::ZERO || *delay > RBig::from(MAXIMUM_DELAY) => {
            ("delay", format!("type the computation delay in sample periods, from 0 to {MAXIMUM_DELAY}"))
        }
        _ if text.method != Discretisation::TustinPrewarped => return None,
        Some(period) => match prewarp {
            None => ("prewarp", "type the frequency in rad/s at which the conversion shall be exact".to_string()),
            Some(omega) if *omega <= RBig::ZERO => ("prewarp", "the frequency must be above zero".to_string()),
            // Rounded down: a frequency just below the limit is no use either.
            Some(omega) if omega * period >= RBig::from_parts(314.into(), 100u8.into()) => {
                ("prewarp", "the frequency must stay below half the sampling frequency, π over the period".to_string())
            }
            Some(_) => return None,
        },
    };
    Some(Problem { field: Field::Sampling, symbol: Some(part.to_string()), span: None, message })
}

/// Whether z stands in the expression.
pub(super) fn contains_advance(expression: &Expression) -> bool {
    expression.node == Node::Advance || expression.parts().into_iter().any(contains_advance)
}
