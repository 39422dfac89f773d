//! Arguments shared by the commands, and the program's own. Help texts are the doc comments.

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand};
use instrument::{Anode, Radiation};
use values::{Diagnostic, Measured, Wavelength};

use crate::commands::{demo, drift, index, predict};
use crate::failure::Failure;
use crate::output::Outputs;
use crate::pictures;

/// Powder diffraction for people who answer for powders: every number with its standard uncertainty
#[derive(Parser)]
#[command(version, about, max_term_width = 110, subcommand_required = true, arg_required_else_help = true)]
#[command(
    after_help = "Exit codes: 0 done; 1 the program or the disk failed; 2 the input is wrong; 3 no answer; 4 drift beyond the \
limit; 5 undecided. Exit code 0 is not a release: a qualified person decides."
)]
pub struct Arguments {
    /// What to do
    #[command(subcommand)]
    pub command: Command,
    /// Threads to use (default: all cores)
    #[arg(long, global = true, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    pub threads: Option<u16>,
    /// No notes on standard error
    #[arg(long, global = true)]
    pub quiet: bool,
}

/// The commands
#[derive(Subcommand)]
pub enum Command {
    /// What will I see? Reflections and a pattern from structures
    Predict(predict::PredictArgs),
    /// Which lattice? Names a cubic lattice from a list of lines
    Index(index::IndexArgs),
    /// Has it moved? Compares lattice parameters between batches
    #[command(subcommand)]
    Drift(drift::DriftCommand),
    /// Show me everything on an invented plant
    Demo(demo::DemoArgs),
    /// Print a completion script for a shell
    Completions {
        /// The shell
        shell: clap_complete::Shell,
    },
}

/// Radiation: one of the two is needed.
#[derive(Args, Clone)]
#[group(required = true, multiple = false)]
pub struct RadiationArgs {
    /// One wavelength in Å, such as 1.5405929
    #[arg(long, value_name = "Å", allow_negative_numbers = true)]
    pub wavelength: Option<f64>,
    /// Anode of the tube, such as Cu: its Kα doublet
    #[arg(long, value_name = "ELEMENT")]
    pub anode: Option<String>,
}

impl RadiationArgs {
    /// The radiation and, for a tube, its anode.
    ///
    /// # Errors
    /// Wrong input: a wavelength out of range, an anode that the table does not hold.
    pub fn radiation(&self) -> Result<(Radiation, Option<Anode>), Failure> {
        if let Some(name) = &self.anode {
            let anode: Anode = name.parse().map_err(|error: instrument::UnknownAnode| {
                let known: Vec<&str> = Anode::ALL.iter().map(|anode| anode.symbol()).collect();
                Failure::option(Diagnostic::new(
                    format!("--anode {}", error.found),
                    format!("one of {}", known.join(", ")),
                    "name the anode by its symbol, or give --wavelength in Å",
                ))
            })?;
            return Ok((Radiation::doublet(anode), Some(anode)));
        }
        let angstrom = self.wavelength.unwrap_or(f64::NAN);
        let wavelength = Wavelength::from_angstrom(angstrom).filter(|w| (0.05..=20.0).contains(&w.angstrom()));
        match wavelength {
            Some(wavelength) => Ok((Radiation::single(wavelength), None)),
            None => Err(Failure::option(Diagnostic::new(
                format!("--wavelength {angstrom}"),
                "a wavelength in Å between 0.05 and 20",
                "give Å, not nm or keV: Cu Kα1 is --wavelength 1.5405929, or --anode Cu",
            ))),
        }
    }
}

