//! How wide a text is at most, so that labels can be laid out without asking a font.
//!
//! The viewer chooses the font from [`FONT_FAMILY`]; the width of each character here is the larger of Liberation Sans
//! (the metrics of Arial and Helvetica) and DejaVu Sans (the metrics of Verdana, nearly). A text is therefore never wider
//! than computed with any of them, and labels that are laid out apart stay apart.
//!
//! Unit: thousandths of the font size. Source: advance widths (`hmtx`) of LiberationSans-Regular/-Bold 1.07.4 and
//! DejaVuSans/-Bold 2.37, read with fontTools, rounded up. Checked by hand against text drawn by librsvg in both fonts.

/// Fonts in order of wish; all are covered by the widths of this module.
pub(crate) const FONT_FAMILY: &str = "Arial, Helvetica, 'Liberation Sans', 'DejaVu Sans', Verdana, sans-serif";

/// Height above the baseline that letters, digits and an overbar need, in font sizes.
pub(crate) const ASCENT: f64 = 0.93;

/// Depth below the baseline that letters and brackets need, in font sizes.
pub(crate) const DESCENT: f64 = 0.24;

/// U+0020 to U+007E, regular weight.
const REGULAR: [u16; 95] = [
    318, 401, 460, 838, 637, 951, 780, 275, 391, 391, 500, 838, 318, 361, 318, 337, 637, 637, 637, 637, 637, 637, 637,
    637, 637, 637, 337, 337, 838, 838, 838, 557, 1016, 685, 687, 723, 771, 667, 611, 778, 752, 295, 500, 667, 558, 863,
    749, 788, 667, 788, 723, 667, 611, 732, 685, 989, 686, 667, 686, 391, 337, 391, 838, 557, 500, 613, 635, 550, 635,
    616, 353, 635, 634, 278, 278, 580, 278, 975, 634, 612, 635, 635, 412, 521, 393, 634, 592, 818, 592, 592, 525, 637,
    337, 637, 838,
];

/// U+0020 to U+007E, bold.
const BOLD: [u16; 95] = [
    349, 457, 521, 838, 696, 1002, 873, 307, 458, 458, 523, 838, 380, 416, 380, 366, 696, 696, 696, 696, 696, 696, 696,
    696, 696, 696, 400, 400, 838, 838, 838, 611, 1000, 774, 763, 734, 831, 684, 684, 821, 837, 373, 557, 775, 638, 996,
    837, 851, 733, 851, 771, 721, 683, 813, 774, 1104, 771, 725, 726, 458, 366, 458, 838, 557, 500, 675, 716, 593, 716,
    679, 436, 716, 712, 343, 343, 666, 343, 1042, 712, 688, 716, 716, 494, 596, 479, 712, 652, 924, 646, 652, 583, 712,
    366, 712, 838,
];

/// Largest ratio of a bold to a regular width in the two fonts, for characters outside the tables.
const BOLD_FACTOR: f64 = 1.27;

fn per_mille(c: char, bold: bool) -> f64 {
    let code = c as u32;
    if let Some(index) = code.checked_sub(0x20).filter(|&index| index < 95) {
        let table = if bold { &BOLD } else { &REGULAR };
        return f64::from(table[index as usize]);
    }
    let regular = match code {
        0xa0 | 0x2000..=0x200a | 0x202f => 340.0,        // spaces
        0x300..=0x36f | 0x200b..=0x200f | 0xfe0f => 0.0, // combining marks and characters without width
        0xb0 | 0xb2 | 0xb3 | 0xb7 | 0xb9 => 500.0,       // degree, superscripts, middle dot
        0xb1 | 0xd7 | 0xf7 | 0x2212 => 838.0,            // plus-minus, times, division, minus
        0xa1..=0x24f => {
            if code < 0x180 {
                1000.0
            } else {
                1422.0
            }
        }
        0x394 | 0x3b1..=0x3c9 => 838.0, // Δ and small Greek letters
        0x370..=0x4ff => 1180.0,
        0x2010..=0x2027 | 0x2030..=0x205e if code != 0x2030 && code != 0x2031 => 1000.0,
        0x2190..=0x21ff => 1000.0,
        0x3000..=0x9fff | 0xac00..=0xd7a3 | 0xff00..=0xffef => 1000.0, // one em by design
        _ => 1750.0, // the widest of U+2000 to U+22FF; others unknown, so taken as wide
    };
    if bold { regular * BOLD_FACTOR } else { regular }
}

/// Largest width of a text, in the unit of `size`.
pub(crate) fn text_width(text: &str, size: f64, bold: bool) -> f64 {
    text.chars().map(|c| per_mille(c, bold)).sum::<f64>() * size / 1000.0
}

