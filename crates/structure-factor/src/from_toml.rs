//! Structures from the short TOML format that `docs/structure-toml.md` describes.
//!
//! The format is our own, so its reader is strict: an unknown key, a contradiction or a number out of range is an error at
//! its line and column, never a note.

mod reader;
mod site;

use std::ops::RangeInclusive;

use lattice::{AxisSystem, Cell, SpaceGroup, SymmetryStatement, resolve};
use toml::Spanned;
use toml::de::{DeTable, DeValue};
use values::{Diagnostic, Measured};

use crate::{Expansion, Structure, checks, formula};
use reader::Reader;

const KEYS: [&str; 11] = [
    "name",
    "cell",
    "space_group",
    "hall_symbol",
    "sites",
    "formula",
    "formula_units",
    "expansion_per_K",
    "u_expansion_per_K",
    "reference_C",
    "comment",
];

impl Structure {
    /// Reads a structure in TOML; `file` names it in messages.
    ///
    /// # Errors
    /// A [`Diagnostic`] with line and column: text that is no TOML, an unknown or missing key, a value of the wrong type, a
    /// number that is not finite or out of range, a cell that does not fit the space group, an unknown element or symbol.
    pub fn from_toml(text: &str, file: &str) -> Result<Self, Diagnostic> {
        let reader = Reader::new(text, file);
        let document = reader.parse()?;
        let table = document.get_ref();
        reader.only_keys(table, &KEYS, "a structure")?;
        let name = match table.get("name") {
            Some(value) => reader.text(value, "name")?.to_owned(),
            None => stem(file).to_owned(),
        };
        let statement = symmetry(&reader, table)?;
        let (cell, cell_at) = cell(&reader, table, &statement)?;
        let resolved = resolve(&statement, &cell).map_err(|error| {
            let key = if statement.hall.is_some() { "hall_symbol" } else { "space_group" };
            reader.at_key(table, key, Diagnostic::from(error))
        })?;
        if let Err(misfit) = resolved.group.compatible(&cell) {
            return Err(Diagnostic::new(misfit, "a cell of that shape", "correct the cell or the space group")
                .at(reader.place(cell_at.span())));
        }
        let mut notes = resolved.notes;
        let stated_formula = table.get("formula").map(|value| reader.text(value, "formula")).transpose()?;
        if let (Some(text), Some(value)) = (stated_formula, table.get("formula")) {
            formula::parse(text).ok_or_else(|| {
                Diagnostic::new(
                    format!("the formula `{text}`"),
                    "elements with their numbers",
                    "write it like `Ce0.9 Gd0.1 O1.95`",
                )
                .at(reader.place(value.span()))
            })?;
        }
        let stated_z =
            table.get("formula_units").map(|value| reader.number(value, "formula_units", 1e-9..=1e9)).transpose()?;
        let atoms = site::atoms(&reader, table, &mut notes)?;
        let expansion = expansion(&reader, table, &resolved.group, &mut notes)?;
        let structure = Self {
            name,
            cell,
            cell_u: None,
            group: resolved.group,
            atoms,
            notes,
            expansion,
            stated_formula: stated_formula.map(str::to_owned),
            stated_z,
        };
        Ok(checks::noted(structure))
    }
}

/// Name of a file without folder and ending.
fn stem(file: &str) -> &str {
    let name = file.rsplit(['/', '\\']).next().unwrap_or(file);
    name.rsplit_once('.').map_or(name, |(stem, _)| if stem.is_empty() { name } else { stem })
}

