//! Lists of another phase, lists at random and lists too short to be tested give no decision; genuine ones do.
//!
//! Positions from `lattice`, Bragg's law and SplitMix64 noise; nothing here comes from the assignment's own formulas.

#![allow(clippy::unwrap_used, reason = "what a fixture does not hold fails the test")]

mod made;

use drift::{Decision, DriftError, LineList, Options, Phase, Report, check};
use indexing::assign::Predicted;
use lattice::{AxisSystem, Cell, SpaceGroup, reflections};
use made::{Draws, U_DEG, copper};
use values::{Peak, TwoTheta};

/// A phase; intensities fall off in steps that depend on the indices alone, some tenfold weaker than others.
fn phase(symbol: &str, cell: Cell) -> Phase {
    let (group, _) = SpaceGroup::from_symbol(symbol).unwrap();
    let all = reflections(&cell, &group, copper().angstrom() / 2.0 * 1.02, f64::INFINITY).unwrap();
    let intensity =
        |hkl: [i32; 3]| [1.0, 0.05, 0.2, 0.6, 0.03][hkl.map(i32::unsigned_abs).iter().sum::<u32>() as usize % 5];
    Phase {
        system: AxisSystem::from_group(&group),
        cell,
        reflections: all.iter().map(|r| Predicted { hkl: r.hkl, intensity: Some(intensity(r.hkl)) }).collect(),
    }
}

fn oxide() -> Phase {
    phase("F m -3 m", Cell::cubic(5.411).unwrap())
}

fn monoclinic() -> Phase {
    phase("P 1 21/c 1", Cell::new(5.145, 5.207, 5.311, 90.0, 99.2, 90.0).unwrap())
}

fn at(x: f64) -> Peak {
    Peak::at(TwoTheta::from_deg(x)).with_u_deg(U_DEG)
}

/// Lines of a phase that stand alone by 0.15°, those of the strongest half; the cell changed by `ppm`.
fn lines_of(phase: &Phase, ppm: f64, to_deg: f64, draws: &mut Draws) -> Vec<Peak> {
    let c = phase.cell;
    let by = 1.0 + 1e-6 * ppm;
    let cell = Cell::new(c.a * by, c.b * by, c.c * by, c.alpha, c.beta, c.gamma).unwrap();
    let place = |hkl: [i32; 3]| {
        let sine = copper().angstrom() / (2.0 * cell.d(hkl));
        (sine < 1.0).then(|| (2.0 * sine.asin()).to_degrees())
    };
    let places: Vec<(f64, f64)> = phase
        .reflections
        .iter()
        .filter_map(|p| Some((place(p.hkl)?, p.intensity?)))
        .filter(|(x, _)| *x < to_deg)
        .collect();
    let mut found: Vec<f64> = places
        .iter()
        .filter(|(x, i)| *i > 0.1 && places.iter().all(|(y, _)| (x - y).abs() < 1e-6 || (x - y).abs() > 0.15))
        .map(|(x, _)| *x)
        .collect();
    found.sort_by(f64::total_cmp);
    found.dedup_by(|x, y| (*x - *y).abs() < 1e-6);
    found.into_iter().map(|x| at(x + U_DEG * draws.normal())).collect()
}

fn list(id: &str, mut peaks: Vec<Peak>) -> LineList {
    peaks.sort_by(|x, y| x.two_theta.deg().total_cmp(&y.two_theta.deg()));
    LineList { id: id.to_owned(), peaks, temperature_c: None }
}

fn random(count: usize, draws: &mut Draws) -> Vec<Peak> {
    (0..count).map(|_| at(25.0 + 115.0 * draws.uniform())).collect()
}

fn run(reference: &LineList, batches: &[LineList], phase: &Phase, limit_ppm: f64) -> Result<Report, DriftError> {
    check(reference, batches, phase, copper(), &Options { limit_ppm, ..Options::default() })
}

#[test]
fn lists_of_another_phase_and_lists_at_random_are_undecided_and_say_so() {
    let mut draws = Draws(1);
    let rock_salt = phase("F m -3 m", Cell::cubic(4.212).unwrap());
    let boride = phase("P m -3 m", Cell::cubic(4.157).unwrap());
    for (phase, to_deg) in [(oxide(), 145.0), (monoclinic(), 90.0)] {
        let reference = list("r", lines_of(&phase, 0.0, to_deg, &mut draws));
        let mut batches = vec![
            list("rock salt", lines_of(&rock_salt, 0.0, 145.0, &mut draws)),
            list("boride", lines_of(&boride, 0.0, 145.0, &mut draws)),
        ];
        batches.extend((0..60).map(|i| list(&format!("random {i}"), random(8 + i % 15, &mut draws))));
        let report = run(&reference, &batches, &phase, 3000.0).unwrap();
        for batch in &report.batches {
            assert!(batch.list.is_none() && batch.decision == Decision::Undecided, "{}: {}", batch.id, batch.statement);
        }
        assert!(
            report.batches.iter().any(|b| b.statement.contains("this list is mostly something else")),
            "{:?}",
            report.batches.iter().map(|b| &b.statement).collect::<Vec<_>>()
        );
    }
}

