//! Text of peak lists and batch logs to lines and temperatures, each message with its place.
//!
//! Read [`peak_list`] (the list of lines that `index`, `refine` and `drift` take) → [`batch_log`] (the temperatures of a
//! series of batches). Both stand on the same three steps: `decode` turns bytes into text, `layout` decides once per file
//! how columns are separated and whether a comma is a decimal mark, `number` reads one field. `header` knows the names of
//! the columns, `find` where they stand, `rows` makes lines of the rest, `scan_like` tells counts against 2θ from a list of lines.
//!
//! In: bytes of a file. Out: [`values::Peak`] by rising 2θ with notes on everything that was decided, or one
//! [`values::Diagnostic`]. No bytes make these readers panic, and their time grows in proportion to the file.
//!
//! Scans themselves (counts against 2θ) are not read yet.

pub mod batch_log;
pub mod peak_list;

mod decode;
mod find;
mod header;
mod layout;
mod merge;
mod number;
mod rows;
mod scan_like;
mod units;
mod write;
