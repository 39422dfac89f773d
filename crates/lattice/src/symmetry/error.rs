//! What is wrong with a statement of symmetry.

use std::fmt;

use values::Diagnostic;

/// A symbol, operation or set of operations that is no space group.
///
/// Without file and line: the reader that knows them makes a [`Diagnostic`] of it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SymmetryError {
    /// What was found.
    pub found: String,
    /// What was expected.
    pub expected: String,
    /// How to mend it.
    pub mend: String,
    /// Byte offset in the text that was read; `None` when no single place is wrong.
    pub offset: Option<usize>,
}

impl SymmetryError {
    /// Control characters of a quoted text become blanks: a message is one line, and a terminal obeys no file.
    pub(crate) fn new(found: impl Into<String>, expected: impl Into<String>, mend: impl Into<String>) -> Self {
        let found = found.into().replace(char::is_control, " ");
        Self { found, expected: expected.into(), mend: mend.into(), offset: None }
    }

    pub(crate) fn at(self, offset: usize) -> Self {
        Self { offset: Some(offset), ..self }
    }
}

impl fmt::Display for SymmetryError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}; expected {}; to mend: {}", self.found, self.expected, self.mend)
    }
}

impl std::error::Error for SymmetryError {}

impl From<SymmetryError> for Diagnostic {
    fn from(error: SymmetryError) -> Self {
        Self::new(error.found, error.expected, error.mend)
    }
}