fn symmetry(reader: &Reader<'_>, table: &DeTable<'_>) -> Result<SymmetryStatement, Diagnostic> {
    let mut statement = SymmetryStatement::default();
    match (table.get("space_group"), table.get("hall_symbol")) {
        (Some(value), None) => match value.get_ref() {
            DeValue::Integer(_) => {
                let number = reader.number(value, "space_group", 1.0..=230.0)?;
                // In range: the cast loses nothing.
                statement.number = Some(number as u16);
            }
            DeValue::String(symbol) => statement.hm = Some(symbol.clone().into_owned()),
            _ => {
                return Err(reader.wrong_type(
                    value,
                    "space_group",
                    "a symbol such as \"F m -3 m\", or a number from 1 to 230",
                ));
            }
        },
        (None, Some(value)) => statement.hall = Some(reader.text(value, "hall_symbol")?.to_owned()),
        (Some(_), Some(second)) => {
            return Err(Diagnostic::new(
                "both `space_group` and `hall_symbol`",
                "one of the two",
                "remove one of them",
            )
            .at(reader.place(second.span())));
        }
        (None, None) => {
            return Err(reader.missing("space_group", "add a line such as `space_group = \"F m -3 m\"`"));
        }
    }
    Ok(statement)
}

/// The cell: six numbers, or a table whose missing entries follow from the space group.
fn cell<'t, 'i>(
    reader: &Reader<'_>,
    table: &'t DeTable<'i>,
    statement: &SymmetryStatement,
) -> Result<(Cell, &'t Spanned<DeValue<'i>>), Diagnostic> {
    const NAMES: [&str; 6] = ["a", "b", "c", "alpha", "beta", "gamma"];
    let example = "add a line such as `cell = [5.41, 5.41, 5.41, 90, 90, 90]` (Å, degrees)";
    let value = table.get("cell").ok_or_else(|| reader.missing("cell", example))?;
    let range = |index: usize| if index < 3 { 0.1..=1e5 } else { 1.0..=179.0 };
    let parameters = match value.get_ref() {
        DeValue::Array(_) => {
            let six: [f64; 6] = reader.numbers(value, "cell", range)?;
            six
        }
        DeValue::Table(entries) => {
            reader.only_keys(entries, &NAMES, "a cell")?;
            let mut given = [None; 6];
            for (index, slot) in given.iter_mut().enumerate() {
                *slot = entries
                    .get(NAMES[index])
                    .map(|entry| reader.number(entry, NAMES[index], range(index)))
                    .transpose()?;
            }
            completed(given, statement).ok_or_else(|| {
                let missing: Vec<&str> =
                    NAMES.iter().zip(&given).filter(|(_, v)| v.is_none()).map(|(n, _)| *n).collect();
                Diagnostic::new(
                    format!("a cell without {}", missing.join(", ")),
                    "every parameter that the space group does not fix",
                    "add them, or give all six as `cell = [a, b, c, alpha, beta, gamma]`",
                )
                .at(reader.place(value.span()))
            })?
        }
        _ => return Err(reader.wrong_type(value, "cell", "six numbers, or a table such as `{ a = 5.41 }`")),
    };
    let [a, b, c, alpha, beta, gamma] = parameters;
    let cell = Cell::new(a, b, c, alpha, beta, gamma).map_err(|error| {
        let text = error.to_string();
        let (found, expected) = text.split_once("; expected ").unwrap_or((&text, "a cell with a volume"));
        Diagnostic::new(found, expected, "correct the cell").at(reader.place(value.span()))
    })?;
    Ok((cell, value))
}

