//! The grammar's exponents: whole powers of a base, and the exponential.

use super::MAXIMUM_POWER;
use super::error::NotationError;
use super::expression::{Node, Sign, Span};
use super::lexer::{Lexeme, Token};
use super::parser::{Parser, Tall, begins_factor, closing, tall};
use alloc::boxed::Box;
use alloc::format;
use alloc::string::ToString;

impl Parser<'_> {
    /// An atom with its exponent, if it has one.
    pub(super) fn power(&mut self) -> Result<Tall, NotationError> {
        let (base, height) = self.atom()?;
        let (exponent, end) = match self.peek() {
            Some(Lexeme { token: Token::Superscript(text), span }) => {
                self.position += 1;
                (whole(text, *span)?, *span)
            }
            Some(Lexeme { token: Token::Power, span }) => {
                self.position += 1;
                self.exponent(*span)?
            }
            _ => return Ok((base, height)),
        };
        if let Some(Lexeme { token: Token::Power | Token::Superscript(_), span }) = self.peek() {
            return Err(NotationError::RepeatedPower { span: *span });
        }
        let span = base.span.to(end);
        tall(Node::Power(Box::new(base), exponent), span, height)
    }

    /// A whole number behind `^`, with or without sign and brackets.
    fn exponent(&mut self, power: Span) -> Result<(i32, Span), NotationError> {
        let Some(first) = self.peek() else {
            return Err(NotationError::NothingAfter { span: power, operator: "^".to_string() });
        };
        if let Token::Open(opening) = first.token {
            self.position += 1;
            let (value, inside) = self.plain_exponent(first.span)?;
            return match self.peek() {
                Some(Lexeme { token: Token::Close(_), .. }) => {
                    let end = self.close(opening, first.span)?;
                    Ok((value, first.span.to(end)))
                }
                Some(other) => Err(NotationError::PowerNotWhole { span: inside.to(other.span) }),
                None => Err(NotationError::MissingClosing { span: first.span, closing: closing(opening) }),
            };
        }
        self.plain_exponent(power)
    }

    fn plain_exponent(&mut self, before: Span) -> Result<(i32, Span), NotationError> {
        let sign = self.sign();
        match self.peek() {
            Some(Lexeme { token: Token::Number(number), span }) => {
                self.position += 1;
                let place = sign.map_or(*span, |(_, start)| start.to(*span));
                if !number.value.is_int() {
                    return Err(NotationError::PowerNotWhole { span: place });
                }
                let text = number.value.numerator().to_string();
                let minus = if matches!(sign, Some((Sign::Minus, _))) { "-" } else { "" };
                Ok((whole(&format!("{minus}{text}"), place)?, place))
            }
            Some(other) if begins_factor(&other.token) => Err(NotationError::PowerNotWhole { span: other.span }),
            _ => {
                let span = sign.map_or(before, |(_, start)| before.to(start));
                Err(NotationError::NothingAfter { span, operator: self.typed(span) })
            }
        }
    }

    /// `e^(…)`, with the next lexeme being `e`.
    pub(super) fn natural_power(&mut self, base: Span) -> Result<Tall, NotationError> {
        self.position += 1;
        match self.peek() {
            Some(Lexeme { token: Token::Power, .. }) => {}
            Some(Lexeme { token: Token::Superscript(_), span }) => {
                return Err(NotationError::OpenExponent { span: base.to(*span) });
            }
            _ => return Err(NotationError::LoneBase { span: base }),
        }
        self.position += 1;
        match self.peek() {
            Some(Lexeme { token: Token::Open(_), .. }) => {}
            Some(other) => {
                return Err(NotationError::OpenExponent { span: base.to(other.span) });
            }
            None => return Err(NotationError::OpenExponent { span: base }),
        }
        let found = self.exponential(base)?;
        match self.peek() {
            Some(Lexeme { token: Token::Power | Token::Superscript(_), span }) => {
                Err(NotationError::RepeatedPower { span: *span })
            }
            _ => Ok(found),
        }
    }

    /// The bracketed exponent of an exponential that began at `start`.
    pub(super) fn exponential(&mut self, start: Span) -> Result<Tall, NotationError> {
        let (exponent, height) = self.brackets()?;
        let span = start.to(exponent.span);
        tall(Node::Exponential(Box::new(exponent)), span, height)
    }
}

/// A whole exponent within the limits.
fn whole(text: &str, span: Span) -> Result<i32, NotationError> {
    let digits = text.trim_start_matches(['+', '-']);
    if digits.is_empty() || !digits.bytes().all(|byte| byte.is_ascii_digit()) {
        return Err(NotationError::PowerNotWhole { span });
    }
    match text.parse::<i32>() {
        Ok(value) if value.abs() <= MAXIMUM_POWER => Ok(value),
        Ok(_) => Err(NotationError::PowerOutOfRange { span, exponent: text.to_string() }),
        // More digits than an i32 holds, or more than one sign.
        Err(_) if text.len() - digits.len() > 1 => Err(NotationError::PowerNotWhole { span }),
        Err(_) => Err(NotationError::PowerOutOfRange { span, exponent: text.to_string() }),
    }
}
