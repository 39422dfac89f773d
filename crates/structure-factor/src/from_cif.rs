//! Structures from CIF: one for each data block that has a cell and atoms.
//!
//! Read `blocks` below → [`cell`] and [`symmetry`] (what the file states, by whatever name) → [`atoms`] and [`adp`] (elements,
//! occupancies, displacement) → [`origin`] (which of two origins the formula asks for) → `checks` (what contradicts).
//!
//! A file that can be read in one way is read, and everything that was assumed, left out or contradicts is a note of the
//! structure. A value that can't be meant is an error at its line and column.

mod adp;
mod atoms;
mod cell;
mod origin;
mod symmetry;

use cif::aliases;
use values::Diagnostic;

use crate::{Structure, checks, formula};

/// Most warnings about the text of a file that are passed on.
const MAX_WARNINGS: usize = 5;

impl Structure {
    /// Reads the structures of a CIF, version 1.1 or 2.0, in the order of the file; `file` names it in messages.
    ///
    /// Never empty: a file without a block that has a cell and atoms is an error.
    ///
    /// # Errors
    /// A [`Diagnostic`] with line and column: no CIF, no structure (it says what is missing), a cell without volume,
    /// symmetry that is no group, an atom without element, a value that is no number or out of range.
    pub fn from_cif(bytes: &[u8], file: &str) -> Result<Vec<Self>, Diagnostic> {
        let document = cif::parse(bytes, file)?;
        let mut structures = Vec::new();
        let mut left_out = Vec::new();
        for (index, block) in document.blocks().enumerate() {
            let has_cell = aliases::find(block, "_cell.length_a").is_some();
            let has_atoms = atoms::table(block).is_some();
            match (has_cell, has_atoms) {
                (true, true) => structures.push(structure(block, index)?),
                (true, false) => {
                    left_out.push((block, "a cell but no atoms (`_atom_site_label`, `_atom_site_fract_x` …)"))
                }
                (false, true) => left_out.push((block, "atoms but no cell (`_cell_length_a` …)")),
                (false, false) => {}
            }
        }
        let Some(first) = structures.first_mut() else {
            let expected = "a data block with a cell and atoms";
            let Some((block, what)) = left_out.first() else {
                let place = document
                    .blocks()
                    .next()
                    .map_or_else(|| values::Location::new(file, 1, 1), |block| block.location());
                return Err(Diagnostic::new(
                    "a CIF without a structure: no data block has a cell or atoms",
                    expected,
                    "give the file that holds the structure (`_cell_length_a` …, `_atom_site_fract_x` …)",
                )
                .at(place));
            };
            return Err(Diagnostic::new(
                format!("the data block `{}` with {what}", block.name()),
                expected,
                "add what is missing, or give the file that holds the whole structure",
            )
            .at(block.location()));
        };
        for (block, what) in left_out {
            first.notes.push(format!("the data block `{}` has {what} and was left out", block.name()));
        }
        for warning in document.warnings().iter().take(MAX_WARNINGS) {
            let place = warning.location.as_ref().map_or(String::new(), |place| format!("line {}: ", place.line));
            first.notes.push(format!("{place}{}", warning.found));
        }
        Ok(structures)
    }
}

fn structure(block: cif::Block<'_>, index: usize) -> Result<Structure, Diagnostic> {
    let mut notes = Vec::new();
    let (cell, cell_u) = cell::read(block, &mut notes)?;
    let statement = symmetry::statement(block, &mut notes)?;
    let group = symmetry::group(block, &statement, &cell, &mut notes)?;
    let stated_formula =
        text(block, "_chemical_formula.sum").map(|text| text.split_whitespace().collect::<Vec<_>>().join(" "));
    let declared: Vec<&'static str> = stated_formula
        .as_deref()
        .and_then(formula::parse)
        .map_or_else(Vec::new, |parts| parts.into_iter().map(|(symbol, _)| symbol).collect());
    let stated_z = number(block, "_cell.formula_units_Z")?.filter(|z| *z > 0.0);
    let atoms::Read { atoms, multiplicities } = atoms::read(block, &cell, &declared, &mut notes)?;
    let name = if block.name().is_empty() { format!("block {}", index + 1) } else { block.name().to_owned() };
    let structure = Structure { name, cell, cell_u, group, atoms, notes, expansion: None, stated_formula, stated_z };
    let mut structure = checks::noted(origin::chosen(structure, &statement));
    multiplicity_contradictions(&mut structure, &multiplicities);
    density_contradiction(&mut structure, block)?;
    Ok(structure)
}

/// Multiplicities that the file states against those that the operations give.
fn multiplicity_contradictions(structure: &mut Structure, stated: &[Option<f64>]) {
    if stated.iter().all(Option::is_none) {
        return;
    }
    let wrong: Vec<String> = structure
        .expand()
        .iter()
        .zip(stated)
        .zip(&structure.atoms)
        .filter_map(|((site, stated), atom)| {
            let stated = (*stated)?;
            let differs = (stated - site.multiplicity as f64).abs() > 0.5;
            differs.then(|| format!("{} {stated} and {}", atom.label, site.multiplicity))
        })
        .collect();
    if !wrong.is_empty() {
        structure.notes.push(format!(
            "stated multiplicities differ from those of the operations, which were used: {}",
            crate::displacement::listed(&wrong)
        ));
    }
}

fn density_contradiction(structure: &mut Structure, block: cif::Block<'_>) -> Result<(), Diagnostic> {
    let Some(stated) = number(block, "_exptl_crystal.density_diffrn")?.filter(|density| *density > 0.0) else {
        return Ok(());
    };
    let Ok(found) = structure.density_g_cm3() else { return Ok(()) };
    // 3 %: stated densities are often given with two digits.
    if (found / stated - 1.0).abs() > 0.03 {
        structure.notes.push(format!(
            "the stated density {stated} g/cm³ differs from {found:.3} g/cm³, that of the atoms in the cell"
        ));
    }
    Ok(())
}

/// The one text of an item under any of its names; `None` for `?`, `.` and blank texts.
fn text(block: cif::Block<'_>, internal: &str) -> Option<String> {
    let value =
        aliases::spellings(internal).iter().find_map(|tag| block.get(tag).filter(|value| !value.is_missing()))?;
    let text = value.text()?.trim().to_owned();
    (!text.is_empty()).then_some(text)
}

/// The one number of an item under any of its names.
fn number(block: cif::Block<'_>, internal: &str) -> Result<Option<f64>, Diagnostic> {
    let value = aliases::spellings(internal).iter().find_map(|tag| block.get(tag).filter(|value| !value.is_missing()));
    Ok(value.map(cif::Value::number).transpose()?.flatten().map(|measured| measured.value))
}
