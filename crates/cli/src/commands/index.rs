//! `index`: which lattice?

use std::path::PathBuf;
use std::time::Instant;

use clap::Args;
use indexing::cubic::{self, Content, CubicError, CubicOptions, Satellite};
use instrument::Anode;
use values::{Diagnostic, Measured};

use crate::args::{self, OutputArgs, RadiationArgs};
use crate::failure::Failure;
use crate::output;
use crate::run::Done;
use crate::{composition, pictures};

mod render;

/// From a list of lines to the cubic lattices that explain it, each with a probability
#[derive(Args)]
#[command(
    after_help = "Only cubic lattices are searched; a list of another system ends with exit code 3 and says so.\n\nExample: \
latticewright index examples/plant/unknown.csv --anode Cu"
)]
pub struct IndexArgs {
    /// List of lines: CSV with two_theta_deg or d_A; `-` reads standard input
    pub peaks: PathBuf,
    #[command(flatten)]
    pub radiation: RadiationArgs,
    /// First angle to use, degrees 2θ; lines below it are not expected either
    #[arg(long, value_name = "DEG")]
    pub from: Option<f64>,
    /// Last angle to use, degrees 2θ
    #[arg(long, value_name = "DEG")]
    pub to: Option<f64>,
    /// Leave out lines in a range, degrees 2θ; may be given again
    #[arg(long, value_name = "FROM,TO", value_parser = args::range)]
    pub exclude: Vec<(f64, f64)>,
    /// What is known of the instrument's zero, degrees 2θ
    #[arg(long, value_name = "VALUE,U", value_parser = args::value_and_u, default_value = "0,0.05", allow_hyphen_values = true)]
    pub zero: Measured,
    /// Radius of the goniometer, mm; with it --displacement is in mm
    #[arg(long, value_name = "MM")]
    pub radius: Option<f64>,
    /// What is known of the specimen's displacement, mm (s/R without --radius); default: s/R = 0 ± 0.0004, 0.1 mm at 240 mm
    #[arg(long, value_name = "VALUE,U", value_parser = args::value_and_u, allow_hyphen_values = true)]
    pub displacement: Option<Measured>,
    /// The one kind of atom in the powder, such as Fe
    #[arg(long, value_name = "SYMBOL", conflicts_with = "formula")]
    pub element: Option<String>,
    /// Formula of the powder, such as 'Mg Al2 O4'
    #[arg(long, value_name = "FORMULA")]
    pub formula: Option<String>,
    /// Density of the powder's grains with its uncertainty, g/cm³, such as '7.87(2)'
    #[arg(long, value_name = "VALUE(u)", value_parser = density)]
    pub density: Option<Measured>,
    /// Show at most this many readings in full
    #[arg(long, value_name = "N", default_value_t = 3)]
    pub readings: usize,
    #[command(flatten)]
    pub output: OutputArgs,
}

/// A density in g/cm³, alone or with its s.u. in parentheses.
fn density(text: &str) -> Result<Measured, String> {
    text.parse::<Measured>()
        .ok()
        .or_else(|| args::value_and_u(text).ok())
        .filter(|m| m.value > 0.0 && m.value < 100.0)
        .ok_or_else(|| "expected g/cm³ above 0 with its uncertainty, such as 7.87(2)".to_owned())
}

