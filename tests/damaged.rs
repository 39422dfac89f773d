//! Damaged files and wrong options: each ends with exit code 2, nothing on standard output, and the committed message.
//!
//! `tests/data/damaged/cases.txt` holds one case a line: a name, a colon, the arguments (blanks part them, `'…'` holds
//! blanks). The messages stand in `tests/data/damaged/expected/NAME.txt`. After a wanted change of a message,
//! `LATTICEWRIGHT_NEW_MESSAGES=1 cargo test --test damaged` writes them anew, to be read before they are committed.

#![allow(clippy::unwrap_used, reason = "a test may stop where it can't read")]

use std::path::{Path, PathBuf};
use std::process::Command;

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/data/damaged")
}

/// Splits at blanks outside of single quotes.
fn words(text: &str) -> Vec<String> {
    let mut words = Vec::new();
    let mut word = String::new();
    let (mut quoted, mut any) = (false, false);
    for c in text.chars() {
        match c {
            '\'' => {
                quoted = !quoted;
                any = true;
            }
            ' ' if !quoted => {
                if any {
                    words.push(std::mem::take(&mut word));
                }
                any = false;
            }
            c => {
                word.push(c);
                any = true;
            }
        }
    }
    if any {
        words.push(word);
    }
    words
}

#[test]
fn every_damaged_input_gets_its_message_and_exit_code_2() {
    let cases = std::fs::read_to_string(folder().join("cases.txt")).unwrap();
    let renew = std::env::var_os("LATTICEWRIGHT_NEW_MESSAGES").is_some();
    let (mut count, mut wrong) = (0, Vec::new());
    for line in cases.lines().filter(|line| !line.trim().is_empty() && !line.starts_with('#')) {
        let (name, arguments) = line.split_once(':').expect("NAME: ARGUMENTS");
        let output = Command::new(env!("CARGO_BIN_EXE_latticewright"))
            .args(words(arguments.trim()))
            .current_dir(folder())
            .stdin(std::process::Stdio::null())
            .output()
            .unwrap();
        let message = String::from_utf8(output.stderr).unwrap();
        let expected = folder().join("expected").join(format!("{name}.txt"));
        if renew {
            std::fs::write(&expected, &message).unwrap();
        }
        if output.status.code() != Some(2) {
            wrong.push(format!("{name}: exit code {:?}\n{message}", output.status.code()));
        } else if !output.stdout.is_empty() {
            wrong.push(format!("{name}: something on standard output"));
        } else if std::fs::read_to_string(&expected).unwrap_or_default() != message {
            wrong.push(format!("{name}: another message than {}:\n{message}", expected.display()));
        }
        count += 1;
    }
    assert!(wrong.is_empty(), "{} of {count} wrong\n{}", wrong.len(), wrong.join("\n"));
    assert!(count >= 40, "only {count} cases");
}

#[test]
fn every_damaged_file_is_used_and_every_message_has_its_case() {
    let cases = std::fs::read_to_string(folder().join("cases.txt")).unwrap();
    let names: Vec<&str> = cases.lines().filter_map(|line| line.split_once(':')).map(|(name, _)| name).collect();
    for entry in std::fs::read_dir(folder()).unwrap().map(|e| e.unwrap().path()).filter(|p| p.is_dir()) {
        for file in std::fs::read_dir(&entry).unwrap().map(|e| e.unwrap().path()) {
            if entry.ends_with("expected") {
                let stem = file.file_stem().unwrap().to_str().unwrap().to_owned();
                assert!(names.contains(&stem.as_str()), "{} belongs to no case", file.display());
            } else {
                let name = format!(
                    "{}/{}",
                    entry.file_name().unwrap().to_str().unwrap(),
                    file.file_name().unwrap().to_str().unwrap()
                );
                assert!(cases.contains(&name), "{name} is in no case");
            }
        }
    }
}
