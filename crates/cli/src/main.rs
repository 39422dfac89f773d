//! The `latticewright` program: arguments in; tables, JSON, pictures and an exit code out.
//!
//! [`args`] is the one definition of arguments and help; each file in [`commands`] is one command. Files are opened in
//! [`output`] alone, messages are printed in [`failure`] alone.

mod args;
mod caution;
mod commands;
mod composition;
mod failure;
mod output;
mod pictures;
mod run;
mod structures;
mod table;

use std::process::ExitCode;

use clap::{CommandFactory, Parser};

use crate::args::{Arguments, Command};
use crate::failure::Failure;
use crate::output::Outputs;
use crate::run::Done;

fn main() -> ExitCode {
    let arguments = Arguments::parse();
    if let Some(threads) = arguments.threads {
        // The pool can be built only once; nothing was parallel before this line.
        let _ = rayon::ThreadPoolBuilder::new().num_threads(usize::from(threads)).build_global();
    }
    let outcome = match &arguments.command {
        Command::Predict(args) => commands::predict::run(args),
        Command::Index(args) => commands::index::run(args),
        Command::Drift(command) => commands::drift::run(command),
        Command::Demo(args) => commands::demo::run(args),
        Command::Completions { shell } => Ok(completions(*shell)),
    };
    match outcome.and_then(|done| finish(done, arguments.quiet)) {
        Ok(code) => ExitCode::from(code),
        Err(failure) => {
            eprint!("{}", failure.render());
            ExitCode::from(failure.exit_code())
        }
    }
}

fn finish(done: Done, quiet: bool) -> Result<u8, Failure> {
    done.outputs.write()?;
    if !quiet {
        for remark in &done.remarks {
            eprintln!("{remark}");
        }
    }
    Ok(done.exit_code)
}

fn completions(shell: clap_complete::Shell) -> Done {
    let mut script = Vec::new();
    clap_complete::generate(shell, &mut Arguments::command(), "latticewright", &mut script);
    let mut outputs = Outputs::default();
    outputs.print(&String::from_utf8_lossy(&script));
    Done { outputs, exit_code: 0, remarks: Vec::new() }
}
