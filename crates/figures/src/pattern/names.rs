//! The hkl labels above the curve.

use super::curves::skyline;
use super::strip::Seen;
use super::{Look, PatternFigure, look};
use crate::hkl::{Written, written};
use crate::labels::{Place, Rect, Wish, place};
use crate::palette::{SOFT, TEXT};
use crate::panel::Panel;
use crate::svg::{Pen, Scene, Text, path_element, shape_element};
use crate::widths::{ASCENT, DESCENT, text_width};

/// Font size, px.
const SIZE: f64 = 11.0;
/// Room for the marker of the phase below a label, px.
const MARKER: f64 = 12.0;
/// Reflections of one phase closer than this share a label, degrees 2θ: the lattice puts them at one place.
const COINCIDENT_DEG: f64 = 1e-5;

/// A label in its place.
#[derive(Clone, Debug)]
struct Label {
    written: Written,
    phase: usize,
    /// How many it stands for.
    reflections: usize,
    place: Place,
}

/// All labels that found a place.
#[derive(Clone, Debug)]
pub(super) struct Arranged {
    labels: Vec<Label>,
    /// Number of phases of the picture.
    phases: usize,
}

impl Arranged {
    /// How many reflections the labels stand for.
    pub(super) fn named(&self) -> usize {
        self.labels.iter().map(|label| label.reflections).sum()
    }

    /// Whether a label names one reflection and counts others at its place.
    pub(super) fn some_are_counted(&self) -> bool {
        self.labels.iter().any(|label| label.reflections > 2)
    }
}

/// Reflections at one place, named together.
struct Group<'a> {
    phase: usize,
    two_theta_deg: f64,
    intensity: f64,
    hkl: Vec<&'a str>,
}

/// Finds places for the labels of the strongest reflections.
pub(super) fn arrange(figure: &PatternFigure<'_>, panel: &Panel, seen: &[Seen<'_>]) -> Arranged {
    let groups = groups(seen);
    let texts: Vec<Written> = groups.iter().map(|group| written(&joined(&group.hkl))).collect();
    let skyline = skyline(figure, panel, seen);
    let wishes: Vec<Wish> = groups
        .iter()
        .zip(&texts)
        .map(|(group, text)| (panel.x_px(group.two_theta_deg), text))
        .map(|(x, text)| Wish {
            x,
            y: skyline.top(x, x),
            width: SIZE * (ASCENT + DESCENT),
            height: height(text, figure.phases.len()),
        })
        .collect();
    let frame = Rect { left: panel.left, top: panel.top, right: panel.right, bottom: panel.bottom };
    let places = place(&frame, &wishes, |from, to| skyline.top(from, to));
    let found = groups.iter().zip(texts).zip(places).filter_map(|(named, place)| place.map(|place| (named, place)));
    let labels = found
        .take(figure.max_labels)
        .map(|((group, written), place)| Label { written, phase: group.phase, reflections: group.hkl.len(), place })
        .collect();
    Arranged { labels, phases: figure.phases.len() }
}

/// Length of a label along its direction, px; with several phases a marker is at its foot.
fn height(text: &Written, phases: usize) -> f64 {
    text_width(&text.visible, SIZE, false) + if phases > 1 { MARKER } else { 0.0 }
}

/// Room that the labels of the strongest reflections want above the highest point, px.
pub(super) fn tallest(figure: &PatternFigure<'_>, seen: &[Seen<'_>]) -> f64 {
    let strongest = groups(seen).into_iter().take(12);
    let heights = strongest.map(|group| height(&written(&joined(&group.hkl)), figure.phases.len()));
    heights.fold(0.0, f64::max) + 22.0
}

/// Reflections that coincide, gathered; strongest group first.
fn groups<'a>(seen: &[Seen<'a>]) -> Vec<Group<'a>> {
    let mut by_angle: Vec<&Seen<'a>> = seen.iter().collect();
    by_angle
        .sort_by(|a, b| a.phase.cmp(&b.phase).then(a.reflection.two_theta_deg.total_cmp(&b.reflection.two_theta_deg)));
    let mut groups: Vec<Group<'a>> = Vec::new();
    for seen in by_angle {
        let r = seen.reflection;
        match groups.last_mut() {
            Some(last) if last.phase == seen.phase && r.two_theta_deg - last.two_theta_deg < COINCIDENT_DEG => {
                last.hkl.push(&r.hkl);
                last.intensity += r.intensity;
            }
            _ => groups.push(Group {
                phase: seen.phase,
                two_theta_deg: r.two_theta_deg,
                intensity: r.intensity,
                hkl: vec![&r.hkl],
            }),
        }
    }
    groups.sort_by(|a, b| b.intensity.total_cmp(&a.intensity));
    groups
}

/// One or two names; more are counted.
fn joined(hkl: &[&str]) -> String {
    match hkl {
        [] => String::new(),
        [one] => (*one).to_owned(),
        [one, two] => format!("{one}, {two}"),
        [one, rest @ ..] => format!("{one} +{}", rest.len()),
    }
}

/// Draws the labels, each with a leader where it stands aside.
pub(super) fn draw(scene: &mut Scene, arranged: &Arranged) {
    for label in &arranged.labels {
        let Look { ink, shape, .. } = look(label.phase, arranged.phases);
        let rect = label.place.rect;
        let middle = 0.5 * (rect.left + rect.right);
        if let Some(line) = label.place.leader_line() {
            scene.draw(&path_element(&line, &Pen::new(SOFT, 0.7)));
        }
        let mut start = rect.bottom;
        if arranged.phases > 1 {
            scene.draw(&shape_element(shape, (middle, rect.bottom - 4.5), 3.2, ink, true));
            start -= MARKER;
        }
        // The text runs upwards; its capitals reach from the baseline to the left.
        let baseline = (rect.left + SIZE * ASCENT, start);
        scene.text_markup(&Text::new(baseline, SIZE, "").ink(TEXT).upright(), &label.written.markup);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_of_coincident_reflections_are_joined_and_then_counted() {
        assert_eq!(joined(&["5 1 1", "3 3 3"]), "5 1 1, 3 3 3");
        assert_eq!(joined(&["a", "b", "c"]), "a +2");
    }
}
