//! Predicted reflections and the pattern of counts against formulas worked out here and values from elsewhere.

#![allow(clippy::unwrap_used, reason = "a test may stop where it can't read")]

use pattern::{PatternOptions, Polarisation, PredictOptions, Slit, Widths, predict};
use structure_factor::Structure;
use values::Wavelength;

const SILICON: &str = r#"
cell = [5.4311, 5.4311, 5.4311, 90, 90, 90]
space_group = "F d -3 m:1"
sites = [{ element = "Si", xyz = [0, 0, 0], b_iso_A2 = 0.46 }]
"#;

fn copper() -> Wavelength {
    Wavelength::from_angstrom(1.5405929).unwrap()
}

fn options() -> PredictOptions {
    PredictOptions {
        wavelength: copper(),
        from_deg: 20.0,
        to_deg: 100.0,
        dispersion: true,
        polarisation: Polarisation::Unpolarised,
        slit: Slit::Fixed,
    }
}

fn silicon() -> Structure {
    Structure::from_toml(SILICON, "silicon.toml").unwrap()
}

fn drawn(satellites: Vec<(Wavelength, f64)>) -> (pattern::PhasePrediction, pattern::Pattern) {
    let mut phases = predict(&[(&silicon(), 1.0)], &options()).unwrap();
    let pattern = pattern::pattern::sum(
        &phases,
        &PatternOptions {
            from_deg: 20.0,
            to_deg: 60.0,
            step_deg: 0.001,
            widths: Widths::constant(0.08),
            peak_counts: 10_000.0,
            background_counts: 25.0,
            satellites,
            wavelength: copper(),
        },
    );
    (phases.remove(0), pattern)
}

/// Sum of counts over a range, less the background, times the step.
fn area(pattern: &pattern::Pattern, from: f64, to: f64) -> f64 {
    pattern
        .two_theta_deg
        .iter()
        .zip(&pattern.counts)
        .filter(|(x, _)| (from..to).contains(*x))
        .map(|(_, y)| (y - 25.0) * 0.001)
        .sum()
}

#[test]
fn f_squared_and_multiplicity_are_those_computed_elsewhere() {
    // Outside: gemmi's Cromer–Mann and Cromer–Liberman values by a direct sum of independent code, Cu Kα1.
    let phases = predict(&[(&silicon(), 1.0)], &options()).unwrap();
    for (hkl, multiplicity, f_squared) in
        [([1, 1, 1], 8, 3643.37), ([2, 2, 0], 12, 4847.56), ([3, 1, 1], 24, 2087.56), ([4, 0, 0], 6, 3414.63)]
    {
        let line = phases[0].reflections.iter().find(|r| r.hkl == hkl).unwrap();
        assert_eq!(line.multiplicity, multiplicity);
        // Six digits are printed; f′ and f″ are good to 0.002 e of 14.
        assert!((line.f_squared / f_squared - 1.0).abs() < 4e-4, "{hkl:?}: {}", line.f_squared);
    }
}

#[test]
fn the_highest_point_stands_at_the_strongest_line_with_the_counts_asked_for() {
    let (phase, pattern) = drawn(Vec::new());
    let (at, highest) = pattern.counts.iter().enumerate().max_by(|a, b| a.1.total_cmp(b.1)).unwrap();
    assert!((pattern.two_theta_deg[at] - phase.reflections[0].two_theta.deg()).abs() < 0.0006);
    assert!((highest - 10_025.0).abs() < 1e-6);
    assert!((pattern.by_phase[0][at] - 10_000.0).abs() < 1e-6);
}

#[test]
fn areas_of_lines_are_in_the_ratio_of_their_intensities() {
    let (phase, pattern) = drawn(Vec::new());
    let intensity = |hkl: [i32; 3]| phase.reflections.iter().find(|r| r.hkl == hkl).unwrap().intensity;
    let ratio = area(&pattern, 46.3, 48.3) / area(&pattern, 27.4, 29.4);
    // Equal windows cut equal shares of the tails; the neighbours' own tails add some parts in a thousand.
    assert!((ratio / (intensity([2, 2, 0]) / intensity([1, 1, 1])) - 1.0).abs() < 3e-3, "{ratio}");
}

