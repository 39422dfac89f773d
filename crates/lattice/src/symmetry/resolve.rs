//! What a file states of its symmetry, weighed: operations, then Hall symbol, Hermann–Mauguin symbol, number.

use super::settings::{SETTINGS, Setting};
use super::{Operation, SpaceGroup, SymmetryError, symbols};
use crate::Cell;

/// What a file states; anything may be missing.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct SymmetryStatement {
    /// Operations; empty if there are none.
    pub operations: Vec<Operation>,
    /// Hall symbol.
    pub hall: Option<String>,
    /// Hermann–Mauguin symbol.
    pub hm: Option<String>,
    /// Number in International Tables.
    pub number: Option<u16>,
}

/// The group that a statement leads to, with everything that was assumed or contradicts.
#[derive(Clone, Debug)]
pub struct Resolved {
    /// The group.
    pub group: SpaceGroup,
    /// Assumptions and contradictions, one sentence each.
    pub notes: Vec<String>,
}

/// Weighs a statement: operations win over the Hall symbol, that over the Hermann–Mauguin symbol, that over the number;
/// without any of them the group is P 1. The cell decides between axes that a symbol or number leaves open.
///
/// # Errors
/// [`SymmetryError`] when operations are given and are no group, or when nothing that is given can be read.
pub fn resolve(statement: &SymmetryStatement, cell: &Cell) -> Result<Resolved, SymmetryError> {
    let mut notes = Vec::new();
    let group = match choose(statement, cell, &mut notes)? {
        Some(group) => group,
        None => {
            notes.push(
                "no symmetry operations, Hall symbol, Hermann–Mauguin symbol or space-group number given: taken as P 1"
                    .to_owned(),
            );
            SpaceGroup::p1()
        }
    };
    contradictions(statement, &group, &mut notes);
    if let Err(misfit) = group.compatible(cell) {
        notes.push(misfit);
    }
    Ok(Resolved { group, notes })
}

/// The first item in the order of trust that can be read; `None` if none is given.
fn choose(
    statement: &SymmetryStatement,
    cell: &Cell,
    notes: &mut Vec<String>,
) -> Result<Option<SpaceGroup>, SymmetryError> {
    if !statement.operations.is_empty() {
        let group = SpaceGroup::from_operations(&statement.operations)?;
        let mut given = statement.operations.clone();
        given.sort_unstable();
        given.dedup();
        if given.len() < group.operations().len() {
            notes.push(format!(
                "the {} symmetry operations given generate {}: completed",
                given.len(),
                group.operations().len()
            ));
        }
        return Ok(Some(group));
    }
    let mut failure = None;
    if let Some(hall) = &statement.hall {
        match SpaceGroup::from_hall(hall) {
            Ok(group) => return Ok(Some(group)),
            Err(error) => failure = Some(error),
        }
    }
    if let Some(hm) = &statement.hm {
        match symbols::read(hm) {
            Ok(reading) => {
                let (group, setting) = fitting(&reading.settings, statement.number, cell);
                notes.extend(reading.note_on(setting));
                return Ok(Some(group));
            }
            Err(error) => failure = failure.or(Some(error)),
        }
    }
    if let Some(number) = statement.number {
        match SpaceGroup::from_number(number) {
            Ok(standard) => {
                let (group, setting) = by_number(number, standard, cell);
                notes.push(format!("space group {number} taken in the setting `{setting}`: only its number is known"));
                return Ok(Some(group));
            }
            Err(error) => failure = failure.or(Some(error)),
        }
    }
    match failure {
        Some(error) => Err(error),
        None => Ok(None),
    }
}

/// The first of several settings that has the number, if given, and fits the cell; else the first.
fn fitting<'a>(settings: &[&'a Setting], number: Option<u16>, cell: &Cell) -> (SpaceGroup, &'a Setting) {
    let right_number = |setting: &&&Setting| number.is_none_or(|n| n == setting.number);
    for setting in settings.iter().filter(right_number) {
        let group = SpaceGroup::from_setting(setting);
        if group.compatible(cell).is_ok() {
            return (group, setting);
        }
    }
    let first = settings.iter().find(right_number).unwrap_or(&settings[0]);
    (SpaceGroup::from_setting(first), first)
}

/// The standard setting of a number if it fits the cell, else the first other that does: rhombohedral axes, another
/// unique axis.
fn by_number(number: u16, standard: SpaceGroup, cell: &Cell) -> (SpaceGroup, String) {
    if standard.compatible(cell).is_err() {
        for setting in SETTINGS.iter().filter(|s| s.number == number && !s.standard && s.mark() != Some("1")) {
            let group = SpaceGroup::from_setting(setting);
            if group.compatible(cell).is_ok() {
                return (group, setting.xhm.to_owned());
            }
        }
    }
    let name = standard.xhm().to_owned();
    (standard, name)
}

/// Names what disagrees with the group that was taken.
fn contradictions(statement: &SymmetryStatement, group: &SpaceGroup, notes: &mut Vec<String>) {
    let taken = if statement.operations.is_empty() { "space group" } else { "the operations: space group" };
    if let Some(hall) = &statement.hall {
        match SpaceGroup::from_hall(hall) {
            Ok(other) if other == *group => {}
            Ok(_) => notes.push(format!("Hall symbol `{hall}` contradicts {taken} `{group}`, which is used")),
            Err(error) => notes.push(format!("Hall symbol `{hall}` is not used: {}", error.found)),
        }
    }
    if let Some(hm) = &statement.hm {
        match symbols::read(hm) {
            Ok(reading) if reading.settings.iter().any(|s| SpaceGroup::from_setting(s) == *group) => {}
            Ok(_) => notes.push(format!("symbol `{hm}` contradicts {taken} `{group}`, which is used")),
            Err(error) => notes.push(format!("symbol `{hm}` is not used: {}", error.found)),
        }
    }
    match (statement.number, group.number()) {
        (Some(stated), Some(found)) if stated != found => {
            notes.push(format!(
                "space-group number {stated} contradicts {taken} `{group}`, number {found}, which is used"
            ));
        }
        _ => {}
    }
}
