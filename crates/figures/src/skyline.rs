//! How high the things of a panel reach, column by column.

use crate::panel::Panel;

/// The highest thing of a panel in each column of one px.
#[derive(Clone, Debug)]
pub(crate) struct Skyline {
    /// Smallest y of each column, px, from the left edge of the panel.
    columns: Vec<f64>,
    left: f64,
}

impl Skyline {
    /// Of an empty panel: its lower edge.
    pub(crate) fn flat(panel: &Panel) -> Self {
        #[expect(clippy::cast_possible_truncation, clippy::cast_sign_loss, reason = "a width of the picture")]
        let width = (panel.right - panel.left).ceil() as usize + 1;
        Self { columns: vec![panel.bottom; width], left: panel.left }
    }

    fn span(&self, (from, to): (f64, f64)) -> std::ops::RangeInclusive<usize> {
        #[expect(clippy::cast_precision_loss, reason = "a width of the picture")]
        let last = (self.columns.len() - 1) as f64;
        #[expect(clippy::cast_possible_truncation, clippy::cast_sign_loss, reason = "clamped to the columns")]
        let column = |px: f64| (px - self.left).floor().clamp(0.0, last) as usize;
        column(from.min(to))..=column(to.max(from))
    }

    /// Something reaches up to `y` between two px.
    pub(crate) fn raise(&mut self, between: (f64, f64), y: f64) {
        for column in self.span(between) {
            self.columns[column] = self.columns[column].min(y);
        }
    }

    /// Smallest y between two px.
    pub(crate) fn top(&self, from: f64, to: f64) -> f64 {
        self.columns[self.span((from, to))].iter().copied().fold(f64::INFINITY, f64::min)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_highest_of_several_things_counts_and_only_where_it_stands() {
        let panel = Panel { left: 10.0, top: 0.0, right: 110.0, bottom: 50.0, x: (0.0, 1.0), y: (0.0, 1.0) };
        let mut skyline = Skyline::flat(&panel);
        skyline.raise((20.0, 30.0), 25.0);
        skyline.raise((28.0, 28.0), 5.0);
        let close = |a: f64, b: f64| (a - b).abs() < 1e-12;
        assert!(close(skyline.top(15.0, 19.5), 50.0));
        assert!(close(skyline.top(15.0, 22.0), 25.0));
        assert!(close(skyline.top(0.0, 500.0), 5.0));
    }
}
