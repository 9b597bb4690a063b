//! Notation: text to expression, expression to display form.
//!
//! Blocks are typed the way they stand on paper: `K (0.12 s + 1)/(0.012 s + 1)`. The grammar, with the strongest binding
//! last:
//!
//! ```text
//! sum     = ["+" | "-"] product { ("+" | "-") product }
//! product = signed { ("*" | "/" | nothing) signed }          left to right; a product without sign behind "/" is refused
//! signed  = { "+" | "-" } power
//! power   = atom ["^" whole | superscript]
//! atom    = number | name | "s" | "z" | "(" sum ")" | "[" sum "]" | "{" sum "}" | "e^(" sum ")" | "exp(" sum ")"
//! ```
//!
//! Numbers are exact decimals. A Greek letter and its spelled name are the same symbol (`τ` is `tau`); `T_{i}` and `Tᵢ`
//! are `T_i`. Pasted typography (`·`, `×`, `−`, `²`, letters of formula editors, narrow spaces) is read.

mod decimal;
mod error;
mod expression;
mod greek;
mod lexer;
mod mathml;
mod parser;
mod power;
#[cfg(test)]
mod tests;
mod text;

pub use decimal::decimal;
pub use error::NotationError;
pub use expression::{Expression, Node, Number, Sign, Span, Term, names};
pub use mathml::{Relation, equation_mathml, mathml};
pub use parser::{read, symbol};
pub use text::text;

/// The longest text that is read, in characters. A block of order 40 with long names needs about 1000; the limit keeps
/// reading time and the size of exact numbers bounded.
pub const MAXIMUM_LENGTH: usize = 2000;

/// The most levels of brackets and of the tree. Readable blocks have fewer than ten; the limit keeps every recursion over
/// the tree far from the end of a small stack.
pub const MAXIMUM_DEPTH: usize = 64;

/// The largest power of ten in a number, either sign. Physical constants stay below 40.
pub const MAXIMUM_DECIMAL_EXPONENT: i32 = 60;

/// The most digits in a number, before and behind the point together.
pub const MAXIMUM_DIGITS: usize = 60;

/// The largest whole exponent of a power, either sign: ten times the largest order of a loop, so that a block of too high
/// an order is told its order.
pub const MAXIMUM_POWER: i32 = 400;
