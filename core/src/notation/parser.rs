//! Lexemes to expression, by recursive descent along the grammar of the module's head.

use super::MAXIMUM_DEPTH;
use super::error::NotationError;
use super::expression::{Expression, Node, Sign, Span, Term};
use super::lexer::{Lexeme, Token, lexemes};
use alloc::boxed::Box;
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec;
use alloc::vec::Vec;

/// The longest text that advice about a slash repeats, in characters; longer blocks get the general form.
const LONGEST_ADVICE: usize = 60;

/// Reads a block as it was typed.
///
/// # Errors
/// The first fault, with its place and what to type instead.
///
/// # Examples
/// ```
/// use stayband_core::notation::{names, read};
/// let block = read("14/((s − 3)(s + 9)(τ s + 1))").unwrap();
/// assert_eq!(names(&block), ["tau"]);
/// assert_eq!(read("0,05").unwrap_err().to_string(), "use a decimal point: 0.05");
/// ```
pub fn read(text: &str) -> Result<Expression, NotationError> {
    let characters: Vec<char> = text.chars().collect();
    let lexemes = lexemes(&characters)?;
    if lexemes.is_empty() {
        return Err(NotationError::Empty { span: Span::new(0, characters.len()) });
    }
    let mut parser = Parser { text: &characters, lexemes: &lexemes, position: 0, depth: 0 };
    let (found, _) = parser.sum()?;
    match parser.peek() {
        None => Ok(found),
        Some(Lexeme { token: Token::Close(closing), span }) => {
            Err(NotationError::MissingOpening { span: *span, closing: *closing })
        }
        // Whatever else may follow a sum was read as part of it.
        Some(Lexeme { span, .. }) => Err(NotationError::NothingBefore { span: *span, operator: parser.typed(*span) }),
    }
}

/// The canonical name of a single symbol: `τ` gives `tau`, `T_{i}` gives `T_i`.
///
/// # Errors
/// [`NotationError::NotASymbol`] for anything but one name, `s` and `z` included; otherwise the fault of the name.
pub fn symbol(text: &str) -> Result<String, NotationError> {
    let characters: Vec<char> = text.chars().collect();
    match lexemes(&characters)?.as_slice() {
        [Lexeme { token: Token::Name(name), .. }] => Ok(name.clone()),
        _ => Err(NotationError::NotASymbol { span: Span::new(0, characters.len()) }),
    }
}

/// An expression with the height of its tree.
pub(super) type Tall = (Expression, usize);

/// The lexemes under way. Every function either moves `position` forward or fails.
pub(super) struct Parser<'a> {
    /// The characters as typed, for messages.
    text: &'a [char],
    /// All lexemes.
    lexemes: &'a [Lexeme],
    /// The next lexeme to be read.
    pub(super) position: usize,
    /// Levels of brackets and signs around the next lexeme.
    depth: usize,
}

