//! Dispersion corrections f′ and f″ (`data/dispersion.csv`).
//!
//! A row of the file is one run between two absorption edges. In it f″ is straight in logarithms, and f′ is straight in
//! energy once its two logarithms at the edges are taken off. Nothing is interpolated across an edge.

use std::sync::OnceLock;

use values::{Row, Table};

use super::elements::atomic_number;
use crate::StructureFactorError;

/// Range of the table in eV.
pub const DISPERSION_EV: std::ops::RangeInclusive<f64> = 2000.0..=60000.0;
/// Closer to an edge than this the value at this distance holds, eV.
const GAP_EV: f64 = 0.05;
/// Within this distance of an edge a note says so, eV.
const NEAR_EDGE_EV: f64 = 50.0;

/// Where f′ of the source lies more than 0.5 electrons off another compilation (xraylib 4.3.0) far from any edge: faults of
/// its quadrature, broad enough to meet a line of a tube, in eV. Kept as the source has them, with a note.
const DOUBTFUL_EV: [(&str, std::ops::RangeInclusive<f64>); 5] = [
    ("Ar", 5800.0..=6000.0),
    ("Ce", 2000.0..=2600.0),
    ("Ce", 3100.0..=5250.0),
    ("Ce", 18_750.0..=19_700.0),
    ("Bi", 7950.0..=8300.0),
];

/// Dispersion correction of an atom at a photon energy.
#[derive(Clone, Debug, PartialEq)]
pub struct Dispersion {
    /// f′ in electrons.
    pub f1: f64,
    /// f″ in electrons, zero or above.
    pub f2: f64,
    /// What limits the value: an edge within 50 eV, a fault of the source, or an element that the source does not hold.
    pub note: Option<String>,
}

struct Columns {
    element: usize,
    below: usize,
    above: usize,
    logs: [usize; 2],
    f1: [usize; 2],
    f2: [usize; 2],
}

struct Tabulated {
    table: Table<'static>,
    columns: Columns,
}

fn tabulated() -> &'static Tabulated {
    static TABLE: OnceLock<Tabulated> = OnceLock::new();
    // The file is part of the program and tests/dispersion_table.rs reads every row: a fault can't reach a user.
    TABLE.get_or_init(|| read().expect("data/dispersion.csv is read by the tests"))
}

fn read() -> Option<Tabulated> {
    let table = Table::parse(include_str!("../../../../data/dispersion.csv"), "data/dispersion.csv").ok()?;
    let column = |name| table.column(name);
    let columns = Columns {
        element: column("element")?,
        below: column("edge_below_eV")?,
        above: column("edge_above_eV")?,
        logs: [column("log_below")?, column("log_above")?],
        f1: [column("f1_energies_eV")?, column("f1_rest")?],
        f2: [column("f2_energies_eV")?, column("f2")?],
    };
    Some(Tabulated { table, columns })
}

impl Tabulated {
    fn rows_of<'a>(&'a self, element: &'a str) -> impl Iterator<Item = &'a Row<'static>> {
        self.table.rows.iter().filter(move |r| r.fields[self.columns.element] == element)
    }

    /// Edge below or above a run, if there is one within the range of the table.
    fn edge(&self, row: &Row<'static>, column: usize) -> Option<f64> {
        row.fields[column].parse().ok()
    }
}

/// A number of the table. An unreadable one becomes NaN, which no test of the table lets pass.
fn number(text: &str) -> f64 {
    text.parse().unwrap_or(f64::NAN)
}

