//! What can be wrong with a typed text; every message says what to type.

use super::expression::Span;
use super::{MAXIMUM_DECIMAL_EXPONENT, MAXIMUM_DEPTH, MAXIMUM_DIGITS, MAXIMUM_LENGTH, MAXIMUM_POWER};
use alloc::string::String;
use core::fmt;

/// Why a text could not be read, with the place.
#[derive(Clone, Debug, PartialEq, Eq)]
#[non_exhaustive]
pub enum NotationError {
    /// Nothing was typed where a block must stand.
    Empty {
        /// The whole text.
        span: Span,
    },
    /// More characters than [`MAXIMUM_LENGTH`].
    TooLong {
        /// The characters in excess.
        span: Span,
        /// The length in characters.
        length: usize,
    },
    /// More levels of brackets, quotients or signs than [`MAXIMUM_DEPTH`].
    TooDeep {
        /// Where the limit is passed.
        span: Span,
    },
    /// A character that is not part of the notation.
    UnknownCharacter {
        /// The character.
        span: Span,
        /// The character as typed.
        character: char,
    },
    /// A comma inside a number.
    DecimalComma {
        /// The number.
        span: Span,
        /// The same number as it should be typed.
        suggestion: String,
    },
    /// `**` for a power.
    DoubledStar {
        /// Both stars.
        span: Span,
    },
    /// Two numbers without a sign between them.
    TwoNumbers {
        /// Both numbers.
        span: Span,
        /// The first one.
        first: String,
        /// The second one.
        second: String,
    },
    /// A power of ten beyond [`MAXIMUM_DECIMAL_EXPONENT`].
    ExponentOutOfRange {
        /// The number.
        span: Span,
        /// The number as typed.
        number: String,
    },
    /// More digits in a number than [`MAXIMUM_DIGITS`].
    TooManyDigits {
        /// The number.
        span: Span,
        /// How many digits it has.
        digits: usize,
    },
    /// `e` without an exponent.
    LoneBase {
        /// The letter.
        span: Span,
    },
    /// `exp` without a bracket behind it.
    MissingArgument {
        /// The word.
        span: Span,
    },
    /// An exponent of `e` that is not in brackets.
    OpenExponent {
        /// From `e` to the exponent's first character.
        span: Span,
    },
    /// A Greek letter without space beside another letter: a product or one name.
    AmbiguousName {
        /// The word.
        span: Span,
        /// How to type the product.
        product: String,
        /// How to type the name.
        name: String,
    },
    /// `_` without a subscript.
    MissingSubscript {
        /// The name and its underscore.
        span: Span,
    },
    /// A bracket that is not closed.
    MissingClosing {
        /// The opening bracket.
        span: Span,
        /// The closing bracket that is missing.
        closing: char,
    },
    /// A bracket closed by one of another shape.
    MismatchedBrackets {
        /// The closing bracket.
        span: Span,
        /// The closing bracket as typed.
        found: char,
        /// The closing bracket that fits.
        closing: char,
    },
    /// A closing bracket without an opening one.
    MissingOpening {
        /// The closing bracket.
        span: Span,
        /// The closing bracket as typed.
        closing: char,
    },
    /// Brackets with nothing inside.
    EmptyBrackets {
        /// Both brackets.
        span: Span,
    },
    /// An operator without anything before it.
    NothingBefore {
        /// The operator.
        span: Span,
        /// The operator as typed.
        operator: String,
    },
    /// An operator without anything behind it.
    NothingAfter {
        /// The operator.
        span: Span,
        /// The operator as typed.
        operator: String,
    },
    /// A product without sign behind a slash.
    AmbiguousSlash {
        /// From the slash to the end of the product.
        span: Span,
        /// How to type it with the product in the denominator.
        below: String,
        /// How to type it with the quotient as a factor.
        beside: String,
    },
    /// A power whose exponent is not a whole number.
    PowerNotWhole {
        /// The exponent.
        span: Span,
    },
    /// A power whose exponent is beyond [`MAXIMUM_POWER`].
    PowerOutOfRange {
        /// The exponent.
        span: Span,
        /// The exponent as typed.
        exponent: String,
    },
    /// A power of a power without brackets.
    RepeatedPower {
        /// The second exponent's sign.
        span: Span,
    },
    /// Nothing was typed where a number must stand.
    EmptyNumber {
        /// The whole text.
        span: Span,
    },
    /// A quotient where a single number must stand.
    FractionAsNumber {
        /// The whole text.
        span: Span,
    },
    /// Something else than a single number.
    NotANumber {
        /// The whole text.
        span: Span,
    },
    /// Something else than a single name.
    NotASymbol {
        /// The whole text.
        span: Span,
    },
}

impl NotationError {
    /// The place, counted in characters of the text.
    #[must_use]
    pub fn span(&self) -> Span {
        match self {
            Self::Empty { span }
            | Self::TooLong { span, .. }
            | Self::TooDeep { span }
            | Self::UnknownCharacter { span, .. }
            | Self::DecimalComma { span, .. }
            | Self::DoubledStar { span }
            | Self::TwoNumbers { span, .. }
            | Self::ExponentOutOfRange { span, .. }
            | Self::TooManyDigits { span, .. }
            | Self::LoneBase { span }
            | Self::MissingArgument { span }
            | Self::OpenExponent { span }
            | Self::AmbiguousName { span, .. }
            | Self::MissingSubscript { span }
            | Self::MissingClosing { span, .. }
            | Self::MismatchedBrackets { span, .. }
            | Self::MissingOpening { span, .. }
            | Self::EmptyBrackets { span }
            | Self::NothingBefore { span, .. }
            | Self::NothingAfter { span, .. }
            | Self::AmbiguousSlash { span, .. }
            | Self::PowerNotWhole { span }
            | Self::PowerOutOfRange { span, .. }
            | Self::RepeatedPower { span }
            | Self::EmptyNumber { span }
            | Self::FractionAsNumber { span }
            | Self::NotANumber { span }
            | Self::NotASymbol { span } => *span,
        }
    }
}

