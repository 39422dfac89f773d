//! The least-squares problem behind [`fit_cell`](super::fit_cell): parameters with their priors, model, derivatives, report.

use super::{CellFit, Displacement, FitError, FitOptions, FittedLine, IndexedLine, solve};
use lattice::{AxisSystem, Cell};
use values::{Measured, Wavelength};

/// The least-squares problem: parameters, their priors, and the model.
pub(super) struct Problem<'a> {
    lines: &'a [IndexedLine],
    axes: AxisSystem,
    wavelength: f64,
    pub(super) names: Vec<String>,
    start: Vec<f64>,
    cell_parameters: usize,
    /// (parameter, prior).
    pub(super) priors: Vec<(usize, Measured)>,
    zero: Option<usize>,
    displacement: Option<(usize, f64)>,
    /// How the six parameters of the cell follow from the free ones; the same everywhere for the named systems.
    map: Vec<[f64; 6]>,
}

pub(super) struct Solution {
    values: Vec<f64>,
    covariance: Vec<Vec<f64>>,
    calculated_deg: Vec<f64>,
    pub(super) weighted_residuals2: f64,
    pub(super) weighted_priors2: f64,
}

impl<'a> Problem<'a> {
    pub(super) fn new(
        lines: &'a [IndexedLine],
        axes: AxisSystem,
        start: &Cell,
        wavelength: Wavelength,
        options: &FitOptions,
    ) -> Result<Self, FitError> {
        for (index, line) in lines.iter().enumerate() {
            let good = line.u_deg.is_none_or(|u| u > 0.0 && u.is_finite());
            if !good || line.hkl == [0; 3] || !line.two_theta.deg().is_finite() {
                return Err(FitError::BadLine { index });
            }
        }
        let free = axes.free_parameters(start);
        let mut names: Vec<String> = axes.parameter_names().iter().map(|name| (*name).to_owned()).collect();
        let mut values = free.clone();
        let mut priors = Vec::new();
        let mut zero = None;
        if let Some(prior) = options.zero_deg {
            zero = Some(values.len());
            priors.push((values.len(), prior));
            names.push("zero_deg".to_owned());
            values.push(prior.value);
        }
        let mut displacement = None;
        if let Some(Displacement { prior_mm, radius_mm }) = options.displacement {
            displacement = Some((values.len(), radius_mm));
            priors.push((values.len(), prior_mm));
            names.push("displacement_mm".to_owned());
            values.push(prior_mm.value);
        }
        let map = parameter_map(axes, &free)?;
        Ok(Self {
            lines,
            axes,
            wavelength: wavelength.angstrom(),
            names,
            start: values,
            cell_parameters: free.len(),
            priors,
            zero,
            displacement,
            map,
        })
    }

    pub(super) fn solve(&self, u: &[f64]) -> Result<Solution, FitError> {
        let mut values = self.start.clone();
        for _ in 0..60 {
            let (calculated, rows) = self.model(&values)?;
            let (normal, right) = self.normal_equations(&values, &calculated, &rows, u);
            let (step, covariance) = solve::solve(&normal, &right)
                .map_err(|k| FitError::Undetermined { parameter: self.names[k].clone() })?;
            let small = step.iter().zip(&covariance).enumerate().all(|(k, (s, row))| s.abs() < 1e-7 * row[k].sqrt());
            for (value, s) in values.iter_mut().zip(&step) {
                *value += s;
            }
            if !values.iter().all(|v| v.is_finite()) {
                return Err(FitError::Diverged);
            }
            if small {
                let (calculated_deg, _) = self.model(&values)?;
                let weighted_residuals2 = self.residuals(&calculated_deg).zip(u).map(|(r, u)| (r / u).powi(2)).sum();
                let weighted_priors2 =
                    self.priors.iter().map(|(k, prior)| ((values[*k] - prior.value) / prior.u).powi(2)).sum();
                return Ok(Solution { values, covariance, calculated_deg, weighted_residuals2, weighted_priors2 });
            }
        }
        Err(FitError::Diverged)
    }

    /// Number of parameters that the priors determine: `Σ C_kk/u₀²`.
    pub(super) fn determined_by_priors(&self, solution: &Solution) -> f64 {
        self.priors.iter().map(|(k, prior)| solution.covariance[*k][*k] / (prior.u * prior.u)).sum()
    }

