//! The cell from one list of lines with known indices, by weighted least squares in 2θ.
//!
//! `2θ_i = 2 asin(λ √Q_i / 2) + z − (2 s/R) cos θ_i`, `Q = hᵀ G* h`; unknown are the free parameters of the cell, the zero z with
//! its prior and, on request, the displacement s with its prior. Minimised is `Σ (Δ2θ_i/u_i)² + Σ ((p − p₀)/u₀)²`: a prior
//! counts as one more observation (reference: Birge 1932, Phys. Rev. 40, 207 for the scaling below).
//!
//! Where every line has an s.u., it is used with one common factor: the Birge ratio `√(χ²/(n + priors − p))`, upwards only, and
//! stated in [`CellFit::u_factor`]. Where not, the s.u. is that of the residuals with n − p degrees of freedom, all lines alike,
//! and [`CellFit::nu`] says how many, for Student's t.
//!
//! Derivatives are exact: `∂2θ/∂Q = tan θ / Q`, `∂Q/∂G = −x xᵀ` with `x = G* h`.

mod solve;

use lattice::{AxisSystem, Cell, CellError};
use std::fmt;
use values::{Measured, TwoTheta, Wavelength};

/// One observed line with its indices.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct IndexedLine {
    /// Miller indices on the axes of the cell.
    pub hkl: [i32; 3],
    /// Observed position; the zero is not taken off.
    pub two_theta: TwoTheta,
    /// Standard uncertainty, degrees 2θ.
    pub u_deg: Option<f64>,
}

/// What is fitted besides the cell.
#[derive(Clone, Debug, Default)]
pub struct FitOptions {
    /// Prior of the zero, degrees 2θ (observed = true + zero). `None`: fixed at 0.
    pub zero_deg: Option<Measured>,
    /// Displacement of the specimen. `None`: fixed at 0. Nearly collinear with the zero: give at least one a narrow prior.
    pub displacement: Option<Displacement>,
}

/// Displacement of the specimen, `Δ2θ = −2 s cos θ / R`; s > 0: the surface lies too low.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Displacement {
    /// Prior of s, mm.
    pub prior_mm: Measured,
    /// Radius R of the goniometer, mm.
    pub radius_mm: f64,
}

/// One line after the fit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FittedLine {
    /// Calculated position with zero and displacement, degrees 2θ.
    pub calculated_deg: f64,
    /// Observed minus calculated, degrees 2θ.
    pub difference_deg: f64,
    /// Standard uncertainty that the fit used, factor included, degrees 2θ.
    pub u_deg: f64,
}

/// A refined cell.
#[derive(Clone, Debug)]
pub struct CellFit {
    /// The cell.
    pub cell: Cell,
    /// a, b, c in Å, α, β, γ in degrees with their s.u.; what symmetry fixes has u = 0.
    pub cell_parameters: [Measured; 6],
    /// Volume, Å³; all covariances of the cell enter.
    pub volume: Measured,
    /// Names of the fitted parameters: those of the cell, then `zero_deg`, `displacement_mm`.
    pub parameters: Vec<String>,
    /// Their values, in the same order.
    pub values: Vec<f64>,
    /// Their covariance, the factor included.
    pub covariance: Vec<Vec<f64>>,
    /// χ² with the s.u. as stated (priors included); with estimated s.u. it equals the degrees of freedom by construction.
    pub chi2: f64,
    /// n + priors − p with stated s.u., n − p with estimated ones.
    pub degrees_of_freedom: usize,
    /// Factor on the stated s.u., ≥ 1; 1 where they were estimated.
    pub u_factor: f64,
    /// The s.u. of every line, degrees 2θ, where it was estimated from the residuals.
    pub estimated_u_deg: Option<f64>,
    /// Degrees of freedom for Student's t, where the s.u. was estimated.
    pub nu: Option<usize>,
    /// The lines in the order given.
    pub lines: Vec<FittedLine>,
}

impl CellFit {
    /// A fitted parameter by name.
    #[must_use]
    pub fn parameter(&self, name: &str) -> Option<Measured> {
        let k = self.parameters.iter().position(|n| n == name)?;
        Some(Measured::new(self.values[k], self.covariance[k][k].max(0.0).sqrt()))
    }

    /// χ² per degree of freedom, `None` without any.
    #[must_use]
    pub fn chi2_reduced(&self) -> Option<f64> {
        (self.degrees_of_freedom > 0).then(|| self.chi2 / self.degrees_of_freedom as f64)
    }
}

