//! Blocks, save frames, items and loops: the grammar above single values.

use values::Diagnostic;

use crate::document::{Container, Document, LOOP_BIT, LoopRecord, NO_PARENT, NameRecord};
use crate::names::same;
use crate::number;
use crate::scan::{Form, Inside, Scanner, Span, is_reserved, narrow};
use crate::source::{Source, shorten};

/// Characters of a data name that CIF 1.1 allows.
const NAME_LIMIT: usize = 75;

/// Warnings that are kept; a file with more has one fault many times.
const MAX_WARNINGS: usize = 100;

/// Reads a whole CIF, version 1.1 or 2.0 as its first line says.
///
/// `file` is the name that messages carry. A byte order mark of UTF-8 is skipped; LF, CR LF and CR end lines. What can be
/// read in only one way is read with a warning in [`Document::warnings`] (at most a hundred): bytes that are not UTF-8 in
/// CIF 1.1 (read as Latin-1), long lines and names, `5.43()`, a block name twice, no block at all.
///
/// # Errors
/// The first fault, at its place: an encoding or character that no CIF may hold; a string, text field, list, table or
/// save frame that is not closed (where it opened); a value without tag or a tag without value; a tag twice in a block; a
/// loop without values or cut short (at its `loop_`, with the counts); a reserved word; text before the first block.
pub fn parse(bytes: &[u8], file: &str) -> Result<Document, Diagnostic> {
    let (source, warnings) = Source::new(bytes, file)?;
    let mut document = Document::empty(source);
    let mut parser = Parser { kept: Warnings { list: warnings, more: 0 }, block: None, frame: None };
    parser.file(&mut document)?;
    document.warnings = parser.kept.finish();
    // What doubling left over would be a fifth of the memory.
    document.shrink();
    Ok(document)
}

struct Warnings {
    list: Vec<Diagnostic>,
    more: usize,
}

impl Warnings {
    fn has_room(&mut self) -> bool {
        let room = self.list.len() < MAX_WARNINGS;
        self.more += usize::from(!room);
        room
    }

    fn finish(mut self) -> Vec<Diagnostic> {
        if self.more > 0 {
            let found = format!("{} further warnings are not shown", self.more);
            self.list.push(Diagnostic::new(found, "fewer faults", "mend those shown and read the file again"));
        }
        self.list
    }
}

/// What a token is, with the byte behind it.
enum Token {
    Name(usize),
    Data(usize),
    Save(usize),
    Loop(usize),
    Reserved(usize),
    Value,
}

fn classify(scanner: &Scanner<'_>, at: usize) -> Token {
    match scanner.byte(at) {
        Some(b'_') => Token::Name(scanner.token_end(at)),
        Some(b'd' | b'D' | b's' | b'S' | b'l' | b'L' | b'g' | b'G') => {
            let end = scanner.token_end(at);
            let token = scanner.slice(at..end);
            if !is_reserved(token) {
                return Token::Value;
            }
            match token.as_bytes()[0].to_ascii_lowercase() {
                b'd' => Token::Data(end),
                b'l' => Token::Loop(end),
                b's' if !token.eq_ignore_ascii_case("stop_") => Token::Save(end),
                _ => Token::Reserved(end),
            }
        }
        _ => Token::Value,
    }
}

struct Parser {
    kept: Warnings,
    /// Numbers of the open containers.
    block: Option<u32>,
    frame: Option<u32>,
}

impl Parser {
    fn file(&mut self, document: &mut Document) -> Result<(), Diagnostic> {
        let mut at = 0;
        loop {
            let scanner = Scanner::new(&document.source);
            at = scanner.skip_blanks(at);
            if scanner.byte(at).is_none() {
                break;
            }
            let token = classify(&scanner, at);
            if self.block.is_none() && !matches!(token, Token::Data(_)) {
                return Err(before_first_block(&scanner, at));
            }
            at = match token {
                Token::Data(end) => self.open_block(document, at, end)?,
                Token::Save(end) => self.save(document, at, end)?,
                Token::Name(end) => self.item(document, at, end)?,
                Token::Loop(end) => self.looped(document, at, end)?,
                Token::Reserved(end) => return Err(reserved(&scanner, at, end)),
                Token::Value => return Err(stray_value(&scanner, at)?),
            };
        }
        self.close(document)?;
        if document.containers.is_empty() {
            let message = Diagnostic::new("no data block", "data_NAME and items", "check that this is the right file");
            self.kept.list.push(message.at(document.source.location(0, 0)));
        }
        Ok(())
    }

    /// Number of the container that takes names now.
    fn current(&self) -> u32 {
        self.frame.or(self.block).unwrap_or(0)
    }

    /// Ends the open block; a frame must be closed by then.
    fn close(&mut self, document: &mut Document) -> Result<(), Diagnostic> {
        if let Some(frame) = self.frame {
            let at = document.containers[frame as usize].heading as usize;
            let scanner = Scanner::new(&document.source);
            return Err(scanner.fault(
                at..scanner.token_end(at),
                "the save frame opened here is not closed",
                "save_ at its end",
                "write save_ where the frame ends",
            ));
        }
        if let Some(block) = self.block.take() {
            document.containers[block as usize].names.1 = narrow(document.names.len());
        }
        Ok(())
    }

