//! `drift`: has it moved?

use std::path::{Path, PathBuf};

use clap::{Args, Subcommand};
use drift::{Decision, DriftError, LineList, Options, Phase, Report};
use indexing::assign::Predicted;
use lattice::AxisSystem;
use pattern::{Polarisation, PredictOptions, Slit};
use structure_factor::Structure;
use values::{Diagnostic, Measured, Wavelength};

use crate::args::{self, OutputArgs, RadiationArgs};
use crate::failure::Failure;
use crate::output::{self, Outputs};
use crate::run::Done;
use crate::{pictures, structures};

mod render;

/// Has it moved? Compares lattice parameters between batches
#[derive(Subcommand)]
pub enum DriftCommand {
    /// Compare batches with a reference, from lists of lines
    Check(CheckArgs),
}

/// From lists of lines to a decision for each batch: within, drifted or undecided, at a stated risk
#[derive(Args)]
#[command(
    after_help = "Exit codes: 4 if any batch drifted, else 5 if any is undecided, else 0.\n\nExample: latticewright drift check \
--reference examples/plant/reference.csv --structure examples/plant/ceria.toml --anode Cu --radius 240 --log examples/plant/batches.csv \
--limit-ppm 60 examples/plant/kv-01.csv examples/plant/kv-02.csv"
)]
pub struct CheckArgs {
    /// Lists of lines of the batches; the file name without its ending is the batch's id
    #[arg(required = true)]
    pub batches: Vec<PathBuf>,
    /// List of lines of the reference
    #[arg(long, value_name = "PEAKS")]
    pub reference: PathBuf,
    /// Structure of the product: CIF, or the short TOML
    #[arg(long, value_name = "FILE")]
    pub structure: PathBuf,
    /// Data block of a CIF with several, by name or number
    #[arg(long, value_name = "NAME")]
    pub block: Option<String>,
    #[command(flatten)]
    pub radiation: RadiationArgs,
    /// Log of the batches: CSV with id,temperature_C,u_temperature_C
    #[arg(long, value_name = "FILE")]
    pub log: Option<PathBuf>,
    /// Largest change of a length that is in order, ppm; without it any change counts
    #[arg(long, value_name = "N", default_value_t = 0.0)]
    pub limit_ppm: f64,
    /// The same for angles, degrees (default: the angle of the limit in ppm taken as 10⁻⁶ radians)
    #[arg(long, value_name = "DEG")]
    pub limit_deg: Option<f64>,
    /// Risk of a false decision for each batch
    #[arg(long, value_name = "P", default_value_t = 0.05)]
    pub risk: f64,
    /// Decide on this parameter alone: a, b, c, alpha, beta or gamma
    #[arg(long, value_name = "NAME")]
    pub parameter: Option<String>,
    /// What is known of the instrument's zero, degrees 2θ
    #[arg(long, value_name = "VALUE,U", value_parser = args::value_and_u, default_value = "0,0.05", allow_hyphen_values = true)]
    pub zero: Measured,
    /// Radius of the goniometer, mm; without it displacements are given as s/R
    #[arg(long, value_name = "MM")]
    pub radius: Option<f64>,
    /// What is known of each specimen's displacement beforehand, mm (s/R without --radius)
    #[arg(long, value_name = "VALUE,U", value_parser = args::value_and_u, allow_hyphen_values = true)]
    pub displacement: Option<Measured>,
    /// Linear thermal expansion with its uncertainty, per kelvin, for all axes (default: as the structure states)
    #[arg(long, value_name = "VALUE,U", value_parser = args::value_and_u, allow_hyphen_values = true)]
    pub expansion: Option<Measured>,
    /// Temperature that cells are brought to, °C (default: as the structure states, else 22.5)
    #[arg(long, value_name = "C", allow_hyphen_values = true)]
    pub reference_temperature: Option<f64>,
    /// Leave out lines in a range, degrees 2θ; may be given again
    #[arg(long, value_name = "FROM,TO", value_parser = args::range)]
    pub exclude: Vec<(f64, f64)>,
    /// Show every line of every list with its difference
    #[arg(long)]
    pub lines: bool,
    #[command(flatten)]
    pub output: OutputArgs,
}

