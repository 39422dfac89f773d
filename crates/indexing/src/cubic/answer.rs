//! What the search returns: plain values for tables, JSON and pictures.

use super::Twin;
use super::sequence::Centring;
use crate::merit::Merit;
use instrument::Anode;
use values::Measured;

/// Everything the lines say about a cubic lattice.
#[derive(Clone, Debug)]
pub struct CubicAnswer {
    /// All readings that the lines allow, best first. May be filled although `found` is false.
    pub readings: Vec<Reading>,
    /// Probability that none of the readings is right: another system, or no single lattice.
    pub probability_none: f64,
    /// Whether a cubic lattice is more likely than not: `probability_none` below one half.
    pub found: bool,
    /// Why the first reading is not alone, in a sentence; `None` if it is.
    pub ambiguous: Option<String>,
    /// The result in a sentence.
    pub verdict: String,
    /// What was assumed about s.u. and probabilities, and what was left out.
    pub notes: Vec<String>,
}

/// One cubic lattice with all it says about the lines.
#[derive(Clone, Debug)]
pub struct Reading {
    /// Place in the list, from 1.
    pub rank: usize,
    /// Centring.
    pub centring: Centring,
    /// Edge, Å, with its s.u.
    pub a: Measured,
    /// Volume of the conventional cell, Å³.
    pub volume: Measured,
    /// Zero, degrees 2θ (observed = true + zero), with its s.u.; the prior enters.
    pub zero_deg: Measured,
    /// Displacement of the specimen over the radius, s/R, with its s.u.; the prior enters.
    pub displacement_over_radius: Measured,
    /// Covariance of a (Å), zero (degrees) and s/R.
    pub covariance: [[f64; 3]; 3],
    /// Degrees of freedom for Student's t, where the s.u. of the lines were found from the residuals.
    pub nu: Option<usize>,
    /// Common factor on the stated s.u. of the lines, ≥ 1.
    pub u_factor: f64,
    /// The s.u. of a line found from the residuals, degrees 2θ, where none were stated.
    pub estimated_u_deg: Option<f64>,
    /// χ² per degree of freedom with the s.u. as stated, where they were.
    pub chi2_reduced: Option<f64>,
    /// Probability of this reading.
    pub probability: f64,
    /// Evidence, nats over lines that fall at random; priors of lattice and composition not included.
    pub ln_evidence: f64,
    /// M_n and F_n; `None` above two unindexed lines in the first twenty.
    pub merit: Option<Merit>,
    /// Number of calculated lines up to the last observed one.
    pub calculated: usize,
    /// The ratio table: one row for each line, by rising angle.
    pub lines: Vec<LineOfReading>,
    /// Calculated lines that are not in the list.
    pub missing: Vec<MissingLine>,
    /// A motif that shows in the lines: diamond-like.
    pub motif: Option<String>,
    /// Formula units per cell with their uncertainty, where a density is known.
    pub formula_units: Option<Measured>,
    /// Lattices with the same lines.
    pub same_lines_as: Vec<Twin>,
    /// Remarks on this reading.
    pub notes: Vec<String>,
}

impl Reading {
    /// Lines without indices that are no satellites either.
    pub fn unindexed(&self) -> impl Iterator<Item = &LineOfReading> {
        self.lines.iter().filter(|line| line.status == Status::Unindexed)
    }
}

/// One row of the ratio table.
#[derive(Clone, Debug, PartialEq)]
pub struct LineOfReading {
    /// Index in the list that was given, from 0.
    pub index: usize,
    /// Observed position, degrees 2θ.
    pub two_theta_deg: f64,
    /// Observed Q over that of the first line.
    pub q_ratio: f64,
    /// N = h² + k² + l².
    pub n: Option<u32>,
    /// Indices, all forms that fall together (511 and 333), largest triple first.
    pub hkl: Vec<[i32; 3]>,
    /// Calculated position, degrees 2θ, zero included.
    pub calculated_deg: Option<f64>,
    /// Observed minus calculated, degrees 2θ.
    pub difference_deg: Option<f64>,
    /// What became of the line.
    pub status: Status,
}

/// What became of a line.
#[derive(Clone, Debug, PartialEq)]
pub enum Status {
    /// It has indices and takes part in the fit.
    Used,
    /// The lattice does not explain it.
    Unindexed,
    /// A satellite of a stronger line; left out.
    Satellite {
        /// Name of the radiation.
        name: String,
        /// Index of the stronger line in the list that was given.
        of: usize,
        /// Whether intensities bear it out; without them a line at the place of a satellite may as well be one of its own.
        sure: bool,
    },
}

/// A calculated line that was not seen.
#[derive(Clone, Debug, PartialEq)]
pub struct MissingLine {
    /// N = h² + k² + l².
    pub n: u32,
    /// Its indices.
    pub hkl: Vec<[i32; 3]>,
    /// Where it should be, degrees 2θ, zero included.
    pub two_theta_deg: f64,
}

/// A second wavelength of the tube that repeats strong lines.
#[derive(Clone, Debug, PartialEq)]
pub struct Satellite {
    /// Its name, such as `Cu Ka2`.
    pub name: String,
    /// Its wavelength over that of the list.
    pub wavelength_ratio: f64,
    /// Largest intensity over that of the stronger line.
    pub largest_share: f64,
    /// Whether the line is only suspected where intensities are known: the weak lines of a tube need not show at all.
    pub needs_intensity: bool,
}

impl Satellite {
    /// Kα2, Kβ and the tungsten L lines of a tube, for a list that refers to Kα1.
    ///
    /// Largest shares: 0.7 for Kα2 (0.5 by nature, more where the fit was poor), 0.3 for the others (Kβ is 0.2 unfiltered;
    /// tungsten less): common practice, no source. Only Kα2, which is always there, is looked for without intensities.
    #[must_use]
    pub fn of_anode(anode: Anode) -> Vec<Self> {
        // Any angle serves: the ratio of wavelengths does not depend on it.
        instrument::ghosts(values::TwoTheta::from_deg(20.0), anode)
            .into_iter()
            .map(|ghost| Self {
                needs_intensity: !ghost.line.ends_with("Ka2"),
                largest_share: if ghost.line.ends_with("Ka2") { 0.7 } else { 0.3 },
                wavelength_ratio: ghost.wavelength.angstrom() / anode.ka1().wavelength.angstrom(),
                name: ghost.line,
            })
            .collect()
    }
}
