//! A space group: its operations, its names as far as it has them, what it does to reflections.

use std::fmt;

use super::closure::close;
use super::operation::{Operation, TRANSLATION_UNIT};
use super::point_group::{Centring, CrystalSystem, laue_rotations, pure_translations, system};
use super::settings::{SETTINGS, Setting};
use super::{hall, identify, symbols};
use crate::SymmetryError;

/// A space group in a setting: all operations of the cell, and the names that belong to them.
///
/// Two groups are equal when their operations are.
#[derive(Clone, Debug)]
pub struct SpaceGroup {
    operations: Vec<Operation>,
    laue: Vec<[[i32; 3]; 3]>,
    /// One operation per rotation that has a translation for some reflection to be absent by.
    gliding: Vec<Operation>,
    translations: Vec<[i32; 3]>,
    names: Names,
}

/// What a group is called.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub(crate) struct Names {
    pub number: Option<u16>,
    pub hall: String,
    pub xhm: String,
    /// Whether it is one of the tabulated settings.
    pub tabulated: bool,
}

impl Names {
    pub(crate) fn of(setting: &Setting) -> Self {
        Self {
            number: Some(setting.number),
            hall: setting.hall.to_owned(),
            xhm: setting.xhm.to_owned(),
            tabulated: true,
        }
    }
}

impl SpaceGroup {
    /// From all operations of a group, or from some that generate it: they are completed.
    ///
    /// The names are those of the tabulated setting with the same operations; in any other setting the type is found by
    /// a change of basis ([`hall`](Self::hall) then ends with it).
    ///
    /// # Errors
    /// [`SymmetryError`] when the list lacks the identity, or when it does not close within 192 operations.
    pub fn from_operations(operations: &[Operation]) -> Result<Self, SymmetryError> {
        if !operations.contains(&Operation::IDENTITY) {
            return Err(SymmetryError::new(
                format!("{} symmetry operations without x,y,z", operations.len()),
                "the identity among the operations",
                "add x,y,z, or complete the list if its first lines are missing",
            ));
        }
        let operations = close(operations)?;
        let names = identify::names(&operations);
        Ok(Self::with_names(operations, names))
    }

    /// From a Hall symbol, tabulated or not. Source: International Tables B (2010), Appendix A1.4.2.
    ///
    /// # Errors
    /// [`SymmetryError`] with the byte offset of what does not fit the rules, or when the symbol stands for no group.
    pub fn from_hall(symbol: &str) -> Result<Self, SymmetryError> {
        let operations = hall::operations(symbol)?;
        let mut names = identify::names(&operations);
        if !names.tabulated {
            names.hall = symbol.split_whitespace().collect::<Vec<_>>().join(" ");
        }
        Ok(Self::with_names(operations, names))
    }

    /// From an H–M symbol in any of its spellings: extended, full, short, with e-glides, in the old cubic form, with or
    /// without blanks, in either case. The second value says what was assumed where the symbol stands for several
    /// settings: unique axis b and cell choice 1, origin choice 2, hexagonal axes.
    ///
    /// # Errors
    /// [`SymmetryError`] with the nearest known symbols.
    pub fn from_symbol(symbol: &str) -> Result<(Self, Option<String>), SymmetryError> {
        let reading = symbols::read(symbol)?;
        let note = reading.note();
        Ok((Self::from_setting(reading.best()), note))
    }

    /// The standard setting of a number: unique axis b and cell choice 1, origin choice 2, hexagonal axes.
    ///
    /// # Errors
    /// [`SymmetryError`] unless the number is 1 to 230.
    pub fn from_number(number: u16) -> Result<Self, SymmetryError> {
        match SETTINGS.iter().find(|setting| setting.standard && setting.number == number) {
            Some(setting) => Ok(Self::from_setting(setting)),
            None => Err(SymmetryError::new(
                format!("space-group number {number}"),
                "a number from 1 to 230",
                "correct the number, or give the symbol",
            )),
        }
    }