impl<'a> Parser<'a> {
    pub(super) fn peek(&self) -> Option<&'a Lexeme> {
        self.lexemes.get(self.position)
    }

    pub(super) fn typed(&self, span: Span) -> String {
        self.text.get(span.start..span.end).unwrap_or_default().iter().collect()
    }

    /// Takes a sign, if one comes next.
    pub(super) fn sign(&mut self) -> Option<(Sign, Span)> {
        let lexeme = self.peek()?;
        let sign = match lexeme.token {
            Token::Plus => Sign::Plus,
            Token::Minus => Sign::Minus,
            _ => return None,
        };
        self.position += 1;
        Some((sign, lexeme.span))
    }

    /// Runs `inner` one level deeper.
    fn deeper<T>(
        &mut self,
        span: Span,
        inner: impl FnOnce(&mut Self) -> Result<T, NotationError>,
    ) -> Result<T, NotationError> {
        if self.depth >= MAXIMUM_DEPTH {
            return Err(NotationError::TooDeep { span });
        }
        self.depth += 1;
        let found = inner(self);
        self.depth -= 1;
        found
    }

    fn sum(&mut self) -> Result<Tall, NotationError> {
        let leading = self.sign();
        let (first, mut height) = self.product()?;
        let mut span = first.span;
        if let Some((_, before)) = leading {
            span = before.to(span);
        }
        let mut terms = vec![Term { sign: leading.map_or(Sign::Plus, |(sign, _)| sign), expression: first }];
        while let Some((sign, _)) = self.sign() {
            let (expression, next) = self.product()?;
            span = span.to(expression.span);
            height = height.max(next);
            terms.push(Term { sign, expression });
        }
        if terms.len() > 1 {
            return tall(Node::Sum(terms), span, height);
        }
        match terms.pop() {
            Some(Term { sign: Sign::Minus, expression }) => tall(Node::Negation(Box::new(expression)), span, height),
            Some(Term { expression, .. }) => Ok((expression, height)),
            None => Err(NotationError::Empty { span }),
        }
    }

    fn product(&mut self) -> Result<Tall, NotationError> {
        let (first, mut height) = self.signed()?;
        let mut factors = vec![first];
        // The place of the last slash and of its denominator, while a product without sign would be ambiguous.
        let mut slash: Option<(Span, Span)> = None;
        while let Some(lexeme) = self.peek() {
            match lexeme.token {
                Token::Times => {
                    self.position += 1;
                    slash = None;
                    let (factor, next) = self.signed()?;
                    height = height.max(next);
                    factors.push(factor);
                }
                Token::Over => {
                    self.position += 1;
                    let (denominator, next) = self.signed()?;
                    slash = Some((lexeme.span, denominator.span));
                    let (numerator, before) = joined(factors, height)?;
                    let span = numerator.span.to(denominator.span);
                    let quotient = Node::Quotient(Box::new(numerator), Box::new(denominator));
                    let (quotient, taller) = tall(quotient, span, before.max(next))?;
                    (factors, height) = (vec![quotient], taller);
                }
                _ if begins_factor(&lexeme.token) => {
                    if let Some((over, denominator)) = slash {
                        let start = factors.first().map_or(over.start, |quotient| quotient.span.start);
                        return Err(self.ambiguous(start, over, denominator));
                    }
                    let (factor, next) = self.power()?;
                    height = height.max(next);
                    factors.push(factor);
                }
                _ => break,
            }
        }
        joined(factors, height)
    }

    /// Advice for `a / b c`: shows both ways to type it.
    fn ambiguous(&mut self, start: usize, slash: Span, denominator: Span) -> NotationError {
        let beside = match self.factors_without_sign() {
            Ok(beside) => beside,
            Err(error) => return error,
        };
        let span = slash.to(beside);
        if beside.end - start > LONGEST_ADVICE {
            let (below, beside) = ("a/(b c)".to_string(), "a/b*c with a sign".to_string());
            return NotationError::AmbiguousSlash { span, below, beside };
        }
        let over = self.typed(Span::new(start, slash.end));
        let gap = self.typed(Span::new(denominator.end, beside.start));
        let (under, factor) = (self.typed(denominator), self.typed(beside));
        let below = format!("{over}({under}{gap}{factor})");
        let beside = format!("{over}{under}*{factor}");
        NotationError::AmbiguousSlash { span, below, beside }
    }

    /// The place of all factors from here on that follow without sign.
    fn factors_without_sign(&mut self) -> Result<Span, NotationError> {
        let mut place = self.power()?.0.span;
        while self.peek().is_some_and(|lexeme| begins_factor(&lexeme.token)) {
            place = place.to(self.power()?.0.span);
        }
        Ok(place)
    }

    fn signed(&mut self) -> Result<Tall, NotationError> {
        let Some((sign, span)) = self.sign() else {
            return self.power();
        };
        let (inner, height) = self.deeper(span, Self::signed)?;
        let span = span.to(inner.span);
        match sign {
            Sign::Plus => Ok((inner, height)),
            Sign::Minus => tall(Node::Negation(Box::new(inner)), span, height),
        }
    }

    pub(super) fn atom(&mut self) -> Result<Tall, NotationError> {
        let Some(lexeme) = self.peek() else {
            return Err(self.nothing_here());
        };
        let span = lexeme.span;
        let node = match &lexeme.token {
            Token::Number(number) => Node::Number(number.clone()),
            Token::Name(name) => Node::Name(name.clone()),
            Token::Laplace => Node::Laplace,
            Token::Advance => Node::Advance,
            Token::Open(_) => return self.brackets(),
            Token::Base => return self.natural_power(span),
            Token::Exponential => {
                self.position += 1;
                return match self.peek() {
                    Some(Lexeme { token: Token::Open(_), .. }) => self.exponential(span),
                    _ => Err(NotationError::MissingArgument { span }),
                };
            }
            _ => return Err(self.nothing_here()),
        };
        self.position += 1;
        Ok((Expression::new(node, span), 1))
    }

    pub(super) fn brackets(&mut self) -> Result<Tall, NotationError> {
        let Some(Lexeme { token: Token::Open(opening), span }) = self.peek() else {
            return Err(self.nothing_here());
        };
        self.position += 1;
        if let Some(Lexeme { token: Token::Close(_), span: end }) = self.peek() {
            return Err(NotationError::EmptyBrackets { span: span.to(*end) });
        }
        let (mut inner, height) = self.deeper(*span, Self::sum)?;
        inner.span = span.to(self.close(*opening, *span)?);
        inner.bracketed = true;
        Ok((inner, height))
    }

    /// Takes the bracket that closes `opening`.
    pub(super) fn close(&mut self, opening: char, start: Span) -> Result<Span, NotationError> {
        let closing = closing(opening);
        match self.peek() {
            Some(Lexeme { token: Token::Close(found), span }) if *found == closing => {
                self.position += 1;
                Ok(*span)
            }
            Some(Lexeme { token: Token::Close(found), span }) => {
                Err(NotationError::MismatchedBrackets { span: *span, found: *found, closing })
            }
            _ => Err(NotationError::MissingClosing { span: start, closing }),
        }
    }

    /// Says what is missing where a number, a name or a bracket should come next.
    fn nothing_here(&self) -> NotationError {
        let previous = self.position.checked_sub(1).and_then(|index| self.lexemes.get(index));
        match (self.peek(), previous) {
            // Two operators in a row: the later one lacks what stands before it.
            (Some(Lexeme { token: Token::Times | Token::Over | Token::Power | Token::Superscript(_), span }), _) => {
                NotationError::NothingBefore { span: *span, operator: self.typed(*span) }
            }
            (Some(Lexeme { token: Token::Close(closing), span }), None) => {
                NotationError::MissingOpening { span: *span, closing: *closing }
            }
            (_, Some(Lexeme { token: Token::Open(opening), span })) => {
                NotationError::MissingClosing { span: *span, closing: closing(*opening) }
            }
            (_, Some(Lexeme { span, .. })) => NotationError::NothingAfter { span: *span, operator: self.typed(*span) },
            (_, None) => NotationError::Empty { span: Span::new(0, self.text.len()) },
        }
    }
}

pub(super) fn closing(opening: char) -> char {
    match opening {
        '[' => ']',
        '{' => '}',
        _ => ')',
    }
}

pub(super) fn begins_factor(token: &Token) -> bool {
    matches!(
        token,
        Token::Number(_)
            | Token::Name(_)
            | Token::Laplace
            | Token::Advance
            | Token::Base
            | Token::Exponential
            | Token::Open(_)
    )
}

/// The node above parts of the given height.
pub(super) fn tall(node: Node, span: Span, height: usize) -> Result<Tall, NotationError> {
    if height >= MAXIMUM_DEPTH {
        return Err(NotationError::TooDeep { span });
    }
    Ok((Expression::new(node, span), height + 1))
}

/// One factor as it is, several as a product.
fn joined(mut factors: Vec<Expression>, height: usize) -> Result<Tall, NotationError> {
    if factors.len() == 1
        && let Some(single) = factors.pop()
    {
        return Ok((single, height));
    }
    let span = factors.iter().map(|factor| factor.span).reduce(Span::to).unwrap_or_default();
    tall(Node::Product(factors), span, height)
}
