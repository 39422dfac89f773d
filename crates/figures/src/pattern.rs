//! The picture of a predicted pattern: counts against 2θ, tick marks and hkl labels, d on a second axis.
//!
//! Read [`predicted_pattern`] (the method) → `curves` (thinning) → `strip` (tick marks) → `names` (labels).

mod curves;
mod names;
mod strip;

use crate::error::{FigureError, all_drawable, none_negative, rising, same_length};
use crate::layout::{
    Entry, MARGIN, PANEL_LEFT, WIDTH, caption_lines, captions, captions_height, count, heading, heading_height, legend,
    legend_height, widened,
};
use crate::palette::{DASHES, Ink, SERIES, SHAPES, Shape, TEXT};
use crate::panel::{Edge, Panel};
use crate::svg::{Pen, Scene};
use crate::ticks::{self, Ticks};

/// One reflection of a phase.
#[derive(Clone, Debug, PartialEq)]
pub struct ReflectionMark {
    /// Position, degrees 2θ.
    pub two_theta_deg: f64,
    /// Spacing d in Å.
    pub d_angstrom: f64,
    /// Strength on any scale that all phases share, zero or above; it ranks the labels.
    pub intensity: f64,
    /// Indices, such as `1 -1 0`; a minus is drawn as a bar.
    pub hkl: String,
}

/// One phase of the picture.
#[derive(Clone, Debug, PartialEq)]
pub struct PhaseCurve<'a> {
    /// Name in the legend, such as `CeO2, 62 %`.
    pub name: String,
    /// Its own counts, one for each point; empty when only the sum is drawn.
    pub counts: &'a [f64],
    /// Its reflections, in any order.
    pub reflections: &'a [ReflectionMark],
}

/// What the picture of a predicted pattern shows.
#[derive(Clone, Debug, PartialEq)]
pub struct PatternFigure<'a> {
    /// Title.
    pub title: String,
    /// A line below the title: radiation, range, what was assumed; may be empty.
    pub subtitle: String,
    /// Wavelength of the d axis, Å.
    pub wavelength_angstrom: f64,
    /// Points, degrees 2θ, rising. Empty: sticks are drawn in place of a curve.
    pub two_theta_deg: &'a [f64],
    /// Counts of all phases together, one for each point, zero or above.
    pub counts: &'a [f64],
    /// 1 to 24 phases.
    pub phases: &'a [PhaseCurve<'a>],
    /// Range of the picture, degrees 2θ within 0..=180; `None`: from the first to the last point or reflection.
    pub range_deg: Option<(f64, f64)>,
    /// Title of the vertical axis, with its unit.
    pub intensity_label: String,
    /// Draws the square root of the counts, which shows weak lines; numbers beside the axis stay counts.
    pub square_root: bool,
    /// Most hkl labels. Default 40: more clutter a picture of this width (own choice, no source).
    pub max_labels: usize,
}

impl<'a> PatternFigure<'a> {
    /// A picture of a curve with the default choices.
    pub fn new(
        title: &str,
        wavelength_angstrom: f64,
        two_theta_deg: &'a [f64],
        counts: &'a [f64],
        phases: &'a [PhaseCurve<'a>],
    ) -> Self {
        Self {
            title: title.to_owned(),
            subtitle: String::new(),
            wavelength_angstrom,
            two_theta_deg,
            counts,
            phases,
            range_deg: None,
            intensity_label: "Intensity / counts".to_owned(),
            square_root: false,
            max_labels: 40,
        }
    }
}

/// Most phases in one picture: more rows of tick marks would be taller than the curve (own choice).
pub const MAX_PHASES: usize = 24;
/// Most points of a curve; a scan of 180° in steps of 0.001° (own choice; time and memory stay small).
pub const MAX_POINTS: usize = 200_000;
/// Height of the curve, px.
const CURVE: f64 = 330.0;
/// Height of a row of tick marks, px.
const ROW: f64 = 17.0;
/// Least and largest room that is kept free above the highest point for labels, px.
const HEADROOM: (f64, f64) = (56.0, 110.0);

