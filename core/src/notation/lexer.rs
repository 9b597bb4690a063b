//! Text to lexemes: numbers, names, operators and brackets, each with its place.

use super::error::NotationError;
use super::expression::{Number, Span};
use super::greek::{plain, spelled, subscript, superscript};
use super::{MAXIMUM_DECIMAL_EXPONENT, MAXIMUM_DIGITS, MAXIMUM_LENGTH};
use alloc::format;
use alloc::string::String;
use alloc::vec::Vec;
use dashu_int::{IBig, UBig};
use dashu_ratio::RBig;

/// The smallest part of the notation.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum Token {
    /// A number.
    Number(Number),
    /// A quantity, by its canonical name.
    Name(String),
    /// `s`.
    Laplace,
    /// The word `z`.
    Advance,
    /// `e`, the base of the exponential.
    Base,
    /// `exp`.
    Exponential,
    /// `+`
    Plus,
    /// `-`
    Minus,
    /// `*`
    Times,
    /// `/`
    Over,
    /// `^`
    Power,
    /// Raised digits with their sign, as plain text.
    Superscript(String),
    /// An opening bracket.
    Open(char),
    /// A closing bracket.
    Close(char),
}

/// A token and its place.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Lexeme {
    pub(super) token: Token,
    pub(super) span: Span,
}

/// Splits a text into lexemes.
///
/// # Errors
/// The first place that is no token.
pub(super) fn lexemes(text: &[char]) -> Result<Vec<Lexeme>, NotationError> {
    if text.len() > MAXIMUM_LENGTH {
        return Err(NotationError::TooLong { span: Span::new(MAXIMUM_LENGTH, text.len()), length: text.len() });
    }
    let mut lexer = Lexer { text, plain: text.iter().copied().map(plain).collect(), position: 0 };
    let mut found: Vec<Lexeme> = Vec::new();
    while let Some(character) = lexer.peek(0) {
        if character == ' ' {
            lexer.position += 1;
            continue;
        }
        let start = lexer.position;
        let token = lexer.token(character)?;
        let span = Span::new(start, lexer.position);
        if let (Token::Number(second), Some(Lexeme { token: Token::Number(first), span: before })) =
            (&token, found.last())
        {
            let (first, second) = (first.text.clone(), second.text.clone());
            return Err(NotationError::TwoNumbers { span: before.to(span), first, second });
        }
        found.push(Lexeme { token, span });
    }
    Ok(found)
}

/// The text under way. Every step moves `position` forward.
struct Lexer<'a> {
    /// The characters as typed.
    text: &'a [char],
    /// The same, one for one, without decoration.
    plain: Vec<char>,
    /// The next character to be read.
    position: usize,
}

