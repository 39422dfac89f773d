//! What a check must do with zero, displacement, temperature, wrong s.u. and strange lines.
//!
//! Lists are invented here: positions from `lattice::Cell::d`, Bragg's law and `instrument::shift`, noise from a fixed seed.

#![allow(clippy::unwrap_used, reason = "what a fixture does not hold fails the test")]

use drift::{Decision, DriftError, Expansion, LineList, Options, Phase, Report, check};
use indexing::assign::Predicted;
use instrument::shift;
use lattice::{AxisSystem, Cell};
use values::{Measured, Peak, TwoTheta, Wavelength};

const RADIUS: f64 = 240.0;
const LINES: [[i32; 3]; 14] = [
    [1, 1, 1],
    [2, 0, 0],
    [2, 2, 0],
    [3, 1, 1],
    [2, 2, 2],
    [4, 0, 0],
    [3, 3, 1],
    [4, 2, 0],
    [4, 2, 2],
    [5, 1, 1],
    [4, 4, 0],
    [5, 3, 1],
    [4, 4, 2],
    [6, 2, 0],
];

/// SplitMix64 with Box and Muller's normal numbers.
struct Draws(u64);

impl Draws {
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        (((z ^ (z >> 31)) >> 11) as f64 + 0.5) / (1_u64 << 53) as f64
    }

    fn normal(&mut self) -> f64 {
        (-2.0 * self.uniform().ln()).sqrt() * (std::f64::consts::TAU * self.uniform()).cos()
    }
}

fn copper() -> Wavelength {
    Wavelength::from_angstrom(1.5405929).unwrap()
}

fn phase() -> Phase {
    Phase {
        system: AxisSystem::Cubic,
        cell: Cell::cubic(5.42).unwrap(),
        reflections: LINES.iter().map(|h| Predicted { hkl: *h, intensity: None }).collect(),
    }
}

fn options() -> Options {
    Options { radius_mm: Some(RADIUS), ..Options::default() }
}

/// What a list is made of.
#[derive(Clone, Copy)]
struct Batch {
    ppm: f64,
    displacement_mm: f64,
    zero_deg: f64,
    /// Real noise over stated s.u.
    noise: f64,
}

const STILL: Batch = Batch { ppm: 0.0, displacement_mm: 0.0, zero_deg: 0.01, noise: 1.0 };
const U_DEG: f64 = 0.001;

fn list(id: &str, batch: Batch, draws: &mut Draws) -> LineList {
    let cell = Cell::cubic(5.42 * (1.0 + 1e-6 * batch.ppm)).unwrap();
    let peaks = LINES.iter().map(|hkl| {
        let bragg = TwoTheta::from_d(cell.d(*hkl), copper()).unwrap();
        let shifted = bragg.deg() + shift::displacement_deg(bragg, batch.displacement_mm, RADIUS) + batch.zero_deg;
        Peak::at(TwoTheta::from_deg(shifted + U_DEG * batch.noise * draws.normal())).with_u_deg(U_DEG)
    });
    LineList { id: id.to_owned(), peaks: peaks.collect(), temperature_c: None }
}

fn run(lists: &[LineList], options: &Options) -> Report {
    check(&lists[0], &lists[1..], &phase(), copper(), options).unwrap()
}

fn without_u(lists: &mut [LineList]) {
    lists.iter_mut().flat_map(|l| l.peaks.iter_mut()).for_each(|p| p.u_two_theta_deg = None);
}

#[test]
fn a_zero_that_all_lists_share_cancels_in_the_difference() {
    let at = |zero_deg: f64| {
        let mut draws = Draws(1);
        let lists = ["r", "b"].map(|id| list(id, Batch { zero_deg, ..STILL }, &mut draws));
        run(&lists, &options()).batches[0].headline().unwrap().clone()
    };
    let (low, high) = (at(-0.05), at(0.05));
    assert!((low.delta - high.delta).abs() < 0.01 * low.u, "{} {}", low.delta, high.delta);
}

#[test]
fn the_absolute_cell_rests_on_the_zero_and_the_difference_does_not() {
    let mut draws = Draws(2);
    let lists = ["r", "b"].map(|id| list(id, STILL, &mut draws));
    let wide = run(&lists, &Options { zero_deg: Measured::new(0.0, 0.05), ..options() });
    let exact = run(&lists, &Options { zero_deg: Measured::new(0.01, 0.0), ..options() });
    let u = |r: &Report| r.reference.cell[0].u.unwrap();
    assert!(u(&wide) > 3.0 * u(&exact), "{} {}", u(&wide), u(&exact));
    let d = |r: &Report| r.batches[0].headline().unwrap().u;
    assert!((d(&wide) / d(&exact) - 1.0).abs() < 0.01, "{} {}", d(&wide), d(&exact));
    assert!(wide.notes[0].contains("rest on a zero"));
}

