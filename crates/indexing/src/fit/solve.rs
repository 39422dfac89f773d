//! Symmetric positive systems of a few unknowns, scaled to unit diagonal.

use nalgebra::{DMatrix, DVector};

/// Smallest pivot on the unit-scaled diagonal: below it, rounding would decide the answer.
const LEAST_PIVOT: f64 = 1e-12;

/// Solution and inverse of a symmetric positive matrix; `Err` names an unknown that the equations leave open.
pub(super) fn solve(normal: &[Vec<f64>], right: &[f64]) -> Result<(Vec<f64>, Vec<Vec<f64>>), usize> {
    let p = right.len();
    let scale: Vec<f64> = (0..p).map(|k| normal[k][k].sqrt()).collect();
    if let Some(open) = scale.iter().position(|s| !(s.is_finite() && *s > 0.0)) {
        return Err(open);
    }
    let scaled = DMatrix::from_fn(p, p, |i, j| normal[i][j] / (scale[i] * scale[j]));
    let cholesky = scaled.cholesky().ok_or(p - 1)?;
    let factor = cholesky.l();
    if let Some(open) = (0..p).find(|&k| factor[(k, k)].powi(2) < LEAST_PIVOT) {
        return Err(open);
    }
    let vector = DVector::from_fn(p, |i, _| right[i] / scale[i]);
    let step = cholesky.solve(&vector);
    let inverse = cholesky.inverse();
    let values = (0..p).map(|i| step[i] / scale[i]).collect();
    let covariance = (0..p).map(|i| (0..p).map(|j| inverse[(i, j)] / (scale[i] * scale[j])).collect()).collect();
    Ok((values, covariance))
}
