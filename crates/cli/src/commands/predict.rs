//! `predict`: what will I see?

use std::fmt::Write as _;
use std::path::PathBuf;

use clap::Args;
use pattern::{
    Pattern, PatternOptions, PhasePrediction, Polarisation, PredictOptions, PredictedReflection, Slit, Widths,
};
use serde_json::{Value, json};
use structure_factor::Structure;
use values::{Diagnostic, Measured, Wavelength};

use crate::args::{self, OutputArgs, RadiationArgs};
use crate::caution;
use crate::failure::Failure;
use crate::run::Done;
use crate::{pictures, structures, table};

/// From structures to the reflections and the powder pattern that they will show
#[derive(Args)]
#[command(
    after_help = "Without more words: Bragg–Brentano geometry, no monochromator, fixed slit, lines 0.08° wide, neutral atoms \
unless the file states charges, dispersion on.\n\nExample: latticewright predict examples/plant/ceria.toml --anode Cu --from 20 --to 90 --svg ceria.svg"
)]
pub struct PredictArgs {
    /// Structures: CIF, or the short TOML; `-` reads standard input
    #[arg(required = true)]
    pub files: Vec<PathBuf>,
    #[command(flatten)]
    pub radiation: RadiationArgs,
    /// First angle, degrees 2θ
    #[arg(long, value_name = "DEG", default_value_t = 5.0)]
    pub from: f64,
    /// Last angle, degrees 2θ
    #[arg(long, value_name = "DEG", default_value_t = 90.0)]
    pub to: f64,
    /// Leave out a range, degrees 2θ; may be given again
    #[arg(long, value_name = "FROM,TO", value_parser = args::range)]
    pub exclude: Vec<(f64, f64)>,
    /// Mass fractions of the structures, in their order, such as 0.7,0.3 (default: equal)
    #[arg(long, value_name = "W,…", value_delimiter = ',')]
    pub mass_fractions: Vec<f64>,
    /// Data block of a CIF with several, by name or number
    #[arg(long, value_name = "NAME")]
    pub block: Option<String>,
    /// Leave out dispersion (f′ and f″), for comparisons
    #[arg(long)]
    pub no_dispersion: bool,
    /// Angle 2θ of a mosaic crystal monochromator, degrees (graphite 002 and Cu Kα: 26.6)
    #[arg(long, value_name = "DEG")]
    pub monochromator: Option<f64>,
    /// Divergence slit
    #[arg(long, value_enum, default_value_t = SlitKind::Fixed)]
    pub slit: SlitKind,
    /// Full width at half maximum of every line, degrees 2θ
    #[arg(long, value_name = "DEG", default_value_t = 0.08)]
    pub fwhm: f64,
    /// Step of the pattern, degrees 2θ
    #[arg(long, value_name = "DEG", default_value_t = 0.02)]
    pub step: f64,
    /// Net counts of the highest point
    #[arg(long, value_name = "COUNTS", default_value_t = 10_000.0)]
    pub peak_counts: f64,
    /// Constant background
    #[arg(long, value_name = "COUNTS", default_value_t = 0.0)]
    pub background: f64,
    /// Put the pattern of counts into the JSON
    #[arg(long)]
    pub pattern: bool,
    /// Square root of counts on the picture's axis
    #[arg(long)]
    pub square_root: bool,
    /// Show every reflection in the table, not only the strongest
    #[arg(long)]
    pub all: bool,
    #[command(flatten)]
    pub output: OutputArgs,
}

/// Divergence slit, as an option.
#[derive(Clone, Copy, PartialEq, Eq, clap::ValueEnum)]
pub enum SlitKind {
    /// Constant opening
    Fixed,
    /// Constant illuminated length
    Variable,
}

/// Rows that the table shows unless `--all` is given.
const SHOWN: usize = 40;
/// Degrees beyond the range in which reflections still reach into it with their flanks or satellites.
const BEYOND_DEG: f64 = 3.0;
/// More points than this are a slip of the step.
const MOST_POINTS: f64 = 1_000_000.0;

