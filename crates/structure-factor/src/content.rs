//! What the cell holds: formula, formula units, mass, density, electrons.

use std::collections::BTreeMap;

use crate::expand::expand;
use crate::structure::Structure;
use crate::tables::{atomic_mass, scattering_factor};
use crate::{ExpandedSite, StructureFactorError};

/// g/cm³ of one atomic mass unit in 1 Å³: the atomic mass constant 1.66053906892e-27 kg (CODATA 2022).
const GRAMS_PER_CM3: f64 = 1.660_539_068_92;
/// Amounts this close to whole numbers are whole.
const WHOLE: f64 = 1e-3;

impl Structure {
    /// All atoms of the cell, site by site, in the order of [`Structure::atoms`].
    #[must_use]
    pub fn expand(&self) -> Vec<ExpandedSite> {
        self.atoms.iter().map(|atom| expand(&self.cell, &self.group, atom)).collect()
    }

    /// Atoms of each element in the cell, occupancy counted, by symbol. `D` and `T` count apart from H.
    #[must_use]
    pub fn content(&self) -> BTreeMap<String, f64> {
        let mut content = BTreeMap::new();
        for (atom, site) in self.atoms.iter().zip(self.expand()) {
            *content.entry(atom.element.clone()).or_insert(0.0) += atom.occupancy * site.multiplicity as f64;
        }
        content
    }

    /// Volume of the cell in Å³.
    #[must_use]
    pub fn volume_cubic_angstrom(&self) -> f64 {
        self.cell.volume()
    }

    /// Formula units in the cell: what the file states, else the largest common divisor of the atoms in the cell (of the
    /// multiplicities of the sites where occupancies leave fractions).
    #[must_use]
    pub fn z(&self) -> f64 {
        if let Some(stated) = self.stated_z.filter(|z| *z > 0.0 && z.is_finite()) {
            return stated;
        }
        let amounts: Vec<f64> = self.content().into_values().filter(|n| *n > 0.0).collect();
        let whole = |n: &f64| (n - n.round()).abs() < WHOLE && *n >= 0.5;
        let counts: Vec<u64> = if amounts.iter().all(whole) {
            amounts.iter().map(|n| n.round() as u64).collect()
        } else {
            self.expand().iter().map(|site| site.multiplicity as u64).collect()
        };
        counts.into_iter().fold(0, greatest_common_divisor).max(1) as f64
    }

    /// Formula of one formula unit, carbon and hydrogen first, then by symbol (Hill): `Al2O3`, `Ce0.8Gd0.2O1.9`.
    #[must_use]
    pub fn formula(&self) -> String {
        let (content, z) = (self.content(), self.z());
        let carbon = content.contains_key("C");
        let order = |symbol: &str| match symbol {
            "C" => 0,
            "H" | "D" | "T" if carbon => 1,
            _ => 2,
        };
        let mut parts: Vec<(&String, &f64)> = content.iter().collect();
        parts.sort_by_key(|(symbol, _)| order(symbol));
        parts.into_iter().map(|(symbol, amount)| format!("{symbol}{}", amount_text(amount / z))).collect()
    }

    /// Mass of the atoms in the cell, in g/mol of cells.
    ///
    /// # Errors
    /// [`StructureFactorError::UnknownElement`] for a symbol without a mass.
    pub fn mass_g_mol(&self) -> Result<f64, StructureFactorError> {
        self.content().into_iter().map(|(symbol, amount)| atomic_mass(&symbol).map(|mass| amount * mass)).sum()
    }

    /// Density of the perfect crystal, `ρ = 1.66053906892 Z M / V` in g/cm³ (M in g/mol, V in Å³).
    ///
    /// # Errors
    /// As [`Structure::mass_g_mol`].
    pub fn density_g_cm3(&self) -> Result<f64, StructureFactorError> {
        Ok(GRAMS_PER_CM3 * self.mass_g_mol()? / self.cell.volume())
    }

    /// F(000) in electrons: Σ f0(0) over the cell, without dispersion.
    ///
    /// # Errors
    /// As [`scattering_factor`].
    pub fn f000_electrons(&self) -> Result<f64, StructureFactorError> {
        let mut sum = 0.0;
        for (atom, site) in self.atoms.iter().zip(self.expand()) {
            let (factor, _) = scattering_factor(&atom.element, atom.charge)?;
            sum += atom.occupancy * site.multiplicity as f64 * factor.at_s_squared(0.0);
        }
        Ok(sum)
    }
}

fn greatest_common_divisor(a: u64, b: u64) -> u64 {
    if b == 0 { a } else { greatest_common_divisor(b, a % b) }
}

/// Index behind a symbol: nothing for 1, else up to three decimals.
fn amount_text(amount: f64) -> String {
    let text = format!("{amount:.3}");
    let text = text.trim_end_matches('0').trim_end_matches('.');
    if text == "1" { String::new() } else { text.to_owned() }
}
