//! Displacement parameters of atoms: tensors in their own loop (U, then B, then β), then U, then B.

use std::collections::HashMap;
use std::f64::consts::PI;

use cif::{Block, Column, Value, aliases};
use lattice::Cell;
use values::Diagnostic;

use super::atoms::Table;
use crate::Displacement;
use crate::displacement::{B_OF_U, Grouped, doubt, listed};

/// U11, U22, U33, U12, U13, U23 by label, Å².
pub(super) type Tensors = HashMap<String, [f64; 6]>;

/// Rows and columns of the six elements, and how names end.
const ELEMENTS: [(usize, usize, &str); 6] =
    [(0, 0, "11"), (1, 1, "22"), (2, 2, "33"), (0, 1, "12"), (0, 2, "13"), (1, 2, "23")];

/// Reads the tensors, as U, B or β, whatever the order of their columns and rows.
///
/// `T = exp{−(β11 h² + … + 2 β12 h k + …)}`, `βᵢⱼ = 2π² a*ᵢ a*ⱼ Uᵢⱼ`. No dictionary has names for β; files that give it
/// write `_atom_site_aniso_beta_11` (common practice, no source).
pub(super) fn tensors(
    block: Block<'_>,
    cell: &Cell,
    atoms: &Table<'_>,
    notes: &mut Vec<String>,
) -> Result<Tensors, Diagnostic> {
    let star: [f64; 3] = std::array::from_fn(|i| cell.reciprocal_metric()[i][i].sqrt());
    let beta = ELEMENTS.map(|(i, j, _)| 2.0 * PI * PI * star[i] * star[j]);
    let mut tensors = Tensors::new();
    // U is read last and wins.
    for (kind, per_u) in [("beta", beta), ("B", [B_OF_U; 6]), ("U", [1.0; 6])] {
        let columns = ELEMENTS.map(|(_, _, element)| column(block, kind, element));
        if columns.iter().all(Option::is_none) {
            continue;
        }
        let Some(columns): Option<Vec<Column<'_>>> = columns.into_iter().collect() else {
            notes.push(format!("the tensors {kind}ij are incomplete (six columns make one) and were left out"));
            continue;
        };
        let Some(labels) = labels(block, atoms, kind).filter(|labels| columns.iter().all(|c| c.len() == labels.len()))
        else {
            notes.push(format!("the tensors {kind}ij stand without labels of their own and were left out"));
            continue;
        };
        read_rows(&labels, &columns, per_u, &mut tensors, notes)?;
    }
    note_strangers(&tensors, atoms, notes);
    Ok(tensors)
}

fn column<'a>(block: Block<'a>, kind: &str, element: &str) -> Option<Column<'a>> {
    let internal = format!("_atom_site_aniso.{kind}_{element}");
    aliases::find(block, &internal)
        .map(|(_, column)| column)
        .or_else(|| block.column(&internal))
        .or_else(|| block.column(&internal.replacen('.', "_", 1)))
}

/// Labels of the tensors: their own, or those of the atoms where both stand in one loop.
fn labels(block: Block<'_>, atoms: &Table<'_>, kind: &str) -> Option<Vec<String>> {
    if let Some((_, own)) = aliases::find(block, "_atom_site_aniso.label") {
        return Some(
            own.iter().map(|value| value.text().map_or(String::new(), |text| text.trim().to_owned())).collect(),
        );
    }
    let column = atoms.column(&format!("_atom_site_aniso.{kind}_11"))?;
    Some((0..column.len()).map(|row| atoms.label(row)).collect())
}

fn read_rows(
    labels: &[String],
    columns: &[Column<'_>],
    per_u: [f64; 6],
    tensors: &mut Tensors,
    notes: &mut Vec<String>,
) -> Result<(), Diagnostic> {
    let mut seen = HashMap::new();
    let mut incomplete = Vec::new();
    for (row, label) in labels.iter().enumerate() {
        let mut tensor = [0.0; 6];
        let mut given = 0;
        for ((slot, column), per_u) in tensor.iter_mut().zip(columns).zip(per_u) {
            if let Some(measured) = column.get(row).map(Value::number).transpose()?.flatten() {
                *slot = measured.value / per_u;
                given += 1;
            }
        }
        match given {
            6 => {
                if let Some(first) = seen.insert(label.clone(), row) {
                    let place = columns[0].get(row).map(Value::location);
                    let message = Diagnostic::new(
                        format!("a second displacement tensor of `{label}` (the first is in row {})", first + 1),
                        "one tensor for each label",
                        "give each atom a label of its own, or remove one of the two",
                    );
                    return Err(match place {
                        Some(place) => message.at(place),
                        None => message,
                    });
                }
                tensors.insert(label.clone(), tensor);
            }
            0 => {}
            _ => incomplete.push(label.clone()),
        }
    }
    if !incomplete.is_empty() {
        notes.push(format!("displacement tensors with missing elements were left out: {}", listed(&incomplete)));
    }
    Ok(())
}

/// Tensors whose label no atom has.
fn note_strangers(tensors: &Tensors, atoms: &Table<'_>, notes: &mut Vec<String>) {
    if tensors.is_empty() {
        return;
    }
    let rows = atoms.column("_atom_site.fract_x").map_or(0, Column::len);
    let known: std::collections::HashSet<String> = (0..rows).map(|row| atoms.label(row)).collect();
    let mut strangers: Vec<String> = tensors.keys().filter(|label| !known.contains(*label)).cloned().collect();
    strangers.sort_unstable();
    if !strangers.is_empty() {
        notes.push(format!("displacement tensors of atoms that are not listed were left out: {}", listed(&strangers)));
    }
}

/// Displacement of the atom in a row; `None` where nothing is given.
pub(super) fn of_atom(
    table: &Table<'_>,
    row: usize,
    label: &str,
    tensors: &Tensors,
    findings: &mut Grouped,
) -> Result<Option<Displacement>, Diagnostic> {
    let u = table.number("_atom_site.U_iso_or_equiv", row)?.map(|measured| measured.value);
    let b = table.number("_atom_site.B_iso_or_equiv", row)?.map(|measured| measured.value);
    let kind = table.column("_atom_site.ADP_type").and_then(|column| column.get(row)).and_then(Value::text);
    let kind = kind.unwrap_or_default().trim().to_lowercase();
    let displacement = match (tensors.get(label), u, b) {
        (Some(tensor), _, _) => {
            if kind.ends_with("iso") {
                findings.add("marked isotropic, but the displacement tensor was used", label.to_owned());
            }
            Displacement::Anisotropic(*tensor)
        }
        (None, Some(u), b) => {
            if let Some(b) = b.filter(|b| (b - B_OF_U * u).abs() > 0.02 * b.abs().max(B_OF_U * u.abs()) + 0.05) {
                findings.add("U and B differ (B = 8π²U), and U was used", format!("{label} (U {u}, B {b} Å²)"));
            }
            Displacement::IsotropicB(B_OF_U * u)
        }
        (None, None, Some(b)) => Displacement::IsotropicB(b),
        (None, None, None) => return Ok(None),
    };
    if kind.ends_with("ani") && matches!(displacement, Displacement::IsotropicB(_)) {
        findings.add("marked anisotropic without a tensor, so that the isotropic value was used", label.to_owned());
    }
    if kind == "umpe" {
        findings
            .add("multipole expansion of the displacement, of which only the second order was used", label.to_owned());
    }
    doubt(label, displacement, findings);
    Ok(Some(displacement))
}