/// Runs the command.
///
/// # Errors
/// Wrong input, or the disk failed.
pub fn run(args: &PredictArgs) -> Result<Done, Failure> {
    args.output.check()?;
    check_numbers(args)?;
    let (radiation, _) = args.radiation.radiation()?;
    let loaded: Vec<Structure> =
        args.files.iter().map(|file| structures::load(file, args.block.as_deref())).collect::<Result<_, _>>()?;
    let fractions = mass_fractions(args, loaded.len())?;
    let options = PredictOptions {
        wavelength: radiation.primary,
        from_deg: (args.from - BEYOND_DEG).max(0.05),
        to_deg: beyond(args.to, BEYOND_DEG, radiation.primary),
        dispersion: !args.no_dispersion,
        polarisation: args
            .monochromator
            .map_or(Polarisation::Unpolarised, |deg| Polarisation::Monochromator { two_theta_deg: deg }),
        slit: if args.slit == SlitKind::Fixed { Slit::Fixed } else { Slit::Variable },
    };
    let phases: Vec<(&Structure, f64)> = loaded.iter().zip(fractions.iter().copied()).collect();
    let wide = pattern::predict(&phases, &options).map_err(|error| {
        Failure::option(Diagnostic::new(
            error.to_string(),
            "a structure that can be predicted in this range",
            "see the reason; a smaller --to or another structure may help",
        ))
    })?;
    let drawn = args.pattern || args.output.wants_picture();
    let counts = drawn.then(|| {
        pattern::pattern::sum(
            &wide,
            &PatternOptions {
                from_deg: args.from,
                to_deg: args.to,
                step_deg: args.step,
                widths: Widths::constant(args.fwhm),
                peak_counts: args.peak_counts,
                background_counts: args.background,
                satellites: radiation.satellites.clone(),
                wavelength: radiation.primary,
            },
        )
    });
    let listed = within(wide, args);
    let mut notes: Vec<String> = Vec::new();
    if args.mass_fractions.is_empty() && listed.len() > 1 {
        notes.push("No mass fractions were given: equal parts by mass were taken.".to_owned());
    }
    // Counts are there whenever a picture is asked for.
    let outputs = args.output.deliver(
        "Predicted pattern",
        &human(&listed, args.all, &radiation.label, &notes),
        || to_json(&listed, counts.as_ref().filter(|_| args.pattern), &radiation.label, &notes),
        || to_csv(&listed),
        || {
            counts
                .as_ref()
                .map_or_else(|| Ok(String::new()), |counts| pictures::predicted(&listed, counts, args, &radiation))
        },
    )?;
    let mut remarks = vec![caution::X_RAYS.to_owned()];
    remarks.extend(caution::for_elements(loaded.iter().flat_map(|s| s.atoms.iter().map(|a| a.element.as_str()))));
    remarks.push(caution::DEFER.to_owned());
    Ok(Done { outputs, exit_code: 0, remarks })
}

/// The end of the range with its margin, which never asks for more than the scattering factors hold: s = sin θ/λ ≤ 2 Å⁻¹.
pub fn beyond(to_deg: f64, margin_deg: f64, wavelength: Wavelength) -> f64 {
    let sine = structure_factor::tables::S_MAX * wavelength.angstrom();
    let last = if sine < 1.0 { 2.0 * sine.asin().to_degrees() } else { 180.0 };
    (to_deg + margin_deg).min(179.9).min(last).max(to_deg)
}

fn check_numbers(args: &PredictArgs) -> Result<(), Failure> {
    let wrong =
        |found: String, expected: &str, mend: &str| Err(Failure::option(Diagnostic::new(found, expected, mend)));
    if !(args.from >= 0.0 && args.from < args.to && args.to < 180.0) {
        return wrong(
            format!("--from {} --to {}", args.from, args.to),
            "0 ≤ FROM < TO < 180 degrees 2θ",
            "correct the range",
        );
    }
    if !(args.step > 0.0 && (args.to - args.from) / args.step <= MOST_POINTS) {
        return wrong(
            format!("--step {}", args.step),
            "a step above 0 that gives at most a million points",
            "0.02 is usual",
        );
    }
    if !(args.fwhm > 0.0 && args.fwhm < 20.0) {
        return wrong(
            format!("--fwhm {}", args.fwhm),
            "a width above 0 and below 20 degrees",
            "0.08 is usual for a laboratory instrument",
        );
    }
    if !(args.peak_counts > 0.0
        && args.peak_counts.is_finite()
        && args.background >= 0.0
        && args.background.is_finite())
    {
        return wrong(
            format!("--peak-counts {} --background {}", args.peak_counts, args.background),
            "counts above 0 and a background not below 0",
            "leave them out for 10000 counts on no background",
        );
    }
    if args.monochromator.is_some_and(|deg| !(deg > 0.0 && deg < 180.0)) {
        return wrong(
            format!("--monochromator {}", args.monochromator.unwrap_or_default()),
            "the angle 2θ of the crystal, between 0 and 180 degrees",
            "graphite 002 and Cu Kα: 26.6",
        );
    }
    Ok(())
}

