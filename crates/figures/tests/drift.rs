//! The drift chart, read back as XML.

mod common;

use common::{assert_picture, texts};
use figures::{DriftDecision, DriftFigure, DriftPoint, DriftUnit, FigureError, MAX_BATCHES, drift_chart};
use proptest::prelude::*;
use roxmltree::Document;

fn point(batch: &str, delta: f64, u: f64, decision: DriftDecision) -> DriftPoint {
    DriftPoint { batch: batch.to_owned(), delta, u, coverage_factor: 2.0, decision }
}

fn figure(points: &[DriftPoint]) -> DriftFigure<'_> {
    DriftFigure {
        title: "Ceria".to_owned(),
        parameter: "a".to_owned(),
        unit: DriftUnit::Ppm,
        reference: "R-1".to_owned(),
        limit: Some(50.0),
        risk: Some(0.05),
        points,
    }
}

fn words(svg: &str) -> String {
    let document = Document::parse(svg).expect("well-formed XML");
    texts(&document).into_iter().map(|text| text.content).collect::<Vec<_>>().join("\n")
}

/// Numbers of a path.
fn numbers(path: &str) -> Vec<f64> {
    path.split(|c: char| !(c.is_ascii_digit() || "-.".contains(c))).filter_map(|text| text.parse().ok()).collect()
}

#[test]
fn the_decision_shows_by_shape_and_in_words() {
    let points = [
        point("B1", 3.0, 5.0, DriftDecision::Within),
        point("B2", 120.0, 5.0, DriftDecision::Drifted),
        point("B3", 45.0, 5.0, DriftDecision::Undecided),
    ];
    let svg = drift_chart(&figure(&points)).expect("draws");
    assert_picture(&svg);
    let text = words(&svg);
    for part in [
        "within the limit (filled circle)",
        "drifted (filled diamond)",
        "undecided (open square)",
        "A qualified person decides on release.",
        "Change of a against R-1; limit ±50 ppm; risk 0.05 for each batch",
        "+50 ppm",
        "−50 ppm",
        "k = 2.00",
    ] {
        assert!(text.contains(part), "{part} is missing in {text}");
    }
    let document = Document::parse(&svg).expect("well-formed XML");
    let shapes: Vec<(usize, bool)> = document
        .descendants()
        .filter(|node| node.attribute("tabindex").is_some())
        .filter_map(|mark| mark.last_element_child())
        .map(|shape| {
            let path = shape.attribute("d").expect("a path");
            (path.matches('a').count() * 10 + path.matches('L').count(), shape.attribute("fill") == Some("#ffffff"))
        })
        .collect();
    // Two arcs; three straight lines and filled; three straight lines and open.
    assert_eq!(shapes, [(20, false), (3, false), (3, true)]);
}

#[test]
fn bars_are_u_and_k_u_long_on_the_scale_of_the_axis() {
    let points = [point("B1", 10.0, 20.0, DriftDecision::Undecided)];
    let svg = drift_chart(&figure(&points)).expect("draws");
    assert_picture(&svg);
    let document = Document::parse(&svg).expect("well-formed XML");
    let [_, top, _, bottom] = common::frames(&document)[0];
    // From −50 to 50 ppm (the limits; the bars end at −30 and 50), 8 % of that free above and below.
    let per_ppm = (bottom - top) / 116.0;
    let mark = document.descendants().find(|node| node.attribute("tabindex").is_some()).expect("a mark");
    let paths: Vec<Vec<f64>> = mark.descendants().filter_map(|node| node.attribute("d")).map(numbers).collect();
    let length = |path: &[f64]| path[1] - path[3];
    assert!((length(&paths[0]) - 80.0 * per_ppm).abs() <= 2.0, "{paths:?}");
    assert!((length(&paths[3]) - 40.0 * per_ppm).abs() <= 2.0, "{paths:?}");
    let zero = bottom - 58.0 * per_ppm;
    assert!((0.5 * (paths[0][1] + paths[0][3]) - (zero - 10.0 * per_ppm)).abs() <= 2.0, "{paths:?}");
    let name = mark.first_element_child().and_then(|title| title.text());
    assert_eq!(name, Some("B1: 10(20) ppm, expanded ± 40.0000 ppm, undecided"));
}

#[test]
fn two_hundred_batches_name_every_nth_without_overlap() {
    let points: Vec<_> = (0..200).map(|i| point(&format!("2026-{i:04}"), 0.0, 5.0, DriftDecision::Within)).collect();
    let svg = drift_chart(&figure(&points)).expect("draws");
    assert_picture(&svg);
    let document = Document::parse(&svg).expect("well-formed XML");
    let names: Vec<_> = texts(&document).into_iter().filter(|text| text.content.starts_with("2026-")).collect();
    assert_eq!(names.len(), 50);
    assert!(words(&svg).contains("One in 4 is named on the axis."));
    for (index, name) in names.iter().enumerate() {
        assert!(names[..index].iter().all(|other| !name.overlaps(other)), "{name:?}");
    }
    let marks = document.descendants().filter(|node| node.attribute("tabindex").is_some()).count();
    assert_eq!(marks, 200);
}

