//! The usual short cautions for work with X-rays and powders. Common practice, no source; local rules decide.

use std::collections::BTreeSet;

/// Said once with every prediction.
pub const X_RAYS: &str =
    "X-rays: work only with closed interlocks and shutters and under your radiation safety officer's rules.";

/// Said with every caution, and where none is shown.
pub const DEFER: &str =
    "That no caution is shown does not mean that a powder is safe: local rules and licensed practice decide.";

/// Elements whose powders are usually handled as toxic, radioactive or reactive.
const TOXIC: [&str; 16] =
    ["Be", "As", "Se", "Cd", "Sb", "Te", "Hg", "Tl", "Pb", "Os", "Ni", "Co", "V", "Cr", "Ba", "P"];
const RADIOACTIVE: [&str; 14] = ["Tc", "Pm", "Po", "At", "Rn", "Fr", "Ra", "Ac", "Th", "Pa", "U", "Np", "Pu", "Am"];
const REACTIVE: [&str; 8] = ["Li", "Na", "K", "Rb", "Cs", "Mg", "Ca", "Al"];

/// Cautions for powders that hold these elements: one sentence each. `metallic`: the powder holds no anion formers, so that
/// reactive metals are there as such.
pub fn for_elements<'a>(elements: impl Iterator<Item = &'a str>) -> Vec<String> {
    let elements: BTreeSet<&str> = elements.collect();
    let among = |list: &[&str]| {
        let found: Vec<&str> = elements.iter().copied().filter(|e| list.contains(e)).collect();
        (!found.is_empty()).then(|| found.join(", "))
    };
    let mut sentences = Vec::new();
    if let Some(found) = among(&TOXIC) {
        sentences.push(format!("Powders with {found} can be toxic: keep them enclosed and off skin and lungs."));
    }
    if let Some(found) = among(&RADIOACTIVE) {
        sentences
            .push(format!("{found}: radioactive; the radiation safety officer decides before the powder is opened."));
    }
    let anions = ["O", "F", "Cl", "Br", "I", "S", "N"];
    if !elements.iter().any(|e| anions.contains(e))
        && let Some(found) = among(&REACTIVE)
    {
        sentences.push(format!(
            "{found} without oxygen or a halogen: fine metal powder can burn or react with air and water."
        ));
    }
    sentences
}

#[cfg(test)]
mod tests {
    use super::for_elements;

    #[test]
    fn lead_is_called_toxic_and_sodium_metal_reactive_but_salt_neither() {
        assert!(for_elements(["Pb", "O"].into_iter())[0].contains("toxic"));
        assert!(for_elements(["Na"].into_iter())[0].contains("burn"));
        assert!(for_elements(["Na", "Cl"].into_iter()).is_empty());
        assert!(for_elements(["U", "O"].into_iter())[0].contains("radioactive"));
    }
}