impl fmt::Display for NotationError {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Empty { .. } => out.write_str("type a transfer function, such as 2/(s + 1)"),
            Self::TooLong { length, .. } => {
                write!(out, "{length} characters are too many: type at most {MAXIMUM_LENGTH}")
            }
            Self::TooDeep { .. } => write!(out, "nested too deep: type at most {MAXIMUM_DEPTH} levels"),
            Self::UnknownCharacter { character, .. } => unknown_character(*character, out),
            Self::DecimalComma { suggestion, .. } => write!(out, "use a decimal point: {suggestion}"),
            Self::DoubledStar { .. } => out.write_str("type ^ for a power, such as s^2"),
            Self::TwoNumbers { first, second, .. } => {
                write!(out, "two numbers side by side: type {first}*{second} for the product, or one number")
            }
            Self::ExponentOutOfRange { number, .. } => write!(
                out,
                "{number} is out of range: type an exponent from -{MAXIMUM_DECIMAL_EXPONENT} to {MAXIMUM_DECIMAL_EXPONENT}"
            ),
            Self::TooManyDigits { digits, .. } => {
                write!(out, "{digits} digits are out of range: type at most {MAXIMUM_DIGITS}")
            }
            Self::LoneBase { .. } => {
                out.write_str("e is the base of the exponential: type e^(-0.2 s), or use another name")
            }
            Self::MissingArgument { .. } => out.write_str("type the exponent in brackets: exp(-0.2 s)"),
            Self::OpenExponent { .. } => out.write_str("put the exponent in brackets: e^(-0.2 s)"),
            Self::AmbiguousName { product, name, .. } => {
                write!(out, "a product or a name: type {product} for the product, {name} for the name")
            }
            Self::MissingSubscript { .. } => out.write_str("type a letter or a digit behind _, such as T_i"),
            Self::MissingClosing { closing, .. } => write!(out, "this bracket is not closed: type {closing}"),
            Self::MismatchedBrackets { found, closing, .. } => {
                write!(out, "{found} does not close this bracket: type {closing}")
            }
            Self::MissingOpening { closing, .. } => {
                write!(out, "{closing} closes nothing: remove it, or type the opening bracket")
            }
            Self::EmptyBrackets { .. } => out.write_str("nothing between the brackets: type a number or a name"),
            Self::NothingBefore { operator, .. } => {
                write!(out, "nothing before {operator}: type a number, a name or a bracket")
            }
            Self::NothingAfter { operator, .. } => {
                write!(out, "nothing behind {operator}: type a number, a name or a bracket")
            }
            Self::AmbiguousSlash { below, beside, .. } => {
                write!(out, "unclear what stands below the slash: type {below} or {beside}")
            }
            Self::PowerNotWhole { .. } => {
                write!(out, "type a whole number from -{MAXIMUM_POWER} to {MAXIMUM_POWER} as the exponent")
            }
            Self::PowerOutOfRange { exponent, .. } => write!(
                out,
                "{exponent} is out of range: type a whole number from -{MAXIMUM_POWER} to {MAXIMUM_POWER} as the exponent"
            ),
            Self::RepeatedPower { .. } => out.write_str("put the first power in brackets, such as (s^2)^3"),
            Self::EmptyNumber { .. } => out.write_str("type a number, such as 0.05"),
            Self::FractionAsNumber { .. } => out.write_str("type a decimal, such as 0.05, instead of a fraction"),
            Self::NotANumber { .. } => out.write_str("type one number, such as 0.05"),
            Self::NotASymbol { .. } => out.write_str("type one name, such as K or tau_m"),
        }
    }
}

impl core::error::Error for NotationError {}

/// Names the character and says what to type instead.
fn unknown_character(character: char, out: &mut fmt::Formatter<'_>) -> fmt::Result {
    let advice = match character {
        '=' => "type only what stands right of the equals sign",
        ';' => "type one expression, without ;",
        ':' => "type / for a quotient",
        ',' => "type a decimal point for a decimal comma",
        '.' => "type a digit beside the point, such as 0.5",
        '\'' | '’' | '′' | '"' => "type a subscript instead, such as T_b",
        '\\' => "type the name without it, such as tau",
        '%' => "type 0.05 for 5 %",
        '$' => "type the expression without it",
        '√' => "type a power with a whole exponent, or a decimal",
        '_' => "type a letter before it, such as T_i",
        '<' | '>' | '|' | '&' | '!' | '?' => "type one transfer function, such as 2/(s + 1)",
        letter if letter.is_alphabetic() => "type names with the letters a to z, A to Z or Greek ones",
        control if control.is_control() => {
            return out.write_str("remove the character that cannot be shown");
        }
        _ => "remove it",
    };
    write!(out, "{character} is not part of the notation: {advice}")
}
