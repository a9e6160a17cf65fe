//! Reading the notation of equations into a tree with the place of every part.
//!
//! ```text
//! expression  = sum [ "when" sum relation sum "otherwise" expression ]
//! relation    = "<" | "<=" | ">" | ">="          (also "≤", "≥")
//! sum         = product { ("+" | "-") product }
//! product     = signed { ("*" | "/" | "·" | "×") signed }
//! signed      = "-" signed | power
//! power       = atom [ "^" signed | "²" | "³" ]
//! atom        = number | name | name "(" expression { "," expression } ")" | "(" expression ")"
//! ```
//!
//! Names are letters of any alphabet, digits and `_`, starting with a letter.

use std::ops::Range;

use thiserror::Error;

use super::Relation;

/// A part of an equation, with its place in the text.
#[derive(Clone, Debug, PartialEq)]
pub struct Tree {
    /// What it is.
    pub kind: TreeKind,
    /// Its bytes in the text.
    pub span: Range<usize>,
}

/// What a part of an equation is.
#[derive(Clone, Debug, PartialEq)]
pub enum TreeKind {
    /// A number, as it was typed.
    Number(String),
    /// A name.
    Name(String),
    /// Terms, each with whether it is subtracted.
    Sum(Vec<(bool, Tree)>),
    /// Factors, each with whether it divides.
    Product(Vec<(bool, Tree)>),
    /// Base and exponent.
    Power(Box<[Tree; 2]>),
    /// A function or a table with its arguments.
    Call(String, Vec<Tree>),
    /// `then when left relation right otherwise otherwise`.
    Choose {
        /// The comparison.
        relation: Relation,
        /// Left, right, then, otherwise.
        parts: Box<[Tree; 4]>,
    },
}

/// Where an equation cannot be read, and why.
#[derive(Clone, Debug, PartialEq, Error)]
#[error("{problem}")]
pub struct SyntaxError {
    /// What is wrong.
    pub problem: Syntax,
    /// The bytes of the text that are meant.
    pub span: Range<usize>,
}

/// What can be wrong with the text of an equation.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum Syntax {
    /// Something else was due.
    #[error("expected {expected}, found {found}")]
    Expected {
        /// What was due.
        expected: &'static str,
        /// What stands there.
        found: String,
    },
    /// A character that no equation has.
    #[error("`{0}` has no meaning in an equation")]
    Character(char),
    /// A number that is not finite or not readable.
    #[error("`{0}` is not a number")]
    Number(String),
    /// A decimal comma, or a missing closing bracket.
    #[error("a comma only separates the arguments of a function; decimals have a point")]
    Comma,
    /// Deeper brackets than any equation needs.
    #[error("the equation is nested more than {0} levels deep")]
    TooDeep(usize),
    /// A longer text than any equation needs.
    #[error("the equation is longer than {0} characters")]
    TooLong(usize),
    /// No equals sign, or two, where a relation is due.
    #[error("expected one equals sign: left side = right side")]
    NotARelation,
}

/// Bounds that keep hostile texts cheap.
const DEEPEST: usize = 100;
const LONGEST: usize = 8000;

/// Reads an expression.
///
/// # Errors
///
/// [`SyntaxError`] with the place.
pub fn parse(text: &str) -> Result<Tree, SyntaxError> {
    let mut parser = Parser::new(text)?;
    let tree = parser.expression(0)?;
    parser.end(&[Token::End])?;
    Ok(tree)
}

/// Reads `left = right`.
///
/// # Errors
///
/// [`SyntaxError`] with the place.
pub fn parse_equation(text: &str) -> Result<[Tree; 2], SyntaxError> {
    let mut parser = Parser::new(text)?;
    let left = parser.expression(0)?;
    if parser.peek() != &Token::Equals {
        let span = parser.span();
        return Err(SyntaxError { problem: Syntax::NotARelation, span });
    }
    parser.advance();
    let right = parser.expression(0)?;
    if parser.peek() == &Token::Equals {
        let span = parser.span();
        return Err(SyntaxError { problem: Syntax::NotARelation, span });
    }
    parser.end(&[Token::End])?;
    Ok([left, right])
}

#[derive(Clone, Debug, PartialEq)]
enum Token {
    Number(String),
    Name(String),
    Plus,
    Minus,
    Times,
    Over,
    Caret,
    Superscript(u8),
    Open,
    Close,
    Comma,
    Equals,
    /// A comparison, and whether its sides are to be swapped.
    Relation(Relation, bool),
    End,
}

impl Token {
    fn described(&self) -> String {
        match self {
            Self::Number(text) | Self::Name(text) => format!("`{text}`"),
            Self::Plus => "`+`".into(),
            Self::Minus => "`-`".into(),
            Self::Times => "`*`".into(),
            Self::Over => "`/`".into(),
            Self::Caret => "`^`".into(),
            Self::Superscript(digit) => format!("the exponent {digit}"),
            Self::Open => "`(`".into(),
            Self::Close => "`)`".into(),
            Self::Comma => "`,`".into(),
            Self::Equals => "`=`".into(),
            Self::Relation(..) => "a comparison".into(),
            Self::End => "the end".into(),
        }
    }
}

