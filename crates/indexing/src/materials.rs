//! What a cell and a density say about its content: formula units, packing, radius of touching spheres.
//!
//! `Z = ρ V N_A / M`, with ρ in g/cm³, V in Å³ and M in g/mol: `Z = ρ V / (1.66053906892 M)`; the constant is the atomic mass
//! constant in 10⁻²⁴ g (CODATA 2022). Packing of equal touching spheres is geometry (common practice, no source).

use values::Measured;

/// Atomic mass constant in 10⁻²⁴ g (CODATA 2022).
const ATOMIC_MASS_CONSTANT: f64 = 1.660_539_068_92;

/// Where the atoms of one kind sit in a cubic cell.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Arrangement {
    /// One atom per primitive cell.
    PrimitiveCubic,
    /// Two atoms per body-centred cell.
    BodyCentred,
    /// Four atoms per face-centred cell.
    FaceCentred,
    /// Eight atoms per face-centred cell, as in diamond.
    Diamond,
}

impl Arrangement {
    /// Atoms per conventional cell.
    #[must_use]
    pub fn atoms_per_cell(self) -> u32 {
        match self {
            Self::PrimitiveCubic => 1,
            Self::BodyCentred => 2,
            Self::FaceCentred => 4,
            Self::Diamond => 8,
        }
    }

    /// Neighbours in touch.
    #[must_use]
    pub fn coordination(self) -> u32 {
        match self {
            Self::PrimitiveCubic => 6,
            Self::BodyCentred => 8,
            Self::FaceCentred => 12,
            Self::Diamond => 4,
        }
    }

    /// Radius of touching spheres over the edge a: 1/2, √3/4, √2/4, √3/8.
    #[must_use]
    pub fn radius_over_edge(self) -> f64 {
        match self {
            Self::PrimitiveCubic => 0.5,
            Self::BodyCentred => 3f64.sqrt() / 4.0,
            Self::FaceCentred => 2f64.sqrt() / 4.0,
            Self::Diamond => 3f64.sqrt() / 8.0,
        }
    }

    /// Share of the volume that the touching spheres fill: `n (4π/3) (r/a)³`.
    #[must_use]
    pub fn packing_fraction(self) -> f64 {
        f64::from(self.atoms_per_cell()) * 4.0 * std::f64::consts::PI / 3.0 * self.radius_over_edge().powi(3)
    }

    /// Radius of touching spheres in a cell of edge `a` (Å), with its s.u.
    #[must_use]
    pub fn touching_radius(self, a: Measured) -> Measured {
        Measured::new(a.value * self.radius_over_edge(), a.u * self.radius_over_edge())
    }

    /// The arrangement that a number of atoms per cell and a centring suggest, for one kind of atom.
    #[must_use]
    pub fn of(centring: crate::cubic::Centring, atoms_per_cell: u32) -> Option<Self> {
        use crate::cubic::Centring;
        match (centring, atoms_per_cell) {
            (Centring::P, 1) => Some(Self::PrimitiveCubic),
            (Centring::I, 2) => Some(Self::BodyCentred),
            (Centring::F, 4) => Some(Self::FaceCentred),
            (Centring::F, 8) => Some(Self::Diamond),
            _ => None,
        }
    }
}

/// Formula units per cell, `Z = ρ V / (1.66053906892 M)`, with the s.u. from those of density and volume.
///
/// `volume` in Å³, `molar_mass_g_mol` of the formula (or of the element), `density` in g/cm³.
#[must_use]
pub fn from_density(volume: Measured, molar_mass_g_mol: f64, density: Measured) -> Measured {
    let z = density.value * volume.value / (ATOMIC_MASS_CONSTANT * molar_mass_g_mol);
    let relative = (density.u / density.value).hypot(volume.u / volume.value);
    Measured::new(z, z.abs() * relative)
}

#[cfg(test)]
mod tests {
    use super::{Arrangement, from_density};
    use crate::cubic::Centring;
    use values::Measured;

    #[test]
    fn packing_fractions_are_those_of_geometry() {
        // Outside: π/6; π√3/8, π√2/6, π√3/16 as printed to six digits (common practice, no source).
        for (arrangement, fraction, coordination) in [
            (Arrangement::PrimitiveCubic, std::f64::consts::FRAC_PI_6, 6),
            (Arrangement::BodyCentred, 0.680175, 8),
            (Arrangement::FaceCentred, 0.740480, 12),
            (Arrangement::Diamond, 0.340087, 4),
        ] {
            assert!((arrangement.packing_fraction() - fraction).abs() < 6e-7, "{arrangement:?}");
            assert_eq!(arrangement.coordination(), coordination);
        }
    }

    #[test]
    fn iron_copper_and_silicon_have_two_four_and_eight_atoms() {
        // Outside, from memory: densities 7.874, 8.96, 2.329 g/cm³; cells of NBS Circular 539; standard atomic weights.
        for (a, mass, density, centring, atoms, radius) in [
            (2.8664, 55.845, 7.874, Centring::I, 2, 1.241),
            (3.6150, 63.546, 8.96, Centring::F, 4, 1.278),
            (5.4301, 28.085, 2.329, Centring::F, 8, 1.176),
        ] {
            let a = Measured::new(a, 0.0001);
            let volume = Measured::new(a.value.powi(3), 3.0 * a.value * a.value * a.u);
            let z = from_density(volume, mass, Measured::new(density, 0.01));
            assert!((z.value - f64::from(atoms)).abs() < 0.02, "{z}");
            assert!(z.u > 0.0 && z.u < 0.05);
            let arrangement = Arrangement::of(centring, atoms).unwrap();
            assert!((arrangement.touching_radius(a).value - radius).abs() < 0.001);
        }
        assert_eq!(Arrangement::of(Centring::P, 5), None);
    }
}
