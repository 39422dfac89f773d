//! The drift chart: the change of a lattice parameter by batch, with its uncertainty, the limits and the decision.

mod bars;
mod batches;

use crate::error::{FigureError, all_drawable, none_negative};
use crate::layout::{
    Entry, MARGIN, PANEL_LEFT, WIDTH, caption_lines, captions, captions_height, count, heading, heading_height, legend,
    legend_height,
};
use crate::palette::{AXIS, BAND, Ink, SERIES, SOFT, Shape, TEXT};
use crate::panel::{Edge, Panel};
use crate::svg::{Pen, Scene, Text, line_element};
use crate::ticks;
use crate::widths::abbreviate;

/// What was decided about a batch.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum DriftDecision {
    /// The change is within its limit. A filled circle.
    Within,
    /// The change is beyond its limit. A filled diamond.
    Drifted,
    /// The measurement can't tell. An open square.
    Undecided,
}

impl DriftDecision {
    const ALL: [Self; 3] = [Self::Within, Self::Drifted, Self::Undecided];

    fn look(self) -> (Shape, bool, Ink) {
        match self {
            Self::Within => (Shape::Circle, true, SERIES[0]),
            Self::Drifted => (Shape::Diamond, true, SERIES[1]),
            Self::Undecided => (Shape::Square, false, SERIES[3]),
        }
    }

    fn words(self) -> &'static str {
        match self {
            Self::Within => "within the limit",
            Self::Drifted => "drifted",
            Self::Undecided => "undecided",
        }
    }
}

/// One batch of the chart.
#[derive(Clone, Debug, PartialEq)]
pub struct DriftPoint {
    /// Name of the batch.
    pub batch: String,
    /// Change against the reference, in the unit of the chart.
    pub delta: f64,
    /// Its standard uncertainty, same unit, zero or above.
    pub u: f64,
    /// Factor k of the expanded uncertainty, zero or above; the outer bar is ± k u.
    pub coverage_factor: f64,
    /// What was decided.
    pub decision: DriftDecision,
}

/// Unit of a change.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum DriftUnit {
    /// Parts in a million of a length: Δa/a.
    Ppm,
    /// Degrees, for an angle of the cell.
    Degrees,
}

impl DriftUnit {
    fn symbol(self) -> &'static str {
        match self {
            Self::Ppm => "ppm",
            Self::Degrees => "°",
        }
    }

    fn quantity(self, parameter: &str) -> String {
        match self {
            Self::Ppm => format!("(Δ{parameter}/{parameter}) / ppm"),
            Self::Degrees => format!("Δ{parameter} / °"),
        }
    }
}

/// What a drift chart shows.
#[derive(Clone, Debug, PartialEq)]
pub struct DriftFigure<'a> {
    /// Title, such as the name of the material.
    pub title: String,
    /// The parameter, such as `a`.
    pub parameter: String,
    /// Unit of all changes and of the limit.
    pub unit: DriftUnit,
    /// Name of the reference that all batches are compared with.
    pub reference: String,
    /// Limit of the change, above zero; `None` when the test is against no change.
    pub limit: Option<f64>,
    /// Risk of a wrong *drifted*, for the caption; `None` leaves it out.
    pub risk: Option<f64>,
    /// 1 to 400 batches, in the order of the axis.
    pub points: &'a [DriftPoint],
}

/// Most batches of one chart (own choice: beyond it marks touch each other).
pub const MAX_BATCHES: usize = 400;
/// Height of the chart, px.
const CHART: f64 = 320.0;
/// Room right of the chart for the names of its lines, px.
const RIGHT: f64 = 118.0;
/// The sentence that every chart carries.
const FOOTNOTE: &str = "A qualified person decides on release.";

