//! The characteristic equation for display, collected by powers of s.

use super::polynomial::KnobPolynomial;
use crate::notation::{Expression, Node, Number, Relation, Sign, Span, Term, equation_mathml, text};
use alloc::boxed::Box;
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use dashu_int::{IBig, Sign as IntegerSign};
use dashu_ratio::RBig;

/// Integers with more digits than this are shown rounded. The record holds them exactly.
const LONGEST_INTEGER: usize = 12;

/// How much of a long integer is shown.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Precision {
    /// Six digits, to be looked at.
    Screen,
    /// Ten digits, as many as a pocket calculator takes.
    Calculator,
    /// Every digit.
    Exact,
}

impl Precision {
    /// Digits of a rounded integer.
    fn digits(self) -> usize {
        match self {
            Self::Screen => 6,
            Self::Calculator => 10,
            Self::Exact => usize::MAX,
        }
    }
}

/// "F(s) = … = 0" as MathML; "≈" where coefficients are shown rounded.
pub(super) fn equation(polynomial: &KnobPolynomial, knob: &str) -> String {
    let rounded = polynomial.coefficients().iter().flatten().any(is_long);
    let relation = if rounded { Relation::Rounded } else { Relation::Exact };
    equation_mathml(&expression(polynomial, Variables { main: "s", knob }, Precision::Screen), relation)
}

/// A polynomial as text in the notation, for sentences: `s + 1`. Long integers are rounded.
///
/// # Examples
/// ```
/// use stayband_core::model::{KnobPolynomial, formula};
/// let polynomial = KnobPolynomial::new(vec![vec![4.into(), (-14).into()], vec![], vec![1.into()]]);
/// assert_eq!(formula(&polynomial, "K"), "s^2 - (14 K - 4)");
/// ```
#[must_use]
pub fn formula(polynomial: &KnobPolynomial, knob: &str) -> String {
    text(&expression(polynomial, Variables { main: "s", knob }, Precision::Screen))
}

/// The names of the two variables of a polynomial.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Variables<'a> {
    /// The one by whose powers terms are collected.
    pub main: &'a str,
    /// The knob.
    pub knob: &'a str,
}

/// A polynomial for display, collected by powers of the main variable.
#[must_use]
pub fn expression(polynomial: &KnobPolynomial, names: Variables<'_>, precision: Precision) -> Expression {
    let rows = polynomial.coefficients().iter().enumerate().rev();
    let terms: Vec<Term> = rows
        .filter(|(_, row)| !row.is_empty())
        .map(|(power, row)| coefficient_term(row, power, names, precision))
        .collect();
    if terms.is_empty() { number("0".to_string()) } else { sum(terms) }
}

/// The term of one power of the main variable: one product, or a sum in the knob in brackets.
fn coefficient_term(row: &[IBig], power: usize, names: Variables<'_>, precision: Precision) -> Term {
    let knob = names.knob;
    let present: Vec<_> = row.iter().enumerate().rev().filter(|(_, coefficient)| !coefficient.is_zero()).collect();
    let main = if names.main == "s" { Node::Laplace } else { Node::Name(names.main.to_string()) };
    let laplace = (power > 0).then(|| raised(plain(main), power));
    if let [(knob_power, coefficient)] = present.as_slice() {
        return monomial(coefficient, *knob_power, knob, laplace, precision);
    }
    // The sign of the highest power stands before the bracket.
    let negative = present.first().is_some_and(|(_, coefficient)| coefficient.sign() == IntegerSign::Negative);
    let terms = present
        .into_iter()
        .map(|(knob_power, coefficient)| {
            let coefficient = if negative { -coefficient } else { coefficient.clone() };
            monomial(&coefficient, knob_power, knob, None, precision)
        })
        .collect();
    let bracket = Expression { bracketed: true, ..sum(terms) };
    Term { sign: sign(negative), expression: product([Some(bracket), laplace].into_iter().flatten().collect()) }
}

/// coefficient · knob^power · rest; a coefficient of 1 is left out where something else stands.
fn monomial(coefficient: &IBig, power: usize, knob: &str, rest: Option<Expression>, precision: Precision) -> Term {
    let negative = coefficient.sign() == IntegerSign::Negative;
    let size = if negative { -coefficient } else { coefficient.clone() };
    let mut factors = Vec::new();
    if !size.is_one() || (power == 0 && rest.is_none()) {
        factors.extend(integer(&size, precision));
    }
    if power > 0 {
        factors.push(raised(plain(Node::Name(knob.to_string())), power));
    }
    factors.extend(rest);
    Term { sign: sign(negative), expression: product(factors) }
}

fn sign(negative: bool) -> Sign {
    if negative { Sign::Minus } else { Sign::Plus }
}

fn is_long(integer: &IBig) -> bool {
    integer.to_string().trim_start_matches('-').len() > LONGEST_INTEGER
}

/// A positive integer: as it is, or rounded and with a power of ten.
fn integer(size: &IBig, precision: Precision) -> Vec<Expression> {
    let digits = size.to_string();
    if !is_long(size) || digits.len() <= precision.digits() {
        return [number(digits)].into();
    }
    let dropped = digits.len() - precision.digits();
    let unit = IBig::from(10).pow(dropped);
    // Rounding 999999.5 up gives one digit more; the mantissa then ends in a zero that is dropped with the others.
    let half = &unit / IBig::from(2);
    let mantissa: IBig = (size + half) / &unit;
    let rounded = mantissa.to_string();
    let exponent = dropped + rounded.len() - 1;
    let (first, rest) = rounded.split_at(1);
    let rest = rest.trim_end_matches('0');
    let mantissa = if rest.is_empty() { first.to_string() } else { format!("{first}.{rest}") };
    [number(mantissa), raised(number("10".to_string()), exponent)].into()
}

fn number(text: String) -> Expression {
    // Display shows the text; the value of a rounded number is not used.
    plain(Node::Number(Number { value: RBig::ZERO, text }))
}

fn plain(node: Node) -> Expression {
    Expression::new(node, Span::default())
}

fn raised(base: Expression, power: usize) -> Expression {
    match i32::try_from(power) {
        Ok(exponent) if exponent != 1 => plain(Node::Power(Box::new(base), exponent)),
        _ => base,
    }
}

fn product(mut factors: Vec<Expression>) -> Expression {
    match factors.pop() {
        Some(single) if factors.is_empty() => single,
        last => {
            factors.extend(last);
            plain(Node::Product(factors))
        }
    }
}

fn sum(mut terms: Vec<Term>) -> Expression {
    match terms.pop() {
        Some(Term { sign: Sign::Plus, expression }) if terms.is_empty() => expression,
        last => {
            terms.extend(last);
            plain(Node::Sum(terms))
        }
    }
}