/// `VALUE,U`: a value with its standard uncertainty.
///
/// # Errors
/// A sentence for the user.
pub fn value_and_u(text: &str) -> Result<Measured, String> {
    let parts: Vec<&str> = text.split(',').map(str::trim).collect();
    let number = |part: &str| part.parse::<f64>().ok().filter(|x| x.is_finite());
    match parts.as_slice() {
        [value, u] => match (number(value), number(u)) {
            (Some(value), Some(u)) if u >= 0.0 => Ok(Measured::new(value, u)),
            _ => Err("expected VALUE,U with two numbers and U not below 0, such as 0.01,0.005".to_owned()),
        },
        [one] => one
            .parse::<Measured>()
            .ok()
            .filter(|m| m.u > 0.0)
            .ok_or_else(|| "expected VALUE,U, such as 0.01,0.005, or 0.010(5)".to_owned()),
        _ => Err("expected one comma: VALUE,U".to_owned()),
    }
}

/// `FROM,TO` in degrees 2θ.
///
/// # Errors
/// A sentence for the user.
pub fn range(text: &str) -> Result<(f64, f64), String> {
    let wrong = || "expected FROM,TO in degrees 2θ with FROM below TO, such as 30,32.5".to_owned();
    let (from, to) = text.split_once(',').ok_or_else(wrong)?;
    match (from.trim().parse::<f64>(), to.trim().parse::<f64>()) {
        (Ok(from), Ok(to)) if from < to && from >= 0.0 && to <= 180.0 => Ok((from, to)),
        _ => Err(wrong()),
    }
}

/// Where results go beside the table.
#[derive(Args, Clone, Default)]
pub struct OutputArgs {
    /// One JSON document instead of the table
    #[arg(long)]
    pub json: bool,
    /// Write the list as comma-separated values (`-`: standard output instead of the table)
    #[arg(long, value_name = "FILE")]
    pub csv: Option<PathBuf>,
    /// Write the picture as SVG (`-`: standard output instead of the table)
    #[arg(long, value_name = "FILE")]
    pub svg: Option<PathBuf>,
    /// Write a page with table and picture that opens offline
    #[arg(long, value_name = "FILE")]
    pub html: Option<PathBuf>,
}

impl OutputArgs {
    /// Whether something else than the table goes to standard output.
    pub fn takes_stdout(&self) -> bool {
        self.json || [&self.csv, &self.svg, &self.html].into_iter().flatten().any(|p| crate::output::is_dash(p))
    }

    /// Whether a picture is asked for, alone or in a page.
    pub fn wants_picture(&self) -> bool {
        self.svg.is_some() || self.html.is_some()
    }

    /// What was asked for and nothing else: the JSON or the table on standard output, the files beside it. `title` heads the page.
    ///
    /// # Errors
    /// The picture or the page can't be drawn.
    pub fn deliver(
        &self,
        title: &str,
        table: &str,
        json: impl FnOnce() -> serde_json::Value,
        csv: impl FnOnce() -> String,
        picture: impl FnOnce() -> Result<String, Failure>,
    ) -> Result<Outputs, Failure> {
        let mut outputs = Outputs::default();
        if self.json {
            outputs.print(&(json().to_string() + "\n"));
        } else if !self.takes_stdout() {
            outputs.print(table);
        }
        if let Some(path) = &self.csv {
            outputs.file(path, csv());
        }
        if self.wants_picture() {
            let picture = picture()?;
            if let Some(path) = &self.svg {
                outputs.file(path, picture.clone());
            }
            if let Some(path) = &self.html {
                outputs.file(path, pictures::page(title, table, picture)?);
            }
        }
        Ok(outputs)
    }

    /// # Errors
    /// Wrong input: two things that both want standard output.
    pub fn check(&self) -> Result<(), Failure> {
        let dashes =
            [&self.csv, &self.svg, &self.html].into_iter().flatten().filter(|p| crate::output::is_dash(p)).count();
        if dashes + usize::from(self.json) > 1 {
            return Err(Failure::option(Diagnostic::new(
                "more than one result for standard output",
                "one of --json, --csv -, --svg -, --html -",
                "give the others a file name",
            )));
        }
        Ok(())
    }
}
