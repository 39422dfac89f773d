//! Writes one of each picture into a folder, to be looked at: `cargo run -p figures --example gallery -- FOLDER`.
//!
//! The patterns are of invented peak heights on real positions; they show the drawing, not a substance.

use std::path::Path;

use figures::{
    CalculatedLine, CellParameter, DriftDecision, DriftFigure, DriftPoint, DriftUnit, IndexedFigure, LineKind, Merit,
    ObservedLine, Page, PageLink, PagePicture, PageSection, PageTable, PatternFigure, PhaseCurve, ReflectionMark,
    drift_chart, indexed_lines, predicted_pattern, report_page,
};
use values::Measured;

const CU_KA1_ANGSTROM: f64 = 1.540_592_9;

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let folder = std::env::args().nth(1).ok_or("name a folder")?;
    let folder = Path::new(&folder);
    std::fs::create_dir_all(folder)?;
    let write = |name: &str, text: String| std::fs::write(folder.join(name), text);
    write("pattern-one.svg", pattern(&[("CeO₂ (invented strengths)", 5.4113, 4, 1.0)], false)?)?;
    write("pattern-sqrt.svg", pattern(&[("CeO₂ (invented strengths)", 5.4113, 4, 1.0)], true)?)?;
    let three = [("Phase A, 62 %", 5.4113, 4, 1.0), ("Phase B, 30 %", 4.0494, 4, 0.5), ("Phase C, 8 %", 8.35, 2, 0.1)];
    write("pattern-three.svg", pattern(&three, false)?)?;
    write("pattern-dense.svg", pattern(&[("a large primitive cell", 34.0, 1, 1.0)], true)?)?;
    let names =
        ["Cerium dioxide, calcined at 900 °C, lot 7", "Gold", "Spinel", "Copper", "Rock salt", "Nickel", "Tungsten"];
    let seven: Vec<_> =
        (0..7).map(|i| (names[i], 3.6 + 0.31 * i as f64, 4 - 2 * (i as i32 % 2), 1.0 / (1.0 + i as f64))).collect();
    write("pattern-seven.svg", pattern(&seven, true)?)?;
    write("pattern-sticks.svg", sticks()?)?;
    write("indexed.svg", indexed(true)?)?;
    write("indexed-positions-only.svg", indexed(false)?)?;
    for (batches, limit) in [(8, Some(50.0)), (40, Some(80.0)), (200, Some(60.0)), (1, None)] {
        write(&format!("drift-{batches}.svg"), drift(batches, limit)?)?;
    }
    write("index.html", page()?)?;
    Ok(())
}

fn page() -> Result<String, figures::FigureError> {
    let section = |heading: &str, command: &str, svg: String| PageSection {
        heading: heading.to_owned(),
        paragraphs: vec!["A paragraph that says in a few words what was asked and what came out.".to_owned()],
        command: Some(command.to_owned()),
        pictures: vec![PagePicture { svg, caption: "Invented data.".to_owned() }],
        ..PageSection::default()
    };
    let mut drift_section =
        section("Has it moved?", "latticewright drift check --reference R-1000.csv", drift(8, Some(50.0))?);
    let row = |cells: [&str; 3]| cells.map(str::to_owned).to_vec();
    drift_section.tables.push(PageTable {
        caption: "Change of a against R-1000".to_owned(),
        header: row(["batch", "Δa/a / ppm", "decision"]),
        rows: vec![row(["B-1001", "−20(11)", "within"]), row(["B-1006", "118(6)", "drifted"])],
    });
    drift_section.links.push(PageLink { text: "drift.json".to_owned(), href: "drift/drift.json".to_owned() });
    report_page(&Page {
        title: "Three everyday jobs on an invented plant".to_owned(),
        lead: vec!["All data are invented.".to_owned()],
        sections: vec![
            section(
                "What will I see?",
                "latticewright predict ceria.toml --anode Cu",
                pattern(&[("CeO₂ (invented strengths)", 5.4113, 4, 1.0)], false)?,
            ),
            section("Which lattice?", "latticewright index unknown.csv --anode Cu", indexed(true)?),
            drift_section,
        ],
        footer: "A qualified person decides on release.".to_owned(),
    })
}

