//! The atoms of a data block.

use std::collections::HashSet;

use cif::{Block, Column, Value, aliases};
use lattice::Cell;
use values::Diagnostic;

use super::adp;
use crate::displacement::{self, Grouped, listed};
use crate::elements::{Meaning, NoElement, Species, from_label, from_type_symbol};
use crate::{Atom, Displacement};

/// Sentence on sites where nothing scatters.
const DUMMIES: &str = "dummy atoms and vacancies were left out";

/// Occupancies above this can't be meant, not even in percent or times a multiplicity (common practice, no source).
const LARGEST_OCCUPANCY: f64 = 1000.0;

/// Atoms, and for each the multiplicity that the file states.
pub(super) struct Read {
    pub atoms: Vec<Atom>,
    pub multiplicities: Vec<Option<f64>>,
}

/// Columns that are read; looked up once, not for every atom.
const COLUMNS: [&str; 13] = [
    "_atom_site.label",
    "_atom_site.type_symbol",
    "_atom_site.fract_x",
    "_atom_site.fract_y",
    "_atom_site.fract_z",
    "_atom_site.occupancy",
    "_atom_site.U_iso_or_equiv",
    "_atom_site.B_iso_or_equiv",
    "_atom_site.ADP_type",
    "_atom_site.site_symmetry_multiplicity",
    "_atom_site.calc_flag",
    "_atom_site_aniso.U_11",
    "_atom_site_aniso.B_11",
];

/// The columns of the atoms, one value or many.
pub(super) struct Table<'a> {
    block: Block<'a>,
    rows: usize,
    /// In the order of [`COLUMNS`]; only those with as many rows as there are atoms.
    columns: [Option<Column<'a>>; COLUMNS.len()],
}

impl<'a> Table<'a> {
    /// One of [`COLUMNS`], if it has as many rows as there are atoms.
    pub fn column(&self, internal: &str) -> Option<Column<'a>> {
        COLUMNS.iter().position(|name| *name == internal).and_then(|index| self.columns[index])
    }

    fn value(&self, internal: &str, row: usize) -> Option<Value<'a>> {
        self.column(internal)?.get(row).filter(|value| !value.is_missing())
    }

    /// The label of a row, else its type symbol; empty if it has neither.
    pub fn label(&self, row: usize) -> String {
        let value = self.value("_atom_site.label", row).or_else(|| self.value("_atom_site.type_symbol", row));
        value.and_then(Value::text).map_or(String::new(), |text| text.trim().to_owned())
    }

    pub fn number(&self, internal: &str, row: usize) -> Result<Option<values::Measured>, Diagnostic> {
        self.value(internal, row).map_or(Ok(None), Value::number)
    }
}