/// The text, or as much of its start as fits with an ellipsis; empty when not even the ellipsis fits.
pub(crate) fn abbreviate(text: &str, size: f64, bold: bool, room: f64) -> String {
    if text_width(text, size, bold) <= room {
        return text.to_owned();
    }
    let mut left = room - text_width("…", size, bold);
    if left < 0.0 {
        return String::new();
    }
    let kept: String = text
        .chars()
        .take_while(|&c| {
            left -= per_mille(c, bold) * size / 1000.0;
            left >= 0.0
        })
        .collect();
    format!("{}…", kept.trim_end())
}

/// Breaks a text at blanks into lines that fit; a word that does not fit is abbreviated, and what is left after
/// `max_lines` is cut with an ellipsis.
pub(crate) fn wrap(text: &str, size: f64, room: f64, max_lines: usize) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    let mut words = text.split_whitespace().peekable();
    while words.peek().is_some() && lines.len() < max_lines {
        let last = lines.len() + 1 == max_lines;
        if last {
            let rest: Vec<&str> = words.by_ref().collect();
            lines.push(abbreviate(&rest.join(" "), size, false, room));
            break;
        }
        let mut line = String::new();
        while let Some(word) = words.peek() {
            let longer = if line.is_empty() { (*word).to_owned() } else { format!("{line} {word}") };
            if text_width(&longer, size, false) <= room {
                line = longer;
            } else if line.is_empty() {
                line = abbreviate(word, size, false, room);
            } else {
                break;
            }
            words.next();
        }
        lines.push(line);
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::*;

    // Outside: sums of advance widths by fontTools from LiberationSans-Regular 1.07.4 and DejaVuSans 2.37, 1000 per em.
    #[test]
    fn computed_widths_bound_both_fonts_and_are_not_wasteful() {
        for (text, liberation, dejavu) in [
            ("5.4311(2) Å", 5_225.585_937_5, 5_917.480_468_75),
            ("Cerium dioxide, 10 % Gd", 11_116.210_937_5, 12_476.074_218_75),
        ] {
            let width = text_width(text, 1000.0, false);
            assert!(width >= liberation && width >= dejavu, "{text}: {width}");
            assert!(width < 1.15 * dejavu, "{text}: {width} wastes room");
        }
    }

    #[test]
    fn each_width_is_the_larger_of_the_two_fonts_rounded_up() {
        let text = include_str!("../tests/data/advance_widths.csv");
        let table = values::Table::parse(text, "advance_widths.csv").expect("a table with its origin");
        assert_eq!(table.rows.len(), REGULAR.len());
        for row in &table.rows {
            let [code, liberation, dejavu, liberation_bold, dejavu_bold] =
                [0, 1, 2, 3, 4].map(|column| row.fields[column].parse::<u16>().expect("a number"));
            let bound = |a: u16, b: u16| (f64::from(a.max(b)) * 1000.0 / 2048.0).ceil();
            let c = char::from(u8::try_from(code).expect("ASCII"));
            assert!((per_mille(c, false) - bound(liberation, dejavu)).abs() < 0.5, "{c}");
            assert!((per_mille(c, true) - bound(liberation_bold, dejavu_bold)).abs() < 0.5, "{c} bold");
        }
    }

    #[test]
    fn bold_is_at_least_as_wide_as_regular_except_the_at_sign() {
        for c in (' '..='~').filter(|&c| c != '@') {
            assert!(per_mille(c, true) >= per_mille(c, false), "{c}");
        }
    }

    #[test]
    fn an_abbreviated_text_fits_and_ends_in_an_ellipsis() {
        for room in [0.0, 5.0, 13.0, 60.0, 200.0] {
            let short = abbreviate("Zirconium oxide, stabilised with yttrium", 12.0, false, room);
            assert!(text_width(&short, 12.0, false) <= room);
            assert!(short.is_empty() || short.ends_with('…'));
        }
        assert_eq!(abbreviate("α-Fe", 12.0, false, 100.0), "α-Fe");
    }

    #[test]
    fn wrapped_lines_fit_and_keep_the_words_in_order() {
        let text = "the quick brown fox jumps over the lazy dog";
        let lines = wrap(text, 10.0, 90.0, 10);
        assert!(lines.iter().all(|line| text_width(line, 10.0, false) <= 90.0));
        assert_eq!(lines.join(" "), text);
        assert_eq!(wrap(text, 10.0, 90.0, 2).len(), 2);
        assert!(wrap("", 10.0, 90.0, 2).is_empty());
    }
}
