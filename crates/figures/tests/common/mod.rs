//! What must hold for every picture, whatever it shows: asserted before a test looks at its own numbers.
#![allow(dead_code, reason = "each test binary uses a part")]

use roxmltree::{Document, Node};

/// Limit of the size of a picture, bytes.
pub const MAX_BYTES: usize = 1_000_000;

/// Asserts what holds for every picture: well-formed, sized, named, no CR, no number that is none, no script, whole text
/// inside the canvas, every mark named and reachable by keyboard.
pub fn assert_picture(svg: &str) {
    assert!(svg.len() < MAX_BYTES, "{} bytes", svg.len());
    assert!(svg.ends_with("</svg>\n") && !svg.contains('\r'));
    let document = Document::parse(svg).expect("well-formed XML");
    let root = document.root_element();
    assert!(root.has_tag_name(("http://www.w3.org/2000/svg", "svg")));
    let (width, height) = canvas(&document);
    let size = |name: &str| root.attribute(name).and_then(|text| text.parse::<f64>().ok()).expect("a size");
    assert!((10.0 * size("width") - width).abs() <= 1.0 && (10.0 * size("height") - height).abs() <= 1.0);
    for name in ["title", "desc"] {
        let child = root.children().find(|node| node.has_tag_name(name)).and_then(|node| node.text());
        assert!(child.is_some_and(|text| !text.trim().is_empty()), "no {name}");
    }
    assert!(document.descendants().any(|node| node.attribute("role") == Some("img")));
    for node in document.descendants().filter(Node::is_element) {
        assert!(!["script", "foreignObject", "image"].contains(&node.tag_name().name()));
        for attribute in node.attributes() {
            let text = attribute.value();
            let data = ["d", "points", "x", "y", "width", "height", "transform"].contains(&attribute.name());
            assert!(!data || !(text.contains("NaN") || text.contains("inf")), "{node:?}");
        }
        if node.attribute("tabindex").is_some() {
            let title = node.first_element_child().filter(|child| child.has_tag_name("title"));
            assert!(title.and_then(|title| title.text()).is_some_and(|text| !text.is_empty()), "a mark without a name");
        }
    }
    for text in texts(&document) {
        let inside = text.left >= -1.0 && text.right <= width + 1.0 && text.top >= -1.0 && text.bottom <= height + 1.0;
        assert!(inside, "{text:?} leaves {width} × {height}");
    }
}

/// Width and height of the canvas.
pub fn canvas(document: &Document<'_>) -> (f64, f64) {
    let view = document.root_element().attribute("viewBox").expect("a viewBox");
    let numbers: Vec<f64> = view.split(' ').map(|text| text.parse().expect("a number")).collect();
    (numbers[2], numbers[3])
}

/// The box that a text fills, in canvas units.
#[derive(Clone, Debug)]
pub struct TextBox {
    pub left: f64,
    pub top: f64,
    pub right: f64,
    pub bottom: f64,
    pub upright: bool,
    pub size: f64,
    pub content: String,
}

impl TextBox {
    pub fn overlaps(&self, other: &Self) -> bool {
        self.left < other.right && other.left < self.right && self.top < other.bottom && other.top < self.bottom
    }
}

/// All texts of a picture with their boxes.
///
/// The widths are not those of the crate: each character is as wide as in DejaVu Sans, the widest font of the list that a
/// picture asks for but for a few characters (advance widths read with fontTools from version 2.37).
pub fn texts(document: &Document<'_>) -> Vec<TextBox> {
    document.descendants().filter(|node| node.has_tag_name("text")).map(|node| text_box(&node)).collect()
}

fn text_box(node: &Node<'_, '_>) -> TextBox {
    let content: String = node.descendants().filter(Node::is_text).filter_map(|text| text.text()).collect();
    let size: f64 = node.attribute("font-size").and_then(|text| text.parse().ok()).expect("a font size");
    let bold = node.attribute("font-weight").is_some();
    let width = content.chars().map(|c| dejavu_em(c, bold)).sum::<f64>() * size;
    let start = match node.attribute("text-anchor") {
        None => 0.0,
        Some("middle") => -0.5 * width,
        Some(_) => -width,
    };
    let (ascent, descent) = (0.8 * size, 0.22 * size);
    let number = |text: Option<&str>| text.and_then(|text| text.parse::<f64>().ok()).expect("a coordinate");
    if let Some(transform) = node.attribute("transform") {
        let inner = transform.strip_prefix("translate(").and_then(|rest| rest.strip_suffix(")rotate(-90)"));
        let (x, y) = inner.and_then(|inner| inner.split_once(' ')).expect("an upright text");
        let (x, y) = (number(Some(x)), number(Some(y)));
        let (top, bottom) = (y - start - width, y - start);
        return TextBox { left: x - ascent, right: x + descent, top, bottom, upright: true, size, content };
    }
    let (x, y) = (number(node.attribute("x")), number(node.attribute("y")));
    let (left, right) = (x + start, x + start + width);
    TextBox { left, right, top: y - ascent, bottom: y + descent, upright: false, size, content }
}

