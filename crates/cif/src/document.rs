//! What a file holds, as views: document, block, loop, column. The document owns flat tables; a view is a number in them.

use values::Diagnostic;

use crate::block::Block;
use crate::names::{NameIndex, same};
use crate::scan::{Scanner, Span, narrow};
use crate::source::{Source, Version};

/// In `NameRecord::place`: the rest is the number of a loop, not of a value.
pub(crate) const LOOP_BIT: u32 = 1 << 31;

/// In `Container::parent`: a data block.
pub(crate) const NO_PARENT: u32 = u32::MAX;

/// A data block or save frame.
#[derive(Clone, Debug)]
pub(crate) struct Container {
    /// Offset of `data_NAME` or `save_NAME`.
    pub heading: u32,
    /// Number of the block that a frame stands in.
    pub parent: u32,
    /// Range of the name records inside, those of frames included.
    pub names: (u32, u32),
}

/// A tag.
#[derive(Clone, Copy, Debug)]
pub(crate) struct NameRecord {
    /// Offset of its underscore.
    pub at: u32,
    pub container: u32,
    /// Number of the item's value, or of the loop with [`LOOP_BIT`].
    pub place: u32,
}

#[derive(Clone, Copy, Debug)]
pub(crate) struct LoopRecord {
    /// Offset of `loop_`.
    pub at: u32,
    pub first_name: u32,
    pub width: u32,
    pub first_value: u32,
    pub rows: u32,
}

/// A CIF that was read: data blocks in the order of the file, and what the reader warns of.
///
/// Two documents are equal when they hold the same blocks, frames, tags and loops in the same order with the same values.
/// Version, quotes, line breaks and comments do not count.
#[derive(Clone, Debug)]
pub struct Document {
    pub(crate) source: Source,
    pub(crate) containers: Vec<Container>,
    pub(crate) container_index: NameIndex,
    pub(crate) names: Vec<NameRecord>,
    pub(crate) name_index: NameIndex,
    pub(crate) loops: Vec<LoopRecord>,
    pub(crate) values: Vec<Span>,
    pub(crate) warnings: Vec<Diagnostic>,
}

impl Document {
    pub(crate) fn empty(source: Source) -> Self {
        Self {
            source,
            containers: Vec::new(),
            container_index: NameIndex::default(),
            names: Vec::new(),
            name_index: NameIndex::default(),
            loops: Vec::new(),
            values: Vec::new(),
            warnings: Vec::new(),
        }
    }

    pub(crate) fn shrink(&mut self) {
        self.containers.shrink_to_fit();
        self.names.shrink_to_fit();
        self.loops.shrink_to_fit();
        self.values.shrink_to_fit();
    }

    pub(crate) fn container_name(&self, number: u32) -> &str {
        let scanner = Scanner::new(&self.source);
        let at = self.containers[number as usize].heading as usize;
        // `data_` and `save_` have the same length.
        scanner.slice(at + 5..scanner.token_end(at))
    }

    pub(crate) fn tag(&self, record: NameRecord) -> &str {
        let scanner = Scanner::new(&self.source);
        let at = record.at as usize;
        scanner.slice(at..scanner.token_end(at))
    }

    pub(crate) fn find_container(&self, parent: u32, name: &str) -> Option<Block<'_>> {
        let is_same =
            |other: u32| self.containers[other as usize].parent == parent && same(self.container_name(other), name);
        self.container_index.find(parent, name, is_same).map(|number| Block::new(self, number))
    }

    /// Version of the syntax that the file was read by.
    #[must_use]
    pub fn version(&self) -> Version {
        self.source.version()
    }

    /// Name of the file as it was given.
    #[must_use]
    pub fn file(&self) -> &str {
        self.source.file()
    }

    /// The data blocks, in the order of the file. There may be none.
    pub fn blocks(&self) -> impl Iterator<Item = Block<'_>> {
        let blocks = self.containers.iter().enumerate().filter(|(_, container)| container.parent == NO_PARENT);
        blocks.map(|(number, _)| Block::new(self, narrow(number)))
    }

    /// The first data block of that name, whatever its case.
    #[must_use]
    pub fn block(&self, name: &str) -> Option<Block<'_>> {
        self.find_container(NO_PARENT, name)
    }

    /// What was read although it is not quite as it should be; at most a hundred, then one that counts the rest.
    #[must_use]
    pub fn warnings(&self) -> &[Diagnostic] {
        &self.warnings
    }
}

impl PartialEq for Document {
    fn eq(&self, other: &Self) -> bool {
        self.blocks().eq(other.blocks())
    }
}
