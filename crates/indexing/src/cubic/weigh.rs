//! From evidence to probability, and whether the best reading stands alone.
//!
//! `P(reading) = E w / (Σ E w + E_none)`: E the evidence over random lines, w the weight of the composition (one without it) and
//! of lines that are not seen (`ln_strain`).
//! `E_none = 1 + e^L + Σ E(uniaxial)`: lines at random; lattices of lower symmetry that were not looked for, which explain any
//! list a little (L below); tetragonal and hexagonal lattices that were looked for and found.
//!
//! Two readings with the same lines have the same evidence and share the probability in equal parts, whatever their names.
//!
//! One prior is not flat. A primitive cubic lattice whose every line is present, with a cell that holds one or two atoms, hardly
//! exists; the same lines come from a face-centred cell of twice the edge whose two kinds of atoms scatter alike (KCl), since
//! then all lines with odd indices vanish. Such a reading is put beside the primitive one with equal evidence.

use super::CubicOptions;
use super::evidence::Refined;
use super::lines::Lines;
use super::rivals::Rival;
use super::sequence::{Centring, indices, multiplicity};
use values::Measured;

/// Readings further below the best than this many nats are not listed.
const LISTED_NATS: f64 = 14.0;
/// Readings listed.
const LISTED: usize = 10;
/// A second reading with this share of the first's probability makes the answer ambiguous: odds below 2:1.
const AMBIGUOUS_SHARE: f64 = 0.5;
/// Volume of one scatterer in a lattice whose odd lines vanish, Å³: NaF has 12, RbBr 40 (common practice, no source).
const ONE_ATOM_VOLUME: std::ops::RangeInclusive<f64> = 10.0..=45.0;
/// Lines that must be there, all of them, before a primitive lattice is suspected to be a halved one.
const COMPLETE_LINES: usize = 6;
/// Relative s.u. that is added to a density: pores, and the formula itself (no source).
const DENSITY_FLOOR: f64 = 0.01;
/// Misfit of Z in s.u. beyond which a reading loses no more weight (no source).
const LARGEST_MISFIT: f64 = 3.0;

/// One reading with its weight.
pub(crate) struct Weighed {
    pub(crate) lattice: Refined,
    pub(crate) probability: f64,
    /// Z, where a density is known.
    pub(crate) formula_units: Option<Measured>,
    /// The face-centred partner of a primitive reading: its odd lines are absent by structure.
    pub(crate) halved: bool,
}

/// All readings with their probabilities.
pub(crate) struct Weighing {
    pub(crate) readings: Vec<Weighed>,
    pub(crate) probability_none: f64,
    pub(crate) ambiguous: bool,
    /// The best uniaxial lattice, if it beats the best cubic one.
    pub(crate) rival: Option<Rival>,
}

/// `L`: evidence of lattices that were not looked for, nats, for a list of n lines.
///
/// Chosen on synthetic lists of lower symmetry, of four lines and more, and on lists without a lattice, so that fewer than one in
/// thirty is called cubic.
fn ln_unsearched(n: usize) -> f64 {
    (4.5 + 0.6 * n as f64).min(11.0)
}

/// What a lattice loses by lines that are not seen and by a factor on the stated s.u., nats.
///
/// With r the calculated lines over those used and κ the factor: `1.4 (r − 1.5) + 4 (κ − 1)(r − 1.2)`, each where positive. The
/// first follows the r of synthetic cubic lists (99 in 100 lie below 3.2); the second because a large cell, whose lines lie close
/// together, catches foreign lines once the s.u. are wide: both together are the mark of a lattice by chance. Constants were
/// chosen on synthetic lists; the factor alone has its prior in the evidence.
fn ln_strain(lines: &Lines, lattice: &Refined) -> f64 {
    let ratio = lattice.calculated as f64 / (lattice.used() as f64).max(1.0);
    let factor = if lines.stated { lattice.scale } else { 1.0 };
    1.4 * (ratio - 1.5).max(0.0) + 4.0 * (factor - 1.0) * (ratio - 1.2).max(0.0)
}

pub(crate) fn weigh(lines: &Lines, refined: Vec<Refined>, rivals: &[Rival], options: &CubicOptions) -> Weighing {
    let mut readings: Vec<Weighed> = Vec::new();
    for lattice in refined {
        // By falling evidence: an ordinary face-centred reading that stands already explains more and stays.
        if let Some(partner) = halved_partner(lines, &lattice)
            && !readings.iter().any(|r| is_same(&r.lattice, &partner))
        {
            readings.push(Weighed { lattice: partner, probability: 0.0, formula_units: None, halved: true });
        }
        if !readings.iter().any(|r| r.halved && is_same(&r.lattice, &lattice)) {
            readings.push(Weighed { lattice, probability: 0.0, formula_units: None, halved: false });
        }
    }
    let mut ln_weights = Vec::with_capacity(readings.len());
    for reading in &mut readings {
        let (ln_fit, units) = composition(&reading.lattice, options);
        reading.formula_units = units;
        // The centrings share one third each; uniaxial lattices below likewise, one for each kind.
        ln_weights.push(reading.lattice.ln_evidence + ln_fit - ln_strain(lines, &reading.lattice));
    }
    let best = ln_weights.iter().copied().fold(0.0, f64::max);
    let none = (0.0 - best).exp()
        + (ln_unsearched(lines.list.len()) - best).exp()
        + rivals.iter().map(|rival| (rival.ln_evidence - best).exp()).sum::<f64>();
    let sum: f64 = ln_weights.iter().map(|w| (w - best).exp()).sum();
    for (reading, ln_weight) in readings.iter_mut().zip(&ln_weights) {
        reading.probability = (ln_weight - best).exp() / (sum + none);
    }
    readings.sort_by(|x, y| order(x, y, options));
    let first = readings.first().map_or(0.0, |r| r.probability);
    readings.retain(|r| r.probability >= first * (-LISTED_NATS).exp());
    readings.truncate(LISTED);
    let second = readings.get(1).map_or(0.0, |r| r.probability);
    let top = readings.first().map_or(f64::NEG_INFINITY, |r| r.lattice.ln_evidence);
    let rival = rivals.iter().filter(|r| r.ln_evidence > top).max_by(|x, y| x.ln_evidence.total_cmp(&y.ln_evidence));
    Weighing {
        probability_none: none / (sum + none),
        ambiguous: first > 0.0 && second >= AMBIGUOUS_SHARE * first,
        rival: rival.copied(),
        readings,
    }
}

