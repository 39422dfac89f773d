//! What a structure says about itself: moves onto special positions, shared sites, and its content against its formula.
//!
//! Nothing here changes an atom; every finding is a note.

use std::collections::BTreeMap;

use crate::displacement::listed;
use crate::expand::ExpandedSite;
use crate::{Structure, elements, formula};

/// Shorter moves are the last digits of coordinates with six decimals, Å.
const SHOWN_MOVE_ANGSTROM: f64 = 1e-5;
/// Smaller changes of a tensor are rounding, Å².
const SHOWN_TENSOR_CHANGE: f64 = 1e-5;
/// Atoms closer than this share a site, Å.
const SAME_SITE_ANGSTROM: f64 = 0.1;
/// More comparisons of atoms than this are left out: a structure of that size has no mixed sites to speak of.
const MAX_COMPARISONS: usize = 50_000_000;
/// Most notes of one kind.
const MAX_NOTES: usize = 40;

impl Structure {
    /// One sentence for each atom that the rule of special positions moves, and for each tensor that it averages.
    #[must_use]
    pub fn moves(&self) -> Vec<String> {
        moves(self, &self.expand())
    }
}

/// The same structure with its notes completed.
pub(crate) fn noted(mut structure: Structure) -> Structure {
    let sites = structure.expand();
    let mut notes = moves(&structure, &sites);
    notes.extend(overfull_sites(&structure, &sites));
    notes.extend(formula_mismatch(&structure, &sites));
    structure.notes.append(&mut notes);
    structure
}

/// Each atom that the rule of special positions moved or averaged.
fn moves(structure: &Structure, sites: &[ExpandedSite]) -> Vec<String> {
    let mut notes = Vec::new();
    for (atom, site) in structure.atoms.iter().zip(sites) {
        let label = &atom.label;
        if site.moved_angstrom > SHOWN_MOVE_ANGSTROM {
            notes.push(format!(
                "{label} was moved by {:.5} Å onto its special position of multiplicity {}",
                site.moved_angstrom, site.multiplicity
            ));
        }
        if site.tensor_moved_square_angstrom > SHOWN_TENSOR_CHANGE {
            notes.push(format!(
                "the displacement tensor of {label} was averaged over its site; the largest change is {:.5} Å²",
                site.tensor_moved_square_angstrom
            ));
        }
    }
    if notes.len() > MAX_NOTES {
        let more = notes.len() - MAX_NOTES;
        notes.truncate(MAX_NOTES);
        notes.push(format!("{more} more atoms were moved onto special positions"));
    }
    notes
}

/// Sites whose occupancies add up to more than one atom: listed twice, or equivalent atoms listed side by side.
fn overfull_sites(structure: &Structure, sites: &[ExpandedSite]) -> Vec<String> {
    let count = structure.atoms.len();
    let images: usize = sites.iter().map(|site| site.positions.len()).sum();
    if count.saturating_mul(images) > MAX_COMPARISONS {
        return Vec::new();
    }
    let (metric, reciprocal) = (structure.cell.metric(), structure.cell.reciprocal_metric());
    // Lattice planes (100) are 1/a* apart: a fraction above 0.1 Å a* is farther away than 0.1 Å.
    let largest: [f64; 3] = std::array::from_fn(|i| SAME_SITE_ANGSTROM * reciprocal[i][i].sqrt());
    let mut seen = vec![false; count];
    let mut notes = Vec::new();
    for first in 0..count {
        let Some(origin) = sites[first].positions.first().filter(|_| !seen[first]) else { continue };
        let shares = |other: &usize| {
            *other == first || sites[*other].positions.iter().any(|image| same_site(&metric, largest, *origin, *image))
        };
        let together: Vec<usize> = (first..count).filter(shares).collect();
        together.iter().for_each(|index| seen[*index] = true);
        let sum: f64 = together.iter().map(|index| structure.atoms[*index].occupancy).sum();
        // Three units of the third decimal: occupancies are rarely given better.
        if together.len() > 1 && sum > 1.003 {
            let labels: Vec<String> = together.iter().map(|index| structure.atoms[*index].label.clone()).collect();
            notes.push(format!("the occupancies of {} on one site add up to {sum:.3}, more than 1", listed(&labels)));
        }
    }
    if notes.len() > MAX_NOTES {
        let more = notes.len() - MAX_NOTES;
        notes.truncate(MAX_NOTES);
        notes.push(format!("{more} more sites hold more than one atom"));
    }
    notes
}

