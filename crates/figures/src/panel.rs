//! Axes, grid and curves, drawn through plotters on a canvas of tenths of px.
//!
//! The library does coordinates and lines; text and marks are ours (`svg`), because without a font engine it guesses widths.
//! [`Panel`] is the one place that knows where a value lands, and a test holds the library to it.

use plotters::backend::SVGBackend;
use plotters::chart::{ChartBuilder, ChartContext};
use plotters::coord::cartesian::Cartesian2d;
use plotters::coord::types::RangedCoordf64;
use plotters::drawing::IntoDrawingArea;
use plotters::element::{EmptyElement, PathElement};
use plotters::series::LineSeries;
use plotters::style::{Color, RGBColor, ShapeStyle};

use crate::error::FigureError;
use crate::palette::{AXIS, GRID, SOFT, TEXT};
use crate::svg::{Anchor, Pen, Scene, Text, tenths};
use crate::ticks::Ticks;

/// Font size of axis numbers, px.
pub(crate) const TICK_SIZE: f64 = 12.0;
/// Font size of axis titles, px.
pub(crate) const AXIS_SIZE: f64 = 13.0;
/// Length of a major tick, px.
const MAJOR: f64 = 5.0;
/// Length of a minor tick, px.
const MINOR: f64 = 3.0;

/// A rectangle of the picture with linear coordinates.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Panel {
    /// Edges, px.
    pub left: f64,
    pub top: f64,
    pub right: f64,
    pub bottom: f64,
    /// Values at the left and right edge.
    pub x: (f64, f64),
    /// Values at the lower and upper edge.
    pub y: (f64, f64),
}

/// An edge of a panel.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Edge {
    Left,
    Bottom,
    Top,
}

impl Panel {
    /// px of a value on the horizontal axis.
    pub(crate) fn x_px(&self, value: f64) -> f64 {
        self.left + (value - self.x.0) / (self.x.1 - self.x.0) * (self.right - self.left)
    }

    /// px of a value on the vertical axis.
    pub(crate) fn y_px(&self, value: f64) -> f64 {
        self.bottom - (value - self.y.0) / (self.y.1 - self.y.0) * (self.bottom - self.top)
    }

    /// Whether a value lies on the horizontal axis.
    pub(crate) fn shows_x(&self, value: f64) -> bool {
        (self.x.0..=self.x.1).contains(&value)
    }

    /// Draws lines through points in axis coordinates.
    pub(crate) fn lines(&self, scene: &mut Scene, lines: &[Vec<(f64, f64)>], pen: &Pen<'_>) -> Result<(), FigureError> {
        let style = shape_style(pen);
        let elements = self.layer(scene, |chart| {
            for line in lines {
                chart.draw_series(LineSeries::new(line.iter().copied(), style)).map_err(internal)?;
            }
            Ok(())
        })?;
        scene.draw_lines(&elements, pen);
        Ok(())
    }

    /// Draws the frame.
    pub(crate) fn frame(&self, scene: &mut Scene) -> Result<(), FigureError> {
        let ((x0, x1), (y0, y1)) = (self.x, self.y);
        let around = vec![(x0, y0), (x1, y0), (x1, y1), (x0, y1), (x0, y0)];
        self.lines(scene, &[around], &Pen::new(AXIS, 1.0))
    }

    /// Draws light lines across the panel at the major ticks of an edge.
    pub(crate) fn grid(&self, scene: &mut Scene, edge: Edge, ticks: &Ticks) -> Result<(), FigureError> {
        let across = |&(at, _): &(f64, String)| match edge {
            Edge::Left => vec![(self.x.0, at), (self.x.1, at)],
            Edge::Bottom | Edge::Top => vec![(at, self.y.0), (at, self.y.1)],
        };
        let lines: Vec<_> = ticks.major.iter().map(across).collect();
        self.lines(scene, &lines, &Pen::new(GRID, 1.0))
    }

    /// Draws the ticks of an edge, outwards.
    pub(crate) fn ticks(&self, scene: &mut Scene, edge: Edge, ticks: &Ticks) -> Result<(), FigureError> {
        let pen = Pen::new(AXIS, 1.0);
        let style = shape_style(&pen);
        let majors = ticks.major.iter().map(|&(at, _)| (at, MAJOR));
        let all: Vec<_> = majors.chain(ticks.minor.iter().map(|&at| (at, MINOR))).collect();
        let elements = self.layer(scene, |chart| {
            let elements = all.iter().map(|&(at, length)| {
                let outwards = i32::try_from(tenths(length)).unwrap_or(0);
                let (point, end) = match edge {
                    Edge::Left => ((self.x.0, at), (-outwards, 0)),
                    Edge::Bottom => ((at, self.y.0), (0, outwards)),
                    Edge::Top => ((at, self.y.1), (0, -outwards)),
                };
                EmptyElement::at(point) + PathElement::new(vec![(0, 0), end], style)
            });
            chart.draw_series(elements).map_err(internal)?;
            Ok(())
        })?;
        scene.draw_lines(&elements, &pen);
        Ok(())
    }

