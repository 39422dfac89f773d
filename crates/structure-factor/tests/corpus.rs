//! Every file of the fuzzing corpus, replayed: structures that can be worked with, or a message that helps.
#![allow(clippy::unwrap_used, reason = "tests may stop at what should be there")]

mod check;

use std::path::Path;

#[test]
fn every_file_of_the_corpus_is_a_structure_or_refused_with_a_message_that_helps() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../fuzz/corpus/structure");
    let mut files: Vec<_> = std::fs::read_dir(&folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.sort();
    let read: Vec<[bool; 2]> = files.iter().map(|file| check::holds_for(&std::fs::read(file).unwrap())).collect();
    let count = |kind: [bool; 2]| read.iter().filter(|found| **found == kind).count();
    // A corpus of which nothing is read, or nothing refused, tests half of the readers.
    let [cif, toml, refused] = [[true, false], [false, true], [false, false]].map(count);
    assert!(cif >= 10 && toml >= 3 && refused >= 15, "{cif} CIF, {toml} TOML, {refused} refused");
}
