//! What the program leaves behind: files, standard output, exit codes, the demo's folder.

#![allow(clippy::unwrap_used, reason = "a test may stop where it can't read")]

use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../..").canonicalize().unwrap()
}

fn program() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_latticewright"));
    command.current_dir(root()).stdin(Stdio::null());
    command
}

fn run(arguments: &[&str]) -> Output {
    program().args(arguments).output().unwrap()
}

const PREDICT: [&str; 6] = ["predict", "examples/plant/ceria.toml", "--anode", "Cu", "--to", "60"];

#[test]
fn an_output_that_cannot_be_written_ends_with_1_and_leaves_nothing_half_written() {
    let folder = tempfile::tempdir().unwrap();
    let good = folder.path().join("good.csv");
    let bad = folder.path().join("missing").join("bad.svg");
    let output = run(&[&PREDICT[..], &["--csv", good.to_str().unwrap(), "--svg", bad.to_str().unwrap()]].concat());
    assert_eq!(output.status.code(), Some(1));
    assert!(output.stdout.is_empty());
    let message = String::from_utf8(output.stderr).unwrap();
    assert!(message.contains("bad.svg can't be written: no such file or folder"), "{message}");
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 0, "nothing is left");
}

#[cfg(unix)]
#[test]
fn a_full_disk_ends_with_1() {
    // /dev/full takes no byte: common on Linux, absent elsewhere.
    if Path::new("/dev/full").exists() {
        let full = std::fs::OpenOptions::new().write(true).open("/dev/full").unwrap();
        let output = program().args(PREDICT).stdout(full).output().unwrap();
        assert_eq!(output.status.code(), Some(1));
        let output = run(&[&PREDICT[..], &["--csv", "/dev/full"]].concat());
        assert_eq!(output.status.code(), Some(1));
        assert!(output.stdout.is_empty());
    }
}

#[test]
fn a_closed_pipe_is_success() {
    let mut child = program()
        .args([
            "predict",
            "examples/plant/ceria.toml",
            "--wavelength",
            "0.8",
            "--to",
            "60",
            "--json",
            "--pattern",
            "--step",
            "0.001",
        ])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    assert!(child.wait().unwrap().success());
}

#[test]
fn a_file_that_was_there_is_replaced_whole() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("lines.csv");
    std::fs::write(&path, "before\n".repeat(10_000)).unwrap();
    let output = run(&[&PREDICT[..], &["--csv", path.to_str().unwrap()]].concat());
    assert_eq!(output.status.code(), Some(0));
    let text = std::fs::read_to_string(&path).unwrap();
    assert!(
        text.starts_with("phase,h,k,l,multiplicity,d_A,two_theta_deg,F2,intensity,u_d_A,u_two_theta_deg\n")
            && !text.contains("before")
    );
    assert!(!text.contains('\r'));
}

#[test]
fn standard_input_is_read_for_a_dash() {
    let list = std::fs::File::open(root().join("examples/plant/unknown.csv")).unwrap();
    let piped = program().args(["index", "-", "--anode", "Cu", "--csv", "-"]).stdin(list).output().unwrap();
    let named = run(&["index", "examples/plant/unknown.csv", "--anode", "Cu", "--csv", "-"]);
    assert_eq!(piped.status.code(), Some(0));
    assert_eq!(piped.stdout, named.stdout);
    let structure = std::fs::File::open(root().join("examples/plant/ceria.toml")).unwrap();
    let piped = program().args(["predict", "-", "--anode", "Cu", "--csv", "-"]).stdin(structure).output().unwrap();
    assert_eq!(piped.status.code(), Some(0));
}

#[test]
fn the_same_input_gives_the_same_bytes_for_any_number_of_threads() {
    let once = |threads: &str| {
        let predicted = run(&[&PREDICT[..], &["--json", "--pattern", "--threads", threads]].concat()).stdout;
        let drift = run(&[
            "drift",
            "check",
            "--reference",
            "examples/plant/reference.csv",
            "--structure",
            "examples/plant/ceria.toml",
            "--anode",
            "Cu",
            "examples/plant/kv-05.csv",
            "--svg",
            "-",
            "--threads",
            threads,
        ])
        .stdout;
        (predicted, drift)
    };
    let first = once("1");
    assert!(first.0.len() > 1000 && first.1.len() > 1000);
    assert_eq!(first, once("2"));
    assert_eq!(first, once("7"));
}

#[test]
fn quiet_leaves_standard_error_empty_and_the_caution_is_shown_once_without_it() {
    assert!(run(&[&PREDICT[..], &["--quiet"]].concat()).stderr.is_empty());
    let loud = String::from_utf8(run(&PREDICT).stderr).unwrap();
    assert_eq!(loud.matches("radiation safety officer").count(), 1, "{loud}");
}

#[test]
fn the_demo_leaves_its_report_and_runs_again_over_its_own_folder() {
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("demo");
    let out = out.to_str().unwrap();
    for _ in 0..2 {
        let output = run(&["demo", "--out", out]);
        assert_eq!(output.status.code(), Some(0), "{}", String::from_utf8_lossy(&output.stderr));
        let text = String::from_utf8(output.stdout).unwrap();
        for command in ["latticewright predict", "latticewright index", "latticewright drift check"] {
            assert!(text.contains(command), "{command}");
        }
    }
    for name in [
        "index.html",
        "predict.svg",
        "index.svg",
        "drift.svg",
        "predict.json",
        "index.json",
        "drift.json",
        "predict.csv",
    ] {
        assert!(std::fs::metadata(Path::new(out).join(name)).unwrap().len() > 100, "{name}");
    }
    let page = std::fs::read_to_string(Path::new(out).join("index.html")).unwrap();
    assert_eq!(page.matches("<svg ").count(), 3);
    assert!(page.contains("invented") && page.contains("A qualified person decides on release."));
    // Offline: nothing is fetched.
    assert!(!page.contains("src=\"http") && !page.contains("@import") && !page.contains("<script"));
}

#[test]
fn the_demo_leaves_a_folder_with_something_else_alone() {
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("thesis.txt"), "mine").unwrap();
    let output = run(&["demo", "--out", folder.path().to_str().unwrap()]);
    assert_eq!(output.status.code(), Some(2));
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 1);
}

#[test]
fn the_demo_s_commands_give_what_the_demo_shows() {
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("demo");
    assert_eq!(run(&["demo", "--out", out.to_str().unwrap()]).status.code(), Some(0));
    let shown = std::fs::read_to_string(out.join("index.txt")).unwrap();
    let plant = out.join("plant/unknown.csv");
    let again = run(&["index", plant.to_str().unwrap(), "--anode", "Cu"]);
    assert_eq!(shown, String::from_utf8(again.stdout).unwrap());
}
