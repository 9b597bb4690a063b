//! Expression back to text in the notation itself, for sentences.

use super::expression::{Expression, Node, Sign, Term};
use alloc::format;
use alloc::string::{String, ToString};

/// The expression as it may be typed; reading it again gives the same tree.
///
/// # Examples
/// ```
/// use stayband_core::notation::{read, text};
/// assert_eq!(text(&read("2·τ/(s² − 1)").unwrap()), "2 tau/(s^2 - 1)");
/// ```
#[must_use]
pub fn text(expression: &Expression) -> String {
    if expression.bracketed { fenced(expression) } else { bare(expression) }
}

fn fenced(expression: &Expression) -> String {
    format!("({})", bare(expression))
}

fn bare(expression: &Expression) -> String {
    match &expression.node {
        Node::Number(number) => number.text.clone(),
        Node::Name(name) => name.clone(),
        Node::Laplace => "s".to_string(),
        Node::Advance => "z".to_string(),
        Node::Sum(terms) => terms.iter().enumerate().map(term).collect(),
        Node::Negation(inner) => format!("-{}", operand(inner)),
        Node::Product(factors) => factors.iter().enumerate().map(factor).collect(),
        Node::Quotient(above, below) => match above.node {
            Node::Quotient(..) | Node::Product(_) => format!("{}/{}", text(above), atom(below)),
            _ => format!("{}/{}", atom(above), atom(below)),
        },
        Node::Power(base, exponent) => match base.node {
            Node::Number(_) | Node::Name(_) | Node::Laplace | Node::Advance => format!("{}^{exponent}", text(base)),
            _ => format!("{}^{exponent}", fenced(base)),
        },
        Node::Exponential(exponent) => format!("e^{}", fenced(exponent)),
    }
}

fn term((index, term): (usize, &Term)) -> String {
    let sign = match (index, term.sign) {
        (0, Sign::Plus) => "",
        (0, Sign::Minus) => "-",
        (_, Sign::Plus) => " + ",
        (_, Sign::Minus) => " - ",
    };
    format!("{sign}{}", operand(&term.expression))
}

/// An expression behind a sign.
fn operand(expression: &Expression) -> String {
    match expression.node {
        Node::Sum(_) | Node::Negation(_) => fenced(expression),
        _ => text(expression),
    }
}

/// A number behind another factor needs a star, or it would be read as a part of it.
fn factor((index, factor): (usize, &Expression)) -> String {
    let shown = atom(factor);
    let joint = match (index, shown.starts_with(|first: char| first.is_ascii_digit() || first == '.')) {
        (0, _) => "",
        (_, true) => "*",
        (_, false) => " ",
    };
    format!("{joint}{shown}")
}

/// An expression that other factors may stand beside.
fn atom(expression: &Expression) -> String {
    match expression.node {
        Node::Sum(_) | Node::Negation(_) | Node::Product(_) | Node::Quotient(..) => fenced(expression),
        _ => text(expression),
    }
}
