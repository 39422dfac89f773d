//! Lattices of other systems whose lines are exactly those of a cubic lattice, at every angle.
//!
//! Found by an exhaustive search over sub-lattices of the reciprocal lattice and compared over 15–49 lines; the idea is that of
//! Mighell & Santoro (1975), J. Appl. Cryst. 8, 372. No list of positions can tell the partners apart; the rule puts the higher
//! symmetry first.

/// A lattice with the same lines as a reading.
#[derive(Clone, Debug, PartialEq)]
pub struct Twin {
    /// Crystal system, lower case.
    pub crystal_system: &'static str,
    /// Centring letter.
    pub centring: char,
    /// a, b, c in Å, α, β, γ in degrees.
    pub cell: [f64; 6],
    /// Volume of its primitive cell over that of the reading.
    pub volume_ratio: f64,
    /// How far the agreement goes.
    pub kind: TwinKind,
}

/// How far two lattices agree.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum TwinKind {
    /// At every angle.
    Exact,
    /// Over the lines of this list only.
    ObservedLines,
}

impl std::fmt::Display for TwinKind {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(match self {
            Self::Exact => "exact",
            Self::ObservedLines => "observed lines",
        })
    }
}

use super::sequence::Centring;

/// The exact twins of a cubic lattice with edge `a` in Å.
#[must_use]
pub fn exact_twins(centring: Centring, a: f64) -> Vec<Twin> {
    let r = std::f64::consts::SQRT_2;
    let twin = |crystal_system, letter, x: f64, y: f64, z: f64, volume_ratio| Twin {
        crystal_system,
        centring: letter,
        cell: [a * x, a * y, a * z, 90.0, 90.0, 90.0],
        volume_ratio,
        kind: TwinKind::Exact,
    };
    match centring {
        Centring::P => vec![
            twin("tetragonal", 'P', 1.0 / r, 1.0 / r, 1.0, 1.0 / 2.0),
            twin("orthorhombic", 'C', r / 3.0, r, 1.0, 1.0 / 3.0),
        ],
        Centring::I => vec![
            twin("tetragonal", 'P', 1.0 / r, 1.0 / r, 0.5, 1.0 / 2.0),
            twin("orthorhombic", 'F', r / 3.0, 1.0, r, 1.0 / 3.0),
            twin("orthorhombic", 'P', r / 4.0, 0.5, 1.0 / r, 1.0 / 4.0),
        ],
        Centring::F => vec![
            twin("orthorhombic", 'C', 1.0 / r, 1.0, r / 4.0, 1.0 / 2.0),
            twin("orthorhombic", 'I', r / 6.0, 1.0 / r, 1.0, 1.0 / 3.0),
        ],
    }
}

#[cfg(test)]
mod tests {
    use super::{Centring, exact_twins};

    #[test]
    fn every_twin_has_exactly_the_lines_of_its_cubic_lattice() {
        for centring in Centring::ALL {
            for twin in exact_twins(centring, 1.0) {
                let [a, b, c, ..] = twin.cell;
                let mut lines = std::collections::BTreeSet::new();
                for h in 0..12_i32 {
                    for k in 0..12_i32 {
                        for l in 0..12_i32 {
                            let seen = match twin.centring {
                                'P' => true,
                                'C' => (h + k) % 2 == 0,
                                'I' => (h + k + l) % 2 == 0,
                                'F' => h % 2 == k % 2 && k % 2 == l % 2,
                                other => panic!("{other}"),
                            };
                            let q =
                                (f64::from(h) / a).powi(2) + (f64::from(k) / b).powi(2) + (f64::from(l) / c).powi(2);
                            if seen && q > 0.0 && q < 49.5 {
                                assert!((q - q.round()).abs() < 1e-9, "{twin:?} {h}{k}{l} {q}");
                                lines.insert(q.round() as u32);
                            }
                        }
                    }
                }
                let cubic: Vec<u32> = (1..50).filter(|n| centring.allows(*n)).collect();
                assert_eq!(lines.into_iter().collect::<Vec<_>>(), cubic, "{twin:?}");
                // The ratio is that of primitive volumes.
                let points = |letter| match letter {
                    'P' => 1.0,
                    'F' => 4.0,
                    _ => 2.0,
                };
                let ratio = a * b * c / points(twin.centring) * f64::from(centring.multiplicity());
                assert!((ratio - twin.volume_ratio).abs() < 1e-12, "{twin:?} {ratio}");
            }
        }
    }
}