fn mass_fractions(args: &PredictArgs, count: usize) -> Result<Vec<f64>, Failure> {
    let given = &args.mass_fractions;
    if given.is_empty() {
        return Ok(vec![1.0 / count as f64; count]);
    }
    let sum: f64 = given.iter().sum();
    if given.len() != count || given.iter().any(|w| !(*w >= 0.0 && w.is_finite())) || !(sum > 0.0 && sum.is_finite()) {
        return Err(Failure::option(Diagnostic::new(
            format!("{} mass fractions for {count} structures", given.len()),
            "one number for each structure, none below 0, with a finite sum above 0",
            "give them in the order of the files; they are scaled to a sum of 1",
        )));
    }
    Ok(given.iter().map(|w| w / sum).collect())
}

/// The reflections in the asked range, scaled so that the strongest of them is 100.
fn within(mut phases: Vec<PhasePrediction>, args: &PredictArgs) -> Vec<PhasePrediction> {
    for phase in &mut phases {
        phase.reflections.retain(|r| {
            let deg = r.two_theta.deg();
            (args.from..=args.to).contains(&deg) && !args.exclude.iter().any(|(from, to)| (*from..=*to).contains(&deg))
        });
    }
    let strongest = phases.iter().flat_map(|p| &p.reflections).map(|r| r.intensity).fold(0.0, f64::max);
    if strongest > 0.0 {
        for reflection in phases.iter_mut().flat_map(|p| &mut p.reflections) {
            reflection.intensity *= 100.0 / strongest;
        }
    }
    phases
}

fn to_json(phases: &[PhasePrediction], counts: Option<&Pattern>, radiation: &str, notes: &[String]) -> Value {
    let phases: Vec<Value> = phases
        .iter()
        .map(|p| {
            let [a, b, c, alpha, beta, gamma] = p.cell.parameters();
            let reflections: Vec<Value> = p
                .reflections
                .iter()
                .map(|r| {
                    json!({"h": r.hkl[0], "k": r.hkl[1], "l": r.hkl[2], "multiplicity": r.multiplicity, "d_A": r.d_angstrom, "u_d_A": r.u_d_angstrom,
                           "two_theta_deg": r.two_theta.deg(), "u_two_theta_deg": r.u_two_theta_deg, "F2": r.f_squared, "intensity": r.intensity})
                })
                .collect();
            json!({"name": p.name, "space_group": p.space_group,
                   "cell": {"a": a, "b": b, "c": c, "alpha": alpha, "beta": beta, "gamma": gamma},
                   "u_cell": p.cell_u.map(|[a, b, c, alpha, beta, gamma]| json!({"a": a, "b": b, "c": c, "alpha": alpha, "beta": beta, "gamma": gamma})),
                   "volume_A3": p.volume_a3, "u_volume_A3": p.u_volume_a3, "density_g_cm3": p.density_g_cm3,
                   "u_density_g_cm3": p.u_volume_a3.map(|u| p.density_g_cm3 * u / p.volume_a3), "mass_fraction": p.mass_fraction,
                   "notes": p.notes, "reflections": reflections})
        })
        .collect();
    let mut document =
        json!({"schema": "latticewright.predict/1", "radiation": radiation, "notes": notes, "phases": phases});
    if let Some(counts) = counts {
        document["pattern"] = json!({"two_theta_deg": counts.two_theta_deg, "counts": counts.counts});
    }
    document
}

