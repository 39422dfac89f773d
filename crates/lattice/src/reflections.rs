//! Reflections of a cell and a group up to a limit.

use std::f64::consts::PI;
use std::fmt;

use crate::Cell;
use crate::cell::quadratic;
use crate::symmetry::{SpaceGroup, turned};

/// Most lattice points that are visited.
const MOST_POINTS: f64 = 5e6;

/// Spacings that agree to this are equal but for rounding, and listed by falling hkl.
const SAME_Q: f64 = 1e-12;

/// One reflection with its equivalents.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Reflection {
    /// The largest triple among the equivalents, in lexicographic order.
    pub hkl: [i32; 3],
    /// Number of equivalents in the Laue class, Friedel mates included.
    pub multiplicity: u32,
    /// Spacing, Å.
    pub d: f64,
}

/// Why no reflections are listed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum ReflectionsError {
    /// The limits are not 0 < `d_min` ≤ `d_max`.
    Limits {
        /// Smallest spacing asked for, Å.
        d_min: f64,
        /// Largest spacing asked for, Å.
        d_max: f64,
    },
    /// The sphere of the limit holds too many lattice points.
    TooMany {
        /// About how many.
        points: f64,
        /// Smallest spacing asked for, Å.
        d_min: f64,
        /// Volume of the cell, Å³.
        volume: f64,
    },
}

impl fmt::Display for ReflectionsError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Limits { d_min, d_max } => {
                write!(
                    f,
                    "limits of d from {d_min} to {d_max} Å; expected a smallest d above 0 and a largest not below it"
                )
            }
            Self::TooMany { points, d_min, volume } => write!(
                f,
                "about {points:.2e} lattice points down to d = {d_min} Å in a cell of {volume:.1} Å³; expected at most \
                 {MOST_POINTS:.0e}: raise the smallest d (a smaller largest angle)"
            ),
        }
    }
}

impl std::error::Error for ReflectionsError {}

/// Reflections with `d_min` ≤ d ≤ `d_max` (Å; `d_max` may be infinite), by falling d, equal d by falling hkl.
///
/// Each set of equivalents is listed once, under its largest triple; those absent by symmetry are left out. 000 is none.
///
/// # Errors
/// [`ReflectionsError`] for limits that are no interval, or that hold more than 5 million lattice points.
pub fn reflections(
    cell: &Cell,
    group: &SpaceGroup,
    d_min: f64,
    d_max: f64,
) -> Result<Vec<Reflection>, ReflectionsError> {
    if !(d_min > 0.0 && d_max >= d_min && d_min.is_finite()) {
        return Err(ReflectionsError::Limits { d_min, d_max });
    }
    let volume = cell.volume();
    let points = 4.0 / 3.0 * PI * volume / d_min.powi(3);
    // A long thin cell has rows and layers that hold few points but must be visited.
    let reach = [cell.a, cell.b, cell.c].map(|edge| edge / d_min);
    let [x, y, z] = reach.map(|reach| 2.0 * reach + 1.0);
    let layer = (x * y).max(y * z).max(x * z);
    if !(points <= MOST_POINTS && layer <= MOST_POINTS) {
        return Err(ReflectionsError::TooMany { points: points.max(layer), d_min, volume });
    }
    let metric = cell.reciprocal_metric();
    // Limits are closed: a line exactly on one of them must not depend on rounding.
    let (q_min, q_max) = (1.0 / (d_max * d_max) * (1.0 - SAME_Q), 1.0 / (d_min * d_min) * (1.0 + SAME_Q));
    let mut found: Vec<(f64, Reflection)> = Vec::new();
    // Largest triples have their first index other than zero above zero.
    for h in 0..=reach[0] as i32 {
        let k_most = reach[1] as i32;
        for k in if h == 0 { 0 } else { -k_most }..=k_most {
            let Some((l_low, l_high)) = span(&metric, h, k, q_max) else { continue };
            for l in if h == 0 && k == 0 { 1.max(l_low) } else { l_low }..=l_high {
                let hkl = [h, k, l];
                let q = quadratic(&metric, hkl);
                if q < q_min || q > q_max || group.is_absent_by_centring(hkl) {
                    continue;
                }
                // Most points have a larger equivalent, which is soon found; only the others are worth the glides.
                let Some(multiplicity) = multiplicity_if_largest(group, hkl) else { continue };
                if !group.is_absent_by_glide(hkl) {
                    found.push((q, Reflection { hkl, multiplicity, d: 1.0 / q.sqrt() }));
                }
            }
        }
    }
    Ok(sorted(found))
}