/// Straight line between the two points around `x`; both columns are lists in one field, x rising.
/// `scale` is applied to both coordinates (the identity, or the logarithm).
fn between(row: &Row<'static>, [xs, ys]: [usize; 2], x: f64, scale: fn(f64) -> f64) -> f64 {
    let mut points = row.fields[xs].split(' ').zip(row.fields[ys].split(' '));
    let mut low = points.next().unwrap_or(("", ""));
    let mut low_x = number(low.0);
    for point in points {
        let high_x = number(point.0);
        if x <= high_x {
            let share = (scale(x.max(low_x)) - scale(low_x)) / (scale(high_x) - scale(low_x));
            let (from, to) = (scale(number(low.1)), scale(number(point.1)));
            return from + share * (to - from);
        }
        (low, low_x) = (point, high_x);
    }
    scale(number(low.1))
}

/// Energies of the absorption edges of an element between 2 and 60 keV, in eV, rising; as the source of the table has them.
#[must_use]
pub fn absorption_edges_ev(element: &str) -> Vec<f64> {
    let source = tabulated();
    source.rows_of(element).filter_map(|row| source.edge(row, source.columns.below)).collect()
}

/// Dispersion correction f′ + i f″ of an atom, in electrons, at a photon energy in eV.
///
/// Within 0.002 electrons of the source. Zero for H (D, T) and He, as in the source; zero with a note for Z ≥ 93, which the
/// source does not hold. A note names an absorption edge within 50 eV: there the free atom is a poor model of a solid; or an
/// energy where the source is known to be wrong (Bi near Cu Kα).
///
/// # Errors
/// [`StructureFactorError::UnknownElement`]; [`StructureFactorError::EnergyOutsideTable`] outside 2 to 60 keV.
///
/// Source: Cromer & Liberman (1970), J. Chem. Phys. 53, 1891, as computed by gemmi 0.7.5.
pub fn dispersion(element: &str, energy_ev: f64) -> Result<Dispersion, StructureFactorError> {
    let z = atomic_number(element)?;
    if !DISPERSION_EV.contains(&energy_ev) {
        return Err(StructureFactorError::EnergyOutsideTable { energy_ev });
    }
    let none = |note| Ok(Dispersion { f1: 0.0, f2: 0.0, note });
    let source = tabulated();
    let columns = &source.columns;
    let inside = |row: &&Row<'static>| source.edge(row, columns.above).is_none_or(|above| energy_ev < above);
    let Some(row) = source.rows_of(element).find(inside) else {
        return none((z > 2).then(|| format!("{element}: no dispersion correction is tabulated; zero is used")));
    };
    let (below, above) = (source.edge(row, columns.below), source.edge(row, columns.above));
    // Inside the gap beside an edge the value at its border holds.
    let energy = energy_ev.max(below.map_or(0.0, |e| e + GAP_EV)).min(above.map_or(f64::INFINITY, |e| e - GAP_EV));
    let log = |edge: Option<f64>, column: usize| {
        edge.map_or(0.0, |edge| number(row.fields[column]) * ((energy - edge).abs() / edge).ln())
    };
    let f1 = between(row, columns.f1, energy, |x| x) + log(below, columns.logs[0]) + log(above, columns.logs[1]);
    let f2 = between(row, columns.f2, energy, f64::ln).exp();
    let nearest = [below, above].into_iter().flatten().min_by(|a, b| {
        let distance = |edge: &f64| (edge - energy_ev).abs();
        distance(a).total_cmp(&distance(b))
    });
    let edge_note = nearest.filter(|edge| (edge - energy_ev).abs() <= NEAR_EDGE_EV).map(|edge| {
        format!(
            "{element}: the photon energy {energy_ev:.1} eV is within 50 eV of its absorption edge at {edge:.1} eV; f′ and f″ of \
             the free atom are uncertain there"
        )
    });
    let doubtful = DOUBTFUL_EV.iter().any(|(symbol, range)| *symbol == element && range.contains(&energy_ev));
    let doubt_note = || {
        format!(
            "{element}: at {energy_ev:.1} eV the source of f′ has a numerical fault; f′ = {f1:.2} may be off by 0.5 electrons or \
             more"
        )
    };
    let note = edge_note.or_else(|| doubtful.then(doubt_note));
    Ok(Dispersion { f1, f2, note })
}
