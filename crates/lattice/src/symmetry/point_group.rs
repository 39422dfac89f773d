//! What the rotations of a group say: Laue class, crystal system, lattice letter.

use std::fmt;

use super::operation::{Operation, TRANSLATION_UNIT};

/// The seven crystal systems.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum CrystalSystem {
    /// No axis.
    Triclinic,
    /// One twofold axis.
    Monoclinic,
    /// Three twofold axes.
    Orthorhombic,
    /// One fourfold axis.
    Tetragonal,
    /// One threefold axis.
    Trigonal,
    /// One sixfold axis.
    Hexagonal,
    /// Four threefold axes.
    Cubic,
}

impl fmt::Display for CrystalSystem {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Triclinic => "triclinic",
            Self::Monoclinic => "monoclinic",
            Self::Orthorhombic => "orthorhombic",
            Self::Tetragonal => "tetragonal",
            Self::Trigonal => "trigonal",
            Self::Hexagonal => "hexagonal",
            Self::Cubic => "cubic",
        })
    }
}

/// Lattice letters. `R` is rhombohedral on hexagonal axes, obverse.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Centring {
    /// Primitive.
    P,
    /// Centred on the face of b and c.
    A,
    /// Centred on the face of a and c.
    B,
    /// Centred on the face of a and b.
    C,
    /// Body-centred.
    I,
    /// Centred on all faces.
    F,
    /// Rhombohedral on hexagonal axes, obverse.
    R,
}

impl Centring {
    /// All letters.
    pub const ALL: [Self; 7] = [Self::P, Self::A, Self::B, Self::C, Self::I, Self::F, Self::R];

    /// Lattice points in the cell.
    #[must_use]
    pub fn multiplicity(self) -> u32 {
        match self {
            Self::P => 1,
            Self::A | Self::B | Self::C | Self::I => 2,
            Self::R => 3,
            Self::F => 4,
        }
    }

    /// Whether the lattice lets a reflection appear. Source: International Tables A (2002), Table 2.2.13.1; obverse R:
    /// −h + k + l = 3n.
    #[must_use]
    pub fn allows(self, [h, k, l]: [i32; 3]) -> bool {
        let even = |n: i32| n.rem_euclid(2) == 0;
        match self {
            Self::P => true,
            Self::A => even(k + l),
            Self::B => even(h + l),
            Self::C => even(h + k),
            Self::I => even(h + k + l),
            Self::F => even(h + k) && even(k + l),
            Self::R => (k + l - h).rem_euclid(3) == 0,
        }
    }

    /// Lattice points beside 000, in 24ths of the edges, sorted.
    #[must_use]
    pub fn translations(self) -> &'static [[i32; 3]] {
        match self {
            Self::P => &[],
            Self::A => &[[0, 12, 12]],
            Self::B => &[[12, 0, 12]],
            Self::C => &[[12, 12, 0]],
            Self::I => &[[12, 12, 12]],
            Self::F => &[[0, 12, 12], [12, 0, 12], [12, 12, 0]],
            Self::R => &[[8, 16, 16], [16, 8, 8]],
        }
    }

    /// The letter of a set of translations (24ths, sorted, without 000); `None` for reverse rhombohedral, triple
    /// hexagonal and other cells that have no letter here.
    pub(crate) fn of(translations: &[[i32; 3]]) -> Option<Self> {
        Self::ALL.into_iter().find(|letter| letter.translations() == translations)
    }
}

impl fmt::Display for Centring {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::P => "P",
            Self::A => "A",
            Self::B => "B",
            Self::C => "C",
            Self::I => "I",
            Self::F => "F",
            Self::R => "R",
        })
    }
}

/// Rotations of the Laue class: those of the group and their negatives, each once, sorted.
pub(crate) fn laue_rotations(operations: &[Operation]) -> Vec<[[i32; 3]; 3]> {
    let mut rotations: Vec<[[i32; 3]; 3]> =
        operations.iter().map(|operation| operation.rotation.map(|row| row.map(i32::from))).collect();
    rotations.extend(rotations.clone().iter().map(|r| r.map(|row| row.map(|entry| -entry))));
    rotations.sort_unstable();
    rotations.dedup();
    rotations
}

/// The system of a Laue class, by its proper axes. A proper rotation by 360°/n has trace −1, 0, 1, 2 for n = 2, 3, 4, 6.
pub(crate) fn system(laue: &[[[i32; 3]; 3]]) -> CrystalSystem {
    let mut axes = [0; 4];
    for r in laue {
        let determinant = r[0][0] * (r[1][1] * r[2][2] - r[1][2] * r[2][1])
            - r[0][1] * (r[1][0] * r[2][2] - r[1][2] * r[2][0])
            + r[0][2] * (r[1][0] * r[2][1] - r[1][1] * r[2][0]);
        let trace = r[0][0] + r[1][1] + r[2][2];
        if determinant == 1 && (-1..=2).contains(&trace) {
            axes[usize::try_from(trace + 1).unwrap_or(0)] += 1;
        }
    }
    match axes {
        [_, three, _, _] if three > 2 => CrystalSystem::Cubic,
        [_, _, _, six] if six > 0 => CrystalSystem::Hexagonal,
        [_, three, _, _] if three > 0 => CrystalSystem::Trigonal,
        [_, _, four, _] if four > 0 => CrystalSystem::Tetragonal,
        [two, _, _, _] if two > 1 => CrystalSystem::Orthorhombic,
        [1, _, _, _] => CrystalSystem::Monoclinic,
        _ => CrystalSystem::Triclinic,
    }
}

/// Pure translations of a group in 24ths, sorted, without 000.
pub(crate) fn pure_translations(operations: &[Operation]) -> Vec<[i32; 3]> {
    let mut translations: Vec<[i32; 3]> = operations
        .iter()
        .filter(|o| o.rotation == Operation::IDENTITY.rotation && o.translation != [0; 3])
        .map(|o| o.translation.map(|t| t.rem_euclid(TRANSLATION_UNIT)))
        .collect();
    translations.sort_unstable();
    translations
}

#[cfg(test)]
mod tests {
    use super::Centring;

    #[test]
    fn a_letter_allows_what_its_translations_leave_in_phase() {
        for letter in Centring::ALL {
            assert_eq!(letter.translations().len() + 1, letter.multiplicity() as usize);
            for h in -4..=4 {
                for k in -4..=4 {
                    for l in -4..=4 {
                        let in_phase =
                            letter.translations().iter().all(|t| (h * t[0] + k * t[1] + l * t[2]).rem_euclid(24) == 0);
                        assert_eq!(letter.allows([h, k, l]), in_phase, "{letter} {h} {k} {l}");
                    }
                }
            }
        }
    }
}
