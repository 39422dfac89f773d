//! What stops a command, and the one place where messages about input are printed.

use std::fmt::Write as _;

use values::Diagnostic;

/// Why a command ends without a result.
#[derive(Debug)]
pub enum Failure {
    /// The input is wrong: exit code 2. The bytes are those of the file that the message points into.
    Input(Box<Diagnostic>, Vec<u8>),
    /// The program or the disk failed: exit code 1.
    Program(String),
}

impl Failure {
    /// Wrong input, with the file that it stands in.
    pub fn input(diagnostic: Diagnostic, source: &[u8]) -> Self {
        Self::Input(Box::new(diagnostic), source.to_vec())
    }

    /// Wrong input that stands in no file: an option, or inputs that do not go together.
    pub fn option(diagnostic: Diagnostic) -> Self {
        Self::input(diagnostic, &[])
    }

    /// Exit code of the process.
    pub fn exit_code(&self) -> u8 {
        match self {
            Self::Input(..) => 2,
            Self::Program(_) => 1,
        }
    }

    /// The message for people, with the line of the file and a caret.
    pub fn render(&self) -> String {
        match self {
            Self::Program(message) => format!("error: {message}\n"),
            Self::Input(diagnostic, source) => render(diagnostic, source),
        }
    }
}

/// Longest piece of a line that is shown, in characters.
const SHOWN: usize = 100;

fn render(diagnostic: &Diagnostic, source: &[u8]) -> String {
    let mut text = String::from("error: ");
    match &diagnostic.location {
        None => {
            let _ = writeln!(text, "{}", diagnostic.found);
            let _ = writeln!(text, "  expected: {}", diagnostic.expected);
        }
        Some(place) => {
            let _ = writeln!(text, "{place}: {}", diagnostic.found);
            if let Some(line) = line_of(source, place.line) {
                let (shown, column) = excerpt(&line, place.column);
                let number = place.line.to_string();
                let margin = " ".repeat(number.len());
                let room = (shown.chars().count() + 1).saturating_sub(column).max(1);
                let caret = "^".repeat(place.width.clamp(1, room));
                let _ = writeln!(text, "  {number} | {shown}");
                let _ =
                    writeln!(text, "  {margin} | {}{caret} expected {}", " ".repeat(column - 1), diagnostic.expected);
            } else {
                let _ = writeln!(text, "  expected: {}", diagnostic.expected);
            }
        }
    }
    let _ = writeln!(text, "  help: {}", diagnostic.mend);
    text
}

/// Line `number` (from 1) of a text whose lines end in LF, CR LF or CR; `None` beyond the end. Bytes that are no UTF-8 and
/// control characters are shown as one replacement each, so that the caret stays in place.
fn line_of(source: &[u8], number: usize) -> Option<String> {
    let text = decode(source);
    let mut rest = text.as_str();
    for _ in 1..number {
        let end = rest.find(['\n', '\r'])?;
        let skip = if rest[end..].starts_with("\r\n") { 2 } else { 1 };
        rest = &rest[end + skip..];
    }
    let line = rest.split(['\n', '\r']).next().unwrap_or_default();
    if rest.is_empty() && number > 1 && line.is_empty() && source.is_empty() {
        return None;
    }
    Some(
        line.chars()
            .map(|c| {
                if c == '\t' {
                    ' '
                } else if c.is_control() {
                    '\u{fffd}'
                } else {
                    c
                }
            })
            .collect(),
    )
}

/// UTF-8, with or without its mark, or UTF-16 with its mark.
fn decode(source: &[u8]) -> String {
    let utf16 = |bytes: &[u8], unit: fn([u8; 2]) -> u16| {
        let units: Vec<u16> = bytes.chunks_exact(2).map(|pair| unit([pair[0], pair[1]])).collect();
        String::from_utf16_lossy(&units)
    };
    match source {
        [0xFF, 0xFE, rest @ ..] => utf16(rest, u16::from_le_bytes),
        [0xFE, 0xFF, rest @ ..] => utf16(rest, u16::from_be_bytes),
        [0xEF, 0xBB, 0xBF, rest @ ..] => String::from_utf8_lossy(rest).into_owned(),
        _ => String::from_utf8_lossy(source).into_owned(),
    }
}

/// At most [`SHOWN`] characters of a line that hold the column, and the column inside them.
fn excerpt(line: &str, column: usize) -> (String, usize) {
    let length = line.chars().count();
    let column = column.clamp(1, length + 1);
    if length <= SHOWN {
        return (line.to_owned(), column);
    }
    let first = (column - 1).saturating_sub(SHOWN / 2).min(length - SHOWN);
    let mut shown: String = line.chars().skip(first).take(SHOWN).collect();
    let mut at = column - first;
    if first > 0 {
        shown.insert(0, '…');
        at += 1;
    }
    if first + SHOWN < length {
        shown.push('…');
    }
    (shown, at)
}

#[cfg(test)]
mod tests {
    use super::{Failure, excerpt};
    use values::{Diagnostic, Location};

    #[test]
    fn a_message_shows_the_line_and_a_caret_under_the_fault() {
        let message = Diagnostic::new("`1O23` is not a number", "digits, such as 1023", "correct the value")
            .at(Location::new("batch.csv", 2, 8).wide(4));
        let text = Failure::input(message, b"two_theta_deg,area\n34.120\t1O23\n").render();
        assert_eq!(
            text,
            "error: batch.csv:2:8: `1O23` is not a number\n  2 | 34.120 1O23\n    |        ^^^^ expected digits, such as 1023\n  help: correct the value\n"
        );
    }

    #[test]
    fn a_place_beyond_the_file_is_said_without_a_caret() {
        let message = Diagnostic::new("the file ends", "data", "add them").at(Location::new("a.cif", 9, 1));
        let text = Failure::input(message, b"data_a\n").render();
        assert_eq!(text, "error: a.cif:9:1: the file ends\n  expected: data\n  help: add them\n");
    }

    #[test]
    fn a_long_line_is_cut_around_the_column() {
        let line = "x".repeat(500);
        let (shown, column) = excerpt(&line, 300);
        assert_eq!((shown.chars().count(), column), (102, 52));
    }
}
