//! A small sample of synthetic lists whose lattice is known: cubic ones are named, others are not.
//!
//! Outside: tests/data/index/sample.json, made by a generator that shares no code with this crate (tools/index_truth_check.py,
//! which also runs the full size: thousands of lists).

#![allow(clippy::unwrap_used, reason = "what a fixture does not hold fails the test")]

use indexing::cubic::{CubicOptions, search};
use serde::Deserialize;
use values::{Peak, TwoTheta, Wavelength};

#[derive(Deserialize)]
struct Sample {
    cases: Vec<Case>,
}

#[derive(Deserialize)]
struct Case {
    name: String,
    crystal_system: String,
    centring: Option<String>,
    a: Option<f64>,
    lines: Vec<[f64; 3]>,
}

fn sample() -> Vec<Case> {
    let text = include_str!("../../../tests/data/index/sample.json");
    serde_json::from_str::<Sample>(text).unwrap().cases
}

fn peaks(case: &Case, with_u: bool) -> Vec<Peak> {
    case.lines
        .iter()
        .map(|&[two_theta_deg, u_deg, intensity]| {
            let mut peak = Peak::at(TwoTheta::from_deg(two_theta_deg));
            peak.intensity = Some(intensity);
            if with_u { peak.with_u_deg(u_deg) } else { peak }
        })
        .collect()
}

#[test]
fn cubic_lists_are_named_and_others_are_not() {
    let copper = Wavelength::from_angstrom(1.5405929).unwrap();
    let (mut cubic, mut others) = (0, 0);
    for case in sample() {
        for with_u in [true, false] {
            let answer = search(&peaks(&case, with_u), copper, &CubicOptions::default()).unwrap();
            if case.crystal_system == "cubic" {
                let first = &answer.readings[0];
                assert!(answer.found, "{}: {}", case.name, answer.verdict);
                assert_eq!(Some(first.centring.to_string()), case.centring, "{}: {}", case.name, answer.verdict);
                assert!((first.a.value / case.a.unwrap() - 1.0).abs() < 0.0015, "{}: {}", case.name, first.a);
                cubic += 1;
            } else {
                assert!(!answer.found, "{} ({}): {}", case.name, case.crystal_system, answer.verdict);
                assert!(answer.verdict.starts_with("Not cubic") && answer.probability_none > 0.5);
                others += 1;
            }
        }
    }
    assert_eq!((cubic, others), (2 * 16, 2 * 26));
}

#[test]
fn true_edges_lie_within_their_uncertainty() {
    let copper = Wavelength::from_angstrom(1.5405929).unwrap();
    let z: Vec<f64> = (sample().iter().filter(|case| case.crystal_system == "cubic"))
        .map(|case| {
            let answer = search(&peaks(case, true), copper, &CubicOptions::default()).unwrap();
            let a = answer.readings[0].a;
            (a.value - case.a.unwrap()) / a.u
        })
        .collect();
    let mean_square = z.iter().map(|z| z * z).sum::<f64>() / z.len() as f64;
    // 16 values: the mean square of a standard normal lies between 0.27 and 2.5 in 99.9 of 100 samples (chi-squared, 16).
    assert!((0.27..2.5).contains(&mean_square), "{mean_square}: {z:?}");
}

#[test]
fn order_of_the_lines_and_number_of_runs_change_nothing() {
    let copper = Wavelength::from_angstrom(1.5405929).unwrap();
    for case in sample().iter().take(4) {
        let straight = peaks(case, true);
        let turned: Vec<Peak> = straight.iter().rev().copied().collect();
        let first = search(&straight, copper, &CubicOptions::default()).unwrap();
        let again = search(&straight, copper, &CubicOptions::default()).unwrap();
        let other = search(&turned, copper, &CubicOptions::default()).unwrap();
        assert_eq!(format!("{first:?}"), format!("{again:?}"));
        assert_eq!(first.readings[0].a, other.readings[0].a);
        let last = straight.len() - 1;
        let (row, turned_row) = (&first.readings[0].lines[0], &other.readings[0].lines[0]);
        assert_eq!((row.index, turned_row.index), (last - turned_row.index, last - row.index));
    }
}
