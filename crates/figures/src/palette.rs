//! Colours, dash patterns and marker shapes. What a colour says, a shape or a dash says too.
//!
//! Each colour has a light and a dark form: the light one is written into the marks, the dark one into a style sheet that
//! applies on a dark screen only, so that paper and old viewers get the light one. [`style`] writes that sheet.

/// A colour of the picture, as a class of the style sheet.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Ink {
    /// Class of strokes in this colour.
    pub stroke_class: &'static str,
    /// Class of fills in this colour.
    pub fill_class: &'static str,
    /// Red, green, blue on light paper.
    pub light: [u8; 3],
    /// Red, green, blue on dark paper.
    pub dark: [u8; 3],
}

const fn ink(stroke_class: &'static str, fill_class: &'static str, light: u32, dark: u32) -> Ink {
    Ink { stroke_class, fill_class, light: rgb(light), dark: rgb(dark) }
}

#[expect(clippy::cast_possible_truncation, reason = "each is one byte of the number")]
const fn rgb(hex: u32) -> [u8; 3] {
    [(hex >> 16) as u8, (hex >> 8) as u8, hex as u8]
}

impl Ink {
    /// The light form as SVG writes it.
    pub(crate) fn hex(self) -> String {
        hex(self.light)
    }
}

fn hex([r, g, b]: [u8; 3]) -> String {
    format!("#{r:02x}{g:02x}{b:02x}")
}

/// The ground.
pub(crate) const PAPER: Ink = ink("lw-sp", "lw-fp", 0x00ff_ffff, 0x0015_181d);
/// Titles, axis numbers, the sum curve.
pub(crate) const TEXT: Ink = ink("lw-st", "lw-ft", 0x001d_2229, 0x00e8_eaed);
/// Captions and secondary text.
pub(crate) const SOFT: Ink = ink("lw-ss", "lw-fs", 0x0056_5e69, 0x00a9_b1bb);
/// Axes and ticks.
pub(crate) const AXIS: Ink = ink("lw-sa", "lw-fa", 0x005a_626c, 0x008d_96a0);
/// Grid lines.
pub(crate) const GRID: Ink = ink("lw-sg", "lw-fg", 0x00e6_e9ed, 0x002b_3139);
/// A band behind the data.
pub(crate) const BAND: Ink = ink("lw-sb", "lw-fb", 0x00ee_f3f8, 0x001d_2630);

/// Colours that tell things apart, in order of use. Checked by the tests below for contrast on both grounds and for
/// distance as seen with the three colour-vision deficiencies.
pub(crate) const SERIES: [Ink; 6] = [
    ink("lw-s0", "lw-f0", 0x001f_5ba8, 0x006b_9fe0),
    ink("lw-s1", "lw-f1", 0x00e6_3516, 0x00fe_8751),
    ink("lw-s2", "lw-f2", 0x001d_8867, 0x002c_d2b0),
    ink("lw-s3", "lw-f3", 0x007a_1f52, 0x00b2_607e),
    ink("lw-s4", "lw-f4", 0x0092_8d34, 0x00f9_dd62),
    ink("lw-s5", "lw-f5", 0x0087_8e9a, 0x00a8_9b74),
];

/// Dash patterns in px; the first is a full line. Seven of them against six colours: 42 phases before a pair repeats.
pub(crate) const DASHES: [&[f64]; 7] =
    [&[], &[7.0, 3.0], &[2.0, 2.0], &[9.0, 3.0, 2.0, 3.0], &[4.0, 2.0], &[12.0, 3.0], &[6.0, 2.0, 1.5, 2.0, 1.5, 2.0]];

/// Shapes of markers.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Shape {
    Circle,
    Square,
    Triangle,
    Diamond,
    TriangleDown,
    Plus,
    Cross,
}

/// Shapes in order of use.
pub(crate) const SHAPES: [Shape; 7] =
    [Shape::Circle, Shape::Square, Shape::Triangle, Shape::Diamond, Shape::TriangleDown, Shape::Plus, Shape::Cross];

impl Shape {
    /// Path data of the shape around a centre, px in, canvas units (tenths of px) out. All shapes look about equally large.
    pub(crate) fn path(self, (x, y): (f64, f64), r: f64) -> String {
        let corners = |corners: &[(f64, f64)]| {
            let points: Vec<String> = corners
                .iter()
                .map(|(dx, dy)| format!("{} {}", crate::svg::tenths(x + dx * r), crate::svg::tenths(y + dy * r)))
                .collect();
            format!("M{}Z", points.join("L"))
        };
        let strokes =
            |ends: [(f64, f64); 2]| ends.map(|(dx, dy)| corners(&[(-dx, -dy), (dx, dy)]).replace('Z', "")).concat();
        match self {
            Self::Circle => {
                let [left, mid, radius, two] = [x - r, y, r, 2.0 * r].map(crate::svg::tenths);
                format!("M{left} {mid}a{radius} {radius} 0 1 0 {two} 0a{radius} {radius} 0 1 0 -{two} 0Z")
            }
            Self::Square => corners(&[(-0.88, -0.88), (0.88, -0.88), (0.88, 0.88), (-0.88, 0.88)]),
            Self::Triangle => corners(&[(0.0, -1.2), (1.1, 0.75), (-1.1, 0.75)]),
            Self::TriangleDown => corners(&[(0.0, 1.2), (1.1, -0.75), (-1.1, -0.75)]),
            Self::Diamond => corners(&[(0.0, -1.3), (1.15, 0.0), (0.0, 1.3), (-1.15, 0.0)]),
            Self::Plus => strokes([(1.15, 0.0), (0.0, 1.15)]),
            Self::Cross => strokes([(0.9, 0.9), (0.9, -0.9)]),
        }
    }

