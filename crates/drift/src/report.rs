//! What a check returns: enough for the JSON, the table and the chart.

use super::decide::{Decision, FamilyWise};
use values::Measured;

/// One drift check.
#[derive(Clone, Debug, PartialEq)]
pub struct Report {
    /// Largest change of a length that is in order, ppm; 0 for none.
    pub limit_ppm: f64,
    /// The same for angles, degrees.
    pub limit_deg: f64,
    /// Risk of a false decision per batch.
    pub risk: f64,
    /// Coverage factor of expanded bars.
    pub k: f64,
    /// The rule in a sentence.
    pub rule: String,
    /// Names of the free cell parameters.
    pub parameters: Vec<&'static str>,
    /// Zero that all lists share, degrees 2θ.
    pub zero_deg: Measured,
    /// What was known of it beforehand.
    pub zero_prior_deg: Measured,
    /// Temperature that cells are brought to, °C; `None` where they are as measured.
    pub temperature_c: Option<f64>,
    /// Part of each line's place that repeats from list to list, found from residuals, degrees 2θ.
    pub common_offset_deg: Option<f64>,
    /// The reference.
    pub reference: ListReport,
    /// The batches, in the order given.
    pub batches: Vec<BatchReport>,
    /// Chance of any false *drifted* over the batches.
    pub family: FamilyWise,
    /// What holds for all lists.
    pub notes: Vec<String>,
    /// That a qualified person decides.
    pub release: &'static str,
}

/// The sentence under every drift check.
pub const RELEASE: &str = "A qualified person decides on release.";

/// One of the six cell parameters.
#[derive(Clone, Debug, PartialEq)]
pub struct CellValue {
    /// a, b, c, alpha, beta or gamma.
    pub name: &'static str,
    /// Å or degrees.
    pub value: f64,
    /// Its s.u.; `None` for what symmetry fixes. Rests on what is known of the zero beforehand.
    pub u: Option<f64>,
}

/// Displacement of the specimen; positive when its surface lies too low.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Displacement {
    /// s in mm where the radius is known, else s/R without unit.
    pub value: f64,
    /// Its s.u.
    pub u: f64,
    /// Whether the unit is mm.
    pub in_mm: bool,
}

/// How the s.u. of a list's lines were found.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LineNoise {
    /// The list states s.u.
    pub stated: bool,
    /// Factor on the stated s.u., 1 or above; for a list without s.u. the found s.u. in degrees 2θ.
    pub factor: f64,
    /// Degrees of freedom of the factor; `None` where s.u. are as stated.
    pub dof: Option<f64>,
}

/// One line in the fit.
#[derive(Clone, Debug, PartialEq)]
pub struct LineReport {
    /// Index among the list's lines.
    pub peak: usize,
    /// All reflections in the line.
    pub hkl: Vec<[i32; 3]>,
    /// Observed position, degrees 2θ.
    pub observed_deg: f64,
    /// Calculated, with zero and displacement.
    pub calculated_deg: f64,
    /// Observed minus calculated.
    pub difference_deg: f64,
    /// s.u. of the position that the fit used, independent part.
    pub u_deg: f64,
}

/// A line left out of the fit, and why.
#[derive(Clone, Debug, PartialEq)]
pub struct LeftOut {
    /// Index among the list's lines.
    pub peak: usize,
    /// Observed position, degrees 2θ.
    pub observed_deg: f64,
    /// Reflections that may be meant; for a foreign line the nearest.
    pub hkl: Vec<[i32; 3]>,
    /// The reason in a clause.
    pub reason: String,
}

