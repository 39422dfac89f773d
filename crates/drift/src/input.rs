//! What a check takes.

use indexing::assign::{AssignOptions, Predicted};
use lattice::{AxisSystem, Cell};
use std::fmt;
use values::{Diagnostic, Measured, Peak};

/// The lines of one batch.
#[derive(Clone, Debug, PartialEq)]
pub struct LineList {
    /// Name of the batch.
    pub id: String,
    /// Its lines.
    pub peaks: Vec<Peak>,
    /// Temperature of the specimen, °C, with the s.u. that is independent from list to list.
    pub temperature_c: Option<Measured>,
}

/// The phase whose cell is watched.
#[derive(Clone, Debug, PartialEq)]
pub struct Phase {
    /// Which cell parameters are free.
    pub system: AxisSystem,
    /// Start values, good to about a per cent.
    pub cell: Cell,
    /// Reflections that its lists may show.
    pub reflections: Vec<Predicted>,
}

/// Thermal expansion: `a(T) = a(T₀) [1 + α (T − T₀)]` for each axis.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Expansion {
    /// α of a, b and c, per kelvin.
    pub per_k: [Measured; 3],
    /// T₀ in °C.
    pub reference_c: f64,
}

/// How to decide, and what is known beforehand.
#[derive(Clone, Debug, PartialEq)]
pub struct Options {
    /// Largest change of a length that is in order, ppm. Default 0: any change counts.
    pub limit_ppm: f64,
    /// The same for angles, degrees. Default: the angle of `limit_ppm` in 10⁻⁶ radians, which strains the cell alike.
    pub limit_deg: Option<f64>,
    /// Risk of a false decision per batch, above 0 and below 0.5. Default 0.05.
    pub risk: f64,
    /// Decide on this parameter alone. Default: all free ones together.
    pub parameter: Option<String>,
    /// Zero that all lists share, degrees 2θ. Default 0 ± 0.05.
    pub zero_deg: Measured,
    /// What is known of each displacement beforehand: mm where a radius is given, else s/R. Default: nothing.
    pub displacement: Option<Measured>,
    /// Radius of the goniometer, mm. Without it displacements are s/R.
    pub radius_mm: Option<f64>,
    /// Thermal expansion of the phase.
    pub expansion: Option<Expansion>,
    /// How lines are assigned; its zero is replaced by the one above.
    pub assign: AssignOptions,
}

impl Default for Options {
    fn default() -> Self {
        Self {
            limit_ppm: 0.0,
            limit_deg: None,
            risk: 0.05,
            parameter: None,
            zero_deg: Measured::new(0.0, 0.05),
            displacement: None,
            radius_mm: None,
            expansion: None,
            assign: AssignOptions::default(),
        }
    }
}

/// Why there is no report.
#[derive(Clone, Debug, PartialEq)]
pub enum DriftError {
    /// An option or a combination of inputs is wrong.
    Input(Diagnostic),
    /// The reference gives no cell.
    NoAnswer(Diagnostic),
}

impl fmt::Display for DriftError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Input(d) | Self::NoAnswer(d) => d.fmt(f),
        }
    }
}

impl std::error::Error for DriftError {}

impl Options {
    /// Checks numbers against their bounds, and the chosen parameter against the free ones.
    pub(crate) fn checked(&self, names: &[&'static str]) -> Result<(), DriftError> {
        let wrong =
            |found: String, expected: &str, mend: &str| Err(DriftError::Input(Diagnostic::new(found, expected, mend)));
        if !(self.risk > 0.0 && self.risk < 0.5) {
            return wrong(format!("risk {}", self.risk), "a number above 0 and below 0.5", "state a risk such as 0.05");
        }
        let limits_ok = [Some(self.limit_ppm), self.limit_deg].iter().flatten().all(|l| l.is_finite() && *l >= 0.0);
        if !limits_ok {
            return wrong(
                format!("limit {} ppm", self.limit_ppm),
                "a number of 0 or above",
                "state the largest change that is in order, or leave the limit out",
            );
        }
        if let Some(name) = self.parameter.as_deref().filter(|p| !names.contains(p)) {
            return wrong(
                format!("parameter `{name}`"),
                &format!("one of the free parameters {}", names.join(", ")),
                "choose one of them, or leave the choice out",
            );
        }
        let u_ok = |m: &Measured| m.value.is_finite() && m.u.is_finite() && m.u >= 0.0;
        if !u_ok(&self.zero_deg) || !self.displacement.as_ref().is_none_or(|d| u_ok(d) && d.u > 0.0) {
            return wrong(
                "a zero or displacement without a usable s.u.".to_owned(),
                "finite numbers, s.u. of the zero 0 or above, of the displacement above 0",
                "write VALUE,U such as 0.01,0.005",
            );
        }
        if self.radius_mm.is_some_and(|r| !(r.is_finite() && r > 0.0)) {
            return wrong("a radius that is not above 0".to_owned(), "millimetres above 0", "state the radius in mm");
        }
        Ok(())
    }
}
