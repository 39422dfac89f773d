//! Groups with two origins, where a file names none: the formula decides if it can.

use lattice::{SpaceGroup, SymmetryStatement};

use crate::{Structure, checks};

/// The structure on the origin that its formula fits. Origin 2 was taken if nothing else was said; where the content of the
/// cell fits the formula only on origin 1, that one is taken and noted.
pub(super) fn chosen(structure: Structure, statement: &SymmetryStatement) -> Structure {
    let settled = !statement.operations.is_empty()
        || statement.hall.is_some()
        || statement.hm.as_deref().is_some_and(|symbol| symbol.contains(':'));
    let Some(base) = structure.group.xhm().strip_suffix(":2").filter(|_| !settled) else { return structure };
    if checks::fits_formula(&structure) != Some(false) {
        return structure;
    }
    let symbol = format!("{base}:1");
    let Ok((group, _)) = SpaceGroup::from_symbol(&symbol) else { return structure };
    let mut other = Structure { group, ..structure.clone() };
    if checks::fits_formula(&other) != Some(true) {
        return structure;
    }
    // What was said about the origin before does not hold any more.
    other.notes.retain(|note| !note.contains("origin choice"));
    other
        .notes
        .push(format!("the origin is not given; the atoms fit the formula only on origin 1, and `{symbol}` was taken"));
    other
}