/// The table of atoms: labels or type symbols, with coordinates of either kind.
pub(super) fn table(block: Block<'_>) -> Option<Table<'_>> {
    let named = aliases::find(block, "_atom_site.label").or_else(|| aliases::find(block, "_atom_site.type_symbol"))?;
    let placed = ["_atom_site.fract_x", "_atom_site.Cartn_x"].iter().any(|name| aliases::find(block, name).is_some());
    let rows = named.1.len();
    let of_atoms = |name| aliases::find(block, name).map(|(_, column)| column).filter(|column| column.len() == rows);
    placed.then(|| Table { block, rows, columns: COLUMNS.map(of_atoms) })
}

/// Reads all atoms. `declared` are the elements of the stated formula.
pub(super) fn read(
    block: Block<'_>,
    cell: &Cell,
    declared: &[&'static str],
    notes: &mut Vec<String>,
) -> Result<Read, Diagnostic> {
    let place = |internal: &str| {
        aliases::find(block, internal).and_then(|(tag, _)| block.tag_location(tag)).unwrap_or_else(|| block.location())
    };
    let Some(table) = table(block) else {
        return Err(Diagnostic::new("no atoms", "a loop of atoms", "add it").at(block.location()));
    };
    let axes = ["_atom_site.fract_x", "_atom_site.fract_y", "_atom_site.fract_z"];
    if let Some(missing) = axes.iter().find(|axis| table.column(axis).is_none()) {
        if aliases::find(block, "_atom_site.Cartn_x").is_some() {
            return Err(Diagnostic::new(
                "atoms with Cartesian coordinates in Å only",
                "fractional coordinates, `_atom_site_fract_x` …",
                "convert them: how the axes of these coordinates lie in the cell is not settled by the standard",
            )
            .at(place("_atom_site.Cartn_x")));
        }
        return Err(Diagnostic::new(
            format!("atoms without `{}`", missing.replacen('.', "_", 1)),
            "x, y and z of each atom, in one loop with the labels",
            "add the column",
        )
        .at(place("_atom_site.label")));
    }
    let tensors = adp::tensors(block, cell, &table, notes)?;
    let mut reader = Reader { table, declared, tensors, notes, assumed: Vec::new(), findings: Grouped::default() };
    let mut read = Read { atoms: Vec::new(), multiplicities: Vec::new() };
    for row in 0..reader.table.rows {
        if let Some(atom) = reader.atom(row, axes)? {
            let stated = reader.table.number("_atom_site.site_symmetry_multiplicity", row)?;
            read.multiplicities.push(stated.map(|measured| measured.value));
            read.atoms.push(atom);
        }
    }
    reader.finish(read.atoms.len());
    if read.atoms.is_empty() {
        return Err(Diagnostic::new(
            "no atom with coordinates",
            "at least one atom with x, y and z",
            "replace the `?` by the coordinates",
        )
        .at(place("_atom_site.fract_x")));
    }
    note_labels(&read.atoms, notes);
    note_disorder(block, notes);
    Ok(read)
}

struct Reader<'a, 'n> {
    table: Table<'a>,
    declared: &'n [&'static str],
    tensors: adp::Tensors,
    notes: &'n mut Vec<String>,
    /// Labels without any displacement parameter.
    assumed: Vec<String>,
    findings: Grouped,
}

impl Reader<'_, '_> {
    /// One row; `None` for dummies and atoms without coordinates.
    fn atom(&mut self, row: usize, axes: [&str; 3]) -> Result<Option<Atom>, Diagnostic> {
        let label = self.table.label(row);
        let flag = self.table.value("_atom_site.calc_flag", row).and_then(Value::text);
        if flag.is_some_and(|flag| flag.eq_ignore_ascii_case("dum")) {
            self.findings.add(DUMMIES, label);
            return Ok(None);
        }
        let Some(species) = self.species(row)? else {
            self.findings.add(DUMMIES, label);
            return Ok(None);
        };
        let label = if label.is_empty() { format!("{}{}", species.symbol, row + 1) } else { label };
        let mut position = [0.0; 3];
        for (slot, axis) in position.iter_mut().zip(axes) {
            let Some(measured) = self.table.number(axis, row)? else {
                self.findings.add("atoms without coordinates were left out", label);
                return Ok(None);
            };
            *slot = measured.value;
            if slot.abs() > 1000.0 {
                return Err(self.wrong(axis, row, &format!("a coordinate of {slot}"), "a fraction of the cell edge"));
            }
        }
        if position.iter().any(|x| x.abs() > 4.0) {
            self.findings.add("coordinates far outside of the cell (fractions are meant, not Å)", label.clone());
        }
        let occupancy = self.occupancy(row, &label)?;
        let displacement = adp::of_atom(&self.table, row, &label, &self.tensors, &mut self.findings)?;
        if displacement.is_none() {
            self.assumed.push(label.clone());
        }
        Ok(Some(Atom {
            label,
            element: species.symbol.to_owned(),
            charge: species.charge,
            position,
            occupancy,
            displacement: displacement.unwrap_or(Displacement::IsotropicB(0.0)),
        }))
    }

    /// From the type symbol, else from the label; `None` where nothing scatters.
    fn species(&mut self, row: usize) -> Result<Option<Species>, Diagnostic> {
        let typed = self.table.value("_atom_site.type_symbol", row);
        let value = typed.or_else(|| self.table.value("_atom_site.label", row));
        let Some(value) = value else {
            let place = self.table.column("_atom_site.fract_x").and_then(|column| column.get(row));
            let place = place.map_or_else(|| self.table.block.location(), Value::location);
            return Err(Diagnostic::new(
                "an atom with neither label nor type symbol",
                "one of the two",
                "name the element",
            )
            .at(place));
        };
        let text = value.text().unwrap_or_default();
        let read = if typed.is_some() { from_type_symbol(&text) } else { from_label(text.trim(), self.declared) };
        match read {
            Ok(Meaning::Atom(species, remark)) => {
                if let Some(remark) = remark.filter(|remark| !self.notes.contains(remark)) {
                    self.notes.push(remark);
                }
                Ok(Some(species))
            }
            Ok(Meaning::Nothing) => Ok(None),
            Err(NoElement { found, mend }) => {
                Err(Diagnostic::new(found, "an element from H to Cf", mend).at(value.location()))
            }
        }
    }

    /// Missing and `.` mean 1.
    fn occupancy(&mut self, row: usize, label: &str) -> Result<f64, Diagnostic> {
        let Some(measured) = self.table.number("_atom_site.occupancy", row)? else { return Ok(1.0) };
        if !(0.0..=LARGEST_OCCUPANCY).contains(&measured.value) {
            let found = format!("the occupancy {} of {label}", measured.value);
            return Err(self.wrong("_atom_site.occupancy", row, &found, "a share from 0 to 1"));
        }
        if measured.value > 1.0 + 3.0 * measured.u + 1e-9 {
            self.findings.add("occupancy above 1, used as it stands", format!("{label} ({})", measured.value));
        }
        Ok(measured.value)
    }

    fn wrong(&self, internal: &str, row: usize, found: &str, expected: &str) -> Diagnostic {
        let place = self.table.value(internal, row).map_or_else(|| self.table.block.location(), Value::location);
        Diagnostic::new(found, expected, "correct the value").at(place)
    }

    fn finish(self, kept: usize) {
        displacement::note_assumed(&self.assumed, kept, self.notes);
        self.notes.extend(self.findings.into_notes());
    }
}

fn note_labels(atoms: &[Atom], notes: &mut Vec<String>) {
    let mut seen = HashSet::new();
    let twice: Vec<String> =
        atoms.iter().filter(|atom| !seen.insert(&atom.label)).map(|atom| atom.label.clone()).collect();
    if !twice.is_empty() {
        notes.push(format!("labels that occur more than once: {}", listed(&twice)));
    }
}

fn note_disorder(block: Block<'_>, notes: &mut Vec<String>) {
    let given = aliases::find(block, "_atom_site.disorder_group")
        .is_some_and(|(_, column)| column.iter().any(|value| !value.is_missing()));
    if given {
        notes.push("all disorder groups were kept with their occupancies".to_owned());
    }
    let own = aliases::find(block, "_atom_type_scat.Cromer_Mann_a1")
        .is_some_and(|(_, column)| column.iter().any(|value| !value.is_missing()));
    if own {
        notes.push(
            "the scattering factors that the file gives were left out; those of International Tables C are used"
                .to_owned(),
        );
    }
}
