//! Structures from CIF: every spelling of a cell, its symmetry and its atoms, and what is said about doubtful ones.
#![allow(clippy::unwrap_used, reason = "tests may stop at what should be there")]

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

use structure_factor::{Displacement, Structure, f_squared};

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data")
}

fn all(name: &str) -> Vec<Structure> {
    let bytes = std::fs::read(folder().join("structures").join(name)).unwrap();
    Structure::from_cif(&bytes, name).unwrap_or_else(|message| panic!("{message}"))
}

fn read(name: &str) -> Structure {
    let mut structures = all(name);
    assert_eq!(structures.len(), 1, "{name}");
    structures.remove(0)
}

fn text(text: &str) -> Structure {
    Structure::from_cif(text.as_bytes(), "text.cif").unwrap_or_else(|message| panic!("{message}\n{text}")).remove(0)
}

fn says(structure: &Structure, words: &str) -> bool {
    structure.notes.iter().any(|note| note.contains(words))
}

fn b_iso(structure: &Structure, label: &str) -> f64 {
    let atom = structure.atoms.iter().find(|atom| atom.label == label).unwrap();
    match atom.displacement {
        Displacement::IsotropicB(b) => b,
        Displacement::Anisotropic(_) => panic!("{label} is anisotropic"),
    }
}

const SILICON_CELL: &str = "data_x _cell_length_a 5.431 _cell_length_b 5.431 _cell_length_c 5.431 \
    _cell_angle_alpha 90 _cell_angle_beta 90 _cell_angle_gamma 90\n";

/// A cubic cell with one more statement and one atom.
fn silicon(statement: &str, atom: &str) -> String {
    format!(
        "{SILICON_CELL}{statement}\nloop_ _atom_site_label _atom_site_type_symbol _atom_site_fract_x _atom_site_fract_y \
         _atom_site_fract_z {atom}\n"
    )
}

#[test]
fn cells_groups_and_contents_are_those_that_gemmi_reads() {
    // Outside: gemmi 0.7.5 on the same files; tools/read_structures.py.
    let table = std::fs::read_to_string(folder().join("structures_by_gemmi.csv")).unwrap();
    let table = values::Table::parse(&table, "structures_by_gemmi.csv").unwrap();
    for row in &table.rows {
        let [file, block, number, xhm, volume, atoms] = row.fields[..] else { panic!("{row:?}") };
        let structures = all(file);
        let structure = structures.iter().find(|structure| structure.name == block).unwrap();
        assert_eq!((structure.group.number(), structure.group.xhm()), (number.parse().ok(), xhm), "{file}");
        let volume: f64 = volume.parse().unwrap();
        assert!((structure.cell.volume() / volume - 1.0).abs() < 1e-7, "{file}: {}", structure.cell.volume());
        let expected: BTreeMap<String, f64> = atoms
            .split(' ')
            .map(|part| {
                let letters = part.chars().take_while(char::is_ascii_alphabetic).count();
                (part[..letters].to_owned(), part[letters..].parse().unwrap())
            })
            .collect();
        let found = structure.content();
        assert_eq!(found.keys().collect::<Vec<_>>(), expected.keys().collect::<Vec<_>>(), "{file}");
        for (element, count) in &expected {
            assert!((found[element] - count).abs() < 1e-5, "{file} {element}: {} and {count}", found[element]);
        }
    }
    assert!(table.rows.len() >= 14);
}

#[test]
fn silicon_is_the_same_by_hall_symbol_full_symbol_dotted_names_and_a_symbol_without_origin() {
    // By hand: 8 × 28.085 g/mol × 1.660539 / (5.431 Å)³ = 2.3291 g/cm³.
    let lines = [[1, 1, 1], [2, 2, 0], [2, 2, 2], [3, 1, 1], [4, 0, 0]];
    let reference = f_squared(&read("hall_only.cif"), &lines, None).unwrap();
    for file in ["hall_only.cif", "full_symbol_with_origin.cif", "short_symbol_origin_from_formula.cif"] {
        let structure = read(file);
        assert_eq!(structure.content().into_iter().collect::<Vec<_>>(), [("Si".to_owned(), 8.0)], "{file}");
        assert!((structure.density_g_cm3().unwrap() - 2.3291).abs() < 2e-4, "{file}");
        let found = f_squared(&structure, &lines, None).unwrap();
        for (a, b) in found.iter().zip(&reference) {
            assert!((a - b).abs() <= 1e-9 * reference[1], "{file}: {found:?} {reference:?}");
        }
    }
}

