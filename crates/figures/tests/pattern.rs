//! The picture of a predicted pattern, read back as XML.

mod common;

use common::{assert_labels_apart, assert_picture};
use figures::{FigureError, MAX_PHASES, PatternFigure, PhaseCurve, ReflectionMark, predicted_pattern};
use proptest::prelude::*;
use roxmltree::Document;

const CU: f64 = 1.540_592_9;

fn mark(two_theta_deg: f64, intensity: f64, hkl: &str) -> ReflectionMark {
    let d_angstrom = CU / (2.0 * (two_theta_deg.to_radians() / 2.0).sin());
    ReflectionMark { two_theta_deg, d_angstrom, intensity, hkl: hkl.to_owned() }
}

fn axis(points: u32) -> Vec<f64> {
    (0..points).map(|i| 5.0 + 115.0 * f64::from(i) / f64::from(points.max(2) - 1)).collect()
}

/// Lines of 0.1° on a background, and noise that makes thinning work.
fn counts(x: &[f64], reflections: &[ReflectionMark]) -> Vec<f64> {
    let mut counts: Vec<f64> = (0..x.len()).map(|i| 50.0 + 10.0 * (i as f64 * 12.9898).sin()).collect();
    for r in reflections {
        let start = x.partition_point(|x| *x < r.two_theta_deg - 1.0);
        let end = x.partition_point(|x| *x < r.two_theta_deg + 1.0);
        for i in start..end {
            counts[i] += r.intensity / (1.0 + ((x[i] - r.two_theta_deg) / 0.05).powi(2));
        }
    }
    counts
}

fn phase<'a>(name: &str, counts: &'a [f64], reflections: &'a [ReflectionMark]) -> PhaseCurve<'a> {
    PhaseCurve { name: name.to_owned(), counts, reflections }
}

fn many(n: u32) -> Vec<ReflectionMark> {
    (0..n)
        .map(|i| {
            let fraction = (f64::from(i) * 0.618_034).fract();
            mark(
                5.5 + 114.0 * fraction,
                1e4 * (1.0 - fraction) + f64::from(i % 17),
                &format!("{} -{} {}", i % 23, i % 7, i % 11),
            )
        })
        .collect()
}

fn caption(svg: &str) -> String {
    let document = Document::parse(svg).expect("well-formed XML");
    common::texts(&document).into_iter().map(|text| text.content).collect::<Vec<_>>().join("\n")
}

#[test]
fn a_pattern_of_5000_reflections_and_20000_points_stays_small_and_legible() {
    let reflections = many(5000);
    let x = axis(20_000);
    let y = counts(&x, &reflections);
    let phases = [phase("one", &[], &reflections)];
    let svg = predicted_pattern(&PatternFigure::new("t", CU, &x, &y, &phases)).expect("draws");
    assert_picture(&svg);
    let labels = assert_labels_apart(&svg);
    assert!((20..=40).contains(&labels), "{labels}");
    assert!(caption(&svg).contains("5000 reflections"), "{}", caption(&svg));
    assert!(svg.len() < 300_000, "{} bytes", svg.len());
}

#[test]
fn the_largest_picture_stays_below_one_megabyte() {
    let reflections = many(2000);
    let x = axis(20_000);
    let y = counts(&x, &reflections);
    let name =
        |i: usize| format!("phase {i} with a long name that says where it comes from and how much there is of it");
    let phases: Vec<_> = (0..MAX_PHASES).map(|i| phase(&name(i), &y, &reflections)).collect();
    let svg = predicted_pattern(&PatternFigure::new("t", CU, &x, &y, &phases)).expect("draws");
    assert_picture(&svg);
    assert_labels_apart(&svg);
}

#[test]
fn labels_that_find_no_place_are_counted_in_the_caption() {
    // Twelve lines within a degree: no more than a few labels of 13 px find room on 8 px.
    let reflections: Vec<_> = (0..12).map(|i| mark(30.0 + 0.08 * f64::from(i), 1e3 + f64::from(i), "1 1 1")).collect();
    let x = axis(2000);
    let y = counts(&x, &reflections);
    let phases = [phase("one", &[], &reflections)];
    let svg = predicted_pattern(&PatternFigure::new("t", CU, &x, &y, &phases)).expect("draws");
    assert_picture(&svg);
    let drawn = assert_labels_apart(&svg);
    assert!(drawn < 12 && drawn > 0);
    assert!(
        caption(&svg)
            .contains(&format!("12 reflections: the strongest that find room carry their hkl; {} labels", 12 - drawn))
    );
}

