//! What the program prints as JSON against the committed schemas.

#![allow(clippy::unwrap_used, reason = "a test may stop where it can't read")]

use std::path::{Path, PathBuf};
use std::process::Command;

use serde_json::Value;

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../..")
}

fn run(arguments: &str) -> (i32, Value) {
    let output = Command::new(env!("CARGO_BIN_EXE_latticewright"))
        .args(arguments.split_whitespace())
        .current_dir(root())
        .output()
        .unwrap();
    let text = String::from_utf8(output.stdout).unwrap();
    let document = serde_json::from_str(&text)
        .unwrap_or_else(|error| panic!("{arguments}: {error}\n{}", String::from_utf8_lossy(&output.stderr)));
    (output.status.code().unwrap(), document)
}

fn assert_valid(schema: &str, document: &Value) {
    let text = std::fs::read_to_string(root().join("docs/schemas").join(schema)).unwrap();
    let validator = jsonschema::validator_for(&serde_json::from_str(&text).unwrap()).unwrap();
    let faults: Vec<String> = validator
        .iter_errors(document)
        .map(|error| format!("{} at {}", error, error.instance_path()))
        .take(5)
        .collect();
    assert!(faults.is_empty(), "{schema}: {faults:#?}");
}

#[test]
fn predictions_follow_their_schema() {
    let (code, document) = run(
        "predict examples/plant/ceria.toml examples/plant/zincite.cif --anode Cu --to 60 --step 0.5 --pattern --json",
    );
    assert_eq!(code, 0);
    assert_valid("predict-1.json", &document);
    assert_eq!(document["pattern"]["counts"].as_array().unwrap().len(), 111);
}

#[test]
fn readings_of_a_list_follow_their_schema() {
    let (code, document) =
        run("index examples/plant/unknown.csv --anode Cu --formula Mg1Al2O4 --density 3.58(2) --json");
    assert_eq!(code, 0);
    assert_valid("index-1.json", &document);
    let first = &document["solutions"][0];
    assert_eq!((first["centring"].as_str(), first["unindexed"].as_array().unwrap().len()), (Some("F"), 1));
    let a = &first["a"];
    // Built into the invented list: a = 8.1276 Å.
    assert!((a["value"].as_f64().unwrap() - 8.1276).abs() < 4.0 * a["u"].as_f64().unwrap());
}

#[test]
fn a_list_that_is_not_cubic_ends_with_3_and_a_whole_document() {
    let (code, document) = run("index tests/data/tetragonal.csv --anode Cu --json");
    assert_eq!(code, 3);
    assert_valid("index-1.json", &document);
    assert!(document["probability_none"].as_f64().unwrap() > 0.9, "{}", document["probability_none"]);
    assert!(document["verdict"].as_str().unwrap().to_lowercase().contains("cubic"));
}

#[test]
fn drift_checks_follow_their_schema_in_cubic_and_hexagonal_systems() {
    let (code, document) = run(
        "drift check --reference examples/plant/reference.csv --structure examples/plant/ceria.toml --anode Cu --log examples/plant/batches.csv \
         --limit-ppm 60 examples/plant/kv-05.csv examples/plant/kv-07.csv --json",
    );
    assert_eq!(code, 4);
    assert_valid("drift-1.json", &document);
    assert_eq!(document["batches"][0]["decision"], "drifted");
    assert_eq!(document["batches"][1]["decision"], "within");
    let (code, document) = run(
        "drift check --reference tests/data/zincite-a.csv --structure examples/plant/zincite.cif --anode Cu tests/data/zincite-b.csv --json",
    );
    assert_eq!(code, 5, "no limit and no change: undecided");
    assert_valid("drift-1.json", &document);
    assert_eq!(document["batches"][0]["deltas"].as_array().unwrap().len(), 2);
}

#[test]
fn a_reference_without_a_cell_ends_with_3_and_a_whole_document() {
    let (code, document) = run(
        "drift check --reference tests/data/tetragonal.csv --structure examples/plant/zincite.cif --anode Cu tests/data/zincite-b.csv --json",
    );
    assert_eq!(code, 3);
    assert_valid("drift-1.json", &document);
    assert_eq!(document["batches"].as_array().unwrap().len(), 0);
}
