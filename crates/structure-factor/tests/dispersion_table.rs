//! `data/dispersion.csv` against its source at random energies, against printed values, and against another theory.

#![allow(clippy::unwrap_used)] // helpers of tests

use instrument::Anode;
use structure_factor::StructureFactorError;
use structure_factor::tables::{absorption_edges_ev, dispersion};
use values::Table;

const TABLE: &str = include_str!("../../../data/dispersion.csv");

#[test]
fn five_hundred_random_energies_are_within_0_002_electrons_of_the_source() {
    // Outside: gemmi 0.7.5 cromer_liberman at 500 random (element, energy), tools/outside_values.py.
    let table = Table::parse(include_str!("data/gemmi_dispersion.csv"), "gemmi_dispersion.csv").unwrap();
    let mut worst = 0.0_f64;
    for row in &table.rows {
        let number = |i: usize| row.fields[i].parse::<f64>().unwrap();
        let found = dispersion(row.fields[0], number(1)).unwrap();
        let off = (found.f1 - number(2)).abs().max((found.f2 - number(3)).abs());
        assert!(off < 0.002, "{:?}: {found:?}", row.fields);
        worst = worst.max(off);
        // Absorption follows from f″, so it must hold for light atoms too; the fixture has five decimals.
        assert!((found.f2 - number(3)).abs() < 0.005 * number(3) + 1e-5, "{:?}: {found:?}", row.fields);
    }
    assert_eq!(table.rows.len(), 500);
    // The table is made to 0.0009; a looser result here means that reading and writing disagree about the interpolation.
    assert!(worst < 0.0012, "{worst}");
}

#[test]
fn values_at_the_lines_of_tubes_are_those_of_the_library() {
    // Outside: the library's values at Cu and Mo Kα1, four decimals (verified).
    let table = Table::parse(include_str!("data/dispersion_values.csv"), "dispersion_values.csv").unwrap();
    for row in &table.rows {
        let anode: Anode = row.fields[1].parse().unwrap();
        let number = |i: usize| row.fields[i].parse::<f64>().unwrap();
        let found = dispersion(row.fields[0], anode.ka1().wavelength.energy_ev()).unwrap();
        assert!((found.f1 - number(2)).abs() < 0.002, "{:?}: {found:?}", row.fields);
        assert!((found.f2 - number(3)).abs() < 0.002, "{:?}: {found:?}", row.fields);
    }
    assert_eq!(table.rows.len(), 48);
}

#[test]
fn another_theory_agrees_as_far_as_theories_do() {
    // Outside: xraylib 4.3.0 Fi, −Fii for 20 elements at three lines, tools/outside_values.py. Another theory: f′ differs by
    // up to 0.25 electrons for heavy atoms, by 0.53 for uranium 313 eV above its L3 edge; f″ by 3 % where it matters.
    let table = Table::parse(include_str!("data/xraylib_dispersion.csv"), "xraylib_dispersion.csv").unwrap();
    let mut differences = Vec::new();
    for row in &table.rows {
        let number = |i: usize| row.fields[i].parse::<f64>().unwrap();
        let found = dispersion(row.fields[0], number(1)).unwrap();
        let off = (found.f1 - number(2)).abs();
        let limit = if row.fields[0] == "U" { 0.55 } else { 0.25 };
        assert!(off < limit, "{:?}: {found:?}", row.fields);
        assert!((found.f2 - number(3)).abs() < 0.002 + 0.03 * number(3), "{:?}: {found:?}", row.fields);
        differences.push(off);
    }
    differences.sort_by(f64::total_cmp);
    assert!(differences[30] < 0.03, "median {}", differences[30]);
    assert_eq!(table.rows.len(), 60);
}

#[test]
fn every_row_is_whole_and_the_rows_of_an_element_join_at_its_edges() {
    let table = Table::parse(TABLE, "data/dispersion.csv").unwrap();
    let column = |name| table.column(name).unwrap();
    let list = |text: &str| text.split(' ').map(|t| t.parse::<f64>().unwrap()).collect::<Vec<f64>>();
    let mut last: Option<(&str, &str)> = None;
    for row in &table.rows {
        let field = |name| row.fields[column(name)];
        for (xs, ys) in [("f1_energies_eV", "f1_rest"), ("f2_energies_eV", "f2")] {
            let (xs, ys) = (list(field(xs)), list(field(ys)));
            assert_eq!(xs.len(), ys.len(), "line {}", row.line);
            assert!(xs.len() > 1 && xs.windows(2).all(|w| w[0] < w[1]), "line {}: energies rise", row.line);
            assert!(xs[0] >= 2000.0 && xs[xs.len() - 1] <= 60000.0);
        }
        assert!(list(field("f2")).iter().all(|f2| *f2 > 0.0), "line {}: f″ is above zero", row.line);
        // The edge above a row is the edge below the next of the same element.
        match last {
            Some((element, above)) if element == field("element") => assert_eq!(above, field("edge_below_eV")),
            Some((_, above)) => assert_eq!((above, field("edge_below_eV")), ("", "")),
            None => assert_eq!(field("edge_below_eV"), ""),
        }
        last = Some((field("element"), field("edge_above_eV")));
    }
}

