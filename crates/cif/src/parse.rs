//! Blocks, save frames, items and loops: the grammar above single values.

use values::Diagnostic;

use crate::document::{Container, Document, LOOP_BIT, LoopRecord, NO_PARENT, NameRecord};
use crate::faults;
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
/// The first fault, at its place (names that occur twice are looked for last): an encoding or character that no CIF may hold; a string, text field, list, table or
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
                return Err(faults::before_first_block(&scanner, at));
            }
            at = match token {
                Token::Data(end) => self.open_block(document, at, end)?,
                Token::Save(end) => self.save(document, at, end)?,
                Token::Name(end) => self.item(document, at, end)?,
                Token::Loop(end) => self.looped(document, at, end)?,
                Token::Reserved(end) => return Err(faults::reserved(&scanner, at, end)),
                Token::Value => return Err(faults::stray_value(&scanner, at)?),
            };
        }
        self.close(document)?;
        self.check_names(document)?;
        if document.containers.is_empty() {
            let message = Diagnostic::new("no data block", "data_NAME and items", "check that this is the right file");
            self.kept.list.push(message.at(document.source.location(0, 0)));
        }
        Ok(())
    }

    /// Sorts the names and looks for those that occur twice: an error for tags, a warning for blocks and frames.
    fn check_names(&mut self, document: &mut Document) -> Result<(), Diagnostic> {
        document.name_index.sort();
        document.container_index.sort();
        let mut twice: Option<(u32, u32)> = None;
        document.name_index.repeats(
            |a, b| {
                let (a, b) = (document.names[a as usize], document.names[b as usize]);
                a.container == b.container && same(document.tag(a), document.tag(b))
            },
            |first, again| twice = twice.into_iter().chain([(again, first)]).min(),
        );
        if let Some((again, first)) = twice {
            return Err(faults::tag_twice(document, document.names[first as usize], document.names[again as usize]));
        }
        let mut repeats = Vec::new();
        document.container_index.repeats(
            |a, b| {
                document.containers[a as usize].parent == document.containers[b as usize].parent
                    && same(document.container_name(a), document.container_name(b))
            },
            |first, again| repeats.push((again, first)),
        );
        repeats.sort_unstable();
        for (again, first) in repeats {
            if self.kept.has_room() {
                self.kept.list.push(faults::container_twice(document, first, again));
            }
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
        let scanner = Scanner::new(&document.source);
        let name = scanner.slice(at + "data_".len()..scanner.token_end(at));
        document.container_index.add(parent, name, number);
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
        document.name_index.add(container, name, record);
        Ok(())
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
            return Err(faults::bad_loop(&scanner, at..end, names, values));
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
