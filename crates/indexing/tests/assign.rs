//! Lines of a known phase find their reflections although cell and specimen are off.
//!
//! Positions here come from `lattice::Cell::d`, Bragg's law and the shifts written out; the assignment uses formulas of its own.

#![allow(clippy::unwrap_used, reason = "what a fixture does not hold fails the test")]

use indexing::assign::geometry::CellModel;
use indexing::assign::{AssignOptions, Assignment, Predicted, assign};
use lattice::{AxisSystem, Cell, SpaceGroup, reflections};
use values::{Peak, TwoTheta, Wavelength};

fn copper() -> Wavelength {
    Wavelength::from_angstrom(1.5405929).unwrap()
}

struct Phase {
    system: AxisSystem,
    cell: Cell,
    predicted: Vec<Predicted>,
}

fn phase(symbol: &str, cell: Cell) -> Phase {
    let (group, _) = SpaceGroup::from_symbol(symbol).unwrap();
    let system = AxisSystem::from_group(&group);
    let all = reflections(&cell, &group, copper().angstrom() / 2.0 * 1.02, f64::INFINITY).unwrap();
    let predicted = all.iter().map(|r| Predicted { hkl: r.hkl, intensity: None }).collect();
    Phase { system, cell, predicted }
}

fn oxide() -> Phase {
    phase("F m -3 m", Cell::cubic(5.42).unwrap())
}

fn wurtzite() -> Phase {
    phase("P 63 m c", Cell::new(3.25, 3.25, 5.207, 90.0, 90.0, 120.0).unwrap())
}

fn monoclinic() -> Phase {
    phase("P 1 21/c 1", Cell::new(5.15, 5.21, 5.32, 90.0, 99.2, 90.0).unwrap())
}

/// Observed place of a reflection, degrees.
fn place(cell: &Cell, hkl: [i32; 3], s_over_r: f64, zero_deg: f64) -> Option<f64> {
    let sine = copper().angstrom() / (2.0 * cell.d(hkl));
    let theta = (sine < 1.0).then(|| sine.asin())?;
    Some((2.0 * theta - 2.0 * s_over_r * theta.cos()).to_degrees() + zero_deg)
}

/// Reflections of a phase that stand alone by 0.15° in `cell`, with small errors of their place, every third left out.
fn observed(phase: &Phase, cell: &Cell, s_over_r: f64, zero_deg: f64, to_deg: f64) -> Vec<([i32; 3], Peak)> {
    let places: Vec<([i32; 3], f64)> = phase
        .predicted
        .iter()
        .filter_map(|p| Some((p.hkl, place(cell, p.hkl, s_over_r, zero_deg)?)))
        .filter(|(_, x)| *x < to_deg)
        .collect();
    let alone = places.iter().filter(|(hkl, x)| {
        places.iter().all(|(other, y)| other == hkl || (x - y).abs() > 0.15 || (x - y).abs() < 1e-9)
    });
    let mut out: Vec<([i32; 3], Peak)> = Vec::new();
    for (i, (hkl, x)) in alone.enumerate() {
        let error = 0.002 * ((7 * i + 3) % 11) as f64 / 5.0 - 0.002;
        if i % 3 != 2 && out.last().is_none_or(|(_, p)| (p.two_theta.deg() - x).abs() > 0.1) {
            out.push((*hkl, Peak::at(TwoTheta::from_deg(x + error)).with_u_deg(0.0015)));
        }
    }
    out
}

fn run(phase: &Phase, start: &Cell, peaks: &[Peak]) -> Assignment {
    let model = CellModel::new(&phase.system, start).unwrap();
    assign(peaks, &phase.predicted, &model, &start.parameters(), copper(), &AssignOptions::default()).unwrap()
}

fn peaks(lines: &[([i32; 3], Peak)]) -> Vec<Peak> {
    lines.iter().map(|(_, p)| *p).collect()
}

