//! Guards of the layout: arrows between crates, files that would be forgotten, tables without an origin.

#![allow(clippy::unwrap_used, reason = "a test may stop where it can't read")]

use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};
use std::process::Command;

use serde_json::Value;

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../..").canonicalize().unwrap()
}

fn metadata() -> Value {
    let output = Command::new(env!("CARGO"))
        .args(["metadata", "--no-deps", "--offline", "--format-version", "1"])
        .current_dir(root())
        .output()
        .unwrap();
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    serde_json::from_slice(&output.stdout).unwrap()
}

/// Reads the map: "a ← {b, c} ← d" means that b and c may use a, and d may use a, b and c.
fn allowed_arrows(map: &str) -> BTreeMap<String, BTreeSet<String>> {
    let mut direct: BTreeMap<String, BTreeSet<String>> = BTreeMap::new();
    for line in map.lines() {
        let layers: Vec<Vec<String>> = line
            .split('←')
            .map(|layer| layer.trim_matches(|c: char| c.is_whitespace() || c == '{' || c == '}'))
            .map(|layer| layer.split(',').map(|name| name.trim().to_owned()).collect())
            .collect();
        for pair in layers.windows(2) {
            for upper in &pair[1] {
                direct.entry(upper.clone()).or_default().extend(pair[0].iter().cloned());
            }
        }
    }
    // An arrow may skip layers: close the relation.
    loop {
        let mut grown = direct.clone();
        for below in grown.values_mut() {
            let deeper: BTreeSet<String> =
                below.iter().filter_map(|name| direct.get(name)).flatten().cloned().collect();
            below.extend(deeper);
        }
        if grown == direct {
            return direct;
        }
        direct = grown;
    }
}

#[test]
fn dependencies_point_one_way_as_the_map_in_developers_md_says() {
    let text = std::fs::read_to_string(root().join("DEVELOPERS.md")).unwrap();
    let map = text.split("```text\n").nth(1).and_then(|rest| rest.split("```").next()).expect("the map block");
    let allowed = allowed_arrows(map);
    let metadata = metadata();
    let packages = metadata["packages"].as_array().unwrap();
    let names: BTreeSet<&str> = packages.iter().map(|p| p["name"].as_str().unwrap()).collect();
    for package in packages {
        let name = package["name"].as_str().unwrap();
        assert!(name == "values" || allowed.contains_key(name), "{name} is not on the map in DEVELOPERS.md");
        for dependency in package["dependencies"].as_array().unwrap() {
            let on = dependency["name"].as_str().unwrap();
            // Tests may look sideways.
            if names.contains(on) && dependency["kind"].is_null() {
                assert!(
                    allowed.get(name).is_some_and(|below| below.contains(on)),
                    "{name} uses {on}, an arrow that the map does not have"
                );
            }
        }
    }
}

#[test]
fn the_map_forbids_an_arrow_that_points_up_or_sideways() {
    let allowed = allowed_arrows("values ← {cif, lattice} ← pattern ← drift\n{lattice} ← indexing ← drift");
    assert!(allowed["drift"].contains("values") && allowed["drift"].contains("indexing"));
    assert!(!allowed["cif"].contains("lattice") && !allowed["pattern"].contains("drift"));
    assert!(!allowed["indexing"].contains("cif"));
}

#[test]
fn every_rust_file_in_tests_benches_and_examples_is_a_target() {
    let metadata = metadata();
    let targets: BTreeSet<PathBuf> = metadata["packages"]
        .as_array()
        .unwrap()
        .iter()
        .flat_map(|p| p["targets"].as_array().unwrap())
        .map(|t| PathBuf::from(t["src_path"].as_str().unwrap()).canonicalize().unwrap())
        .collect();
    let mut folders: Vec<PathBuf> = ["tests", "benches", "examples"].iter().map(|f| root().join(f)).collect();
    for entry in std::fs::read_dir(root().join("crates")).unwrap() {
        let package = entry.unwrap().path();
        folders.extend(["tests", "benches", "examples"].iter().map(|f| package.join(f)));
    }
    let mut seen = 0;
    for folder in folders.iter().filter(|f| f.is_dir()) {
        for entry in std::fs::read_dir(folder).unwrap() {
            let path = entry.unwrap().path().canonicalize().unwrap();
            if path.extension().is_some_and(|e| e == "rs") {
                assert!(targets.contains(&path), "{} is no target of a package: it is never built", path.display());
                seen += 1;
            }
        }
    }
    assert!(seen > 1, "the guard found no files; has the layout changed?");
}

#[test]
fn every_table_in_data_carries_its_origin() {
    let mut seen = 0;
    for entry in std::fs::read_dir(root().join("data")).unwrap() {
        let path = entry.unwrap().path();
        assert_eq!(path.extension().and_then(|e| e.to_str()), Some("csv"), "{}: tables are CSV", path.display());
        let text = std::fs::read_to_string(&path).unwrap();
        let table =
            values::Table::parse(&text, &path.display().to_string()).unwrap_or_else(|message| panic!("{message}"));
        for key in ["made by", "checked by"] {
            let named = table.entry(key).unwrap().split_whitespace().next().unwrap().trim_end_matches([',', ';', ':']);
            assert!(root().join(named).is_file(), "{}: {key} {named}, which is no file", path.display());
        }
        seen += 1;
    }
    assert!(seen > 0, "no tables found");
}
