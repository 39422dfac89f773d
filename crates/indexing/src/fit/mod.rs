//! The cell from one list of lines with known indices, by weighted least squares in 2θ.
//!
//! `2θ_i = 2 asin(λ √Q_i / 2) + z − (2 s/R) cos θ_i`, `Q = hᵀ G* h`; unknown are the free parameters of the cell, the zero z with
//! its prior and, on request, the displacement s with its prior. Minimised is `Σ (Δ2θ_i/u_i)² + Σ ((p − p₀)/u₀)²`: a prior
//! counts as one more observation (reference: Birge 1932, Phys. Rev. 40, 207 for the scaling below).
//!
//! Where every line has an s.u., it is used with one common factor: the Birge ratio `√(χ²/ν)` of the lines, upwards only, and
//! stated in [`CellFit::u_factor`]. Where not, the s.u. is that of the residuals, all lines alike, and [`CellFit::nu`] says with
//! how many degrees of freedom at least, for Student's t. In both, `ν = n − p + Σ C_kk/u₀²`, the sum over the priors: each
//! parameter counts by the share that the lines determine, so that a value far from its prior does not enlarge the s.u. of lines.
//!
//! Derivatives are exact: `∂2θ/∂Q = tan θ / Q`, `∂Q/∂G = −x xᵀ` with `x = G* h`.

mod problem;
mod solve;

use lattice::{AxisSystem, Cell, CellError};
use problem::Problem;
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
    /// Degrees of freedom n − p for Student's t, where the s.u. was estimated.
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
    if degrees_of_freedom > 0 {
        for _ in 0..12 {
            let residuals2 = solution.weighted_residuals2 * scale * scale;
            // n − p and the share of each parameter that its prior determines, C_kk/u₀²: the residuals left by the lines alone.
            let left = n as f64 - p as f64 + problem.determined_by_priors(&solution);
            let next = if stated {
                (residuals2 / left.max(0.5)).sqrt().max(1.0)
            } else {
                // Below 1e-6° only rounding is left.
                (residuals2 / left.max(1.0)).sqrt().max(1e-6)
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

#[cfg(test)]
mod tests;