/// U+0020 to U+007E in DejaVu Sans, regular and bold, 2048 units per em.
const DEJAVU: [[u16; 95]; 2] = [
    [
        651, 821, 942, 1716, 1303, 1946, 1597, 563, 799, 799, 1024, 1716, 651, 739, 651, 690, 1303, 1303, 1303, 1303,
        1303, 1303, 1303, 1303, 1303, 1303, 690, 690, 1716, 1716, 1716, 1087, 2048, 1401, 1405, 1430, 1577, 1294, 1178,
        1587, 1540, 604, 604, 1343, 1141, 1767, 1532, 1612, 1235, 1612, 1423, 1300, 1251, 1499, 1401, 2025, 1403, 1251,
        1403, 799, 690, 799, 1716, 1024, 1024, 1255, 1300, 1126, 1300, 1260, 721, 1300, 1298, 569, 569, 1186, 569,
        1995, 1298, 1253, 1300, 1300, 842, 1067, 803, 1298, 1212, 1675, 1212, 1212, 1075, 1303, 690, 1303, 1716,
    ],
    [
        713, 934, 1067, 1716, 1425, 2052, 1786, 627, 936, 936, 1071, 1716, 778, 850, 778, 748, 1425, 1425, 1425, 1425,
        1425, 1425, 1425, 1425, 1425, 1425, 819, 819, 1716, 1716, 1716, 1188, 2048, 1585, 1561, 1503, 1700, 1399, 1399,
        1681, 1714, 762, 762, 1587, 1305, 2038, 1714, 1741, 1501, 1741, 1577, 1475, 1397, 1663, 1585, 2259, 1579, 1483,
        1485, 936, 748, 936, 1716, 1024, 1024, 1382, 1466, 1214, 1466, 1389, 891, 1466, 1458, 702, 702, 1362, 702,
        2134, 1458, 1407, 1466, 1466, 1010, 1219, 979, 1458, 1335, 1892, 1321, 1335, 1192, 1458, 748, 1458, 1716,
    ],
];

fn dejavu_em(c: char, bold: bool) -> f64 {
    if let Some(index) = (c as usize).checked_sub(0x20).filter(|&index| index < 95) {
        return f64::from(DEJAVU[usize::from(bold)][index]) / 2048.0;
    }
    match c {
        '\u{a0}' => 0.3179,
        '−' | '±' => 0.8379,
        '…' => 1.0,
        // Ideographs are one em in every font; DejaVu has none and draws a box as wide as a digit, or less.
        c if (c as u32) >= 0x2e80 => 1.0,
        _ => 0.6,
    }
}

/// The frames of the panels: closed rectangles of five corners that the drawing library writes. Left, top, right, bottom.
pub fn frames(document: &Document<'_>) -> Vec<[f64; 4]> {
    let corners = |node: Node<'_, '_>| -> Option<[f64; 4]> {
        let points: Vec<(i32, i32)> = node
            .attribute("points")?
            .split_whitespace()
            .filter_map(|pair| pair.split_once(','))
            .filter_map(|(x, y)| Some((x.parse().ok()?, y.parse().ok()?)))
            .collect();
        let [a, b, c, d, e] = points[..] else { return None };
        let rectangle = a == e && a.1 == b.1 && b.0 == c.0 && c.1 == d.1 && d.0 == a.0;
        rectangle.then_some([a.0, c.1, b.0, a.1].map(f64::from))
    };
    document.descendants().filter(|node| node.has_tag_name("polyline")).filter_map(corners).collect()
}

/// Asserts that the hkl labels (upright, font size 11 px) overlap nothing upright and stay in the first frame.
pub fn assert_labels_apart(svg: &str) -> usize {
    let document = Document::parse(svg).expect("well-formed XML");
    let frame = frames(&document)[0];
    let labels: Vec<TextBox> =
        texts(&document).into_iter().filter(|text| text.upright && (text.size - 110.0).abs() < 0.5).collect();
    for (index, label) in labels.iter().enumerate() {
        let [left, top, right, bottom] = frame;
        let inside = label.left >= left && label.right <= right && label.top >= top && label.bottom <= bottom;
        assert!(inside, "{label:?} leaves {frame:?}");
        for other in &labels[..index] {
            assert!(!label.overlaps(other), "{label:?} overlaps {other:?}");
        }
    }
    labels.len()
}