struct Parser {
    tokens: Vec<(Token, Range<usize>)>,
    at: usize,
}

impl Parser {
    fn new(text: &str) -> Result<Self, SyntaxError> {
        if text.len() > LONGEST {
            let span = LONGEST..text.len();
            return Err(SyntaxError { problem: Syntax::TooLong(LONGEST), span });
        }
        Ok(Self { tokens: tokens(text)?, at: 0 })
    }

    fn peek(&self) -> &Token {
        &self.tokens[self.at].0
    }

    fn span(&self) -> Range<usize> {
        self.tokens[self.at].1.clone()
    }

    fn advance(&mut self) {
        // The last token is the end, which is never passed.
        self.at = (self.at + 1).min(self.tokens.len() - 1);
    }

    fn expected<T>(&self, expected: &'static str) -> Result<T, SyntaxError> {
        let problem = match self.peek() {
            Token::Comma => Syntax::Comma,
            found => Syntax::Expected { expected, found: found.described() },
        };
        Err(SyntaxError { problem, span: self.span() })
    }

    fn end(&self, allowed: &[Token]) -> Result<(), SyntaxError> {
        if allowed.contains(self.peek()) { Ok(()) } else { self.expected("an operator or the end") }
    }

    fn take(&mut self, token: &Token, expected: &'static str) -> Result<(), SyntaxError> {
        if self.peek() != token {
            return self.expected(expected);
        }
        self.advance();
        Ok(())
    }

    fn expression(&mut self, depth: usize) -> Result<Tree, SyntaxError> {
        if depth > DEEPEST {
            return Err(SyntaxError { problem: Syntax::TooDeep(DEEPEST), span: self.span() });
        }
        let then = self.sum(depth)?;
        if !self.is_word("when") {
            return Ok(then);
        }
        self.advance();
        let mut left = self.sum(depth)?;
        let &Token::Relation(relation, swapped) = self.peek() else {
            return self.expected("a comparison such as `<=`");
        };
        self.advance();
        let mut right = self.sum(depth)?;
        if swapped {
            std::mem::swap(&mut left, &mut right);
        }
        if !self.is_word("otherwise") {
            return self.expected("`otherwise`");
        }
        self.advance();
        let otherwise = self.expression(depth + 1)?;
        let span = then.span.start..otherwise.span.end;
        let parts = Box::new([left, right, then, otherwise]);
        Ok(Tree { kind: TreeKind::Choose { relation, parts }, span })
    }

    fn is_word(&self, word: &str) -> bool {
        matches!(self.peek(), Token::Name(name) if name == word)
    }

    fn sum(&mut self, depth: usize) -> Result<Tree, SyntaxError> {
        let mut terms = vec![(false, self.product(depth)?)];
        while let sign @ (Token::Plus | Token::Minus) = self.peek() {
            let negative = *sign == Token::Minus;
            self.advance();
            terms.push((negative, self.product(depth)?));
        }
        Ok(joined(terms, TreeKind::Sum))
    }

    fn product(&mut self, depth: usize) -> Result<Tree, SyntaxError> {
        let mut factors = vec![(false, self.signed(depth)?)];
        while let sign @ (Token::Times | Token::Over) = self.peek() {
            let divides = *sign == Token::Over;
            self.advance();
            factors.push((divides, self.signed(depth)?));
        }
        Ok(joined(factors, TreeKind::Product))
    }

    fn signed(&mut self, depth: usize) -> Result<Tree, SyntaxError> {
        if depth > DEEPEST {
            return Err(SyntaxError { problem: Syntax::TooDeep(DEEPEST), span: self.span() });
        }
        if self.peek() != &Token::Minus {
            return self.power(depth);
        }
        let start = self.span().start;
        self.advance();
        let operand = self.signed(depth + 1)?;
        let span = start..operand.span.end;
        Ok(Tree { kind: TreeKind::Sum(vec![(true, operand)]), span })
    }

    fn power(&mut self, depth: usize) -> Result<Tree, SyntaxError> {
        let base = self.atom(depth)?;
        let exponent = match self.peek().clone() {
            Token::Caret => {
                self.advance();
                self.signed(depth + 1)?
            }
            Token::Superscript(digit) => {
                let span = self.span();
                self.advance();
                Tree { kind: TreeKind::Number(digit.to_string()), span }
            }
            _ => return Ok(base),
        };
        let span = base.span.start..exponent.span.end;
        Ok(Tree { kind: TreeKind::Power(Box::new([base, exponent])), span })
    }