    /// Whether the shape has an inside to fill.
    pub(crate) fn closed(self) -> bool {
        !matches!(self, Self::Plus | Self::Cross)
    }
}

/// The style sheet of a picture: focus rings, and the dark forms of all colours on a dark screen.
pub(crate) fn style() -> String {
    let mut css = String::from(
        ".lw-mark:focus{outline:20px solid #e63516;outline-offset:20px}.lw-mark:hover{opacity:.7}\n\
         @media screen and (prefers-color-scheme:dark){",
    );
    for ink in [PAPER, TEXT, SOFT, AXIS, GRID, BAND].iter().chain(&SERIES) {
        let dark = hex(ink.dark);
        // Lines of the drawing library carry a colour of their own, so the class reaches into its group.
        css.push_str(&format!(".{0},.{0} *{{stroke:{dark}}}.{1}{{fill:{dark}}}", ink.stroke_class, ink.fill_class));
    }
    css.push('}');
    css
}

#[cfg(test)]
mod tests {
    use super::*;

    fn linear(colour: [u8; 3]) -> [f64; 3] {
        colour.map(|byte| {
            let c = f64::from(byte) / 255.0;
            if c <= 0.04045 { c / 12.92 } else { ((c + 0.055) / 1.055).powf(2.4) }
        })
    }

    fn luminance(colour: [u8; 3]) -> f64 {
        let [r, g, b] = linear(colour);
        0.2126 * r + 0.7152 * g + 0.0722 * b
    }

    /// Contrast ratio of WCAG 2.1.
    fn contrast(a: [u8; 3], b: [u8; 3]) -> f64 {
        let (a, b) = (luminance(a), luminance(b));
        (a.max(b) + 0.05) / (a.min(b) + 0.05)
    }

    /// CIELAB of linear sRGB, white D65.
    fn lab([r, g, b]: [f64; 3]) -> [f64; 3] {
        let xyz = [
            (0.412_456_4 * r + 0.357_576_1 * g + 0.180_437_5 * b) / 0.950_47,
            0.212_672_9 * r + 0.715_152_2 * g + 0.072_175_0 * b,
            (0.019_333_9 * r + 0.119_192_0 * g + 0.950_304_1 * b) / 1.088_83,
        ];
        let [x, y, z] = xyz.map(|t| if t > 0.008_856 { t.cbrt() } else { 7.787 * t + 16.0 / 116.0 });
        [116.0 * y - 16.0, 500.0 * (x - y), 200.0 * (y - z)]
    }

    // Outside: matrices of full deficiency of Machado, Oliveira and Fernandes, IEEE Trans. Vis. Comput. Graph. 15 (2009)
    // 1291–1298, Table 1 (protan, deutan, tritan), applied to linear RGB; first row: full colour vision.
    const VISIONS: [[[f64; 3]; 3]; 4] = [
        [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]],
        [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]],
        [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]],
        [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]],
    ];

    fn seen(colour: [u8; 3], vision: &[[f64; 3]; 3]) -> [f64; 3] {
        let c = linear(colour);
        lab(vision.map(|row| (row[0] * c[0] + row[1] * c[1] + row[2] * c[2]).clamp(0.0, 1.0)))
    }

    #[test]
    fn every_series_colour_stands_out_from_its_ground() {
        // WCAG 2.1, success criterion 1.4.11: 3 to 1 for parts of graphics; 1.4.3: 4.5 to 1 for text.
        for ink in SERIES {
            assert!(contrast(ink.light, PAPER.light) >= 3.0, "{ink:?}");
            assert!(contrast(ink.dark, PAPER.dark) >= 3.0, "{ink:?}");
        }
        for ink in [TEXT, SOFT] {
            assert!(contrast(ink.light, PAPER.light) >= 4.5 && contrast(ink.dark, PAPER.dark) >= 4.5, "{ink:?}");
        }
    }

    #[test]
    fn series_colours_stay_apart_with_every_colour_vision_deficiency() {
        let inks: Vec<Ink> = SERIES.into_iter().chain([TEXT]).collect();
        for (index, a) in inks.iter().enumerate() {
            for b in &inks[..index] {
                for (kind, vision) in VISIONS.iter().enumerate() {
                    for (one, other) in [(a.light, b.light), (a.dark, b.dark)] {
                        let (p, q) = (seen(one, vision), seen(other, vision));
                        let distance = p.iter().zip(q).map(|(p, q)| (p - q).powi(2)).sum::<f64>().sqrt();
                        assert!(distance > 14.0, "{a:?} and {b:?} are {distance:.1} apart for vision {kind}");
                    }
                }
            }
        }
    }

    #[test]
    fn no_two_of_42_phases_share_both_colour_and_dash() {
        let mut seen = std::collections::BTreeSet::new();
        assert!((0..42).all(|phase| seen.insert((phase % SERIES.len(), phase % DASHES.len()))));
    }
}