/// Draws the chart as SVG text.
///
/// The inner bar is ± u, the outer, capped one ± k u. The decision shows by shape as well as by colour, with a legend in
/// words. With many batches every n-th is named, and the caption says so; each mark names its batch.
///
/// # Errors
/// [`FigureError`] when there is no batch or there are more than [`MAX_BATCHES`], or when a number is not finite, an
/// uncertainty, factor or limit below zero.
pub fn drift_chart(figure: &DriftFigure<'_>) -> Result<String, FigureError> {
    check(figure)?;
    let entries = entries(figure);
    let subtitle = subtitle(figure);
    let legend_top = heading_height(&subtitle);
    let top = legend_top + legend_height(&entries) + 10.0;
    #[expect(clippy::cast_precision_loss, reason = "at most 400 batches")]
    let last = figure.points.len() as f64 - 0.5;
    let panel = Panel {
        left: PANEL_LEFT,
        top,
        right: WIDTH - RIGHT,
        bottom: top + CHART,
        x: (-0.5, last),
        y: vertical_range(figure),
    };
    let names = batches::arrange(figure.points, &panel);
    let lines = caption_lines(&caption(figure, &names));
    let axis_bottom = panel.bottom + names.height() + 34.0;
    let mut scene = Scene::new(WIDTH, axis_bottom + captions_height(&lines));
    heading(&mut scene, &figure.title, &subtitle);
    legend(&mut scene, &entries, legend_top);
    ground(&mut scene, figure, &panel)?;
    names.draw(&mut scene, &panel);
    panel.title(&mut scene, Edge::Bottom, "batch", names.height() + 26.0);
    bars::draw(&mut scene, figure, &panel);
    captions(&mut scene, &lines, axis_bottom);
    Ok(scene.finish(&figure.title, &description(figure)))
}

fn check(figure: &DriftFigure<'_>) -> Result<(), FigureError> {
    match figure.points.len() {
        0 => return Err(FigureError::Empty { what: "batch" }),
        found if found > MAX_BATCHES => {
            return Err(FigureError::TooMany { what: "batches", limit: MAX_BATCHES, found });
        }
        _ => {}
    }
    all_drawable("change of a batch", figure.points.iter().map(|point| point.delta))?;
    none_negative("u of a batch", figure.points.iter().map(|point| point.u))?;
    none_negative("coverage factor of a batch", figure.points.iter().map(|point| point.coverage_factor))?;
    none_negative("k u of a batch", figure.points.iter().map(|point| point.coverage_factor * point.u))?;
    none_negative("limit", figure.limit)?;
    none_negative("risk", figure.risk)
}

/// From below the lowest bar or limit to above the highest, zero included.
fn vertical_range(figure: &DriftFigure<'_>) -> (f64, f64) {
    let ends = figure.points.iter().flat_map(|point| {
        let reach = point.u * point.coverage_factor.max(1.0);
        [point.delta - reach, point.delta + reach]
    });
    let limits = figure.limit.into_iter().flat_map(|limit| [-limit, limit]);
    let (low, high) = ends.chain(limits).fold((0.0_f64, 0.0_f64), |(low, high), v| (low.min(v), high.max(v)));
    let span = if high - low > 1e-12 { high - low } else { 1.0 };
    (low - 0.08 * span, high + 0.08 * span)
}

/// Band and lines of the limits, zero line, axes.
fn ground(scene: &mut Scene, figure: &DriftFigure<'_>, panel: &Panel) -> Result<(), FigureError> {
    if let Some(limit) = figure.limit {
        scene.fill((panel.left, panel.y_px(limit)), (panel.right, panel.y_px(-limit)), BAND);
    }
    let vertical = ticks::linear(panel.y.0, panel.y.1, 7);
    panel.grid(scene, Edge::Left, &vertical)?;
    panel.ticks(scene, Edge::Left, &vertical)?;
    panel.numbers(scene, Edge::Left, &vertical);
    let quantity = figure.unit.quantity(&shortened(&figure.parameter, 12));
    let quantity = abbreviate(&quantity, crate::panel::AXIS_SIZE, false, CHART);
    panel.title(scene, Edge::Left, &quantity, PANEL_LEFT - 24.0);
    let mut named = vec![(0.0, format!("0: {}", figure.reference), Pen::new(AXIS, 1.2))];
    if let Some(limit) = figure.limit {
        let pen = Pen { ink: TEXT, width: 1.2, dash: &[8.0, 4.0] };
        for signed in [limit, -limit] {
            let sign = if signed > 0.0 { "+" } else { "−" };
            named.push((signed, format!("{sign}{} {}", plain(limit), figure.unit.symbol()), pen));
        }
    }
    let mut taken: Vec<f64> = Vec::new();
    for (at, name, pen) in named {
        let y = panel.y_px(at);
        scene.draw(&line_element((panel.left, y), (panel.right, y), &pen));
        // A limit that is small on this scale would write its name over that of the zero line.
        if taken.iter().all(|other: &f64| (other - y).abs() >= 14.0) {
            let name = abbreviate(&name, 12.0, false, RIGHT - MARGIN - 8.0);
            scene.text(&Text::new((panel.right + 8.0, y + 4.0), 12.0, &name).ink(SOFT));
            taken.push(y);
        }
    }
    panel.frame(scene)
}

