//! The tree a typed text is read into; every node knows the place it came from.

use alloc::boxed::Box;
use alloc::string::String;
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// A place in a text, counted in characters (not bytes).
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Span {
    /// The first character.
    pub start: usize,
    /// The character behind the last.
    pub end: usize,
}

impl Span {
    /// The place from `start` up to, but not with, `end`.
    #[must_use]
    pub const fn new(start: usize, end: usize) -> Self {
        Self { start, end }
    }

    /// The shortest place that holds both.
    #[must_use]
    pub fn to(self, other: Self) -> Self {
        Self::new(self.start.min(other.start), self.end.max(other.end))
    }
}

impl From<Span> for [usize; 2] {
    fn from(span: Span) -> Self {
        [span.start, span.end]
    }
}

/// A part of a typed text, with its meaning.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Expression {
    /// What it is.
    pub node: Node,
    /// Where it stands, its own brackets included.
    pub span: Span,
    /// True where it was typed in brackets of its own.
    pub bracketed: bool,
}

/// What a part of a typed text is.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Node {
    /// An exact decimal.
    Number(Number),
    /// A quantity, by its canonical name: Greek letters spelled, subscripts behind `_`.
    Name(String),
    /// The Laplace variable s.
    Laplace,
    /// z, the advance by one sample period.
    Advance,
    /// Two or more terms with their signs.
    Sum(Vec<Term>),
    /// The expression with the opposite sign.
    Negation(Box<Expression>),
    /// Two or more factors.
    Product(Vec<Expression>),
    /// Numerator and denominator.
    Quotient(Box<Expression>, Box<Expression>),
    /// Base and whole exponent.
    Power(Box<Expression>, i32),
    /// e to the power of the expression.
    Exponential(Box<Expression>),
}

/// An exact decimal and the way it was typed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Number {
    /// The exact value.
    pub value: RBig,
    /// The text as typed, with plain characters.
    pub text: String,
}

/// A term of a sum.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Term {
    /// The sign before it.
    pub sign: Sign,
    /// The term itself.
    pub expression: Expression,
}

/// The sign of a term.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sign {
    /// The term is added.
    Plus,
    /// The term is subtracted.
    Minus,
}

impl Expression {
    /// An expression without brackets of its own.
    #[must_use]
    pub const fn new(node: Node, span: Span) -> Self {
        Self { node, span, bracketed: false }
    }

    /// The direct parts, from left to right.
    #[must_use]
    pub fn parts(&self) -> Vec<&Self> {
        match &self.node {
            Node::Number(_) | Node::Name(_) | Node::Laplace | Node::Advance => Vec::new(),
            Node::Sum(terms) => terms.iter().map(|term| &term.expression).collect(),
            Node::Product(factors) => factors.iter().collect(),
            Node::Quotient(numerator, denominator) => alloc::vec![&**numerator, &**denominator],
            Node::Negation(inner) | Node::Power(inner, _) | Node::Exponential(inner) => {
                alloc::vec![&**inner]
            }
        }
    }
}

/// Every name in the expression, in order of first appearance; `s` and `z` are none.
#[must_use]
pub fn names(expression: &Expression) -> Vec<String> {
    let mut found = Vec::new();
    collect(expression, &mut found);
    found
}

fn collect(expression: &Expression, found: &mut Vec<String>) {
    if let Node::Name(name) = &expression.node
        && !found.contains(name)
    {
        found.push(name.clone());
    }
    for part in expression.parts() {
        collect(part, found);
    }
}
