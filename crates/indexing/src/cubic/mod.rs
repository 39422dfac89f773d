//! Which cubic lattice do these lines belong to, and how sure is it?
//!
//! [`search`] takes lines and returns a [`CubicAnswer`]: every reading that the lines allow, each with its evidence, a
//! probability, the ratio table, the edge with its s.u., and the probability that none of them is right.
//!
//! The steps: `lines` (Q, satellites) → `candidates` (edge and zero from pairs of lines) → `evidence` (refinement, likelihood
//! against random lines) → `rivals` (tetragonal and hexagonal lattices that do better) → `weigh` (probabilities, ambiguities)
//! → `readings` (final fit, figures of merit, ratio table) → `words` (sentences). Sequences of N = h² + k² + l² stand in
//! `sequence`, lattices of other systems with the very same lines in `twins`, normal equations in `normal`.
//!
//! Probabilities are provisional: they come from a stated likelihood and a few constants chosen on synthetic lists.

mod answer;
mod candidates;
mod evidence;
mod lines;
mod normal;
mod readings;
mod rivals;
mod sequence;
mod twins;
mod weigh;
mod words;

pub use answer::{CubicAnswer, LineOfReading, MissingLine, Reading, Satellite, Status};
pub use sequence::{Centring, indices};
pub use twins::{Twin, TwinKind, exact_twins};

use evidence::Refined;
use sequence::Sequence;
use std::fmt;
use values::{Measured, Peak, Wavelength};

/// How the search is bounded.
#[derive(Clone, Debug)]
pub struct CubicOptions {
    /// Prior of the zero, degrees 2θ (observed = true + zero). Default 0 ± 0.05, a usual alignment (common practice, no source).
    pub zero_deg: Measured,
    /// Prior of the specimen's displacement over the radius of the goniometer, s/R: it moves a line by −2 (s/R) cos θ; s > 0
    /// where the surface lies too low. Default 0 ± 4·10⁻⁴, about 0.1 mm at 240 mm (common practice, no source). An s.u. of zero
    /// fixes it.
    pub displacement_over_radius: Measured,
    /// Where the scan began, degrees 2θ: lines below are not missed. Default: at zero.
    pub from_deg: Option<f64>,
    /// Foreign lines that are allowed whatever the length of the list. Default 4.
    pub foreign_lines: usize,
    /// Share of foreign lines that is allowed where that is more. Default 0.2.
    pub foreign_share: f64,
    /// Smallest edge, Å. Default 2.0, below any known cubic cell.
    pub smallest_a: f64,
    /// Largest edge, Å. Default 25; lines of larger cells lie too close to be told apart.
    pub largest_a: f64,
    /// Lines that are used, the first by angle. Default 60.
    pub most_lines: usize,
    /// Satellites to look for: see [`Satellite::of_anode`]. Default none.
    pub satellites: Vec<Satellite>,
    /// What is known of the composition. Default nothing.
    pub content: Option<Content>,
}

impl Default for CubicOptions {
    fn default() -> Self {
        Self {
            zero_deg: Measured::new(0.0, 0.05),
            displacement_over_radius: Measured::new(0.0, 4e-4),
            from_deg: None,
            foreign_lines: 4,
            foreign_share: 0.2,
            smallest_a: 2.0,
            largest_a: 25.0,
            most_lines: 60,
            satellites: Vec::new(),
            content: None,
        }
    }
}

/// Relative s.u. of a density that comes without one.
pub(crate) const ASSUMED_DENSITY_U: f64 = 0.01;

/// A formula, and the density of the powder's grains where it is known.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Content {
    /// Molar mass of the formula, g/mol.
    pub molar_mass_g_mol: f64,
    /// Atoms other than hydrogen in the formula.
    pub heavy_atoms: f64,
    /// Density, g/cm³; an s.u. of zero means that none is known, and 1 % is taken.
    pub density_g_cm3: Option<Measured>,
}

impl Content {
    /// The density with its s.u.; 1 % where none is stated (no source).
    #[must_use]
    pub fn density_with_u(&self) -> Option<Measured> {
        let stated = self.density_g_cm3?;
        Some(if stated.u > 0.0 { stated } else { Measured::new(stated.value, ASSUMED_DENSITY_U * stated.value) })
    }
}

/// Why a list cannot be searched.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum CubicError {
    /// Fewer than three lines.
    TooFew {
        /// Lines given.
        found: usize,
    },
    /// A position outside 0 to 180°.
    Position {
        /// Index in the list, from 0.
        index: usize,
        /// The position, degrees 2θ.
        two_theta_deg: f64,
    },
    /// An s.u. that is not finite and above zero.
    Uncertainty {
        /// Index in the list, from 0.
        index: usize,
        /// The s.u., degrees 2θ.
        u_deg: f64,
    },
    /// An option outside its range.
    Option {
        /// Its name.
        name: &'static str,
        /// What it must be.
        expected: &'static str,
    },
}

