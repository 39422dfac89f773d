//! The upper panels: observed sticks with their labels, calculated ticks.

use std::collections::BTreeSet;

use super::{IndexedFigure, LineKind, ObservedLine};
use crate::error::FigureError;
use crate::hkl::{Written, written};
use crate::labels::{Place, Rect, Wish, place};
use crate::palette::{SERIES, SOFT, TEXT};
use crate::panel::{Edge, Panel};
use crate::skyline::Skyline;
use crate::svg::{Pen, Scene, Text, line_element, path_element, shape_element, tenths};
use crate::ticks;
use crate::widths::{ASCENT, DESCENT, abbreviate, text_width};

/// Font size of labels, px.
const SIZE: f64 = 11.0;
/// Longest label, px; more is cut with an ellipsis, the mark says all.
const LONGEST: f64 = 96.0;
/// Room kept free above the highest stick, px.
const HEADROOM: f64 = LONGEST + 18.0;
/// Radius of the shapes on the sticks, px.
const RADIUS: f64 = 3.6;

/// Intensities in percent of the strongest, when all lines have one and one is above zero.
fn strongest(figure: &IndexedFigure<'_>) -> Option<f64> {
    let all: Option<Vec<f64>> = figure.observed.iter().map(|line| line.intensity).collect();
    all.map(|all| all.into_iter().fold(0.0, f64::max)).filter(|&strongest| strongest > 1e-300)
}

/// Height of a stick: the square root of the intensity in percent, so that weak lines show; 10 where none is known.
fn height(figure: &IndexedFigure<'_>, line: &ObservedLine) -> f64 {
    match (strongest(figure), line.intensity) {
        (Some(strongest), Some(intensity)) => (100.0 * (intensity / strongest)).sqrt(),
        _ => 10.0,
    }
}

/// Upper end of the panel in that coordinate.
pub(super) fn full_scale(_: &IndexedFigure<'_>, panel_px: f64) -> f64 {
    10.0 * panel_px / (panel_px - HEADROOM)
}

/// The vertical axis: percent where intensities are known, else only what the sticks are.
pub(super) fn intensity_axis(scene: &mut Scene, figure: &IndexedFigure<'_>, panel: &Panel) -> Result<(), FigureError> {
    if strongest(figure).is_none() {
        panel.title(scene, Edge::Left, "observed lines", panel.left - 24.0);
        return Ok(());
    }
    let ticks = ticks::square_root(100.0, 0.17);
    panel.grid(scene, Edge::Left, &ticks)?;
    panel.ticks(scene, Edge::Left, &ticks)?;
    panel.numbers(scene, Edge::Left, &ticks);
    panel.title(scene, Edge::Left, "relative intensity / %, √ scale", panel.left - 24.0);
    Ok(())
}

/// A stick with its shape.
pub(super) fn stick(figure: &IndexedFigure<'_>, line: &ObservedLine, panel: &Panel) -> String {
    let (shape, filled, ink, dash) = line.kind.look();
    let (x, top) = (panel.x_px(line.two_theta_deg), panel.y_px(height(figure, line)));
    let pen = Pen { ink, width: 1.5, dash };
    format!(
        "{}{}",
        line_element((x, panel.bottom), (x, top), &pen),
        shape_element(shape, (x, top), RADIUS, ink, filled)
    )
}

/// What the mark of a line says.
pub(super) fn name(figure: &IndexedFigure<'_>, line: &ObservedLine) -> String {
    let u = line.u_deg.unwrap_or(0.0);
    let position = values::Measured::new(line.two_theta_deg, u);
    let sine = (line.two_theta_deg.to_radians() / 2.0).sin();
    let d = if sine > 0.0 { format!(", d {:.5} Å", figure.wavelength_angstrom / (2.0 * sine)) } else { String::new() };
    let intensity = line.intensity.map_or(String::new(), |intensity| format!(", intensity {intensity}"));
    let what = match &line.kind {
        LineKind::Indexed { calculated_deg, hkl } => {
            format!("hkl {hkl}, observed − calculated {:+.4}°", line.two_theta_deg - calculated_deg)
        }
        LineKind::Unindexed => "not indexed".to_owned(),
        LineKind::Ghost { of } => format!("satellite: {of}"),
    };
    format!("2θ {position}°{d}{intensity}; {what}")
}

