//! The SVG document: escaping, text, marks, and what makes a picture readable without seeing it.
//!
//! Lengths come in px and are written in tenths of px, the unit of the canvas (`viewBox` is ten times the size), so that
//! all coordinates are whole numbers. A document has two layers: the drawing, one image to a screen reader, and above it
//! the marks, a list whose items take the keyboard focus and say what they stand for. The root carries `title` and `desc`;
//! it is no image itself, because whatever is inside an image is hidden from assistive technology
//! (WAI-ARIA 1.2, "children presentational").

use std::fmt::Write;

use crate::palette::{Ink, PAPER, Shape, TEXT, style};
use crate::widths::FONT_FAMILY;

/// A length in px as a whole number of tenths.
pub(crate) fn tenths(px: f64) -> i64 {
    #[expect(clippy::cast_possible_truncation, reason = "lengths of a picture are small")]
    let tenths = (px * 10.0).round() as i64;
    tenths
}

/// Text as XML: markup escaped, characters that XML 1.0 does not allow replaced by U+FFFD.
pub(crate) fn escape(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&#39;"),
            '\t' | '\n' | '\r' => out.push(' '),
            '\0'..='\u{1f}' | '\u{fffe}' | '\u{ffff}' => out.push('\u{fffd}'),
            other => out.push(other),
        }
    }
    out
}

/// Where a text stands relative to its point.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Anchor {
    Start,
    Middle,
    End,
}

/// One line of text.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Text<'a> {
    /// Point on the baseline, px.
    pub at: (f64, f64),
    /// Font size, px.
    pub size: f64,
    pub anchor: Anchor,
    pub ink: Ink,
    pub bold: bool,
    /// Written from bottom to top.
    pub upright: bool,
    pub content: &'a str,
}

impl<'a> Text<'a> {
    /// Horizontal text of normal weight that starts at a point.
    pub(crate) fn new(at: (f64, f64), size: f64, content: &'a str) -> Self {
        Self { at, size, anchor: Anchor::Start, ink: TEXT, bold: false, upright: false, content }
    }

    pub(crate) fn anchor(self, anchor: Anchor) -> Self {
        Self { anchor, ..self }
    }

    pub(crate) fn ink(self, ink: Ink) -> Self {
        Self { ink, ..self }
    }

    pub(crate) fn bold(self) -> Self {
        Self { bold: true, ..self }
    }

    pub(crate) fn upright(self) -> Self {
        Self { upright: true, ..self }
    }
}

/// How a line or shape is drawn.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Pen<'a> {
    pub ink: Ink,
    /// px.
    pub width: f64,
    /// Lengths of dashes and gaps, px; empty for a full line.
    pub dash: &'a [f64],
}

impl Pen<'_> {
    pub(crate) fn new(ink: Ink, width: f64) -> Self {
        Self { ink, width, dash: &[] }
    }
}

/// `stroke-dasharray` in canvas units.
pub(crate) fn dash_attribute(dash: &[f64]) -> String {
    if dash.is_empty() {
        return String::new();
    }
    let lengths: Vec<String> = dash.iter().map(|&px| tenths(px).to_string()).collect();
    format!(" stroke-dasharray=\"{}\"", lengths.join(" "))
}

/// Attributes of a stroked path.
fn stroke(pen: &Pen<'_>) -> String {
    format!(
        "class=\"{}\" fill=\"none\" stroke=\"{}\" stroke-width=\"{}\"{}",
        pen.ink.stroke_class,
        pen.ink.hex(),
        tenths(pen.width),
        dash_attribute(pen.dash)
    )
}

/// A shape as an element: filled, or open with the ground inside.
pub(crate) fn shape_element(shape: Shape, at: (f64, f64), r: f64, ink: Ink, filled: bool) -> String {
    let path = shape.path(at, r);
    let hex = ink.hex();
    let fill = if !shape.closed() {
        "fill=\"none\"".to_owned()
    } else if filled {
        format!("fill=\"{hex}\"")
    } else {
        format!("fill=\"{}\"", PAPER.hex())
    };
    let fill_class = if filled { ink.fill_class } else { PAPER.fill_class };
    // "none" must stay none on a dark screen too, so shapes without an inside have no fill class.
    let classes =
        if shape.closed() { format!("{fill_class} {}", ink.stroke_class) } else { ink.stroke_class.to_owned() };
    format!("<path class=\"{classes}\" d=\"{path}\" {fill} stroke=\"{hex}\" stroke-width=\"14\"/>")
}

/// A straight line as an element.
pub(crate) fn line_element(from: (f64, f64), to: (f64, f64), pen: &Pen<'_>) -> String {
    path_element(&format!("M{} {}L{} {}", tenths(from.0), tenths(from.1), tenths(to.0), tenths(to.1)), pen)
}

/// A stroked path as an element; the data is in canvas units.
pub(crate) fn path_element(data: &str, pen: &Pen<'_>) -> String {
    format!("<path {} d=\"{data}\"/>", stroke(pen))
}

/// A picture in the making.
#[derive(Debug)]
pub(crate) struct Scene {
    width: f64,
    height: f64,
    drawing: String,
    marks: String,
}

impl Scene {
    /// An empty picture of a size in px.
    pub(crate) fn new(width: f64, height: f64) -> Self {
        Self { width, height, drawing: String::new(), marks: String::new() }
    }

