//! Plain values that cross the borders between crates.
//!
//! [`Measured`] is a value with its standard uncertainty, [`TwoTheta`] and [`Wavelength`] are units that must not be mixed
//! up, [`Peak`] is a line that a scan shows, [`Location`] and [`Diagnostic`] say where and what in a file is wrong, and
//! [`Table`] reads the tables in `data/`, which carry their origin in the file itself.
//!
//! Nothing here opens a file or knows what a crystal is.

mod angle;
mod diagnostic;
mod measured;
mod peak;
mod table;

pub use angle::{TwoTheta, Wavelength};
pub use diagnostic::{Diagnostic, Location, column_of};
pub use measured::{Measured, MeasuredError};
pub use peak::Peak;
pub use table::{Row, Table};
