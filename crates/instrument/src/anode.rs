//! Anodes of X-ray tubes and their K lines.

use std::fmt;
use std::str::FromStr;

use values::Wavelength;

use crate::table::{self, EmissionLine};

/// Anode of an X-ray tube, with its K lines in `data/radiation.csv`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Anode {
    /// Chromium.
    Cr,
    /// Manganese.
    Mn,
    /// Iron.
    Fe,
    /// Cobalt.
    Co,
    /// Nickel.
    Ni,
    /// Copper.
    Cu,
    /// Molybdenum.
    Mo,
    /// Silver.
    Ag,
}

/// A text that names no known anode.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct UnknownAnode {
    /// The text.
    pub found: String,
}

impl fmt::Display for UnknownAnode {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let known: Vec<&str> = Anode::ALL.iter().map(|a| a.symbol()).collect();
        write!(f, "anode `{}` is not in the table of emission lines; known are {}", self.found, known.join(", "))
    }
}

impl std::error::Error for UnknownAnode {}

impl Anode {
    /// All anodes, by atomic number.
    pub const ALL: [Self; 8] = [Self::Cr, Self::Mn, Self::Fe, Self::Co, Self::Ni, Self::Cu, Self::Mo, Self::Ag];

    /// Symbol of the element.
    #[must_use]
    pub fn symbol(self) -> &'static str {
        match self {
            Self::Cr => "Cr",
            Self::Mn => "Mn",
            Self::Fe => "Fe",
            Self::Co => "Co",
            Self::Ni => "Ni",
            Self::Cu => "Cu",
            Self::Mo => "Mo",
            Self::Ag => "Ag",
        }
    }

    /// K lines, Kα1 first.
    #[must_use]
    pub fn lines(self) -> Vec<EmissionLine> {
        table::lines().iter().filter(|l| l.anode == self.symbol()).map(|l| l.line).collect()
    }

    fn line(self, name: &str) -> Option<EmissionLine> {
        table::lines().iter().find(|l| l.anode == self.symbol() && l.line.name == name).map(|l| l.line)
    }

    /// Kα1, the line that positions and spacings refer to.
    ///
    /// # Panics
    /// Never with the table that the program carries; a test reads the line of each anode.
    #[must_use]
    pub fn ka1(self) -> EmissionLine {
        self.line("Ka1").expect("every anode of the table has Ka1")
    }

    /// Kα2.
    ///
    /// # Panics
    /// Never with the table that the program carries; a test reads the line of each anode.
    #[must_use]
    pub fn ka2(self) -> EmissionLine {
        self.line("Ka2").expect("every anode of the table has Ka2")
    }

    /// Kβ lines: one for an unresolved pair, else Kβ1 and Kβ3.
    #[must_use]
    pub fn kb(self) -> Vec<EmissionLine> {
        self.lines().into_iter().filter(|l| l.name.starts_with("Kb")).collect()
    }

    /// Mean of the doublet, `(2 λ(Kα1) + λ(Kα2)) / 3` (common practice, no source).
    #[must_use]
    pub fn ka_mean_angstrom(self) -> f64 {
        (2.0 * self.ka1().wavelength.angstrom() + self.ka2().wavelength.angstrom()) / 3.0
    }

    /// The anode whose Kα1 lies within 100 ppm of a wavelength: older and newer tables differ by up to 40 ppm (common
    /// practice, no source; the Kα2 lines are 2000 ppm away or more).
    #[must_use]
    pub fn with_ka1_near(wavelength: Wavelength) -> Option<Self> {
        let near = |a: &Self| (wavelength.angstrom() / a.ka1().wavelength.angstrom() - 1.0).abs() < 1e-4;
        Self::ALL.into_iter().find(near)
    }
}

impl fmt::Display for Anode {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.symbol())
    }
}

impl FromStr for Anode {
    type Err = UnknownAnode;

    /// Reads a symbol, in any case: `Cu`, `cu`, `CU`.
    fn from_str(text: &str) -> Result<Self, UnknownAnode> {
        let wanted = text.trim();
        Self::ALL
            .into_iter()
            .find(|a| a.symbol().eq_ignore_ascii_case(wanted))
            .ok_or_else(|| UnknownAnode { found: wanted.to_owned() })
    }
}

#[cfg(test)]
mod tests {
    use super::Anode;
    use values::Wavelength;

    #[test]
    fn a_symbol_in_any_case_names_its_anode() {
        for anode in Anode::ALL {
            assert_eq!(anode.symbol().to_lowercase().parse(), Ok(anode));
            assert_eq!(anode.to_string(), anode.symbol());
        }
    }

    #[test]
    fn an_unknown_anode_is_told_which_are_known() {
        let message = "Unobtainium".parse::<Anode>().unwrap_err().to_string();
        assert!(message.contains("`Unobtainium`"), "{message}");
        assert!(message.ends_with("known are Cr, Mn, Fe, Co, Ni, Cu, Mo, Ag"), "{message}");
    }

    #[test]
    fn wavelengths_of_older_tables_find_their_anode_and_other_lines_none() {
        let near = |a| Anode::with_ka1_near(Wavelength::from_angstrom(a).unwrap());
        // Old NBS patterns: 1.5405 and 1.540598 Å; Mo 0.7093 (Bearden scale). From memory.
        assert_eq!((near(1.5405), near(1.540598), near(0.7093)), (Some(Anode::Cu), Some(Anode::Cu), Some(Anode::Mo)));
        assert_eq!((near(1.5444274), near(1.0), near(1.5418)), (None, None, None));
    }
}
