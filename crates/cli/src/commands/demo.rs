//! `demo`: everything on an invented plant.

use std::path::{Path, PathBuf};

use clap::{Args, Parser};
use values::Diagnostic;

use crate::args::{Arguments, Command};
use crate::commands;
use crate::failure::Failure;
use crate::output::Outputs;
use crate::pictures::{self, DEMO_ENDINGS, DemoStep};
use crate::run::Done;

/// Predict, index and compare on the files of an invented plant; writes a folder with a report
#[derive(Args)]
pub struct DemoArgs {
    /// Folder to write; it must be new, empty, or from an earlier demo
    #[arg(long, value_name = "DIR")]
    pub out: PathBuf,
}

/// The plant's files, as in `examples/plant`.
const FILES: [(&str, &str); 14] = [
    ("README.md", include_str!("../../../../examples/plant/README.md")),
    ("ceria.toml", include_str!("../../../../examples/plant/ceria.toml")),
    ("zincite.cif", include_str!("../../../../examples/plant/zincite.cif")),
    ("unknown.csv", include_str!("../../../../examples/plant/unknown.csv")),
    ("batches.csv", include_str!("../../../../examples/plant/batches.csv")),
    ("reference.csv", include_str!("../../../../examples/plant/reference.csv")),
    ("kv-01.csv", include_str!("../../../../examples/plant/kv-01.csv")),
    ("kv-02.csv", include_str!("../../../../examples/plant/kv-02.csv")),
    ("kv-03.csv", include_str!("../../../../examples/plant/kv-03.csv")),
    ("kv-04.csv", include_str!("../../../../examples/plant/kv-04.csv")),
    ("kv-05.csv", include_str!("../../../../examples/plant/kv-05.csv")),
    ("kv-06.csv", include_str!("../../../../examples/plant/kv-06.csv")),
    ("kv-07.csv", include_str!("../../../../examples/plant/kv-07.csv")),
    ("kv-08.csv", include_str!("../../../../examples/plant/kv-08.csv")),
];

/// What each step asks, the name of its results, and the command, with `@` for the folder of the plant's files.
const STEPS: [(&str, &str, &str); 3] = [
    (
        "What will I see?",
        "predict",
        "predict @/ceria.toml @/zincite.cif --mass-fractions 0.9,0.1 --anode Cu --from 20 --to 90",
    ),
    ("What is it?", "index", "index @/unknown.csv --anode Cu"),
    (
        "Has it moved?",
        "drift",
        "drift check --reference @/reference.csv --structure @/ceria.toml --anode Cu --radius 240 --log @/batches.csv --limit-ppm 60 \
         @/kv-01.csv @/kv-02.csv @/kv-03.csv @/kv-04.csv @/kv-05.csv @/kv-06.csv @/kv-07.csv @/kv-08.csv",
    ),
];

/// Runs the command.
///
/// # Errors
/// Wrong input (the folder holds something else), or the disk failed.
pub fn run(args: &DemoArgs) -> Result<Done, Failure> {
    refuse_foreign(&args.out)?;
    let plant = args.out.join("plant");
    std::fs::create_dir_all(&plant)
        .map_err(|error| Failure::Program(format!("{} can't be made: {error}", plant.display())))?;
    let mut inputs = Outputs::default();
    for (name, text) in FILES {
        inputs.file(&plant.join(name), text.to_owned());
    }
    inputs.write()?;
    let mut outputs = Outputs::default();
    let mut steps = Vec::new();
    let mut remarks: Vec<String> = Vec::new();
    for (question, name, command) in STEPS {
        let command = command.replace('@', &plant.display().to_string());
        let words: Vec<String> = command.split_whitespace().map(str::to_owned).collect();
        let file = |ending: &str| args.out.join(format!("{name}.{ending}"));
        let with_files = ["--svg", &file("svg").display().to_string(), "--csv", &file("csv").display().to_string()]
            .iter()
            .map(|word| (*word).to_owned())
            .collect::<Vec<_>>();
        let shown = run_one(words.iter().cloned().chain(with_files))?;
        let exit_code = shown.exit_code;
        for remark in shown.remarks {
            if !remarks.contains(&remark) {
                remarks.push(remark);
            }
        }
        let (files, table) = shown.outputs.into_parts();
        let (_, json) = run_one(words.into_iter().chain(["--json".to_owned()]))?.outputs.into_parts();
        let svg =
            files.iter().find(|(path, _)| path.extension().is_some_and(|e| e == "svg")).map(|(_, text)| text.clone());
        for (path, text) in files {
            outputs.file(&path, text);
        }
        outputs.file(&file("json"), json);
        outputs.file(&file("txt"), table.clone());
        outputs.print(&format!("# {question}\n$ latticewright {command}\n\n{table}\nExit code {exit_code}.\n\n"));
        steps.push(DemoStep {
            question,
            name,
            command: format!("latticewright {command}"),
            table,
            exit_code,
            svg: svg.unwrap_or_default(),
        });
    }
    let page = args.out.join("index.html");
    outputs.file(&page, pictures::demo_page(&steps)?);
    outputs.print(&format!(
        "All data are invented. Pictures, tables and JSON are in {}; open {} to see them together.\n",
        args.out.display(),
        page.display()
    ));
    Ok(Done { outputs, exit_code: 0, remarks })
}

/// Runs another command without writing what it leaves.
fn run_one(words: impl Iterator<Item = String>) -> Result<Done, Failure> {
    let arguments = Arguments::try_parse_from(std::iter::once("latticewright".to_owned()).chain(words))
        .map_err(|error| Failure::Program(format!("the demo's own command is wrong: {error}")))?;
    match &arguments.command {
        Command::Predict(args) => commands::predict::run(args),
        Command::Index(args) => commands::index::run(args),
        Command::Drift(command) => commands::drift::run(command),
        Command::Demo(_) | Command::Completions { .. } => {
            Err(Failure::Program("the demo runs neither itself nor completions".to_owned()))
        }
    }
}

/// A folder that holds anything but an earlier demo's files is left alone.
fn refuse_foreign(folder: &Path) -> Result<(), Failure> {
    if folder.is_file() {
        return Err(foreign(folder, "is a file"));
    }
    let Ok(entries) = std::fs::read_dir(folder) else { return Ok(()) };
    for entry in entries.flatten() {
        let name = entry.file_name().to_string_lossy().into_owned();
        let ours = name == "plant"
            || name == "index.html"
            || STEPS.iter().any(|(_, step, _)| DEMO_ENDINGS.iter().any(|ending| name == format!("{step}.{ending}")));
        if !ours {
            return Err(foreign(folder, &format!("holds {name}")));
        }
    }
    if let Ok(entries) = std::fs::read_dir(folder.join("plant")) {
        for entry in entries.flatten() {
            let name = entry.file_name().to_string_lossy().into_owned();
            if !FILES.iter().any(|(file, _)| *file == name) {
                return Err(foreign(folder, &format!("holds plant/{name}")));
            }
        }
    }
    Ok(())
}

fn foreign(folder: &Path, what: &str) -> Failure {
    Failure::option(Diagnostic::new(
        format!("--out {} {what}, which is not the demo's", folder.display()),
        "a folder that is new, empty, or from an earlier demo",
        "name another folder; nothing was written",
    ))
}