/// Temperature that certificates of reference materials are given for, °C.
const CERTIFICATE_C: f64 = 22.5;

/// Runs a drift command.
///
/// # Errors
/// Wrong input, or the disk failed.
pub fn run(command: &DriftCommand) -> Result<Done, Failure> {
    match command {
        DriftCommand::Check(args) => check(args),
    }
}

/// # Errors
/// Wrong input, or the disk failed.
pub fn check(args: &CheckArgs) -> Result<Done, Failure> {
    args.output.check()?;
    let (radiation, _) = args.radiation.radiation()?;
    let structure = structures::load(&args.structure, args.block.as_deref())?;
    let mut notes = structure.notes.clone();
    let log = read_log(args.log.as_deref(), &mut notes)?;
    let reference = read_list(&args.reference, args, radiation.primary, log.as_ref(), &mut notes)?;
    let batches: Vec<LineList> = args
        .batches
        .iter()
        .map(|path| read_list(path, args, radiation.primary, log.as_ref(), &mut notes))
        .collect::<Result<_, _>>()?;
    distinct(&reference, &batches)?;
    let last_deg = std::iter::once(&reference)
        .chain(&batches)
        .flat_map(|list| &list.peaks)
        .map(|peak| peak.two_theta.deg())
        .fold(0.0, f64::max);
    let phase = phase(&structure, radiation.primary, last_deg)?;
    let options = options(args, &structure);
    if options.expansion.is_none() && log.is_some() {
        notes.push("Temperatures are logged but no expansion is known: cells are as measured. --expansion, or expansion_per_K in the structure, brings them to one temperature.".to_owned());
    }
    match drift::check(&reference, &batches, &phase, radiation.primary, &options) {
        Ok(report) => finish(args, &report, &radiation.label, &structure.name, &notes),
        Err(DriftError::Input(message)) => Err(Failure::option(message)),
        Err(DriftError::NoAnswer(message)) => {
            let mut outputs = Outputs::default();
            let sentence = format!("No answer: {}. Expected {}; {}.", message.found, message.expected, message.mend);
            if args.output.json {
                outputs.print(&(render::empty_json(args.limit_ppm, args.risk, &sentence).to_string() + "\n"));
            } else {
                outputs.print(&crate::table::paragraph(&sentence, 0));
            }
            Ok(Done { outputs, exit_code: 3, remarks: Vec::new() })
        }
    }
}

fn finish(args: &CheckArgs, report: &Report, radiation: &str, phase: &str, notes: &[String]) -> Result<Done, Failure> {
    let outputs = args.output.deliver(
        "Drift check",
        &render::human(report, radiation, phase, notes, args.lines),
        || render::json(report, radiation, phase, notes),
        || render::csv(report),
        || pictures::drift(report, phase),
    )?;
    let exit_code = match report.worst() {
        Some(Decision::Drifted) => 4,
        Some(Decision::Undecided) => 5,
        Some(Decision::Within) | None => 0,
    };
    let remarks = if args.output.takes_stdout() { vec![report.release.to_owned()] } else { Vec::new() };
    Ok(Done { outputs, exit_code, remarks })
}

fn read_log(path: Option<&Path>, notes: &mut Vec<String>) -> Result<Option<scan::batch_log::BatchLog>, Failure> {
    let Some(path) = path else { return Ok(None) };
    let (bytes, name) = output::read(path)?;
    let log = scan::batch_log::read(&bytes, &name).map_err(|message| Failure::input(message, &bytes))?;
    notes.extend(log.notes.iter().cloned());
    Ok(Some(log))
}

