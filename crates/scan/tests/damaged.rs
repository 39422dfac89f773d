//! Damaged lists and logs: each is refused with exactly the message that is committed for it.
#![allow(clippy::unwrap_used, reason = "tests may stop at what should be there")]

use std::fs;
use std::path::{Path, PathBuf};

use values::{Diagnostic, Wavelength};

/// Every file of a folder of damaged input, with the message committed for it in `messages/FOLDER/NAME.txt`.
fn damaged(folder: &str) -> Vec<(PathBuf, String)> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let entries = fs::read_dir(root.join("../../tests/data/damaged").join(folder)).unwrap();
    let mut files: Vec<PathBuf> = entries.map(|entry| entry.unwrap().path()).collect();
    files.sort();
    let message = |path: &PathBuf| {
        let committed = root.join("tests/messages").join(folder).join(format!("{}.txt", name(path)));
        fs::read_to_string(&committed).unwrap_or_else(|_| panic!("no {}", committed.display())).trim_end().to_owned()
    };
    files.iter().map(|path| (path.clone(), message(path))).collect()
}

fn name(path: &Path) -> String {
    path.file_name().unwrap().to_string_lossy().into_owned()
}

fn assert_refused<T: std::fmt::Debug>(
    folder: &str,
    at_least: usize,
    read: impl Fn(&[u8], &str) -> Result<T, Diagnostic>,
) {
    let files = damaged(folder);
    assert!(files.len() >= at_least, "{} files in {folder}", files.len());
    for (path, expected) in files {
        let refused = read(&fs::read(&path).unwrap(), &name(&path)).expect_err(&name(&path));
        assert_eq!(refused.to_string(), expected, "{}", path.display());
        assert!(refused.location.is_some(), "{}", path.display());
    }
}

#[test]
fn every_damaged_list_is_refused_with_place_finding_expectation_and_mend() {
    // Cu Kα1, 1.5405929 Å: Hölzer et al., Phys. Rev. A 56 (1997) 4554.
    let copper = Wavelength::from_angstrom(1.5405929).unwrap();
    assert_refused("lines", 26, |bytes, file| scan::peak_list::read(bytes, file, copper));
}

#[test]
fn every_damaged_log_is_refused_with_place_finding_expectation_and_mend() {
    assert_refused("log", 9, scan::batch_log::read);
}