#[test]
fn a_low_specimen_is_reported_as_low_and_not_as_drift() {
    let mut draws = Draws(3);
    let low = Batch { displacement_mm: 0.12, ..STILL };
    let lists = [list("r", STILL, &mut draws), list("low", low, &mut draws)];
    let report = run(&lists, &Options { limit_ppm: 100.0, ..options() });
    let batch = &report.batches[0];
    assert_eq!(batch.decision, Decision::Within, "{batch:#?}");
    let moved = batch.displacement_difference.unwrap();
    assert!((moved.value - 0.12).abs() < 4.0 * moved.u && moved.u < 0.005, "{moved:?}");
    assert!(batch.statement.contains("mm lower than the reference"), "{}", batch.statement);
    // Without a radius the same in units of the radius.
    let report = run(&lists, &Options { limit_ppm: 100.0, ..Options::default() });
    let moved = report.batches[0].displacement_difference.unwrap();
    assert!(!moved.in_mm && (moved.value * RADIUS - 0.12).abs() < 4.0 * moved.u * RADIUS);
    assert!(report.batches[0].statement.contains("of the radius"));
    assert_eq!(report.release, "A qualified person decides on release.");
}

#[test]
fn a_change_beyond_the_limit_has_drifted_and_one_near_it_is_undecided() {
    let mut draws = Draws(4);
    let moved = |ppm: f64, draws: &mut Draws| list("b", Batch { ppm, ..STILL }, draws);
    let lists =
        [list("r", STILL, &mut draws), moved(200.0, &mut draws), moved(-200.0, &mut draws), moved(100.0, &mut draws)];
    let report = run(&lists, &Options { limit_ppm: 100.0, ..options() });
    let decisions: Vec<Decision> = report.batches.iter().map(|b| b.decision).collect();
    assert_eq!(decisions, [Decision::Drifted, Decision::Drifted, Decision::Undecided]);
    assert_eq!(report.worst(), Some(Decision::Drifted));
    for (batch, ppm) in report.batches.iter().zip([200.0, -200.0, 100.0]) {
        let delta = batch.headline().unwrap();
        assert!((delta.delta - ppm).abs() < 4.0 * delta.u, "{delta:?}");
        assert!(delta.acceptance < 100.0 && delta.critical > 100.0 && delta.detectable > delta.critical);
    }
}

#[test]
fn a_warm_batch_is_brought_to_the_temperature_of_the_reference() {
    let mut draws = Draws(5);
    // 10 K at 1.1e-5 per kelvin: 110 ppm.
    let mut lists = [list("r", STILL, &mut draws), list("warm", Batch { ppm: 110.0, ..STILL }, &mut draws)];
    lists[0].temperature_c = Some(Measured::new(22.5, 0.3));
    lists[1].temperature_c = Some(Measured::new(32.5, 0.4));
    let expansion = |u: f64| Some(Expansion { per_k: [Measured::new(1.1e-5, u); 3], reference_c: 22.5 });
    let plain = run(&lists, &options()).batches[0].headline().unwrap().clone();
    assert!((plain.delta - 110.0).abs() < 4.0 * plain.u);
    let delta =
        run(&lists, &Options { expansion: expansion(2e-6), ..options() }).batches[0].headline().unwrap().clone();
    assert!(delta.delta.abs() < 4.0 * delta.u, "{delta:?}");
    // By hand: 1.1e-5 (0.3, 0.4) K = 3.3 and 4.4 ppm, 2e-6 · 10 K = 20 ppm.
    let by_hand = (plain.u.powi(2) + 3.3_f64.powi(2) + 4.4_f64.powi(2) + 20.0_f64.powi(2)).sqrt();
    assert!((delta.u / by_hand - 1.0).abs() < 1e-3, "{} {by_hand}", delta.u);
    // A batch without a temperature is compared as measured, and that is said.
    lists[1].temperature_c = None;
    let report = run(&lists, &Options { expansion: expansion(0.0), ..options() });
    assert!((report.batches[0].headline().unwrap().delta - plain.delta).abs() < 1e-9);
    assert!(report.batches[0].notes[0].contains("as measured"), "{:?}", report.batches[0].notes);
}