/// Numbers that look random and are always the same, from 0 to 1.
fn scattered(i: u32) -> f64 {
    (f64::from(i) * 12.9898).sin().mul_add(43_758.545, 0.0).rem_euclid(1.0)
}

fn indexed(intensities: bool) -> Result<String, figures::FigureError> {
    let all: Vec<ReflectionMark> = cubic(5.4311, 4, 1.0);
    let missing = |i: usize| i == 5;
    let calculated: Vec<CalculatedLine> = all
        .iter()
        .enumerate()
        .map(|(i, r)| CalculatedLine {
            two_theta_deg: r.two_theta_deg,
            d_angstrom: r.d_angstrom,
            hkl: r.hkl.clone(),
            observed: !missing(i),
        })
        .collect();
    let known = |value: f64| intensities.then_some(value);
    let mut observed: Vec<ObservedLine> = all
        .iter()
        .enumerate()
        .filter(|(i, _)| !missing(*i))
        .map(|(i, r)| {
            let shift = 0.02 * (scattered(u32::try_from(i).unwrap_or(0)) - 0.5);
            ObservedLine {
                two_theta_deg: r.two_theta_deg + shift,
                u_deg: Some(0.004 + 0.004 * scattered(40 + u32::try_from(i).unwrap_or(0))),
                intensity: known(r.intensity),
                kind: LineKind::Indexed { calculated_deg: r.two_theta_deg, hkl: r.hkl.clone() },
            }
        })
        .collect();
    let other = |two_theta_deg: f64, intensity: f64, kind| ObservedLine {
        two_theta_deg,
        u_deg: Some(0.01),
        intensity: known(intensity),
        kind,
    };
    observed.push(other(38.2, 900.0, LineKind::Unindexed));
    observed.push(other(56.28, 4000.0, LineKind::Ghost { of: "Kα2 of 3 1 1".to_owned() }));
    indexed_lines(&IndexedFigure {
        lattice: "cubic F".to_owned(),
        cell: vec![CellParameter { name: "a".to_owned(), value: Measured::new(5.4311, 0.0002), unit: "Å" }],
        m_n: Some(Merit { n: 9, value: 153.24 }),
        f_n: Some(Merit { n: 9, value: 61.27 }),
        note: "zero of 2θ 0.003(2)°".to_owned(),
        wavelength_angstrom: CU_KA1_ANGSTROM,
        observed: &observed,
        calculated: &calculated,
    })
}

fn drift(batches: u32, limit: Option<f64>) -> Result<String, figures::FigureError> {
    let points: Vec<DriftPoint> = (0..batches)
        .map(|i| {
            let delta = 40.0 * (scattered(i) - 0.5) + if i % 7 == 5 { 120.0 } else { 0.0 };
            let u = 6.0 + 20.0 * scattered(i + 500).powi(3);
            let within = limit.is_some_and(|limit| delta.abs() < limit - 2.0 * u);
            let drifted = delta.abs() > limit.unwrap_or(0.0) + 2.0 * u;
            let decision = match (within, drifted) {
                (true, _) => DriftDecision::Within,
                (_, true) => DriftDecision::Drifted,
                _ => DriftDecision::Undecided,
            };
            DriftPoint { batch: format!("B-{}", 1001 + i), delta, u, coverage_factor: 2.0, decision }
        })
        .collect();
    drift_chart(&DriftFigure {
        title: "Ceria for catalysts (invented)".to_owned(),
        parameter: "a".to_owned(),
        unit: DriftUnit::Ppm,
        reference: "R-1000".to_owned(),
        limit,
        risk: Some(0.05),
        points: &points,
    })
}