#[test]
fn every_drawn_mark_says_phase_indices_angle_spacing_and_intensity() {
    let reflections = [mark(28.441, 100.0, "1 1 1"), mark(47.301, 55.0, "2 -2 0")];
    let phases = [phase("Si & <more>", &[], &reflections)];
    let svg = predicted_pattern(&PatternFigure::new("t", CU, &[], &[], &phases)).expect("draws");
    assert_picture(&svg);
    let document = Document::parse(&svg).expect("well-formed XML");
    let titles: Vec<&str> = document
        .descendants()
        .filter(|node| node.attribute("tabindex") == Some("0"))
        .filter_map(|node| node.first_element_child()?.text())
        .collect();
    // Outside: 1.5405929 / (2 math.sin(math.radians(28.441 / 2))) by Python, and the same for 47.301°.
    assert_eq!(
        titles,
        [
            "Si & <more>: hkl 1 1 1, 2θ 28.4410°, d 3.13569 Å, intensity 100",
            "Si & <more>: hkl 2 -2 0, 2θ 47.3010°, d 1.92019 Å, intensity 55",
        ]
    );
    assert!(svg.contains("<tspan text-decoration=\"overline\">2</tspan>"), "a bar over the negative index");
}

#[test]
fn phases_differ_by_dash_and_marker_not_by_colour_alone() {
    let reflections: Vec<Vec<ReflectionMark>> =
        (0..4).map(|i| vec![mark(20.0 + 10.0 * f64::from(i), 1e4, "1 0 0")]).collect();
    let x = axis(3000);
    let own: Vec<Vec<f64>> = reflections.iter().map(|r| counts(&x, r)).collect();
    let sum: Vec<f64> = (0..x.len()).map(|i| own.iter().map(|c| c[i]).sum()).collect();
    let phases: Vec<_> = (0..4).map(|i| phase(&format!("phase {i}"), &own[i], &reflections[i])).collect();
    let svg = predicted_pattern(&PatternFigure::new("t", CU, &x, &sum, &phases)).expect("draws");
    assert_picture(&svg);
    let document = Document::parse(&svg).expect("well-formed XML");
    let curves: Vec<_> = document
        .descendants()
        .filter(|node| node.has_tag_name("g") && node.children().any(|child| child.has_tag_name("polyline")))
        .filter_map(|node| node.attribute("stroke-dasharray"))
        .collect();
    let different: std::collections::BTreeSet<_> = curves.iter().collect();
    assert_eq!((curves.len(), different.len()), (4, 4), "{curves:?}");
}

#[test]
fn the_curve_reaches_every_maximum_of_the_data_after_thinning() {
    // One point of 20 000 carries the only maximum; it must be drawn, at the height of the strongest line.
    let x = axis(20_000);
    let mut y = vec![1.0; x.len()];
    y[12_345] = 1000.0;
    let phases = [phase("spike", &[], &[])];
    let svg = predicted_pattern(&PatternFigure::new("t", CU, &x, &y, &phases)).expect("draws");
    assert_picture(&svg);
    let document = Document::parse(&svg).expect("well-formed XML");
    let [left, top, right, bottom] = common::frames(&document)[0];
    let curve = document.descendants().filter_map(|node| node.attribute("points")).max_by_key(|points| points.len());
    let points = curve.expect("a curve").split_whitespace().filter_map(|pair| pair.split_once(','));
    let highest = points
        .map(|(px, py)| (py.parse::<f64>().expect("y"), px.parse::<f64>().expect("x")))
        .min_by(|a, b| a.0.total_cmp(&b.0))
        .expect("points");
    // 56 px of the 330 px stay free above the highest point.
    assert!(
        (highest.0 - (bottom - (bottom - top) * (330.0 - 56.0) / 330.0)).abs() <= 2.0,
        "{highest:?} {top} {bottom}"
    );
    let place = left + (right - left) * 12_345.0 / 19_999.0;
    assert!((highest.1 - place).abs() <= 2.0, "{highest:?} {place}");
}

#[test]
fn the_same_input_gives_the_same_bytes() {
    let reflections = many(800);
    let x = axis(5000);
    let y = counts(&x, &reflections);
    let phases = [phase("a", &[], &reflections[..400]), phase("b", &[], &reflections[400..])];
    let figure = PatternFigure { square_root: true, ..PatternFigure::new("t", CU, &x, &y, &phases) };
    assert_eq!(predicted_pattern(&figure), predicted_pattern(&figure));
}

