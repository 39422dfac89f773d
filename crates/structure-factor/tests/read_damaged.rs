//! Damaged structures: each is refused with exactly the message that is committed for it.
#![allow(clippy::unwrap_used, reason = "tests may stop at what should be there")]

use std::fs;
use std::path::Path;

use structure_factor::Structure;

#[test]
fn every_damaged_structure_is_refused_with_place_finding_expectation_and_mend() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let entries = fs::read_dir(root.join("../../tests/data/damaged/structure")).unwrap();
    let mut files: Vec<_> = entries.map(|entry| entry.unwrap().path()).collect();
    files.sort();
    assert!(files.len() >= 40, "{} files", files.len());
    for path in files {
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        let bytes = fs::read(&path).unwrap();
        let read = if name.ends_with(".toml") {
            Structure::from_toml(std::str::from_utf8(&bytes).unwrap(), &name).map(|structure| vec![structure])
        } else {
            Structure::from_cif(&bytes, &name)
        };
        let refused = read.expect_err(&name);
        let committed = root.join("tests/messages").join(format!("{name}.txt"));
        let expected = fs::read_to_string(&committed).unwrap_or_else(|_| panic!("no {}", committed.display()));
        assert_eq!(refused.to_string(), expected.trim_end(), "{name}");
        assert!(refused.location.is_some(), "{name}");
    }
}