/// Draws the calculated lines: long where one is observed, short and grey where none is; one for each half px.
pub(super) fn draw_calculated(scene: &mut Scene, figure: &IndexedFigure<'_>, panel: &Panel) {
    let middle = 0.5 * (panel.top + panel.bottom);
    for (observed, half, ink) in [(false, 3.5, SOFT), (true, 8.0, SERIES[0])] {
        let mut taken = BTreeSet::new();
        let data: String = figure
            .calculated
            .iter()
            .filter(|line| line.observed == observed && panel.shows_x(line.two_theta_deg))
            .map(|line| panel.x_px(line.two_theta_deg))
            .filter(|x| taken.insert(tenths(x / 5.0)))
            .map(|x| format!("M{} {}v{}", tenths(x), tenths(middle - half), tenths(2.0 * half)))
            .collect();
        if !data.is_empty() {
            scene.draw(&path_element(&data, &Pen::new(ink, 1.2)));
        }
    }
    let name = Text::new((panel.left - 9.0, middle + 4.0), 12.0, "calculated");
    scene.text(&name.anchor(crate::svg::Anchor::End).ink(SOFT));
}

/// Labels that found a place.
#[derive(Clone, Debug)]
pub(super) struct Labels(Vec<(Written, Place)>);

/// Finds places for the labels, strongest lines first; after those that are not indexed.
pub(super) fn arrange(figure: &IndexedFigure<'_>, panel: &Panel) -> Labels {
    let mut order: Vec<&ObservedLine> = figure.observed.iter().collect();
    // The few lines that do not fit the lattice choose first: they are what the reader looks for.
    let indexed = |line: &ObservedLine| matches!(line.kind, LineKind::Indexed { .. });
    order.sort_by(|a, b| indexed(a).cmp(&indexed(b)).then(height(figure, b).total_cmp(&height(figure, a))));
    let texts: Vec<Written> = order
        .iter()
        .map(|line| match &line.kind {
            LineKind::Indexed { hkl, .. } => written(&abbreviate(hkl, SIZE, false, LONGEST)),
            LineKind::Unindexed => written("?"),
            LineKind::Ghost { of } => written(&abbreviate(of, SIZE, false, LONGEST)),
        })
        .collect();
    let wishes: Vec<Wish> = order
        .iter()
        .zip(&texts)
        .map(|(line, text)| Wish {
            x: panel.x_px(line.two_theta_deg),
            y: panel.y_px(height(figure, line)) - RADIUS,
            width: SIZE * (ASCENT + DESCENT),
            height: text_width(&text.visible, SIZE, false),
        })
        .collect();
    let mut skyline = Skyline::flat(panel);
    for line in &order {
        let (x, top) = (panel.x_px(line.two_theta_deg), panel.y_px(height(figure, line)));
        skyline.raise((x - RADIUS - 1.0, x + RADIUS + 1.0), top - RADIUS - 1.0);
    }
    let frame = Rect { left: panel.left, top: panel.top, right: panel.right, bottom: panel.bottom };
    let places = place(&frame, &wishes, |from, to| skyline.top(from, to));
    Labels(texts.into_iter().zip(places).filter_map(|(text, place)| Some((text, place?))).collect())
}

impl Labels {
    /// How many lines go without a label.
    pub(super) fn left_out(&self, figure: &IndexedFigure<'_>) -> usize {
        figure.observed.len() - self.0.len()
    }

    /// Draws the labels.
    pub(super) fn draw(&self, scene: &mut Scene) {
        for (text, place) in &self.0 {
            if let Some(line) = place.leader_line() {
                scene.draw(&path_element(&line, &Pen::new(SOFT, 0.7)));
            }
            let baseline = (place.rect.left + SIZE * ASCENT, place.rect.bottom);
            scene.text_markup(&Text::new(baseline, SIZE, "").ink(TEXT).upright(), &text.markup);
        }
    }
}
