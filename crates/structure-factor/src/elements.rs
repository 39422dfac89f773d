//! Element and charge from what a file calls an atom: a type symbol such as `Fe3+`, or only a label such as `O1W`.

/// Symbols by atomic number, from hydrogen.
const SYMBOLS: [&str; 118] = [
    "H", "He", "Li", "Be", "B", "C", "N", "O", "F", "Ne", "Na", "Mg", "Al", "Si", "P", "S", "Cl", "Ar", "K", "Ca",
    "Sc", "Ti", "V", "Cr", "Mn", "Fe", "Co", "Ni", "Cu", "Zn", "Ga", "Ge", "As", "Se", "Br", "Kr", "Rb", "Sr", "Y",
    "Zr", "Nb", "Mo", "Tc", "Ru", "Rh", "Pd", "Ag", "Cd", "In", "Sn", "Sb", "Te", "I", "Xe", "Cs", "Ba", "La", "Ce",
    "Pr", "Nd", "Pm", "Sm", "Eu", "Gd", "Tb", "Dy", "Ho", "Er", "Tm", "Yb", "Lu", "Hf", "Ta", "W", "Re", "Os", "Ir",
    "Pt", "Au", "Hg", "Tl", "Pb", "Bi", "Po", "At", "Rn", "Fr", "Ra", "Ac", "Th", "Pa", "U", "Np", "Pu", "Am", "Cm",
    "Bk", "Cf", "Es", "Fm", "Md", "No", "Lr", "Rf", "Db", "Sg", "Bh", "Hs", "Mt", "Ds", "Rg", "Cn", "Nh", "Fl", "Mc",
    "Lv", "Ts", "Og",
];

/// Elements beyond this atomic number have no scattering factors in International Tables C.
const LAST_WITH_FACTORS: usize = 98;

/// An element with its charge.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Species {
    /// Symbol in the usual letters; `D` and `T` for the isotopes of hydrogen.
    pub symbol: &'static str,
    /// In units of e.
    pub charge: i8,
}

/// What a name stands for.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) enum Meaning {
    /// An atom; with a remark where the reading rests on a choice.
    Atom(Species, Option<String>),
    /// A dummy or a vacancy: nothing scatters there.
    Nothing,
}

/// Why a name is no element: what it is, and what would help.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct NoElement {
    pub found: String,
    pub mend: String,
}

/// The symbol in its usual letters, whatever the case; `D` and `T` included.
pub(crate) fn symbol(text: &str) -> Option<&'static str> {
    if text.len() > 2 {
        return None;
    }
    SYMBOLS.iter().chain(&["D", "T"]).find(|known| known.eq_ignore_ascii_case(text)).copied()
}

