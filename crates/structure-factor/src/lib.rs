//! What one unit cell scatters: structures, scattering factors, structure factors, density.
//!
//! `F(hkl) = Σⱼ oⱼ Tⱼ(hkl) [f0ⱼ(s) + f′ⱼ + i f″ⱼ] exp(2πi h·xⱼ)`, j over all atoms of the cell, s = sin θ/λ in Å⁻¹.
//!
//! Read [`Structure`] (cell, group, atoms, density, formula) → [`expand`] (special positions, the rule of 0.1 Å) →
//! [`tables`] (f0, f′, f″, masses, with their sources) → [`direct_sum`] (the formula above as code) → [`ScatteringModel`]
//! (the same numbers, some hundred times faster).
//! In: a [`Structure`], reflections, an energy in eV. Out: F² in e² per cell, one for each reflection, same order.
//! Elsewhere: multiplicity, Lorentz–polarisation (`pattern`); the syntax of CIF (`cif`); symmetry (`lattice`).

mod block;
mod block_sum;
mod checks;
mod content;
pub mod direct_sum;
mod displacement;
mod elements;
mod error;
pub mod expand;
mod exponential;
mod formula;
mod from_cif;
mod from_toml;
mod model;
mod running_sum;
mod structure;
pub mod tables;

pub use error::StructureFactorError;
pub use expand::ExpandedSite;
pub use model::{ScatteringModel, f_squared};
pub use structure::{Atom, Displacement, Expansion, Structure};