#[test]
fn no_limit_is_said_and_no_limit_line_is_drawn() {
    let points = [point("B1", 10.0, 20.0, DriftDecision::Undecided)];
    let svg = drift_chart(&DriftFigure { limit: None, ..figure(&points) }).expect("draws");
    assert_picture(&svg);
    assert!(words(&svg).contains("no limit: tested against no change"));
    assert!(!words(&svg).contains("within the limit ("));
    assert!(!svg.contains("stroke-dasharray"));
}

#[test]
fn an_angle_is_given_in_degrees() {
    let points = [point("B1", 0.01, 0.002, DriftDecision::Drifted)];
    let drawn =
        DriftFigure { unit: DriftUnit::Degrees, parameter: "β".to_owned(), limit: Some(0.005), ..figure(&points) };
    let svg = drift_chart(&drawn).expect("draws");
    assert_picture(&svg);
    assert!(words(&svg).contains("Δβ / °") && words(&svg).contains("+0.005 °"), "{}", words(&svg));
}

#[test]
fn extreme_charts_are_sound() {
    let long = "批 batch <b>&amp; ".repeat(50);
    let cases: [Vec<DriftPoint>; 5] = [
        vec![point(&long, 0.0, 0.0, DriftDecision::Within)],
        (0..30).map(|_| point(&long, -1e6, 1e5, DriftDecision::Drifted)).collect(),
        (0..3).map(|i| point(&long, 1e14 * f64::from(i), 1.0, DriftDecision::Undecided)).collect(),
        (0..2).map(|_| point("", 1e-9, 1e-12, DriftDecision::Undecided)).collect(),
        (0..400).map(|i| point(&i.to_string(), f64::from(i), 1.0, DriftDecision::Within)).collect(),
    ];
    assert_eq!(cases[4].len(), MAX_BATCHES);
    for points in &cases {
        for limit in [None, Some(0.0), Some(50.0)] {
            let mut figure = DriftFigure { limit, ..figure(points) };
            figure.title.clone_from(&long);
            figure.parameter.clone_from(&long);
            figure.reference.clone_from(&long);
            let svg = drift_chart(&figure).expect("draws");
            assert_picture(&svg);
            assert_eq!(Ok(svg), drift_chart(&figure));
        }
    }
}

#[test]
fn input_that_cannot_be_drawn_is_refused_with_the_reason() {
    let refused = |points: &[DriftPoint]| drift_chart(&figure(points)).expect_err("is refused");
    assert!(matches!(refused(&[]), FigureError::Empty { what: "batch" }));
    let nan = [point("B1", 1.0, 1.0, DriftDecision::Within), point("B2", f64::NAN, 1.0, DriftDecision::Within)];
    assert!(matches!(refused(&nan), FigureError::NotDrawable { index: 1, .. }));
    assert!(matches!(refused(&[point("B1", 1.0, -1.0, DriftDecision::Within)]), FigureError::Negative { .. }));
    let many: Vec<_> = (0..401).map(|_| point("B", 0.0, 1.0, DriftDecision::Within)).collect();
    assert!(matches!(refused(&many), FigureError::TooMany { limit: 400, found: 401, .. }));
    let points = [point("B1", 1.0, 1.0, DriftDecision::Within)];
    let negative = DriftFigure { limit: Some(-1.0), ..figure(&points) };
    assert!(matches!(drift_chart(&negative), Err(FigureError::Negative { what: "limit", .. })));
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(80))]
    #[test]
    fn names_of_batches_never_overlap(names in proptest::collection::vec("[A-Za-z0-9-]{0,30}", 1..120)) {
        let points: Vec<_> = names.iter().map(|name| point(name, 1.0, 2.0, DriftDecision::Within)).collect();
        let svg = drift_chart(&figure(&points)).expect("draws");
        assert_picture(&svg);
        let document = Document::parse(&svg).expect("well-formed XML");
        let [_, _, _, bottom] = common::frames(&document)[0];
        let batches: Vec<_> = texts(&document)
            .into_iter()
            .filter(|text| text.top >= bottom && (text.upright || (text.size - 120.0).abs() < 0.5))
            .collect();
        for (index, name) in batches.iter().enumerate() {
            for other in &batches[..index] {
                prop_assert!(!name.overlaps(other), "{:?} {:?}", name, other);
            }
        }
    }
}