/// `D` and `T` count as hydrogen.
pub(crate) fn chemical(symbol: &'static str) -> &'static str {
    if matches!(symbol, "D" | "T") { "H" } else { symbol }
}

/// Reads a type symbol: `Fe`, `FE`, `Fe3+`, `Fe+3`, `O2-`, `O-`, `Fe0`, `Cval`, `D`, `2H`.
///
/// # Errors
/// Groups (`OH`, `Wat`), mixed sites (`M`), words, and elements without scattering factors.
pub(crate) fn from_type_symbol(text: &str) -> Result<Meaning, NoElement> {
    let text = text.trim().trim_end_matches('.');
    if text == "2H" {
        return Ok(Meaning::Atom(Species { symbol: "D", charge: 0 }, None));
    }
    let letters = text.chars().take_while(char::is_ascii_alphabetic).count();
    let (name, tail) = text.split_at(letters);
    if let Some(special) = special(name, tail) {
        return special;
    }
    // The valence forms of International Tables C: Cval, and Siva (cut to four letters in old tables).
    let name = match name.to_ascii_lowercase().as_str() {
        "cval" => "C",
        "sival" | "siva" => "Si",
        _ => name,
    };
    let Some(symbol) = symbol(name) else { return Err(unknown(text)) };
    with_factors(symbol)?;
    let remark = match tail {
        "" if symbol == "T" => Some(format!("the type symbol `{text}` was read as tritium")),
        _ if !tail.is_empty() && tail != "0" && tail.bytes().all(|b| b.is_ascii_digit()) => {
            Some(format!("the type symbol `{text}` was read as {symbol} without charge: its number has no sign"))
        }
        _ => None,
    };
    if remark.is_some() {
        return Ok(Meaning::Atom(Species { symbol, charge: 0 }, remark));
    }
    match charge(tail) {
        Some(charge) => Ok(Meaning::Atom(Species { symbol, charge }, None)),
        None => Err(unknown(text)),
    }
}

/// A charge: nothing, `0`, `3+`, `+3`, `+`, `--`; at most 8.
fn charge(text: &str) -> Option<i8> {
    let signs = text.bytes().filter(|b| matches!(b, b'+' | b'-')).count();
    let digits: String = text.chars().filter(char::is_ascii_digit).collect();
    let at_an_end = text.starts_with(['+', '-']) || text.ends_with(['+', '-']);
    if text.is_empty() || text == "0" {
        return Some(0);
    }
    let alike = !(text.contains('+') && text.contains('-'));
    if signs == 0 || !at_an_end || !alike || signs + digits.len() != text.len() || (signs > 1 && !digits.is_empty()) {
        return None;
    }
    let size = if digits.is_empty() { i8::try_from(signs).ok()? } else { digits.parse().ok()? };
    let sign = if text.contains('-') { -1 } else { 1 };
    (size <= 8).then_some(sign * size)
}

/// Reads a label where no type symbol is given: `Fe1`, `FE1`, `O1W`, `O(2)`, `CA2`. `declared` are the elements of the
/// stated formula, empty if there is none; where a label can be read in two ways, they decide.
///
/// # Errors
/// As [`from_type_symbol`], and labels that begin with no element.
pub(crate) fn from_label(label: &str, declared: &[&'static str]) -> Result<Meaning, NoElement> {
    if label.contains(['+', '-'])
        && let Ok(meaning) = from_type_symbol(label)
    {
        return Ok(meaning);
    }
    let letters = label.chars().take_while(char::is_ascii_alphabetic).count();
    let (name, tail) = label.split_at(letters);
    // `OH1` is the oxygen of a hydroxyl group as often as the group; only the whole word is a group.
    if let Some(special) = special(name, tail).filter(|_| !name.eq_ignore_ascii_case("OH") || tail.is_empty()) {
        return special;
    }
    let two = name.get(..2).and_then(symbol);
    let one = name.get(..1).and_then(symbol);
    let is_declared = |symbol: &'static str| declared.contains(&chemical(symbol));
    let (chosen, doubtful) = match (one, two) {
        (None, None) => return Err(unknown(label)),
        (Some(one), None) => (one, name.len() > 1 && !is_declared(one)),
        (None, Some(two)) => (two, false),
        (Some(one), Some(two)) => match (is_declared(one), is_declared(two)) {
            (true, false) => (one, true),
            (false, true) => (two, false),
            // Small second letter: written as a symbol. Capitals: the usual spelling of old files.
            _ => (two, name.as_bytes().get(1).is_some_and(u8::is_ascii_uppercase)),
        },
    };
    with_factors(chosen)?;
    let remark = doubtful.then(|| format!("the label `{label}`, without a type symbol, was read as {chosen}"));
    Ok(Meaning::Atom(Species { symbol: chosen, charge: 0 }, remark))
}

fn with_factors(symbol: &'static str) -> Result<(), NoElement> {
    match SYMBOLS.iter().position(|known| *known == symbol) {
        Some(index) if index >= LAST_WITH_FACTORS => Err(NoElement {
            found: format!("the element {symbol}, which has no scattering factors"),
            mend: "elements from H to Cf can be computed; leave the atom out or name another element".to_owned(),
        }),
        _ => Ok(()),
    }
}

fn unknown(text: &str) -> NoElement {
    let shown: String = text.chars().take(20).collect();
    NoElement {
        found: format!("`{shown}`, which names no element"),
        mend: "name the element in `_atom_site_type_symbol`, with its charge if wanted: Fe, Fe3+, O2-".to_owned(),
    }
}

/// Names that are no element although some begin like one (common practice, no source).
fn special(name: &str, tail: &str) -> Option<Result<Meaning, NoElement>> {
    let group = |what: &str, mend: &str| {
        Some(Err(NoElement { found: format!("`{name}{tail}`, {what}"), mend: mend.to_owned() }))
    };
    match name.to_ascii_lowercase().as_str() {
        "q" | "dum" | "dummy" | "va" | "vac" | "vacancy" => Some(Ok(Meaning::Nothing)),
        "wat" | "water" | "oh" | "ho2" | "hoh" => {
            group("a group of atoms", "give its atoms with their own coordinates: O, and H where they are known")
        }
        "h" if tail.starts_with("2O") => {
            group("a group of atoms", "give its atoms with their own coordinates: O, and H where they are known")
        }
        "nh" if matches!(tail, "3" | "4") => {
            group("a group of atoms", "give its atoms with their own coordinates: N, and H where they are known")
        }
        "m" | "a" | "x" | "me" | "ln" | "ree" | "mix" => group(
            "which stands for a mixed or unnamed site",
            "give one atom for each element on the site, with its occupancy",
        ),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::{Meaning, SYMBOLS, from_label, from_type_symbol, symbol};

    fn atom(read: Result<Meaning, super::NoElement>) -> (&'static str, i8, bool) {
        match read.unwrap() {
            Meaning::Atom(species, remark) => (species.symbol, species.charge, remark.is_some()),
            Meaning::Nothing => panic!("nothing"),
        }
    }

    #[test]
    fn type_symbols_give_element_and_charge() {
        for (text, symbol, charge) in [
            ("Fe", "Fe", 0),
            ("FE", "Fe", 0),
            ("Fe3+", "Fe", 3),
            ("Fe+3", "Fe", 3),
            ("fe3+", "Fe", 3),
            ("O2-", "O", -2),
            ("O-2", "O", -2),
            ("O2-.", "O", -2),
            ("Na+", "Na", 1),
            ("O--", "O", -2),
            ("Fe0", "Fe", 0),
            ("Fe0+", "Fe", 0),
            ("Cval", "C", 0),
            ("Siva", "Si", 0),
            ("D", "D", 0),
            ("2H", "D", 0),
        ] {
            assert_eq!(atom(from_type_symbol(text)), (symbol, charge, false), "{text}");
        }
        assert_eq!(atom(from_type_symbol("T")), ("T", 0, true));
        assert_eq!(atom(from_type_symbol("O1")), ("O", 0, true));
    }

    #[test]
    fn groups_mixed_sites_words_and_elements_without_factors_are_refused_with_what_is_needed() {
        for (text, words) in [
            ("OH", "its atoms"),
            ("Wat", "its atoms"),
            ("H2O", "its atoms"),
            ("M", "occupancy"),
            ("Es", "H to Cf"),
            ("Zz", "type_symbol"),
            ("Fe3+2", "type_symbol"),
            ("Fe+-", "type_symbol"),
            ("Fe99+", "type_symbol"),
            ("", "type_symbol"),
            ("Ü", "type_symbol"),
        ] {
            let refused = from_type_symbol(text).unwrap_err();
            assert!(refused.mend.contains(words), "{text}: {refused:?}");
        }
        assert_eq!(from_type_symbol("Q"), Ok(Meaning::Nothing));
    }

    #[test]
    fn labels_give_the_element_and_the_formula_decides_doubts() {
        for (label, declared, symbol, remark) in [
            ("Fe1", &[][..], "Fe", false),
            ("FE1", &[][..], "Fe", true),
            ("FE1", &["Fe", "O"][..], "Fe", false),
            ("O1W", &["O"][..], "O", false),
            ("OW1", &["O", "H"][..], "O", false),
            ("O(2)", &[][..], "O", false),
            ("OH1", &["O", "H"][..], "O", false),
            ("CA2", &["Ca", "O"][..], "Ca", false),
            ("CA2", &["C", "H", "O"][..], "C", true),
            ("Hg1", &["Hg", "O"][..], "Hg", false),
            ("Hg1", &[][..], "Hg", false),
            ("Co1", &[][..], "Co", false),
            ("Co1", &["Co", "C", "O"][..], "Co", false),
            ("HO1", &["H", "O"][..], "H", true),
            ("D1", &["H", "O"][..], "D", false),
            ("Fe3+", &[][..], "Fe", false),
        ] {
            let (read, _, remarked) = atom(from_label(label, declared));
            assert_eq!((read, remarked), (symbol, remark), "{label} in {declared:?}");
        }
        for label in ["M1", "Wat1", "Xx1", "1", "", "é1"] {
            assert!(from_label(label, &[]).is_err(), "{label}");
        }
        assert_eq!(from_label("Q1", &[]), Ok(Meaning::Nothing));
    }

    #[test]
    fn every_element_is_found_once() {
        for (index, name) in SYMBOLS.iter().enumerate() {
            assert_eq!(SYMBOLS.iter().position(|other| other == name), Some(index));
            assert_eq!(symbol(&name.to_uppercase()), Some(*name));
        }
        // Outside: atomic numbers of the periodic table.
        for (number, name) in [(26, "Fe"), (58, "Ce"), (71, "Lu"), (82, "Pb"), (98, "Cf"), (118, "Og")] {
            assert_eq!(SYMBOLS[number - 1], name);
        }
    }
}
