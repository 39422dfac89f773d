//! Results as pictures and as a page: from the numeric crates' values to what `figures` draws.

use drift::report::{BatchReport, Delta};
use drift::{Decision, Report};
use figures::{
    CalculatedLine, CellParameter, DriftDecision, DriftFigure, DriftPoint, DriftUnit, FigureError, IndexedFigure,
    LineKind, Merit, ObservedLine, Page, PageLink, PagePicture, PageSection, PatternFigure, PhaseCurve, ReflectionMark,
};
use indexing::cubic::{CubicAnswer, Status};
use instrument::Radiation;
use pattern::{Pattern, PhasePrediction};
use values::Peak;

use crate::caution;
use crate::commands::predict::PredictArgs;
use crate::failure::Failure;
use crate::table;

/// Too many batches or a number beyond the axis come from the input; any other picture that can't be drawn is a fault of the
/// program.
fn drawn(result: Result<String, FigureError>) -> Result<String, Failure> {
    result.map_err(|error| match error {
        FigureError::TooMany { .. } => Failure::option(error.into()),
        FigureError::NotDrawable { value, .. } if value.is_finite() => Failure::option(error.into()),
        other => Failure::Program(format!("the picture can't be drawn: {other}")),
    })
}

/// The predicted pattern.
///
/// # Errors
/// The picture can't be drawn.
pub fn predicted(
    phases: &[PhasePrediction],
    pattern: &Pattern,
    args: &PredictArgs,
    radiation: &Radiation,
) -> Result<String, Failure> {
    let marks: Vec<Vec<ReflectionMark>> = phases
        .iter()
        .map(|phase| {
            phase
                .reflections
                .iter()
                .map(|r| ReflectionMark {
                    two_theta_deg: r.two_theta.deg(),
                    d_angstrom: r.d_angstrom,
                    intensity: r.intensity,
                    hkl: table::hkl(r.label),
                })
                .collect()
        })
        .collect();
    let several = phases.len() > 1;
    let curves: Vec<PhaseCurve<'_>> = phases
        .iter()
        .zip(&pattern.by_phase)
        .zip(&marks)
        .map(|((phase, counts), reflections)| PhaseCurve {
            name: if several {
                format!("{}, {:.1} %", phase.name, 100.0 * phase.mass_fraction)
            } else {
                phase.name.clone()
            },
            // Alone, the phase is the sum: one curve.
            counts: if several { counts } else { &[] },
            reflections,
        })
        .collect();
    let title = if several {
        "Predicted pattern of a mixture".to_owned()
    } else {
        format!("Predicted pattern of {}", phases[0].name)
    };
    let mut figure =
        PatternFigure::new(&title, radiation.primary.angstrom(), &pattern.two_theta_deg, &pattern.counts, &curves);
    figure.subtitle = format!("{}, lines {}° wide", radiation.label, args.fwhm);
    figure.range_deg = Some((args.from, args.to));
    figure.square_root = args.square_root;
    drawn(figures::predicted_pattern(&figure))
}

/// The first reading of a list of lines.
///
/// # Errors
/// The picture can't be drawn.
pub fn indexed(answer: &CubicAnswer, peaks: &[Peak], radiation: &Radiation) -> Result<String, Failure> {
    let reading = answer.readings.first();
    let line_of = |index: usize| reading.and_then(|r| r.lines.iter().find(|line| line.index == index));
    let observed: Vec<ObservedLine> = peaks
        .iter()
        .enumerate()
        .map(|(index, peak)| ObservedLine {
            two_theta_deg: peak.two_theta.deg(),
            u_deg: peak.u_two_theta_deg,
            intensity: peak.strength().filter(|x| *x >= 0.0),
            kind: match line_of(index) {
                None => LineKind::Unindexed,
                Some(line) => match (&line.status, line.calculated_deg) {
                    (Status::Used, Some(calculated_deg)) => LineKind::Indexed {
                        calculated_deg,
                        hkl: line.hkl.first().map(|hkl| table::hkl(*hkl)).unwrap_or_default(),
                    },
                    (Status::Satellite { name, .. }, _) => LineKind::Ghost { of: table::radiation(name) },
                    _ => LineKind::Unindexed,
                },
            },
        })
        .collect();
    let mut calculated = Vec::new();
    if let Some(reading) = reading {
        for line in reading.lines.iter().filter(|line| line.status == Status::Used) {
            if let (Some(deg), Some(n), Some(hkl)) = (line.calculated_deg, line.n, line.hkl.first()) {
                let d_angstrom = reading.a.value / f64::from(n).sqrt();
                calculated.push(CalculatedLine {
                    two_theta_deg: deg,
                    d_angstrom,
                    hkl: table::hkl(*hkl),
                    observed: true,
                });
            }
        }
        for missing in &reading.missing {
            if let Some(hkl) = missing.hkl.first() {
                let d_angstrom = reading.a.value / f64::from(missing.n).sqrt();
                calculated.push(CalculatedLine {
                    two_theta_deg: missing.two_theta_deg,
                    d_angstrom,
                    hkl: table::hkl(*hkl),
                    observed: false,
                });
            }
        }
    }
    let merit = reading.and_then(|r| r.merit);
    let figure = IndexedFigure {
        lattice: reading.map_or_else(
            || "No cubic lattice".to_owned(),
            |r| format!("cubic {}{}", r.centring, if answer.found { "" } else { " (not believed)" }),
        ),
        cell: reading.iter().map(|r| CellParameter { name: "a".to_owned(), value: r.a, unit: "Å" }).collect(),
        m_n: merit.map(|m| Merit { n: m.n, value: m.m }).filter(|m| m.value.is_finite()),
        f_n: merit.map(|m| Merit { n: m.n, value: m.f }).filter(|m| m.value.is_finite()),
        note: reading.map_or_else(String::new, |r| {
            format!("{}; zero {}°; probability {:.3}", radiation.label, r.zero_deg, r.probability)
        }),
        wavelength_angstrom: radiation.primary.angstrom(),
        observed: &observed,
        calculated: &calculated,
    };
    drawn(figures::indexed_lines(&figure))
}

