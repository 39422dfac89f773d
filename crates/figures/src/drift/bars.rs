//! The marks: a shape for the decision on two bars for the uncertainty.

use super::{DriftFigure, DriftPoint};
use crate::panel::Panel;
use crate::svg::{Pen, Scene, line_element, shape_element};

/// Width of the bar of ± u, px.
pub(super) const INNER: f64 = 3.0;
/// Width of the bar of ± k u, px.
pub(super) const OUTER: f64 = 1.0;

/// Draws the bars and the marks, one mark for each batch.
pub(super) fn draw(scene: &mut Scene, figure: &DriftFigure<'_>, panel: &Panel) {
    #[expect(clippy::cast_precision_loss, reason = "at most 400 batches")]
    let slot = (panel.right - panel.left) / figure.points.len() as f64;
    let radius = (0.55 * slot).clamp(2.0, 5.0);
    for (index, point) in figure.points.iter().enumerate() {
        #[expect(clippy::cast_precision_loss, reason = "at most 400 batches")]
        let x = panel.x_px(index as f64);
        let (shape, filled, ink) = point.decision.look();
        let bar = |reach: f64, width: f64| {
            let (low, high) = (panel.y_px(point.delta - reach), panel.y_px(point.delta + reach));
            let pen = Pen::new(ink, width);
            (line_element((x, low), (x, high), &pen), [low, high])
        };
        let expanded = point.coverage_factor * point.u;
        let (outer, ends) = bar(expanded, OUTER);
        let caps = ends.map(|y| line_element((x - 0.7 * radius, y), (x + 0.7 * radius, y), &Pen::new(ink, OUTER)));
        let inner = bar(point.u, INNER.min(0.45 * slot)).0;
        let shape = shape_element(shape, (x, panel.y_px(point.delta)), radius, ink, filled);
        scene.mark(&name(figure, point), &format!("{outer}{}{inner}{shape}", caps.concat()));
    }
}

/// What a mark says.
fn name(figure: &DriftFigure<'_>, point: &DriftPoint) -> String {
    let unit = figure.unit.symbol();
    let delta = values::Measured::new(point.delta, point.u);
    let expanded = point.coverage_factor * point.u;
    format!("{}: {delta} {unit}, expanded ± {expanded:.4} {unit}, {}", point.batch, point.decision.words())
}
