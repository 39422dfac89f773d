//! Symmetry in all its spellings.
//!
//! [`Operation`] reads and writes triplets; [`SpaceGroup`] is built from operations, a Hall symbol, a Hermann–Mauguin
//! symbol or a number; [`resolve()`] weighs what a file states of these and names contradictions. Inside: `triplet` and
//! `hall` are total readers, `closure` completes a group, `settings` is the table, `spellings` and `symbols` look up
//! symbols, `identify` finds the names of a set of operations.

mod basis;
mod closure;
mod error;
mod group;
mod hall;
mod identify;
mod operation;
mod point_group;
mod resolve;
mod settings;
mod spellings;
mod symbols;
mod triplet;

pub use error::SymmetryError;
pub use group::SpaceGroup;
pub(crate) use group::turned;
pub use operation::{Operation, TRANSLATION_UNIT};
pub use point_group::{Centring, CrystalSystem};
pub use resolve::{Resolved, SymmetryStatement, resolve};
