//! The rule of special positions: images within 0.1 Å are one atom at their mean, tensors averaged alike, moves listed.

#![allow(clippy::unwrap_used)] // helpers of tests

use lattice::{Cell, SpaceGroup};
use structure_factor::expand::expand;
use structure_factor::{Atom, Displacement, ExpandedSite, ScatteringModel, Structure};

fn atom(position: [f64; 3], displacement: Displacement) -> Atom {
    Atom { label: "O1".to_owned(), element: "O".to_owned(), charge: 0, position, occupancy: 1.0, displacement }
}

fn site(group: &str, cell: Cell, position: [f64; 3]) -> ExpandedSite {
    expand(&cell, &SpaceGroup::from_symbol(group).unwrap().0, &atom(position, Displacement::IsotropicB(1.0)))
}

fn hexagonal(a: f64, c: f64) -> Cell {
    Cell::new(a, a, c, 90.0, 90.0, 120.0).unwrap()
}

fn close(a: [f64; 3], b: [f64; 3]) -> bool {
    a.iter().zip(b).all(|(a, b)| (a - b).abs() < 1e-12)
}

#[test]
fn multiplicities_are_those_of_international_tables() {
    // Outside: International Tables A, Wyckoff positions (from memory).
    let cubic = Cell::cubic(8.0).unwrap();
    let spinel = [
        ([0.125; 3], 8),
        ([0.5; 3], 16),
        ([0.0; 3], 16),
        ([0.375; 3], 8),
        ([0.2612; 3], 32),
        ([0.125, 0.125, 0.3], 48),
        ([0.1, 0.1, 0.3], 96),
        ([0.1, 0.2, 0.37], 192),
    ];
    for (position, wanted) in spinel {
        assert_eq!(site("F d -3 m:2", cubic, position).multiplicity, wanted, "{position:?}");
    }
    let corundum = [
        ([0.0, 0.0, 0.352], 12),
        ([0.306, 0.0, 0.25], 18),
        ([0.0; 3], 6),
        ([0.0, 0.0, 0.25], 6),
        ([0.1, 0.2, 0.3], 36),
    ];
    for (position, wanted) in corundum {
        assert_eq!(site("R -3 c:H", hexagonal(4.76, 12.99), position).multiplicity, wanted, "{position:?}");
    }
}

#[test]
fn a_general_position_is_not_moved_at_all() {
    let cell = Cell::new(5.1, 6.2, 7.3, 83.0, 95.0, 101.0).unwrap();
    let general = site("P -1", cell, [0.1, 0.2, 0.3]);
    assert_eq!((general.multiplicity, general.moved_angstrom), (2, 0.0));
    assert!(close(general.positions[0], [0.1, 0.2, 0.3]) && close(general.positions[1], [0.9, 0.8, 0.7]));
}

#[test]
fn printed_thirds_become_thirds() {
    let zinc = site("P 63 m c", hexagonal(3.25, 5.2), [0.333, 0.667, 0.0]);
    assert_eq!(zinc.multiplicity, 2);
    assert!(close(zinc.positions[0], [1.0 / 3.0, 2.0 / 3.0, 0.0]), "{:?}", zinc.positions);
    // Off by (−1/3000, +1/3000, 0) of a = 3.25 Å: a vector along a − b, √3 · 3.25/3000 Å long.
    assert!((zinc.moved_angstrom - 3f64.sqrt() * 3.25 / 3000.0).abs() < 1e-9, "{}", zinc.moved_angstrom);
}

#[test]
fn images_under_0_1_angstrom_are_one_atom_and_others_stay_apart() {
    // Mirror at z = 0 of P m (unique axis c: P 1 1 m): images are 2 z c apart.
    let cell = Cell::new(5.0, 6.0, 10.0, 90.0, 90.0, 90.0).unwrap();
    let merged = site("P 1 1 m", cell, [0.2, 0.3, 0.0049]);
    assert_eq!(merged.multiplicity, 1);
    assert!((merged.moved_angstrom - 0.049).abs() < 1e-12 && close(merged.positions[0], [0.2, 0.3, 0.0]), "{merged:?}");
    let apart = site("P 1 1 m", cell, [0.2, 0.3, 0.0051]);
    assert_eq!((apart.multiplicity, apart.moved_angstrom), (2, 0.0));
    // Across the border of the cell as well.
    let across = site("P 1 1 m", cell, [0.2, 0.3, 0.9951]);
    assert!((across.moved_angstrom - 0.049).abs() < 1e-9 && across.multiplicity == 1, "{across:?}");
}

