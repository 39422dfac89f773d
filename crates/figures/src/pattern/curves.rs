//! The curves, or sticks where only reflections are known.

use super::strip::Seen;
use super::{Look, PatternFigure, height_of, look};
use crate::error::FigureError;
use crate::palette::TEXT;
use crate::panel::Panel;
use crate::skyline::Skyline;
use crate::svg::{Pen, Scene, tenths};
use crate::thin;

/// Width of the columns that a curve is thinned to, px, when the picture holds up to six curves; more share the room.
const COLUMN: f64 = 0.5;

/// Width of a column for a number of curves: the file stays below 1 MB with 24 phases.
pub(super) fn column_px(curves: usize) -> f64 {
    #[expect(clippy::cast_precision_loss, reason = "at most 25 curves")]
    let share = curves as f64 / 6.0;
    COLUMN * share.max(1.0)
}

/// Draws the sum and each phase, or sticks.
pub(super) fn draw(
    scene: &mut Scene,
    figure: &PatternFigure<'_>,
    panel: &Panel,
    seen: &[Seen<'_>],
) -> Result<(), FigureError> {
    if figure.two_theta_deg.is_empty() {
        return sticks(scene, figure, panel, seen);
    }
    let own = figure.phases.iter().filter(|phase| !phase.counts.is_empty()).count();
    let column = column_px(own + 1);
    // One phase without a curve of its own: the curve is that phase, in its colour.
    let alone = figure.phases.len() == 1 && own == 0;
    let pen = if alone { Pen::new(look(0, 1).ink, 1.3) } else { Pen::new(TEXT, 0.8) };
    panel.lines(scene, &[visible(figure, figure.counts, panel, column)], &pen)?;
    // The phases lie above the sum: where one phase makes a line alone, its dashes show in the sum's line.
    for (index, phase) in figure.phases.iter().enumerate() {
        if !phase.counts.is_empty() {
            let Look { ink, dash, .. } = look(index, figure.phases.len());
            panel.lines(scene, &[visible(figure, phase.counts, panel, column)], &Pen { ink, width: 1.6, dash })?;
        }
    }
    Ok(())
}

/// The points of a curve inside the panel that can be seen apart, in axis coordinates.
fn visible(figure: &PatternFigure<'_>, counts: &[f64], panel: &Panel, column: f64) -> Vec<(f64, f64)> {
    let points: Vec<(f64, f64)> = figure
        .two_theta_deg
        .iter()
        .zip(counts)
        .filter(|(x, _)| panel.shows_x(**x))
        .map(|(&x, &counts)| (x, height_of(figure, counts)))
        .collect();
    let heights: Vec<f64> = points.iter().map(|point| point.1).collect();
    #[expect(clippy::cast_possible_truncation, reason = "a column of the picture")]
    let columns = |index: usize| ((panel.x_px(points[index].0) - panel.left) / column).floor() as i64;
    let kept: Vec<(f64, f64)> = thin::keep(&heights, columns).into_iter().map(|index| points[index]).collect();
    thin::without_flat_middles(&kept, |a, b| tenths(panel.y_px(a)) == tenths(panel.y_px(b)))
}

/// One stick for each reflection that is higher than others in its column.
fn sticks(scene: &mut Scene, figure: &PatternFigure<'_>, panel: &Panel, seen: &[Seen<'_>]) -> Result<(), FigureError> {
    let column = column_px(figure.phases.len());
    for index in 0..figure.phases.len() {
        let mut taken = std::collections::BTreeSet::new();
        let of_phase = seen.iter().filter(|seen| seen.phase == index);
        let lines: Vec<Vec<(f64, f64)>> = of_phase
            .map(|seen| (seen.reflection.two_theta_deg, height_of(figure, seen.reflection.intensity)))
            // `seen` falls in strength: the first stick of a column hides the others.
            .filter(|(x, _)| taken.insert(tenths(panel.x_px(*x) / column / 10.0)))
            .map(|(x, height)| vec![(x, 0.0), (x, height)])
            .collect();
        let Look { ink, dash, .. } = look(index, figure.phases.len());
        panel.lines(scene, &lines, &Pen { ink, width: 1.5, dash })?;
    }
    Ok(())
}

/// The skyline of all curves, lines between points included, or of the sticks.
pub(super) fn skyline(figure: &PatternFigure<'_>, panel: &Panel, seen: &[Seen<'_>]) -> Skyline {
    let mut skyline = Skyline::flat(panel);
    if figure.two_theta_deg.is_empty() {
        for seen in seen {
            let x = panel.x_px(seen.reflection.two_theta_deg);
            skyline.raise((x, x), panel.y_px(height_of(figure, seen.reflection.intensity)));
        }
        return skyline;
    }
    // No curve of a phase is above the sum, but a caller's sum may be wrong: all are looked at.
    for curve in std::iter::once(figure.counts).chain(figure.phases.iter().map(|phase| phase.counts)) {
        let inside = figure.two_theta_deg.iter().zip(curve).filter(|(x, _)| panel.shows_x(**x));
        let mut before: Option<(f64, f64)> = None;
        for (&x, &counts) in inside {
            let point = (panel.x_px(x), panel.y_px(height_of(figure, counts)));
            // A straight piece is nowhere above its higher end.
            let from = before.unwrap_or(point);
            skyline.raise((from.0, point.0), from.1.min(point.1));
            before = Some(point);
        }
    }
    skyline
}