    fn atom(&mut self, depth: usize) -> Result<Tree, SyntaxError> {
        let start = self.span();
        match self.peek().clone() {
            Token::Number(text) => {
                self.advance();
                Ok(Tree { kind: TreeKind::Number(text), span: start })
            }
            Token::Name(name) if name != "when" && name != "otherwise" => {
                self.advance();
                if self.peek() != &Token::Open {
                    return Ok(Tree { kind: TreeKind::Name(name), span: start });
                }
                self.advance();
                let mut arguments = vec![self.expression(depth + 1)?];
                while self.peek() == &Token::Comma {
                    self.advance();
                    arguments.push(self.expression(depth + 1)?);
                }
                let span = start.start..self.span().end;
                self.take(&Token::Close, "`)`")?;
                Ok(Tree { kind: TreeKind::Call(name, arguments), span })
            }
            Token::Open => {
                self.advance();
                let inner = self.expression(depth + 1)?;
                let span = start.start..self.span().end;
                self.take(&Token::Close, "`)`")?;
                Ok(Tree { kind: inner.kind, span })
            }
            _ => self.expected("a number, a name or `(`"),
        }
    }
}

/// One part alone, or several joined.
fn joined(mut parts: Vec<(bool, Tree)>, kind: impl Fn(Vec<(bool, Tree)>) -> TreeKind) -> Tree {
    if parts.len() == 1 {
        return parts.remove(0).1;
    }
    let span = parts[0].1.span.start..parts[parts.len() - 1].1.span.end;
    Tree { kind: kind(parts), span }
}

fn tokens(text: &str) -> Result<Vec<(Token, Range<usize>)>, SyntaxError> {
    let mut result = Vec::new();
    let mut at = 0;
    while let Some(letter) = text[at..].chars().next() {
        let start = at;
        at += letter.len_utf8();
        let next = text[at..].chars().next();
        let token = match letter {
            _ if letter.is_whitespace() => continue,
            '+' => Token::Plus,
            '-' | '−' => Token::Minus,
            '*' | '·' | '×' => Token::Times,
            '/' => Token::Over,
            '^' => Token::Caret,
            '²' => Token::Superscript(2),
            '³' => Token::Superscript(3),
            '(' => Token::Open,
            ')' => Token::Close,
            ',' => Token::Comma,
            '=' => Token::Equals,
            '≤' => Token::Relation(Relation::AtMost, false),
            '≥' => Token::Relation(Relation::AtMost, true),
            '<' | '>' => {
                let or_equal = next == Some('=');
                at += usize::from(or_equal);
                let relation = if or_equal { Relation::AtMost } else { Relation::Below };
                Token::Relation(relation, letter == '>')
            }
            _ if letter.is_ascii_digit() || letter == '.' => {
                at = start + number_length(&text[start..]);
                let number = &text[start..at];
                if !number.parse::<f64>().is_ok_and(f64::is_finite) {
                    let problem = Syntax::Number(number.to_owned());
                    return Err(SyntaxError { problem, span: start..at });
                }
                Token::Number(number.to_owned())
            }
            _ if letter.is_alphabetic() => {
                let length = text[start..]
                    .find(|c: char| !(c.is_alphabetic() || c.is_ascii_digit() || c == '_'))
                    .unwrap_or(text.len() - start);
                at = start + length;
                Token::Name(text[start..at].to_owned())
            }
            _ => {
                let problem = Syntax::Character(letter);
                return Err(SyntaxError { problem, span: start..at });
            }
        };
        result.push((token, start..at));
    }
    result.push((Token::End, text.len()..text.len()));
    Ok(result)
}

/// Digits, a point, and an exponent such as `e-3`.
fn number_length(text: &str) -> usize {
    let digits_and_points = |from: usize| {
        text[from..].bytes().take_while(|byte| byte.is_ascii_digit() || *byte == b'.').count()
    };
    let mut length = digits_and_points(0).max(1);
    if text[length..].starts_with(['e', 'E']) {
        let sign = usize::from(text[length + 1..].starts_with(['+', '-']));
        let exponent = text[length + 1 + sign..].bytes().take_while(u8::is_ascii_digit).count();
        if exponent > 0 {
            length += 1 + sign + exponent;
        }
    }
    length
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_place_of_an_error_is_marked() {
        for (text, span) in [
            ("c * b * ^1.5", 8..9),
            ("c * (b + h", 10..10),
            ("1,84 * b", 1..2),
            ("c $ b", 2..3),
            ("", 0..0),
            ("c b", 2..3),
            ("1.2.3 * b", 0..5),
            ("h when h < p", 12..12),
        ] {
            assert_eq!(parse(text).unwrap_err().span, span, "{text}");
        }
        assert_eq!(parse_equation("a + b").unwrap_err().problem, Syntax::NotARelation);
        assert_eq!(parse_equation("a = b = c").unwrap_err().problem, Syntax::NotARelation);
    }

    #[test]
    fn hostile_texts_end_quickly() {
        let deep = "(".repeat(4000);
        assert!(matches!(parse(&deep).unwrap_err().problem, Syntax::TooDeep(_)));
        let minus = "-".repeat(4000);
        assert!(matches!(parse(&minus).unwrap_err().problem, Syntax::TooDeep(_)));
        let powers = "a^".repeat(3000);
        assert!(matches!(parse(&powers).unwrap_err().problem, Syntax::TooDeep(_)));
        let long = "1+".repeat(5000);
        assert!(matches!(parse(&long).unwrap_err().problem, Syntax::TooLong(_)));
    }
}
