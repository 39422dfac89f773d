//! The picture of an indexed list, read back as XML.

mod common;

use common::{assert_labels_apart, assert_picture, texts};
use figures::{
    CalculatedLine, CellParameter, FigureError, IndexedFigure, LineKind, Merit, ObservedLine, indexed_lines,
};
use proptest::prelude::*;
use roxmltree::Document;
use values::Measured;

const CU: f64 = 1.540_592_9;

fn observed(two_theta_deg: f64, intensity: Option<f64>, kind: LineKind) -> ObservedLine {
    ObservedLine { two_theta_deg, u_deg: Some(0.005), intensity, kind }
}

fn indexed(calculated_deg: f64, hkl: &str) -> LineKind {
    LineKind::Indexed { calculated_deg, hkl: hkl.to_owned() }
}

fn figure<'a>(observed: &'a [ObservedLine], calculated: &'a [CalculatedLine]) -> IndexedFigure<'a> {
    IndexedFigure {
        lattice: "cubic F".to_owned(),
        cell: vec![CellParameter { name: "a".to_owned(), value: Measured::new(5.4311, 0.0002), unit: "Å" }],
        m_n: Some(Merit { n: 20, value: 153.24 }),
        f_n: Some(Merit { n: 20, value: 61.27 }),
        note: String::new(),
        wavelength_angstrom: CU,
        observed,
        calculated,
    }
}

#[test]
fn the_title_carries_the_lattice_and_the_cell_with_its_uncertainty() {
    let lines = [observed(28.44, Some(100.0), indexed(28.442, "1 1 1"))];
    let svg = indexed_lines(&figure(&lines, &[])).expect("draws");
    assert_picture(&svg);
    let document = Document::parse(&svg).expect("well-formed XML");
    let all: Vec<String> = texts(&document).into_iter().map(|text| text.content).collect();
    assert!(all.contains(&"cubic F, a = 5.4311(2) Å".to_owned()), "{all:?}");
    assert!(all.iter().any(|text| text.starts_with("M(20) = 153; F(20) = 61.3; 1.5405929 Å")), "{all:?}");
}

#[test]
fn lines_without_indices_are_told_by_shape_dash_and_label() {
    let lines = [
        observed(28.44, Some(100.0), indexed(28.442, "1 1 1")),
        observed(35.0, Some(20.0), LineKind::Unindexed),
        observed(56.3, Some(40.0), LineKind::Ghost { of: "Kα2 of 3 1 1".to_owned() }),
    ];
    let svg = indexed_lines(&figure(&lines, &[])).expect("draws");
    assert_picture(&svg);
    assert_eq!(assert_labels_apart(&svg), 3);
    let document = Document::parse(&svg).expect("well-formed XML");
    let all: Vec<String> = texts(&document).into_iter().map(|text| text.content).collect();
    assert!(["?", "Kα2 of 3 1 1", "1 1 1"].iter().all(|label| all.iter().any(|text| text == label)), "{all:?}");
    let marks: Vec<_> = document.descendants().filter(|node| node.attribute("tabindex").is_some()).collect();
    let dashes: Vec<Option<&str>> =
        marks.iter().map(|mark| mark.descendants().find_map(|node| node.attribute("stroke-dasharray"))).collect();
    assert_eq!((dashes[0], dashes[1].is_some(), dashes[2].is_some()), (None, true, true));
    assert_ne!(dashes[1], dashes[2]);
}