/// A limit in as many digits as it needs, four decimals at most.
fn plain(value: f64) -> String {
    let decimals = (0..4).find(|&n| (value * 10_f64.powi(n)).fract().abs() < 1e-9).unwrap_or(4);
    ticks::number(value, usize::try_from(decimals).unwrap_or(0))
}

fn shortened(text: &str, characters: usize) -> String {
    text.chars().take(characters).collect()
}

fn entries(figure: &DriftFigure<'_>) -> Vec<Entry<'static>> {
    let mut entries: Vec<Entry<'static>> = DriftDecision::ALL
        .into_iter()
        // Without a limit nothing can be within it.
        .filter(|decision| figure.limit.is_some() || figure.points.iter().any(|point| point.decision == *decision))
        .map(|decision| {
            let (shape, filled, ink) = decision.look();
            let fill = if filled { "filled" } else { "open" };
            let form = format!("{shape:?}").to_lowercase();
            Entry {
                line: None,
                marker: Some((shape, filled, ink)),
                text: format!("{} ({fill} {form})", decision.words()),
            }
        })
        .collect();
    entries.push(Entry { line: Some(Pen::new(TEXT, bars::INNER)), marker: None, text: "± u".to_owned() });
    let factors = figure.points.iter().map(|point| point.coverage_factor);
    let (low, high) = factors.fold((f64::INFINITY, 0.0_f64), |(low, high), k| (low.min(k), high.max(k)));
    let k = if high - low < 0.005 { format!("k = {high:.2}") } else { format!("k from {low:.2} to {high:.2}") };
    entries.push(Entry { line: Some(Pen::new(TEXT, bars::OUTER)), marker: None, text: format!("± k u, {k}") });
    entries
}

fn subtitle(figure: &DriftFigure<'_>) -> String {
    let limit = match figure.limit {
        Some(limit) => format!("limit ±{} {}", plain(limit), figure.unit.symbol()),
        None => "no limit: tested against no change".to_owned(),
    };
    let risk = figure.risk.map_or(String::new(), |risk| format!("; risk {risk} for each batch"));
    let (parameter, reference) = (shortened(&figure.parameter, 12), &figure.reference);
    format!("Change of {parameter} against {reference}; {limit}{risk}")
}

fn caption(figure: &DriftFigure<'_>, names: &batches::Names) -> Vec<String> {
    let number_of = |decision| figure.points.iter().filter(|point| point.decision == decision).count();
    let counts: Vec<String> = DriftDecision::ALL
        .into_iter()
        .map(|decision| (number_of(decision), decision))
        .filter(|&(n, _)| n > 0)
        .map(|(n, decision)| format!("{n} {}", decision.words()))
        .collect();
    let counts = counts.join(", ");
    let mut text = format!("{}: {counts}.", count(figure.points.len(), "batch", "batches"));
    if names.every > 1 {
        text.push_str(&format!(" One in {} is named on the axis.", names.every));
    }
    vec![text, FOOTNOTE.to_owned()]
}

fn description(figure: &DriftFigure<'_>) -> String {
    let drifted: Vec<&str> = figure
        .points
        .iter()
        .filter(|point| point.decision == DriftDecision::Drifted)
        .map(|point| point.batch.as_str())
        .collect();
    let list =
        if drifted.is_empty() { "No batch has drifted".to_owned() } else { format!("Drifted: {}", drifted.join(", ")) };
    format!(
        "{} of {} batches, with standard and expanded uncertainty. {}. {list}. {FOOTNOTE}",
        figure.unit.quantity(&figure.parameter),
        figure.points.len(),
        subtitle(figure)
    )
}
