//! The picture of an indexed list of lines: observed sticks above calculated ticks, differences below.

mod differences;
mod lines;

use values::Measured;

use crate::error::{FigureError, all_drawable, none_negative};
use crate::layout::{
    Entry, MARGIN, PANEL_LEFT, WIDTH, caption_lines, captions, captions_height, count, heading, heading_height, legend,
    legend_height, widened,
};
use crate::palette::{Ink, SERIES, SOFT, Shape};
use crate::panel::{Edge, Panel};
use crate::svg::{Pen, Scene};
use crate::ticks;

/// What became of an observed line.
#[derive(Clone, Debug, PartialEq)]
pub enum LineKind {
    /// It has indices. A full stick with a filled circle.
    Indexed {
        /// Calculated position, degrees 2θ, zero and other shifts included.
        calculated_deg: f64,
        /// Indices, such as `1 1 1`.
        hkl: String,
    },
    /// No line of the lattice is there. A dashed stick with an open square and a question mark.
    Unindexed,
    /// A line of another wavelength or radiation. A dotted stick with an open diamond and what it is.
    Ghost {
        /// What it is, such as `Kα2 of 1 1 1`.
        of: String,
    },
}

/// An observed line.
#[derive(Clone, Debug, PartialEq)]
pub struct ObservedLine {
    /// Observed position, degrees 2θ.
    pub two_theta_deg: f64,
    /// Its standard uncertainty, degrees 2θ, where known.
    pub u_deg: Option<f64>,
    /// Intensity on any scale, zero or above, where known; sticks are equally high unless all lines have one.
    pub intensity: Option<f64>,
    /// What became of it.
    pub kind: LineKind,
}

/// A line that the lattice predicts.
#[derive(Clone, Debug, PartialEq)]
pub struct CalculatedLine {
    /// Position, degrees 2θ.
    pub two_theta_deg: f64,
    /// Spacing d in Å.
    pub d_angstrom: f64,
    /// Indices.
    pub hkl: String,
    /// Whether an observed line is assigned to it.
    pub observed: bool,
}

/// A parameter of the cell for the title.
#[derive(Clone, Debug, PartialEq)]
pub struct CellParameter {
    /// Name, such as `a`.
    pub name: String,
    /// Value with its standard uncertainty.
    pub value: Measured,
    /// Unit: `Å` or `°`.
    pub unit: &'static str,
}

/// A figure of merit of the first `n` lines.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Merit {
    /// Number of lines.
    pub n: usize,
    /// Value, zero or above.
    pub value: f64,
}

/// What the picture of an indexed list shows.
#[derive(Clone, Debug, PartialEq)]
pub struct IndexedFigure<'a> {
    /// The lattice, such as `cubic F`.
    pub lattice: String,
    /// Its free parameters, in the usual order.
    pub cell: Vec<CellParameter>,
    /// M of the first N lines, where defined.
    pub m_n: Option<Merit>,
    /// F of the first N lines, where defined.
    pub f_n: Option<Merit>,
    /// More for the line below the title, such as the zero of 2θ; may be empty.
    pub note: String,
    /// Wavelength of the d axis, Å.
    pub wavelength_angstrom: f64,
    /// 1 to 500 observed lines.
    pub observed: &'a [ObservedLine],
    /// At most 20 000 calculated lines.
    pub calculated: &'a [CalculatedLine],
}

/// Most observed lines in one picture (own choice: all are marks with a name).
pub const MAX_OBSERVED: usize = 500;
/// Most calculated lines in one picture (own choice).
pub const MAX_CALCULATED: usize = 20_000;
/// Heights of the three panels, px.
const STICKS: f64 = 240.0;
const TICKS: f64 = 26.0;
const DIFFERENCES: f64 = 130.0;

/// The panels from above: sticks, calculated ticks, differences. They share the axis of 2θ.
#[derive(Clone, Copy, Debug)]
struct Panels {
    sticks: Panel,
    ticks: Panel,
    differences: Panel,
}

impl LineKind {
    fn look(&self) -> (Shape, bool, Ink, &'static [f64]) {
        match self {
            Self::Indexed { .. } => (Shape::Circle, true, SERIES[0], &[]),
            Self::Unindexed => (Shape::Square, false, SERIES[1], &[5.0, 3.0]),
            Self::Ghost { .. } => (Shape::Diamond, false, SERIES[3], &[1.5, 2.5]),
        }
    }
}

