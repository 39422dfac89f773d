//! What all pictures share: heading, legend, captions, and their common sizes.

use crate::palette::{Ink, SOFT, Shape, TEXT};
use crate::svg::{Pen, Scene, Text, line_element, shape_element};
use crate::widths::{abbreviate, text_width, wrap};

/// Width of a picture, px.
pub(crate) const WIDTH: f64 = 960.0;
/// Distance of text from the left and right edge of the picture, px.
pub(crate) const MARGIN: f64 = 20.0;
/// Left edge of the panels, px: room for axis numbers and title.
pub(crate) const PANEL_LEFT: f64 = 92.0;
const TITLE_SIZE: f64 = 17.0;
const SUBTITLE_SIZE: f64 = 13.0;
const LEGEND_SIZE: f64 = 12.0;
const CAPTION_SIZE: f64 = 12.0;
const CAPTION_LEADING: f64 = 17.0;
const LEGEND_ROW: f64 = 20.0;
const SAMPLE: f64 = 34.0;
/// Widest name in a legend, px.
const NAME: f64 = 380.0;

/// Height of the heading, px.
pub(crate) fn heading_height(subtitle: &str) -> f64 {
    if subtitle.is_empty() { 44.0 } else { 64.0 }
}

/// Writes title and subtitle; what does not fit is cut with an ellipsis.
pub(crate) fn heading(scene: &mut Scene, title: &str, subtitle: &str) {
    let room = WIDTH - 2.0 * MARGIN;
    let title = abbreviate(title, TITLE_SIZE, true, room);
    scene.text(&Text::new((MARGIN, 32.0), TITLE_SIZE, &title).bold());
    let subtitle = abbreviate(subtitle, SUBTITLE_SIZE, false, room);
    if !subtitle.is_empty() {
        scene.text(&Text::new((MARGIN, 54.0), SUBTITLE_SIZE, &subtitle).ink(SOFT));
    }
}

/// One line of a legend: a sample and what it means.
#[derive(Clone, Debug)]
pub(crate) struct Entry<'a> {
    /// The line, when things are told apart by lines.
    pub line: Option<Pen<'a>>,
    /// The marker and whether it is filled.
    pub marker: Option<(Shape, bool, Ink)>,
    /// In words.
    pub text: String,
}

/// Places of the entries from left to right, in as many rows as needed: x and row of each, and the number of rows.
fn flow(entries: &[Entry<'_>]) -> (Vec<(f64, usize, String)>, usize) {
    let right = WIDTH - MARGIN;
    let (mut x, mut row) = (MARGIN, 0);
    let mut places = Vec::new();
    for entry in entries {
        let text = abbreviate(&entry.text, LEGEND_SIZE, false, NAME);
        let width = SAMPLE + text_width(&text, LEGEND_SIZE, false);
        if x > MARGIN && x + width > right {
            (x, row) = (MARGIN, row + 1);
        }
        places.push((x, row, text));
        x += width + 24.0;
    }
    (places, if entries.is_empty() { 0 } else { row + 1 })
}

/// Height of a legend, px.
pub(crate) fn legend_height(entries: &[Entry<'_>]) -> f64 {
    #[expect(clippy::cast_precision_loss, reason = "a number of rows is small")]
    let rows = flow(entries).1 as f64;
    rows * LEGEND_ROW + if entries.is_empty() { 0.0 } else { 6.0 }
}

/// Draws a legend below `top`.
pub(crate) fn legend(scene: &mut Scene, entries: &[Entry<'_>], top: f64) {
    for (entry, (x, row, text)) in entries.iter().zip(flow(entries).0) {
        #[expect(clippy::cast_precision_loss, reason = "a number of rows is small")]
        let y = top + LEGEND_ROW * (row as f64 + 0.5);
        if let Some(pen) = &entry.line {
            scene.draw(&line_element((x, y), (x + 28.0, y), pen));
        }
        if let Some((shape, filled, ink)) = entry.marker {
            scene.draw(&shape_element(shape, (x + 14.0, y), 4.2, ink, filled));
        }
        scene.text(&Text::new((x + SAMPLE, y + 0.35 * LEGEND_SIZE), LEGEND_SIZE, &text).ink(TEXT));
    }
}

/// Captions broken into lines.
pub(crate) fn caption_lines(captions: &[String]) -> Vec<String> {
    captions.iter().flat_map(|caption| wrap(caption, CAPTION_SIZE, WIDTH - 2.0 * MARGIN, 3)).collect()
}

/// Height of the captions, the space around them included, px.
pub(crate) fn captions_height(lines: &[String]) -> f64 {
    #[expect(clippy::cast_precision_loss, reason = "a number of lines is small")]
    let height = lines.len() as f64 * CAPTION_LEADING + 18.0;
    height
}

/// Writes the captions below `top`.
pub(crate) fn captions(scene: &mut Scene, lines: &[String], top: f64) {
    let mut y = top + CAPTION_LEADING;
    for line in lines {
        scene.text(&Text::new((MARGIN, y), CAPTION_SIZE, line).ink(SOFT));
        y += CAPTION_LEADING;
    }
}

/// A range that is never empty: a single value gets a margin around it.
pub(crate) fn widened((from, to): (f64, f64), margin: f64) -> (f64, f64) {
    // A range of a millionth of its values could not be told from rounding in tick arithmetic.
    if to - from > 1e-6 * from.abs().max(to.abs()) && to > from { (from, to) } else { (from - margin, to + margin) }
}

/// "1 line", "2 lines".
pub(crate) fn count(n: usize, one: &str, many: &str) -> String {
    if n == 1 { format!("1 {one}") } else { format!("{n} {many}") }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_long_legend_breaks_into_rows_inside_the_picture() {
        let entry =
            |i: usize| Entry { line: None, marker: None, text: format!("phase number {i} with quite a long name") };
        let entries: Vec<_> = (0..9).map(entry).collect();
        let (places, rows) = flow(&entries);
        assert!(rows >= 3);
        for (x, _, text) in places {
            assert!(x + SAMPLE + text_width(&text, LEGEND_SIZE, false) <= WIDTH - MARGIN);
        }
    }

    #[test]
    fn a_single_value_becomes_a_range() {
        assert_eq!(widened((3.0, 3.0), 0.5), (2.5, 3.5));
        assert_eq!(widened((3.0, 4.0), 0.5), (3.0, 4.0));
    }
}