#[test]
fn a_difference_is_drawn_with_its_sign_and_its_uncertainty() {
    // Observed 0.004° above the calculated place: the point lies above the zero line, its bar is 2 × 0.005° high.
    let lines = [observed(40.004, None, indexed(40.0, "2 0 0")), observed(60.0, None, indexed(60.0, "2 2 0"))];
    let svg = indexed_lines(&figure(&lines, &[])).expect("draws");
    assert_picture(&svg);
    let document = Document::parse(&svg).expect("well-formed XML");
    let [_, top, _, bottom] = *common::frames(&document).last().expect("the lower panel");
    // The panel reaches 1.12 (0.004° + 0.005°) to both sides of zero.
    let per_degree = 0.5 * (bottom - top) / (1.12 * 0.009);
    let mark = document.descendants().find(|node| node.attribute("tabindex").is_some()).expect("a mark");
    let paths: Vec<&str> = mark.descendants().filter_map(|node| node.attribute("d")).collect();
    let bar: Vec<f64> = paths[2].split(['M', 'L', ' ']).filter_map(|text| text.parse().ok()).collect();
    let (low, high) = (bar[1], bar[3]);
    let zero = 0.5 * (top + bottom);
    assert!((0.5 * (low + high) - (zero - 0.004 * per_degree)).abs() <= 2.0, "{low} {high} {zero}");
    assert!((low - high - 0.010 * per_degree).abs() <= 2.0, "{low} {high}");
    let name = mark.first_element_child().and_then(|title| title.text()).expect("a name");
    assert!(name.contains("observed − calculated +0.0040°"), "{name}");
}

#[test]
fn extreme_lists_give_a_sound_picture() {
    let long = "名前 name ".repeat(100);
    let equal: Vec<_> = (0..60).map(|_| observed(50.0, Some(1.0), indexed(50.0, "1 1 1"))).collect();
    let none: Vec<_> = (0..3).map(|i| observed(50.0 + f64::from(i), Some(0.0), LineKind::Unindexed)).collect();
    let ghost = [observed(0.5, None, LineKind::Ghost { of: long.clone() })];
    let far = [observed(179.0, None, indexed(2.0, &long))];
    let many: Vec<_> =
        (0..500).map(|i| observed(5.0 + 0.3 * f64::from(i), Some(f64::from(i)), LineKind::Unindexed)).collect();
    let calculated: Vec<CalculatedLine> = (0..20_000)
        .map(|i| f64::from(i) * 0.009)
        .map(|two_theta_deg| CalculatedLine {
            two_theta_deg,
            d_angstrom: 1.0,
            hkl: "1 1 1".to_owned(),
            observed: false,
        })
        .collect();
    for lines in [&equal[..], &none, &ghost, &far, &many] {
        let mut figure = figure(lines, &calculated);
        figure.note.clone_from(&long);
        let svg = indexed_lines(&figure).expect("draws");
        assert_picture(&svg);
        assert_labels_apart(&svg);
        assert_eq!(Ok(svg), indexed_lines(&figure));
    }
}

#[test]
fn input_that_cannot_be_drawn_is_refused_with_the_reason() {
    let refused = |lines: &[ObservedLine]| indexed_lines(&figure(lines, &[])).expect_err("is refused");
    assert!(matches!(refused(&[]), FigureError::Empty { what: "observed line" }));
    assert!(matches!(
        refused(&[observed(f64::NAN, None, LineKind::Unindexed)]),
        FigureError::NotDrawable { index: 0, .. }
    ));
    assert!(matches!(refused(&[observed(-3.0, None, LineKind::Unindexed)]), FigureError::Negative { .. }));
    assert!(matches!(refused(&[observed(200.0, None, LineKind::Unindexed)]), FigureError::Range { .. }));
    assert!(matches!(refused(&[observed(30.0, Some(-1.0), LineKind::Unindexed)]), FigureError::Negative { .. }));
    assert!(matches!(refused(&[observed(30.0, None, indexed(f64::NAN, "1 0 0"))]), FigureError::NotDrawable { .. }));
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(60))]
    #[test]
    fn labels_never_overlap_and_never_leave_the_frame(
        lines in proptest::collection::vec((0.0_f64..180.0, 0.0_f64..100.0, 0_u8..3, -0.1_f64..0.1), 1..60),
        intensities in proptest::bool::ANY,
    ) {
        let observed: Vec<ObservedLine> = lines
            .iter()
            .map(|&(x, y, kind, difference)| {
                let kind = match kind {
                    0 => indexed((x + difference).max(0.0), "10 -2 11"),
                    1 => LineKind::Unindexed,
                    _ => LineKind::Ghost { of: "W Lα1 of 3 1 1".to_owned() },
                };
                observed(x, intensities.then_some(y), kind)
            })
            .collect();
        let svg = indexed_lines(&figure(&observed, &[])).expect("draws");
        assert_picture(&svg);
        prop_assert!(assert_labels_apart(&svg) <= lines.len());
    }
}