fn sticks() -> Result<String, figures::FigureError> {
    let reflections = [cubic(5.4113, 4, 1.0), cubic(4.0494, 4, 0.5)];
    let names = ["CeO₂ (invented strengths)", "Al (invented strengths)"];
    let phases: Vec<PhaseCurve<'_>> = reflections
        .iter()
        .zip(names)
        .map(|(reflections, name)| PhaseCurve { name: name.to_owned(), counts: &[], reflections })
        .collect();
    let mut figure = PatternFigure::new("Predicted reflections", CU_KA1_ANGSTROM, &[], &[], &phases);
    figure.intensity_label = "Integrated intensity / counts × °".to_owned();
    predicted_pattern(&figure)
}

/// Reflections of a cubic cell: `parity` 4 keeps unmixed indices, 2 an even sum, 1 all.
fn cubic(a: f64, parity: i32, scale: f64) -> Vec<ReflectionMark> {
    let top = (2.0 * a / CU_KA1_ANGSTROM * 0.7).floor() as i32;
    let mut out = Vec::new();
    for h in 0..=top {
        for k in 0..=h {
            for l in 0..=k {
                let n = h * h + k * k + l * l;
                let kept = match parity {
                    4 => (h + k) % 2 == 0 && (k + l) % 2 == 0,
                    2 => (h + k + l) % 2 == 0,
                    _ => true,
                };
                let d = a / f64::from(n).sqrt();
                let sine = CU_KA1_ANGSTROM / (2.0 * d);
                if n > 0 && kept && sine < 0.7 {
                    let strength =
                        scale * 1e4 * f64::from(1 + (7 * h + 5 * k + 3 * l) % 11) / (1.0 + 0.02 * f64::from(n));
                    let hkl = format!("{h} {} {l}", if k > 0 && (h + l) % 3 == 1 { -k } else { k });
                    let two_theta_deg = 2.0 * sine.asin().to_degrees();
                    out.push(ReflectionMark { two_theta_deg, d_angstrom: d, intensity: strength, hkl });
                }
            }
        }
    }
    out
}

fn counts(x: &[f64], reflections: &[ReflectionMark]) -> Vec<f64> {
    let mut counts = vec![0.0; x.len()];
    for r in reflections {
        let half = 0.06;
        let start = x.partition_point(|x| *x < r.two_theta_deg - 6.0);
        let end = x.partition_point(|x| *x < r.two_theta_deg + 6.0);
        for (x, y) in x[start..end].iter().zip(&mut counts[start..end]) {
            *y += r.intensity / (1.0 + ((x - r.two_theta_deg) / half).powi(2));
        }
    }
    counts
}

fn pattern(phases: &[(&str, f64, i32, f64)], square_root: bool) -> Result<String, figures::FigureError> {
    let x: Vec<f64> = (0..=8500).map(|i| 5.0 + 0.01 * f64::from(i)).collect();
    let reflections: Vec<_> = phases.iter().map(|&(_, a, parity, scale)| cubic(a, parity, scale)).collect();
    let own: Vec<_> = reflections.iter().map(|r| counts(&x, r)).collect();
    let sum: Vec<f64> = (0..x.len()).map(|i| 120.0 + own.iter().map(|c| c[i]).sum::<f64>()).collect();
    let several = phases.len() > 1;
    let curves: Vec<PhaseCurve<'_>> = phases
        .iter()
        .zip(&reflections)
        .zip(&own)
        .map(|((phase, reflections), own)| PhaseCurve {
            name: phase.0.to_owned(),
            counts: if several { own } else { &[] },
            reflections,
        })
        .collect();
    let mut figure = PatternFigure::new("Predicted pattern", CU_KA1_ANGSTROM, &x, &sum, &curves);
    figure.subtitle = "Cu Kα1, 1.5405929 Å; 5° to 90° 2θ in steps of 0.01°; line width 0.12°".to_owned();
    figure.square_root = square_root;
    predicted_pattern(&figure)
}