#[test]
fn a_chain_of_close_images_is_one_atom_on_the_axis() {
    // Four-fold axis: neighbours 0.09 Å apart, opposite images 0.127 Å.
    let cell = Cell::new(10.0, 10.0, 7.0, 90.0, 90.0, 90.0).unwrap();
    let chain = site("P 4", cell, [0.0045, 0.0045, 0.3]);
    assert_eq!(chain.multiplicity, 1);
    assert!(close(chain.positions[0], [0.0, 0.0, 0.3]), "{chain:?}");
}

#[test]
fn a_tensor_on_a_four_fold_axis_is_averaged_to_its_symmetry() {
    let cell = Cell::new(6.0, 6.0, 8.0, 90.0, 90.0, 90.0).unwrap();
    let group = SpaceGroup::from_symbol("P 4").unwrap().0;
    let u = [0.010, 0.014, 0.020, 0.003, 0.004, 0.005];
    let found = expand(&cell, &group, &atom([0.0, 0.0, 0.3], Displacement::Anisotropic(u)));
    assert_eq!((found.multiplicity, found.betas.len()), (1, 1));
    let factor = 2.0 * std::f64::consts::PI.powi(2);
    let wanted = [0.012 / 36.0, 0.012 / 36.0, 0.020 / 64.0, 0.0, 0.0, 0.0].map(|u| factor * u);
    for (found, wanted) in found.betas[0].iter().zip(wanted) {
        assert!((found - wanted).abs() < 1e-15, "{found} {wanted}");
    }
    assert!((found.tensor_moved_square_angstrom - 0.005).abs() < 1e-12, "{found:?}");
}

#[test]
fn tensors_turn_with_their_images() {
    // A two-fold axis along b turns U12 and U23 into their opposites.
    let cell = Cell::new(5.0, 6.0, 7.0, 90.0, 97.0, 90.0).unwrap();
    let group = SpaceGroup::from_symbol("P 1 2 1").unwrap().0;
    let u = [0.010, 0.014, 0.020, 0.003, 0.004, 0.005];
    let found = expand(&cell, &group, &atom([0.1, 0.2, 0.3], Displacement::Anisotropic(u)));
    let signs = [1.0, 1.0, 1.0, -1.0, 1.0, -1.0];
    for ((turned, sign), given) in found.betas[1].iter().zip(signs).zip(found.betas[0]) {
        assert!((turned - sign * given).abs() < 1e-15, "{found:?}");
    }
}

#[test]
fn each_move_is_listed_with_its_atom() {
    let structure = Structure {
        name: "zincite".to_owned(),
        cell: hexagonal(3.25, 5.2),
        group: SpaceGroup::from_symbol("P 63 m c").unwrap().0,
        atoms: vec![
            atom([0.333, 0.667, 0.0], Displacement::IsotropicB(0.5)),
            atom([1.0 / 3.0, 2.0 / 3.0, 0.38], Displacement::Anisotropic([0.01, 0.01, 0.02, 0.009, 0.0, 0.0])),
        ],
        notes: Vec::new(),
        expansion: None,
        stated_formula: None,
        cell_u: None,
        stated_z: None,
    };
    let notes = structure.moves();
    assert_eq!(notes.len(), 2, "{notes:?}");
    assert!(notes[0].starts_with("O1 was moved by 0.00188 Å onto its special position of multiplicity 2"), "{notes:?}");
    assert!(notes[1].contains("displacement tensor of O1 was averaged"), "{notes:?}");
    assert!(ScatteringModel::new(&structure, None).unwrap().notes().is_empty(), "listed once");
}

#[test]
fn numbers_that_are_not_finite_are_refused_by_name() {
    let mut structure = Structure {
        name: "bad".to_owned(),
        cell: Cell::cubic(5.0).unwrap(),
        group: SpaceGroup::from_symbol("P 1").unwrap().0,
        atoms: vec![atom([0.1, f64::NAN, 0.2], Displacement::IsotropicB(0.5))],
        notes: Vec::new(),
        expansion: None,
        stated_formula: None,
        cell_u: None,
        stated_z: None,
    };
    assert!(ScatteringModel::new(&structure, None).err().unwrap().to_string().starts_with("O1: a coordinate"));
    structure.atoms[0].position[1] = 0.0;
    structure.atoms[0].displacement = Displacement::IsotropicB(f64::INFINITY);
    assert!(ScatteringModel::new(&structure, None).is_err());
}