/// Draws the picture as SVG text.
///
/// Above: a stick for each observed line, with its hkl where it has one, `?` where it has none. Between: calculated lines,
/// those without an observed one short. Below: observed − calculated with ± u. The title carries lattice and cell.
///
/// # Errors
/// [`FigureError`] when there is no observed line or too many, or when a number is not finite, or an uncertainty, an
/// intensity or an angle below zero.
pub fn indexed_lines(figure: &IndexedFigure<'_>) -> Result<String, FigureError> {
    check(figure)?;
    let (title, subtitle, entries) = (title(figure), subtitle(figure), entries(figure));
    let legend_top = heading_height(&subtitle);
    let top = legend_top + legend_height(&entries) + 44.0;
    let panels = panels(figure, top)?;
    let labels = lines::arrange(figure, &panels.sticks);
    let captions_text = caption_lines(&caption(figure, labels.left_out(figure)));
    let axis_bottom = panels.differences.bottom + 48.0;
    let mut scene = Scene::new(WIDTH, axis_bottom + captions_height(&captions_text));
    heading(&mut scene, &title, &subtitle);
    legend(&mut scene, &entries, legend_top);
    axes(&mut scene, figure, &panels)?;
    lines::draw_calculated(&mut scene, figure, &panels.ticks);
    labels.draw(&mut scene);
    for line in figure.observed {
        let stick = lines::stick(figure, line, &panels.sticks);
        let difference = differences::element(line, &panels.differences);
        scene.mark(&lines::name(figure, line), &format!("{stick}{difference}"));
    }
    captions(&mut scene, &captions_text, axis_bottom);
    Ok(scene.finish(&title, &description(figure, &title, &subtitle)))
}

fn check(figure: &IndexedFigure<'_>) -> Result<(), FigureError> {
    let limits = [
        ("observed lines", MAX_OBSERVED, figure.observed.len()),
        ("calculated lines", MAX_CALCULATED, figure.calculated.len()),
    ];
    for (what, limit, found) in limits {
        if found > limit {
            return Err(FigureError::TooMany { what, limit, found });
        }
    }
    if figure.observed.is_empty() {
        return Err(FigureError::Empty { what: "observed line" });
    }
    none_negative("2θ of an observed line", figure.observed.iter().map(|line| line.two_theta_deg))?;
    none_negative("u of an observed line", figure.observed.iter().filter_map(|line| line.u_deg))?;
    none_negative("intensity of an observed line", figure.observed.iter().filter_map(|line| line.intensity))?;
    none_negative("2θ of a calculated line", figure.calculated.iter().map(|line| line.two_theta_deg))?;
    none_negative("d of a calculated line", figure.calculated.iter().map(|line| line.d_angstrom))?;
    let assigned = figure.observed.iter().filter_map(|line| match line.kind {
        LineKind::Indexed { calculated_deg, .. } => Some(calculated_deg),
        _ => None,
    });
    none_negative("2θ calculated for an observed line", assigned)?;
    all_drawable("parameter of the cell", figure.cell.iter().flat_map(|p| [p.value.value, p.value.u]))?;
    none_negative("figure of merit", figure.m_n.iter().chain(&figure.f_n).map(|merit| merit.value))?;
    let wavelength = figure.wavelength_angstrom;
    none_negative("wavelength", [wavelength])?;
    if wavelength < 1e-6 {
        return Err(FigureError::Range { what: "the wavelength in Å", from: wavelength, to: wavelength });
    }
    Ok(())
}

fn panels(figure: &IndexedFigure<'_>, top: f64) -> Result<Panels, FigureError> {
    // The observed lines set the range: calculated ones far beyond them say nothing about the list.
    let positions = figure.observed.iter().map(|line| line.two_theta_deg);
    let found = positions.fold((f64::INFINITY, f64::NEG_INFINITY), |(a, b), x| (a.min(x), b.max(x)));
    let (from, to) = widened(found, 1.0);
    let margin = 0.04 * (to - from);
    let x = ((from - margin).max(0.0), (to + margin).min(180.0));
    if to > 180.0 || x.1 - x.0 < 1e-3 {
        return Err(FigureError::Range { what: "2θ in degrees", from, to });
    }
    let (left, right) = (PANEL_LEFT, WIDTH - MARGIN - 8.0);
    let sticks = Panel { left, top, right, bottom: top + STICKS, x, y: (0.0, lines::full_scale(figure, STICKS)) };
    let ticks = Panel { top: sticks.bottom, bottom: sticks.bottom + TICKS, y: (0.0, 1.0), ..sticks };
    let differences_top = ticks.bottom + 14.0;
    let reach = differences::reach(figure.observed);
    let differences =
        Panel { top: differences_top, bottom: differences_top + DIFFERENCES, y: (-reach, reach), ..sticks };
    Ok(Panels { sticks, ticks, differences })
}

