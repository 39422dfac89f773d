//! The emission lines of `data/radiation.csv`, read once.

use std::sync::OnceLock;

use values::{Table, Wavelength};

/// An emission line of an X-ray tube.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EmissionLine {
    /// Usual name: `Ka1`, `Ka2`, `Kb13` (both of an unresolved pair), `Kb1`, `Kb3`, `La1` …
    pub name: &'static str,
    /// Name by levels: `KL3` for Kα1.
    pub iupac: &'static str,
    /// Wavelength of the maximum.
    pub wavelength: Wavelength,
    /// Standard uncertainty of the wavelength in Å.
    pub u_angstrom: f64,
    /// Photons relative to the strongest line of the shell (Kα1, Lα1), integrated over the line.
    pub relative: f64,
    /// Whether the wavelength was seen in its source, or stands here from memory.
    pub verified: bool,
}

/// A line of the table with the anode it belongs to.
#[derive(Clone, Copy, Debug)]
pub(crate) struct TableLine {
    pub(crate) anode: &'static str,
    pub(crate) line: EmissionLine,
}

const TEXT: &str = include_str!("../../../data/radiation.csv");

/// All lines, in the order of the file. A line without a relative intensity is taken as 0 there: it is looked for as a
/// ghost only, never added to a pattern.
pub(crate) fn lines() -> &'static [TableLine] {
    static LINES: OnceLock<Vec<TableLine>> = OnceLock::new();
    // The file is part of the program, and tests/radiation_table.rs reads every row: a fault can't reach a user.
    LINES.get_or_init(|| read(TEXT).expect("data/radiation.csv is read by the tests"))
}

fn read(text: &'static str) -> Option<Vec<TableLine>> {
    let table = Table::parse(text, "data/radiation.csv").ok()?;
    let column = |name| table.column(name);
    let (anode, line, iupac) = (column("anode")?, column("line")?, column("iupac")?);
    let (wavelength, u, relative) = (column("wavelength_angstrom")?, column("u_angstrom")?, column("relative")?);
    let mark = column("mark")?;
    table
        .rows
        .iter()
        .map(|row| {
            let share = row.fields[relative];
            Some(TableLine {
                anode: row.fields[anode],
                line: EmissionLine {
                    name: row.fields[line],
                    iupac: row.fields[iupac],
                    wavelength: Wavelength::from_angstrom(row.fields[wavelength].parse().ok()?)?,
                    u_angstrom: row.fields[u].parse().ok()?,
                    relative: if share.is_empty() { 0.0 } else { share.parse().ok()? },
                    verified: row.fields[mark] == "verified",
                },
            })
        })
        .collect()
}

/// Lines of tungsten, which an old tube's filament leaves on the anode: they appear beside the lines of the anode.
///
/// The third, `Lb1`, has no relative intensity in the table (it belongs to another shell) and carries 0.
#[must_use]
pub fn tungsten_lines() -> Vec<EmissionLine> {
    lines().iter().filter(|l| l.anode == "W").map(|l| l.line).collect()
}
