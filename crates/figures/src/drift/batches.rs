//! The names of the batches below the chart: level where they fit, upright where not, every n-th where even that is tight.

use super::DriftPoint;
use crate::palette::SOFT;
use crate::panel::Panel;
use crate::svg::{Anchor, Scene, Text};
use crate::widths::{ASCENT, DESCENT, abbreviate, text_width};

/// Font size, px.
const SIZE: f64 = 12.0;
/// Longest upright name, px.
const LONGEST: f64 = 110.0;
/// Distance between the axis and a name, px.
const OFF: f64 = 7.0;

/// Names with their places.
#[derive(Clone, Debug)]
pub(super) struct Names {
    /// One name is written for so many batches.
    pub every: usize,
    upright: bool,
    names: Vec<(usize, String)>,
}

/// Chooses how the names are written.
pub(super) fn arrange(points: &[DriftPoint], panel: &Panel) -> Names {
    #[expect(clippy::cast_precision_loss, reason = "at most 400 batches")]
    let slot = (panel.right - panel.left) / points.len().max(1) as f64;
    let widest = points.iter().map(|point| text_width(&point.batch, SIZE, false)).fold(0.0, f64::max);
    let line = SIZE * (ASCENT + DESCENT);
    // A level name longer than two thirds of the upright limit is a sentence; cut it when it has to stand in its slot.
    let level = widest <= slot - 8.0 || (points.len() <= 3 && slot > 2.0 * LONGEST);
    #[expect(clippy::cast_possible_truncation, clippy::cast_sign_loss, reason = "at most a few dozen")]
    let every = if level { 1 } else { (line / slot).ceil().max(1.0) as usize };
    let room = if level { slot - 8.0 } else { LONGEST };
    let named = points.iter().enumerate().step_by(every);
    let names = named.map(|(index, point)| (index, abbreviate(&point.batch, SIZE, false, room))).collect();
    Names { every, upright: !level, names }
}

impl Names {
    /// Height that the names need below the chart, px.
    pub(super) fn height(&self) -> f64 {
        if !self.upright {
            return OFF + SIZE;
        }
        let longest = self.names.iter().map(|(_, name)| text_width(name, SIZE, false)).fold(0.0, f64::max);
        OFF + longest
    }

    /// Writes the names.
    pub(super) fn draw(&self, scene: &mut Scene, panel: &Panel) {
        for (index, name) in &self.names {
            #[expect(clippy::cast_precision_loss, reason = "at most 400 batches")]
            let x = panel.x_px(*index as f64);
            let text = if self.upright {
                Text::new((x + 0.35 * SIZE, panel.bottom + OFF), SIZE, name).anchor(Anchor::End).upright()
            } else {
                Text::new((x, panel.bottom + OFF + 0.8 * SIZE), SIZE, name).anchor(Anchor::Middle)
            };
            scene.text(&text.ink(SOFT));
        }
    }
}
