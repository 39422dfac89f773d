//! Every file of the fuzzing corpus, replayed: a list or log that keeps its promises, or a message that helps.
#![allow(clippy::unwrap_used, reason = "tests may stop at what should be there")]

mod check;

use std::path::Path;

#[test]
fn every_file_of_the_corpus_is_a_list_a_log_or_refused_with_a_message_that_helps() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../fuzz/corpus/lines");
    let mut files: Vec<_> = std::fs::read_dir(&folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.sort();
    let read: Vec<[bool; 2]> = files.iter().map(|file| check::holds_for(&std::fs::read(file).unwrap())).collect();
    let count = |kind: [bool; 2]| read.iter().filter(|found| **found == kind).count();
    // A corpus of which nothing is read, or nothing refused, tests half of the readers.
    let [lists, logs, refused] = [[true, false], [false, true], [false, false]].map(count);
    assert!(lists >= 15 && logs >= 4 && refused >= 15, "{lists} lists, {logs} logs, {refused} refused");
}