/// Runs the command.
///
/// # Errors
/// Wrong input, or the disk failed.
pub fn run(args: &IndexArgs) -> Result<Done, Failure> {
    args.output.check()?;
    let begin = Instant::now();
    let (radiation, anode) = args.radiation.radiation()?;
    let (bytes, name) = output::read(&args.peaks)?;
    let list =
        scan::peak_list::read(&bytes, &name, radiation.primary).map_err(|message| Failure::input(message, &bytes))?;
    let mut notes = list.notes.clone();
    let mut peaks = list.peaks;
    let given = peaks.len();
    peaks.retain(|peak| {
        let deg = peak.two_theta.deg();
        args.from.is_none_or(|from| deg >= from)
            && args.to.is_none_or(|to| deg <= to)
            && !args.exclude.iter().any(|(from, to)| (*from..=*to).contains(&deg))
    });
    if peaks.len() < given {
        notes.push(format!("{} lines outside the asked range were left out.", given - peaks.len()));
    }
    let content = content(args)?;
    let options = CubicOptions {
        zero_deg: args.zero,
        displacement_over_radius: displacement(args)?,
        from_deg: args.from,
        satellites: satellites(anode),
        content: content.as_ref().map(|known| known.content),
        ..CubicOptions::default()
    };
    let answer = cubic::search(&peaks, radiation.primary, &options).map_err(|error| refused(&name, &error))?;
    let context = render::Context {
        name: &name,
        radiation: &radiation.label,
        peaks: &peaks,
        notes: &notes,
        content: content.as_ref(),
        radius_mm: args.radius,
    };
    let outputs = args.output.deliver(
        "Cubic lattice from a list of lines",
        &render::human(&answer, &context, args.readings),
        || render::json(&answer, &context, begin.elapsed().as_secs_f64()),
        || render::csv(&answer, &context),
        || pictures::indexed(&answer, &peaks, &radiation),
    )?;
    let remarks = if answer.found || !args.output.takes_stdout() { Vec::new() } else { vec![answer.verdict.clone()] };
    Ok(Done { outputs, exit_code: if answer.found { 0 } else { 3 }, remarks })
}

/// Why a list can't be searched, and what to do.
fn refused(name: &str, error: &CubicError) -> Failure {
    let (expected, mend) = match error {
        CubicError::TooFew { .. } => ("three lines or more", "add lines: twenty from the lowest angle on serve best"),
        CubicError::Position { .. } => ("positions between 0 and 180° 2θ", "correct the list"),
        CubicError::Uncertainty { .. } => {
            ("standard uncertainties above 0", "correct the list, or leave the column out")
        }
        CubicError::Option { expected, .. } => (*expected, "correct the option"),
    };
    Failure::option(Diagnostic::new(format!("{name}: {error}"), expected, mend))
}

/// The prior of s/R: as given, else the one of the search.
fn displacement(args: &IndexArgs) -> Result<Measured, Failure> {
    let radius = args.radius.unwrap_or(1.0);
    if !(radius > 0.0 && radius.is_finite()) {
        return Err(Failure::option(Diagnostic::new(
            format!("--radius {radius}"),
            "millimetres above 0",
            "state the radius of the goniometer in mm, such as 240",
        )));
    }
    let given = args.displacement.map(|d| Measured::new(d.value / radius, d.u / radius));
    Ok(given.unwrap_or(CubicOptions::default().displacement_over_radius))
}

/// Satellites are looked for where a tube is named: a single wavelength has none.
fn satellites(anode: Option<Anode>) -> Vec<Satellite> {
    anode.map(Satellite::of_anode).unwrap_or_default()
}

/// What `--element` or `--formula`, with or without `--density`, say of the cell's content.
pub struct Known {
    /// For the search.
    pub content: Content,
    /// The formula as understood.
    pub formula: String,
    /// Whether there is one kind of atom only.
    pub one_kind: bool,
}

fn content(args: &IndexArgs) -> Result<Option<Known>, Failure> {
    let Some(text) = args.element.as_ref().or(args.formula.as_ref()) else {
        return match args.density {
            None => Ok(None),
            Some(_) => Err(Failure::option(Diagnostic::new(
                "--density without --element or --formula",
                "what the powder consists of",
                "add --element Fe, or --formula 'Na Cl'",
            ))),
        };
    };
    let composition = composition::parse(text).map_err(Failure::option)?;
    if args.element.is_some() && composition.parts.len() != 1 {
        return Err(Failure::option(Diagnostic::new(
            format!("--element {text}"),
            "the symbol of one element",
            "give a compound with --formula",
        )));
    }
    Ok(Some(Known {
        content: Content {
            molar_mass_g_mol: composition.molar_mass_g_mol,
            heavy_atoms: composition.heavy_atoms(),
            density_g_cm3: args.density,
        },
        one_kind: composition.parts.len() == 1,
        formula: composition.to_string(),
    }))
}
