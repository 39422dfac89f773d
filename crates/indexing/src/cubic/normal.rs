//! Normal equations of a few unknowns with priors, solved by Cholesky's factorisation.

/// `Σ w rᵀr` and `Σ w r y` of K unknowns.
pub(crate) struct Normal<const K: usize> {
    matrix: [[f64; K]; K],
    right: [f64; K],
}

impl<const K: usize> Normal<K> {
    pub(crate) fn new() -> Self {
        Self { matrix: [[0.0; K]; K], right: [0.0; K] }
    }

    /// A normal prior: the unknown should change by `change`, with the s.u. `u`.
    pub(crate) fn prior(&mut self, unknown: usize, change: f64, u: f64) {
        let weight = 1.0 / (u * u);
        self.matrix[unknown][unknown] += weight;
        self.right[unknown] += weight * change;
    }

    /// One observation: its derivatives, weight and difference from the model.
    pub(crate) fn add(&mut self, row: &[f64; K], weight: f64, difference: f64) {
        for i in 0..K {
            self.right[i] += weight * row[i] * difference;
            for j in 0..=i {
                self.matrix[i][j] += weight * row[i] * row[j];
            }
        }
    }

    /// The changes of the unknowns and ln det of the matrix; `None` where it is singular.
    pub(crate) fn solve(&self) -> Option<([f64; K], f64)> {
        let mut factor = [[0.0; K]; K];
        let mut ln_det = 0.0;
        for i in 0..K {
            for j in 0..=i {
                let rest = self.matrix[i][j] - (0..j).map(|k| factor[i][k] * factor[j][k]).sum::<f64>();
                if i == j {
                    if !(rest > 0.0 && rest.is_finite()) {
                        return None;
                    }
                    factor[i][i] = rest.sqrt();
                    ln_det += rest.ln();
                } else {
                    factor[i][j] = rest / factor[j][j];
                }
            }
        }
        let mut change = self.right;
        for i in 0..K {
            let known: f64 = (0..i).map(|k| factor[i][k] * change[k]).sum();
            change[i] = (change[i] - known) / factor[i][i];
        }
        for i in (0..K).rev() {
            let known: f64 = (i + 1..K).map(|k| factor[k][i] * change[k]).sum();
            change[i] = (change[i] - known) / factor[i][i];
        }
        change.iter().all(|c| c.is_finite()).then_some((change, ln_det))
    }
}

#[cfg(test)]
mod tests {
    use super::Normal;

    #[test]
    fn three_unknowns_and_their_determinant_are_those_of_a_hand_calculation() {
        // Outside: by hand. Rows (1,0,0), (1,1,0), (1,1,1), unit weights, y = 1, 3, 6: exact solution 1, 2, 3; det 1.
        let mut normal = Normal::<3>::new();
        for (row, y) in [([1.0, 0.0, 0.0], 1.0), ([1.0, 1.0, 0.0], 3.0), ([1.0, 1.0, 1.0], 6.0)] {
            normal.add(&row, 1.0, y);
        }
        let (change, ln_det) = normal.solve().unwrap();
        assert!(change.iter().zip([1.0, 2.0, 3.0]).all(|(x, y)| (x - y).abs() < 1e-12), "{change:?}");
        assert!(ln_det.abs() < 1e-12);
        assert!(Normal::<2>::new().solve().is_none());
    }

    #[test]
    fn a_prior_counts_as_one_observation() {
        let mut normal = Normal::<1>::new();
        normal.add(&[1.0], 1.0, 3.0);
        normal.prior(0, 0.0, 1.0);
        let (change, ln_det) = normal.solve().unwrap();
        assert!((change[0] - 1.5).abs() < 1e-12 && (ln_det - 2f64.ln()).abs() < 1e-12);
    }
}
