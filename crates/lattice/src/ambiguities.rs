//! Lattices that no list of lines can tell apart, however long: same d, another symmetry, a smaller primitive volume.
//!
//! Source: A. D. Mighell & A. Santoro (1975), J. Appl. Cryst. 8, 372 (from memory); the nine pairs were found by a search
//! over sublattices, and the tests of this page compare their d lists.

use crate::symmetry::{Centring, CrystalSystem};
use crate::{Cell, CellError};

/// A lattice by its conventional cell.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lattice {
    /// Crystal system; rhombohedral lattices are trigonal with centring R.
    pub system: CrystalSystem,
    /// Centring of the cell.
    pub centring: Centring,
    /// The conventional cell.
    pub cell: Cell,
}

/// A lattice with the same d list as another.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Partner {
    /// The partner.
    pub lattice: Lattice,
    /// Volume of its primitive cell over that of the other lattice: 1/2, 1/3 or 1/4.
    pub volume_ratio: f64,
}

/// The lattices with exactly the same set of d as a cubic, hexagonal P or rhombohedral one; none for other systems.
///
/// # Errors
/// [`CellError`] only for cells at the edge of what [`Cell::new`] lets pass.
pub fn exact_partners(lattice: &Lattice) -> Result<Vec<Partner>, CellError> {
    let Cell { a, c, .. } = lattice.cell;
    let (root2, root3) = (2f64.sqrt(), 3f64.sqrt());
    let right = |system, centring, [a, b, c]: [f64; 3], parts: u32| -> Result<Partner, CellError> {
        let cell = Cell::new(a, b, c, 90.0, 90.0, 90.0)?;
        Ok(Partner { lattice: Lattice { system, centring, cell }, volume_ratio: 1.0 / f64::from(parts) })
    };
    let tetragonal = |edges, parts| right(CrystalSystem::Tetragonal, Centring::P, edges, parts);
    let orthorhombic = |centring, edges, parts| right(CrystalSystem::Orthorhombic, centring, edges, parts);
    let pairs = match (lattice.system, lattice.centring) {
        (CrystalSystem::Cubic, Centring::P) => vec![
            tetragonal([a / root2, a / root2, a], 2),
            orthorhombic(Centring::C, [a * root2 / 3.0, a * root2, a], 3),
        ],
        (CrystalSystem::Cubic, Centring::I) => vec![
            tetragonal([a / root2, a / root2, a / 2.0], 2),
            orthorhombic(Centring::F, [a * root2 / 3.0, a, a * root2], 3),
            orthorhombic(Centring::P, [a / (2.0 * root2), a / 2.0, a / root2], 4),
        ],
        (CrystalSystem::Cubic, Centring::F) => vec![
            orthorhombic(Centring::C, [a / root2, a, a / (2.0 * root2)], 2),
            orthorhombic(Centring::I, [a / (3.0 * root2), a / root2, a], 3),
        ],
        (CrystalSystem::Hexagonal | CrystalSystem::Trigonal, Centring::P) => {
            vec![orthorhombic(Centring::P, [a / 2.0, a * root3 / 2.0, c], 2)]
        }
        (CrystalSystem::Trigonal, Centring::R) => vec![monoclinic(a, c)],
        _ => Vec::new(),
    };
    pairs.into_iter().collect()
}

/// The partner of a rhombohedral lattice (hexagonal axes): half of its primitive volume; the shorter edge is a.
fn monoclinic(a: f64, c: f64) -> Result<Partner, CellError> {
    let (one, two) = (a * 3f64.sqrt() / 2.0, (c * c / 9.0 + a * a / 12.0).sqrt());
    let beta = (-a / (2.0 * 3f64.sqrt()) / two).acos().to_degrees();
    let cell = Cell::new(one.min(two), a / 2.0, one.max(two), 90.0, beta, 90.0)?;
    let lattice = Lattice { system: CrystalSystem::Monoclinic, centring: Centring::P, cell };
    Ok(Partner { lattice, volume_ratio: 0.5 })
}

#[cfg(test)]
mod tests {
    use super::{Lattice, exact_partners};
    use crate::symmetry::{Centring, CrystalSystem};
    use crate::{Cell, SpaceGroup, reflections};

    fn lattice(system: CrystalSystem, centring: Centring, a: f64, c: f64, gamma: f64) -> Lattice {
        Lattice { system, centring, cell: Cell::new(a, a, c, 90.0, 90.0, gamma).unwrap() }
    }

    fn true_lattices() -> [Lattice; 5] {
        [
            lattice(CrystalSystem::Cubic, Centring::P, 4.0, 4.0, 90.0),
            lattice(CrystalSystem::Cubic, Centring::I, 4.0, 4.0, 90.0),
            lattice(CrystalSystem::Cubic, Centring::F, 4.0, 4.0, 90.0),
            lattice(CrystalSystem::Hexagonal, Centring::P, 5.0, 7.0, 120.0),
            lattice(CrystalSystem::Trigonal, Centring::R, 4.0, 9.7, 120.0),
        ]
    }

    /// Different d of a lattice above a limit, falling.
    fn spacings(lattice: &Lattice, d_min: f64) -> Vec<f64> {
        let list = reflections(&lattice.cell, &SpaceGroup::p1(), d_min, f64::INFINITY).unwrap();
        let mut d: Vec<f64> = list.iter().filter(|r| lattice.centring.allows(r.hkl)).map(|r| r.d).collect();
        d.dedup_by(|x, y| (*x / *y - 1.0).abs() < 1e-9);
        d
    }

    #[test]
    fn partners_have_the_same_d_list_and_the_stated_volume() {
        let mut pairs = 0;
        for first in true_lattices() {
            for partner in exact_partners(&first).unwrap() {
                let (here, there) = (spacings(&first, 0.35), spacings(&partner.lattice, 0.35));
                assert!(here.len() > 40 && here.len() == there.len(), "{partner:?}: {} {}", here.len(), there.len());
                assert!(here.iter().zip(there).all(|(a, b)| (a / b - 1.0).abs() < 1e-9), "{partner:?}");
                let primitive = |l: &Lattice| l.cell.volume() / f64::from(l.centring.multiplicity());
                let ratio = primitive(&partner.lattice) / primitive(&first);
                assert!((ratio / partner.volume_ratio - 1.0).abs() < 1e-9, "{partner:?} {ratio}");
                pairs += 1;
            }
        }
        assert_eq!(pairs, 9);
    }

    #[test]
    fn partners_are_those_of_the_reference_values() {
        // Outside: the reference values of the nine pairs (computed by a search that shares no code with this): cubic P
        // 4 Å has tetragonal P 2.8284, 4 Å; hexagonal 5, 7 Å has orthorhombic P 2.5, 4.3301, 7 Å; rhombohedral 4, 9.7 Å
        // has monoclinic P 3.433, 2.000, 3.464 Å, 109.65°.
        let [cubic, .., hexagonal, rhombohedral] = true_lattices();
        for (first, expected) in [
            (cubic, [2.8284, 2.8284, 4.0, 90.0]),
            (hexagonal, [2.5, 4.3301, 7.0, 90.0]),
            (rhombohedral, [3.433, 2.0, 3.464, 109.65]),
        ] {
            let cell = exact_partners(&first).unwrap()[0].lattice.cell;
            for (found, expected) in [cell.a, cell.b, cell.c, cell.beta].iter().zip(expected) {
                assert!((found - expected).abs() < 5e-3, "{cell:?}");
            }
        }
    }
}