/// How a phase is told from the others.
#[derive(Clone, Copy, Debug)]
struct Look {
    ink: Ink,
    dash: &'static [f64],
    shape: Shape,
}

/// The look of a phase; one that is alone is drawn in a full line, else the full line is that of the sum.
fn look(phase: usize, of: usize) -> Look {
    Look {
        ink: SERIES[phase % SERIES.len()],
        dash: if of == 1 { DASHES[0] } else { DASHES[1 + phase % (DASHES.len() - 1)] },
        shape: SHAPES[phase % SHAPES.len()],
    }
}

/// Draws the picture as SVG text.
///
/// Phases differ by dash, marker and name as well as by colour. Labels of reflections are placed from the strongest on,
/// above the curve; none overlaps another or leaves the frame, and the caption says how many find no place.
///
/// # Errors
/// [`FigureError`] when a number is not finite or below zero, lists differ in length, points do not rise, there is nothing
/// to draw, there are more than [`MAX_PHASES`] phases or [`MAX_POINTS`] points, or the range is empty.
pub fn predicted_pattern(figure: &PatternFigure<'_>) -> Result<String, FigureError> {
    check(figure)?;
    let range = range(figure)?;
    let (entries, captions_before) = (entries(figure), heading_height(&figure.subtitle));
    let top = captions_before + legend_height(&entries) + 44.0;
    #[expect(clippy::cast_precision_loss, reason = "at most 24 phases")]
    let strip_height = figure.phases.len() as f64 * ROW + 8.0;
    let bottom = top + CURVE;
    let seen = strip::in_range(figure, range);
    let headroom = names::tallest(figure, &seen).clamp(HEADROOM.0, HEADROOM.1);
    let highest = highest(figure, range);
    let full_scale = highest * CURVE / (CURVE - headroom);
    let panel = Panel { left: PANEL_LEFT, top, right: WIDTH - MARGIN - 8.0, bottom, x: range, y: (0.0, full_scale) };
    let strip = Panel { top: bottom, bottom: bottom + strip_height, ..panel };
    let labels = names::arrange(figure, &panel, &seen);
    let lines = caption_lines(&caption(figure, &seen, &labels));
    let height = strip.bottom + 52.0 + captions_height(&lines);
    let mut scene = Scene::new(WIDTH, height);
    heading(&mut scene, &figure.title, &figure.subtitle);
    legend(&mut scene, &entries, captions_before);
    axes(&mut scene, figure, (&panel, &strip), highest)?;
    curves::draw(&mut scene, figure, &panel, &seen)?;
    strip::draw(&mut scene, figure, &strip, &seen);
    names::draw(&mut scene, &labels);
    captions(&mut scene, &lines, strip.bottom + 48.0);
    Ok(scene.finish(&figure.title, &description(figure, range, &seen)))
}

fn check(figure: &PatternFigure<'_>) -> Result<(), FigureError> {
    let too_many = |what, limit, found| Err(FigureError::TooMany { what, limit, found });
    match figure.phases.len() {
        0 => return Err(FigureError::Empty { what: "phase" }),
        n if n > MAX_PHASES => return too_many("phases", MAX_PHASES, n),
        _ => {}
    }
    let points = figure.two_theta_deg.len();
    if points > MAX_POINTS {
        return too_many("points", MAX_POINTS, points);
    }
    all_drawable("2θ of the pattern", figure.two_theta_deg.iter().copied())?;
    rising("2θ of the pattern", figure.two_theta_deg)?;
    same_length("the list of counts", points, figure.counts.len())?;
    none_negative("counts", figure.counts.iter().copied())?;
    for phase in figure.phases {
        if !phase.counts.is_empty() {
            same_length("the list of counts of a phase", points, phase.counts.len())?;
            none_negative("counts of a phase", phase.counts.iter().copied())?;
        }
        none_negative("2θ of a reflection", phase.reflections.iter().map(|r| r.two_theta_deg))?;
        none_negative("d of a reflection", phase.reflections.iter().map(|r| r.d_angstrom))?;
        none_negative("intensity of a reflection", phase.reflections.iter().map(|r| r.intensity))?;
    }
    if points == 0 && figure.phases.iter().all(|phase| phase.reflections.is_empty()) {
        return Err(FigureError::Empty { what: "point of a pattern and no reflection" });
    }
    let wavelength = figure.wavelength_angstrom;
    none_negative("wavelength", [wavelength])?;
    if wavelength < 1e-6 {
        return Err(FigureError::Range { what: "the wavelength in Å", from: wavelength, to: wavelength });
    }
    Ok(())
}

