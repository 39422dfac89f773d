//! The fast sum against the plain one, over random structures in many groups: the same numbers to 1e-10.

#![allow(clippy::unwrap_used)] // helpers of tests

use lattice::{Cell, CrystalSystem, SpaceGroup};
use structure_factor::{Atom, Displacement, ScatteringModel, Structure, direct_sum};

/// A generator of uniform numbers (xorshift64*), so that the structures are the same everywhere.
struct Random(u64);

impl Random {
    fn next(&mut self) -> f64 {
        self.0 ^= self.0 >> 12;
        self.0 ^= self.0 << 25;
        self.0 ^= self.0 >> 27;
        (self.0.wrapping_mul(0x2545_F491_4F6C_DD1D) >> 11) as f64 / (1_u64 << 53) as f64
    }

    fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.next()
    }
}

/// A cell that the system allows (unique axis b; hexagonal axes).
fn cell(random: &mut Random, system: CrystalSystem) -> Cell {
    let mut edge = || random.between(4.0, 9.0);
    let (a, b, c) = (edge(), edge(), edge());
    let mut angle = || random.between(75.0, 110.0);
    let (alpha, beta, gamma) = (angle(), angle(), angle());
    match system {
        CrystalSystem::Triclinic => Cell::new(a, b, c, alpha, beta, gamma),
        CrystalSystem::Monoclinic => Cell::new(a, b, c, 90.0, beta, 90.0),
        CrystalSystem::Orthorhombic => Cell::new(a, b, c, 90.0, 90.0, 90.0),
        CrystalSystem::Tetragonal => Cell::new(a, a, c, 90.0, 90.0, 90.0),
        CrystalSystem::Trigonal | CrystalSystem::Hexagonal => Cell::new(a, a, c, 90.0, 90.0, 120.0),
        CrystalSystem::Cubic => Cell::cubic(a),
    }
    .unwrap()
}

fn atoms(random: &mut Random, count: usize) -> Vec<Atom> {
    let kinds = [("O", -2), ("Fe", 3), ("Ba", 2), ("C", 0), ("D", 0)];
    (0..count)
        .map(|i| {
            let (element, charge) = kinds[i % kinds.len()];
            // Every third atom is on or close to a special position.
            let special = |x: f64| (x * 4.0).round() / 4.0 + 1e-3 * x;
            let mut place = || if i % 3 == 0 { special(random.next()) } else { random.next() };
            let position = [place(), place(), place()];
            let displacement = match i % 4 {
                0 => Displacement::IsotropicB(0.7),
                1 => Displacement::IsotropicB(random.between(0.0, 2.0)),
                _ => Displacement::Anisotropic(std::array::from_fn(|n| {
                    random.between(0.0, if n < 3 { 0.03 } else { 0.005 })
                })),
            };
            let occupancy = if i % 5 == 0 { random.between(0.2, 1.0) } else { 1.0 };
            Atom { label: format!("A{i}"), element: element.to_owned(), charge, position, occupancy, displacement }
        })
        .collect()
}

fn reflections(cell: &Cell, d_min: f64) -> Vec<[i32; 3]> {
    let mut hkl = Vec::new();
    for h in -9..=9 {
        for k in -9..=9 {
            for l in -9..=9 {
                if (h, k, l) != (0, 0, 0) && cell.d([h, k, l]) > d_min && (h + 2 * k + 3 * l) % 3 == 0 {
                    hkl.push([h, k, l]);
                }
            }
        }
    }
    hkl
}

fn check(structure: &Structure, hkl: &[[i32; 3]], energy: Option<f64>) {
    let fast = ScatteringModel::new(structure, energy).unwrap().f_squared(hkl).unwrap();
    let plain = direct_sum::f_squared(structure, hkl, energy).unwrap();
    let strongest = plain.iter().copied().fold(0.0, f64::max);
    for ((fast, plain), h) in fast.iter().zip(&plain).zip(hkl) {
        let off = (fast - plain).abs();
        assert!(off < 1e-10 * plain + 1e-13 * strongest, "{} {h:?}: {fast} and {plain}", structure.group.xhm());
    }
}