fn is_same(x: &Refined, y: &Refined) -> bool {
    x.centring == y.centring && (x.a / y.a - 1.0).abs() < 1e-3
}

/// More probable first; equal ones (within 1 %) by the volume per atom where the formula is known, then by the smaller cell.
fn order(x: &Weighed, y: &Weighed, options: &CubicOptions) -> std::cmp::Ordering {
    // In steps of 1 %, so that equality is transitive; what rounding parts across a step differs by less than 1 % all the same.
    let step = |w: &Weighed| (w.probability.max(f64::MIN_POSITIVE).ln() * 100.0).round();
    let by_probability = step(y).total_cmp(&step(x));
    if by_probability.is_ne() {
        return by_probability;
    }
    let by_volume = options.content.map_or(std::cmp::Ordering::Equal, |content| {
        volume_misfit(&x.lattice, content.heavy_atoms).total_cmp(&volume_misfit(&y.lattice, content.heavy_atoms))
    });
    by_volume.then(x.lattice.a.total_cmp(&y.lattice.a))
}

/// |ln(v/18)| for the volume v per atom that comes nearest to 18 Å³, the usual guess for atoms other than hydrogen (common
/// practice, no source), over the numbers of formula units that the centring allows; rounded to 0.05 so that noise decides nothing.
fn volume_misfit(lattice: &Refined, heavy_atoms: f64) -> f64 {
    let step = f64::from(lattice.centring.multiplicity());
    let volume = lattice.a.powi(3);
    let ideal = volume / (18.0 * heavy_atoms * step);
    let misfit = |units: f64| (volume / (units.max(1.0) * step * heavy_atoms) / 18.0).ln().abs();
    (misfit(ideal.floor()).min(misfit(ideal.ceil())) * 20.0).round() / 20.0
}

/// ln of the weight of the composition, and Z: the formula units of a lattice are a multiple of its points per cell.
///
/// A density that fits no reading says that density or formula are wrong, not which reading is right: a misfit counts as three
/// s.u. at most ([`LARGEST_MISFIT`]).
fn composition(lattice: &Refined, options: &CubicOptions) -> (f64, Option<Measured>) {
    let Some((content, density)) = options.content.and_then(|c| c.density_with_u().map(|d| (c, d))) else {
        return (0.0, None);
    };
    let units = crate::materials::from_density(Measured::exact(lattice.a.powi(3)), content.molar_mass_g_mol, density);
    let step = f64::from(lattice.centring.multiplicity());
    let u = units.u.hypot(DENSITY_FLOOR * units.value);
    let z = ((units.value - nearest_units(units.value, lattice.centring)) / u).abs().min(LARGEST_MISFIT);
    // Against a Z spread evenly over one step.
    let ln_weight = -0.5 * z * z + (step / (u * (2.0 * std::f64::consts::PI).sqrt())).ln().max(0.0);
    (ln_weight, Some(units))
}

/// The number of formula units nearest to `z` that the points of the lattice allow.
pub(crate) fn nearest_units(z: f64, centring: Centring) -> f64 {
    let step = f64::from(centring.multiplicity());
    (z / step).round().max(1.0) * step
}

/// The face-centred reading of twice the edge with the same evidence, where the module's conditions hold.
fn halved_partner(lines: &Lines, lattice: &Refined) -> Option<Refined> {
    let all = lattice.used() == lattice.calculated && lattice.foreign(lines) == 0;
    let complete = all && lattice.used() >= COMPLETE_LINES;
    let holds = lattice.centring == Centring::P && complete && ONE_ATOM_VOLUME.contains(&lattice.a.powi(3));
    if !holds || !falls_like_one_atom(lines, lattice) {
        return None;
    }
    let mut partner = lattice.clone();
    partner.centring = Centring::F;
    partner.a *= 2.0;
    for hit in &mut partner.lines {
        hit.line *= 4;
    }
    Some(partner)
}

/// Whether the intensities over multiplicity and Lorentz–polarisation factor fall with the angle, as those of one kind of atom
/// do; true where intensities are not known. Each may rise by 30 % over the smallest before (heights, texture: no source).
fn falls_like_one_atom(lines: &Lines, lattice: &Refined) -> bool {
    let mut least = f64::INFINITY;
    for (line, hit) in lines.list.iter().zip(&lattice.lines).filter(|(_, hit)| hit.weight > 0.5) {
        let Some(strength) = line.strength else { return true };
        let planes: u32 = indices(hit.line as u32, lattice.centring).into_iter().map(multiplicity).sum();
        let theta = line.two_theta_deg.to_radians() / 2.0;
        let lorentz = (1.0 + (2.0 * theta).cos().powi(2)) / (theta.sin().powi(2) * theta.cos());
        let reduced = strength / (f64::from(planes) * lorentz);
        if reduced > 1.3 * least {
            return false;
        }
        least = least.min(reduced);
    }
    true
}