#[test]
fn nothing_is_interpolated_across_an_edge() {
    // Iron, K edge at 7112 eV: f″ jumps from 0.468 to 3.952 (gemmi 0.7.5), f′ has a pole on both sides.
    let (below, above) = (dispersion("Fe", 7111.9).unwrap(), dispersion("Fe", 7112.1).unwrap());
    assert!((below.f2 - 0.468).abs() < 2e-3 && (above.f2 - 3.952).abs() < 2e-3, "{below:?} {above:?}");
    // 0.1 eV away: −11.469 and −11.491 (gemmi 0.7.5).
    assert!((below.f1 + 11.469).abs() < 3e-3 && (above.f1 + 11.491).abs() < 3e-3, "{below:?} {above:?}");
    let at = dispersion("Fe", 7112.0).unwrap();
    assert!(at.f1.is_finite() && at.f2.is_finite());
}

#[test]
fn edges_are_where_tables_of_edges_have_them() {
    // Outside: K and L3 edges of xraylib 4.3.0, EdgeEnergy, in eV.
    let edges = [
        ("Fe", 7112.0),
        ("Cu", 8978.9),
        ("Mo", 19999.5),
        ("Sn", 29200.1),
        ("Pb", 13035.2),
        ("U", 17166.3),
        ("Ce", 40443.0),
    ];
    for (element, wanted) in edges {
        let found = absorption_edges_ev(element);
        assert!(found.iter().any(|e| (e - wanted).abs() < 1.0), "{element}: {found:?}");
    }
    assert_eq!(absorption_edges_ev("O"), Vec::<f64>::new());
}

#[test]
fn a_note_names_an_edge_within_50_ev() {
    let near = dispersion("Co", 7690.0).unwrap().note.unwrap();
    assert!(near.contains("Co") && near.contains("7708.9"), "{near}");
    assert_eq!(dispersion("Co", 7650.0).unwrap().note, None);
    assert_eq!(dispersion("Co", Anode::Cu.ka1().wavelength.energy_ev()).unwrap().note, None);
}

#[test]
fn bismuth_at_copper_is_wrong_in_the_source_and_says_so() {
    let energy = Anode::Cu.ka1().wavelength.energy_ev();
    let found = dispersion("Bi", energy).unwrap();
    // Outside: f′ = −4.119 (xraylib 4.3.0, Fi), −4.011 (International Tables C 4.2.6.8, from memory); gemmi 0.7.5: −3.125.
    assert!((found.f1 + 3.125).abs() < 0.002, "{found:?}; if the source was mended, take the note away");
    assert!(found.note.unwrap().contains("numerical fault"));
    assert_eq!(dispersion("Bi", Anode::Mo.ka1().wavelength.energy_ev()).unwrap().note, None);
}

#[test]
fn hydrogen_and_helium_have_none_and_the_heaviest_say_that_theirs_is_missing() {
    for element in ["H", "D", "T", "He"] {
        let none = dispersion(element, 8048.0).unwrap();
        assert!(none.f1.abs() < 1e-15 && none.f2.abs() < 1e-15 && none.note.is_none(), "{element}: {none:?}");
    }
    let heavy = dispersion("Pu", 8048.0).unwrap();
    assert!(heavy.f2.abs() < 1e-15 && heavy.note.unwrap().contains("Pu"));
}

#[test]
fn energies_outside_the_table_are_refused() {
    for energy in [1999.0, 60001.0, f64::NAN, -1.0] {
        assert!(matches!(dispersion("Fe", energy), Err(StructureFactorError::EnergyOutsideTable { .. })), "{energy}");
    }
    assert!(dispersion("Fe", 2000.0).is_ok() && dispersion("Fe", 60000.0).is_ok());
}