#[test]
fn the_fast_sum_is_the_plain_sum_in_groups_of_all_kinds() {
    let groups = [
        "P 1",
        "P -1",
        "P 1 2 1",
        "C 1 c 1",
        "P 1 21/c 1",
        "I 1 2/a 1",
        "P 21 21 21",
        "F d d 2",
        "P n m a",
        "F d d d:1",
        "C m c e",
        "I -4 2 d",
        "P 42/m n m",
        "I 41/a m d:1",
        "P 31 2 1",
        "R -3 c:H",
        "R 3 m:H",
        "P 63 m c",
        "P 63/m m c",
        "P 2 3",
        "I a -3",
        "F -4 3 m",
        "F d -3 m:1",
        "F d -3 m:2",
        "I a -3 d",
        "P 43 3 2",
    ];
    let mut random = Random(20_240_603);
    for symbol in groups {
        let group = SpaceGroup::from_symbol(symbol).unwrap().0;
        let cell = cell(&mut random, group.system());
        let structure = Structure {
            name: symbol.to_owned(),
            cell,
            atoms: atoms(&mut random, if group.operations().len() > 24 { 4 } else { 12 }),
            group,
            notes: Vec::new(),
            expansion: None,
            stated_formula: None,
            cell_u: None,
            stated_z: None,
        };
        let hkl = reflections(&cell, 1.2);
        check(&structure, &hkl, None);
        check(&structure, &hkl[..hkl.len() / 4], Some(8047.8));
    }
}

#[test]
fn many_atoms_with_one_b_and_absurd_tensors_take_their_own_paths_to_the_same_numbers() {
    let mut random = Random(7);
    let cell = Cell::new(7.0, 8.0, 9.0, 82.0, 97.0, 105.0).unwrap();
    let mut many = atoms(&mut random, 300);
    for atom in &mut many[..200] {
        atom.displacement = Displacement::IsotropicB(0.5);
    }
    let mut structure = Structure {
        name: "many".to_owned(),
        cell,
        group: SpaceGroup::from_symbol("P 1").unwrap().0,
        atoms: many,
        notes: Vec::new(),
        expansion: None,
        stated_formula: None,
        cell_u: None,
        stated_z: None,
    };
    let hkl = reflections(&cell, 1.0);
    check(&structure, &hkl, Some(17479.0));
    structure.atoms[250].displacement = Displacement::Anisotropic([40.0, 2.0, 90.0, 1.0, 3.0, -8.0]);
    structure.atoms[251].displacement = Displacement::IsotropicB(4000.0);
    check(&structure, &hkl, None);
}

#[test]
fn the_order_and_choice_of_reflections_do_not_matter() {
    let mut random = Random(11);
    let group = SpaceGroup::from_symbol("P 21 21 21").unwrap().0;
    let structure = Structure {
        name: "order".to_owned(),
        cell: cell(&mut random, group.system()),
        group,
        atoms: atoms(&mut random, 20),
        notes: Vec::new(),
        expansion: None,
        stated_formula: None,
        cell_u: None,
        stated_z: None,
    };
    let model = ScatteringModel::new(&structure, None).unwrap();
    let hkl = reflections(&structure.cell, 1.2);
    let together = model.f_squared(&hkl).unwrap();
    let strongest = together.iter().copied().fold(0.0, f64::max);
    for (h, value) in hkl.iter().zip(&together).step_by(17) {
        let alone = model.f_squared(&[*h]).unwrap()[0];
        assert!((alone - value).abs() < 1e-12 * value + 1e-14 * strongest, "{h:?}: {alone} {value}");
    }
    assert!(model.f_squared(&[]).unwrap().is_empty());
}
