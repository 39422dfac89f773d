//! Every file of the fuzzing corpus, replayed: an operation or a group that keeps its rules, or a message that helps.
#![allow(clippy::unwrap_used, reason = "tests may stop at what should be there")]

mod check;

use std::path::Path;

#[test]
fn every_file_of_the_corpus_is_symmetry_or_refused_with_a_message_that_helps() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../fuzz/corpus/symmetry");
    let mut files: Vec<_> = std::fs::read_dir(&folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.sort();
    let text = |file: &Path| String::from_utf8_lossy(&std::fs::read(file).unwrap()).into_owned();
    let read: Vec<[bool; 4]> = files.iter().map(|file| check::holds_for(&text(file))).collect();
    let count = |kind: usize| read.iter().filter(|found| found[kind]).count();
    let refused = read.iter().filter(|found| !found.contains(&true)).count();
    // A corpus of which nothing is read, or nothing refused, tests half of the readers.
    let counts = [count(0), count(1), count(2), count(3), refused];
    assert!(counts.iter().all(|count| *count >= 6), "operations, Hall, H–M, lists, refused: {counts:?}");
}
