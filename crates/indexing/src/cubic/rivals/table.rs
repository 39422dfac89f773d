//! Tetragonal and hexagonal lattices as tables of lines: `Q = A m + C l²`.

use crate::cubic::lines::Lines;
use crate::cubic::sequence::visibility;

/// Largest m of the enumeration.
const LARGEST_M: u32 = 400;

/// A uniaxial lattice: `Q = A m + C l²`, m = h² + k² or h² + hk + k².
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Kind {
    TetragonalP,
    TetragonalI,
    HexagonalP,
    Rhombohedral,
}

impl Kind {
    pub(super) fn primitive(self) -> Self {
        match self {
            Self::TetragonalP | Self::TetragonalI => Self::TetragonalP,
            Self::HexagonalP | Self::Rhombohedral => Self::HexagonalP,
        }
    }

    /// Centring: I needs m + l even; R needs m and l both multiples of three or neither (for one of ±l).
    pub(super) fn allows(self, m: u32, l: u32) -> bool {
        match self {
            Self::TetragonalP | Self::HexagonalP => true,
            Self::TetragonalI => (m + l).is_multiple_of(2),
            Self::Rhombohedral => m.is_multiple_of(3) == l.is_multiple_of(3),
        }
    }

    /// In words for a sentence.
    pub(crate) fn name(self) -> &'static str {
        match self {
            Self::TetragonalP => "tetragonal P",
            Self::TetragonalI => "tetragonal I",
            Self::HexagonalP => "hexagonal P",
            Self::Rhombohedral => "rhombohedral R (hexagonal axes)",
        }
    }
}

/// Sums m that occur, as flags up to [`LARGEST_M`].
pub(super) struct Plane {
    pub(super) occurs: Vec<bool>,
    /// m and the number of pairs (h, k) that give it.
    sums: Vec<(u32, f64)>,
}

impl Plane {
    pub(super) fn new(hexagonal: bool) -> Self {
        let mut pairs = vec![0.0; LARGEST_M as usize + 1];
        for h in -24..=24_i32 {
            for k in -24..=24_i32 {
                let m = h * h + k * k + if hexagonal { h * k } else { 0 };
                if let Some(sum) = usize::try_from(m).ok().and_then(|m| pairs.get_mut(m)) {
                    *sum += 1.0;
                }
            }
        }
        let occurs = pairs.iter().map(|p| *p > 0.0).collect();
        let sums = (0..=LARGEST_M).zip(pairs).filter(|(_, p)| *p > 0.0).collect();
        Self { occurs, sums }
    }
}

/// Number of calculated lines, equal ones counted twice.
pub(super) fn count(plane: &Plane, kind: Kind, a_star2: f64, c_star2: f64, lines: &Lines) -> usize {
    let mut found = 0;
    let mut l = 0_u32;
    loop {
        let rest = (lines.q_last - c_star2 * f64::from(l * l)) / a_star2;
        if rest < 0.0 {
            return found;
        }
        found +=
            plane.sums.iter().take_while(|(m, _)| f64::from(*m) <= rest).filter(|(m, _)| kind.allows(*m, l)).count();
        l += 1;
    }
}

/// A calculated line of a uniaxial lattice.
#[derive(Clone, Copy)]
pub(super) struct Calculated {
    pub(super) q: f64,
    pub(super) m: f64,
    pub(super) l2: f64,
    pub(super) share: f64,
}

/// Calculated lines by rising Q; equal Q count once.
pub(super) fn table(plane: &Plane, kind: Kind, a_star2: f64, c_star2: f64, lines: &Lines) -> Vec<Calculated> {
    let limit = lines.q_last * (1.0 + 1e-3);
    let mut found = Vec::new();
    let mut l = 0_u32;
    while c_star2 * f64::from(l * l) <= limit {
        let sides = if l == 0 { 1.0 } else { 2.0 };
        for &(m, pairs) in &plane.sums {
            let q = a_star2 * f64::from(m) + c_star2 * f64::from(l * l);
            if q > limit {
                break;
            }
            if q > lines.q_start && (m, l) != (0, 0) && kind.allows(m, l) {
                // Here `share` is the multiplicity; for R half of the pairs lie on each side of ±l where m is no multiple of 3.
                let half = kind == Kind::Rhombohedral && !m.is_multiple_of(3);
                let planes = if half { pairs * sides / 2.0 } else { pairs * sides };
                found.push(Calculated { q, m: f64::from(m), l2: f64::from(l * l), share: planes });
            }
        }
        l += 1;
    }
    found.sort_by(|x, y| x.q.total_cmp(&y.q));
    found.dedup_by(|next, kept| {
        let same = (next.q / kept.q - 1.0).abs() < 1e-7;
        if same {
            kept.share += next.share;
        }
        same
    });
    let sum: f64 = found.iter().map(|line| visibility(line.share)).sum();
    for line in &mut found {
        line.share = visibility(line.share) / sum.max(1.0);
    }
    found
}
