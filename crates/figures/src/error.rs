//! What keeps a picture from being drawn, and the checks that find it.

use std::fmt;

use values::Diagnostic;

/// Largest magnitude that is drawn. Beyond it axis arithmetic loses its digits; nothing that is measured comes near
/// (own choice, no source).
pub(crate) const LARGEST: f64 = 1e15;

/// Why a picture or a page can't be made. Each names the quantity, and its place where it stands in a list (from 0).
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum FigureError {
    /// A number is NaN, infinite, or beyond 1e15 in magnitude.
    NotDrawable {
        /// The quantity.
        what: &'static str,
        /// Its place in the list, from 0.
        index: usize,
        /// The number.
        value: f64,
    },
    /// A number that has no meaning below zero is below zero.
    Negative {
        /// The quantity.
        what: &'static str,
        /// Its place in the list, from 0.
        index: usize,
        /// The number.
        value: f64,
    },
    /// Two lists that belong together differ in length.
    Lengths {
        /// The list.
        what: &'static str,
        /// Number of entries that it must have.
        expected: usize,
        /// Number of entries that it has.
        found: usize,
    },
    /// A list that must rise does not.
    NotRising {
        /// The list.
        what: &'static str,
        /// Place of the first entry that is not above the one before it.
        index: usize,
    },
    /// There is nothing to draw.
    Empty {
        /// What is missing.
        what: &'static str,
    },
    /// More than the picture can show legibly.
    TooMany {
        /// The list.
        what: &'static str,
        /// How many are shown at most.
        limit: usize,
        /// How many were given.
        found: usize,
    },
    /// A range whose end is not above its start, or outside what the axis allows.
    Range {
        /// The quantity.
        what: &'static str,
        /// Start.
        from: f64,
        /// End.
        to: f64,
    },
    /// A link of the page that is not a plain relative path.
    Link {
        /// The link as given.
        href: String,
    },
    /// A picture of the page that is not SVG text of this crate.
    NotSvg {
        /// Number of the section, from 0.
        section: usize,
    },
    /// The drawing library or the page template failed; a mistake in this crate, not in the input.
    Internal(String),
}

impl fmt::Display for FigureError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Diagnostic { found, expected, mend, .. } = self.parts();
        write!(f, "{found}; expected {expected}; {mend}")
    }
}

impl std::error::Error for FigureError {}

impl From<FigureError> for Diagnostic {
    fn from(error: FigureError) -> Self {
        error.parts()
    }
}

impl FigureError {
    fn parts(&self) -> Diagnostic {
        match self {
            Self::NotDrawable { what, index, value } => Diagnostic::new(
                format!("{what} number {} is {value:e}", index + 1),
                "a finite number of at most 1e15 in magnitude",
                "leave the entry out or correct it",
            ),
            Self::Negative { what, index, value } => Diagnostic::new(
                format!("{what} number {} is {value}", index + 1),
                "zero or above",
                "correct the sign or leave the entry out",
            ),
            Self::Lengths { what, expected, found } => Diagnostic::new(
                format!("{what} has {found} entries"),
                format!("{expected}, one for each point"),
                "give both lists from the same source",
            ),
            Self::NotRising { what, index } => Diagnostic::new(
                format!("{what} number {} is not above the one before it", index + 1),
                "strictly rising values",
                "sort the points and remove repeated ones",
            ),
            Self::Empty { what } => {
                Diagnostic::new(format!("no {what}"), "at least one", "ask for a picture only where there is a result")
            }
            Self::TooMany { what, limit, found } => Diagnostic::new(
                format!("{found} {what}"),
                format!("at most {limit} in one picture"),
                "split the picture",
            ),
            Self::Range { what, from, to } => Diagnostic::new(
                format!("the range of {what} goes from {from} to {to}"),
                "a start below its end, within what the axis can show",
                "correct the range",
            ),
            Self::Link { href } => Diagnostic::new(
                format!("the link `{href}` leaves the folder of the page"),
                "a relative path without `..`, scheme or leading slash",
                "put the file beside the page",
            ),
            Self::NotSvg { section } => Diagnostic::new(
                format!("a picture of section {} is not plain SVG", section + 1),
                "text that starts with <svg and holds no script",
                "give a picture that this crate has drawn",
            ),
            Self::Internal(message) => Diagnostic::new(
                format!("the picture could not be written: {message}"),
                "a drawing",
                "report this as a mistake in the program",
            ),
        }
    }
}

/// Refuses the first number that can't be drawn.
pub(crate) fn all_drawable(what: &'static str, values: impl IntoIterator<Item = f64>) -> Result<(), FigureError> {
    for (index, value) in values.into_iter().enumerate() {
        if !value.is_finite() || value.abs() > LARGEST {
            return Err(FigureError::NotDrawable { what, index, value });
        }
    }
    Ok(())
}

/// Refuses the first number that can't be drawn or is below zero.
pub(crate) fn none_negative(what: &'static str, values: impl IntoIterator<Item = f64>) -> Result<(), FigureError> {
    for (index, value) in values.into_iter().enumerate() {
        all_drawable(what, [value]).map_err(|_| FigureError::NotDrawable { what, index, value })?;
        if value < 0.0 {
            return Err(FigureError::Negative { what, index, value });
        }
    }
    Ok(())
}

/// Refuses a list that does not rise.
pub(crate) fn rising(what: &'static str, values: &[f64]) -> Result<(), FigureError> {
    match values.windows(2).position(|pair| pair[1] <= pair[0]) {
        Some(index) => Err(FigureError::NotRising { what, index: index + 1 }),
        None => Ok(()),
    }
}

/// Refuses a list of another length.
pub(crate) fn same_length(what: &'static str, expected: usize, found: usize) -> Result<(), FigureError> {
    if expected == found { Ok(()) } else { Err(FigureError::Lengths { what, expected, found }) }
}