/// Range of the horizontal axis, degrees 2θ.
fn range(figure: &PatternFigure<'_>) -> Result<(f64, f64), FigureError> {
    let found = match (figure.range_deg, figure.two_theta_deg) {
        (Some(range), _) => range,
        (None, [first, .., last]) => (*first, *last),
        (None, points) => {
            let positions = figure.phases.iter().flat_map(|phase| phase.reflections).map(|r| r.two_theta_deg);
            let all = positions.chain(points.iter().copied());
            let (from, to) = all.fold((f64::INFINITY, f64::NEG_INFINITY), |(a, b), x| (a.min(x), b.max(x)));
            let margin = 0.04 * (to - from).max(10.0);
            ((from - margin).max(0.0), (to + margin).min(180.0))
        }
    };
    let (from, to) = widened(found, 0.5);
    if from.is_nan() || to.is_nan() || from < 0.0 || to > 180.0 || to - from < 1e-3 {
        return Err(FigureError::Range { what: "2θ in degrees", from, to });
    }
    Ok((from, to))
}

/// Highest value of the vertical axis in its own coordinate.
fn highest(figure: &PatternFigure<'_>, range: (f64, f64)) -> f64 {
    let inside = |x: f64| x >= range.0 && x <= range.1;
    let curves = std::iter::once(figure.counts).chain(figure.phases.iter().map(|phase| phase.counts));
    let points = curves
        .flat_map(|curve| figure.two_theta_deg.iter().zip(curve))
        .filter(|(x, _)| inside(**x))
        .map(|(_, counts)| *counts);
    let sticks = figure.phases.iter().flat_map(|phase| phase.reflections).filter(|r| inside(r.two_theta_deg));
    let highest = if figure.two_theta_deg.is_empty() {
        sticks.map(|r| r.intensity).fold(0.0, f64::max)
    } else {
        points.fold(0.0, f64::max)
    };
    height_of(figure, if highest > 1e-300 { highest } else { 1.0 })
}

/// Counts in the coordinate of the vertical axis.
fn height_of(figure: &PatternFigure<'_>, counts: f64) -> f64 {
    if figure.square_root { counts.sqrt() } else { counts }
}

