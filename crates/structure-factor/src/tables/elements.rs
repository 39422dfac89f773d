//! Elements: symbols, atomic numbers, masses (`data/atomic_masses.csv`).

use std::sync::OnceLock;

use values::Table;

use crate::StructureFactorError;

struct Element {
    symbol: &'static str,
    number: u8,
    mass: f64,
}

fn elements() -> &'static [Element] {
    static ELEMENTS: OnceLock<Vec<Element>> = OnceLock::new();
    // The file is part of the program and tests/atomic_masses.rs reads every row: a fault can't reach a user.
    ELEMENTS.get_or_init(|| read().expect("data/atomic_masses.csv is read by the tests"))
}

fn read() -> Option<Vec<Element>> {
    let table = Table::parse(include_str!("../../../../data/atomic_masses.csv"), "data/atomic_masses.csv").ok()?;
    let (symbol, number, mass) = (table.column("element")?, table.column("z")?, table.column("mass")?);
    let row = |r: &values::Row<'static>| {
        Some(Element {
            symbol: r.fields[symbol],
            number: r.fields[number].parse().ok()?,
            mass: r.fields[mass].parse().ok()?,
        })
    };
    table.rows.iter().map(row).collect()
}

fn find(symbol: &str) -> Result<&'static Element, StructureFactorError> {
    elements()
        .iter()
        .find(|e| e.symbol == symbol)
        .ok_or_else(|| StructureFactorError::UnknownElement { symbol: symbol.to_owned() })
}

/// Mass of an element in g/mol: its standard atomic weight. `D` and `T` have the masses of their isotopes.
///
/// # Errors
/// [`StructureFactorError::UnknownElement`] for a symbol that is not in the table (H to Og, D, T; usual letters, `Fe`).
pub fn atomic_mass(symbol: &str) -> Result<f64, StructureFactorError> {
    find(symbol).map(|e| e.mass)
}

/// Number of protons; 1 for `D` and `T`.
///
/// # Errors
/// [`StructureFactorError::UnknownElement`] as in [`atomic_mass`].
pub fn atomic_number(symbol: &str) -> Result<u8, StructureFactorError> {
    find(symbol).map(|e| e.number)
}

/// The usual spelling of a symbol written in any case: `FE` → `Fe`; `None` when it names no element.
#[must_use]
pub fn element_symbol(text: &str) -> Option<&'static str> {
    elements().iter().find(|e| e.symbol.eq_ignore_ascii_case(text)).map(|e| e.symbol)
}