/// Fills in what symmetry fixes. Without a symbol that can be read nothing is filled in.
fn completed(given: [Option<f64>; 6], statement: &SymmetryStatement) -> Option<[f64; 6]> {
    use lattice::CrystalSystem as S;
    let [a, b, c, alpha, beta, gamma] = given;
    if let [Some(a), Some(b), Some(c), Some(alpha), Some(beta), Some(gamma)] = given {
        return Some([a, b, c, alpha, beta, gamma]);
    }
    // Any cell serves to resolve the symbol; only its system is asked for.
    let group = resolve(statement, &Cell::cubic(5.0).ok()?).ok()?.group;
    let right = |angle: Option<f64>| angle.unwrap_or(90.0);
    let rhombohedral = group.xhm().ends_with(":R");
    match group.system() {
        S::Cubic => Some([a?, b.or(a)?, c.or(a)?, right(alpha), right(beta), right(gamma)]),
        S::Trigonal if rhombohedral => Some([a?, b.or(a)?, c.or(a)?, alpha?, beta.or(alpha)?, gamma.or(alpha)?]),
        S::Trigonal | S::Hexagonal => Some([a?, b.or(a)?, c?, right(alpha), right(beta), gamma.unwrap_or(120.0)]),
        S::Tetragonal => Some([a?, b.or(a)?, c?, right(alpha), right(beta), right(gamma)]),
        S::Orthorhombic => Some([a?, b?, c?, right(alpha), right(beta), right(gamma)]),
        // One of the three angles is free; which one, the file has to say.
        S::Monoclinic if alpha.or(beta).or(gamma).is_some() => {
            Some([a?, b?, c?, right(alpha), right(beta), right(gamma)])
        }
        S::Monoclinic | S::Triclinic => None,
    }
}

fn expansion(
    reader: &Reader<'_>,
    table: &DeTable<'_>,
    group: &SpaceGroup,
    notes: &mut Vec<String>,
) -> Result<Option<Expansion>, Diagnostic> {
    let reference = table.get("reference_C").map(|v| reader.number(v, "reference_C", -273.15..=5000.0)).transpose()?;
    let Some(value) = table.get("expansion_per_K") else {
        if let Some(u) = table.get("u_expansion_per_K") {
            return Err(Diagnostic::new(
                "`u_expansion_per_K` alone",
                "`expansion_per_K` beside it",
                "add it, or remove this key",
            )
            .at(reader.place(u.span())));
        }
        return Ok(None);
    };
    let range = -1e-2..=1e-2;
    let per_axis = |value: &Spanned<DeValue<'_>>, key: &'static str, range: RangeInclusive<f64>| {
        if value.get_ref().is_array() {
            reader.numbers(value, key, |_| range.clone())
        } else {
            reader.number(value, key, range).map(|x| [x; 3])
        }
    };
    let alpha = per_axis(value, "expansion_per_K", range)?;
    if let Some((i, j)) = equal_axes(group).iter().find(|(i, j)| (alpha[*i] - alpha[*j]).abs() > 1e-9 * alpha[*i].abs())
    {
        let names = ["a", "b", "c"];
        return Err(Diagnostic::new(
            format!("`expansion_per_K` with different values along {} and {}", names[*i], names[*j]),
            "one value along axes that symmetry makes equal",
            "give them the same value; a mean over the axes is a third of the expansion of the volume",
        )
        .at(reader.place(value.span())));
    }
    let u = table.get("u_expansion_per_K").map(|v| per_axis(v, "u_expansion_per_K", 0.0..=1e-2)).transpose()?;
    if u.is_none() {
        notes.push("expansion_per_K stands without u_expansion_per_K; it was taken as exact".to_owned());
    }
    let u = u.unwrap_or_default();
    let per_kelvin = std::array::from_fn(|axis| Measured::new(alpha[axis], u[axis]));
    let reference_celsius = reference.ok_or_else(|| {
        Diagnostic::new(
            "`expansion_per_K` without `reference_C`",
            "the temperature in °C that the cell belongs to",
            "add a line such as `reference_C = 22.5`",
        )
        .at(reader.place(value.span()))
    })?;
    Ok(Some(Expansion { per_kelvin, reference_celsius }))
}

/// Pairs of axes that the group makes equal.
fn equal_axes(group: &SpaceGroup) -> &'static [(usize, usize)] {
    match AxisSystem::from_group(group) {
        AxisSystem::Cubic | AxisSystem::Rhombohedral => &[(0, 1), (0, 2)],
        AxisSystem::Hexagonal | AxisSystem::Tetragonal { unique: 2 } => &[(0, 1)],
        AxisSystem::Tetragonal { unique: 1 } => &[(0, 2)],
        AxisSystem::Tetragonal { .. } => &[(1, 2)],
        _ => &[],
    }
}