fn axes(
    scene: &mut Scene,
    figure: &PatternFigure<'_>,
    (panel, strip): (&Panel, &Panel),
    highest: f64,
) -> Result<(), FigureError> {
    let two_theta = ticks::linear(panel.x.0, panel.x.1, 10);
    let d = ticks::d_spacing(figure.wavelength_angstrom, panel.x.0, panel.x.1, 0.052 * (panel.x.1 - panel.x.0));
    let all = if figure.square_root {
        ticks::square_root(panel.y.1 * panel.y.1, 0.075)
    } else {
        ticks::linear(panel.y.0, panel.y.1, 6)
    };
    // The headroom belongs to the labels: no numbers, no lines there.
    let ceiling = 1.03 * highest;
    let intensity = Ticks {
        major: all.major.into_iter().filter(|(at, _)| *at <= ceiling).collect(),
        minor: all.minor.into_iter().filter(|at| *at <= ceiling).collect(),
    };
    panel.grid(scene, Edge::Left, &intensity)?;
    panel.grid(scene, Edge::Bottom, &two_theta)?;
    strip.grid(scene, Edge::Bottom, &two_theta)?;
    panel.ticks(scene, Edge::Left, &intensity)?;
    panel.ticks(scene, Edge::Top, &d)?;
    strip.ticks(scene, Edge::Bottom, &two_theta)?;
    panel.frame(scene)?;
    strip.frame(scene)?;
    panel.numbers(scene, Edge::Left, &intensity);
    panel.numbers(scene, Edge::Top, &d);
    strip.numbers(scene, Edge::Bottom, &two_theta);
    let label = if figure.square_root {
        format!("{} (square-root scale)", figure.intensity_label)
    } else {
        figure.intensity_label.clone()
    };
    let label = crate::widths::abbreviate(&label, crate::panel::AXIS_SIZE, false, CURVE);
    panel.title(scene, Edge::Left, &label, PANEL_LEFT - 24.0);
    panel.title(scene, Edge::Top, "d / Å", 28.0);
    strip.title(scene, Edge::Bottom, "2θ / °", 40.0);
    Ok(())
}

/// The legend: the sum where phases have curves of their own, then each phase.
fn entries(figure: &PatternFigure<'_>) -> Vec<Entry<'static>> {
    let with_curves = figure.phases.iter().any(|phase| !phase.counts.is_empty());
    let sum = Entry { line: Some(Pen::new(TEXT, 1.3)), marker: None, text: "all phases together".to_owned() };
    let phases = figure.phases.iter().enumerate().map(|(index, phase)| {
        let Look { ink, dash, shape } = look(index, figure.phases.len());
        let alone = figure.phases.len() == 1;
        let own_line = alone || !phase.counts.is_empty() || figure.two_theta_deg.is_empty();
        let line = own_line.then_some(Pen { ink, width: 1.3, dash });
        Entry { line, marker: Some((shape, true, ink)), text: phase.name.clone() }
    });
    with_curves.then_some(sum).into_iter().chain(phases).collect()
}

fn caption(figure: &PatternFigure<'_>, seen: &[strip::Seen<'_>], labels: &names::Arranged) -> Vec<String> {
    let left_out = seen.len() - labels.named();
    let mut text = match (seen.len(), left_out) {
        (0, _) => "No reflection lies in this range.".to_owned(),
        (n, 0) => format!("{}, each with its hkl.", count(n, "reflection", "reflections")),
        (n, out) => format!(
            "{}: the strongest that find room carry their hkl; {} without.",
            count(n, "reflection", "reflections"),
            count(out, "label is left out, its tick mark stands", "labels are left out, their tick marks stand")
        ),
    };
    let outside = figure.phases.iter().map(|phase| phase.reflections.len()).sum::<usize>() - seen.len();
    if outside > 0 {
        text.push_str(&format!(" {} outside the range.", count(outside, "reflection lies", "reflections lie")));
    }
    if labels.some_are_counted() {
        text.push_str(" “+n” after an hkl: n more reflections at the same place.");
    }
    vec![text]
}

fn description(figure: &PatternFigure<'_>, (from, to): (f64, f64), seen: &[strip::Seen<'_>]) -> String {
    let names: Vec<&str> = figure.phases.iter().map(|phase| phase.name.as_str()).collect();
    let mut text = format!(
        "Predicted powder pattern from {from:.2} to {to:.2} degrees 2θ at {} Å; {}: {}.",
        figure.wavelength_angstrom,
        count(names.len(), "phase", "phases"),
        names.join("; ")
    );
    if let Some(strongest) = seen.first() {
        let r = strongest.reflection;
        text.push_str(&format!(
            " Strongest reflection: {} at {:.3}°, d {:.4} Å.",
            r.hkl, r.two_theta_deg, r.d_angstrom
        ));
    }
    text
}