/// Why a cell could not be fitted.
#[derive(Clone, Debug, PartialEq)]
pub enum FitError {
    /// Fewer observations than parameters (one more is needed to estimate the s.u.).
    TooFewLines {
        /// Lines given.
        lines: usize,
        /// Parameters to be fitted.
        parameters: usize,
    },
    /// A line has an s.u. that is not finite and above zero, or indices 0 0 0.
    BadLine {
        /// Position in the list, from 0.
        index: usize,
    },
    /// The lines do not determine the parameters: the normal matrix is singular.
    Undetermined {
        /// A parameter that the lines leave open.
        parameter: String,
    },
    /// A reflection of the cell lies beyond 2θ = 180° at this wavelength.
    BeyondLimit {
        /// Position in the list, from 0.
        index: usize,
    },
    /// The steps lead to no cell.
    Cell(CellError),
    /// No convergence.
    Diverged,
}

impl fmt::Display for FitError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::TooFewLines { lines, parameters } => {
                write!(
                    f,
                    "{lines} lines cannot fix {parameters} parameters; add lines, or fix the zero or the displacement"
                )
            }
            Self::BadLine { index } => {
                write!(f, "line {} of the list has no usable s.u. or the indices 0 0 0", index + 1)
            }
            Self::Undetermined { parameter } => {
                write!(f, "the lines leave {parameter} open: none of them depends on it alone")
            }
            Self::BeyondLimit { index } => write!(f, "line {} has a spacing below half the wavelength", index + 1),
            Self::Cell(error) => write!(f, "the fit left the range of real cells: {error}"),
            Self::Diverged => f.write_str("the fit did not converge; the indices may be wrong"),
        }
    }
}

impl std::error::Error for FitError {}

/// Fits the free parameters of a cell to lines with known indices.
///
/// `start`: a cell near the truth, of the system `axes`. Positions and s.u. in degrees 2θ, the cell in Å and degrees.
///
/// # Errors
/// See [`FitError`].
pub fn fit_cell(
    lines: &[IndexedLine],
    axes: AxisSystem,
    start: &Cell,
    wavelength: Wavelength,
    options: &FitOptions,
) -> Result<CellFit, FitError> {
    let problem = Problem::new(lines, axes, start, wavelength, options)?;
    let priors = problem.priors.len();
    let p = problem.names.len();
    let n = lines.len();
    let stated = lines.iter().all(|line| line.u_deg.is_some());
    let degrees_of_freedom = if stated { (n + priors).checked_sub(p) } else { n.checked_sub(p).filter(|d| *d > 0) }
        .ok_or(FitError::TooFewLines { lines: n, parameters: p })?;
    let own_u = |scale: f64| -> Vec<f64> {
        if stated { lines.iter().map(|line| line.u_deg.unwrap_or(1.0) * scale).collect() } else { vec![scale; n] }
    };
    // The scale follows from the residuals, the residuals (through the priors) from the scale: a few rounds settle both.
    let mut scale = if stated { 1.0 } else { 0.01 };
    let mut solution = problem.solve(&own_u(scale))?;
    let chi2 = solution.weighted_residuals2 + solution.weighted_priors2;
    if degrees_of_freedom > 0 && !(stated && chi2 <= degrees_of_freedom as f64) {
        for _ in 0..12 {
            let residuals2 = solution.weighted_residuals2 * scale * scale;
            let next = if stated {
                (residuals2 / (degrees_of_freedom as f64 - solution.weighted_priors2).max(0.5)).sqrt().max(1.0)
            } else {
                // Below 1e-6° only rounding is left.
                (residuals2 / degrees_of_freedom as f64).sqrt().max(1e-6)
            };
            let done = (next / scale - 1.0).abs() < 1e-6;
            scale = next;
            solution = problem.solve(&own_u(scale))?;
            if done {
                break;
            }
        }
    }
    problem.report(&solution, &own_u(scale), stated.then_some(chi2), degrees_of_freedom, scale)
}

/// The least-squares problem: parameters, their priors, and the model.
struct Problem<'a> {
    lines: &'a [IndexedLine],
    axes: AxisSystem,
    wavelength: f64,
    names: Vec<String>,
    start: Vec<f64>,
    cell_parameters: usize,
    /// (parameter, prior).
    priors: Vec<(usize, Measured)>,
    zero: Option<usize>,
    displacement: Option<(usize, f64)>,
    /// How the six parameters of the cell follow from the free ones; the same everywhere for the named systems.
    map: Vec<[f64; 6]>,
}

struct Solution {
    values: Vec<f64>,
    covariance: Vec<Vec<f64>>,
    calculated_deg: Vec<f64>,
    weighted_residuals2: f64,
    weighted_priors2: f64,
}

impl<'a> Problem<'a> {
    fn new(
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

    fn solve(&self, u: &[f64]) -> Result<Solution, FitError> {
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

    fn report(
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

#[cfg(test)]
mod tests;
