//! One value: its kind, its text, its number, its place.

use std::borrow::Cow;

use values::{Diagnostic, Location, Measured};

use crate::field;
use crate::number;
use crate::scan::{Form, Inside, Scanner, Span};
use crate::source::{Source, shorten};

/// A value of an item, of a loop or inside a list; as small as two pointers and free to copy.
///
/// Two values are equal when they are of one [`Kind`] with equal content; how they are quoted does not count.
#[derive(Clone, Copy, Debug)]
pub struct Value<'a> {
    source: &'a Source,
    span: Span,
}

/// What a value is.
#[derive(Clone, Debug, PartialEq)]
pub enum Kind<'a> {
    /// `?`: unknown.
    Unknown,
    /// `.`: does not apply, or takes its default.
    Inapplicable,
    /// Any other single value, a number too; line ends are LF, folded lines are joined.
    Text(Cow<'a, str>),
    /// `[…]` of CIF 2.0.
    List(List<'a>),
    /// `{…}` of CIF 2.0.
    Table(Table<'a>),
}

/// How a value is written in its file.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Quoting {
    /// As it is; brackets of lists and tables count as this too.
    Unquoted,
    /// In one or three quotes.
    Quoted,
    /// As a text field between semicolons.
    TextField,
}

impl<'a> Value<'a> {
    pub(crate) fn new(source: &'a Source, span: Span) -> Self {
        Self { source, span }
    }

    fn raw(self) -> &'a str {
        self.source.text().get(self.span.content()).unwrap_or("")
    }

    /// What the value is, with its content.
    #[must_use]
    pub fn kind(self) -> Kind<'a> {
        let raw = self.raw();
        match self.span.form() {
            Form::Unquoted if raw == "?" => Kind::Unknown,
            Form::Unquoted if raw == "." => Kind::Inapplicable,
            Form::Field => Kind::Text(field::decode(raw)),
            Form::TripleSingle | Form::TripleDouble => Kind::Text(field::normalise(raw)),
            Form::Unquoted | Form::Single | Form::Double => Kind::Text(Cow::Borrowed(raw)),
            Form::List => Kind::List(List { inside: self }),
            Form::Table => Kind::Table(Table { inside: self }),
        }
    }

    /// The text of the value; `None` for unquoted `?` and `.`, lists and tables.
    #[must_use]
    pub fn text(self) -> Option<Cow<'a, str>> {
        match self.kind() {
            Kind::Text(text) => Some(text),
            _ => None,
        }
    }

    /// Whether the value is an unquoted `?` or `.`.
    #[must_use]
    pub fn is_missing(self) -> bool {
        self.span.form() == Form::Unquoted && matches!(self.raw(), "?" | ".")
    }

    /// How the value is written.
    #[must_use]
    pub fn quoting(self) -> Quoting {
        match self.span.form() {
            Form::Unquoted | Form::List | Form::Table => Quoting::Unquoted,
            Form::Field => Quoting::TextField,
            _ => Quoting::Quoted,
        }
    }

    /// Where the value begins, its opening quote, semicolon or bracket included.
    #[must_use]
    pub fn location(self) -> Location {
        let start = self.span.opening();
        let content = self.span.content();
        let closing = if self.span.form() == Form::Field { 0 } else { content.start - start };
        self.source.location(start, content.end + closing)
    }

    /// The number, in whatever unit the tag means, with its s.u. (u = 0 when none is given); `None` for `?` and `.`.
    ///
    /// `[+-]digits[.digits][e[+-]digits][(digits)]`; the s.u. belongs to the last digits and scales with the exponent.
    /// Numbers in quotes or text fields are read too. Source: International Tables G (2005), section 2.2.7 (from memory).
    ///
    /// # Errors
    /// A text, list or table, at its place; names a decimal comma, a Unicode minus, or a blank before the parenthesis.
    pub fn number(self) -> Result<Option<Measured>, Diagnostic> {
        let text = match self.kind() {
            Kind::Unknown | Kind::Inapplicable => return Ok(None),
            Kind::Text(text) => text,
            Kind::List(_) | Kind::Table(_) => {
                return Err(
                    Diagnostic::new("a list or table", "a single number", "write one number").at(self.location())
                );
            }
        };
        let token = text.trim_matches([' ', '\t', '\n']);
        number::read(token).map(Some).map_err(|error| {
            let shown = shorten(token);
            let message = match number::hint(token) {
                Some((found, mend)) => {
                    Diagnostic::new(format!("`{shown}` is not a number: {found}"), "a number such as 5.431(2)", mend)
                }
                None => Diagnostic::new(
                    format!("`{shown}` is not a number"),
                    format!(
                        "{} at character {} of it",
                        error.expected,
                        token.get(..error.offset).map_or(0, |t| t.chars().count()) + 1
                    ),
                    "correct the value, such as 5.431(2), or write ? if it is unknown",
                ),
            };
            message.at(self.location())
        })
    }

    /// The value at an offset inside brackets, and the offset behind it. The parser has been here: it fails for none.
    fn inside(self, at: usize) -> Option<(Value<'a>, usize)> {
        let scanner = Scanner::new(self.source);
        let at = scanner.skip_blanks(at);
        if at >= self.span.content().end {
            return None;
        }
        let (span, end) = scanner.value(at, Inside::Brackets).ok()?;
        Some((Self { source: self.source, span }, end))
    }
}

impl PartialEq for Value<'_> {
    fn eq(&self, other: &Self) -> bool {
        self.kind() == other.kind()
    }
}

/// A list of CIF 2.0.
#[derive(Clone, Copy, Debug)]
pub struct List<'a> {
    inside: Value<'a>,
}

impl<'a> List<'a> {
    /// The values in their order.
    pub fn iter(self) -> impl Iterator<Item = Value<'a>> {
        let mut at = self.inside.span.content().start;
        std::iter::from_fn(move || {
            let (value, end) = self.inside.inside(at)?;
            at = end;
            Some(value)
        })
    }
}

impl PartialEq for List<'_> {
    fn eq(&self, other: &Self) -> bool {
        self.iter().eq(other.iter())
    }
}

/// A table of CIF 2.0: values by key.
#[derive(Clone, Copy, Debug)]
pub struct Table<'a> {
    inside: Value<'a>,
}

impl<'a> Table<'a> {
    /// Keys and values in their order.
    pub fn iter(self) -> impl Iterator<Item = (Cow<'a, str>, Value<'a>)> {
        let mut at = self.inside.span.content().start;
        std::iter::from_fn(move || {
            let scanner = Scanner::new(self.inside.source);
            let start = scanner.skip_blanks(at);
            if start >= self.inside.span.content().end {
                return None;
            }
            let (key, colon) = scanner.key(start).ok()?;
            let (value, end) = self.inside.inside(colon)?;
            at = end;
            Some((field::normalise(scanner.slice(key.content())), value))
        })
    }

    /// The value of the first entry with that key, compared as it is.
    #[must_use]
    pub fn get(self, key: &str) -> Option<Value<'a>> {
        self.iter().find(|(own, _)| own == key).map(|(_, value)| value)
    }
}

impl PartialEq for Table<'_> {
    fn eq(&self, other: &Self) -> bool {
        self.iter().eq(other.iter())
    }
}
