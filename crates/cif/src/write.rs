//! From documents back to text: quotes, text fields, and lines below 80 characters.
//!
//! A value stays unquoted when it was and may be; else it takes the first that can hold it: single quotes, double
//! quotes, three quotes (CIF 2.0, one line), a text field. Lines end in LF and stay below 80 characters unless one
//! value or one line of a text is longer: such lines are folded only beyond 2048 characters, because a reader that does
//! not unfold would see the backslashes. CIF 1.1 is written in ASCII; a document with other characters is written as
//! CIF 2.0, with its first line.

use std::borrow::Cow;

use crate::block::{Block, Entry};
use crate::document::Document;
use crate::field;
use crate::loops::Loop;
use crate::number;
use crate::scan::is_reserved;
use crate::source::{LINE_LIMIT, Version};
use crate::value::{Kind, Quoting, Value};

/// Lines are shorter than this where their values allow it.
pub(crate) const LINE: usize = 80;

/// Values of items stand below each other from this column on, where the tags are short enough.
const VALUE_COLUMN: usize = 34;

/// The text of a document. Read again it gives an equal document; comments are not kept.
#[must_use]
pub fn write(document: &Document) -> String {
    let mut sink = Sink::new(version_for(document));
    for block in document.blocks() {
        sink.heading("data_", block.name());
        sink.entries(block);
        for frame in block.frames() {
            sink.heading("save_", frame.name());
            sink.entries(frame);
            sink.heading("save_", "");
        }
    }
    sink.out
}

/// CIF 2.0 when the document is, or has characters outside ASCII in a name or value.
fn version_for(document: &Document) -> Version {
    if document.version() == Version::V2_0 || document.source.text().is_ascii() {
        return document.version();
    }
    let ascii = |block: Block<'_>| {
        block.name().is_ascii()
            && block.entries().all(|entry| match entry {
                Entry::Item(item) => item.tag.is_ascii() && is_ascii(item.value),
                Entry::Loop(found) => found.tags().all(str::is_ascii) && found.values().all(is_ascii),
            })
    };
    let all = document.blocks().all(|block| ascii(block) && block.frames().all(ascii));
    if all { Version::V1_1 } else { Version::V2_0 }
}

fn is_ascii(value: Value<'_>) -> bool {
    value.text().is_none_or(|text| text.is_ascii())
}

/// A value as it is written.
pub(crate) enum Written<'a> {
    /// A token in the line.
    Token(Cow<'a, str>),
    /// The content of a text field.
    Field(Cow<'a, str>),
}

/// The way to write a text; `plain` lets it stay without quotes if it may.
pub(crate) fn written(text: &str, plain: bool, version: Version) -> Written<'_> {
    // An opening and a closing delimiter of three characters, and a blank.
    if text.chars().nth(LINE_LIMIT - 8).is_some() {
        return Written::Field(field::encode(text));
    }
    if plain && may_be_plain(text, version) {
        return Written::Token(Cow::Borrowed(text));
    }
    match quote(text, version) {
        Some(quoted) => Written::Token(Cow::Owned(quoted)),
        None => Written::Field(field::encode(text)),
    }
}

/// Whether a text without quotes is read as that text.
fn may_be_plain(text: &str, version: Version) -> bool {
    let Some(first) = text.bytes().next() else { return false };
    let starts_well = !matches!(first, b'_' | b'#' | b'$' | b'\'' | b'"' | b'[' | b']' | b'{' | b'}' | b';');
    let blank = |c: char| matches!(c, ' ' | '\t' | '\n' | '\r');
    let bracket = |c: char| matches!(c, '[' | ']' | '{' | '}');
    starts_well
        && !matches!(text, "?" | ".")
        && !is_reserved(text)
        && !text.contains(blank)
        && (version == Version::V1_1 || !text.contains(bracket))
}

/// Whether a text is better written without quotes: a word, and no number, which would be taken for one.
pub(crate) fn is_word(text: &str, version: Version) -> bool {
    may_be_plain(text, version) && number::read(text).is_err()
}

/// The text in quotes in one line, if that can hold it.
fn quote(text: &str, version: Version) -> Option<String> {
    if text.contains(['\n', '\r']) {
        return None;
    }
    let inside = |quote: char| match version {
        Version::V2_0 => text.contains(quote),
        // A quote inside is none before a blank.
        Version::V1_1 => {
            text.contains(&[quote, ' '].iter().collect::<String>())
                || text.contains(&[quote, '\t'].iter().collect::<String>())
        }
    };
    // Quotes that do not occur in the text at all come first: every reader agrees on them.
    let absent = ['\'', '"'].into_iter().find(|quote| !text.contains(*quote));
    if let Some(quote) = absent.or_else(|| ['\'', '"'].into_iter().find(|quote| !inside(*quote))) {
        return Some(format!("{quote}{text}{quote}"));
    }
    if version == Version::V2_0 { triple_quote(text) } else { None }
}

fn triple_quote(text: &str) -> Option<String> {
    ['\'', '"'].into_iter().find_map(|quote| {
        let delimiter: String = [quote; 3].iter().collect();
        let holds = !text.contains(&delimiter) && !text.ends_with(quote);
        holds.then(|| format!("{delimiter}{text}{delimiter}"))
    })
}