#[test]
fn the_formula_decides_between_two_origins_and_that_is_said() {
    let structure = read("short_symbol_origin_from_formula.cif");
    assert_eq!(structure.group.xhm(), "F d -3 m:1");
    assert!(says(&structure, "fit the formula only on origin 1"), "{:?}", structure.notes);
    // Without formula nothing can decide: origin 2, and that is said too.
    let bare = text(&silicon("_symmetry_space_group_name_H-M 'F d -3 m'", "Si1 Si 0 0 0"));
    assert_eq!(bare.group.xhm(), "F d -3 m:2");
    assert!(says(&bare, "origin choice 2"), "{:?}", bare.notes);
}

#[test]
fn hexagonal_and_rhombohedral_axes_give_one_crystal() {
    let (hexagonal, rhombohedral) = (read("hexagonal_axes.cif"), read("rhombohedral_axes.cif"));
    let density = |structure: &Structure| structure.density_g_cm3().unwrap();
    // Outside: corundum by xraylib's masses and gemmi's volume on the certified cell of SRM 676a, 3.9862 g/cm³; this cell
    // is 0.02 % smaller.
    assert!((density(&hexagonal) - 3.9862).abs() < 2e-3 && (density(&rhombohedral) - density(&hexagonal)).abs() < 1e-4);
    // 012 on hexagonal axes is 110 on rhombohedral ones; the hexagonal cell holds three times as much.
    let f2 = |structure, hkl| f_squared(structure, &[hkl], None).unwrap()[0];
    for (h, r) in [([0, 1, 2], [1, 1, 0]), ([1, 0, 4], [2, 1, 1]), ([1, 1, 0], [1, 0, -1]), ([0, 0, 6], [2, 2, 2])] {
        let (big, small) = (f2(&hexagonal, h), f2(&rhombohedral, r));
        assert!((big - 9.0 * small).abs() < 1e-3 * big.max(1.0), "{h:?}: {big} and 9 × {small}");
    }
}

#[test]
fn operations_win_over_the_symbol_and_every_contradiction_is_named() {
    let structure = read("operations_against_symbol.cif");
    assert_eq!(structure.group.number(), Some(2));
    for words in [
        "stated volume 80",
        "symbol `P m -3 m` contradicts",
        "number 225 contradicts",
        "system `hexagonal` contradicts",
        "Cl1 8 and 1",
        "stated density 5 ",
    ] {
        assert!(says(&structure, words), "{words}: {:?}", structure.notes);
    }
}

#[test]
fn a_number_alone_or_nothing_is_read_with_a_word_about_it() {
    let fluorite = read("number_only.cif");
    assert_eq!((fluorite.group.xhm(), fluorite.formula().as_str()), ("F m -3 m", "CaF2"));
    assert!(says(&fluorite, "only its number is known"));
    let bare = read("no_symmetry.cif");
    assert_eq!(bare.group.number(), Some(1));
    assert!(says(&bare, "taken as P 1"));
}

#[test]
fn thirds_of_three_digits_are_one_atom_and_the_move_is_listed() {
    let structure = read("thirds_to_three_digits.cif");
    assert_eq!(structure.expand().iter().map(|site| site.multiplicity).collect::<Vec<_>>(), [2, 2]);
    // 0.333 and 0.667 lie (1/3000, 1/3000) from the axis: a/3000 for these axes, 0.00188 Å with the 60° between them.
    assert!(says(&structure, "Zn1 was moved by 0.00188 Å") && says(&structure, "O1 was moved by 0.00188 Å"));
    // What is listed as given stays as given.
    assert!((structure.atoms[0].position[0] - 0.333).abs() < 1e-12);
}

#[test]
fn ions_isotopes_and_occupancies_are_kept() {
    let corundum = read("hexagonal_axes.cif");
    let species = |structure: &Structure| {
        structure.atoms.iter().map(|atom| (atom.element.clone(), atom.charge)).collect::<Vec<_>>()
    };
    assert_eq!(species(&corundum), [("Al".to_owned(), 3), ("O".to_owned(), -2)]);
    assert_eq!(species(&read("rhombohedral_axes.cif")), species(&corundum));
    let ice = read("deuterium.cif");
    assert_eq!(species(&ice), [("O".to_owned(), 0), ("D".to_owned(), 0)]);
    assert!(!says(&ice, "differ"), "{:?}", ice.notes);
    let spinel = read("mixed_site.cif");
    let occupancies: Vec<f64> = spinel.atoms.iter().map(|atom| atom.occupancy).collect();
    assert_eq!(occupancies, [0.6, 0.4, 1.0, 0.99]);
    assert!(!says(&spinel, "add up") && !says(&spinel, "times the formula"), "{:?}", spinel.notes);
}

#[test]
fn u_wins_over_b_and_both_are_read() {
    let spinel = read("mixed_site.cif");
    // B = 8π²U: 0.005 Å² is 0.394784 Å².
    assert!((b_iso(&spinel, "Mg1") - 0.394_784_176).abs() < 1e-8);
    assert!((b_iso(&spinel, "Fe1") - 0.5).abs() < 1e-12);
    assert!((b_iso(&spinel, "O1") - 0.789_568_352).abs() < 1e-8);
    assert!(says(&spinel, "U was used: O1 (U 0.01, B 3 Å²)") && !says(&spinel, "Al1"), "{:?}", spinel.notes);
}

