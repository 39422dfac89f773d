//! Symmetric positive definite systems of at most eight unknowns, on the stack.
//!
//! A series of batches solves some hundred of them; a general matrix library would spend more time on memory than on sums.

/// Largest number of unknowns: six of the cell, displacement, zero.
pub const MOST: usize = 8;

/// A normal matrix with its right-hand side; only the lower triangle is used.
#[derive(Clone, Copy, Debug)]
pub struct Normal {
    n: usize,
    /// Lower triangle, row by row.
    pub matrix: [[f64; MOST]; MOST],
    /// Right-hand side.
    pub rhs: [f64; MOST],
}

/// Its Cholesky factor `N = L Lᵀ`.
#[derive(Clone, Copy, Debug)]
pub struct Factor {
    n: usize,
    lower: [[f64; MOST]; MOST],
}

impl Normal {
    /// Zero matrix of `n` unknowns.
    ///
    /// # Panics
    /// When `n` is beyond [`MOST`].
    #[must_use]
    pub fn new(n: usize) -> Self {
        assert!(n <= MOST, "at most {MOST} unknowns");
        Self { n, matrix: [[0.0; MOST]; MOST], rhs: [0.0; MOST] }
    }

    /// Adds one observation: row of derivatives, residual and weight 1/u².
    pub fn add(&mut self, row: &[f64; MOST], residual: f64, weight: f64) {
        for i in 0..self.n {
            let scaled = weight * row[i];
            self.rhs[i] += scaled * residual;
            for (slot, value) in self.matrix[i][..=i].iter_mut().zip(row) {
                *slot += scaled * value;
            }
        }
    }

    /// Adds knowledge of one unknown: `residual` is the known value less the present one, `u` its s.u.
    pub fn prior(&mut self, index: usize, residual: f64, u: f64) {
        self.matrix[index][index] += 1.0 / (u * u);
        self.rhs[index] += residual / (u * u);
    }

    /// Cholesky factor; `None` when the matrix is singular to working precision.
    #[must_use]
    pub fn factor(&self) -> Option<Factor> {
        let mut lower: [[f64; MOST]; MOST] = [[0.0; MOST]; MOST];
        for i in 0..self.n {
            for j in 0..=i {
                let known: f64 = lower[i][..j].iter().zip(&lower[j][..j]).map(|(x, y)| x * y).sum();
                let sum = self.matrix[i][j] - known;
                if i == j {
                    // What is left of the diagonal is rounding: the unknown is not determined.
                    if sum.is_nan() || sum <= 1e-12 * self.matrix[i][i] {
                        return None;
                    }
                    lower[i][i] = sum.sqrt();
                } else {
                    lower[i][j] = sum / lower[j][j];
                }
            }
        }
        Some(Factor { n: self.n, lower })
    }
}

impl Factor {
    /// Solves `N x = rhs`.
    #[must_use]
    pub fn solve(&self, rhs: &[f64; MOST]) -> [f64; MOST] {
        let mut x = *rhs;
        for i in 0..self.n {
            for k in 0..i {
                x[i] -= self.lower[i][k] * x[k];
            }
            x[i] /= self.lower[i][i];
        }
        for i in (0..self.n).rev() {
            for k in i + 1..self.n {
                x[i] -= self.lower[k][i] * x[k];
            }
            x[i] /= self.lower[i][i];
        }
        x
    }

    /// Element (i, j) of the inverse needs a whole column; this gives column `j`.
    #[must_use]
    pub fn inverse_column(&self, j: usize) -> [f64; MOST] {
        let mut unit = [0.0; MOST];
        unit[j] = 1.0;
        self.solve(&unit)
    }
}

#[cfg(test)]
mod tests {
    use super::{MOST, Normal};

    #[test]
    fn a_line_through_three_points_is_found_with_its_covariance() {
        // y = 1 + 2 x at x = 0, 1, 2 with unit weights: N = [[3, 3], [3, 5]], inverse [[5, -3], [-3, 3]] / 6 (by hand).
        let mut normal = Normal::new(2);
        for (x, y) in [(0.0, 1.0), (1.0, 3.0), (2.0, 5.0)] {
            let mut row = [0.0; MOST];
            row[..2].copy_from_slice(&[1.0, x]);
            normal.add(&row, y, 1.0);
        }
        let factor = normal.factor().unwrap();
        let x = factor.solve(&normal.rhs);
        assert!((x[0] - 1.0).abs() < 1e-14 && (x[1] - 2.0).abs() < 1e-14);
        let column = factor.inverse_column(1);
        assert!((column[0] + 0.5).abs() < 1e-14 && (column[1] - 0.5).abs() < 1e-14);
    }

    #[test]
    fn a_prior_pulls_an_unknown_by_its_weight() {
        let mut normal = Normal::new(1);
        let mut row = [0.0; MOST];
        row[0] = 1.0;
        normal.add(&row, 4.0, 1.0);
        normal.prior(0, 0.0, 0.5);
        assert!((normal.factor().unwrap().solve(&normal.rhs)[0] - 0.8).abs() < 1e-15);
    }

    #[test]
    fn what_nothing_determines_has_no_factor() {
        let mut normal = Normal::new(2);
        let mut row = [0.0; MOST];
        row[..2].copy_from_slice(&[1.0, 2.0]);
        normal.add(&row, 1.0, 1.0);
        assert!(normal.factor().is_none());
    }
}