#[test]
fn a_list_of_which_half_is_foreign_is_decided() {
    let mut draws = Draws(2);
    for (phase, to_deg) in [(oxide(), 145.0), (monoclinic(), 90.0)] {
        let reference = list("r", lines_of(&phase, 0.0, to_deg, &mut draws));
        let mut batches = Vec::new();
        for i in 0..20 {
            let own = lines_of(&phase, 0.0, to_deg, &mut draws);
            let strangers = random(own.len(), &mut draws);
            batches.push(list(&format!("half {i}"), own.into_iter().chain(strangers).collect()));
        }
        let report = run(&reference, &batches, &phase, 2000.0).unwrap();
        for batch in &report.batches {
            assert_eq!(batch.decision, Decision::Within, "{}: {}", batch.id, batch.statement);
        }
    }
}

#[test]
fn a_cubic_list_of_which_two_thirds_are_foreign_is_decided_because_chance_explains_so_many_lines_never() {
    let mut draws = Draws(3);
    let phase = oxide();
    let reference = list("r", lines_of(&phase, 0.0, 145.0, &mut draws));
    let own = lines_of(&phase, 300.0, 145.0, &mut draws);
    let strangers = random(2 * own.len(), &mut draws);
    let report = run(&reference, &[list("b", own.into_iter().chain(strangers).collect())], &phase, 100.0).unwrap();
    assert_eq!(report.batches[0].decision, Decision::Drifted, "{}", report.batches[0].statement);
}

#[test]
fn a_list_with_one_line_more_than_its_unknowns_is_decided_and_a_shorter_one_is_not() {
    let mut draws = Draws(4);
    let phase = oxide();
    let reference = list("r", lines_of(&phase, 0.0, 145.0, &mut draws));
    let short = |n: usize, draws: &mut Draws| {
        let peaks = lines_of(&phase, 0.0, 145.0, draws);
        list(&n.to_string(), peaks[peaks.len() - n..].to_vec())
    };
    let batches = [short(3, &mut draws), short(2, &mut draws), short(1, &mut draws)];
    let report = run(&reference, &batches, &phase, 2000.0).unwrap();
    assert_eq!(report.batches[0].decision, Decision::Within, "{}", report.batches[0].statement);
    assert_eq!(
        report.batches[1].statement,
        "No cell: 2 of 2 lines fit the structure; cell and displacement leave nothing to test them by, at least 3 are needed."
    );
    assert!(report.batches[2].statement.contains("1 of 1 line fits the structure"), "{}", report.batches[2].statement);
}

#[test]
fn a_reference_of_another_phase_or_a_wrong_structure_gives_no_answer() {
    let mut draws = Draws(5);
    let rock_salt = phase("F m -3 m", Cell::cubic(4.212).unwrap());
    let halite = phase("F m -3 m", Cell::cubic(5.6402).unwrap());
    let own = list("own", lines_of(&oxide(), 0.0, 145.0, &mut draws));
    let other = list("other", lines_of(&rock_salt, 0.0, 145.0, &mut draws));
    for (reference, phase) in [(&other, oxide()), (&own, halite), (&other, monoclinic())] {
        match run(reference, std::slice::from_ref(&own), &phase, 60.0) {
            Err(DriftError::NoAnswer(message)) => {
                assert!(message.found.contains(&format!("the reference, {},", reference.id)), "{message}");
                assert!(
                    message.found.contains("something else") || message.found.contains("nothing to test"),
                    "{message}"
                );
            }
            other => panic!("{other:?}"),
        }
    }
}

#[test]
fn a_line_at_a_reflection_too_weak_to_be_expected_is_said_to_stand_there() {
    let mut draws = Draws(6);
    let mut phase = oxide();
    let reference = list("r", lines_of(&phase, 0.0, 145.0, &mut draws));
    let batch = list("b", lines_of(&phase, 0.0, 145.0, &mut draws));
    let weak = phase.reflections.iter_mut().find(|p| p.hkl == [2, 0, 0]).unwrap();
    weak.intensity = Some(1e-7);
    let report = run(&reference, &[batch], &phase, 0.0).unwrap();
    let reasons: Vec<&String> = report.batches[0].list.as_ref().unwrap().foreign.iter().map(|f| &f.reason).collect();
    // By hand: 2 asin(1.5405929 / 5.411) = 33.084°; the zero that the fit finds shifts it by some hundredths.
    assert_eq!(reasons.len(), 1, "{reasons:?}");
    assert!(reasons[0].starts_with("the nearest reflection, 2 0 0 at 33."), "{reasons:?}");
    assert!(reasons[0].ends_with("is too weak to be expected: below 0.0001 of the strongest"), "{reasons:?}");
}
