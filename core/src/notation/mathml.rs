//! Expression to MathML, which browsers typeset themselves.

use super::expression::{Expression, Node, Sign, Term};
use super::greek;
use alloc::format;
use alloc::string::{String, ToString};

/// How the two sides of the equation relate.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Relation {
    /// The polynomial is shown exactly.
    Exact,
    /// Coefficients are shown rounded.
    Rounded,
}

/// The expression as a `<math>` element: quotients as fractions, Greek letters, numbers as typed, brackets where they were
/// typed or are needed.
///
/// # Examples
/// ```
/// use stayband_core::notation::{mathml, read};
/// let shown = mathml(&read("1/(tau s)").unwrap());
/// assert_eq!(shown, "<math><mfrac><mn>1</mn><mrow><mi>τ</mi><mo>\u{2062}</mo><mi>s</mi></mrow></mfrac></math>");
/// ```
#[must_use]
pub fn mathml(expression: &Expression) -> String {
    format!("<math>{}</math>", shown(expression))
}

/// "F(s) = expression = 0" as a `<math>` element.
#[must_use]
pub fn equation_mathml(expression: &Expression, relation: Relation) -> String {
    let sign = match relation {
        Relation::Exact => '=',
        Relation::Rounded => '≈',
    };
    format!(
        "<math><mi>F</mi><mo>\u{2061}</mo><mrow><mo>(</mo><mi>s</mi><mo>)</mo></mrow><mo>{sign}</mo>{}<mo>=</mo><mn>0</mn></math>",
        bare(expression)
    )
}

/// The expression with the brackets it was typed in.
fn shown(expression: &Expression) -> String {
    if expression.bracketed { fenced(expression) } else { bare(expression) }
}

/// The expression in brackets.
fn fenced(expression: &Expression) -> String {
    format!("<mrow><mo>(</mo>{}<mo>)</mo></mrow>", bare(expression))
}

/// The expression without brackets of its own, as one element.
fn bare(expression: &Expression) -> String {
    match &expression.node {
        Node::Number(number) => format!("<mn>{}</mn>", escaped(&number.text)),
        Node::Name(name) => name_mathml(name),
        Node::Laplace => "<mi>s</mi>".to_string(),
        Node::Advance => "<mi>z</mi>".to_string(),
        Node::Sum(terms) => format!("<mrow>{}</mrow>", terms.iter().enumerate().map(term).collect::<String>()),
        Node::Negation(inner) => format!("<mrow><mo>−</mo>{}</mrow>", operand(inner)),
        Node::Product(factors) => format!("<mrow>{}</mrow>", product(factors)),
        Node::Quotient(numerator, denominator) => {
            format!("<mfrac>{}{}</mfrac>", bare(numerator), bare(denominator))
        }
        Node::Power(base, exponent) => {
            format!("<msup>{}{}</msup>", power_base(base), whole(*exponent))
        }
        Node::Exponential(exponent) => format!("<msup><mi>e</mi>{}</msup>", bare(exponent)),
    }
}

fn term((index, term): (usize, &Term)) -> String {
    let sign = match (index, term.sign) {
        (0, Sign::Plus) => "",
        (_, Sign::Plus) => "<mo>+</mo>",
        (_, Sign::Minus) => "<mo>−</mo>",
    };
    format!(
        "{sign}{}",
        if index == 0 && term.sign == Sign::Plus { shown(&term.expression) } else { operand(&term.expression) }
    )
}

/// An expression behind a sign: a sum or another sign needs brackets.
fn operand(expression: &Expression) -> String {
    match expression.node {
        Node::Sum(_) | Node::Negation(_) => fenced(expression),
        _ => shown(expression),
    }
}

/// The factors with an invisible sign between them, a dot before a number.
fn product(factors: &[Expression]) -> String {
    let mut found = String::new();
    for (index, factor) in factors.iter().enumerate() {
        if index > 0 {
            found.push_str(if begins_with_digit(factor) { "<mo>⋅</mo>" } else { "<mo>\u{2062}</mo>" });
        }
        found.push_str(&operand(factor));
    }
    found
}

fn begins_with_digit(expression: &Expression) -> bool {
    match &expression.node {
        _ if expression.bracketed => false,
        Node::Number(_) => true,
        Node::Product(factors) => factors.first().is_some_and(begins_with_digit),
        Node::Power(base, _) => begins_with_digit(base),
        _ => false,
    }
}

/// The base of a power: only a letter or a number does without brackets.
fn power_base(base: &Expression) -> String {
    match base.node {
        Node::Number(_) | Node::Name(_) | Node::Laplace | Node::Advance => shown(base),
        _ => fenced(base),
    }
}

fn whole(exponent: i32) -> String {
    let size = exponent.unsigned_abs();
    if exponent < 0 { format!("<mrow><mo>−</mo><mn>{size}</mn></mrow>") } else { format!("<mn>{size}</mn>") }
}

/// A name with its subscripts lowered.
fn name_mathml(name: &str) -> String {
    match name.split_once('_') {
        None => identifier(name),
        Some((base, below)) => {
            let below: String = below
                .split('_')
                .enumerate()
                .map(|(index, part)| {
                    let comma = if index > 0 { "<mo>,</mo>" } else { "" };
                    format!("{comma}{}", identifier(part))
                })
                .collect();
            format!("<msub>{}<mrow>{below}</mrow></msub>", identifier(base))
        }
    }
}

/// A word; a spelled Greek letter, also one with digits behind it, becomes the letter.
fn identifier(word: &str) -> String {
    let letters = word.trim_end_matches(|character: char| character.is_ascii_digit());
    let digits = word.get(letters.len()..).unwrap_or_default();
    if letters.is_empty() {
        return format!("<mn>{}</mn>", escaped(digits));
    }
    match greek::letter(letters) {
        Some(letter) => format!("<mi>{letter}{digits}</mi>"),
        None => format!("<mi>{}</mi>", escaped(word)),
    }
}

/// Text that may stand in an element.
fn escaped(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;").replace('"', "&quot;")
}
