//! Lists and tables of CIF 2.0: brackets that match, blanks between values, keys with their colon.
//!
//! `[a b c]` and `{'key':value 'key2':value2}`, nested at will up to [`MAX_DEPTH`].

use values::Diagnostic;

use crate::scan::{Form, Inside, MAX_DEPTH, Scanner, Span, is_line_end, is_reserved};
use crate::source::shorten;

/// An open list or table.
#[derive(Clone, Copy)]
struct Open {
    at: usize,
    key: Key,
}

/// What a table waits for; a list stays at `Awaited`.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Key {
    Awaited,
    Read,
}

impl Scanner<'_> {
    /// A list or table with all that is inside. A stack of its own instead of recursion: nesting cannot overflow it.
    pub(crate) fn brackets(&self, at: usize, inside: Inside) -> Result<(Span, usize), Diagnostic> {
        let mut open = vec![Open { at, key: Key::Awaited }];
        let mut next = at + 1;
        let mut needs_blank = false;
        while let Some(top) = open.last().copied() {
            let token = self.skip_blanks(next);
            let Some(byte) = self.byte(token) else { return Err(self.unclosed_bracket(top.at)) };
            if matches!(byte, b']' | b'}') {
                self.check_closing(token, top)?;
                open.pop();
                next = token + 1;
                needs_blank = true;
                if let Some(outer) = open.last_mut() {
                    outer.key = Key::Awaited;
                }
                continue;
            }
            if needs_blank && token == next {
                return Err(self.no_blank(token));
            }
            needs_blank = false;
            if self.text[top.at] == b'{' && top.key == Key::Awaited {
                next = self.key(token)?.1;
                self.set_key(&mut open, Key::Read);
                continue;
            }
            if matches!(byte, b'[' | b'{') {
                if open.len() == MAX_DEPTH {
                    return Err(self.fault(
                        token..token + 1,
                        format!("more than {MAX_DEPTH} lists or tables inside each other"),
                        format!("at most {MAX_DEPTH}"),
                        "check for a closing bracket that is missing",
                    ));
                }
                open.push(Open { at: token, key: Key::Awaited });
                next = token + 1;
                continue;
            }
            next = self.element(token, top.at)?;
            needs_blank = true;
            self.set_key(&mut open, Key::Awaited);
        }
        let form = if self.text[at] == b'[' { Form::List } else { Form::Table };
        if inside == Inside::Block {
            self.closed(next, inside, "a list or table")?;
        }
        Ok((Span::new(form, &(at + 1..next - 1)), next))
    }

    fn set_key(&self, open: &mut [Open], key: Key) {
        if let Some(top) = open.last_mut() {
            top.key = key;
        }
    }

    /// A value that is neither list nor table, inside the brackets opened at `opened`.
    fn element(&self, at: usize, opened: usize) -> Result<usize, Diagnostic> {
        let end = self.token_end(at);
        let token = self.slice(at..end);
        if token.starts_with('_') || is_reserved(token) {
            let mut error = self.unclosed_bracket(opened);
            let line = self.line(at);
            error.found = format!("{} before `{}` in line {line}", error.found, shorten(token));
            return Err(error);
        }
        self.value(at, Inside::Brackets).map(|value| value.1)
    }

    /// Key of a table entry, quoted, with the colon behind it; the offset is that of the first byte behind the colon.
    pub(crate) fn key(&self, at: usize) -> Result<(Span, usize), Diagnostic> {
        let quote = self.byte(at).filter(|b| matches!(b, b'\'' | b'"'));
        let Some(quote) = quote else {
            let token = at..self.token_end(at);
            let found = format!("`{}` where the key of a table belongs", shorten(self.slice(token.clone())));
            return Err(self.fault(token, found, "a key in quotes, as in {'key':value}", "quote the key"));
        };
        let width = if self.text[at..].starts_with(&[quote; 3]) { 3 } else { 1 };
        let start = at + width;
        let delimiter = &self.text[at..start];
        let length = self.text[start..]
            .windows(width)
            .take_while(|window| width == 3 || !is_line_end(window[0]))
            .position(|window| window == delimiter);
        let Some(length) = length else { return Err(self.unclosed_quote(at, self.line_end(at))) };
        let form = match (quote, width) {
            (b'\'', 1) => Form::Single,
            (b'\'', _) => Form::TripleSingle,
            (_, 1) => Form::Double,
            _ => Form::TripleDouble,
        };
        let colon = start + length + width;
        if self.byte(colon) != Some(b':') {
            let found = format!("no colon behind the key `{}`", shorten(self.slice(start..start + length)));
            return Err(self.fault(at..colon, found, "a colon directly behind the key", "write it as 'key':value"));
        }
        Ok((Span::new(form, &(start..start + length)), colon + 1))
    }

    fn check_closing(&self, at: usize, top: Open) -> Result<(), Diagnostic> {
        let (opening, closing) = (self.text[top.at], self.text[at]);
        let expected = if opening == b'[' { b']' } else { b'}' };
        if closing != expected {
            let line = self.line(top.at);
            return Err(self.fault(
                at..at + 1,
                format!("`{}` closes what `{}` opened in line {line}", char::from(closing), char::from(opening)),
                format!("`{}`", char::from(expected)),
                "close the brackets in the order in which they were opened",
            ));
        }
        if top.key == Key::Read {
            let found = "the table ends behind a key";
            return Err(self.fault(
                at..at + 1,
                found,
                "a value for the key",
                "write the value, or ? for an unknown one",
            ));
        }
        Ok(())
    }

    fn unclosed_bracket(&self, at: usize) -> Diagnostic {
        let (what, bracket) = if self.text[at] == b'[' { ("list", ']') } else { ("table", '}') };
        self.fault(
            at..at + 1,
            format!("the {what} opened here is not closed"),
            format!("`{bracket}` at its end"),
            format!("write {bracket} where the {what} ends"),
        )
    }

    fn no_blank(&self, at: usize) -> Diagnostic {
        let token = at..self.token_end(at);
        let found = format!("`{}` directly behind another value", shorten(self.slice(token.clone())));
        self.fault(token, found, "a blank between two values", "add a blank")
    }
}
