//! The linear space of metric tensors that a set of rotations leaves unchanged.

use std::sync::LazyLock;

/// Entries of a metric tensor in the order of its free parameters.
const ENTRIES: [(usize, usize); 6] = [(0, 0), (1, 1), (2, 2), (1, 2), (0, 2), (0, 1)];
const NAMES: [&str; 6] = ["G11", "G22", "G33", "G23", "G13", "G12"];

/// Names of every subset of the entries, by the bits of the subset.
static SUBSETS: LazyLock<Vec<Vec<&'static str>>> =
    LazyLock::new(|| (0..64).map(|bits| (0..6).filter(|i| bits >> i & 1 == 1).map(|i| NAMES[i]).collect()).collect());

/// A space of metric tensors: free entries, and the others as sums of them.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MetricSpace {
    /// Rows of the reduced echelon form: row n has 1 at the n-th free entry and 0 at the other free ones.
    rows: [[f64; 6]; 6],
    /// Bits of the free entries.
    free: u8,
}

impl MetricSpace {
    /// The metrics with `Rᵀ G R = G` for all R of a finite group, each given once.
    pub(crate) fn invariant_under(rotations: &[[[i32; 3]; 3]]) -> Self {
        // The sums Σ Rᵀ E R over a basis E of symmetric tensors span the space.
        let mut spanning: [[f64; 6]; 6] = [[0.0; 6]; 6];
        for (row, (i, j)) in spanning.iter_mut().zip(ENTRIES) {
            for r in rotations {
                for (sum, (p, q)) in row.iter_mut().zip(ENTRIES) {
                    *sum += f64::from(r[i][p] * r[j][q] + r[j][p] * r[i][q]);
                }
            }
        }
        Self::echelon(spanning)
    }

    /// Reduced echelon form. Entries are whole numbers of small size, so that zero is well told from rounding.
    fn echelon(mut rows: [[f64; 6]; 6]) -> Self {
        let mut rank = 0;
        let mut free = 0_u8;
        for column in 0..6 {
            let best = (rank..6).max_by(|a, b| rows[*a][column].abs().total_cmp(&rows[*b][column].abs()));
            let Some(best) = best.filter(|best| rows[*best][column].abs() > 1e-9) else { continue };
            rows.swap(rank, best);
            let pivot = rows[rank][column];
            rows[rank] = rows[rank].map(|entry| entry / pivot);
            let pivot_row = rows[rank];
            for (place, row) in rows.iter_mut().enumerate() {
                if place != rank {
                    let factor = row[column];
                    *row = std::array::from_fn(|i| row[i] - factor * pivot_row[i]);
                }
            }
            free |= 1 << column;
            rank += 1;
        }
        for row in &mut rows[rank..] {
            *row = [0.0; 6];
        }
        Self { rows, free }
    }

    /// Number of free entries.
    #[must_use]
    pub fn dimension(&self) -> usize {
        self.free.count_ones() as usize
    }

    /// Names of the free entries: `G11`, `G22`, `G33`, `G23`, `G13`, `G12`.
    #[must_use]
    pub fn names(&self) -> &'static [&'static str] {
        SUBSETS.get(usize::from(self.free)).map_or(&[], Vec::as_slice)
    }

    /// One metric for each free entry, as (G11, G22, G33, G23, G13, G12).
    pub(crate) fn basis(&self) -> impl Iterator<Item = [f64; 6]> {
        self.rows.into_iter().take(self.dimension())
    }

    /// The free entries of a metric, Å².
    pub(crate) fn coordinates(&self, metric: &[[f64; 3]; 3]) -> Vec<f64> {
        let entries = ENTRIES.iter().enumerate().filter(|(place, _)| self.free >> place & 1 == 1);
        entries.map(|(_, (i, j))| metric[*i][*j]).collect()
    }

    /// The metric with these free entries, Å².
    pub(crate) fn metric(&self, free: &[f64]) -> [[f64; 3]; 3] {
        let mut metric = [[0.0; 3]; 3];
        for (place, (i, j)) in ENTRIES.into_iter().enumerate() {
            let value = free.iter().zip(&self.rows).map(|(factor, row)| factor * row[place]).sum();
            metric[i][j] = value;
            metric[j][i] = value;
        }
        metric
    }
}