#[test]
fn stated_uncertainties_that_are_right_are_left_alone() {
    let mut draws = Draws(6);
    let mut enlarged = 0;
    for _ in 0..300 {
        let lists = ["r", "b", "c"].map(|id| list(id, STILL, &mut draws));
        let report = run(&lists, &options());
        enlarged += usize::from(report.batches.iter().any(|b| b.list.as_ref().unwrap().noise.factor > 1.0));
    }
    // Two tests at 0.001: 0.6 expected in 300; six or more has a chance below 1e-4 (Poisson).
    assert!(enlarged < 6, "{enlarged} of 300");
}

#[test]
fn one_list_with_understated_uncertainties_is_enlarged_alone() {
    let mut draws = Draws(7);
    let mut lists: Vec<LineList> = (0..5).map(|i| list(&i.to_string(), STILL, &mut draws)).collect();
    lists.push(list("noisy", Batch { noise: 4.0, ..STILL }, &mut draws));
    let report = run(&lists, &options());
    let factors: Vec<f64> = report.batches.iter().map(|b| b.list.as_ref().unwrap().noise.factor).collect();
    assert!(factors[..4].iter().all(|f| (f - 1.0).abs() < 1e-12), "{factors:?}");
    // 12 degrees of freedom: the factor is known to a fifth.
    assert!((2.4..5.6).contains(&factors[4]), "{factors:?}");
    let delta = report.batches[4].headline().unwrap();
    assert!(delta.dof.is_some_and(|dof| (12.0..16.0).contains(&dof)), "{:?}", delta.dof);
}

#[test]
fn lists_that_are_all_too_confident_are_enlarged_together() {
    let mut draws = Draws(8);
    let lists: Vec<LineList> =
        (0..6).map(|i| list(&i.to_string(), Batch { noise: 2.5, ..STILL }, &mut draws)).collect();
    let report = run(&lists, &options());
    let factor = report.reference.noise.factor;
    assert!((2.0..3.0).contains(&factor), "{factor}");
    assert!(report.common_offset_deg.is_none_or(|c| c < U_DEG), "{:?}", report.common_offset_deg);
}

/// Offsets of each line, alike in all lists, as an aberration that no parameter describes.
fn add_common(lists: &mut [LineList], size_deg: f64) {
    let mut draws = Draws(99);
    let offsets: Vec<f64> = LINES.iter().map(|_| size_deg * draws.normal()).collect();
    for peak_list in lists {
        for (peak, offset) in peak_list.peaks.iter_mut().zip(&offsets) {
            *peak = Peak { two_theta: TwoTheta::from_deg(peak.two_theta.deg() + offset), ..*peak };
        }
    }
}

#[test]
fn residuals_that_repeat_from_list_to_list_cancel_in_the_difference() {
    let mut draws = Draws(9);
    let mut lists: Vec<LineList> = (0..6).map(|i| list(&i.to_string(), STILL, &mut draws)).collect();
    let clean = run(&lists, &options());
    add_common(&mut lists, 0.01);
    for stated in [true, false] {
        if !stated {
            without_u(&mut lists);
        }
        let report = run(&lists, &options());
        let common = report.common_offset_deg.unwrap();
        assert!((0.005..0.02).contains(&common), "{common}");
        for (batch, clean) in report.batches.iter().zip(&clean.batches) {
            let (delta, clean) = (batch.headline().unwrap(), clean.headline().unwrap());
            assert!((delta.u / clean.u - 1.0).abs() < 0.4, "{} {}", delta.u, clean.u);
            assert!((delta.delta - clean.delta).abs() < clean.u, "{} {}", delta.delta, clean.delta);
        }
    }
}

#[test]
fn a_stated_model_part_widens_the_cell_but_not_the_difference() {
    let mut draws = Draws(10);
    let mut lists: Vec<LineList> = (0..3).map(|i| list(&i.to_string(), STILL, &mut draws)).collect();
    let plain = run(&lists, &options());
    add_common(&mut lists, 0.004);
    for peak in lists.iter_mut().flat_map(|l| l.peaks.iter_mut()) {
        peak.u_model_deg = Some(0.004);
        peak.u_counting_deg = Some(U_DEG);
        peak.u_two_theta_deg = Some(U_DEG.hypot(0.004));
    }
    let report = run(&lists, &options());
    assert!(report.common_offset_deg.is_none() && (report.reference.noise.factor - 1.0).abs() < 1e-12);
    let u = |r: &Report| r.batches[0].headline().unwrap().u;
    assert!((u(&report) / u(&plain) - 1.0).abs() < 0.05, "{} {}", u(&report), u(&plain));
    assert!(report.reference.cell[0].u > plain.reference.cell[0].u);
}