impl Lexer<'_> {
    fn peek(&self, ahead: usize) -> Option<char> {
        self.plain.get(self.position + ahead).copied()
    }

    fn digit(&self, ahead: usize) -> bool {
        self.peek(ahead).is_some_and(|character| character.is_ascii_digit())
    }

    fn since(&self, start: usize) -> Span {
        Span::new(start, self.position)
    }

    /// The token that begins with `character`, which is not a space.
    fn token(&mut self, character: char) -> Result<Token, NotationError> {
        if character.is_ascii_digit() || (character == '.' && self.digit(1)) {
            return self.number().map(Token::Number);
        }
        if is_letter(character) {
            return self.word();
        }
        let start = self.position;
        if superscript(character).is_some() {
            return Ok(Token::Superscript(self.run(superscript)));
        }
        self.position += 1;
        Ok(match character {
            '+' => Token::Plus,
            '-' => Token::Minus,
            '*' if self.peek(0) == Some('*') => {
                return Err(NotationError::DoubledStar { span: Span::new(start, start + 2) });
            }
            '*' => Token::Times,
            '/' => Token::Over,
            '^' => Token::Power,
            '(' | '[' | '{' => Token::Open(character),
            ')' | ']' | '}' => Token::Close(character),
            _ => {
                let character = self.text.get(start).copied().unwrap_or(character);
                return Err(NotationError::UnknownCharacter { span: self.since(start), character });
            }
        })
    }

    /// The characters from here on as long as `translate` knows them, translated.
    fn run(&mut self, translate: fn(char) -> Option<char>) -> String {
        let mut found = String::new();
        while let Some(character) = self.peek(0).and_then(translate) {
            found.push(character);
            self.position += 1;
        }
        found
    }

    fn digits(&mut self) -> String {
        self.run(|character| character.is_ascii_digit().then_some(character))
    }

    /// An unsigned number: digits with at most one point, then a power of ten. `2e` is a number only with digits behind
    /// it, because `2e^(-0.2 s)` is a product.
    fn number(&mut self) -> Result<Number, NotationError> {
        let start = self.position;
        let whole = self.digits();
        self.refuse_comma(start)?;
        let mut fraction = String::new();
        if self.peek(0) == Some('.') {
            self.position += 1;
            fraction = self.digits();
            self.refuse_comma(start)?;
        }
        let mut exponent = 0;
        if matches!(self.peek(0), Some('e' | 'E')) {
            let signed = matches!(self.peek(1), Some('+' | '-'));
            if self.digit(1 + usize::from(signed)) {
                let negative = self.peek(1) == Some('-');
                self.position += 1 + usize::from(signed);
                exponent = self.exponent(start, negative)?;
            }
        }
        let digits = whole.len() + fraction.len();
        if digits > MAXIMUM_DIGITS {
            return Err(NotationError::TooManyDigits { span: self.since(start), digits });
        }
        let value = value(&whole, &fraction, exponent).ok_or(NotationError::NotANumber { span: self.since(start) })?;
        Ok(Number { value, text: self.typed(start) })
    }

    /// The characters since `start`, without decoration.
    fn typed(&self, start: usize) -> String {
        self.plain.get(start..self.position).unwrap_or_default().iter().collect()
    }

    fn exponent(&mut self, start: usize, negative: bool) -> Result<i32, NotationError> {
        let digits = self.digits();
        match digits.parse::<i32>() {
            Ok(size) if size <= MAXIMUM_DECIMAL_EXPONENT => Ok(if negative { -size } else { size }),
            _ => Err(NotationError::ExponentOutOfRange { span: self.since(start), number: self.typed(start) }),
        }
    }

    /// Refuses a comma between digits. With one comma and no point it is a decimal comma; otherwise the commas can only
    /// separate thousands.
    fn refuse_comma(&mut self, start: usize) -> Result<(), NotationError> {
        if self.peek(0) != Some(',') || !self.digit(1) {
            return Ok(());
        }
        while self.digit(0) || (matches!(self.peek(0), Some(',' | '.')) && self.digit(1)) {
            self.position += 1;
        }
        let typed = self.typed(start);
        let single = typed.matches(',').count() == 1 && !typed.contains('.');
        let suggestion = typed.replace(',', if single { "." } else { "" });
        Err(NotationError::DecimalComma { span: self.since(start), suggestion })
    }

    /// A name with its subscripts, or one of the words with a meaning of their own.
    fn word(&mut self) -> Result<Token, NotationError> {
        let start = self.position;
        let base = self.run(|character| (is_letter(character) || character.is_ascii_digit()).then_some(character));
        let mut name = self.canonical_base(start, &base)?;
        while let Some(part) = self.subscript(start)? {
            name.push('_');
            name.push_str(&part);
        }
        match name.as_str() {
            "s" => Ok(Token::Laplace),
            "e" => Ok(Token::Base),
            "exp" => Ok(Token::Exponential),
            "z" => Ok(Token::Advance),
            _ => Ok(Token::Name(name)),
        }
    }

    /// Greek letters stand alone: beside another letter they make a product or a name, and only the user knows which.
    fn canonical_base(&self, start: usize, base: &str) -> Result<String, NotationError> {
        let letters: Vec<char> = base.chars().filter(|character| !character.is_ascii_digit()).collect();
        if letters.len() > 1 && letters.iter().any(|letter| spelled(*letter).is_some()) {
            let cut = if letters.first().is_some_and(|first| spelled(*first).is_some()) {
                base.char_indices().skip(1).find(|(_, character)| is_letter(*character))
            } else {
                base.char_indices().find(|(_, character)| spelled(*character).is_some())
            };
            let (left, right) = base.split_at(cut.map_or(base.len(), |(index, _)| index));
            let (product, name) = (format!("{left} {right}"), format!("{left}_{right}"));
            return Err(NotationError::AmbiguousName { span: self.since(start), product, name });
        }
        Ok(spell(base))
    }

    /// The next subscript of a name: `_i`, `_{i}`, `ᵢ`.
    fn subscript(&mut self, start: usize) -> Result<Option<String>, NotationError> {
        let inside = |character: char| (is_letter(character) || character.is_ascii_digit()).then_some(character);
        let lowered = self.run(subscript);
        if !lowered.is_empty() {
            return Ok(Some(lowered));
        }
        if self.peek(0) != Some('_') {
            return Ok(None);
        }
        self.position += 1;
        let braced = self.peek(0) == Some('{');
        self.position += usize::from(braced);
        let opening = self.position;
        let part = self.run(inside);
        if part.is_empty() {
            return Err(NotationError::MissingSubscript { span: self.since(start) });
        }
        if braced {
            if self.peek(0) != Some('}') {
                return Err(NotationError::MissingClosing { span: Span::new(opening - 1, opening), closing: '}' });
            }
            self.position += 1;
        }
        Ok(Some(spell(&part)))
    }
}

fn is_letter(character: char) -> bool {
    character.is_ascii_alphabetic() || spelled(character).is_some()
}

/// The word with its Greek letters spelled.
fn spell(word: &str) -> String {
    let mut found = String::new();
    for character in word.chars() {
        match spelled(character) {
            Some(name) => found.push_str(name),
            None => found.push(character),
        }
    }
    found
}

/// The exact value of `whole.fraction × 10^exponent`. None if a part is not made of digits.
fn value(whole: &str, fraction: &str, exponent: i32) -> Option<RBig> {
    let mantissa = UBig::from_str_radix(&format!("0{whole}{fraction}"), 10).ok()?;
    let exponent = exponent - i32::try_from(fraction.len()).ok()?;
    let scale = UBig::from(10u8).pow(exponent.unsigned_abs() as usize);
    Some(if exponent < 0 {
        RBig::from_parts(IBig::from(mantissa), scale)
    } else {
        RBig::from(IBig::from(mantissa * scale))
    })
}