    fn open_block(&mut self, document: &mut Document, at: usize, end: usize) -> Result<usize, Diagnostic> {
        self.close(document)?;
        self.block = Some(self.open(document, at, NO_PARENT));
        Ok(end)
    }

    fn open(&mut self, document: &mut Document, at: usize, parent: u32) -> u32 {
        let number = narrow(document.containers.len());
        let first = narrow(document.names.len());
        document.containers.push(Container { heading: narrow(at), parent, names: (first, first) });
        let mut index = std::mem::take(&mut document.container_index);
        let name = document.container_name(number);
        let is_same = |other: u32| {
            document.containers[other as usize].parent == parent && same(document.container_name(other), name)
        };
        let other = index.insert(parent, name, number, is_same);
        if let Some(other) = other.filter(|_| self.kept.has_room()) {
            let before = document.containers[other as usize].heading as usize;
            let what = if parent == NO_PARENT { "data block" } else { "save frame" };
            let found = format!(
                "the {what} name `{}` occurs again; it is in line {} too",
                shorten(name),
                document.source.location(before, before).line
            );
            let message =
                Diagnostic::new(found, "another name", format!("rename one; by name only the first {what} is found"));
            self.kept.list.push(message.at(document.source.location(at, at + 5 + name.len())));
        }
        document.container_index = index;
        number
    }

    fn save(&mut self, document: &mut Document, at: usize, end: usize) -> Result<usize, Diagnostic> {
        let closes = end == at + "save_".len();
        match (self.frame, closes) {
            (Some(frame), true) => {
                document.containers[frame as usize].names.1 = narrow(document.names.len());
                self.frame = None;
            }
            (None, false) => self.frame = Some(self.open(document, at, self.block.unwrap_or(0))),
            (None, true) => {
                return Err(Scanner::new(&document.source).fault(
                    at..end,
                    "save_ closes a save frame, but none is open",
                    "save_NAME before it",
                    "delete the line, or name the frame where it begins",
                ));
            }
            (Some(frame), false) => {
                let opened = document.containers[frame as usize].heading as usize;
                let line = document.source.location(opened, opened).line;
                return Err(Scanner::new(&document.source).fault(
                    at..end,
                    format!("a save frame inside the save frame of line {line}"),
                    "save_ at the end of that one; frames do not nest",
                    "close the outer frame first",
                ));
            }
        }
        Ok(end)
    }

    /// Files the tag from `at` to `end`.
    fn name(&mut self, document: &mut Document, at: usize, end: usize, place: u32) -> Result<(), Diagnostic> {
        let container = self.current();
        let scanner = Scanner::new(&document.source);
        let name = scanner.slice(at..end);
        if name.len() == 1 {
            let found = "a tag of a lone underscore";
            return Err(scanner.fault(at..end, found, "a tag such as _cell_length_a", "write the name of the item"));
        }
        if name.len() > NAME_LIMIT && name.chars().count() > NAME_LIMIT && self.kept.has_room() {
            self.kept.list.push(scanner.fault(
                at..end,
                format!("the tag `{}` has more than {NAME_LIMIT} characters", shorten(name)),
                format!("at most {NAME_LIMIT} characters"),
                "shorten the name; it was read nonetheless",
            ));
        }
        let record = narrow(document.names.len());
        document.names.push(NameRecord { at: narrow(at), container, place });
        let names = &document.names;
        let is_same = |other: u32| {
            let other = &names[other as usize];
            let start = other.at as usize;
            other.container == container && same(scanner.slice(start..scanner.token_end(start)), name)
        };
        let Some(other) = document.name_index.insert(container, name, record, is_same) else { return Ok(()) };
        let first = document.names[other as usize].at as usize;
        let line = document.source.location(first, first).line;
        Err(scanner.fault(
            at..end,
            format!("the tag `{}` occurs a second time in its block; first in line {line}", shorten(name)),
            "each tag once in a block",
            "delete one of the two, or begin a new block with data_NAME",
        ))
    }

    fn item(&mut self, document: &mut Document, at: usize, end: usize) -> Result<usize, Diagnostic> {
        self.name(document, at, end, narrow(document.values.len()))?;
        let scanner = Scanner::new(&document.source);
        let value = scanner.skip_blanks(end);
        if scanner.byte(value).is_none() || !matches!(classify(&scanner, value), Token::Value) {
            let name = shorten(scanner.slice(at..end));
            let next = match scanner.byte(value) {
                Some(_) => format!("`{}` follows", shorten(scanner.slice(value..scanner.token_end(value)))),
                None => "the file ends".to_owned(),
            };
            return Err(scanner.fault(
                at..end,
                format!("the tag `{name}` has no value: {next}"),
                "a value behind the tag",
                "write the value, or ? for an unknown one; quote it if it begins with _ or is a reserved word",
            ));
        }
        let (span, end) = scanner.value(value, Inside::Block)?;
        self.warn_of_empty_parentheses(&scanner, span);
        document.values.push(span);
        Ok(end)
    }