/// The l for which `hᵀ G* h` may stay below the limit.
fn span(metric: &[[f64; 3]; 3], h: i32, k: i32, q_max: f64) -> Option<(i32, i32)> {
    let square = metric[2][2];
    let linear = f64::from(h) * metric[0][2] + f64::from(k) * metric[1][2];
    let rest = quadratic(metric, [h, k, 0]) - q_max;
    let discriminant = linear * linear - square * rest;
    if discriminant < 0.0 {
        return None;
    }
    let root = discriminant.sqrt();
    // One more on each side than rounding could take away; the test of q decides.
    Some((((-linear - root) / square).floor() as i32, ((-linear + root) / square).ceil() as i32))
}

/// Number of equivalents, if no equivalent is larger.
fn multiplicity_if_largest(group: &SpaceGroup, hkl: [i32; 3]) -> Option<u32> {
    let mut same = 0;
    for rotation in group.laue_rotations() {
        let image = turned(rotation, hkl);
        if image > hkl {
            return None;
        }
        same += usize::from(image == hkl);
    }
    // Order of the class over that of the stabiliser.
    u32::try_from(group.laue_rotations().len() / same.max(1)).ok()
}

/// By rising Q; what agrees but for rounding by falling hkl.
fn sorted(mut found: Vec<(f64, Reflection)>) -> Vec<Reflection> {
    found.sort_by(|(a, x), (b, y)| a.total_cmp(b).then(y.hkl.cmp(&x.hkl)));
    let mut start = 0;
    for end in 1..=found.len() {
        if end == found.len() || found[end].0 - found[end - 1].0 > SAME_Q * found[end].0 {
            found[start..end].sort_by_key(|(_, reflection)| std::cmp::Reverse(reflection.hkl));
            start = end;
        }
    }
    found.into_iter().map(|(_, reflection)| reflection).collect()
}

#[cfg(test)]
mod tests {
    use super::{ReflectionsError, reflections};
    use crate::{Cell, SpaceGroup};

    #[test]
    fn silicon_has_the_lines_of_the_diamond_structure_with_their_multiplicities() {
        // Outside: common practice, no source: 111 ×8, 220 ×12, 311 ×24, 400 ×6, 331 ×24, 422 ×24, and 511 ×24 with
        // 333 ×8 at one d. 222 is no systematic absence of the group (0kl: k + l = 4n, h00: h = 4n): its F² is zero by
        // structure.
        let cell = Cell::cubic(5.431).unwrap();
        let (group, _) = SpaceGroup::from_symbol("F d -3 m:2").unwrap();
        let lines = reflections(&cell, &group, 1.04, f64::INFINITY).unwrap();
        let list: Vec<([i32; 3], u32)> = lines.iter().map(|r| (r.hkl, r.multiplicity)).collect();
        let expected = [
            ([1, 1, 1], 8),
            ([2, 2, 0], 12),
            ([3, 1, 1], 24),
            ([2, 2, 2], 8),
            ([4, 0, 0], 6),
            ([3, 3, 1], 24),
            ([4, 2, 2], 24),
            ([5, 1, 1], 24),
            ([3, 3, 3], 8),
        ];
        assert_eq!(list, expected);
    }

    #[test]
    fn limits_that_are_none_are_refused_with_their_numbers() {
        let (cell, group) = (Cell::cubic(5.0).unwrap(), SpaceGroup::p1());
        for (low, high) in [(0.0, 5.0), (2.0, 1.0), (f64::NAN, 5.0), (1.0, f64::NAN), (-1.0, 5.0)] {
            assert!(matches!(reflections(&cell, &group, low, high), Err(ReflectionsError::Limits { .. })));
        }
        let Err(ReflectionsError::TooMany { points, .. }) = reflections(&cell, &group, 0.01, 5.0) else { panic!() };
        assert!((points / 5.236e8 - 1.0).abs() < 1e-3, "{points}");
        // Needles: few points by volume, but a row of many.
        for [a, b, c] in [[1e8, 1.0, 1e-3], [1e-6, 1e-6, 1e12], [1e-6, 1e12, 1e-6]] {
            let needle = Cell::new(a, b, c, 90.0, 90.0, 90.0).unwrap();
            assert!(matches!(reflections(&needle, &group, 0.9, 5.0), Err(ReflectionsError::TooMany { .. })));
        }
    }
}