/// Text under way, with the column that it has reached.
pub(crate) struct Sink {
    pub(crate) out: String,
    column: usize,
    version: Version,
}

impl Sink {
    pub(crate) fn new(version: Version) -> Self {
        Self { out: format!("#\\#CIF_{version}\n"), column: 0, version }
    }

    fn break_line(&mut self) {
        if self.column > 0 {
            self.out.push('\n');
            self.column = 0;
        }
    }

    /// `data_NAME`, `save_NAME` or `save_` on a line of its own.
    pub(crate) fn heading(&mut self, keyword: &str, name: &str) {
        self.break_line();
        if keyword == "data_" {
            self.out.push('\n');
        }
        self.out.push_str(keyword);
        self.out.push_str(name);
        self.out.push('\n');
    }

    /// A token behind a blank, or on the next line when it does not fit.
    fn token(&mut self, token: &str) {
        let (first, last) = match token.split_once('\n') {
            Some((first, rest)) => (first, rest.rsplit('\n').next()),
            None => (token, None),
        };
        let width = first.chars().count();
        if self.column > 0 && self.column + 1 + width >= LINE {
            self.break_line();
        }
        if self.column > 0 {
            self.out.push(' ');
            self.column += 1;
        }
        self.out.push_str(token);
        self.column = last.map_or(self.column + width, |line| line.chars().count());
    }

    fn field(&mut self, content: &str) {
        self.break_line();
        self.out.push(';');
        self.out.push_str(content);
        self.out.push_str("\n;\n");
    }

    pub(crate) fn written(&mut self, value: &Written<'_>) {
        match value {
            Written::Token(token) => self.token(token),
            Written::Field(content) => self.field(content),
        }
    }

    fn value(&mut self, value: Value<'_>) {
        self.keyed("", value);
    }

    /// A value with a key and its colon before it, or with nothing.
    fn keyed(&mut self, key: &str, value: Value<'_>) {
        match value.kind() {
            Kind::Unknown => self.token(&join(key, "?")),
            Kind::Inapplicable => self.token(&join(key, ".")),
            Kind::Text(text) => match written(&text, value.quoting() == Quoting::Unquoted, self.version) {
                Written::Token(token) => self.token(&join(key, &token)),
                Written::Field(content) => {
                    if !key.is_empty() {
                        self.token(key);
                    }
                    self.field(&content);
                }
            },
            Kind::List(list) => {
                self.token(&join(key, "["));
                list.iter().for_each(|element| self.value(element));
                self.token("]");
            }
            Kind::Table(table) => {
                self.token(&join(key, "{"));
                for (name, element) in table.iter() {
                    self.keyed(&format!("{}:", quote_key(&name)), element);
                }
                self.token("}");
            }
        }
    }

    /// The tag of an item, filled up to the column of the values if a value of that width then fits into the line.
    pub(crate) fn tag(&mut self, tag: &str, value_width: usize) {
        self.break_line();
        self.token(tag);
        let blanks = (VALUE_COLUMN - 1).saturating_sub(self.column);
        if self.column + blanks + 1 + value_width < LINE {
            self.out.extend(std::iter::repeat_n(' ', blanks));
            self.column += blanks;
        }
    }

    fn entries(&mut self, block: Block<'_>) {
        for entry in block.entries() {
            match entry {
                Entry::Item(item) => {
                    let width = match item.value.kind() {
                        Kind::Text(text) if text.contains('\n') => LINE,
                        Kind::Text(text) => text.chars().take(LINE).count() + 2,
                        _ => 1,
                    };
                    self.tag(item.tag, width);
                    self.value(item.value);
                    self.break_line();
                }
                Entry::Loop(found) => self.looped(found),
            }
        }
    }

    /// `loop_` and its tags, each on a line.
    pub(crate) fn loop_header<'t>(&mut self, tags: impl Iterator<Item = &'t str>) {
        self.break_line();
        self.out.push_str("loop_\n");
        for tag in tags {
            self.out.push_str(tag);
            self.out.push('\n');
        }
    }

    pub(crate) fn end_row(&mut self) {
        self.break_line();
    }

    fn looped(&mut self, found: Loop<'_>) {
        self.loop_header(found.tags());
        for row in 0..found.len() {
            found.row(row).for_each(|value| self.value(value));
            self.end_row();
        }
    }
}

fn join<'t>(key: &str, token: &'t str) -> Cow<'t, str> {
    if key.is_empty() { Cow::Borrowed(token) } else { Cow::Owned(format!("{key}{token}")) }
}

/// A key of a table: never a text field. One of the four quotes holds it, as it came from one of them.
fn quote_key(key: &str) -> String {
    let single = ['\'', '"'].into_iter().find(|quote| !key.contains([*quote, '\n']));
    match single {
        Some(quote) => format!("{quote}{key}{quote}"),
        None => triple_quote(key).unwrap_or_else(|| format!("\"\"\"{key}\"\"\"")),
    }
}
