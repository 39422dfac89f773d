//! The sites of a structure in TOML.

use toml::Spanned;
use toml::de::{DeTable, DeValue};
use values::Diagnostic;

use super::reader::Reader;
use crate::displacement::{self, B_OF_U, Grouped};
use crate::elements::{Meaning, from_type_symbol};
use crate::{Atom, Displacement};

const KEYS: [&str; 7] = ["label", "element", "xyz", "occupancy", "b_iso_A2", "u_iso_A2", "u_aniso_A2"];
/// Where the displacement parameters begin in [`KEYS`].
const DISPLACEMENTS: usize = 4;

/// All sites; missing displacement parameters are noted.
pub(super) fn atoms(
    reader: &Reader<'_>,
    table: &DeTable<'_>,
    notes: &mut Vec<String>,
) -> Result<Vec<Atom>, Diagnostic> {
    let example = "add `sites = [ { element = \"Si\", xyz = [0, 0, 0] } ]`";
    let value = table.get("sites").ok_or_else(|| reader.missing("sites", example))?;
    let expected = "an array of tables such as `{ element = \"Si\", xyz = [0, 0, 0] }`";
    let Some(array) = value.get_ref().as_array() else { return Err(reader.wrong_type(value, "sites", expected)) };
    if array.is_empty() {
        return Err(Diagnostic::new("`sites` is empty", "at least one site", example).at(reader.place(value.span())));
    }
    let mut atoms: Vec<Atom> = Vec::with_capacity(array.len());
    let mut labels = std::collections::HashSet::new();
    let mut assumed = Vec::new();
    let mut findings = Grouped::default();
    for (index, entry) in array.iter().enumerate() {
        let Some(site) = entry.get_ref().as_table() else { return Err(reader.wrong_type(entry, "sites", expected)) };
        reader.only_keys(site, &KEYS, "a site")?;
        let (atom, has_displacement) = atom(reader, entry, site, index, notes)?;
        if !labels.insert(atom.label.clone()) {
            return Err(reader.at_key(
                site,
                "label",
                Diagnostic::new(
                    format!("the label `{}` again", atom.label),
                    "each label once",
                    "give the site a label of its own",
                ),
            ));
        }
        if has_displacement {
            displacement::doubt(&atom.label, atom.displacement, &mut findings);
        } else {
            assumed.push(atom.label.clone());
        }
        atoms.push(atom);
    }
    displacement::note_assumed(&assumed, atoms.len(), notes);
    notes.extend(findings.into_notes());
    Ok(atoms)
}

fn atom(
    reader: &Reader<'_>,
    entry: &Spanned<DeValue<'_>>,
    site: &DeTable<'_>,
    index: usize,
    notes: &mut Vec<String>,
) -> Result<(Atom, bool), Diagnostic> {
    let missing = |key: &str, mend: &str| {
        Diagnostic::new(format!("a site without `{key}`"), format!("the key `{key}`"), mend)
            .at(reader.place(entry.span()))
    };
    let element = site.get("element").ok_or_else(|| missing("element", "add it, such as `element = \"Ce4+\"`"))?;
    let name = reader.text(element, "element")?;
    let at_element = |found: String, mend: &str| {
        Diagnostic::new(found, "an element from H to Cf, with its charge if wanted: Ce, Ce4+, O2-", mend)
            .at(reader.place(element.span()))
    };
    let species = match from_type_symbol(name) {
        Ok(Meaning::Atom(species, remark)) => {
            notes.extend(remark);
            species
        }
        Ok(Meaning::Nothing) => {
            return Err(at_element(format!("`{name}`, at which nothing scatters"), "remove the site"));
        }
        Err(wrong) => return Err(at_element(wrong.found, "name the element, with its charge if wanted")),
    };
    let xyz = site.get("xyz").ok_or_else(|| missing("xyz", "add it, such as `xyz = [0, 0, 0.25]`"))?;
    // Fractions far outside of the cell are Å by mistake.
    let position = reader.numbers(xyz, "xyz", |_| -4.0..=4.0).map_err(|wrong| Diagnostic {
        mend: "give fractions of the cell edges, not Å: [0, 0.25, \"1/3\"]".to_owned(),
        ..wrong
    })?;
    let occupancy = site.get("occupancy").map_or(Ok(1.0), |value| reader.number(value, "occupancy", 0.0..=1.0))?;
    let label = match site.get("label") {
        Some(value) => reader.text(value, "label")?.to_owned(),
        None => format!("{}{}", species.symbol, index + 1),
    };
    let displacement = given_displacement(reader, site)?;
    let atom = Atom {
        label,
        element: species.symbol.to_owned(),
        charge: species.charge,
        position,
        occupancy,
        displacement: displacement.unwrap_or(Displacement::IsotropicB(0.0)),
    };
    Ok((atom, displacement.is_some()))
}

fn given_displacement(reader: &Reader<'_>, site: &DeTable<'_>) -> Result<Option<Displacement>, Diagnostic> {
    let given: Vec<&str> = KEYS[DISPLACEMENTS..].iter().filter(|key| site.contains_key(**key)).copied().collect();
    if let [first, second, ..] = given[..] {
        return Err(reader.at_key(
            site,
            second,
            Diagnostic::new(
                format!("both `{first}` and `{second}`"),
                "one displacement parameter",
                "remove one of the two",
            ),
        ));
    }
    let Some((key, value)) = given.first().and_then(|key| site.get(*key).map(|value| (*key, value))) else {
        return Ok(None);
    };
    let displacement = match key {
        "b_iso_A2" => Displacement::IsotropicB(reader.number(value, key, 0.0..=1000.0)?),
        "u_iso_A2" => Displacement::IsotropicB(B_OF_U * reader.number(value, key, 0.0..=12.0)?),
        _ => {
            let range = |index: usize| if index < 3 { 0.0..=12.0 } else { -12.0..=12.0 };
            Displacement::Anisotropic(reader.numbers(value, key, range)?)
        }
    };
    Ok(Some(displacement))
}