    /// The map at other values: only a shape without a name has another one there.
    fn map_at(&self, values: &[f64]) -> Result<Vec<[f64; 6]>, FitError> {
        match self.axes {
            AxisSystem::Other(_) => parameter_map(self.axes, &values[..self.cell_parameters]),
            _ => Ok(self.map.clone()),
        }
    }

    fn residuals(&self, calculated_deg: &'a [f64]) -> impl Iterator<Item = f64> + 'a {
        self.lines.iter().zip(calculated_deg).map(|(line, calculated)| line.two_theta.deg() - calculated)
    }

    /// Calculated positions in degrees and their derivatives by every parameter.
    fn model(&self, values: &[f64]) -> Result<(Vec<f64>, Vec<Vec<f64>>), FitError> {
        let cell = self.axes.cell_from(&values[..self.cell_parameters]).map_err(FitError::Cell)?;
        let inverse = cell.reciprocal_metric();
        let map = self.map_at(values)?;
        let zero = self.zero.map_or(0.0, |k| values[k]);
        let mut calculated = Vec::with_capacity(self.lines.len());
        let mut rows = Vec::with_capacity(self.lines.len());
        for (index, line) in self.lines.iter().enumerate() {
            let (q, gradient) = q_and_gradient(&cell, &inverse, line.hkl);
            let sine = self.wavelength * q.sqrt() / 2.0;
            if sine.is_nan() || sine >= 1.0 {
                return Err(FitError::BeyondLimit { index });
            }
            let theta = sine.asin();
            let mut position = 2.0 * theta;
            let mut by_q = theta.tan() / q;
            let mut row = vec![0.0; values.len()];
            if let Some((k, radius)) = self.displacement {
                let tilt = 2.0 * values[k] / radius;
                position -= tilt * theta.cos();
                by_q *= 1.0 + tilt * theta.sin() / 2.0;
                row[k] = (-2.0 / radius * theta.cos()).to_degrees();
            }
            for (k, column) in map.iter().enumerate() {
                row[k] = by_q.to_degrees() * column.iter().zip(&gradient).map(|(x, y)| x * y).sum::<f64>();
            }
            if let Some(k) = self.zero {
                row[k] = 1.0;
            }
            calculated.push(position.to_degrees() + zero);
            rows.push(row);
        }
        Ok((calculated, rows))
    }

    fn normal_equations(
        &self,
        values: &[f64],
        calculated: &[f64],
        rows: &[Vec<f64>],
        u: &[f64],
    ) -> (Vec<Vec<f64>>, Vec<f64>) {
        let p = values.len();
        let (mut normal, mut right) = (vec![vec![0.0; p]; p], vec![0.0; p]);
        for ((row, line), (c, u)) in rows.iter().zip(self.lines).zip(calculated.iter().zip(u)) {
            let w = 1.0 / (u * u);
            let residual = line.two_theta.deg() - c;
            for i in 0..p {
                right[i] += w * row[i] * residual;
                for j in 0..p {
                    normal[i][j] += w * row[i] * row[j];
                }
            }
        }
        for (k, prior) in &self.priors {
            let w = 1.0 / (prior.u * prior.u);
            normal[*k][*k] += w;
            right[*k] += w * (prior.value - values[*k]);
        }
        (normal, right)
    }

    pub(super) fn report(
        &self,
        solution: &Solution,
        u: &[f64],
        stated_chi2: Option<f64>,
        degrees_of_freedom: usize,
        scale: f64,
    ) -> Result<CellFit, FitError> {
        let cell = self.axes.cell_from(&solution.values[..self.cell_parameters]).map_err(FitError::Cell)?;
        let map = self.map_at(&solution.values)?;
        let covariance = &solution.covariance;
        let variance = |gradient: &[f64]| -> f64 {
            let mut sum = 0.0;
            for (i, x) in gradient.iter().enumerate() {
                for (j, y) in gradient.iter().enumerate() {
                    sum += x * covariance[i][j] * y;
                }
            }
            sum.max(0.0)
        };
        let mut cell_parameters = cell.parameters().map(Measured::exact);
        for (k, parameter) in cell_parameters.iter_mut().enumerate() {
            let gradient: Vec<f64> = map.iter().map(|column| column[k]).collect();
            parameter.u = variance(&gradient).sqrt();
        }
        let by_parameter = volume_gradient(&cell);
        let gradient: Vec<f64> =
            map.iter().map(|column| column.iter().zip(&by_parameter).map(|(x, y)| x * y).sum()).collect();
        let lines = (self.lines.iter().zip(&solution.calculated_deg).zip(u))
            .map(|((line, &calculated_deg), &u_deg)| FittedLine {
                calculated_deg,
                difference_deg: line.two_theta.deg() - calculated_deg,
                u_deg,
            })
            .collect();
        Ok(CellFit {
            cell,
            cell_parameters,
            volume: Measured::new(cell.volume(), variance(&gradient).sqrt()),
            parameters: self.names.clone(),
            values: solution.values.clone(),
            covariance: covariance.clone(),
            chi2: stated_chi2.unwrap_or(degrees_of_freedom as f64),
            degrees_of_freedom,
            u_factor: if stated_chi2.is_some() { scale } else { 1.0 },
            estimated_u_deg: stated_chi2.is_none().then_some(scale),
            nu: stated_chi2.is_none().then_some(degrees_of_freedom),
            lines,
        })
    }
}

/// Derivatives of the six parameters of a cell by the free ones, by central differences: exact but for rounding in the named
/// systems, where the relation is linear and its coefficients are 0 or 1.
fn parameter_map(axes: AxisSystem, free: &[f64]) -> Result<Vec<[f64; 6]>, FitError> {
    let named = !matches!(axes, AxisSystem::Other(_));
    let cell_at = |k: usize, step: f64| {
        let mut moved = free.to_vec();
        moved[k] += step;
        axes.cell_from(&moved).map(|cell| cell.parameters()).map_err(FitError::Cell)
    };
    (0..free.len())
        .map(|k| {
            let step = 1e-5 * free[k].abs().max(1.0);
            let (up, down) = (cell_at(k, step)?, cell_at(k, -step)?);
            let mut column = [0.0; 6];
            for (slope, (x, y)) in column.iter_mut().zip(up.iter().zip(&down)) {
                *slope = (x - y) / (2.0 * step);
                if named {
                    *slope = slope.round();
                }
            }
            Ok(column)
        })
        .collect()
}

/// Q = hᵀ G* h and its derivatives by a, b, c (Å) and α, β, γ (degrees).
fn q_and_gradient(cell: &Cell, inverse: &[[f64; 3]; 3], hkl: [i32; 3]) -> (f64, [f64; 6]) {
    let h = hkl.map(f64::from);
    let x = inverse.map(|row| row.iter().zip(&h).map(|(g, h)| g * h).sum::<f64>());
    let q = x.iter().zip(&h).map(|(x, h)| x * h).sum();
    let [a, b, c, alpha, beta, gamma] = cell.parameters();
    let cosine = [alpha, beta, gamma].map(|angle| angle.to_radians().cos());
    let sine = [alpha, beta, gamma].map(|angle| angle.to_radians().sin());
    // −xᵀ (∂G/∂p) x, with G = [a², ab cos γ, ac cos β; …].
    let (xy, xz, yz) = (x[0] * x[1], x[0] * x[2], x[1] * x[2]);
    let degree = 1f64.to_radians();
    let gradient = [
        -2.0 * (a * x[0] * x[0] + c * cosine[1] * xz + b * cosine[2] * xy),
        -2.0 * (b * x[1] * x[1] + c * cosine[0] * yz + a * cosine[2] * xy),
        -2.0 * (c * x[2] * x[2] + b * cosine[0] * yz + a * cosine[1] * xz),
        2.0 * b * c * sine[0] * yz * degree,
        2.0 * a * c * sine[1] * xz * degree,
        2.0 * a * b * sine[2] * xy * degree,
    ];
    (q, gradient)
}

/// Derivatives of the volume by a, b, c (Å) and α, β, γ (degrees): `V = abc √(1 − Σcos² + 2 Πcos)`.
fn volume_gradient(cell: &Cell) -> [f64; 6] {
    let [a, b, c, alpha, beta, gamma] = cell.parameters();
    let volume = cell.volume();
    let angles = [alpha, beta, gamma].map(f64::to_radians);
    let cosine = angles.map(f64::cos);
    let edges = a * b * c;
    let degree = 1f64.to_radians();
    let by_angle = |k: usize| {
        let (i, j) = ((k + 1) % 3, (k + 2) % 3);
        edges * edges / volume * angles[k].sin() * (cosine[k] - cosine[i] * cosine[j]) * degree
    };
    [volume / a, volume / b, volume / c, by_angle(0), by_angle(1), by_angle(2)]
}
