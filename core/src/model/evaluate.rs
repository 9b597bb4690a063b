//! Expression to ratio: names become values, everything else arithmetic.

use super::factors::Excess;
use super::polynomial::KnobPolynomial;
use super::quantities::Quantities;
use super::ratio::Ratio;
use super::scalar::affine;
use super::{MAXIMUM_KNOB_DEGREE, MAXIMUM_ORDER};
use crate::answer::{Field, Problem};
use crate::notation::{Expression, Node, Span, names};
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// A block as it was read.
pub(super) struct Block<'a> {
    /// Its field of the form.
    pub(super) field: Field,
    /// Its text as typed.
    pub(super) text: &'a str,
    /// Its tree.
    pub(super) expression: &'a Expression,
    /// The variable it is written in.
    pub(super) variable: Variable,
}

/// The variable of a block.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Variable {
    /// s.
    Laplace,
    /// z.
    Advance,
}

/// The block as a ratio of polynomials.
///
/// # Errors
/// Everything that keeps it from being one; nothing where a name only lacks its value, which the table reports.
pub(super) fn evaluate(block: &Block<'_>, quantities: &Quantities) -> Result<Ratio, Vec<Problem>> {
    let mut evaluation = Evaluation { block, quantities, changed: None, problems: Vec::new() };
    let found = evaluation.ratio(block.expression).and_then(|ratio| evaluation.without_prediction(ratio));
    found.ok_or(evaluation.problems)
}

/// One pass over a block. Parts that cannot be evaluated are None, and the pass goes on to find all problems at once.
struct Evaluation<'a> {
    block: &'a Block<'a>,
    quantities: &'a Quantities,
    /// A name whose value is replaced, to find out whether a zero is due to it.
    changed: Option<(&'a str, &'a RBig)>,
    problems: Vec<Problem>,
}

