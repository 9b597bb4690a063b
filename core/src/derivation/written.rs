//! Exact polynomials as formulas of the record.

use crate::exact::IntPoly;
use crate::exact::dyadic::sign_of;
use crate::model::{KnobPolynomial, Precision, Variables, expression};
use crate::notation::{Expression, Node, Span, mathml, text};
use crate::sheet::Formula;
use alloc::boxed::Box;
use alloc::vec::Vec;
use dashu_int::IBig;

/// A polynomial in the main variable and the knob.
pub(super) fn polynomial(p: &KnobPolynomial, names: Variables<'_>) -> Formula {
    formula(|precision| expression(p, names, precision))
}

/// A polynomial in one variable.
pub(super) fn in_variable(p: &IntPoly, variable: &str) -> Formula {
    let rows = p.coefficients().iter().map(|c| [c.clone()].into()).collect();
    polynomial(&KnobPolynomial::new(rows), Variables { main: variable, knob: "" })
}

/// A polynomial that is to be zero: over its content, with a positive leading coefficient.
pub(super) fn equation(p: &IntPoly, variable: &str) -> Formula {
    let p = p.primitive();
    in_variable(&if p.leading_sign() < 0 { p.negated() } else { p }, variable)
}

/// A ratio of two polynomials in one variable.
pub(super) fn ratio(above: &IntPoly, below: &IntPoly, variable: &str) -> Formula {
    let rows = |p: &IntPoly| KnobPolynomial::new(p.coefficients().iter().map(|c| [c.clone()].into()).collect());
    let names = Variables { main: variable, knob: "" };
    formula(|precision| {
        let above_shown = expression(&rows(above), names, precision);
        if *below == IntPoly::from_i64(&[1]) {
            return above_shown;
        }
        let quotient = |above: Expression| {
            let below = expression(&rows(below), names, precision);
            Expression::new(Node::Quotient(Box::new(above), Box::new(below)), Span::default())
        };
        // The sign of a negative number stands before the fraction.
        match above.coefficients() {
            [only] if sign_of(only) < 0 => {
                let positive = expression(&rows(&above.negated()), names, precision);
                Expression::new(Node::Negation(Box::new(quotient(positive))), Span::default())
            }
            _ => quotient(above_shown),
        }
    })
}

/// Σ q^k·parts\[k\] as a polynomial in the main variable and the knob.
pub(super) fn family(parts: &[IntPoly]) -> KnobPolynomial {
    let order = parts.iter().map(IntPoly::degree).max().unwrap_or(0);
    let row = |i: usize| parts.iter().map(|part| part.coefficient(i)).collect::<Vec<IBig>>();
    KnobPolynomial::new((0..=order).map(row).collect())
}

fn formula(shown: impl Fn(Precision) -> Expression) -> Formula {
    Formula { mathml: mathml(&shown(Precision::Calculator)), text: text(&shown(Precision::Exact)) }
}

/// A name for a variable of the sheet's own that the knob does not bear.
pub(super) fn fresh<'a>(names: [&'a str; 2], knob: &str) -> &'a str {
    if names[0] == knob { names[1] } else { names[0] }
}
