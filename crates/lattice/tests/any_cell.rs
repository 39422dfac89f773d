//! What holds for any cell, however odd.

#![allow(clippy::unwrap_used, reason = "what a cell does not hold fails the test")]

use lattice::{Cell, Centring, SpaceGroup, niggli_cell, reflections, same_lattice, selling_lengths};
use proptest::prelude::{ProptestConfig, any, prop_assert, prop_assume, proptest};

proptest! {
    #![proptest_config(ProptestConfig { cases: 2000, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn six_numbers_are_a_cell_or_an_error_and_every_cell_has_a_volume(p in any::<[f64; 6]>()) {
        if let Ok(cell) = Cell::new(p[0], p[1], p[2], p[3], p[4], p[5]) {
            prop_assert!(cell.volume() > 0.0 && cell.volume().is_finite());
        }
    }

    #[test]
    fn odd_cells_are_reduced_or_refused(
        edges in proptest::array::uniform3(-3.0..4.0_f64),
        angles in proptest::array::uniform3(0.5..179.5_f64),
        letter in 0_usize..7,
    ) {
        let [a, b, c] = edges.map(|power| 10f64.powf(power));
        let Ok(cell) = Cell::new(a, b, c, angles[0], angles[1], angles[2]) else { return Ok(()) };
        let centring = Centring::ALL[letter];
        let _ = selling_lengths(&cell, centring);
        if let Ok(niggli) = niggli_cell(&cell, centring) {
            let primitive = cell.volume() / f64::from(centring.multiplicity());
            // Squares of edges and sines are what is computed with: long and flat cells keep fewer digits.
            let ratio = a.max(b).max(c) / a.min(b).min(c);
            let lost = (ratio * a * b * c / cell.volume()).powi(2);
            prop_assert!((niggli.volume() / primitive - 1.0).abs() < 1e-14 * lost, "{cell:?} {niggli:?}");
        }
    }

    #[test]
    fn the_niggli_cell_is_the_same_lattice_with_the_same_lines(
        edges in proptest::array::uniform3(2.5..20.0_f64),
        angles in proptest::array::uniform3(55.0..125.0_f64),
        letter in 0_usize..6,
    ) {
        let cell = Cell::new(edges[0], edges[1], edges[2], angles[0], angles[1], angles[2]);
        prop_assume!(cell.is_ok_and(|cell| cell.volume() > 0.3 * edges.iter().product::<f64>()));
        let (cell, centring) = (cell.unwrap(), Centring::ALL[letter]);
        let niggli = niggli_cell(&cell, centring).unwrap();
        prop_assert!(same_lattice((&cell, centring), (&niggli, Centring::P), 1e-8).unwrap());
        prop_assert!(niggli.a <= niggli.b + 1e-9 && niggli.b <= niggli.c + 1e-9);
    }

    #[test]
    fn equivalent_reflections_have_one_spacing_and_are_absent_together(
        number in 1_u16..=230,
        hkl in proptest::array::uniform3(-9_i32..=9),
    ) {
        let group = SpaceGroup::from_number(number).unwrap();
        let cell = group.symmetrised(&Cell::new(5.1, 6.9, 7.2, 81.1, 95.2, 110.3).unwrap()).unwrap();
        let all = group.equivalents(hkl);
        prop_assert!(all.contains(&hkl) && group.laue_rotations().len().is_multiple_of(all.len()));
        for other in all {
            prop_assert!((cell.q(other) - cell.q(hkl)).abs() <= 1e-12 * cell.q(hkl));
            prop_assert!(group.is_absent(other) == group.is_absent(hkl));
        }
    }
}

#[test]
fn every_point_inside_the_limit_is_counted_once() {
    // The sum of the multiplicities over P 1 is the number of lattice points in the sphere but for 000.
    let cell = Cell::new(5.1, 6.9, 7.2, 81.1, 95.2, 110.3).unwrap();
    let d_min = 0.8;
    let list = reflections(&cell, &SpaceGroup::p1(), d_min, f64::INFINITY).unwrap();
    let mut points = 0;
    for h in -12..=12 {
        for k in -12..=12 {
            for l in -12..=12 {
                points += u32::from([h, k, l] != [0, 0, 0] && cell.d([h, k, l]) >= d_min);
            }
        }
    }
    assert_eq!(list.iter().map(|r| r.multiplicity).sum::<u32>(), points);
    let part = reflections(&cell, &SpaceGroup::p1(), d_min, 2.0).unwrap();
    assert_eq!(part.len(), list.iter().filter(|r| r.d <= 2.0).count());
}
