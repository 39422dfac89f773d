//! Where something is wrong in a file, what was found, what was expected, and how to mend it.

use std::fmt;
use std::sync::Arc;

/// A place in a file: line and column count from 1, columns in characters.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Location {
    /// Name of the file as the user gave it.
    pub file: Arc<str>,
    /// Line, from 1.
    pub line: usize,
    /// Column in characters, from 1.
    pub column: usize,
    /// How many characters the caret underlines, at least 1.
    pub width: usize,
}

impl Location {
    /// A place of one character.
    #[must_use]
    pub fn new(file: &str, line: usize, column: usize) -> Self {
        Self { file: file.into(), line, column, width: 1 }
    }

    /// The same place with a caret `width` characters wide.
    #[must_use]
    pub fn wide(self, width: usize) -> Self {
        Self { width: width.max(1), ..self }
    }
}

impl fmt::Display for Location {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}:{}:{}", self.file, self.line, self.column)
    }
}

/// A message about input. As an error it stops the command; as a note it travels with the result.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagnostic {
    /// Where; `None` for an option or a combination of inputs.
    pub location: Option<Location>,
    /// What was found, as a short clause: "counts `1O23` is not a number".
    pub found: String,
    /// What was expected: "digits, such as 1023".
    pub expected: String,
    /// How to mend it: "correct the value, or start the line with #".
    pub mend: String,
}

impl Diagnostic {
    /// A message without a place.
    #[must_use]
    pub fn new(found: impl Into<String>, expected: impl Into<String>, mend: impl Into<String>) -> Self {
        Self { location: None, found: found.into(), expected: expected.into(), mend: mend.into() }
    }

    /// The same message at a place.
    #[must_use]
    pub fn at(self, location: Location) -> Self {
        Self { location: Some(location), ..self }
    }
}

impl fmt::Display for Diagnostic {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if let Some(location) = &self.location {
            write!(f, "{location}: ")?;
        }
        write!(f, "{}; expected {}; to mend: {}", self.found, self.expected, self.mend)
    }
}

impl std::error::Error for Diagnostic {}

/// Column, in characters from 1, of a byte offset in a line. An offset inside a character counts as that character.
#[must_use]
pub fn column_of(line: &str, byte_offset: usize) -> usize {
    line.char_indices().take_while(|(start, c)| start + c.len_utf8() <= byte_offset).count() + 1
}

#[cfg(test)]
mod tests {
    use super::{Diagnostic, Location, column_of};

    #[test]
    fn columns_count_characters_not_bytes() {
        assert_eq!(column_of("α = 90", 0), 1);
        assert_eq!(column_of("α = 90", 3), 3);
        assert_eq!(column_of("abc", 9), 4);
    }

    #[test]
    fn a_message_names_place_finding_expectation_and_mend() {
        let message =
            Diagnostic::new("`1O23` is not a number", "digits", "correct it").at(Location::new("a.csv", 4, 9));
        assert_eq!(message.to_string(), "a.csv:4:9: `1O23` is not a number; expected digits; to mend: correct it");
    }
}