    /// The group of highest symmetry and without glides on a lattice: what a bare lattice predicts. Hexagonal and trigonal P
    /// lattices are one; rhombohedral ones are trigonal with R, on hexagonal axes; monoclinic ones have unique axis b.
    ///
    /// `None` where a system has no such centring (cubic C, say).
    #[must_use]
    pub fn of_lattice(system: CrystalSystem, centring: Centring) -> Option<Self> {
        let axes = match (system, centring) {
            (CrystalSystem::Trigonal, Centring::R) => "-3 m:H",
            (_, Centring::R) => return None,
            (CrystalSystem::Triclinic, Centring::P) => "-1",
            (CrystalSystem::Monoclinic, Centring::P | Centring::A | Centring::C | Centring::I) => "1 2/m 1",
            (CrystalSystem::Orthorhombic, _) => "m m m",
            (CrystalSystem::Tetragonal, Centring::P | Centring::I) => "4/m m m",
            (CrystalSystem::Trigonal | CrystalSystem::Hexagonal, Centring::P) => "6/m m m",
            (CrystalSystem::Cubic, Centring::P | Centring::I | Centring::F) => "m -3 m",
            _ => return None,
        };
        let xhm = format!("{centring} {axes}");
        SETTINGS.iter().find(|setting| setting.xhm == xhm).map(Self::from_setting)
    }

    /// The group without symmetry.
    #[must_use]
    pub fn p1() -> Self {
        let names = SETTINGS.first().map(Names::of).unwrap_or_default();
        Self::with_names(vec![Operation::IDENTITY], names)
    }

    pub(crate) fn from_setting(setting: &Setting) -> Self {
        // A test holds every row of the table to be readable.
        let operations = hall::operations(setting.hall).unwrap_or_else(|_| vec![Operation::IDENTITY]);
        Self::with_names(operations, Names::of(setting))
    }

    /// `operations`: closed, the identity first.
    fn with_names(operations: Vec<Operation>, names: Names) -> Self {
        let mut gliding: Vec<Operation> = Vec::new();
        for operation in &operations {
            if !gliding.iter().any(|known| known.rotation == operation.rotation) {
                gliding.push(*operation);
            }
        }
        // With the centring conditions met, the other translations of a rotation say the same. The identity says nothing.
        gliding.remove(0);
        let translations = pure_translations(&operations);
        Self { laue: laue_rotations(&operations), gliding, translations, operations, names }
    }

    /// Number of the space-group type, 1..=230; `None` only for a setting in which the type was not found.
    #[must_use]
    pub fn number(&self) -> Option<u16> {
        self.names.number
    }

    /// Hall symbol; of a setting without a name, that of the standard setting with the change of basis behind it.
    #[must_use]
    pub fn hall(&self) -> &str {
        &self.names.hall
    }

    /// Extended H–M symbol, such as `R -3 c:H` or `F d -3 m:1`; of a setting without a name, that of the standard
    /// setting with the change of basis behind it.
    #[must_use]
    pub fn xhm(&self) -> &str {
        &self.names.xhm
    }

    /// Whether the setting is one of the tabulated ones, so that [`xhm`](Self::xhm) and [`hall`](Self::hall) are
    /// symbols of the tables.
    #[must_use]
    pub fn is_tabulated(&self) -> bool {
        self.names.tabulated
    }

    /// Short symbol without blanks: `P21/c`, `R-3c`, `Fd-3m`.
    #[must_use]
    pub fn short_symbol(&self) -> String {
        symbols::short(self.xhm())
    }

    /// Crystal system of the operations.
    #[must_use]
    pub fn system(&self) -> CrystalSystem {
        system(&self.laue)
    }

    /// Lattice letter; `None` for translations that have none (reverse rhombohedral, triple hexagonal cells and the like).
    #[must_use]
    pub fn centring(&self) -> Option<Centring> {
        Centring::of(&self.translations)
    }

    /// Centring translations beside 000, in 24ths of the edges, sorted.
    #[must_use]
    pub fn centring_translations(&self) -> &[[i32; 3]] {
        &self.translations
    }

    /// All operations of the cell, centring included; the identity first.
    #[must_use]
    pub fn operations(&self) -> &[Operation] {
        &self.operations
    }