fn axes(scene: &mut Scene, figure: &IndexedFigure<'_>, panels: &Panels) -> Result<(), FigureError> {
    let Panels { sticks, ticks: strip, differences } = panels;
    let (from, to) = sticks.x;
    let two_theta = ticks::linear(from, to, 10);
    let d = ticks::d_spacing(figure.wavelength_angstrom, from, to, 0.052 * (to - from));
    let difference = ticks::linear(differences.y.0, differences.y.1, 5);
    for panel in [sticks, strip, differences] {
        panel.grid(scene, Edge::Bottom, &two_theta)?;
    }
    differences.grid(scene, Edge::Left, &difference)?;
    lines::intensity_axis(scene, figure, sticks)?;
    differences::zero_line(scene, differences)?;
    sticks.ticks(scene, Edge::Top, &d)?;
    differences.ticks(scene, Edge::Left, &difference)?;
    differences.ticks(scene, Edge::Bottom, &two_theta)?;
    for panel in [sticks, strip, differences] {
        panel.frame(scene)?;
    }
    sticks.numbers(scene, Edge::Top, &d);
    differences.numbers(scene, Edge::Left, &difference);
    differences.numbers(scene, Edge::Bottom, &two_theta);
    sticks.title(scene, Edge::Top, "d / Å", 28.0);
    differences.title(scene, Edge::Left, "obs − calc / °", PANEL_LEFT - 24.0);
    differences.title(scene, Edge::Bottom, "2θ / °", 40.0);
    Ok(())
}

fn title(figure: &IndexedFigure<'_>) -> String {
    let cell = figure.cell.iter().map(|p| {
        let unit = if p.unit == "°" { "°".to_owned() } else { format!(" {}", p.unit) };
        format!(", {} = {}{unit}", p.name, p.value)
    });
    format!("{}{}", figure.lattice, cell.collect::<String>())
}

fn subtitle(figure: &IndexedFigure<'_>) -> String {
    let merit = |letter: &str, merit: Option<Merit>| {
        merit.map(|Merit { n, value }| {
            let decimals = if value < 100.0 { 1 } else { 0 };
            format!("{letter}({n}) = {value:.decimals$}")
        })
    };
    let note = (!figure.note.is_empty()).then(|| figure.note.clone());
    let wavelength = format!("{} Å", figure.wavelength_angstrom);
    let parts: Vec<String> =
        [merit("M", figure.m_n), merit("F", figure.f_n), Some(wavelength), note].into_iter().flatten().collect();
    parts.join("; ")
}

/// The legend: only what the picture holds.
fn entries(figure: &IndexedFigure<'_>) -> Vec<Entry<'static>> {
    let mut entries = Vec::new();
    let kinds = [
        (LineKind::Indexed { calculated_deg: 0.0, hkl: String::new() }, "observed, indexed"),
        (LineKind::Unindexed, "observed, not indexed (?)"),
        (LineKind::Ghost { of: String::new() }, "observed, satellite of another line"),
    ];
    for (kind, text) in kinds {
        let same = |line: &ObservedLine| std::mem::discriminant(&line.kind) == std::mem::discriminant(&kind);
        if figure.observed.iter().any(same) {
            let (shape, filled, ink, dash) = kind.look();
            let line = Some(Pen { ink, width: 1.5, dash });
            entries.push(Entry { line, marker: Some((shape, filled, ink)), text: text.to_owned() });
        }
    }
    if figure.calculated.iter().any(|line| !line.observed) {
        let line = Some(Pen::new(SOFT, 1.2));
        entries.push(Entry { line, marker: None, text: "short ticks: calculated, not observed".to_owned() });
    }
    entries
}

fn caption(figure: &IndexedFigure<'_>, left_out: usize) -> Vec<String> {
    let of = |test: fn(&LineKind) -> bool| figure.observed.iter().filter(|line| test(&line.kind)).count();
    let indexed = of(|kind| matches!(kind, LineKind::Indexed { .. }));
    let unindexed = of(|kind| matches!(kind, LineKind::Unindexed));
    let ghosts = figure.observed.len() - indexed - unindexed;
    let mut text = format!("{}: {indexed} indexed", count(figure.observed.len(), "line", "lines"));
    if unindexed > 0 {
        text.push_str(&format!(", {unindexed} not indexed"));
    }
    if ghosts > 0 {
        text.push_str(&format!(", {}", count(ghosts, "satellite", "satellites")));
    }
    text.push_str(". Bars below are ± u of the observed position.");
    if left_out > 0 {
        text.push_str(&format!(" {} no place.", count(left_out, "label finds", "labels find")));
    }
    vec![text]
}

fn description(figure: &IndexedFigure<'_>, title: &str, subtitle: &str) -> String {
    format!(
        "Observed lines above the lines calculated for {title}; differences observed minus calculated below. {subtitle}. {}",
        caption(figure, 0).concat()
    )
}
