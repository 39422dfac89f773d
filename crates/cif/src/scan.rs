//! One value at a place in the text: where it ends and how it is delimited. The difference between the versions is here.

use std::ops::Range;

use values::Diagnostic;

use crate::source::{Source, Version, shorten};

/// How many lists and tables may stand inside each other.
pub const MAX_DEPTH: usize = 64;

/// How a value is delimited.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Form {
    Unquoted,
    Single,
    Double,
    TripleSingle,
    TripleDouble,
    Field,
    List,
    Table,
}

const FORMS: [Form; 8] = [
    Form::Unquoted,
    Form::Single,
    Form::Double,
    Form::TripleSingle,
    Form::TripleDouble,
    Form::Field,
    Form::List,
    Form::Table,
];

/// The content of a value as a range of the text, with its form, in eight bytes.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Span {
    start: u32,
    /// Length times eight, plus the form.
    packed: u32,
}

/// A byte offset or a count: `Source` holds files of at most `MAX_BYTES`, so that it always fits.
pub(crate) fn narrow(offset: usize) -> u32 {
    u32::try_from(offset).unwrap_or(u32::MAX)
}

impl Span {
    pub(crate) fn new(form: Form, content: &Range<usize>) -> Self {
        Self { start: narrow(content.start), packed: (narrow(content.len()) << 3) | form as u32 }
    }

    pub(crate) fn form(self) -> Form {
        FORMS[(self.packed & 7) as usize]
    }

    /// What stands between the delimiters.
    pub(crate) fn content(self) -> Range<usize> {
        let start = self.start as usize;
        start..start + (self.packed >> 3) as usize
    }

    /// First byte of the opening delimiter.
    pub(crate) fn opening(self) -> usize {
        let delimiter = match self.form() {
            Form::Unquoted => 0,
            Form::TripleSingle | Form::TripleDouble => 3,
            _ => 1,
        };
        self.start as usize - delimiter
    }
}

/// What stands around a value.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(crate) enum Inside {
    Block,
    /// A list or table: its closing bracket may follow without a blank.
    Brackets,
}

pub(crate) fn is_blank(byte: u8) -> bool {
    matches!(byte, b' ' | b'\t' | b'\n' | b'\r')
}

pub(crate) fn is_line_end(byte: u8) -> bool {
    matches!(byte, b'\n' | b'\r')
}

fn is_bracket(byte: u8) -> bool {
    matches!(byte, b'[' | b']' | b'{' | b'}')
}

/// Reads values out of a text; no state besides the text, so that views use it as well as the parser.
#[derive(Clone, Copy)]
pub(crate) struct Scanner<'s> {
    pub(crate) source: &'s Source,
    pub(crate) text: &'s [u8],
}

impl<'s> Scanner<'s> {
    pub(crate) fn new(source: &'s Source) -> Self {
        Self { source, text: source.text().as_bytes() }
    }

    pub(crate) fn byte(&self, at: usize) -> Option<u8> {
        self.text.get(at).copied()
    }

    /// End of the token that begins here: the next blank or the end of the text.
    pub(crate) fn token_end(&self, at: usize) -> usize {
        at + self.text[at..].iter().position(|b| is_blank(*b)).unwrap_or(self.text.len() - at)
    }

    /// The first byte at or behind `at` that is neither blank nor comment.
    pub(crate) fn skip_blanks(&self, mut at: usize) -> usize {
        loop {
            match self.byte(at) {
                Some(b) if is_blank(b) => at += 1,
                Some(b'#') => at = self.line_end(at),
                _ => return at,
            }
        }
    }

    pub(crate) fn line_end(&self, at: usize) -> usize {
        at + self.text[at..].iter().position(|b| is_line_end(*b)).unwrap_or(self.text.len() - at)
    }

    fn at_line_start(&self, at: usize) -> bool {
        at == 0 || is_line_end(self.text[at - 1])
    }