#[test]
fn the_second_component_of_the_doublet_has_its_place_and_its_share() {
    let ka2 = Wavelength::from_angstrom(1.5444274).unwrap();
    let (phase, both) = drawn(vec![(ka2, 0.5)]);
    let (_, one) = drawn(Vec::new());
    // Splitting by Bragg's law, worked out here: sin θ₂ = sin θ₁ λ₂/λ₁ at 220.
    let theta = phase.reflections[1].two_theta.theta_rad();
    let second = 2.0 * (theta.sin() * 1.5444274 / 1.5405929).asin().to_degrees();
    assert!((second - phase.reflections[1].two_theta.deg() - 0.1248).abs() < 2e-4, "{second}");
    let ratio = area(&both, 46.3, 48.3) / area(&both, 27.4, 29.4) / (area(&one, 46.3, 48.3) / area(&one, 27.4, 29.4));
    assert!((ratio - 1.0).abs() < 2e-3, "the doublet adds the same share to each line: {ratio}");
    let near = |pattern: &pattern::Pattern, deg: f64| pattern.counts[((deg - 20.0) / 0.001).round() as usize];
    let share = (near(&both, second) - 25.0) / (near(&both, phase.reflections[1].two_theta.deg()) - 25.0);
    assert!((0.5..0.62).contains(&share), "half the height, and the flank of the first: {share}");
}

#[test]
fn mass_fractions_weigh_a_mixture_and_are_scaled_to_one() {
    let silicon = silicon();
    let alone = predict(&[(&silicon, 3.0)], &options()).unwrap();
    assert!((alone[0].mass_fraction - 1.0).abs() < 1e-12);
    let mixed = predict(&[(&silicon, 3.0), (&silicon, 1.0)], &options()).unwrap();
    assert!((mixed[0].mass_fraction - 0.75).abs() < 1e-12);
    let ratio = mixed[0].reflections[0].intensity / mixed[1].reflections[0].intensity;
    assert!((ratio - 3.0).abs() < 1e-9, "{ratio}");
}

#[test]
fn a_variable_slit_multiplies_by_the_sine_of_theta() {
    let fixed = predict(&[(&silicon(), 1.0)], &options()).unwrap();
    let variable = predict(&[(&silicon(), 1.0)], &PredictOptions { slit: Slit::Variable, ..options() }).unwrap();
    for (a, b) in fixed[0].reflections.iter().zip(&variable[0].reflections).filter(|(a, _)| a.intensity > 1e-6) {
        let ratio =
            (b.intensity / a.intensity) / (variable[0].reflections[0].intensity / fixed[0].reflections[0].intensity);
        let sines = a.two_theta.theta_rad().sin() / fixed[0].reflections[0].two_theta.theta_rad().sin();
        assert!((ratio / sines - 1.0).abs() < 1e-12);
    }
}

#[test]
fn scattering_factors_beyond_their_range_are_refused_by_name() {
    let short = PredictOptions { wavelength: Wavelength::from_angstrom(0.21).unwrap(), ..options() };
    let error = predict(&[(&silicon(), 1.0)], &short).unwrap_err();
    assert!(error.reason.contains("2 Å⁻¹"), "{error}");
}

#[test]
fn a_structure_without_mass_is_refused() {
    let mut empty = silicon();
    empty.atoms.iter_mut().for_each(|atom| atom.occupancy = 0.0);
    let error = predict(&[(&silicon(), 1.0), (&empty, 1.0)], &options()).unwrap_err();
    assert!(error.reason.contains("weigh nothing"), "{error}");
}

#[test]
fn equal_masses_of_silicon_and_corundum_show_the_reference_intensity_ratio() {
    // Outside: 4.728, strongest line of silicon over 113 of corundum, computed from first principles by independent code with
    // the f0 of International Tables C and Cromer–Liberman dispersion, Cu Kα1, no monochromator.
    let corundum = Structure::from_toml(
        r#"
cell = [4.7592, 4.7592, 12.992, 90, 90, 120]
space_group = "R -3 c:H"
sites = [
  { element = "Al", xyz = [0, 0, 0.35216], b_iso_A2 = 0.26 },
  { element = "O", xyz = [0.30624, 0, 0.25], b_iso_A2 = 0.29 },
]
"#,
        "corundum.toml",
    )
    .unwrap();
    let mixed = predict(&[(&silicon(), 1.0), (&corundum, 1.0)], &options()).unwrap();
    let strongest = mixed[0].reflections.iter().map(|r| r.intensity).fold(0.0, f64::max);
    let standard = mixed[1].reflections.iter().find(|r| (r.two_theta.deg() - 43.353).abs() < 0.01).unwrap();
    let ratio = strongest / standard.intensity;
    assert!((ratio / 4.728 - 1.0).abs() < 5e-4, "{ratio}");
}