#[test]
fn extreme_inputs_give_a_sound_picture() {
    let long = "Ein sehr langer Name 一个很长的名字 имя ".repeat(60);
    let one = [mark(40.0, 5.0, &"1 1 1 ".repeat(80))];
    let equal: Vec<_> = (0..50).map(|_| mark(40.0, 5.0, "1 1 1")).collect();
    let zero = [mark(40.0, 0.0, "1 1 1"), mark(170.0, 0.0, "")];
    let x = axis(100);
    let cases: [(&[f64], Vec<f64>, &[ReflectionMark]); 6] = [
        (&[], vec![], &one),
        (&[], vec![], &equal),
        (&[], vec![], &zero),
        (&x, vec![0.0; 100], &[]),
        (&x, vec![7.0; 100], &equal),
        (&x, vec![1e14; 100], &one),
    ];
    for (points, y, reflections) in cases {
        for square_root in [false, true] {
            let phases = [phase(&long, &[], reflections), phase("\u{0}<&>\"", &[], &[])];
            let mut figure = PatternFigure::new(&long, CU, points, &y, &phases);
            figure.subtitle.clone_from(&long);
            figure.square_root = square_root;
            let svg = predicted_pattern(&figure).expect("draws");
            assert_picture(&svg);
            assert_labels_apart(&svg);
        }
    }
}

#[test]
fn input_that_cannot_be_drawn_is_refused_with_the_reason() {
    let x = axis(3);
    let draw = |x: &[f64], y: &[f64], reflections: &[ReflectionMark]| {
        predicted_pattern(&PatternFigure::new("t", CU, x, y, &[phase("p", &[], reflections)])).expect_err("is refused")
    };
    let nan = draw(&x, &[1.0, f64::NAN, 1.0], &[]);
    assert!(matches!(nan, FigureError::NotDrawable { what: "counts", index: 1, .. }), "{nan}");
    assert!(nan.to_string().contains("number 2 is NaN"), "{nan}");
    assert!(matches!(draw(&x, &[1.0, -1.0, 1.0], &[]), FigureError::Negative { index: 1, .. }));
    assert!(matches!(draw(&x, &[1.0], &[]), FigureError::Lengths { expected: 3, found: 1, .. }));
    assert!(matches!(draw(&[3.0, 2.0], &[1.0, 1.0], &[]), FigureError::NotRising { index: 1, .. }));
    assert!(matches!(draw(&[], &[], &[]), FigureError::Empty { .. }));
    assert!(matches!(draw(&[170.0, 190.0], &[1.0, 1.0], &[]), FigureError::Range { .. }));
    assert!(matches!(draw(&[], &[], &[mark(30.0, f64::INFINITY, "1")]), FigureError::NotDrawable { .. }));
    let none = PatternFigure::new("t", CU, &x, &[1.0; 3], &[]);
    assert!(matches!(predicted_pattern(&none), Err(FigureError::Empty { what: "phase" })));
    let phases = [phase("p", &[], &[])];
    let no_wavelength = PatternFigure::new("t", 0.0, &x, &[1.0; 3], &phases);
    assert!(matches!(predicted_pattern(&no_wavelength), Err(FigureError::Range { .. })));
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(60))]
    #[test]
    fn labels_never_overlap_and_never_leave_the_frame(
        lines in proptest::collection::vec((5.0_f64..119.0, 0.0_f64..1e5, -12_i32..12, 0_i32..3), 0..300),
        from in 0.0_f64..60.0,
        span in 0.5_f64..110.0,
        square_root in proptest::bool::ANY,
        max_labels in 1_usize..400,
    ) {
        let of = |phase: i32| -> Vec<ReflectionMark> {
            let own = lines.iter().filter(|line| line.3 == phase);
            own.map(|&(x, y, h, _)| mark(x, y, &format!("{h} {} {}", 7 - h, h / 2))).collect()
        };
        let reflections = [of(0), of(1), of(2)];
        let x = axis(3000);
        let y = counts(&x, &reflections.concat());
        let phases: Vec<_> = reflections.iter().map(|r| phase("phase", &[], r)).collect();
        let mut figure = PatternFigure::new("t", CU, &x, &y, &phases);
        figure.range_deg = Some((from, from + span));
        figure.square_root = square_root;
        figure.max_labels = max_labels;
        let svg = predicted_pattern(&figure).expect("draws");
        assert_picture(&svg);
        prop_assert!(assert_labels_apart(&svg) <= max_labels);
    }
}
