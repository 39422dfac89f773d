//! What a check takes.

use super::temperature::ROOM_C;
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

/// Reflections of a phase, at most (own choice): of more, hundreds share every line, and the assignment takes minutes.
const MOST_REFLECTIONS: usize = 20_000;

impl Phase {
    /// Refuses structures whose lines cannot be told apart.
    pub(crate) fn checked(&self) -> Result<(), DriftError> {
        if self.reflections.len() <= MOST_REFLECTIONS {
            return Ok(());
        }
        Err(DriftError::Input(Diagnostic::new(
            format!("a structure with {} reflections in the range of the lines", self.reflections.len()),
            format!("at most {MOST_REFLECTIONS}: lines cannot be told apart among more"),
            "check cell and symmetry, or leave out lines at high angles",
        )))
    }
}

/// A length cannot change by more than itself and still be one.
const LARGEST_LIMIT_PPM: f64 = 1e6;
/// The bound of structures in TOML too: far above the expansion of any solid (common practice, no source).
const LARGEST_EXPANSION_PER_K: f64 = 0.01;
const ABSOLUTE_ZERO_C: f64 = -273.15;
/// Above the melting point of any solid, °C (common practice, no source).
const HOTTEST_C: f64 = 5000.0;
/// Length at the list's temperature over that at the reference: beyond, one linear coefficient says nothing (own choice).
const GROWTH: std::ops::RangeInclusive<f64> = 0.9..=1.1;

impl Options {
    /// Checks numbers against their bounds, and the chosen parameter against the free ones.
    pub(crate) fn checked(&self, names: &[&'static str]) -> Result<(), DriftError> {
        let wrong =
            |found: String, expected: &str, mend: &str| Err(DriftError::Input(Diagnostic::new(found, expected, mend)));
        if !(self.risk > 0.0 && self.risk < 0.5) {
            return wrong(format!("risk {}", self.risk), "a number above 0 and below 0.5", "state a risk such as 0.05");
        }
        let in_order = "state the largest change that is in order, or leave the limit out";
        if !(0.0..=LARGEST_LIMIT_PPM).contains(&self.limit_ppm) {
            return wrong(format!("limit {} ppm", self.limit_ppm), "a number from 0 to 1000000", in_order);
        }
        if let Some(deg) = self.limit_deg.filter(|deg| !(0.0..=180.0).contains(deg)) {
            return wrong(format!("limit {deg}°"), "a number of degrees from 0 to 180", in_order);
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
        if let Some(expansion) = &self.expansion {
            if let Some(alpha) = expansion.per_k.iter().find(|a| !(u_ok(a) && a.value.abs() <= LARGEST_EXPANSION_PER_K))
            {
                return wrong(
                    format!("an expansion of {} ± {} per kelvin", alpha.value, alpha.u),
                    "a number from -0.01 to 0.01 with an s.u. of 0 or above",
                    "give α per kelvin, such as 1.1e-5,4e-7",
                );
            }
            if !(ABSOLUTE_ZERO_C..=HOTTEST_C).contains(&expansion.reference_c) {
                return wrong(
                    format!("a reference temperature of {} °C", expansion.reference_c),
                    "degrees Celsius from -273.15 to 5000",
                    "give the temperature that cells are brought to",
                );
            }
        }
        Ok(())
    }

    /// Checks that the temperatures leave each list a cell; one without is at that of a room where another has one.
    pub(crate) fn check_temperatures(&self, reference: &LineList, batches: &[LineList]) -> Result<(), DriftError> {
        let lists = || std::iter::once(reference).chain(batches);
        let Some(expansion) = self.expansion.as_ref().filter(|_| lists().any(|l| l.temperature_c.is_some())) else {
            return Ok(());
        };
        for list in lists() {
            let celsius = list.temperature_c.unwrap_or(ROOM_C).value;
            let grown = |alpha: &Measured| 1.0 + alpha.value * (celsius - expansion.reference_c);
            if !expansion.per_k.iter().all(|alpha| GROWTH.contains(&grown(alpha))) {
                return Err(DriftError::Input(Diagnostic::new(
                    format!("{} at {celsius} °C, with cells brought to {} °C", list.id, expansion.reference_c),
                    "temperatures between which the cell changes by less than a tenth",
                    "correct the temperature in °C or the expansion per kelvin",
                )));
            }
        }
        Ok(())
    }
}
