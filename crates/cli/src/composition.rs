//! Formulas typed by people: `Mg Al2 O4`, `MgAl2O4`, `Ce0.9Gd0.1O1.95`. No brackets, no charges.

use std::fmt;

use values::Diagnostic;

/// A formula as understood.
#[derive(Debug)]
pub struct Composition {
    /// Element symbols with their numbers, in the order given.
    pub parts: Vec<(&'static str, f64)>,
    /// Molar mass, g/mol.
    pub molar_mass_g_mol: f64,
}

impl Composition {
    /// Atoms other than hydrogen; all, where there is nothing else.
    pub fn heavy_atoms(&self) -> f64 {
        let heavy: f64 =
            self.parts.iter().filter(|(element, _)| !matches!(*element, "H" | "D" | "T")).map(|(_, n)| n).sum();
        if heavy > 0.0 { heavy } else { self.parts.iter().map(|(_, n)| n).sum() }
    }
}

impl fmt::Display for Composition {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let words: Vec<String> = self
            .parts
            .iter()
            .map(|(element, n)| if (n - 1.0).abs() < 1e-12 { (*element).to_owned() } else { format!("{element}{n}") })
            .collect();
        f.write_str(&words.join(" "))
    }
}

/// Reads a formula.
///
/// # Errors
/// A message that quotes the first part that is no element with a number.
pub fn parse(text: &str) -> Result<Composition, Diagnostic> {
    let wrong = |part: &str| {
        Diagnostic::new(
            format!("formula `{text}`: `{part}` is not an element with a number"),
            "element symbols, each followed by its number where that is not 1",
            "write it without brackets, such as 'Mg Al2 O4' or 'Ce0.9 Gd0.1 O1.95'",
        )
    };
    let mut parts: Vec<(&'static str, f64)> = Vec::new();
    let mut rest = text.trim();
    while !rest.is_empty() {
        let symbol: String = {
            let mut letters = rest.chars();
            let first = letters.next().filter(char::is_ascii_uppercase).ok_or_else(|| wrong(rest))?;
            std::iter::once(first).chain(letters.take_while(char::is_ascii_lowercase)).collect()
        };
        let element = structure_factor::tables::element_symbol(&symbol).ok_or_else(|| wrong(&symbol))?;
        rest = &rest[symbol.len()..];
        let digits = rest.len() - rest.trim_start_matches(|c: char| c.is_ascii_digit() || c == '.').len();
        let number = if digits == 0 { Ok(1.0) } else { rest[..digits].parse::<f64>() };
        let number = number
            .ok()
            .filter(|n| *n > 0.0 && *n < 1e4)
            .ok_or_else(|| wrong(&format!("{symbol}{}", &rest[..digits])))?;
        rest = rest[digits..].trim_start_matches([' ', '_']);
        match parts.iter_mut().find(|(known, _)| *known == element) {
            Some((_, n)) => *n += number,
            None => parts.push((element, number)),
        }
    }
    if parts.is_empty() {
        return Err(wrong(text));
    }
    let mut molar_mass_g_mol = 0.0;
    for (element, number) in &parts {
        molar_mass_g_mol += number * structure_factor::tables::atomic_mass(element).map_err(|_| wrong(element))?;
    }
    Ok(Composition { parts, molar_mass_g_mol })
}

#[cfg(test)]
mod tests {
    use super::parse;

    #[test]
    fn formulas_with_and_without_blanks_mean_the_same() {
        // Outside: spinel MgAl2O4, 142.26 g/mol (standard atomic weights; the sum 24.305 + 2·26.982 + 4·15.999).
        for text in ["Mg Al2 O4", "MgAl2O4", "Mg1Al2O4", "O4 Al2 Mg"] {
            let formula = parse(text).unwrap();
            assert!((formula.molar_mass_g_mol - 142.265).abs() < 0.005, "{text}: {}", formula.molar_mass_g_mol);
            assert!((formula.heavy_atoms() - 7.0).abs() < 1e-12);
        }
        assert_eq!(parse("Ce0.9Gd0.1O1.95").unwrap().to_string(), "Ce0.9 Gd0.1 O1.95");
    }

    #[test]
    fn what_is_no_formula_is_quoted() {
        for (text, part) in
            [("Mg(OH)2", "(OH)2"), ("mgo", "mgo"), ("Xx2", "Xx"), ("", ""), ("Al0", "Al0"), ("Al1.2.3", "Al1.2.3")]
        {
            let message = parse(text).unwrap_err();
            assert!(message.found.contains(&format!("`{part}`")), "{message}");
        }
    }
}
