//! What a check says: no finding where there is none, and notes that are sentences.

#![allow(clippy::unwrap_used, reason = "what a fixture does not hold fails the test")]

mod made;

use drift::{Expansion, LineList, Options};
use made::{Batch, Draws, STILL, list, options, run, without_u};
use values::Measured;

#[test]
fn a_null_result_is_not_worded_as_a_finding() {
    let mut draws = Draws(16);
    let low = Batch { displacement_mm: 0.12, ..STILL };
    let lists = [list("r", STILL, &mut draws), list("b", low, &mut draws)];
    let statement = |limit_ppm: f64, lists: &[LineList]| {
        let batch = run(lists, &Options { limit_ppm, ..options() }).batches[0].clone();
        (batch.statement.clone(), batch.headline().unwrap().z)
    };
    let because = "Lines moved for that reason, not because the cell was found to differ.";
    let (text, z) = statement(0.0, &lists);
    assert!(z.abs() < 2.0 && text.starts_with("Undecided: no difference found, a ") && text.contains(" ± "), "{text}");
    assert!(text.contains("lower than the reference") && !text.contains(because), "{text}");
    let (text, _) = statement(100.0, &lists);
    assert!(text.starts_with("Within the limit, no difference found: a ") && text.contains(because), "{text}");
    let (text, _) = statement(0.1, &lists);
    assert!(text.starts_with("Undecided: no difference found") && text.contains("too large for the limit"), "{text}");
    // A difference that is one, with and without a limit.
    let moved = [lists[0].clone(), list("b", Batch { ppm: 150.0, ..low }, &mut draws)];
    let (text, _) = statement(0.0, &moved);
    assert!(text.starts_with("Drifted: a differs by") && !text.contains("limit"), "{text}");
    assert!(statement(60.0, &moved).0.starts_with("Beyond the limit: a differs by"));
    let (text, _) = statement(500.0, &moved);
    assert!(text.starts_with("Within the limit: a differs by") && !text.contains(because), "{text}");
    assert!(statement(150.0, &moved).0.ends_with("taken out of the difference."));
}

#[test]
fn lists_without_uncertainties_are_named_with_what_was_found_instead() {
    let mut draws = Draws(17);
    let mut lists = ["r", "b", "c"].map(|id| list(id, STILL, &mut draws));
    without_u(&mut lists[2..]);
    let report = run(&lists, &options());
    let note = report.notes.iter().find(|n| n.contains("no s.u.")).unwrap();
    // By hand: 14 lines, a cell and a displacement of its own, and a share of the zero.
    assert!(note.starts_with("1 of 3 lists, c, carries no s.u.: found from the residuals, 0.00"), "{note}");
    assert!(note.ends_with("with 12 degrees of freedom; Student's t is used."), "{note}");
    without_u(&mut lists);
    let report = run(&lists, &options());
    let note = report.notes.iter().find(|n| n.contains("no s.u.")).unwrap();
    // By hand: 42 lines, three cells and displacements, and a zero that lines good to 0.001° tell better than ± 0.05°.
    assert!(note.starts_with("The lists carry no s.u.: found") && note.contains("with 35 degrees"), "{note}");
}

#[test]
fn notes_begin_with_a_capital_letter_and_end_with_a_full_stop() {
    let mut draws = Draws(18);
    let mut lists = ["r", "b", "noisy"].map(|id| list(id, STILL, &mut draws));
    lists[2] = list("noisy", Batch { noise: 6.0, ..STILL }, &mut draws);
    lists[1].peaks[0].u_two_theta_deg = None;
    lists[0].temperature_c = Some(Measured::new(22.5, 0.3));
    let expansion = Some(Expansion { per_k: [Measured::new(1.1e-5, 0.0); 3], reference_c: 22.5 });
    let report = run(&lists, &Options { expansion, ..options() });
    let of_lists = report.batches.iter().flat_map(|b| b.notes.iter().chain(&b.list.as_ref().unwrap().notes));
    let notes: Vec<&String> = report.notes.iter().chain(&report.reference.notes).chain(of_lists).collect();
    assert!(notes.len() >= 5, "{notes:?}");
    for note in &notes {
        let first = note.chars().next().unwrap();
        assert!((first.is_uppercase() || first.is_ascii_digit()) && note.ends_with('.'), "{note}");
    }
    assert!(notes.iter().any(|n| n.starts_with("1 line states no s.u.; it takes")), "{notes:?}");
}

#[test]
fn an_exact_zero_is_reported_as_given() {
    let mut draws = Draws(19);
    let lists = ["r", "b"].map(|id| list(id, STILL, &mut draws));
    let report = run(&lists, &Options { zero_deg: Measured::exact(0.01), ..options() });
    assert_eq!(report.zero_deg, Measured::exact(0.01));
    assert!(report.notes[0].contains("a zero of 0.01° taken as exact"), "{}", report.notes[0]);
}