fn read_list(
    path: &Path,
    args: &CheckArgs,
    wavelength: Wavelength,
    log: Option<&scan::batch_log::BatchLog>,
    notes: &mut Vec<String>,
) -> Result<LineList, Failure> {
    let (bytes, name) = output::read(path)?;
    let list = scan::peak_list::read(&bytes, &name, wavelength).map_err(|message| Failure::input(message, &bytes))?;
    let id = path.file_stem().map_or_else(|| name.clone(), |stem| stem.to_string_lossy().into_owned());
    notes.extend(list.notes.iter().map(|note| format!("{id}: {note}")));
    let mut peaks = list.peaks;
    peaks.retain(|peak| !args.exclude.iter().any(|(from, to)| (*from..=*to).contains(&peak.two_theta.deg())));
    let entry = log.and_then(|log| log.entry(&id));
    if log.is_some() && entry.is_none() {
        notes.push(format!("Batch {id} is not in the log: its temperature is unknown."));
    }
    let temperature_c = entry.and_then(|entry| {
        let celsius = entry.temperature_c?;
        if entry.u_temperature_c.is_none() {
            notes.push(format!("Batch {id}: the log gives no u_temperature_C; its temperature is taken as exact."));
        }
        Some(Measured::new(celsius, entry.u_temperature_c.unwrap_or(0.0)))
    });
    Ok(LineList { id, peaks, temperature_c })
}

/// The log and the report know batches by name: two of one name can't be told apart.
fn distinct(reference: &LineList, batches: &[LineList]) -> Result<(), Failure> {
    for (index, list) in batches.iter().enumerate() {
        if list.id == reference.id || batches[..index].iter().any(|other| other.id == list.id) {
            return Err(Failure::option(Diagnostic::new(
                format!("two lists of lines with the name `{}`", list.id),
                "another file name for each batch and the reference",
                "rename one of the files; the name without its ending is the batch's id",
            )));
        }
    }
    Ok(())
}

/// Degrees beyond the last line in which reflections are still offered: the cell may be off by a per cent.
const BEYOND_DEG: f64 = 6.0;

fn phase(structure: &Structure, wavelength: Wavelength, last_deg: f64) -> Result<Phase, Failure> {
    let options = PredictOptions {
        wavelength,
        from_deg: 0.5,
        to_deg: super::predict::beyond(last_deg, BEYOND_DEG, wavelength),
        // F² only ranks the lines here: where f′ and f″ are not tabulated it goes without.
        dispersion: structure_factor::tables::DISPERSION_EV.contains(&wavelength.energy_ev()),
        polarisation: Polarisation::Unpolarised,
        slit: Slit::Fixed,
    };
    let predicted = pattern::predict(&[(structure, 1.0)], &options).map_err(|error| {
        Failure::option(Diagnostic::new(
            error.to_string(),
            "a structure whose lines can be predicted at this wavelength",
            "see the reason; correct structure or wavelength",
        ))
    })?;
    let reflections = predicted
        .iter()
        .flat_map(|phase| &phase.reflections)
        .map(|r| Predicted { hkl: r.hkl, intensity: Some(r.intensity) })
        .collect();
    let system = AxisSystem::from_group(&structure.group);
    Ok(Phase { system, cell: structure.cell, reflections })
}

fn options(args: &CheckArgs, structure: &Structure) -> Options {
    let reference_c = args
        .reference_temperature
        .or(structure.expansion.as_ref().map(|e| e.reference_celsius))
        .unwrap_or(CERTIFICATE_C);
    let per_k = args.expansion.map(|alpha| [alpha; 3]).or(structure.expansion.as_ref().map(|e| e.per_kelvin));
    Options {
        limit_ppm: args.limit_ppm,
        limit_deg: args.limit_deg,
        risk: args.risk,
        parameter: args.parameter.clone(),
        zero_deg: args.zero,
        displacement: args.displacement,
        radius_mm: args.radius,
        expansion: per_k.map(|per_k| drift::Expansion { per_k, reference_c }),
        ..Options::default()
    }
}
