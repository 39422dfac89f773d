//! Loops: tags, rows, columns.

use std::ops::Range;

use values::Location;

use crate::document::{Document, LoopRecord};
use crate::names::same;
use crate::scan::narrow;
use crate::value::Value;

/// A loop: tags, and rows with one value for each tag. There is at least one of both.
#[derive(Clone, Copy, Debug)]
pub struct Loop<'a> {
    document: &'a Document,
    record: LoopRecord,
}

impl<'a> Loop<'a> {
    pub(crate) fn new(document: &'a Document, record: LoopRecord) -> Self {
        Self { document, record }
    }

    /// Number of the record of the first tag.
    pub(crate) fn first_name(self) -> u32 {
        self.record.first_name
    }

    /// Place of the keyword `loop_`.
    #[must_use]
    pub fn location(self) -> Location {
        let at = self.record.at as usize;
        self.document.source.location(at, at + "loop_".len())
    }

    /// The tags as the file has them, in its order.
    pub fn tags(self) -> impl ExactSizeIterator<Item = &'a str> {
        let first = self.record.first_name as usize;
        let records = &self.document.names[first..first + self.record.width as usize];
        records.iter().map(|record| self.document.tag(*record))
    }

    /// Number of tags.
    #[must_use]
    pub fn width(self) -> usize {
        self.record.width as usize
    }

    /// Number of rows.
    #[must_use]
    pub fn len(self) -> usize {
        self.record.rows as usize
    }

    /// Whether there are no rows: never, the reader refuses such a loop.
    #[must_use]
    pub fn is_empty(self) -> bool {
        self.record.rows == 0
    }

    /// Number of the column with that tag, whatever its case.
    #[must_use]
    pub fn position(self, tag: &str) -> Option<usize> {
        self.tags().position(|own| same(own, tag))
    }

    /// The values under a tag, whatever its case.
    #[must_use]
    pub fn column(self, tag: &str) -> Option<Column<'a>> {
        let position = narrow(self.position(tag)?);
        Some(Column {
            document: self.document,
            first: self.record.first_value + position,
            step: self.record.width,
            rows: self.record.rows,
        })
    }

    /// The values of a row from 0, in the order of the tags; none behind the last row.
    pub fn row(self, row: usize) -> impl ExactSizeIterator<Item = Value<'a>> {
        let width = self.width();
        let range = if row < self.len() { row * width..(row + 1) * width } else { 0..0 };
        self.span(range)
    }

    /// All values, row by row.
    pub fn values(self) -> impl ExactSizeIterator<Item = Value<'a>> {
        self.span(0..self.width() * self.len())
    }

    fn span(self, range: Range<usize>) -> impl ExactSizeIterator<Item = Value<'a>> {
        let first = self.record.first_value as usize;
        let spans = &self.document.values[first + range.start..first + range.end];
        spans.iter().map(|span| Value::new(&self.document.source, *span))
    }
}

impl PartialEq for Loop<'_> {
    fn eq(&self, other: &Self) -> bool {
        self.tags().eq(other.tags()) && self.values().eq(other.values())
    }
}

/// The values of one tag, row by row.
#[derive(Clone, Copy, Debug)]
pub struct Column<'a> {
    document: &'a Document,
    first: u32,
    step: u32,
    rows: u32,
}

impl<'a> Column<'a> {
    /// The one value of an item.
    pub(crate) fn of_item(document: &'a Document, value: u32) -> Self {
        Self { document, first: value, step: 1, rows: 1 }
    }

    /// Number of values, at least 1.
    #[must_use]
    pub fn len(self) -> usize {
        self.rows as usize
    }

    /// Whether there are no values: never, the reader refuses such a loop.
    #[must_use]
    pub fn is_empty(self) -> bool {
        self.rows == 0
    }

    /// The value in a row from 0.
    #[must_use]
    pub fn get(self, row: usize) -> Option<Value<'a>> {
        let at = self.first as usize + row * self.step as usize;
        (row < self.len()).then(|| Value::new(&self.document.source, self.document.values[at]))
    }

    /// The values in the order of the rows.
    pub fn iter(self) -> impl Iterator<Item = Value<'a>> {
        (0..self.len()).filter_map(move |row| self.get(row))
    }
}
