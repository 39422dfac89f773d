//! Whether options reach the calculation and numbers reach their names: JSON against CSV, against outside values, by hand.

#![allow(clippy::unwrap_used, reason = "a test may stop where it can't read")]

use std::path::Path;
use std::process::Command;

use serde_json::Value;
use values::{TwoTheta, Wavelength};

fn stdout(arguments: &[&str]) -> String {
    let output = Command::new(env!("CARGO_BIN_EXE_latticewright"))
        .args(arguments)
        .current_dir(Path::new(env!("CARGO_MANIFEST_DIR")).join("../.."))
        .output()
        .unwrap();
    assert!(output.status.code() != Some(2), "{}", String::from_utf8_lossy(&output.stderr));
    String::from_utf8(output.stdout).unwrap()
}

const DRIFT: [&str; 11] = [
    "drift",
    "check",
    "--reference",
    "examples/plant/reference.csv",
    "--structure",
    "examples/plant/ceria.toml",
    "--anode",
    "Cu",
    "--log",
    "examples/plant/batches.csv",
    "examples/plant/kv-01.csv",
];

fn drift(more: &[&str]) -> Value {
    serde_json::from_str(&stdout(&[&DRIFT[..], more, &["--json"]].concat())).unwrap()
}

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap_or_else(|| panic!("{value} is no number"))
}

#[test]
fn an_expansion_on_the_command_line_moves_the_difference_by_alpha_times_the_difference_of_temperatures() {
    let (none, some) = (drift(&["--expansion", "0,0"]), drift(&["--expansion", "3e-5,1e-6"]));
    let temperature = |list: &Value| number(&list["temperature_C"]["value"]);
    let warmer = temperature(&some["batches"][0]["fit"]) - temperature(&some["reference"]);
    assert!(warmer.abs() > 0.1, "{warmer}");
    let moved = number(&some["batches"][0]["delta_ppm"]) - number(&none["batches"][0]["delta_ppm"]);
    // By hand: −α ΔT; products of ppm with ppm are below 0.01 ppm.
    assert!((moved + 30.0 * warmer).abs() < 0.02, "{moved} ppm for {warmer} K");
    // By hand: α u(T) of each list (0.2 K in the log) and u(α) ΔT.
    let u = |document: &Value| number(&document["batches"][0]["u_delta_ppm"]);
    let by_hand = (u(&none).powi(2) + 2.0 * 6.0_f64.powi(2) + warmer.powi(2)).sqrt();
    assert!((u(&some) / by_hand - 1.0).abs() < 1e-3, "{} {by_hand}", u(&some));
}

#[test]
fn what_is_known_of_displacement_and_zero_beforehand_reaches_the_fit() {
    let free = drift(&["--radius", "240"]);
    let held = drift(&["--radius", "240", "--displacement", "0.02,0.0001", "--zero", "0.004,0.00001"]);
    let displacement = |document: &Value| {
        let d = &document["batches"][0]["fit"]["displacement"];
        (number(&d["displacement_mm"]), number(&d["u"]))
    };
    // A prior far narrower than what the lines say is what comes out.
    assert!(displacement(&free).1 > 0.001, "{:?}", displacement(&free));
    assert!(
        (displacement(&held).0 - 0.02).abs() < 0.001 && displacement(&held).1 < 0.000_101,
        "{:?}",
        displacement(&held)
    );
    assert!((number(&held["zero_deg"]["value"]) - 0.004).abs() < 1e-4, "{}", held["zero_deg"]);
}

#[test]
fn the_csv_of_a_drift_check_says_what_its_json_says() {
    let document = drift(&["--limit-ppm", "60"]);
    let text = stdout(&[&DRIFT[..], &["--limit-ppm", "60", "--csv", "-"]].concat());
    let mut lines = text.lines();
    let names: Vec<&str> = lines.next().unwrap().split(',').collect();
    let fields: Vec<&str> = lines.next().unwrap().split(',').collect();
    let delta = &document["batches"][0]["deltas"][0];
    let pairs = [
        ("delta", "delta_ppm"),
        ("u", "u"),
        ("limit", "limit"),
        ("drifted_above", "drifted_above"),
        ("within_below", "within_below"),
        ("detectable", "detectable"),
    ];
    for (column, key) in pairs {
        let at = names.iter().position(|name| *name == column).unwrap();
        let written: f64 = fields[at].parse().unwrap();
        assert!((written - number(&delta[key])).abs() < 1e-9 * written.abs(), "{column}: {written} {}", delta[key]);
    }
    assert!(number(&delta["within_below"]) < 60.0 && 60.0 < number(&delta["drifted_above"]), "{delta}");
}