    pub(crate) fn slice(&self, range: Range<usize>) -> &'s str {
        self.source.text().get(range).unwrap_or("")
    }

    /// Line of an offset, from 1.
    pub(crate) fn line(&self, at: usize) -> usize {
        self.source.location(at, at).line
    }

    /// A message about a range of the text.
    pub(crate) fn fault(
        &self,
        range: Range<usize>,
        found: impl Into<String>,
        expected: impl Into<String>,
        mend: impl Into<String>,
    ) -> Diagnostic {
        Diagnostic::new(found, expected, mend).at(self.source.location(range.start, range.end))
    }

    /// The value that begins at `at`, which is no blank, and the first byte behind it.
    pub(crate) fn value(&self, at: usize, inside: Inside) -> Result<(Span, usize), Diagnostic> {
        let v2 = self.source.version() == Version::V2_0;
        match self.byte(at) {
            Some(b';') if self.at_line_start(at) => self.field(at, inside),
            Some(b'\'' | b'"') if v2 => self.quoted(at, inside),
            Some(b'\'' | b'"') => self.quoted_old(at),
            Some(b'[' | b'{') if v2 => self.brackets(at, inside),
            _ => self.unquoted(at, inside),
        }
    }

    /// CIF 1.1: the closing quote is the first one before a blank or the end of the text.
    fn quoted_old(&self, at: usize) -> Result<(Span, usize), Diagnostic> {
        let quote = self.text[at];
        let form = if quote == b'\'' { Form::Single } else { Form::Double };
        let mut end = at + 1;
        loop {
            match self.byte(end) {
                Some(b) if b == quote && self.byte(end + 1).is_none_or(is_blank) => {
                    return Ok((Span::new(form, &(at + 1..end)), end + 1));
                }
                Some(b) if !is_line_end(b) => end += 1,
                _ => return Err(self.unclosed_quote(at, end)),
            }
        }
    }

    /// CIF 2.0: the first quote closes; three quotes open a string that may cross lines.
    fn quoted(&self, at: usize, inside: Inside) -> Result<(Span, usize), Diagnostic> {
        let quote = self.text[at];
        let triple = [quote; 3];
        if self.text[at..].starts_with(&triple) {
            let form = if quote == b'\'' { Form::TripleSingle } else { Form::TripleDouble };
            let Some(length) = self.text[at + 3..].windows(3).position(|window| window == triple) else {
                let delimiter = self.slice(at..at + 3);
                return Err(self.fault(
                    at..at + 3,
                    format!("the string opened here by {delimiter} is not closed"),
                    format!("{delimiter} at its end"),
                    format!("write {delimiter} where the string ends"),
                ));
            };
            let content = at + 3..at + 3 + length;
            return Ok((Span::new(form, &content), self.closed(content.end + 3, inside, "a triple-quoted string")?));
        }
        let form = if quote == b'\'' { Form::Single } else { Form::Double };
        let end = at + 1 + self.text[at + 1..].iter().take_while(|b| **b != quote && !is_line_end(**b)).count();
        if self.byte(end) != Some(quote) {
            return Err(self.unclosed_quote(at, end));
        }
        Ok((Span::new(form, &(at + 1..end)), self.closed(end + 1, inside, "a quoted string")?))
    }

    pub(crate) fn unclosed_quote(&self, at: usize, end: usize) -> Diagnostic {
        let quote = char::from(self.text[at]);
        let triple = self.text[at..].starts_with(&[self.text[at]; 3]);
        let mend = match self.source.version() {
            Version::V1_1 if triple => {
                "strings in three quotes need #\\#CIF_2.0 as the first line; in CIF 1.1 use a text field in semicolons"
                    .to_owned()
            }
            _ => {
                format!("close the string with {quote}, or use a text field in semicolons for a text of several lines")
            }
        };
        self.fault(
            at..end,
            format!("the string opened here by {quote} is not closed in its line"),
            "a closing quote before the end of the line",
            mend,
        )
    }

    /// Checks what stands behind a closing delimiter.
    pub(crate) fn closed(&self, end: usize, inside: Inside, what: &str) -> Result<usize, Diagnostic> {
        match self.byte(end) {
            None => Ok(end),
            Some(b) if is_blank(b) => Ok(end),
            Some(b']' | b'}') if inside == Inside::Brackets => Ok(end),
            Some(_) => {
                let token = end..self.token_end(end);
                let mend = if what == "a quoted string" {
                    "add a blank; in CIF 2.0 a string holds its own delimiter only inside three quotes or a text field"
                } else {
                    "add a blank"
                };
                let found = format!("`{}` directly behind the end of {what}", shorten(self.slice(token.clone())));
                Err(self.fault(token, found, "a blank or a line end", mend))
            }
        }
    }

    /// A text field: from a semicolon in column one to the next line that begins with one.
    fn field(&self, at: usize, inside: Inside) -> Result<(Span, usize), Diagnostic> {
        let mut end = at + 1;
        loop {
            end = self.line_end(end);
            let next = match self.byte(end) {
                Some(b'\r') if self.byte(end + 1) == Some(b'\n') => end + 2,
                Some(_) => end + 1,
                None => {
                    return Err(self.fault(
                        at..at + 1,
                        "the text field opened here is not closed",
                        "a line that begins with a semicolon",
                        "write a line with a single ; behind the text",
                    ));
                }
            };
            if self.byte(next) != Some(b';') {
                end = next;
                continue;
            }
            let close = next + 1;
            let blank = match self.byte(close) {
                None => true,
                Some(b) => is_blank(b) || (inside == Inside::Brackets && matches!(b, b']' | b'}')),
            };
            if blank {
                return Ok((Span::new(Form::Field, &(at + 1..end)), close));
            }
            let token = close..self.token_end(close);
            let opened = self.source.location(at, at + 1).line;
            return Err(self.fault(
                next..token.end,
                format!(
                    "the text field of line {opened} is closed by this semicolon, but `{}` follows without a blank",
                    shorten(self.slice(token))
                ),
                "a blank or a line end behind the closing semicolon",
                "put a blank before the semicolon if it belongs to the text, behind it if it closes the field",
            ));
        }
    }

    /// An unquoted value. Tags and keywords come here only where they are out of place.
    fn unquoted(&self, at: usize, inside: Inside) -> Result<(Span, usize), Diagnostic> {
        let v2 = self.source.version() == Version::V2_0;
        let mut end = at;
        while let Some(b) = self.byte(end) {
            if is_blank(b) || (v2 && is_bracket(b)) {
                break;
            }
            end += 1;
        }
        if let Some(b) = self.byte(end).filter(|b| is_bracket(*b)) {
            let closes = inside == Inside::Brackets && matches!(b, b']' | b'}') && end > at;
            if !closes {
                let found = format!("`{}` in an unquoted value", char::from(b));
                return Err(self.fault(
                    end..end + 1,
                    found,
                    "none of [ ] { } outside quotes in CIF 2.0",
                    "quote the value, or set the brackets of a list apart with blanks",
                ));
            }
        }
        self.check_unquoted(at..end, v2)?;
        Ok((Span::new(Form::Unquoted, &(at..end)), end))
    }

    fn check_unquoted(&self, range: Range<usize>, v2: bool) -> Result<(), Diagnostic> {
        let token = self.slice(range.clone());
        let shown = || shorten(token);
        match token.as_bytes().first() {
            Some(b'_') => {
                let found = format!("the tag `{}` where a value belongs", shown());
                Err(self.fault(range, found, "a value", "close the list before it, or quote the value"))
            }
            Some(b'$') => {
                let found = format!("the value `{}` begins with $", shown());
                Err(self.fault(range, found, "a value; $ is reserved", "quote the value"))
            }
            Some(b'[' | b']') if !v2 && !is_old_bracket_text(token) => Err(self.looks_new(range, "[ or ]")),
            Some(b'{') if !v2 && matches!(token.as_bytes().get(1), Some(b'\'' | b'"')) => {
                Err(self.looks_new(range, "{ and a quote"))
            }
            Some(b'd' | b'D' | b's' | b'S' | b'l' | b'L' | b'g' | b'G') if is_reserved(token) => {
                let found = format!("the reserved word `{}` where a value belongs", shown());
                Err(self.fault(range, found, "a value", "quote the value, or add the value that is missing before it"))
            }
            _ => Ok(()),
        }
    }

    fn looks_new(&self, range: Range<usize>, brackets: &str) -> Diagnostic {
        let found = format!("`{}`: a list or table, in a file read as CIF 1.1", shorten(self.slice(range.clone())));
        self.fault(
            range,
            found,
            format!("no value that begins with {brackets}: the file looks like CIF 2.0 without its first line"),
            "write #\\#CIF_2.0 as the first line, or quote the value",
        )
    }
}