impl fmt::Display for CubicError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::TooFew { found } => {
                let lines = if *found == 1 { "line is" } else { "lines are" };
                write!(f, "{found} {lines} too few to find a lattice; three or more are needed, twenty are good")
            }
            Self::Position { index, two_theta_deg } => {
                write!(f, "line {} lies at {two_theta_deg}°; expected 2θ between 0 and 180°", index + 1)
            }
            Self::Uncertainty { index, u_deg } => {
                write!(f, "line {} has the s.u. {u_deg}°; expected a finite number above zero", index + 1)
            }
            Self::Option { name, expected } => write!(f, "{name} must be {expected}"),
        }
    }
}

impl std::error::Error for CubicError {}

impl CubicOptions {
    /// The prior of s/R with an s.u. above zero: at 10⁻⁹ no line moves.
    fn displacement(&self) -> Measured {
        let Measured { value, u } = self.displacement_over_radius;
        Measured::new(value, u.max(1e-9))
    }

    fn check(&self) -> Result<(), CubicError> {
        let positive = |x: f64| x.is_finite() && x > 0.0;
        let wrong = |name, expected| Err(CubicError::Option { name, expected });
        if !(positive(self.zero_deg.u) && self.zero_deg.value.is_finite()) {
            return wrong("zero_deg", "a finite value with an s.u. above zero");
        }
        let Measured { value, u } = self.displacement_over_radius;
        if !(value.abs() < 0.1 && (0.0..0.1).contains(&u)) {
            return wrong("displacement_over_radius", "a value within ±0.1 with an s.u. of 0 or above, below 0.1");
        }
        if !(positive(self.smallest_a) && self.largest_a.is_finite() && self.largest_a > self.smallest_a) {
            return wrong("the range of the edge", "0 < smallest_a < largest_a");
        }
        if !(0.0..1.0).contains(&self.foreign_share) {
            return wrong("foreign_share", "at least 0 and below 1");
        }
        if self.from_deg.is_some_and(|deg| !(0.0..180.0).contains(&deg)) {
            return wrong("from_deg", "between 0 and 180");
        }
        if let Some(content) = self.content {
            let density = content.density_g_cm3.is_none_or(|d| positive(d.value) && d.u.is_finite() && d.u >= 0.0);
            if !(positive(content.molar_mass_g_mol) && positive(content.heavy_atoms) && density) {
                return wrong("content", "a molar mass, a number of atoms and a density above zero");
            }
        }
        Ok(())
    }
}

/// Searches for the cubic lattices that explain a list of lines.
///
/// # Errors
/// [`CubicError`]: fewer than three lines, a position outside 0 to 180°, an s.u. or an option outside its range. A list that no
/// cubic lattice explains is no error: its answer has `found == false` and says why.
pub fn search(peaks: &[Peak], wavelength: Wavelength, options: &CubicOptions) -> Result<CubicAnswer, CubicError> {
    options.check()?;
    let lines = lines::Lines::new(peaks, wavelength, options)?;
    let sequences = Centring::ALL.map(|centring| (centring, Sequence::of(centring)));
    let scales = evidence::scales(lines.stated);
    let mut refined: Vec<Refined> = candidates::candidates(&lines, &sequences, options)
        .iter()
        .filter_map(|start| {
            let (_, sequence) = sequences.iter().find(|(centring, _)| *centring == start.centring)?;
            let best = evidence::refine(&lines, start, sequence, &scales, options)?;
            let in_range = best.a > options.smallest_a && best.a < options.largest_a;
            (in_range && best.used() >= 3 && best.foreign(&lines) <= lines.foreign_allowed).then_some(best)
        })
        .collect();
    refined.sort_by(|x, y| y.ln_evidence.total_cmp(&x.ln_evidence));
    distinct(&mut refined);
    let rivals = match refined.first() {
        Some(best) if best.ln_evidence > 0.0 => rivals::rivals(&lines, best, &scales, options),
        _ => Vec::new(),
    };
    let weighed = weigh::weigh(&lines, refined, &rivals, options);
    Ok(readings::answer(peaks, &lines, &sequences, &weighed, wavelength, options))
}

/// Keeps the best of readings with one centring and edges that agree within 0.1 %.
fn distinct(refined: &mut Vec<Refined>) {
    let mut kept: Vec<Refined> = Vec::new();
    for one in refined.drain(..) {
        if !kept.iter().any(|k| k.centring == one.centring && (k.a / one.a - 1.0).abs() < 1e-3) {
            kept.push(one);
        }
    }
    *refined = kept;
}