/// Whether two points are closer than 0.1 Å up to whole cells; most are told apart by one fraction.
fn same_site(metric: &[[f64; 3]; 3], largest: [f64; 3], a: [f64; 3], b: [f64; 3]) -> bool {
    let mut apart = [0.0; 3];
    for i in 0..3 {
        let difference = a[i] - b[i];
        apart[i] = difference - difference.round();
        if apart[i].abs() > largest[i] {
            return false;
        }
    }
    let squared: f64 = (0..3).map(|i| (0..3).map(|j| apart[i] * metric[i][j] * apart[j]).sum::<f64>()).sum();
    squared < SAME_SITE_ANGSTROM * SAME_SITE_ANGSTROM
}

/// Does the cell hold what the stated formula says? `None` where no formula is stated or it can't be read.
pub(crate) fn fits_formula(structure: &Structure) -> Option<bool> {
    let stated = formula::parse(structure.stated_formula.as_deref()?)?;
    Some(mismatches(&stated, structure.stated_z, &content(structure, &structure.expand(), |_, _| 1.0)).is_empty())
}

/// Atoms of each element in the cell, each weighted by `factor(multiplicity, order of the group)`.
fn content(
    structure: &Structure,
    sites: &[ExpandedSite],
    factor: impl Fn(f64, f64) -> f64,
) -> BTreeMap<&'static str, f64> {
    let order = structure.group.operations().len() as f64;
    let mut content = BTreeMap::new();
    for (atom, site) in structure.atoms.iter().zip(sites) {
        let multiplicity = site.multiplicity as f64;
        if let Some(symbol) = elements::symbol(&atom.element) {
            *content.entry(elements::chemical(symbol)).or_insert(0.0) +=
                atom.occupancy * multiplicity * factor(multiplicity, order);
        }
    }
    content
}

/// Elements whose number differs, with the number stated and the number found. Without a stated Z the one that fits best
/// is taken.
fn mismatches(
    stated: &[(&'static str, f64)],
    z: Option<f64>,
    content: &BTreeMap<&'static str, f64>,
) -> Vec<(&'static str, f64, f64)> {
    let found = |symbol: &str| content.get(symbol).copied().unwrap_or(0.0);
    let z = z.filter(|z| *z > 0.0).unwrap_or_else(|| {
        let product: f64 = stated.iter().map(|(symbol, n)| n * found(symbol)).sum();
        product / stated.iter().map(|(_, n)| n * n).sum::<f64>().max(1e-12)
    });
    let others =
        content.keys().filter(|symbol| stated.iter().all(|(known, _)| known != *symbol)).map(|symbol| (*symbol, 0.0));
    let expected = stated.iter().map(|(symbol, n)| (*symbol, n * z)).chain(others);
    expected
        .map(|(symbol, expected)| (symbol, expected, found(symbol)))
        // 2 %: formulas are rounded more coarsely than occupancies.
        .filter(|(_, expected, found)| (expected - found).abs() > 0.02 * expected.max(*found) + 1e-6)
        .collect()
}

fn formula_mismatch(structure: &Structure, sites: &[ExpandedSite]) -> Vec<String> {
    let Some(text) = structure.stated_formula.as_deref() else { return Vec::new() };
    let Some(stated) = formula::parse(text) else {
        return vec![format!(
            "the stated formula `{text}` was not compared with the content of the cell: it is no plain sum of elements"
        )];
    };
    let wrong = mismatches(&stated, structure.stated_z, &content(structure, sites, |_, _| 1.0));
    if wrong.is_empty() {
        return Vec::new();
    }
    let parts: Vec<String> = wrong
        .iter()
        .take(6)
        .map(|(symbol, expected, found)| format!("{symbol} {expected:.3} and {found:.3}"))
        .collect();
    let z = structure.stated_z.map_or("the formula".to_owned(), |z| format!("Z = {z} times the formula"));
    let mut notes = vec![format!("{z} `{text}` and the atoms of the cell differ: {}", parts.join(", "))];
    // Occupancy times multiplicity over the order of the group, as some programs write it: 1/24 for a full site.
    let undone = content(structure, sites, |multiplicity, order| order / multiplicity);
    if mismatches(&stated, structure.stated_z, &undone).is_empty() {
        notes.push(
            "the formula fits if the occupancies were given times multiplicity over the order of the group; they were used as they stand, divide them to mend this".to_owned(),
        );
    }
    notes
}
