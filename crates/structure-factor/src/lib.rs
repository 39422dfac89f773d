//! Scattering factors, dispersion, structures, structure factors and density.

mod structure;

pub use structure::{Atom, Displacement, Expansion, Structure};
