//! Structures from TOML.
#![allow(clippy::unwrap_used, reason = "tests may stop at what should be there")]

use std::path::Path;

use structure_factor::{Displacement, Structure};

fn file(name: &str) -> Structure {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/structures").join(name);
    Structure::from_toml(&std::fs::read_to_string(path).unwrap(), name).unwrap_or_else(|message| panic!("{message}"))
}

fn read(text: &str) -> Structure {
    Structure::from_toml(text, "a/silicon.toml").unwrap_or_else(|message| panic!("{message}\n{text}"))
}

fn refusal(text: &str) -> String {
    match Structure::from_toml(text, "s.toml") {
        Ok(structure) => panic!("{text:?} was read: {structure:?}"),
        Err(message) => message.to_string(),
    }
}

const SITES: &str = "sites = [{ element = \"Si\", xyz = [0.125, 0.125, 0.125], b_iso_A2 = 0.5 }]\n";

fn with(lines: &str) -> String {
    format!("cell = [5.431, 5.431, 5.431, 90, 90, 90]\nspace_group = \"F d -3 m:2\"\n{lines}\n{SITES}")
}

#[test]
fn the_documented_form_gives_cell_atoms_expansion_and_formula() {
    let ceria = file("ceria.toml");
    assert_eq!((ceria.name.as_str(), ceria.group.xhm()), ("doped ceria", "F m -3 m"));
    assert_eq!(ceria.formula(), "Ce0.9Gd0.1O1.95");
    let labels: Vec<(&str, &str, i8)> =
        ceria.atoms.iter().map(|a| (a.label.as_str(), a.element.as_str(), a.charge)).collect();
    assert_eq!(labels, [("Ce1", "Ce", 4), ("Gd", "Gd", 3), ("O3", "O", -2)]);
    // B = 8π²U, 0.0057 Å² is 0.450054 Å².
    let Displacement::IsotropicB(b) = ceria.atoms[1].displacement else { panic!("{:?}", ceria.atoms[1]) };
    assert!((b - 0.450_053_96).abs() < 1e-7, "{b}");
    let expansion = ceria.expansion.unwrap();
    assert!((expansion.reference_celsius - 22.5).abs() < 1e-12);
    for axis in expansion.per_kelvin {
        assert!((axis.value - 1.15e-5).abs() < 1e-18 && (axis.u - 4e-7).abs() < 1e-18, "{expansion:?}");
    }
    assert_eq!(ceria.notes, ["without displacement parameter, B = 0 was assumed: O3"]);
}

#[test]
fn toml_and_cif_of_one_crystal_have_one_density() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/structures/thirds_to_three_digits.cif");
    let cif = Structure::from_cif(&std::fs::read(path).unwrap(), "zincite.cif").unwrap().remove(0);
    let toml = file("zincite.toml");
    assert_eq!(toml.name, "zincite");
    assert!((toml.density_g_cm3().unwrap() - cif.density_g_cm3().unwrap()).abs() < 1e-12);
    assert!(matches!(toml.atoms[0].displacement, Displacement::Anisotropic(u) if (u[3] - 0.004).abs() < 1e-12));
    // 1/3 and 2/3 are exact: nothing is moved.
    assert!(toml.notes.iter().all(|note| !note.contains("moved")), "{:?}", toml.notes);
}

#[test]
fn what_symmetry_fixes_may_be_left_out_of_the_cell() {
    for (cell, group, expected) in [
        ("{ a = 5 }", "\"I m -3 m\"", [5.0, 5.0, 5.0, 90.0, 90.0, 90.0]),
        ("{ a = 3, c = 5 }", "\"P 63 m c\"", [3.0, 3.0, 5.0, 90.0, 90.0, 120.0]),
        ("{ a = 5, alpha = 55 }", "\"R -3 c:R\"", [5.0, 5.0, 5.0, 55.0, 55.0, 55.0]),
        ("{ a = 4, c = 3 }", "136", [4.0, 4.0, 3.0, 90.0, 90.0, 90.0]),
        ("{ a = 4, b = 5, c = 6 }", "\"P n m a\"", [4.0, 5.0, 6.0, 90.0, 90.0, 90.0]),
        ("{ a = 4, b = 5, c = 6, beta = 100 }", "\"P 1 21/c 1\"", [4.0, 5.0, 6.0, 90.0, 100.0, 90.0]),
    ] {
        let structure = read(&format!("cell = {cell}\nspace_group = {group}\n{SITES}"));
        let found = structure.cell.parameters();
        assert!(found.iter().zip(expected).all(|(a, b)| (a - b).abs() < 1e-9), "{cell} {group}: {found:?}");
    }
    assert!(refusal(&format!("cell = {{ a = 4, b = 5 }}\nspace_group = \"P n m a\"\n{SITES}")).contains("without c"));
    assert!(refusal(&format!("cell = {{ a = 4, b = 5, c = 6 }}\nspace_group = \"P -1\"\n{SITES}")).contains("alpha"));
}

