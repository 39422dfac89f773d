//! Data blocks and save frames: look-up by tag, and entries in the order of the file.

use values::Location;

use crate::document::{Container, Document, LOOP_BIT, NameRecord};
use crate::loops::{Column, Loop};
use crate::names::same;
use crate::scan::narrow;
use crate::value::Value;

/// A data block or a save frame.
#[derive(Clone, Copy, Debug)]
pub struct Block<'a> {
    document: &'a Document,
    number: u32,
}

/// What stands in a block, in the order of the file.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Entry<'a> {
    /// A tag with its value.
    Item(Item<'a>),
    /// A loop.
    Loop(Loop<'a>),
}

/// A tag with its value.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Item<'a> {
    /// The tag as the file has it, with its underscore.
    pub tag: &'a str,
    /// The value.
    pub value: Value<'a>,
}

impl<'a> Block<'a> {
    pub(crate) fn new(document: &'a Document, number: u32) -> Self {
        Self { document, number }
    }

    fn container(self) -> &'a Container {
        &self.document.containers[self.number as usize]
    }

    /// The name behind `data_` or `save_`; may be empty in a data block.
    #[must_use]
    pub fn name(self) -> &'a str {
        self.document.container_name(self.number)
    }

    /// Place of `data_NAME` or `save_NAME`.
    #[must_use]
    pub fn location(self) -> Location {
        let at = self.container().heading as usize;
        self.document.source.location(at, at + 5 + self.name().len())
    }

    fn record(self, tag: &str) -> Option<NameRecord> {
        let is_same = |other: u32| {
            let other = self.document.names[other as usize];
            other.container == self.number && same(self.document.tag(other), tag)
        };
        let found = self.document.name_index.find(self.number, tag, is_same)?;
        Some(self.document.names[found as usize])
    }

    /// The one value of a tag, whatever the case of the tag: of an item, or of a loop with one row.
    ///
    /// `None` when the tag is missing or has several values: [`Block::column`] gives them.
    #[must_use]
    pub fn get(self, tag: &str) -> Option<Value<'a>> {
        self.column(tag).filter(|column| column.len() == 1)?.get(0)
    }

    /// All values of a tag: the column of a loop, or the one value of an item.
    #[must_use]
    pub fn column(self, tag: &str) -> Option<Column<'a>> {
        let record = self.record(tag)?;
        if record.place & LOOP_BIT == 0 {
            return Some(Column::of_item(self.document, record.place));
        }
        self.loop_at(record.place).column(tag)
    }

    /// The loop that has a tag, whatever the case of the tag.
    #[must_use]
    pub fn loop_of(self, tag: &str) -> Option<Loop<'a>> {
        let record = self.record(tag)?;
        (record.place & LOOP_BIT != 0).then(|| self.loop_at(record.place))
    }

    fn loop_at(self, place: u32) -> Loop<'a> {
        Loop::new(self.document, self.document.loops[(place & !LOOP_BIT) as usize])
    }

    /// Place of a tag, for a message about an item as a whole.
    #[must_use]
    pub fn tag_location(self, tag: &str) -> Option<Location> {
        let record = self.record(tag)?;
        let at = record.at as usize;
        Some(self.document.source.location(at, at + self.document.tag(record).len()))
    }

    /// Items and loops in the order of the file, those of save frames left out.
    pub fn entries(self) -> impl Iterator<Item = Entry<'a>> {
        let names = self.container().names;
        let own = (names.0..names.1).filter_map(move |number| {
            let record = self.document.names[number as usize];
            (record.container == self.number).then_some((number, record))
        });
        own.filter_map(move |(number, record)| {
            if record.place & LOOP_BIT == 0 {
                let span = self.document.values[record.place as usize];
                let value = Value::new(&self.document.source, span);
                return Some(Entry::Item(Item { tag: self.document.tag(record), value }));
            }
            let found = self.loop_at(record.place);
            (found.first_name() == number).then_some(Entry::Loop(found))
        })
    }

    /// Single items in the order of the file.
    pub fn items(self) -> impl Iterator<Item = Item<'a>> {
        self.entries().filter_map(|entry| match entry {
            Entry::Item(item) => Some(item),
            Entry::Loop(_) => None,
        })
    }

    /// Loops in the order of the file.
    pub fn loops(self) -> impl Iterator<Item = Loop<'a>> {
        self.entries().filter_map(|entry| match entry {
            Entry::Item(_) => None,
            Entry::Loop(found) => Some(found),
        })
    }

    /// The save frames of a data block, in the order of the file.
    pub fn frames(self) -> impl Iterator<Item = Block<'a>> {
        // The frames of a block follow it directly.
        let first = self.number + 1;
        let following = self.document.containers.iter().skip(first as usize);
        let count = following.take_while(|container| container.parent == self.number).count();
        (first..first + narrow(count)).map(move |number| Block { document: self.document, number })
    }

    /// The first save frame of that name, whatever its case.
    #[must_use]
    pub fn frame(self, name: &str) -> Option<Block<'a>> {
        self.document.find_container(self.number, name)
    }
}

impl PartialEq for Block<'_> {
    fn eq(&self, other: &Self) -> bool {
        self.name() == other.name() && self.entries().eq(other.entries()) && self.frames().eq(other.frames())
    }
}