#[test]
fn tensors_are_read_in_any_order_as_b_and_as_beta() {
    let structure = read("anisotropic.cif");
    let Displacement::Anisotropic(titanium) = structure.atoms[0].displacement else {
        panic!("{:?}", structure.atoms[0])
    };
    let Displacement::Anisotropic(oxygen) = structure.atoms[1].displacement else { panic!("{:?}", structure.atoms[1]) };
    let per_u = 8.0 * std::f64::consts::PI.powi(2);
    let expected = |b: [f64; 6]| b.map(|b| b / per_u);
    let close = |a: [f64; 6], b: [f64; 6]| a.iter().zip(b).all(|(a, b)| (a - b).abs() < 1e-12);
    assert!(close(titanium, expected([0.56, 0.56, 0.40, -0.02, 0.0, 0.0])), "{titanium:?}");
    assert!(close(oxygen, expected([0.45, 0.45, 0.35, -0.15, 0.0, 0.0])), "{oxygen:?}");
    assert!((b_iso(&structure, "O2") - 0.004 * per_u).abs() < 1e-12);
    assert!(says(&structure, "not listed were left out: O9"));
    // The same tensors as β of T = exp{−(β11 h² + …)}: βij = 2π² a*i a*j Uij, here B/4 times a*i a*j.
    let beta = read("beta_tensors.cif");
    for (atom, u) in beta.atoms.iter().zip([titanium, oxygen]) {
        let Displacement::Anisotropic(found) = atom.displacement else { panic!("{atom:?}") };
        assert!(found.iter().zip(u).all(|(a, b)| (a - b).abs() < 1e-6), "{found:?} {u:?}");
    }
}

#[test]
fn tensors_may_stand_in_the_loop_of_the_atoms_and_u_wins_over_b() {
    let structure = text(&format!(
        "{SILICON_CELL}_space_group_name_H-M_alt 'P 1'\nloop_ _atom_site_label _atom_site_fract_x _atom_site_fract_y \
         _atom_site_fract_z _atom_site_aniso_U_11 _atom_site_aniso_U_22 _atom_site_aniso_U_33 _atom_site_aniso_U_12 \
         _atom_site_aniso_U_13 _atom_site_aniso_U_23 Si1 0 0 0 0.01 0.02 0.03 0.001 0.002 0.003 Si2 .5 0 0 . . . . . .\n"
    ));
    assert_eq!(structure.atoms[0].displacement, Displacement::Anisotropic([0.01, 0.02, 0.03, 0.001, 0.002, 0.003]));
    assert!(says(&structure, "B = 0 was assumed: Si2"), "{:?}", structure.notes);
}

#[test]
fn an_occupancy_that_cannot_be_meant_is_refused_at_its_place() {
    let cif = |occupancy: &str| {
        format!(
            "{SILICON_CELL} _space_group_IT_number 227 loop_ _atom_site_label _atom_site_fract_x _atom_site_fract_y \
             _atom_site_fract_z _atom_site_occupancy\nSi1 0 0 0 {occupancy}\n"
        )
    };
    // Percent can be meant, and is said.
    assert!(says(&text(&cif("99.5")), "occupancy above 1, used as it stands: Si1 (99.5)"));
    for wrong in ["-0.1", "1001", "1e308"] {
        let refused = Structure::from_cif(cif(wrong).as_bytes(), "text.cif").unwrap_err();
        assert!(refused.to_string().starts_with("text.cif:3:11: the occupancy"), "{wrong}: {refused}");
    }
}

#[test]
fn missing_zero_negative_and_huge_displacements_are_listed() {
    let structure = read("doubtful_displacements.cif");
    for words in ["B = 0 was assumed: Si2", "U = 0, as if it did not move: Si3", "Si4 (-0.0100 Å²)", "Si5 (0.8000 Å²)"]
    {
        assert!(says(&structure, words), "{words}: {:?}", structure.notes);
    }
    assert!(b_iso(&structure, "Si2").abs() < 1e-12);
}

#[test]
fn elements_come_from_labels_where_no_type_is_given_and_dummies_are_left_out() {
    let structure = read("labels_only.cif");
    let elements: Vec<&str> = structure.atoms.iter().map(|atom| atom.element.as_str()).collect();
    assert_eq!(elements, ["Ca", "Fe", "Fe", "Hg", "O", "O", "O", "O", "O"]);
    assert!(says(&structure, "left out: X1, Q2"), "{:?}", structure.notes);
    assert_eq!(structure.formula(), "CaFe2HgO5");
}

