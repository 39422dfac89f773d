//! The cell of a data block.

use cif::{Block, Value, aliases};
use lattice::{Cell, CellError};
use values::Diagnostic;

const EDGES: [&str; 3] = ["_cell.length_a", "_cell.length_b", "_cell.length_c"];
const ANGLES: [&str; 3] = ["_cell.angle_alpha", "_cell.angle_beta", "_cell.angle_gamma"];

/// Reads the six parameters and their s.u., where any is stated; an angle that is missing is 90°, the default of the core
/// dictionary, and noted.
pub(super) fn read(block: Block<'_>, notes: &mut Vec<String>) -> Result<(Cell, Option<[f64; 6]>), Diagnostic> {
    let mut parameters = [90.0; 6];
    let mut u = [0.0; 6];
    let mut values = [None; 6];
    for (index, internal) in EDGES.iter().chain(&ANGLES).enumerate() {
        values[index] = one(block, internal)?;
        let number = values[index].map(Value::number).transpose()?.flatten();
        match number {
            Some(measured) => {
                parameters[index] = measured.value;
                u[index] = measured.u;
            }
            None if index >= 3 => notes.push(format!("`{}` is not given and was taken as 90°", old_name(internal))),
            None => {
                return Err(Diagnostic::new(
                    format!("a cell without `{}`", old_name(internal)),
                    "three edges in Å",
                    "add it to the data block",
                )
                .at(values[index].map_or_else(|| block.location(), Value::location)));
            }
        }
    }
    let [a, b, c, alpha, beta, gamma] = parameters;
    let cell = Cell::new(a, b, c, alpha, beta, gamma).map_err(|error| {
        let named = match error {
            CellError::Edge { name, .. } => ["a", "b", "c"].iter().position(|edge| *edge == name),
            CellError::Angle { name, .. } => {
                ["alpha", "beta", "gamma"].iter().position(|angle| *angle == name).map(|i| i + 3)
            }
            _ => Some(3),
        };
        let text = error.to_string();
        let (found, expected) = text.split_once("; expected ").unwrap_or((&text, "a cell with a volume"));
        let place = named.and_then(|index| values[index]).map_or_else(|| block.location(), Value::location);
        Diagnostic::new(found, expected, "correct the cell").at(place)
    })?;
    volume_contradiction(block, &cell, notes)?;
    Ok((cell, u.iter().any(|x| *x > 0.0).then_some(u)))
}

/// The one value of an item.
fn one<'a>(block: Block<'a>, internal: &str) -> Result<Option<Value<'a>>, Diagnostic> {
    let Some((tag, column)) = aliases::find(block, internal) else { return Ok(None) };
    if column.len() > 1 {
        let message =
            Diagnostic::new(format!("{} values of `{tag}`", column.len()), "one cell in a data block", "keep one");
        return Err(message.at(column.get(1).map_or_else(|| block.location(), Value::location)));
    }
    Ok(column.get(0))
}

/// The name as most files have it.
fn old_name(internal: &str) -> String {
    internal.replacen('.', "_", 1)
}

fn volume_contradiction(block: Block<'_>, cell: &Cell, notes: &mut Vec<String>) -> Result<(), Diagnostic> {
    let Some(stated) = super::number(block, "_cell.volume")?.filter(|volume| *volume > 0.0) else { return Ok(()) };
    let found = cell.volume();
    // Half a percent: volumes are given with their own rounding, a wrong axis changes more.
    if (found / stated - 1.0).abs() > 0.005 {
        notes.push(format!(
            "the stated volume {stated} Å³ differs from {found:.3} Å³, that of the cell, which was used"
        ));
    }
    Ok(())
}