#[test]
fn a_hall_symbol_settles_the_origin() {
    let text = format!("cell = {{ a = 5.431 }}\nhall_symbol = \"F 4d 2 3 -1d\"\n{}", SITES.replace("0.125", "0"));
    let structure = read(&text);
    assert_eq!((structure.group.xhm(), structure.name.as_str()), ("F d -3 m:1", "silicon"));
    assert_eq!(structure.content().into_values().collect::<Vec<_>>(), [8.0]);
}

#[test]
fn an_expansion_without_its_uncertainty_is_said_to_be_exact() {
    let structure = read(&with("expansion_per_K = [2.6e-6, 2.6e-6, 2.6e-6]\nreference_C = 22.5"));
    assert!(structure.expansion.unwrap().per_kelvin.iter().all(|axis| (axis.value - 2.6e-6).abs() < 1e-18));
    assert!(structure.notes.iter().any(|note| note.contains("taken as exact")), "{:?}", structure.notes);
}

#[test]
fn every_message_stands_at_its_line_and_column_with_the_nearest_key() {
    for (line, place, words) in [
        ("expansion_per_k = 1e-5", "s.toml:3:1", "write `expansion_per_K`"),
        ("colour = 1", "s.toml:3:1", "remove it"),
        ("name = 3", "s.toml:3:8", "a text in quotes"),
        ("formula = \"(Si)\"", "s.toml:3:11", "elements with their numbers"),
        ("formula_units = nan", "s.toml:3:17", "a number from"),
        ("formula_units = 0", "s.toml:3:17", "a number from"),
        ("expansion_per_K = inf\nreference_C = 20", "s.toml:3:19", "a number from -0.01 to 0.01"),
        ("expansion_per_K = 1e-5", "s.toml:3:19", "add a line such as `reference_C"),
        ("u_expansion_per_K = 1e-5", "s.toml:3:21", "`expansion_per_K` beside it"),
        ("expansion_per_K = [1e-5, 2e-5, 3e-5]", "s.toml:3:19", "along a and b"),
        ("reference_C = -300", "s.toml:3:15", "from -273.15"),
        ("hall_symbol = \"P 1\"", "s.toml:3:15", "remove one of them"),
        ("name = \"α", "s.toml:3:", "no TOML"),
        ("name = \"a\"\nname = \"b\"", "s.toml:4:1", "no TOML"),
    ] {
        let message = refusal(&with(line));
        assert!(message.contains(place) && message.contains(words), "{line}: {message}");
    }
}

#[test]
fn every_wrong_site_is_refused() {
    for (site, words) in [
        ("element = \"Si\"", "without `xyz`"),
        ("xyz = [0, 0, 0]", "without `element`"),
        ("element = \"Qq\", xyz = [0, 0, 0]", "names no element"),
        ("element = \"Q\", xyz = [0, 0, 0]", "remove the site"),
        ("element = \"OH\", xyz = [0, 0, 0]", "a group of atoms"),
        ("element = \"Si\", xyz = [0, 0]", "2 entries"),
        ("element = \"Si\", xyz = [0, 0, \"x\"]", "a number"),
        ("element = \"Si\", xyz = [0, 0, \"1/0\"]", "a number"),
        ("element = \"Si\", xyz = [0, 0, 13.2]", "from -4 to 4"),
        ("element = \"Si\", xyz = [0, 0, nan]", "from -4 to 4"),
        ("element = \"Si\", xyz = [0, 0, 0], occupancy = 1.2", "from 0 to 1"),
        ("element = \"Si\", xyz = [0, 0, 0], occupancy = -0.1", "from 0 to 1"),
        ("element = \"Si\", xyz = [0, 0, 0], b_iso_A2 = -0.1", "from 0 to 1000"),
        ("element = \"Si\", xyz = [0, 0, 0], b_iso = 0.1", "write `b_iso_A2`"),
        ("element = \"Si\", xyz = [0, 0, 0], b_iso_A2 = 0.1, u_iso_A2 = 0.1", "remove one of the two"),
        ("element = \"Si\", xyz = [0, 0, 0], u_aniso_A2 = [1, 1, 1]", "3 entries"),
    ] {
        let message = refusal(&format!("cell = {{ a = 5 }}\nspace_group = 225\nsites = [{{ {site} }}]\n"));
        assert!(message.contains(words) && message.starts_with("s.toml:3:"), "{site}: {message}");
    }
    let twice = "cell = { a = 5 }\nspace_group = 225\nsites = [\n{ label = \"A\", element = \"Si\", xyz = [0, 0, 0] },\n\
                 { label = \"A\", element = \"Si\", xyz = [0.5, 0, 0] }]\n";
    assert!(refusal(twice).starts_with("s.toml:5:11: the label `A` again"), "{}", refusal(twice));
}
