//! Whether a cell has the shape that a group asks for.

use crate::symmetry::SpaceGroup;
use crate::{Cell, CellError};

/// Largest relative difference of an edge from its symmetric mean: rounding of published cells stays below it.
const EDGE_TOLERANCE: f64 = 2e-4;
/// Largest difference of an angle from its symmetric mean, degrees.
const ANGLE_TOLERANCE_DEG: f64 = 0.02;

impl SpaceGroup {
    /// The cell with the symmetry of the group that is nearest in the metric: the mean of `Rᵀ G R` over its rotations.
    ///
    /// # Errors
    /// [`CellError::Metric`] never happens for a cell built by [`Cell::new`] but for one that is flat to rounding.
    pub fn symmetrised(&self, cell: &Cell) -> Result<Cell, CellError> {
        let g = cell.metric();
        let mut mean = [[0.0; 3]; 3];
        let weight = 1.0 / self.laue_rotations().len() as f64;
        for r in self.laue_rotations() {
            let r = r.map(|row| row.map(f64::from));
            for (i, row) in mean.iter_mut().enumerate() {
                for (j, entry) in row.iter_mut().enumerate() {
                    for k in 0..3 {
                        for l in 0..3 {
                            *entry += weight * r[k][i] * g[k][l] * r[l][j];
                        }
                    }
                }
            }
        }
        Cell::from_metric(mean)
    }

    /// Whether the cell has the shape that the group asks for, within 0.02 % of an edge and 0.02° of an angle.
    ///
    /// # Errors
    /// A sentence with both shapes.
    pub fn compatible(&self, cell: &Cell) -> Result<(), String> {
        let misfit = |mean: String| {
            format!(
                "the cell {} does not have the shape that {} space group `{}` asks for, such as {mean}",
                shape(cell),
                self.system(),
                self.xhm()
            )
        };
        let Ok(mean) = self.symmetrised(cell) else { return Err(misfit("none".to_owned())) };
        let (here, there) = (cell.parameters(), mean.parameters());
        let edges = (0..3).all(|i| (here[i] / there[i] - 1.0).abs() <= EDGE_TOLERANCE);
        let angles = (3..6).all(|i| (here[i] - there[i]).abs() <= ANGLE_TOLERANCE_DEG);
        if edges && angles { Ok(()) } else { Err(misfit(shape(&mean))) }
    }
}

fn shape(cell: &Cell) -> String {
    let [a, b, c, alpha, beta, gamma] = cell.parameters();
    format!("{a:.4} {b:.4} {c:.4} Å {alpha:.2} {beta:.2} {gamma:.2}°")
}
