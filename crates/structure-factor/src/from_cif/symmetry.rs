//! What a data block states of its symmetry.

use cif::{Block, aliases};
use lattice::{Cell, CrystalSystem, Operation, SpaceGroup, SymmetryError, SymmetryStatement, resolve};
use values::Diagnostic;

const OPERATIONS: &str = "_space_group_symop.operation_xyz";
const NAMES: [&str; 3] = ["_space_group.name_H-M_alt", "_space_group.name_H-M_full", "_space_group.name_H-M_ref"];
/// More operations than any group has (192), with room for repeated ones.
const MAX_OPERATIONS: usize = 1000;

/// Operations, symbols and number under any of their names; `?` and `.` count as not given.
pub(super) fn statement(block: Block<'_>, notes: &mut Vec<String>) -> Result<SymmetryStatement, Diagnostic> {
    let mut statement = SymmetryStatement::default();
    if let Some((tag, column)) = aliases::find(block, OPERATIONS) {
        if column.len() > MAX_OPERATIONS {
            return Err(Diagnostic::new(
                format!("{} symmetry operations", column.len()),
                "at most 192, as the largest groups have",
                "list the operations of the group once",
            )
            .at(block.tag_location(tag).unwrap_or_else(|| block.location())));
        }
        for value in column.iter().filter(|value| !value.is_missing()) {
            let place = value.location();
            let Some(text) = value.text() else {
                return Err(
                    Diagnostic::new("a list or table", "an operation such as x,y,z", "write it as text").at(place)
                );
            };
            statement.operations.push(Operation::parse(&text).map_err(|error| Diagnostic::from(error).at(place))?);
        }
    }
    statement.hall = super::text(block, "_space_group.name_Hall");
    statement.hm = NAMES.iter().find_map(|name| super::text(block, name)).filter(|text| !is_unknown(text));
    if let Some(number) = super::number(block, "_space_group.IT_number")? {
        if (1.0..=230.0).contains(&number) && (number - number.round()).abs() < 1e-9 {
            // In range: the cast loses nothing.
            statement.number = Some(number.round() as u16);
        } else {
            notes.push(format!("the space-group number {number} does not exist and was left out"));
        }
    }
    Ok(statement)
}

fn is_unknown(text: &str) -> bool {
    ["?", ".", "unknown", "none", "n/a"].iter().any(|word| word.eq_ignore_ascii_case(text))
}

/// The group of a statement, with notes on what was assumed and what contradicts.
pub(super) fn group(
    block: Block<'_>,
    statement: &SymmetryStatement,
    cell: &Cell,
    notes: &mut Vec<String>,
) -> Result<SpaceGroup, Diagnostic> {
    let resolved = resolve(statement, cell).map_err(|error: SymmetryError| {
        let tags = if statement.operations.is_empty() {
            ["_space_group.name_Hall", NAMES[0], NAMES[1], NAMES[2], "_space_group.IT_number"].to_vec()
        } else {
            vec![OPERATIONS]
        };
        let given = tags.iter().find_map(|internal| {
            let (tag, column) = aliases::find(block, internal)?;
            let value = column.get(0).filter(|value| !value.is_missing())?;
            Some(if column.len() > 1 { block.tag_location(tag)? } else { value.location() })
        });
        Diagnostic::from(error).at(given.unwrap_or_else(|| block.location()))
    })?;
    notes.extend(resolved.notes);
    if let Some(stated) = super::text(block, "_space_group.crystal_system") {
        let system = resolved.group.system();
        if !agrees(&stated.to_lowercase(), system) {
            notes.push(format!(
                "the stated system `{stated}` contradicts the space group `{}`, which is {system}",
                resolved.group.xhm()
            ));
        }
    }
    Ok(resolved.group)
}

/// A cell setting may say `hexagonal` or `rhombohedral` of a trigonal group. Words that name no system say nothing.
fn agrees(stated: &str, system: CrystalSystem) -> bool {
    use CrystalSystem as S;
    match stated {
        "triclinic" => system == S::Triclinic,
        "monoclinic" => system == S::Monoclinic,
        "orthorhombic" => system == S::Orthorhombic,
        "tetragonal" => system == S::Tetragonal,
        "trigonal" | "rhombohedral" => system == S::Trigonal,
        "hexagonal" => matches!(system, S::Hexagonal | S::Trigonal),
        "cubic" | "isometric" => system == S::Cubic,
        _ => true,
    }
}