/// Lines of a cubic lattice at Cu Kα1, by Bragg's law.
fn index_lines(a_angstrom: f64, sums: &[u32]) -> Value {
    let copper = Wavelength::from_angstrom(1.5405929).unwrap();
    let mut text = String::from("two_theta_deg,u_two_theta_deg\n");
    for n in sums {
        let line = TwoTheta::from_d(a_angstrom / f64::from(*n).sqrt(), copper).unwrap();
        text.push_str(&format!("{:.4},0.005\n", line.deg()));
    }
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("lines.csv");
    std::fs::write(&file, text).unwrap();
    serde_json::from_str(&stdout(&["index", file.to_str().unwrap(), "--wavelength", "1.5405929", "--json"])).unwrap()
}

#[test]
fn reduced_cells_of_body_and_face_centred_lattices_are_those_of_spglib() {
    // Outside: spglib 2.8.0, niggli_reduce of the primitive vectors of I and F with a = 2.8665 Å.
    let cases: [(&str, &[u32], f64, f64); 2] = [
        ("I", &[2, 4, 6, 8, 10, 12, 14, 16], 2.482_461_82, 109.471_220_63),
        ("F", &[3, 4, 8, 11, 12], 2.026_921_59, 60.0),
    ];
    for (centring, sums, edge, angle) in cases {
        // A wider cell, so that eight lines lie below 180°; edges scale with it.
        let wider = 2.0;
        let document = index_lines(2.8665 * wider, sums);
        let found = document["solutions"].as_array().unwrap().iter().find(|s| s["centring"] == centring).unwrap();
        for name in ["a", "b", "c"] {
            let reduced = number(&found["reduced_cell"][name]);
            assert!((reduced / (edge * wider) - 1.0).abs() < 1e-4, "{centring} {name}: {reduced}");
        }
        for name in ["alpha", "beta", "gamma"] {
            let reduced = number(&found["reduced_cell"][name]);
            assert!((reduced - angle).abs() < 1e-6, "{centring} {name}: {reduced}");
        }
    }
}

#[test]
fn the_uncertainties_of_an_indexed_cell_are_the_roots_of_its_covariance() {
    let document = index_lines(5.6402, &[3, 4, 8, 11, 12, 16, 19, 20, 24, 27, 32]);
    let first = &document["solutions"][0];
    let variance = |k: usize| number(&first["covariance"][k][k]);
    assert!((number(&first["a"]["u"]) / variance(0).sqrt() - 1.0).abs() < 1e-9, "{first}");
    assert!((number(&first["u_zero_deg"]) / variance(1).sqrt() - 1.0).abs() < 1e-9, "{first}");
    // By hand: u(V) = 3 a² u(a).
    let (a, u) = (number(&first["a"]["value"]), number(&first["a"]["u"]));
    assert!((number(&first["u_volume_A3"]) / (3.0 * a * a * u) - 1.0).abs() < 1e-6, "{first}");
}

#[test]
fn a_prediction_heads_each_phase_and_carries_the_uncertainty_of_its_cell() {
    let output = Command::new(env!("CARGO_BIN_EXE_latticewright"))
        .args(["predict", "examples/plant/zincite.cif", "--anode", "Cu", "--to", "40"])
        .current_dir(Path::new(env!("CARGO_MANIFEST_DIR")).join("../.."))
        .output()
        .unwrap();
    let text = String::from_utf8(output.stdout).unwrap();
    assert!(text.starts_with("KV-22_zinc_oxide: P 63 m c\n"), "{text}");
    // By hand: u(d) of 002 is half of u(c) = 0.0002 Å; u(2θ) = 2 tan θ u(d)/d = 0.00136°.
    assert!(text.contains("2.60355(10)  34.4187(14)"), "{text}");
    // Three edges are printed, the first two with the one s.u. of a.
    assert!(text.contains("3.25020(10) 3.25020(10) 5.2071(2) Å"), "{text}");
}