/// One list after the fit.
#[derive(Clone, Debug, PartialEq)]
pub struct ListReport {
    /// Name of the batch.
    pub id: String,
    /// Six values, at [`Report::temperature_c`] if this list could be brought to it.
    pub cell: Vec<CellValue>,
    /// Whether the cell was brought to the common temperature.
    pub at_reference_temperature: bool,
    /// Logged temperature, °C.
    pub temperature_c: Option<Measured>,
    /// Displacement; rests on the zero as the cell does.
    pub displacement: Displacement,
    /// χ² with s.u. as stated (for lists without: with the found s.u.).
    pub chi2: f64,
    /// Lines less unknowns of the list.
    pub dof: i64,
    /// How the s.u. were found.
    pub noise: LineNoise,
    /// Lines of the fit.
    pub lines: Vec<LineReport>,
    /// Lines that no reflection explains.
    pub foreign: Vec<LeftOut>,
    /// Lines that several reflections explain.
    pub ambiguous: Vec<LeftOut>,
    /// What a reader should know.
    pub notes: Vec<String>,
}

/// Change of one parameter.
#[derive(Clone, Debug, PartialEq)]
pub struct Delta {
    /// a, b, c, alpha, beta or gamma.
    pub parameter: &'static str,
    /// Whether the unit is degrees; else ppm.
    pub in_deg: bool,
    /// Batch less reference, ppm of the reference or degrees.
    pub delta: f64,
    /// s.u. of the difference.
    pub u: f64,
    /// δ/u.
    pub z: f64,
    /// Degrees of freedom of u; `None` where it rests on stated s.u.
    pub dof: Option<f64>,
    /// Limit in the same unit.
    pub limit: f64,
    /// Drifted above this |δ|.
    pub critical: f64,
    /// Within below this |δ|; negative: never.
    pub acceptance: f64,
    /// True change found with 80 % power.
    pub detectable: f64,
    /// Chance of such a |δ| or a larger one for a true change at the limit.
    pub p_value: f64,
    /// The decision.
    pub decision: Decision,
    /// Parts of u.
    pub budget: Vec<BudgetEntry>,
}

/// One source of the uncertainty of a difference.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BudgetEntry {
    /// Where it comes from.
    pub source: &'static str,
    /// Its part, ppm or degrees; squares add.
    pub u: f64,
}

/// A possible cause with its probability; filled only where a likelihood is stated.
#[derive(Clone, Debug, PartialEq)]
pub struct Cause {
    /// The cause.
    pub name: String,
    /// Its probability.
    pub probability: f64,
}

/// One batch against the reference.
#[derive(Clone, Debug, PartialEq)]
pub struct BatchReport {
    /// The list; `None` when its lines could not be assigned or fitted.
    pub list: Option<ListReport>,
    /// Name of the batch.
    pub id: String,
    /// The decision on the batch.
    pub decision: Decision,
    /// All tested parameters.
    pub deltas: Vec<Delta>,
    /// Index of the delta that stands for the batch: of those with the batch's decision the one with the largest |z|.
    pub headline: Option<usize>,
    /// Displacement less that of the reference; what is common cancels.
    pub displacement_difference: Option<Displacement>,
    /// Empty: no likelihood of causes is stated here.
    pub cause: Vec<Cause>,
    /// What the fit says in words.
    pub statement: String,
    /// What a reader should know.
    pub notes: Vec<String>,
}

impl BatchReport {
    /// A batch whose lines give no cell.
    pub(crate) fn without_cell(id: &str, reason: &str) -> Self {
        Self {
            id: id.to_owned(),
            list: None,
            decision: Decision::Undecided,
            deltas: Vec::new(),
            headline: None,
            displacement_difference: None,
            cause: Vec::new(),
            statement: format!("No cell: {reason}."),
            notes: Vec::new(),
        }
    }

    /// The delta that stands for the batch.
    #[must_use]
    pub fn headline(&self) -> Option<&Delta> {
        self.headline.and_then(|i| self.deltas.get(i))
    }
}

impl Report {
    /// The most serious decision of all batches: drifted, else undecided, else within.
    #[must_use]
    pub fn worst(&self) -> Option<Decision> {
        self.batches.iter().map(|b| b.decision).max()
    }
}