    /// Writes the numbers of an edge.
    pub(crate) fn numbers(&self, scene: &mut Scene, edge: Edge, ticks: &Ticks) {
        for (at, label) in &ticks.major {
            let (point, anchor) = match edge {
                Edge::Left => ((self.left - MAJOR - 4.0, self.y_px(*at) + 0.35 * TICK_SIZE), Anchor::End),
                Edge::Bottom => ((self.x_px(*at), self.bottom + MAJOR + 1.1 * TICK_SIZE), Anchor::Middle),
                Edge::Top => ((self.x_px(*at), self.top - MAJOR - 4.0), Anchor::Middle),
            };
            scene.text(&Text::new(point, TICK_SIZE, label).anchor(anchor).ink(SOFT));
        }
    }

    /// Writes the title of an edge, `distance` px from it.
    pub(crate) fn title(&self, scene: &mut Scene, edge: Edge, title: &str, distance: f64) {
        let middle = (0.5 * (self.left + self.right), 0.5 * (self.top + self.bottom));
        let text = match edge {
            Edge::Left => Text::new((self.left - distance, middle.1), AXIS_SIZE, title).upright(),
            Edge::Bottom => Text::new((middle.0, self.bottom + distance), AXIS_SIZE, title),
            Edge::Top => Text::new((middle.0, self.top - distance), AXIS_SIZE, title),
        };
        scene.text(&text.anchor(Anchor::Middle).ink(TEXT));
    }

    /// Lets the library draw on a canvas of its own and returns the elements inside.
    fn layer(
        &self,
        scene: &Scene,
        draw: impl FnOnce(&mut Chart<'_, '_>) -> Result<(), FigureError>,
    ) -> Result<String, FigureError> {
        let whole = |px: f64| u32::try_from(tenths(px)).unwrap_or(0);
        let mut document = String::new();
        {
            let root = SVGBackend::with_string(&mut document, scene.canvas()).into_drawing_area();
            // One more than the distance of the edges: the library's last pixel is at size − 1.
            let size = (whole(self.right - self.left) + 1, whole(self.bottom - self.top) + 1);
            let area = root.clone().shrink((whole(self.left), whole(self.top)), size);
            let mut chart =
                ChartBuilder::on(&area).build_cartesian_2d(self.x.0..self.x.1, self.y.0..self.y.1).map_err(internal)?;
            draw(&mut chart)?;
            root.present().map_err(internal)?;
        }
        inner(&document)
    }
}

type Chart<'a, 'b> = ChartContext<'a, SVGBackend<'b>, Cartesian2d<RangedCoordf64, RangedCoordf64>>;

fn internal(error: impl std::fmt::Display) -> FigureError {
    FigureError::Internal(error.to_string())
}

fn shape_style(pen: &Pen<'_>) -> ShapeStyle {
    let [r, g, b] = pen.ink.light;
    RGBColor(r, g, b).stroke_width(u32::try_from(tenths(pen.width)).unwrap_or(10))
}

/// The elements inside a document of the library, without attributes that say nothing.
fn inner(document: &str) -> Result<String, FigureError> {
    let missing = || FigureError::Internal("the drawing library wrote no svg element".to_owned());
    let start = document.find(">\n").ok_or_else(missing)? + 2;
    let end = document.rfind("</svg>").ok_or_else(missing)?;
    let elements = document.get(start..end).ok_or_else(missing)?;
    Ok(elements.replace(" opacity=\"1\"", "").replace(" \"/>", "\"/>"))
}

#[cfg(test)]
mod tests {
    use super::*;

    const PANEL: Panel = Panel { left: 60.0, top: 20.0, right: 460.0, bottom: 220.0, x: (5.0, 90.0), y: (-3.0, 7.0) };

    #[test]
    fn the_library_puts_values_where_the_panel_says_within_a_tenth_of_a_px() {
        let points: Vec<(f64, f64)> =
            (0..=20).map(|i| (5.0 + 4.25 * f64::from(i), -3.0 + 0.5 * f64::from(i))).collect();
        let mut scene = Scene::new(500.0, 250.0);
        PANEL.lines(&mut scene, std::slice::from_ref(&points), &Pen::new(TEXT, 1.0)).expect("draws");
        let svg = scene.finish("t", "d");
        let document = roxmltree::Document::parse(&svg).expect("well-formed");
        let line = document.descendants().find(|node| node.has_tag_name("polyline")).expect("a line");
        let drawn: Vec<(f64, f64)> = line
            .attribute("points")
            .expect("points")
            .split_whitespace()
            .map(|pair| pair.split_once(',').map(|(x, y)| (x.parse().unwrap(), y.parse().unwrap())).expect("x,y"))
            .collect();
        assert_eq!(drawn.len(), points.len());
        for ((x, y), (value_x, value_y)) in drawn.iter().zip(&points) {
            assert!((x / 10.0 - PANEL.x_px(*value_x)).abs() <= 0.11, "{x} {}", PANEL.x_px(*value_x));
            assert!((y / 10.0 - PANEL.y_px(*value_y)).abs() <= 0.11, "{y} {}", PANEL.y_px(*value_y));
        }
    }

    #[test]
    fn ticks_point_outwards_from_their_edge() {
        let mut scene = Scene::new(500.0, 250.0);
        let ticks = Ticks { major: vec![(50.0, "50".to_owned())], minor: vec![] };
        PANEL.ticks(&mut scene, Edge::Bottom, &ticks).expect("draws");
        assert!(scene.finish("t", "d").contains(",2200 "), "the tick starts at the lower edge");
    }
}
