//! Which sums `N = h² + k² + l²` a cubic lattice allows, and which indices belong to each.
//!
//! P: every sum of three squares; I: the even ones (h + k + l even); F: indices all odd (N ≡ 3 mod 8) or all even
//! (N = 4 M). A sum of three squares is every number but those of the form 4ⁿ(8m + 7) (Legendre).

use std::fmt;

/// Largest N that is looked at: a cell of 20 Å down to d = 0.63 Å.
pub(crate) const LARGEST_N: usize = 1023;

/// Centring of a cubic lattice.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Centring {
    /// Primitive.
    P,
    /// Body-centred.
    I,
    /// Face-centred.
    F,
}

impl Centring {
    /// All three.
    pub const ALL: [Self; 3] = [Self::P, Self::I, Self::F];

    /// Lattice points per conventional cell.
    #[must_use]
    pub fn multiplicity(self) -> u32 {
        match self {
            Self::P => 1,
            Self::I => 2,
            Self::F => 4,
        }
    }

    /// Whether the centring leaves a line with this N; N = 0 is none.
    #[must_use]
    pub fn allows(self, n: u32) -> bool {
        match self {
            Self::P => is_sum_of_three_squares(n),
            Self::I => n.is_multiple_of(2) && is_sum_of_three_squares(n),
            Self::F => n % 8 == 3 || (n.is_multiple_of(4) && is_sum_of_three_squares(n / 4)),
        }
    }

    /// Mean number of lines per unit of N: 5/6 of the numbers are sums of three squares, 11/12 of the even ones; for F one
    /// number in eight is 3 mod 8 and 5/6 of the multiples of four count.
    pub(crate) fn lines_per_n(self) -> f64 {
        match self {
            Self::P => 5.0 / 6.0,
            Self::I => 11.0 / 24.0,
            Self::F => 1.0 / 8.0 + 5.0 / 24.0,
        }
    }
}

impl fmt::Display for Centring {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::P => "P",
            Self::I => "I",
            Self::F => "F",
        })
    }
}

/// Legendre's theorem; zero does not count, it is no line.
fn is_sum_of_three_squares(mut n: u32) -> bool {
    if n == 0 {
        return false;
    }
    while n.is_multiple_of(4) {
        n /= 4;
    }
    n % 8 != 7
}

/// All indices with h ≥ k ≥ l ≥ 0, the given N and the parities of the centring, largest triple first: 511 and 333 for 27.
#[must_use]
pub fn indices(n: u32, centring: Centring) -> Vec<[i32; 3]> {
    let mut found = Vec::new();
    if !centring.allows(n) {
        return found;
    }
    let n = i32::try_from(n).unwrap_or(i32::MAX);
    let root = f64::from(n).sqrt() as i32 + 1;
    for h in (0..=root).rev() {
        for k in (0..=h.min(root)).rev() {
            let rest = i64::from(n) - i64::from(h) * i64::from(h) - i64::from(k) * i64::from(k);
            if rest < 0 {
                continue;
            }
            let l = (rest as f64).sqrt().round() as i32;
            if l <= k && i64::from(l) * i64::from(l) == rest {
                found.push([h, k, l]);
            }
        }
    }
    found
}

/// Number of planes of the Laue class m-3m in the form {hkl}; of m-3 it is the sum over its two halves.
pub(crate) fn multiplicity(hkl: [i32; 3]) -> u32 {
    let [h, k, l] = hkl;
    let zeros = hkl.iter().filter(|x| **x == 0).count();
    let orders = match (h == k, k == l) {
        (true, true) => 1,
        (false, false) => 6,
        _ => 3,
    };
    orders * 2_u32.pow(3 - zeros as u32)
}

/// Weight of a line of the given multiplicity: how much likelier it is to be seen.
///
/// The fourth root was chosen on synthetic lists, where it gave the best log score of equal weights, m^¼, m^½, m^¾ and m.
pub(crate) fn visibility(multiplicity: f64) -> f64 {
    multiplicity.sqrt().sqrt()
}

/// Look-up of the allowed N of one centring.
pub(crate) struct Sequence {
    /// Visibility of the line; zero where there is none.
    weight: Vec<f64>,
    /// Number of lines and sum of the weights up to and including the index.
    up_to: Vec<(u32, f64)>,
}

