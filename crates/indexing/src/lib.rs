//! From lines to a cell: which lattice they belong to, which line is which, and the cell with its uncertainty.
//!
//! [`cubic`] names an unknown cubic lattice from a list of lines, with a probability; [`assign`] gives the lines of a known
//! phase their indices; [`fit`] refines the cell from indexed lines by weighted least squares in any system. [`merit`] holds the
//! classical figures of merit, [`materials`] what a cell and a density say about its content.
//!
//! In: [`values::Peak`] lists and a wavelength. Out: plain values. Elsewhere: reading lists (`scan`), absences of space groups
//! (`lattice`), several lists with one zero (`drift`).

pub mod assign;
pub mod cubic;
pub mod fit;
pub mod materials;
pub mod merit;
