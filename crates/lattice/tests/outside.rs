//! Symmetry, spacings, reflections and reduced cells against gemmi and spglib.
//!
//! The values in `tests/data` are made by `tools/lattice_fixtures.py`, which says how operations are hashed.

#![allow(clippy::unwrap_used, reason = "what a fixture does not hold fails the test")]

use lattice::{Cell, Centring, Operation, SpaceGroup, niggli_cell, reflections};
use values::{Row, Table};

const SETTINGS: &str = include_str!("data/settings.csv");
const HALL: &str = include_str!("data/hall.csv");
const SPACINGS: &str = include_str!("data/spacings.csv");
const REDUCED: &str = include_str!("data/reduced.csv");
const LISTS: &str = include_str!("data/lists.csv");

fn rows<'a>(text: &'a str, name: &str) -> Vec<Row<'a>> {
    Table::parse(text, name).unwrap().rows
}

fn numbers<const N: usize>(fields: &[&str]) -> [f64; N] {
    std::array::from_fn(|i| fields[i].parse().unwrap())
}

/// FNV-1a of 64 bits, as sixteen hexadecimal digits.
fn fnv(text: &str) -> String {
    let hash = text
        .bytes()
        .fold(0xCBF2_9CE4_8422_2325_u64, |hash, byte| (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01B3));
    format!("{hash:016x}")
}

fn hash(operations: &[Operation]) -> String {
    let mut texts: Vec<String> = operations
        .iter()
        .map(|o| {
            let rotation = o.rotation.iter().flatten().map(ToString::to_string);
            rotation.chain(o.translation.iter().map(ToString::to_string)).collect::<Vec<_>>().join(" ")
        })
        .collect();
    texts.sort();
    fnv(&texts.join(";"))
}

struct Known<'a> {
    number: u16,
    xhm: &'a str,
    hall: &'a str,
    short: &'a str,
    full: &'a str,
    choice: &'a str,
    system: &'a str,
    operations: usize,
    hash: &'a str,
    multiplicities: Vec<u32>,
    absent: &'a str,
    tabulated: bool,
}

fn settings() -> Vec<Known<'static>> {
    let settings: Vec<Known<'static>> = rows(SETTINGS, "settings.csv")
        .iter()
        .map(|row| {
            let f = &row.fields;
            Known {
                number: f[1].parse().unwrap(),
                xhm: f[2],
                hall: f[3],
                short: f[4],
                full: f[5],
                choice: f[6],
                system: f[7],
                operations: f[8].parse().unwrap(),
                hash: f[9],
                multiplicities: f[10].split(' ').map(|n| n.parse().unwrap()).collect(),
                absent: f[11],
                tabulated: f[0].parse::<u16>().unwrap() <= 530,
            }
        })
        .collect();
    assert_eq!(settings.len(), 564);
    settings
}

#[test]
fn every_hall_symbol_gives_the_operations_of_gemmi() {
    for known in settings() {
        let group = SpaceGroup::from_hall(known.hall).unwrap();
        assert_eq!(group.operations().len(), known.operations, "{}", known.hall);
        assert_eq!(hash(group.operations()), known.hash, "{}", known.hall);
        assert_eq!(group.number(), Some(known.number), "{}", known.hall);
    }
}

#[test]
fn every_extended_symbol_gives_the_operations_and_names_of_gemmi() {
    for known in settings() {
        let (group, note) = SpaceGroup::from_symbol(known.xhm).unwrap();
        assert_eq!(hash(group.operations()), known.hash, "{}", known.xhm);
        assert_eq!(note, None, "{}", known.xhm);
        assert_eq!((group.xhm(), group.hall(), group.number()), (known.xhm, known.hall, Some(known.number)));
        assert_eq!(group.system().to_string(), known.system, "{}", known.xhm);
        // gemmi writes H for R on hexagonal axes; 1 is left out of monoclinic symbols only.
        let letters = |text: &str| text.replacen('H', "R", 1);
        if known.tabulated {
            assert_eq!(letters(&group.short_symbol()), letters(known.short), "{}", known.xhm);
        }
    }
}

#[test]
fn groups_built_from_operations_are_known_by_number_and_setting() {
    let mut shared = 0;
    for known in settings() {
        let group = SpaceGroup::from_hall(known.hall).unwrap();
        let again = SpaceGroup::from_operations(group.operations()).unwrap();
        assert_eq!(again.number(), Some(known.number), "{}", known.xhm);
        shared += usize::from(again.xhm() != known.xhm);
    }
    // Three pairs of symbols of number 68 share one set of operations, and so does a second name of A c a m.
    assert_eq!(shared, 4);
}

#[test]
fn every_full_symbol_of_spglib_gives_the_operations_of_gemmi() {
    let mut tried = 0;
    for known in settings().into_iter().filter(|known| known.tabulated) {
        let symbol = format!("{}:{}", known.full, known.choice);
        let symbol = symbol.trim_end_matches(':');
        let (group, _) = SpaceGroup::from_symbol(symbol).unwrap_or_else(|e| panic!("{symbol}: {e}"));
        assert_eq!(hash(group.operations()), known.hash, "{symbol}");
        tried += 1;
    }
    assert_eq!(tried, 530);
}

