//! Structures: a cell, a space group, and the atoms of its asymmetric unit.

use lattice::{Cell, SpaceGroup};
use values::Measured;

/// An atom of the asymmetric unit.
#[derive(Clone, Debug, PartialEq)]
pub struct Atom {
    /// Label as the file gives it, such as `O1`.
    pub label: String,
    /// Element symbol in the usual letters, such as `O`; `D` and `T` for the isotopes of hydrogen.
    pub element: String,
    /// Charge in units of e, 0 for a neutral atom.
    pub charge: i8,
    /// Fractional coordinates x, y, z, as given (not moved onto a special position, not brought into the cell).
    pub position: [f64; 3],
    /// Share of the sites that hold this atom, 0 to 1; what a CIF states above 1 is kept, with a note.
    pub occupancy: f64,
    /// Displacement of the atom about its site.
    pub displacement: Displacement,
}

/// Displacement of an atom about its site, as mean squares.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Displacement {
    /// `B = 8π²U` in Å²: `T = exp(−B s²)`, s = sin θ/λ.
    IsotropicB(f64),
    /// U11, U22, U33, U12, U13, U23 in Å²: `T = exp(−2π² Σᵢⱼ Uᵢⱼ hᵢ hⱼ a*ᵢ a*ⱼ)`. For a site on a symmetry element the
    /// tensor is averaged over the operations of the site before use.
    Anisotropic([f64; 6]),
}

/// Linear thermal expansion along the axes of a cell.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Expansion {
    /// `α = (1/a) da/dT` of a, b and c in K⁻¹, each with its standard uncertainty.
    pub per_kelvin: [Measured; 3],
    /// Temperature that the cell belongs to, in °C.
    pub reference_celsius: f64,
}

/// A crystal structure.
#[derive(Clone, Debug)]
pub struct Structure {
    /// Name for tables and pictures.
    pub name: String,
    /// Cell, in the setting of `group`.
    pub cell: Cell,
    /// Standard uncertainties of a, b, c (Å) and α, β, γ (degrees) as the file states them, 0 where it states none for one;
    /// `None` where it states none at all.
    pub cell_u: Option<[f64; 6]>,
    /// Space group, with its operations.
    pub group: SpaceGroup,
    /// Atoms of the asymmetric unit.
    pub atoms: Vec<Atom>,
    /// What was assumed or left out on reading, one sentence each.
    pub notes: Vec<String>,
    /// Thermal expansion, where the file states it.
    pub expansion: Option<Expansion>,
    /// Chemical formula that the file states, as written; the one of the cell's content is [`Structure::formula`].
    pub stated_formula: Option<String>,
    /// Number of formula units in the cell that the file states.
    pub stated_z: Option<f64>,
}
