//! The lower panel: observed − calculated with ± u.

use super::{LineKind, ObservedLine};
use crate::error::FigureError;
use crate::palette::AXIS;
use crate::panel::Panel;
use crate::svg::{Pen, Scene, line_element, shape_element};

/// Least half height of the panel, degrees 2θ: what an ordinary goniometer resolves at best (common practice, no source).
const LEAST_REACH_DEG: f64 = 0.002;

/// Observed − calculated, degrees 2θ, of a line that is indexed.
fn difference_deg(line: &ObservedLine) -> Option<f64> {
    match line.kind {
        LineKind::Indexed { calculated_deg, .. } => Some(line.two_theta_deg - calculated_deg),
        _ => None,
    }
}

/// Half height of the panel, degrees 2θ: all bars fit.
pub(super) fn reach(lines: &[ObservedLine]) -> f64 {
    let ends = lines.iter().filter_map(|line| Some(difference_deg(line)?.abs() + line.u_deg.unwrap_or(0.0)));
    1.12 * ends.fold(LEAST_REACH_DEG, f64::max)
}

/// The line of no difference.
pub(super) fn zero_line(scene: &mut Scene, panel: &Panel) -> Result<(), FigureError> {
    panel.lines(scene, &[vec![(panel.x.0, 0.0), (panel.x.1, 0.0)]], &Pen::new(AXIS, 1.0))
}

/// Bar and point of a line; nothing for one without indices.
pub(super) fn element(line: &ObservedLine, panel: &Panel) -> String {
    let Some(difference) = difference_deg(line) else { return String::new() };
    let (shape, filled, ink, _) = line.kind.look();
    let (x, y) = (panel.x_px(line.two_theta_deg), panel.y_px(difference));
    let bar = line.u_deg.filter(|&u| u > 0.0).map_or(String::new(), |u| {
        let (low, high) = (panel.y_px(difference - u), panel.y_px(difference + u));
        let pen = Pen::new(ink, 1.2);
        let across = |y: f64| line_element((x - 3.0, y), (x + 3.0, y), &pen);
        format!("{}{}{}", line_element((x, low), (x, high), &pen), across(low), across(high))
    });
    format!("{bar}{}", shape_element(shape, (x, y), 3.2, ink, filled))
}