/// Every line has its own name, or is called ambiguous with that name among the readings.
fn assert_named(found: &Assignment, lines: &[([i32; 3], Peak)], cell: &Cell, what: &str) {
    assert_eq!(found.lines.len() + found.foreign.len() + found.ambiguous.len(), lines.len(), "{what}: a line is lost");
    for line in &found.lines {
        let wanted = lines[line.peak].0;
        let same = line.hkl.iter().any(|h| (cell.d(*h) / cell.d(wanted) - 1.0).abs() < 1e-9);
        assert!(same, "{what}: {:?} instead of {wanted:?}", line.hkl);
    }
    for line in &found.ambiguous {
        assert!(line.readings.contains(&lines[line.peak].0), "{what}: {:?}", line.readings);
    }
    assert!(found.foreign.is_empty(), "{what}: {:?}", found.foreign);
    assert!(found.lines.len() * 10 >= lines.len() * 8, "{what}: {} of {}", found.lines.len(), lines.len());
}

fn scaled(cell: &Cell, by: [f64; 3]) -> Cell {
    Cell::new(cell.a * by[0], cell.b * by[1], cell.c * by[2], cell.alpha, cell.beta, cell.gamma).unwrap()
}

#[test]
fn a_start_cell_one_per_cent_off_and_a_specimen_three_tenths_of_a_millimetre_off_do_no_harm() {
    for (name, phase, to_deg) in
        [("oxide", oxide(), 145.0), ("wurtzite", wurtzite(), 140.0), ("monoclinic", monoclinic(), 80.0)]
    {
        for uniform in [0.99, 0.996, 1.0, 1.004, 1.01] {
            for s_over_r in [-0.0015, 0.0, 0.0015] {
                let lines = observed(&phase, &phase.cell, s_over_r, 0.02, to_deg);
                let start = scaled(&phase.cell, [uniform; 3]);
                let found = run(&phase, &start, &peaks(&lines));
                assert_named(&found, &lines, &phase.cell, &format!("{name} {uniform} {s_over_r}"));
                for (x, y) in found.six.iter().zip(phase.cell.parameters()) {
                    assert!((x / y - 1.0).abs() < 1.5e-3, "{name}: cell {:?}", found.six);
                }
            }
        }
    }
}

#[test]
fn axes_that_moved_apart_by_two_thousand_ppm_keep_their_lines() {
    let phase = wurtzite();
    for by in [[1.002, 1.002, 0.998], [0.998, 0.998, 1.002], [1.0, 1.0, 1.002]] {
        for s_over_r in [-0.0015, 0.0015] {
            let cell = scaled(&phase.cell, by);
            let lines = observed(&phase, &cell, s_over_r, -0.03, 140.0);
            assert_named(&run(&phase, &phase.cell, &peaks(&lines)), &lines, &cell, &format!("{by:?} {s_over_r}"));
        }
    }
}

#[test]
fn foreign_lines_are_listed_with_their_nearest_reflection_and_pull_nothing() {
    let phase = oxide();
    let mut lines = observed(&phase, &phase.cell, 0.0005, 0.0, 145.0);
    let clean = run(&phase, &phase.cell, &peaks(&lines));
    for x in [28.0, 52.3, 100.7] {
        lines.push(([0; 3], Peak::at(TwoTheta::from_deg(x)).with_u_deg(0.0015)));
    }
    let found = run(&phase, &phase.cell, &peaks(&lines));
    let foreign: Vec<usize> = found.foreign.iter().map(|f| f.peak).collect();
    assert_eq!(foreign, vec![lines.len() - 3, lines.len() - 2, lines.len() - 1]);
    assert_eq!(found.foreign[0].nearest, [1, 1, 1]);
    assert!((found.six[0] - clean.six[0]).abs() < 1e-9, "a foreign line moved the cell");
}

#[test]
fn a_second_line_at_a_taken_place_is_foreign() {
    let phase = oxide();
    let mut lines = peaks(&observed(&phase, &phase.cell, 0.0, 0.0, 145.0));
    let twin = Peak::at(TwoTheta::from_deg(lines[1].two_theta.deg() + 0.006)).with_u_deg(0.0015);
    lines.push(twin);
    let found = run(&phase, &phase.cell, &lines);
    assert_eq!(found.foreign.len(), 1);
    assert!(found.foreign[0].taken);
}