impl Evaluation<'_> {
    fn ratio(&mut self, expression: &Expression) -> Option<Ratio> {
        match &expression.node {
            Node::Number(number) => Some(Ratio::constant(number.value.clone())),
            Node::Laplace => self.variable(Variable::Laplace, expression.span),
            Node::Advance => self.variable(Variable::Advance, expression.span),
            Node::Name(name) => self.quantity(name),
            Node::Negation(inner) => Some(self.ratio(inner)?.negated()),
            Node::Sum(terms) => {
                let parts: Vec<_> = terms.iter().map(|term| (term.sign, self.ratio(&term.expression))).collect();
                let mut sum = Ratio::constant(RBig::ZERO);
                for ((sign, part), term) in parts.into_iter().zip(terms) {
                    let part = part?;
                    if !sum.has_dead_time_of(&part) {
                        return self.mixed_dead_times(term.expression.span);
                    }
                    sum = self.within_limits(sum.plus(sign, &part), expression.span)?;
                }
                Some(sum)
            }
            Node::Product(factors) => {
                let parts: Vec<_> = factors.iter().map(|factor| self.ratio(factor)).collect();
                let mut product = Ratio::constant(RBig::ONE);
                for part in parts {
                    product = self.within_limits(product.times(&part?), expression.span)?;
                }
                Some(product)
            }
            Node::Quotient(above, below) => {
                let (numerator, denominator) = (self.ratio(above), self.ratio(below));
                let denominator = denominator?;
                // The division by zero is reported even where the numerator is in doubt.
                if denominator.is_zero() {
                    return self.division_by_zero(below);
                }
                let quotient = numerator?.over(&denominator)?;
                self.within_limits(quotient, expression.span)
            }
            Node::Power(base, exponent) => {
                let value = self.ratio(base)?;
                match value.power(*exponent) {
                    Some(power) => self.within_limits(power, expression.span),
                    None => self.division_by_zero(base),
                }
            }
            Node::Exponential(exponent) => self.exponential(expression, exponent),
        }
    }

    fn quantity(&self, name: &str) -> Option<Ratio> {
        if self.quantities.knob.as_deref() == Some(name) {
            return Some(Ratio::factor(KnobPolynomial::knob()));
        }
        match self.changed {
            Some((changed, value)) if changed == name => Some(Ratio::constant(value.clone())),
            _ => self.quantities.values.get(name).map(|value| Ratio::constant(value.exact.clone())),
        }
    }

    fn report<T>(&mut self, span: Span, message: String) -> Option<T> {
        self.problems.push(Problem { field: self.block.field, symbol: None, span: Some(span.into()), message });
        None
    }

    /// The block's variable, or what to type instead of another one.
    fn variable(&mut self, found: Variable, span: Span) -> Option<Ratio> {
        if found == self.block.variable {
            return Some(Ratio::factor(KnobPolynomial::laplace()));
        }
        let message = match (found, self.block.field) {
            (Variable::Laplace, _) => {
                "s and z in one controller: write it in one of the two; a delay in z is typed as 1/z, or as the \
                 computation delay"
            }
            (Variable::Advance, Field::Controller) => {
                "z belongs to a sampled controller: turn Sampling on and type its period, or write the controller in s"
            }
            (Variable::Advance, Field::Plant | Field::Sensor) => {
                "only the controller may stand in z: write this block in s; the conversion is exact"
            }
            (Variable::Advance, _) => "this must be a number: z cannot stand here",
        };
        self.report(span, message.to_string())
    }

    /// e^(−T s), where T is a time that may grow in proportion to the knob.
    fn exponential(&mut self, expression: &Expression, exponent: &Expression) -> Option<Ratio> {
        let Span { start, end } = expression.span;
        let typed: String = self.block.text.chars().skip(start).take(end - start).collect();
        if !contains_laplace(exponent) {
            let message = format!("not a ratio of polynomials in s: type the value of {typed} as a decimal");
            return self.report(expression.span, message);
        }
        let ratio = self.ratio(exponent)?;
        let time = ratio
            .polynomials()
            .ok()
            .filter(|(above, _)| above.order() == 1 && above.coefficient_of(0).is_zero() && ratio.dead_time.is_none());
        match time.and_then(|(above, below)| affine(&above, &below, 1)) {
            Some(found) => Some(Ratio::delay(found.times(-1))),
            None => {
                let message = format!("{typed} is no dead time: type e^(-T s) with a time T, such as e^(-0.2 s)");
                self.report(expression.span, message)
            }
        }
    }

    fn mixed_dead_times<T>(&mut self, span: Span) -> Option<T> {
        let message = "this adds paths with different dead times: a block may have one dead time, as a factor of the \
                       whole block";
        self.report(span, message.to_string())
    }

    /// The whole block, which cannot answer before it is asked.
    fn without_prediction(&mut self, ratio: Ratio) -> Option<Ratio> {
        if ratio.dead_time.is_possible() {
            return Some(ratio);
        }
        let message = "this answers before it is asked: type a dead time with a negative exponent, such as e^(-0.2 s)";
        self.report(self.block.expression.span, message.to_string())
    }

    fn within_limits(&mut self, result: Result<Ratio, Excess>, span: Span) -> Option<Ratio> {
        match result {
            Ok(ratio) => Some(ratio),
            Err(excess) => {
                let message = match excess {
                    Excess::Order(order) => {
                        format!("this has order {order}; Stayband treats up to {MAXIMUM_ORDER}")
                    }
                    Excess::KnobDegree(degree) => {
                        format!("this has the knob to the power {degree}; Stayband treats up to {MAXIMUM_KNOB_DEGREE}")
                    }
                    Excess::Digits => {
                        "the numbers here are out of range: type fewer digits or smaller powers".to_string()
                    }
                };
                self.report(span, message)
            }
        }
    }

    /// Says whether the divisor is zero by itself or because of a quantity's value.
    fn division_by_zero<T>(&mut self, divisor: &Expression) -> Option<T> {
        // Inside a trial no message is read, and trials within trials would multiply.
        let culprit = if self.changed.is_some() { None } else { self.culprit(divisor) };
        let message = match culprit {
            Some((name, value)) => {
                format!("division by zero for {name} = {value}: change {name} or this denominator")
            }
            None => "division by zero: this is zero for every s; change it".to_string(),
        };
        self.report(divisor.span, message)
    }

    /// The first name in the divisor whose change alone makes it differ from zero, and its value as typed.
    fn culprit(&self, divisor: &Expression) -> Option<(String, String)> {
        // Any value that no one types does; a few are tried, since one may be a zero of the divisor as well.
        let trials = [(104_729, 7919u32), (-611_953, 65_537), (15_485_863, 31)]
            .map(|(above, below)| RBig::from_parts(above.into(), below.into()));
        names(divisor).into_iter().find_map(|name| {
            let value = self.quantities.values.get(&name)?.typed.clone();
            let revives = trials.iter().any(|trial| {
                let changed = Some((name.as_str(), trial));
                let mut evaluation =
                    Evaluation { block: self.block, quantities: self.quantities, changed, problems: Vec::new() };
                evaluation.ratio(divisor).is_some_and(|ratio| !ratio.is_zero())
            });
            revives.then_some((name, value))
        })
    }
}

fn contains_laplace(expression: &Expression) -> bool {
    expression.node == Node::Laplace || expression.parts().into_iter().any(contains_laplace)
}