#[test]
fn without_stated_uncertainties_unchanged_batches_drift_as_often_as_the_risk_says() {
    let mut draws = Draws(11);
    let (n, mut drifted) = (1500, 0);
    for _ in 0..n {
        let mut lists = ["r", "b"].map(|id| list(id, STILL, &mut draws));
        lists.iter_mut().for_each(|l| l.peaks.truncate(6));
        without_u(&mut lists);
        let report = run(&lists, &options());
        // 12 lines, four unknowns of the lists, and a zero that the data hardly determine.
        let dof = report.batches[0].headline().unwrap().dof.unwrap();
        assert!((6.9..8.1).contains(&dof), "{dof}");
        drifted += usize::from(report.batches[0].decision == Decision::Drifted);
    }
    let (mean, deviation) = (0.05 * f64::from(n), (0.05 * 0.95 * f64::from(n)).sqrt());
    assert!((drifted as f64 - mean).abs() < 3.2905 * deviation, "{drifted} of {n}");
}

#[test]
fn strange_lines_are_listed_and_a_batch_of_another_phase_is_undecided() {
    let mut draws = Draws(12);
    let mut lists = [list("r", STILL, &mut draws), list("dirty", STILL, &mut draws), list("other", STILL, &mut draws)];
    lists[1].peaks.push(Peak::at(TwoTheta::from_deg(44.2)).with_u_deg(U_DEG));
    lists[2].peaks = [23.1, 37.7].map(|x| Peak::at(TwoTheta::from_deg(x)).with_u_deg(U_DEG)).to_vec();
    let report = run(&lists, &options());
    let dirty = report.batches[0].list.as_ref().unwrap();
    assert_eq!((dirty.foreign.len(), dirty.lines.len()), (1, LINES.len()));
    assert!(dirty.foreign[0].reason.contains("nearest reflection"));
    let other = &report.batches[1];
    assert_eq!((other.decision, other.list.is_none(), other.deltas.len()), (Decision::Undecided, true, 0));
    assert!(other.statement.starts_with("No cell:"), "{}", other.statement);
    assert_eq!(report.family.batches, 1);
}

#[test]
fn a_line_in_the_report_is_observed_minus_calculated() {
    let mut draws = Draws(13);
    let lists = ["r", "b"].map(|id| list(id, Batch { displacement_mm: -0.05, ..STILL }, &mut draws));
    let report = run(&lists, &options());
    let reference = &report.reference;
    for line in &reference.lines {
        let d =
            5.42 / f64::from(line.hkl[0].iter().map(|i| i * i).sum::<i32>()).sqrt() * reference.cell[0].value / 5.42;
        let bragg = TwoTheta::from_d(d, copper()).unwrap();
        let place =
            bragg.deg() + report.zero_deg.value + shift::displacement_deg(bragg, reference.displacement.value, RADIUS);
        assert!((line.calculated_deg - place).abs() < 1e-9, "{line:?} {place}");
        assert!((line.observed_deg - line.calculated_deg - line.difference_deg).abs() < 1e-12);
    }
}

#[test]
fn wrong_options_are_refused_with_what_was_expected() {
    let mut draws = Draws(14);
    let lists = ["r", "b"].map(|id| list(id, STILL, &mut draws));
    for (options, word) in [
        (Options { risk: 0.5, ..options() }, "risk 0.5"),
        (Options { limit_ppm: -1.0, ..options() }, "limit -1"),
        (Options { parameter: Some("c".into()), ..options() }, "parameter `c`"),
        (Options { radius_mm: Some(0.0), ..options() }, "radius"),
        (Options { zero_deg: Measured::new(0.0, f64::NAN), ..options() }, "zero"),
    ] {
        match check(&lists[0], &lists[1..], &phase(), copper(), &options) {
            Err(DriftError::Input(message)) => assert!(message.found.contains(word), "{message}"),
            other => panic!("{word}: {other:?}"),
        }
    }
    let empty = LineList { id: "empty".into(), peaks: vec![], temperature_c: None };
    assert!(matches!(
        check(&empty, &lists[1..], &phase(), copper(), &options()),
        Err(DriftError::NoAnswer(message)) if message.found.contains("empty")
    ));
}