#[test]
fn reflections_nearer_than_half_a_width_share_a_line_and_are_all_named() {
    // a and b differ by 300 ppm: 200 and 020 are 0.01° apart.
    let cell = Cell::new(4.0, 4.0012, 6.5, 90.0, 90.0, 90.0).unwrap();
    let phase = phase("P m m m", cell);
    let positions = [[0, 0, 1], [1, 0, 1], [0, 0, 2], [1, 1, 1], [2, 0, 0], [2, 0, 1], [2, 2, 0], [0, 0, 4]];
    let lines: Vec<Peak> = positions
        .iter()
        .map(|h| Peak::at(TwoTheta::from_deg(place(&cell, *h, 0.0, 0.0).unwrap() - 0.002)).with_u_deg(0.003))
        .collect();
    let found = run(&phase, &cell, &lines);
    let shared = found.lines.iter().find(|l| l.peak == 4).unwrap();
    assert!(shared.hkl.contains(&[2, 0, 0]) && shared.hkl.contains(&[0, 2, 0]), "{:?}", shared.hkl);
    // Half of the distance of the two in the cell that was found: the standard deviation of two equal members. (These lines
    // hardly determine a − b, so the distance itself is not that of the true cell.)
    let [a, b, c, ..] = found.six;
    let fitted = Cell::new(a, b, c, 90.0, 90.0, 90.0).unwrap();
    let apart = place(&fitted, [2, 0, 0], 0.0, 0.0).unwrap() - place(&fitted, [0, 2, 0], 0.0, 0.0).unwrap();
    assert!((a / b - cell.a / cell.b).abs() < 1e-3, "a − b ran away: {a} {b}");
    assert!((shared.u_group_deg - apart.abs() / 2.0).abs() < 1e-6, "{} {apart}", shared.u_group_deg);
}

#[test]
fn a_line_that_two_reflections_explain_is_called_ambiguous_and_left_out() {
    let phase = phase("P m m m", Cell::new(4.0, 4.012, 6.5, 90.0, 90.0, 90.0).unwrap());
    let mut lines: Vec<Peak> = [[0, 0, 1], [1, 0, 1], [0, 0, 2], [1, 1, 1], [2, 0, 1], [0, 2, 1], [2, 2, 0], [0, 0, 4]]
        .iter()
        .map(|h| Peak::at(TwoTheta::from_deg(place(&phase.cell, *h, 0.0, 0.0).unwrap())).with_u_deg(0.003))
        .collect();
    // 200 and 020 are 0.14° apart; between them and uncertain by 0.03°.
    let between =
        0.5 * (place(&phase.cell, [2, 0, 0], 0.0, 0.0).unwrap() + place(&phase.cell, [0, 2, 0], 0.0, 0.0).unwrap());
    lines.push(Peak::at(TwoTheta::from_deg(between + 0.01)).with_u_deg(0.03));
    let found = run(&phase, &phase.cell, &lines);
    assert_eq!(found.ambiguous.len(), 1, "{found:?}");
    assert_eq!(found.ambiguous[0].readings, vec![[2, 0, 0], [0, 2, 0]]);
    assert!(found.lines.iter().all(|l| l.peak != 8));
}

#[test]
fn a_list_without_uncertainties_is_assigned_from_its_own_scatter() {
    let phase = wurtzite();
    let mut lines = observed(&phase, &scaled(&phase.cell, [1.001, 1.001, 0.999]), 0.001, 0.0, 140.0);
    lines.iter_mut().for_each(|(_, p)| p.u_two_theta_deg = None);
    assert_named(&run(&phase, &phase.cell, &peaks(&lines)), &lines, &phase.cell, "no s.u.");
    lines.push(([0; 3], Peak::at(TwoTheta::from_deg(45.0))));
    assert_eq!(run(&phase, &phase.cell, &peaks(&lines)).foreign.len(), 1);
}

