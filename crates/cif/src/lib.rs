//! CIF 1.1 and CIF 2.0 text to values and back, with line and column; knows nothing of crystals.
//!
//! [`parse()`] turns the bytes of a file into a [`Document`] of [`Block`]s; a block holds single items and [`Loop`]s, and
//! may hold save frames, which are blocks themselves. Every [`Value`] knows its place, its [`Kind`], and, as
//! [`Value::number`], its value with s.u. [`write()`] turns a document back into text, and [`Builder`] makes text from
//! values. [`aliases`] gives old and new data names one internal name.
//!
//! The way through the modules: `source` (bytes → text, version, line and column) → `scan` and `brackets` (one value at
//! a place) → `parse` (blocks, items, loops; `faults` has its messages) → `document`, `block`, `loops` and `value` (views
//! that callers use) → `write` and `builder` (back to text). `field` unfolds and folds text fields, `names` finds names
//! whatever their case, `number` reads numbers.
//!
//! The reader is total: any bytes give a document or one [`Diagnostic`](values::Diagnostic) with line and column. Time is
//! linear in the size, but for sorting the hashes of the tags; at most [`MAX_DEPTH`] lists stand inside each other, and a
//! file has at most [`MAX_BYTES`]. A document owns the text once; a value is a range of eight bytes in it, so that memory
//! stays below eight times the size of the file (examples/read_time.rs measures both).
//!
//! Sources: CIF 1.1 syntax, International Tables for Crystallography G (2005), ch. 2.2 (from memory); CIF 2.0,
//! Bernstein et al. (2016), J. Appl. Cryst. 49, 277.

pub mod aliases;
mod block;
mod brackets;
mod builder;
mod document;
mod faults;
mod field;
mod loops;
mod names;
mod number;
mod parse;
mod scan;
mod source;
mod value;
mod write;

pub use block::{Block, Entry, Item};
pub use builder::{BlockBuilder, Builder, Datum};
pub use document::Document;
pub use loops::{Column, Loop};
pub use parse::parse;
pub use scan::MAX_DEPTH;
pub use source::{MAX_BYTES, Version};
pub use value::{Kind, List, Quoting, Table, Value};
pub use write::write;
