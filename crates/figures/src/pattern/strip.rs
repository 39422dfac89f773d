//! The rows of tick marks below the curve, one row for each phase.

use std::collections::BTreeSet;

use super::curves::column_px;
use super::{Look, PatternFigure, ROW, ReflectionMark, look};
use crate::panel::Panel;
use crate::svg::{Pen, Scene, path_element, shape_element, tenths};

/// Most marks that take the keyboard focus: the strongest. The others are drawn, as one line of the drawing for each
/// phase (own choice: nobody steps through thousands, and the file stays small).
pub(super) const MAX_MARKS: usize = 300;

/// A reflection within the range.
#[derive(Clone, Copy, Debug)]
pub(super) struct Seen<'a> {
    pub phase: usize,
    pub reflection: &'a ReflectionMark,
}

/// The reflections within a range, strongest first; equals by angle, then in order of the phases.
pub(super) fn in_range<'a>(figure: &PatternFigure<'a>, (from, to): (f64, f64)) -> Vec<Seen<'a>> {
    let mut seen: Vec<Seen<'a>> = figure
        .phases
        .iter()
        .enumerate()
        .flat_map(|(phase, curve)| curve.reflections.iter().map(move |reflection| Seen { phase, reflection }))
        .filter(|seen| (from..=to).contains(&seen.reflection.two_theta_deg))
        .collect();
    seen.sort_by(|a, b| {
        b.reflection
            .intensity
            .total_cmp(&a.reflection.intensity)
            .then(a.reflection.two_theta_deg.total_cmp(&b.reflection.two_theta_deg))
    });
    seen
}

/// Draws the rows; the strongest reflections become marks with a name.
pub(super) fn draw(scene: &mut Scene, figure: &PatternFigure<'_>, strip: &Panel, seen: &[Seen<'_>]) {
    let (marks, plain) = seen.split_at(seen.len().min(MAX_MARKS));
    let column = column_px(figure.phases.len());
    for phase in 0..figure.phases.len() {
        let Look { ink, shape, .. } = look(phase, figure.phases.len());
        let middle = middle(strip, phase);
        scene.draw(&shape_element(shape, (strip.left - 14.0, middle), 4.2, ink, true));
        let mut taken = BTreeSet::new();
        let data: String = plain
            .iter()
            .filter(|seen| seen.phase == phase)
            .map(|seen| strip.x_px(seen.reflection.two_theta_deg))
            .filter(|x| taken.insert(tenths(x / column / 10.0)))
            .map(|x| tick(x, middle))
            .collect();
        if !data.is_empty() {
            scene.draw(&path_element(&data, &Pen::new(ink, 1.1)));
        }
    }
    // From left to right within a phase, so that the focus walks along the axis.
    let mut marks: Vec<&Seen<'_>> = marks.iter().collect();
    marks.sort_by(|a, b| a.phase.cmp(&b.phase).then(a.reflection.two_theta_deg.total_cmp(&b.reflection.two_theta_deg)));
    for seen in marks {
        let Look { ink, .. } = look(seen.phase, figure.phases.len());
        let data = tick(strip.x_px(seen.reflection.two_theta_deg), middle(strip, seen.phase));
        // A second, wide and unseen stroke gives the pointer something to meet.
        let reach = format!("<path d=\"{data}\" stroke=\"#000\" stroke-opacity=\"0\" stroke-width=\"50\"/>");
        scene.mark(&name(figure, seen), &format!("{}{reach}", path_element(&data, &Pen::new(ink, 1.3))));
    }
}

/// What a mark says.
fn name(figure: &PatternFigure<'_>, seen: &Seen<'_>) -> String {
    let ReflectionMark { two_theta_deg, d_angstrom, intensity, hkl } = seen.reflection;
    let phase: String = figure.phases[seen.phase].name.chars().take(60).collect();
    let hkl: String = hkl.chars().take(40).collect();
    format!("{phase}: hkl {hkl}, 2θ {two_theta_deg:.4}°, d {d_angstrom:.5} Å, intensity {}", rounded(*intensity))
}

/// An intensity in at most five digits.
fn rounded(intensity: f64) -> String {
    if intensity >= 1e4 || (intensity > 0.0 && intensity < 1e-3) {
        format!("{intensity:.3e}")
    } else {
        format!("{intensity:.4}").trim_end_matches('0').trim_end_matches('.').to_owned()
    }
}

fn middle(strip: &Panel, phase: usize) -> f64 {
    #[expect(clippy::cast_precision_loss, reason = "at most 24 phases")]
    let row = phase as f64 + 0.5;
    strip.top + 4.0 + row * ROW
}

fn tick(x: f64, middle: f64) -> String {
    format!("M{} {}v110", tenths(x), tenths(middle - 5.5))
}