impl Sequence {
    pub(crate) fn of(centring: Centring) -> Self {
        let mut planes = vec![0_u32; LARGEST_N + 1];
        let root = (LARGEST_N as f64).sqrt() as usize;
        for h in 0..=root {
            for k in 0..=h {
                for l in 0..=k {
                    let n = h * h + k * k + l * l;
                    if n <= LARGEST_N && centring.allows(n as u32) {
                        planes[n] += multiplicity([h as i32, k as i32, l as i32]);
                    }
                }
            }
        }
        let weight: Vec<f64> = planes.iter().map(|&m| visibility(f64::from(m))).collect();
        let up_to = weight
            .iter()
            .scan((0, 0.0), |(lines, sum), &w| {
                *lines += u32::from(w > 0.0);
                *sum += w;
                Some((*lines, *sum))
            })
            .collect();
        Self { weight, up_to }
    }

    /// Visibility of line `n` over the sum of those above `after` and up to `last`.
    pub(crate) fn share(&self, n: usize, after: f64, last: f64) -> f64 {
        let up_to = |x: f64| self.up_to[(x.max(0.0) as usize).min(LARGEST_N)].1;
        let sum = (up_to(last) - up_to(after)).max(1.0);
        self.weight.get(n).map_or(0.0, |w| w / sum)
    }

    pub(crate) fn allows(&self, n: usize) -> bool {
        self.weight.get(n).is_some_and(|w| *w > 0.0)
    }

    /// Number of lines with N up to `n`.
    pub(crate) fn count(&self, n: f64) -> u32 {
        self.up_to[(n.max(0.0) as usize).min(LARGEST_N)].0
    }

    /// The allowed N nearest to `x`, within one unit of it.
    pub(crate) fn nearest(&self, x: f64) -> Option<usize> {
        if !(0.0..LARGEST_N as f64).contains(&x) {
            return None;
        }
        // Truncation after adding a half: `round` is a library call, and this is the innermost step of the search.
        let near = (x + 0.5) as usize;
        if self.allows(near) {
            return Some(near);
        }
        let other = if x > near as f64 { near + 1 } else { near.wrapping_sub(1) };
        self.allows(other).then_some(other)
    }
}

#[cfg(test)]
mod tests {
    use super::{Centring, indices, multiplicity};

    fn first(centring: Centring, n: usize) -> Vec<u32> {
        (1..).filter(|&x| centring.allows(x)).take(n).collect()
    }

    #[test]
    fn sequences_of_the_three_centrings_are_those_indexed_by_hand() {
        // Outside: the sequences used for indexing by hand (common practice, no source).
        let p = [1, 2, 3, 4, 5, 6, 8, 9, 10, 11, 12, 13, 14, 16, 17, 18, 19, 20, 21, 22, 24, 25, 26, 27];
        assert_eq!(first(Centring::P, p.len()), p);
        let i = [2, 4, 6, 8, 10, 12, 14, 16, 18, 20, 22, 24, 26, 30, 32, 34, 36, 38, 40];
        assert_eq!(first(Centring::I, i.len()), i);
        let f = [3, 4, 8, 11, 12, 16, 19, 20, 24, 27, 32, 35, 36, 40, 43, 44, 48];
        assert_eq!(first(Centring::F, f.len()), f);
    }

    #[test]
    fn rule_by_n_agrees_with_the_parities_of_enumerated_indices() {
        for n in 1..600_u32 {
            for centring in Centring::ALL {
                let mut any = false;
                for h in 0..25_u32 {
                    for k in 0..=h {
                        for l in 0..=k {
                            let parity = match centring {
                                Centring::P => true,
                                Centring::I => (h + k + l) % 2 == 0,
                                Centring::F => h % 2 == k % 2 && k % 2 == l % 2,
                            };
                            any |= parity && h * h + k * k + l * l == n;
                        }
                    }
                }
                assert_eq!(centring.allows(n), any, "{centring} {n}");
            }
        }
    }

    #[test]
    fn merged_forms_are_listed_together() {
        assert_eq!(indices(27, Centring::F), [[5, 1, 1], [3, 3, 3]]);
        assert_eq!(indices(9, Centring::P), [[3, 0, 0], [2, 2, 1]]);
        assert!(indices(7, Centring::P).is_empty());
    }

    #[test]
    fn multiplicities_of_the_forms_of_the_full_cubic_class() {
        // Outside: International Tables A, class m-3m: 6, 12, 8, 24, 24, 24, 48.
        let forms = [[1, 0, 0], [1, 1, 0], [1, 1, 1], [2, 1, 0], [2, 1, 1], [2, 2, 1], [3, 2, 1]];
        assert_eq!(forms.map(multiplicity), [6, 12, 8, 24, 24, 24, 48]);
    }
}