fn to_csv(phases: &[PhasePrediction]) -> String {
    let mut text = String::from("phase,h,k,l,multiplicity,d_A,two_theta_deg,F2,intensity,u_d_A,u_two_theta_deg\n");
    for phase in phases {
        let name = table::csv_field(&phase.name);
        for r in &phase.reflections {
            let [h, k, l] = r.hkl;
            let _ = writeln!(
                text,
                "{name},{h},{k},{l},{},{:.6},{:.5},{:.6e},{:.5},{},{}",
                r.multiplicity,
                r.d_angstrom,
                r.two_theta.deg(),
                r.f_squared,
                r.intensity,
                r.u_d_angstrom.map(|u| format!("{u:.2e}")).unwrap_or_default(),
                r.u_two_theta_deg.map(|u| format!("{u:.2e}")).unwrap_or_default()
            );
        }
    }
    text
}

/// Cell, volume and density, with s.u. where the file states them.
fn cell_line(phase: &PhasePrediction) -> String {
    let six = phase.cell.parameters();
    let u = phase.cell_u.unwrap_or_default();
    let shown: Vec<String> = (0..6).map(|i| Measured::new(six[i], u[i]).to_string()).collect();
    let density_u = phase.u_volume_a3.map(|u| phase.density_g_cm3 * u / phase.volume_a3);
    let stated = if phase.cell_u.is_some() { "" } else { " (stated without s.u.: d and 2θ carry none)" };
    format!(
        "  cell {} Å, {}°{stated}; volume {} Å³; density {} g/cm³\n",
        shown[..3].join(" "),
        shown[3..].join(" "),
        with_u(phase.volume_a3, phase.u_volume_a3, 3),
        with_u(phase.density_g_cm3, density_u, 4)
    )
}

/// A value with its s.u., or with a fixed number of decimals where it has none.
fn with_u(value: f64, u: Option<f64>, decimals: usize) -> String {
    match u.filter(|u| *u > 0.0) {
        Some(u) => Measured::new(value, u).to_string(),
        None => format!("{value:.decimals$}"),
    }
}

/// The table for people: head of each phase, then the strongest reflections by angle.
pub fn human(phases: &[PhasePrediction], all: bool, radiation: &str, notes: &[String]) -> String {
    let mut text = String::new();
    for phase in phases {
        let _ = writeln!(text, "{}: {}", phase.name, phase.space_group);
        text.push_str(&cell_line(phase));
        if phases.len() > 1 {
            let _ = writeln!(text, "  mass fraction {:.4}", phase.mass_fraction);
        }
        for note in &phase.notes {
            text.push_str(&table::paragraph(&table::sentence(note), 2));
        }
    }
    for note in notes {
        let _ = writeln!(text, "{note}");
    }
    let mut rows: Vec<(&str, &PredictedReflection)> =
        phases.iter().flat_map(|p| p.reflections.iter().map(|r| (p.name.as_str(), r))).collect();
    let total = rows.len();
    if !all && total > SHOWN {
        rows.sort_by(|x, y| y.1.intensity.total_cmp(&x.1.intensity));
        rows.truncate(SHOWN);
    }
    rows.sort_by(|x, y| x.1.two_theta.deg().total_cmp(&y.1.two_theta.deg()));
    let _ = writeln!(text, "\nReflections, {radiation}; intensity: integrated, strongest 100\n");
    let several = phases.len() > 1;
    let mut header = vec!["hkl", "m", "d / Å", "2θ / °", "F² / e²", "intensity"];
    if several {
        header.insert(0, "phase");
    }
    let body: Vec<Vec<String>> = rows
        .iter()
        .map(|(name, r)| {
            let mut row = vec![
                table::hkl(r.label),
                r.multiplicity.to_string(),
                with_u(r.d_angstrom, r.u_d_angstrom, 5),
                with_u(r.two_theta.deg(), r.u_two_theta_deg, 4),
                format!("{:.2}", r.f_squared),
                format!("{:.2}", r.intensity),
            ];
            if several {
                row.insert(0, (*name).to_owned());
            }
            row
        })
        .collect();
    text.push_str(&table::table(&header, if several { &[0, 1] } else { &[0] }, &body));
    if total == 0 {
        text.push_str("No reflection lies in this range.\n");
    } else if total > rows.len() {
        let _ = writeln!(
            text,
            "The {} strongest; {} more are not shown (--all shows them).",
            rows.len(),
            total - rows.len()
        );
    }
    text
}