    /// Size of the canvas in tenths of px.
    pub(crate) fn canvas(&self) -> (u32, u32) {
        let side = |px: f64| u32::try_from(tenths(px)).unwrap_or(u32::MAX);
        (side(self.width), side(self.height))
    }

    /// Adds an element to the drawing.
    pub(crate) fn draw(&mut self, element: &str) {
        self.drawing.push_str(element);
        self.drawing.push('\n');
    }

    /// Adds elements of the drawing library, recoloured on a dark screen by the class of `pen` and dashed by it.
    pub(crate) fn draw_lines(&mut self, elements: &str, pen: &Pen<'_>) {
        let _ = write!(
            self.drawing,
            "<g class=\"{}\" stroke-linejoin=\"round\"{}>\n{elements}</g>\n",
            pen.ink.stroke_class,
            dash_attribute(pen.dash)
        );
    }

    /// Adds a filled rectangle.
    pub(crate) fn fill(&mut self, (left, top): (f64, f64), (right, bottom): (f64, f64), ink: Ink) {
        let [x, y, w, h] = [left, top, right - left, bottom - top].map(tenths);
        let (class, hex) = (ink.fill_class, ink.hex());
        self.draw(&format!(
            "<rect class=\"{class}\" x=\"{x}\" y=\"{y}\" width=\"{w}\" height=\"{h}\" fill=\"{hex}\"/>"
        ));
    }

    /// Adds a line of text.
    pub(crate) fn text(&mut self, text: &Text<'_>) {
        self.text_markup(text, &escape(text.content));
    }

    /// Adds a line of text whose content is given as escaped markup.
    pub(crate) fn text_markup(&mut self, text: &Text<'_>, markup: &str) {
        let (x, y) = (tenths(text.at.0), tenths(text.at.1));
        let anchor = match text.anchor {
            Anchor::Start => "",
            Anchor::Middle => " text-anchor=\"middle\"",
            Anchor::End => " text-anchor=\"end\"",
        };
        let place = if text.upright {
            format!("transform=\"translate({x} {y})rotate(-90)\"")
        } else {
            format!("x=\"{x}\" y=\"{y}\"")
        };
        let weight = if text.bold { " font-weight=\"bold\"" } else { "" };
        let (class, hex, size) = (text.ink.fill_class, text.ink.hex(), tenths(text.size));
        self.draw(&format!(
            "<text class=\"{class}\" {place} font-size=\"{size}\"{weight}{anchor} fill=\"{hex}\">{markup}</text>"
        ));
    }

    /// Adds a mark: elements with a name that shows as a tooltip and is read out on focus.
    pub(crate) fn mark(&mut self, name: &str, elements: &str) {
        let _ = writeln!(
            self.marks,
            "<g class=\"lw-mark\" role=\"listitem\" tabindex=\"0\"><title>{}</title>{elements}</g>",
            escape(name)
        );
    }

    /// The finished document. `title` and `description` say in words what the picture shows.
    pub(crate) fn finish(self, title: &str, description: &str) -> String {
        let (width, height) = self.canvas();
        let (title, description) = (escape(title), escape(description));
        let marks = if self.marks.is_empty() {
            String::new()
        } else {
            format!("<g role=\"list\" aria-label=\"Marks of {title}\">\n{}</g>\n", self.marks)
        };
        format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" role=\"group\" aria-roledescription=\"chart\" \
             width=\"{}\" height=\"{}\" viewBox=\"0 0 {width} {height}\" font-family=\"{FONT_FAMILY}\">\n\
             <title>{title}</title>\n<desc>{description}</desc>\n<style>{}</style>\n\
             <rect class=\"{}\" width=\"{width}\" height=\"{height}\" fill=\"{}\"/>\n\
             <g role=\"img\" aria-label=\"{title}\">\n{}</g>\n{marks}</svg>\n",
            self.width,
            self.height,
            style(),
            PAPER.fill_class,
            PAPER.hex(),
            self.drawing
        )
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn markup_and_forbidden_characters_in_a_text_do_no_harm() {
        assert_eq!(escape("<script>\"&'\u{1}\n"), "&lt;script&gt;&quot;&amp;&#39;\u{fffd} ");
    }

    #[test]
    fn a_document_names_itself_and_its_marks() {
        let mut scene = Scene::new(100.0, 50.0);
        scene.text(&Text::new((1.0, 2.0), 12.0, "a < b"));
        scene.mark("hkl 1 1 1 & more", &shape_element(Shape::Circle, (5.0, 5.0), 2.0, TEXT, true));
        let svg = scene.finish("A <title>", "What it shows");
        let document = roxmltree::Document::parse(&svg).expect("well-formed");
        let root = document.root_element();
        let child = |name: &str| root.children().find(|node| node.has_tag_name(name)).and_then(|node| node.text());
        assert_eq!(child("title"), Some("A <title>"));
        assert_eq!(child("desc"), Some("What it shows"));
        assert_eq!(root.attribute("viewBox"), Some("0 0 1000 500"));
        let mark = document.descendants().find(|node| node.attribute("tabindex").is_some()).expect("a mark");
        assert_eq!(mark.first_element_child().and_then(|title| title.text()), Some("hkl 1 1 1 & more"));
    }
}