#[test]
fn content_against_formula_is_said_with_both_numbers_and_likely_causes() {
    let structure = read("occupancy_times_multiplicity.cif");
    assert!(says(&structure, "Ca 4.000 and 0.083, F 8.000 and 0.333"), "{:?}", structure.notes);
    assert!(says(&structure, "times multiplicity over the order of the group"));
    let missing = text(&silicon("_chemical_formula_sum 'Si O2' _space_group_IT_number 1", "Si1 Si 0 0 0"));
    assert!(says(&missing, "O 0.400 and 0.000"), "{:?}", missing.notes);
    let group = text(&silicon("_chemical_formula_sum 'Fe2(SO4)3' _space_group_IT_number 1", "Si1 Si 0 0 0"));
    assert!(says(&group, "no plain sum"), "{:?}", group.notes);
}

#[test]
fn equivalent_atoms_listed_side_by_side_overfill_their_site() {
    assert!(says(&read("equivalent_atoms_listed.cif"), "O1, O2 on one site add up to 2.000"));
}

#[test]
fn disorder_groups_are_kept_with_their_occupancies() {
    let structure = read("disorder.cif");
    assert_eq!(structure.atoms.len(), 3);
    assert!(says(&structure, "disorder groups were kept") && !says(&structure, "add up"), "{:?}", structure.notes);
}

#[test]
fn every_block_with_a_cell_and_atoms_is_a_structure_by_its_name() {
    let structures = all("several_blocks.cif");
    assert_eq!(structures.iter().map(|structure| structure.name.as_str()).collect::<Vec<_>>(), ["one", "two"]);
    assert!(says(&structures[0], "`empty_cell` has a cell but no atoms"), "{:?}", structures[0].notes);
}

#[test]
fn missing_angles_are_right_angles_by_default_and_said() {
    let structure = read("angles_by_default.cif");
    assert!((structure.cell.gamma - 90.0).abs() < 1e-12);
    assert!(says(&structure, "`_cell_angle_gamma` is not given"));
}

#[test]
fn occupancies_and_displacements_that_do_not_apply_take_their_defaults() {
    let structure = text(&format!(
        "{SILICON_CELL}_space_group_IT_number 1\nloop_ _atom_site_label _atom_site_fract_x _atom_site_fract_y \
         _atom_site_fract_z _atom_site_occupancy _atom_site_U_iso_or_equiv Si1 0 0 0 . . Si2 0.5 0.5 0 ? 0.01(2) Si3 ? ? ? 1 1\n"
    ));
    assert_eq!(structure.atoms.iter().map(|atom| atom.occupancy).collect::<Vec<_>>(), [1.0, 1.0]);
    assert!(says(&structure, "without coordinates were left out: Si3"), "{:?}", structure.notes);
}

#[test]
fn the_same_file_reads_the_same_with_any_line_end_a_byte_order_mark_and_as_cif_2() {
    let bytes = std::fs::read(folder().join("structures/hexagonal_axes.cif")).unwrap();
    let plain = String::from_utf8(bytes).unwrap();
    let reference = read("hexagonal_axes.cif");
    for variant in [
        plain.replace('\n', "\r\n"),
        plain.replace('\n', "\r"),
        format!("\u{feff}{plain}"),
        plain.replace(' ', "\t"),
        format!("#\\#CIF_2.0\n{plain}"),
        plain.trim_end().to_owned(),
        plain.replace("_atom_site_", "_ATOM_SITE_").replace("_cell_", "_CELL_"),
    ] {
        // A tab inside the quoted symbol is no blank of it.
        let variant = variant.replace("'R\t-3\tc\t:H'", "'R -3 c :H'").replace("'Al2\tO3'", "'Al2 O3'");
        let structure = text(&variant);
        assert_eq!((&structure.atoms, structure.cell), (&reference.atoms, reference.cell), "{variant:?}");
    }
}

/// Open CIFs that a package of the Python registry carries; read where a venv with `crystals` is named by CRYSTALS_CIFS.
#[test]
fn the_open_cifs_of_the_crystals_package_all_read() {
    let Some(folder) = std::env::var_os("CRYSTALS_CIFS") else {
        println!("skipped: CRYSTALS_CIFS does not name a folder");
        return;
    };
    let mut count = 0;
    let mut waiting = vec![PathBuf::from(folder)];
    while let Some(folder) = waiting.pop() {
        for path in std::fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()) {
            if path.is_dir() {
                waiting.push(path);
            } else if path.extension().is_some_and(|extension| extension == "cif") {
                let read = Structure::from_cif(&std::fs::read(&path).unwrap(), &path.display().to_string());
                assert!(read.is_ok_and(|structures| structures.len() == 1), "{}", path.display());
                count += 1;
            }
        }
    }
    assert!(count >= 90, "{count}");
}