    /// Whether the group has an inversion, at the origin or elsewhere.
    #[must_use]
    pub fn centrosymmetric(&self) -> bool {
        self.operations.iter().any(|o| o.rotation == [[-1, 0, 0], [0, -1, 0], [0, 0, -1]])
    }

    /// Rotations of the Laue class, the negatives included; a reflection goes to `h R`.
    #[must_use]
    pub fn laue_rotations(&self) -> &[[[i32; 3]; 3]] {
        &self.laue
    }

    /// Whether a reflection is absent by symmetry: some operation has `h R = h` and `h·t` not whole.
    ///
    /// Source: International Tables B (2010), section 1.4.2 (systematic absences).
    #[must_use]
    pub fn is_absent(&self, hkl: [i32; 3]) -> bool {
        self.is_absent_by_centring(hkl) || self.is_absent_by_glide(hkl)
    }

    pub(crate) fn is_absent_by_centring(&self, hkl: [i32; 3]) -> bool {
        let phase = |t: &[i32; 3]| (0..3).map(|i| i64::from(hkl[i]) * i64::from(t[i])).sum();
        self.translations.iter().any(|t| is_fraction(phase(t)))
    }

    /// Of reflections that the centring lets pass.
    pub(crate) fn is_absent_by_glide(&self, hkl: [i32; 3]) -> bool {
        self.gliding.iter().any(|o| is_fraction(o.phase_24ths(hkl)) && o.reflect(hkl) == hkl)
    }

    /// Reflections equivalent under the Laue class, Friedel mates included, each once, the largest triple first.
    #[must_use]
    pub fn equivalents(&self, hkl: [i32; 3]) -> Vec<[i32; 3]> {
        let mut all: Vec<[i32; 3]> = self.laue.iter().map(|r| turned(r, hkl)).collect();
        all.sort_unstable_by(|a, b| b.cmp(a));
        all.dedup();
        all
    }
}

/// Whether a phase in 24ths of a turn is no whole turn.
fn is_fraction(phase: i64) -> bool {
    phase % i64::from(TRANSLATION_UNIT) != 0
}

/// `h R`.
pub(crate) fn turned(r: &[[i32; 3]; 3], [h, k, l]: [i32; 3]) -> [i32; 3] {
    std::array::from_fn(|j| h * r[0][j] + k * r[1][j] + l * r[2][j])
}

impl PartialEq for SpaceGroup {
    fn eq(&self, other: &Self) -> bool {
        self.operations == other.operations
    }
}

impl Eq for SpaceGroup {}

impl fmt::Display for SpaceGroup {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.xhm())
    }
}

#[cfg(test)]
mod tests {
    use super::{Centring, CrystalSystem, SpaceGroup};

    #[test]
    fn the_fourteen_bravais_lattices_have_their_groups() {
        // Outside: International Tables A (2002), Table 2.1.2.1: fourteen lattices; orthorhombic A and B, monoclinic A and I
        // are further cells of them, and hexagonal P is that of trigonal groups too.
        let mut names = Vec::new();
        for system in [
            CrystalSystem::Triclinic,
            CrystalSystem::Monoclinic,
            CrystalSystem::Orthorhombic,
            CrystalSystem::Tetragonal,
            CrystalSystem::Trigonal,
            CrystalSystem::Hexagonal,
            CrystalSystem::Cubic,
        ] {
            for centring in Centring::ALL {
                if let Some(group) = SpaceGroup::of_lattice(system, centring) {
                    assert_eq!(group.centring(), Some(centring), "{group}");
                    assert!(group.system() == system || centring == Centring::P && system == CrystalSystem::Trigonal);
                    assert!(!group.operations().iter().any(|o| o.translation.iter().any(|t| t % 4 != 0)), "{group}");
                    names.push(group.short_symbol());
                }
            }
        }
        let expected =
            "P-1 P2/m A2/m C2/m I2/m Pmmm Ammm Bmmm Cmmm Immm Fmmm P4/mmm I4/mmm P6/mmm R-3m P6/mmm Pm-3m Im-3m Fm-3m";
        assert_eq!(names.join(" "), expected);
    }
}
