//! Scattering factors f0 of free atoms and ions (`data/scattering_factors.csv`).

use std::sync::OnceLock;

use values::Table;

use super::elements::atomic_number;
use crate::StructureFactorError;

/// Largest `s = sin θ/λ` of the fit, Å⁻¹.
pub const S_MAX: f64 = 2.0;

/// Nine coefficients, `f0(s) = c + Σᵢ aᵢ exp(−bᵢ s²)`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ScatteringFactor {
    /// aᵢ in electrons.
    pub a: [f64; 4],
    /// bᵢ in Å².
    pub b: [f64; 4],
    /// c in electrons.
    pub c: f64,
}

impl ScatteringFactor {
    /// f0 in electrons at `s² = (sin θ/λ)²` in Å⁻². Holds up to s = [`S_MAX`]; the caller checks.
    #[must_use]
    pub fn at_s_squared(&self, s_squared: f64) -> f64 {
        self.c + self.a.iter().zip(self.b).map(|(a, b)| a * (-b * s_squared).exp()).sum::<f64>()
    }
}

/// Rows whose fit is wrong beyond low angles, judged by the neutral atom (an ion has the same core) and by another fit; kept as
/// the source has them. At s = 1 Å⁻¹ they are 9 % and 23 % low.
const DOUBTFUL: [(&str, i8); 2] = [("Ru", 4), ("Bi", 5)];

struct Row {
    element: &'static str,
    charge: i8,
    factor: ScatteringFactor,
}

fn rows() -> &'static [Row] {
    static ROWS: OnceLock<Vec<Row>> = OnceLock::new();
    // The file is part of the program and tests/f0_table.rs reads every row: a fault can't reach a user.
    ROWS.get_or_init(|| read().expect("data/scattering_factors.csv is read by the tests"))
}

fn read() -> Option<Vec<Row>> {
    let text = include_str!("../../../../data/scattering_factors.csv");
    let table = Table::parse(text, "data/scattering_factors.csv").ok()?;
    let (element, charge, c) = (table.column("element")?, table.column("charge")?, table.column("c")?);
    let mut columns = [[0; 2]; 4];
    for (i, pair) in columns.iter_mut().enumerate() {
        *pair = [table.column(&format!("a{}", i + 1))?, table.column(&format!("b{}", i + 1))?];
    }
    let row = |r: &values::Row<'static>| {
        let number = |i: usize| r.fields[i].parse::<f64>().ok();
        let mut factor = ScatteringFactor { a: [0.0; 4], b: [0.0; 4], c: number(c)? };
        for (i, [a, b]) in columns.into_iter().enumerate() {
            factor.a[i] = number(a)?;
            factor.b[i] = number(b)?;
        }
        Some(Row { element: r.fields[element], charge: r.fields[charge].parse().ok()?, factor })
    };
    table.rows.iter().map(row).collect()
}

/// Coefficients of an atom or ion, and a note where the table has no such ion and the neutral atom stands in, or where its
/// row is doubtful.
///
/// `D` and `T` scatter X-rays as H does. An ion that is not tabulated takes the neutral atom, never another charge.
///
/// # Errors
/// [`StructureFactorError::UnknownElement`], or [`StructureFactorError::NoScatteringFactor`] beyond Cf.
pub fn scattering_factor(
    element: &str,
    charge: i8,
) -> Result<(ScatteringFactor, Option<String>), StructureFactorError> {
    atomic_number(element)?;
    let name = if matches!(element, "D" | "T") { "H" } else { element };
    let find = |charge: i8| rows().iter().find(|r| r.element == name && r.charge == charge).map(|r| r.factor);
    if let Some(factor) = find(charge) {
        let doubtful = DOUBTFUL.contains(&(element, charge)).then(|| {
            let ion = ion_name(element, charge);
            format!("the tabulated scattering factor of {ion} is too low at high angles (the source's fit); prefer neutral {name}")
        });
        return Ok((factor, doubtful));
    }
    match find(0) {
        Some(factor) => {
            let ion = ion_name(element, charge);
            Ok((factor, Some(format!("{ion} is not in the table of scattering factors; neutral {name} is used"))))
        }
        None => Err(StructureFactorError::NoScatteringFactor { element: element.to_owned() }),
    }
}

/// Element and charge as usually written: `O2-`, `Ti4+`, `Fe`.
#[must_use]
pub fn ion_name(element: &str, charge: i8) -> String {
    match charge {
        0 => element.to_owned(),
        _ => format!("{element}{}{}", charge.unsigned_abs(), if charge > 0 { '+' } else { '-' }),
    }
}

/// Every atom and ion of the table, by atomic number.
pub fn tabulated_ions() -> impl Iterator<Item = (&'static str, i8)> {
    rows().iter().map(|r| (r.element, r.charge))
}

/// Scattering factor f0 of a free atom or ion, in electrons, one value for each `s = sin θ/λ` in Å⁻¹.
///
/// `f0(s) = c + Σᵢ₌₁⁴ aᵢ exp(−bᵢ s²)`; f0(0) is the number of electrons to about 0.1 %.
///
/// # Errors
/// As [`scattering_factor`]; [`StructureFactorError::BeyondFit`] names the first s outside 0..=2 Å⁻¹.
///
/// Source: International Tables for Crystallography C (1992), Table 6.1.1.4, after Cromer & Mann (1968), Acta Cryst. A24, 321.
pub fn f0(element: &str, charge: i8, s: &[f64]) -> Result<Vec<f64>, StructureFactorError> {
    let (factor, _) = scattering_factor(element, charge)?;
    s.iter().map(|&s| check_s(s).map(|()| factor.at_s_squared(s * s))).collect()
}

/// Refuses an s outside the range of the fit (a rounding error of 1e-9 is let through).
pub(crate) fn check_s(s: f64) -> Result<(), StructureFactorError> {
    if (0.0..=S_MAX + 1e-9).contains(&s) { Ok(()) } else { Err(StructureFactorError::BeyondFit { s }) }
}