/// The drift chart: for each batch the parameter that speaks for it. Where these differ, its name stands behind the batch.
///
/// # Errors
/// The picture can't be drawn.
pub fn drift(report: &Report, phase: &str) -> Result<String, Failure> {
    let usual = charted(report);
    // Lengths share one axis; an angle has its own unit, and then one parameter is drawn for all.
    let one = report.batches.iter().filter_map(|b| b.headline()).any(|d| d.in_deg);
    let shown = |batch: &BatchReport| {
        if one { batch.deltas.iter().find(|d| d.parameter == usual).cloned() } else { batch.headline().cloned() }
    };
    let deltas: Vec<(&BatchReport, Delta)> = report.batches.iter().filter_map(|b| Some((b, shown(b)?))).collect();
    let mixed = deltas.iter().any(|(_, d)| d.parameter != usual);
    let points: Vec<DriftPoint> = deltas
        .iter()
        .map(|(batch, delta)| DriftPoint {
            batch: if mixed { format!("{}: {}", batch.id, delta.parameter) } else { batch.id.clone() },
            delta: delta.delta,
            u: delta.u,
            coverage_factor: report.k,
            decision: decision(delta.decision),
        })
        .collect();
    let any = deltas.first().map(|(_, d)| d);
    let figure = DriftFigure {
        title: if mixed { format!("{phase}: x is the parameter named behind the batch") } else { phase.to_owned() },
        parameter: if mixed { "x".to_owned() } else { usual.to_owned() },
        unit: if any.is_some_and(|d| d.in_deg) { DriftUnit::Degrees } else { DriftUnit::Ppm },
        reference: report.reference.id.clone(),
        limit: any.map(|d| d.limit).filter(|limit| *limit > 0.0),
        risk: Some(report.risk),
        points: &points,
    };
    if points.is_empty() {
        return Err(Failure::option(values::Diagnostic::new(
            "no batch with a difference to draw",
            "a batch whose lines give a cell",
            "leave --svg and --html out and see the table",
        )));
    }
    drawn(figures::drift_chart(&figure))
}

/// The parameter that speaks for most batches; the first free one where none does.
fn charted(report: &Report) -> &'static str {
    let count = |name: &str| report.batches.iter().filter_map(|b| b.headline()).filter(|d| d.parameter == name).count();
    report.parameters.iter().copied().rev().max_by_key(|name| count(name)).unwrap_or("a")
}

fn decision(decision: Decision) -> DriftDecision {
    match decision {
        Decision::Within => DriftDecision::Within,
        Decision::Drifted => DriftDecision::Drifted,
        Decision::Undecided => DriftDecision::Undecided,
    }
}

/// Endings of the files that each step of the demo leaves.
pub const DEMO_ENDINGS: [&str; 4] = ["svg", "csv", "json", "txt"];

/// One step of the demo for its page.
pub struct DemoStep {
    /// The question that the step answers.
    pub question: &'static str,
    /// Name of its results without ending.
    pub name: &'static str,
    /// The command that it stands for.
    pub command: String,
    /// Its table.
    pub table: String,
    /// Its exit code.
    pub exit_code: u8,
    /// Its picture.
    pub svg: String,
}

fn section(heading: &str, text: &str, svg: String) -> PageSection {
    PageSection {
        heading: heading.to_owned(),
        output: text.to_owned(),
        pictures: if svg.is_empty() { Vec::new() } else { vec![PagePicture { svg, caption: String::new() }] },
        ..PageSection::default()
    }
}

/// A page with one table and one picture.
///
/// # Errors
/// The page can't be written.
pub fn page(title: &str, text: &str, svg: String) -> Result<String, Failure> {
    drawn(figures::report_page(&Page {
        title: title.to_owned(),
        lead: Vec::new(),
        sections: vec![section("Result", text, svg)],
        footer: format!("{} {}", caution::X_RAYS, caution::DEFER),
    }))
}

/// The demo's page: one section for each step, with links to its files.
///
/// # Errors
/// The page can't be written.
pub fn demo_page(steps: &[DemoStep]) -> Result<String, Failure> {
    let sections = steps
        .iter()
        .map(|step| PageSection {
            paragraphs: vec![format!("Exit code {}: {}.", step.exit_code, exit_code_in_words(step.exit_code))],
            command: Some(step.command.clone()),
            links: DEMO_ENDINGS
                .iter()
                .map(|ending| PageLink {
                    text: format!("{}.{ending}", step.name),
                    href: format!("{}.{ending}", step.name),
                })
                .collect(),
            ..section(step.question, &step.table, step.svg.clone())
        })
        .collect();
    drawn(figures::report_page(&Page {
        title: "Kestrel Vale: a plant that does not exist".to_owned(),
        lead: vec![
            "Three everyday jobs on invented data: a pattern predicted before the run, an unknown powder named from its lines, and eight batches compared with a reference. Batch kv-05 was made with a larger cell, batch kv-07 sat too low in its holder: see what the program says of each.".to_owned(),
            drift::report::RELEASE.to_owned(),
        ],
        sections,
        footer: format!("All data on this page are invented. {} {}", caution::X_RAYS, caution::DEFER),
    }))
}

fn exit_code_in_words(code: u8) -> &'static str {
    match code {
        0 => "done",
        3 => "no answer",
        4 => "a batch drifted beyond the limit",
        5 => "a batch is undecided",
        _ => "failed",
    }
}
