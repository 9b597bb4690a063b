//! A single exact decimal, as it stands in the quantities table and the setting.

use super::error::NotationError;
use super::expression::Span;
use super::lexer::{Lexeme, Token, lexemes};
use alloc::vec::Vec;
use dashu_ratio::RBig;

/// Reads one number with an optional sign; spaces around it are skipped.
///
/// # Errors
/// The fault, with its place and what to type instead.
///
/// # Examples
/// ```
/// use dashu_ratio::RBig;
/// use stayband_core::notation::decimal;
/// assert_eq!(decimal(" −1.2e-3 ").unwrap(), RBig::from_parts((-3).into(), 2500u32.into()));
/// assert_eq!(decimal("0,05").unwrap_err().to_string(), "use a decimal point: 0.05");
/// ```
pub fn decimal(text: &str) -> Result<RBig, NotationError> {
    let characters: Vec<char> = text.chars().collect();
    let span = Span::new(0, characters.len());
    let lexemes = lexemes(&characters)?;
    let (negative, rest) = match lexemes.as_slice() {
        [] => return Err(NotationError::EmptyNumber { span }),
        [Lexeme { token: Token::Minus, .. }, rest @ ..] => (true, rest),
        [Lexeme { token: Token::Plus, .. }, rest @ ..] => (false, rest),
        rest => (false, rest),
    };
    match rest {
        [Lexeme { token: Token::Number(number), .. }] if negative => Ok(-number.value.clone()),
        [Lexeme { token: Token::Number(number), .. }] => Ok(number.value.clone()),
        _ if lexemes.iter().any(|lexeme| lexeme.token == Token::Over) => Err(NotationError::FractionAsNumber { span }),
        _ => Err(NotationError::NotANumber { span }),
    }
}