#[test]
fn hall_symbols_beyond_the_tables_give_the_operations_of_gemmi() {
    let rows = rows(HALL, "hall.csv");
    assert!(rows.len() > 200);
    for row in rows {
        let symbol = row.fields[0].replace(';', ",");
        let group = SpaceGroup::from_hall(&symbol).unwrap_or_else(|e| panic!("{symbol}: {e}"));
        assert_eq!(group.operations().len().to_string(), row.fields[1], "{symbol}");
        assert_eq!(hash(group.operations()), row.fields[2], "{symbol}");
    }
}

#[test]
fn absences_of_all_settings_agree_with_gemmi() {
    for known in settings() {
        let group = SpaceGroup::from_hall(known.hall).unwrap();
        let mut bits = Vec::new();
        for h in -4..=4 {
            for k in -4..=4 {
                for l in -4..=4 {
                    bits.push(group.is_absent([h, k, l]));
                }
            }
        }
        let lead = (4 - bits.len() % 4) % 4;
        bits.splice(0..0, std::iter::repeat_n(false, lead));
        let digits: String = bits
            .chunks(4)
            .map(|four| {
                let value = four.iter().fold(0, |value, bit| 2 * value + u32::from(*bit));
                char::from_digit(value, 16).unwrap()
            })
            .collect();
        let digits = digits.trim_start_matches('0');
        assert_eq!(if digits.is_empty() { "0" } else { digits }, known.absent, "{}", known.xhm);
    }
}

#[test]
fn multiplicities_of_all_settings_agree_with_gemmi() {
    let list = [
        [1, 0, 0],
        [0, 1, 0],
        [0, 0, 1],
        [1, 1, 0],
        [1, -1, 0],
        [0, 1, 1],
        [1, 0, 1],
        [1, 1, 1],
        [1, -1, 1],
        [2, -1, 0],
        [2, 1, 0],
        [1, 1, 2],
        [1, 2, 3],
        [-2, 1, 3],
    ];
    for known in settings() {
        let group = SpaceGroup::from_hall(known.hall).unwrap();
        let found: Vec<u32> = list.iter().map(|hkl| group.equivalents(*hkl).len() as u32).collect();
        assert_eq!(found, known.multiplicities, "{}", known.xhm);
    }
}

#[test]
fn spacings_and_volumes_of_random_cells_agree_with_gemmi() {
    for row in rows(SPACINGS, "spacings.csv") {
        let [a, b, c, alpha, beta, gamma, h, k, l, d, volume] = numbers::<11>(&row.fields);
        let cell = Cell::new(a, b, c, alpha, beta, gamma).unwrap();
        let found = cell.d([h as i32, k as i32, l as i32]);
        assert!((found / d - 1.0).abs() < 1e-12, "line {}: {found} {d}", row.line);
        assert!((cell.volume() / volume - 1.0).abs() < 1e-12, "line {}", row.line);
    }
}

#[test]
fn lists_of_reflections_agree_with_gemmi() {
    for row in rows(LISTS, "lists.csv") {
        let (group, _) = SpaceGroup::from_symbol(row.fields[0]).unwrap();
        let [a, b, c, alpha, beta, gamma, d_min] = numbers::<7>(&row.fields[1..]);
        let cell = Cell::new(a, b, c, alpha, beta, gamma).unwrap();
        let found = reflections(&cell, &group, d_min, f64::INFINITY).unwrap();
        assert_eq!(found.len().to_string(), row.fields[8], "{group}");
        let points: u32 = found.iter().map(|r| r.multiplicity).sum();
        assert_eq!(points.to_string(), row.fields[9], "{group}");
        let mut texts: Vec<String> =
            found.iter().map(|r| format!("{} {} {} {}", r.hkl[0], r.hkl[1], r.hkl[2], r.multiplicity)).collect();
        texts.sort();
        assert_eq!(fnv(&texts.join(";")), row.fields[10], "{group}");
        assert!(found.is_sorted_by(|x, y| x.d >= y.d * (1.0 - 1e-12)), "{group}");
        assert!(found.iter().all(|r| r.hkl == group.equivalents(r.hkl)[0] && r.d >= d_min));
    }
}

#[test]
fn niggli_cells_of_centred_cells_agree_with_gemmi() {
    for row in rows(REDUCED, "reduced.csv") {
        let [a, b, c, alpha, beta, gamma] = numbers::<6>(&row.fields[1..]);
        let centring = Centring::ALL.into_iter().find(|letter| letter.to_string() == row.fields[0]).unwrap();
        let cell = Cell::new(a, b, c, alpha, beta, gamma).unwrap();
        let found = niggli_cell(&cell, centring).unwrap();
        for (found, expected) in found.parameters().iter().zip(numbers::<6>(&row.fields[7..])) {
            assert!((found / expected - 1.0).abs() < 1e-7, "line {}: {found} {expected}", row.line);
        }
    }
}
