//! Positions of the lines of reference materials, from their certified cells.

#![allow(clippy::unwrap_used)] // helpers of tests

use instrument::Anode;
use values::{Table, TwoTheta};

const LINES: &str = include_str!("data/line_tables.csv");

/// `1/d²` of the three systems that occur.
fn q(system: &str, a: f64, c: f64, [h, k, l]: [f64; 3]) -> f64 {
    match system {
        "cubic" => (h * h + k * k + l * l) / (a * a),
        "tetragonal" => (h * h + k * k) / (a * a) + l * l / (c * c),
        "hexagonal" => 4.0 / 3.0 * (h * h + h * k + k * k) / (a * a) + l * l / (c * c),
        other => panic!("unknown system {other}"),
    }
}

#[test]
fn lines_of_certified_cells_are_within_0_0001_degrees_for_copper_ka1() {
    let table = Table::parse(LINES, "line_tables.csv").unwrap();
    let wavelength = Anode::Cu.ka1().wavelength;
    let mut worst = 0.0_f64;
    for row in &table.rows {
        let number = |i: usize| row.fields[i].parse::<f64>().unwrap();
        let spacing = q(row.fields[1], number(2), number(3), [number(4), number(5), number(6)]).sqrt().recip();
        let found = TwoTheta::from_d(spacing, wavelength).unwrap().deg();
        let off = (found - number(7)).abs();
        assert!(off < 1e-4, "{:?}: {found}", row.fields);
        worst = worst.max(off);
    }
    assert!(table.rows.len() > 250, "{} lines", table.rows.len());
    // Four decimals are rounded to 0.00005; more than that is our own error.
    assert!(worst < 6e-5, "{worst}");
}
