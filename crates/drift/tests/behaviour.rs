//! What a check must do with zero, displacement, temperature, wrong s.u. and strange lines.

#![allow(clippy::unwrap_used, reason = "what a fixture does not hold fails the test")]

mod made;

use drift::{Decision, DriftError, Expansion, LineList, Options, Phase, Report, check};
use indexing::assign::Predicted;
use instrument::shift;
use lattice::{AxisSystem, Cell};
use made::{Batch, Draws, LINES, RADIUS, STILL, U_DEG, copper, list, options, phase, run, without_u};
use values::{Measured, Peak, TwoTheta};

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
}

#[test]
fn a_list_without_a_temperature_is_taken_at_that_of_a_room_once_another_has_one() {
    let mut draws = Draws(5);
    let mut lists = [list("r", STILL, &mut draws), list("warm", Batch { ppm: 220.0, ..STILL }, &mut draws)];
    let known = || Options {
        expansion: Some(Expansion { per_k: [Measured::new(1.1e-5, 0.0); 3], reference_c: 20.0 }),
        ..options()
    };
    // None is logged: as measured.
    let plain = run(&lists, &known());
    let measured = plain.batches[0].headline().unwrap().clone();
    assert!((measured.delta - 220.0).abs() < 4.0 * measured.u && plain.temperature_c.is_none());
    assert!(plain.notes.iter().any(|n| n.starts_with("No temperatures are logged")), "{:?}", plain.notes);
    // 20 K above a room at 1.1e-5 per kelvin are 220 ppm; by hand u: 1.1e-5 times 5/√3 K and 0.4 K, 31.75 and 4.4 ppm.
    lists[1].temperature_c = Some(Measured::new(42.5, 0.4));
    let warm = run(&lists, &known());
    let delta = warm.batches[0].headline().unwrap();
    assert!(delta.delta.abs() < 4.0 * measured.u, "{delta:?}");
    let by_hand = (measured.u.powi(2) + (11.0 * 5.0 / 3f64.sqrt()).powi(2) + 4.4_f64.powi(2)).sqrt();
    assert!((delta.u / by_hand - 1.0).abs() < 1e-3, "{} {by_hand}", delta.u);
    assert_eq!(warm.temperature_c, Some(20.0));
    assert!(warm.reference.at_reference_temperature && warm.reference.temperature_c.is_none());
    let told =
        |notes: &[String], id: &str| notes.iter().any(|n| n.contains(&format!("No temperature of {id} is logged")));
    assert!(told(&warm.reference.notes, "r"), "{:?}", warm.reference.notes);
    assert!(!told(&warm.batches[0].list.as_ref().unwrap().notes, "warm"));
    // And the other way round; a room has no drift against itself, so what is left is the change as it was made.
    lists[0].temperature_c = Some(Measured::new(22.5, 0.3));
    lists[1].temperature_c = None;
    let unlogged = run(&lists, &known());
    let delta = unlogged.batches[0].headline().unwrap();
    assert!((delta.delta - measured.delta).abs() < 0.1 && delta.u > 31.0, "{delta:?}");
    assert!(told(&unlogged.batches[0].list.as_ref().unwrap().notes, "warm"));
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
fn a_batch_that_makes_the_joint_fit_singular_is_undecided_and_the_others_are_decided() {
    // A hexagonal cell from lines without l: c is determined by nothing, however many lines there are.
    let reflections: Vec<[i32; 3]> = vec![
        [1, 0, 0],
        [0, 0, 2],
        [1, 0, 1],
        [1, 0, 2],
        [1, 1, 0],
        [1, 0, 3],
        [2, 0, 0],
        [1, 1, 2],
        [2, 0, 1],
        [2, 1, 0],
        [3, 0, 0],
    ];
    let cell = Cell::new(3.25, 3.25, 5.207, 90.0, 90.0, 120.0).unwrap();
    let phase = Phase {
        system: AxisSystem::Hexagonal,
        cell,
        reflections: reflections.iter().map(|h| Predicted { hkl: *h, intensity: None }).collect(),
    };
    let mut draws = Draws(15);
    let mut list = |id: &str, keep: &dyn Fn(&[i32; 3]) -> bool| LineList {
        id: id.to_owned(),
        peaks: reflections
            .iter()
            .filter(|h| keep(h))
            .map(|h| {
                let place = TwoTheta::from_d(cell.d(*h), copper()).unwrap().deg();
                Peak::at(TwoTheta::from_deg(place + U_DEG * draws.normal())).with_u_deg(U_DEG)
            })
            .collect(),
        temperature_c: None,
    };
    let (all, flat) = (|_: &[i32; 3]| true, |h: &[i32; 3]| h[2] == 0);
    let lists = [list("r", &all), list("good", &all), list("flat", &flat), list("fine", &all)];
    let run = |lists: &[LineList]| {
        check(&lists[0], &lists[1..], &phase, copper(), &Options { limit_ppm: 1000.0, ..options() })
    };
    let report = run(&lists).unwrap();
    let decisions: Vec<Decision> = report.batches.iter().map(|b| b.decision).collect();
    assert_eq!(decisions, [Decision::Within, Decision::Undecided, Decision::Within]);
    assert!(report.batches[1].statement.contains("do not determine"), "{}", report.batches[1].statement);
    let without = run(&[lists[0].clone(), lists[1].clone(), lists[3].clone()]).unwrap();
    assert_eq!(report.batches[0].deltas, without.batches[0].deltas, "the culprit left a trace");
    // As a reference it gives no answer, and is named.
    match run(&[lists[2].clone(), lists[0].clone()]) {
        Err(DriftError::NoAnswer(message)) => assert!(message.found.contains("reference, flat,"), "{message}"),
        other => panic!("{other:?}"),
    }
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

#[test]
fn an_expansion_a_temperature_or_a_limit_that_makes_no_sense_is_refused() {
    let mut draws = Draws(17);
    let mut lists = [list("r", STILL, &mut draws), list("b", STILL, &mut draws)];
    lists.iter_mut().for_each(|l| l.temperature_c = Some(Measured::new(22.5, 0.3)));
    let refused = |lists: &[LineList], options: &Options| {
        matches!(check(&lists[0], &lists[1..], &phase(), copper(), options), Err(DriftError::Input(_)))
    };
    let expansion = |alpha: f64, u: f64, reference_c: f64| Options {
        expansion: Some(Expansion { per_k: [Measured::new(alpha, u); 3], reference_c }),
        ..options()
    };
    assert!(!refused(&lists, &expansion(1.1e-5, 1e-6, 22.5)));
    for (alpha, u, reference_c) in
        [(1.0, 0.0, 22.5), (f64::NAN, 0.0, 22.5), (1e-5, -1.0, 22.5), (1e-5, 0.0, f64::NAN), (1e-3, 0.0, 2000.0)]
    {
        assert!(refused(&lists, &expansion(alpha, u, reference_c)), "{alpha} {u} {reference_c}");
    }
    lists[1].temperature_c = Some(Measured::new(1e6, 0.3));
    assert!(refused(&lists, &expansion(1.1e-5, 0.0, 22.5)));
    assert!(refused(&lists, &Options { limit_ppm: 2e6, ..options() }));
    assert!(refused(&lists, &Options { limit_deg: Some(f64::INFINITY), ..options() }));
}

#[test]
fn a_structure_with_more_reflections_than_lines_can_be_told_apart_among_is_refused_at_once() {
    let mut draws = Draws(18);
    let lists = ["r", "b"].map(|id| list(id, STILL, &mut draws));
    let dense = Phase { reflections: vec![phase().reflections[0]; 20_001], ..phase() };
    let error = check(&lists[0], &lists[1..], &dense, copper(), &options()).unwrap_err();
    assert!(matches!(&error, DriftError::Input(d) if d.found.contains("20001 reflections")), "{error}");
}

#[test]
fn short_lists_with_understated_uncertainties_share_one_birge_ratio() {
    let mut draws = Draws(19);
    let mut lists = ["r", "b"].map(|id| list(id, Batch { noise: 20.0, ..STILL }, &mut draws));
    lists.iter_mut().for_each(|l| l.peaks.truncate(5));
    let report = run(&lists, &options());
    let batch = report.batches[0].list.as_ref().unwrap();
    // By hand: √(χ²/ν) of both lists, each with five lines, a cell and a displacement: ν = 2 (5 − 2).
    let by_hand = ((report.reference.chi2 + batch.chi2) / 6.0).sqrt();
    assert!(by_hand > 5.0, "{by_hand}");
    for noise in [report.reference.noise, batch.noise] {
        assert!((noise.factor / by_hand - 1.0).abs() < 1e-9 && noise.dof == Some(6.0), "{noise:?} {by_hand}");
    }
}