/// Words that no unquoted value may be.
pub(crate) fn is_reserved(token: &str) -> bool {
    let starts = |word: &str| token.get(..word.len()).is_some_and(|head| head.eq_ignore_ascii_case(word));
    starts("data_")
        || starts("save_")
        || ["loop_", "global_", "stop_"].iter().any(|word| token.eq_ignore_ascii_case(word))
}

/// Old files have formulas such as `[Fe2O3]` or `[2.2]paracyclophane`. Brackets that close inside one token are such a
/// text when letters follow the first, or when something follows the last where a list would end.
fn is_old_bracket_text(token: &str) -> bool {
    let mut depth = 0_i32;
    let mut first_closes = None;
    for (at, b) in token.bytes().enumerate() {
        depth += i32::from(b == b'[') - i32::from(b == b']');
        if depth < 0 {
            return false;
        }
        if depth == 0 && first_closes.is_none() {
            first_closes = Some(at);
        }
    }
    let formula = token.as_bytes().get(1).is_some_and(u8::is_ascii_alphabetic);
    depth == 0 && (formula || first_closes.is_some_and(|at| at + 1 < token.len() && at > 1))
}

#[cfg(test)]
mod tests {
    use super::is_old_bracket_text;

    #[test]
    fn formulas_in_brackets_are_told_from_lists() {
        for text in ["[Fe2O3]", "[Fe(CN)6]3-", "[2.2]paracyclophane", "[NH4]2[SO4]"] {
            assert!(is_old_bracket_text(text), "{text}");
        }
        for list in ["[", "[1", "[1.2]", "[]", "['a']", "[[1]]", "]", "[]x", "[a"] {
            assert!(!is_old_bracket_text(list), "{list}");
        }
    }
}
