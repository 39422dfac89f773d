//! Every file of the fuzzing corpus, replayed: no panic, an end, and what is read is written so that it is read back.

mod check;

use std::path::Path;

#[test]
fn every_file_of_the_corpus_is_refused_or_read_back_the_same() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../fuzz/corpus/cif");
    let mut files: Vec<_> = std::fs::read_dir(&folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.sort();
    let read = files.iter().filter(|file| check::holds_for(&std::fs::read(file).unwrap())).count();
    // A corpus of which nothing is read, or nothing refused, tests half of the reader.
    assert!(read >= 20 && files.len() - read >= 20, "{read} of {} files were read", files.len());
}