    fn looped(&mut self, document: &mut Document, at: usize, end: usize) -> Result<usize, Diagnostic> {
        let first_name = document.names.len();
        let place = LOOP_BIT | narrow(document.loops.len());
        let mut next = end;
        loop {
            let scanner = Scanner::new(&document.source);
            next = scanner.skip_blanks(next);
            match classify(&scanner, next) {
                Token::Name(end) => {
                    let start = std::mem::replace(&mut next, end);
                    self.name(document, start, end, place)?;
                }
                _ => break,
            }
        }
        let first_value = document.values.len();
        let scanner = Scanner::new(&document.source);
        while scanner.byte(next).is_some() && matches!(classify(&scanner, next), Token::Value) {
            let (span, end) = scanner.value(next, Inside::Block)?;
            self.warn_of_empty_parentheses(&scanner, span);
            document.values.push(span);
            next = scanner.skip_blanks(end);
        }
        let names = document.names.len() - first_name;
        let values = &document.values[first_value..];
        if names == 0 || values.is_empty() || !values.len().is_multiple_of(names) {
            return Err(bad_loop(&scanner, at..end, names, values));
        }
        document.loops.push(LoopRecord {
            at: narrow(at),
            first_name: narrow(first_name),
            width: narrow(names),
            first_value: narrow(first_value),
            rows: narrow(values.len() / names),
        });
        Ok(next)
    }

    /// `5.43()` and `5.43(?)` are numbers whose s.u. was not filled in.
    fn warn_of_empty_parentheses(&mut self, scanner: &Scanner<'_>, span: Span) {
        if span.form() != Form::Unquoted {
            return;
        }
        let token = scanner.slice(span.content());
        let empty = token.ends_with(')') && (token.ends_with("()") || token.ends_with("(?)"));
        if empty && number::read(token).is_ok() && self.kept.has_room() {
            self.kept.list.push(scanner.fault(
                span.content(),
                format!("`{}` has parentheses without an s.u.", shorten(token)),
                "digits of the s.u. between them, as in 5.431(2)",
                "write the s.u. or delete the parentheses; it was read as a value without s.u.",
            ));
        }
    }
}

fn before_first_block(scanner: &Scanner<'_>, at: usize) -> Diagnostic {
    let token = at..scanner.token_end(at);
    scanner.fault(
        token.clone(),
        format!("`{}` before the first data block", shorten(scanner.slice(token))),
        "data_NAME before all else but comments",
        "write data_ with a name as the first line, or # before lines that are comments",
    )
}

fn reserved(scanner: &Scanner<'_>, at: usize, end: usize) -> Diagnostic {
    let found = format!("the reserved word `{}`", shorten(scanner.slice(at..end)));
    scanner.fault(at..end, found, "a tag, loop_, save_NAME or data_NAME", "delete it, or quote it if it is a value")
}

/// A value without a tag before it. The value itself may be at fault, which then says more.
fn stray_value(scanner: &Scanner<'_>, at: usize) -> Result<Diagnostic, Diagnostic> {
    let (_, end) = scanner.value(at, Inside::Block)?;
    let token = scanner.slice(at..end);
    let mend = if number::is_lone_su(token) {
        "delete the blank between the number and its s.u. in parentheses"
    } else {
        "put a tag before it, or quote the value before it if the two belong together"
    };
    Ok(scanner.fault(at..end, format!("the value `{}` without a tag", shorten(token)), "a tag before each value", mend))
}

/// A loop without tags or values, or cut short.
fn bad_loop(scanner: &Scanner<'_>, keyword: std::ops::Range<usize>, names: usize, values: &[Span]) -> Diagnostic {
    if names == 0 {
        return scanner.fault(
            keyword,
            "loop_ without tags",
            "tags behind loop_, then values",
            "delete loop_ or add its tags",
        );
    }
    if values.is_empty() {
        return scanner.fault(
            keyword,
            format!("the loop has {names} tags and no values"),
            format!("values in rows of {names}"),
            "add the values, or delete the loop",
        );
    }
    let split_su = values.iter().find(|v| v.form() == Form::Unquoted && number::is_lone_su(scanner.slice(v.content())));
    let mend = match split_su {
        Some(su) => format!(
            "delete the blank before the s.u. `{}` in line {}",
            shorten(scanner.slice(su.content())),
            scanner.line(su.opening())
        ),
        None => format!(
            "look for a value that is missing, or holds a blank and is not quoted; the last full row ends in line {}",
            scanner.line(values[(values.len() / names * names).saturating_sub(1)].opening())
        ),
    };
    scanner.fault(
        keyword,
        format!("the loop has {names} tags and {} values: {} left over", values.len(), values.len() % names),
        format!("a multiple of {names} values"),
        mend,
    )
}
