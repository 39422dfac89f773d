//! Cell, metric tensor, reflections, centring, symmetry in all its spellings.
//!
//! Read [`Cell`] (six numbers, their metric, d of a line) → [`SpaceGroup`] (operations and names) → [`reflections()`] (what
//! a cell and a group predict up to a limit) → [`AxisSystem`] (which parameters of the cell a group leaves free).
//! [`niggli_cell`] and [`same_lattice`] compare lattices, [`exact_partners`] lists those that no line tells apart.
//! [`resolve()`] turns what a file states about symmetry into a group and notes.
//!
//! In: numbers and texts. Out: plain values; no type of another library crosses this border. Elsewhere: structure
//! factors (`structure-factor`), angles (`instrument`, `values`), reading CIF (`cif`).

mod ambiguities;
mod axes;
mod cell;
mod compatible;
mod metric_space;
mod reduction;
mod reflections;
mod symmetry;

pub use ambiguities::{Lattice, Partner, exact_partners};
pub use axes::AxisSystem;
pub use cell::{Cell, CellError};
pub use metric_space::MetricSpace;
pub use reduction::{ReductionError, niggli_cell, primitive_cell, same_lattice, selling_lengths};
pub use reflections::{Reflection, ReflectionsError, reflections};
pub use symmetry::{
    Centring, CrystalSystem, Operation, Resolved, SpaceGroup, SymmetryError, SymmetryStatement, TRANSLATION_UNIT,
    resolve,
};