#[test]
fn a_line_at_a_reflection_too_weak_to_be_expected_is_said_to_stand_there() {
    let mut phase = oxide();
    let lines = observed(&phase, &phase.cell, 0.0002, 0.01, 145.0);
    let weak = lines[3].0;
    for p in &mut phase.predicted {
        p.intensity = Some(if p.hkl == weak { 1e-6 } else { 1.0 });
    }
    let found = run(&phase, &phase.cell, &peaks(&lines));
    assert_eq!(found.foreign.len(), 1);
    let foreign = &found.foreign[0];
    assert_eq!((foreign.peak, foreign.nearest, foreign.too_weak), (3, weak, true));
    assert!(foreign.difference_deg.abs() < 0.01, "{foreign:?}");
    assert!(!run(&oxide(), &phase.cell, &peaks(&lines)).lines.is_empty());
}

#[test]
fn two_names_of_one_place_in_every_cell_are_no_second_assignment() {
    // 511 and 333 coincide in every cubic cell. Half of the lines stand beside their places, so that the search runs.
    let phase = oxide();
    let mut lines = peaks(&observed(&phase, &phase.cell, 0.0002, 0.0, 145.0));
    assert!(phase.predicted.iter().any(|p| p.hkl == [5, 1, 1]) && phase.predicted.iter().any(|p| p.hkl == [3, 3, 3]));
    let beside: Vec<Peak> =
        lines.iter().map(|p| Peak::at(TwoTheta::from_deg(p.two_theta.deg() + 0.35)).with_u_deg(0.0015)).collect();
    lines.extend(beside);
    lines.sort_by(|x, y| x.two_theta.deg().total_cmp(&y.two_theta.deg()));
    for shift in [0.0, 0.001, 0.002, 0.003] {
        let start = scaled(&phase.cell, [1.0 + shift; 3]);
        let found = run(&phase, &start, &lines);
        assert!(found.notes.iter().all(|n| !n.contains("3 3 3") && !n.contains("5 1 1")), "{:?}", found.notes);
    }
}

#[test]
fn evidence_parts_a_list_of_the_phase_with_as_many_strangers_from_a_list_at_random() {
    let phase = oxide();
    let genuine = peaks(&observed(&phase, &phase.cell, 0.0, 0.0, 145.0));
    let strangers = [25.0, 31.3, 39.9, 44.1, 52.8, 64.2, 73.3, 84.9, 92.0, 101.1, 111.4, 121.8];
    let random: Vec<Peak> = strangers.map(|x| Peak::at(TwoTheta::from_deg(x)).with_u_deg(0.0015)).to_vec();
    let mut mixed: Vec<Peak> = genuine[..5].iter().chain(&random).copied().collect();
    mixed.sort_by(|x, y| x.two_theta.deg().total_cmp(&y.two_theta.deg()));
    let evidence = run(&phase, &phase.cell, &mixed).evidence;
    assert_eq!((evidence.lines, evidence.explained), (17, 5));
    assert!(evidence.chance < 1e-2, "{evidence:?}");
    let model = CellModel::new(&phase.system, &phase.cell).unwrap();
    let six = phase.cell.parameters();
    let found = assign(&random, &phase.predicted, &model, &six, copper(), &AssignOptions::default());
    assert!(found.is_none_or(|f| f.evidence.chance > 0.1), "random lines look like the phase");
}

#[test]
fn nothing_comes_of_no_lines_or_no_reflections() {
    let phase = oxide();
    let model = CellModel::new(&phase.system, &phase.cell).unwrap();
    let six = phase.cell.parameters();
    assert_eq!(assign(&[], &phase.predicted, &model, &six, copper(), &AssignOptions::default()), None);
    let line = [Peak::at(TwoTheta::from_deg(30.0))];
    assert_eq!(assign(&line, &[], &model, &six, copper(), &AssignOptions::default()), None);
}
