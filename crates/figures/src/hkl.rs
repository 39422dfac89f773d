//! How indices are written: a bar over a negative one.

use crate::svg::escape;

/// A label as markup and as the text that it fills on the page.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Written {
    /// Escaped SVG text content.
    pub markup: String,
    /// The characters that take room.
    pub visible: String,
}

/// Writes a label. One that holds only digits, signs, blanks, commas, plus and brackets is read as indices: a minus
/// becomes a bar over the number that follows. Any other text stays as it is.
pub(crate) fn written(label: &str) -> Written {
    let indices = label.chars().all(|c| c.is_ascii_digit() || "-− ,+()".contains(c));
    if !indices {
        return Written { markup: escape(label), visible: label.to_owned() };
    }
    let (mut markup, mut visible) = (String::new(), String::new());
    let mut rest = label;
    while let Some(c) = rest.chars().next() {
        let after = &rest[c.len_utf8()..];
        let digits = after.len() - after.trim_start_matches(|c: char| c.is_ascii_digit()).len();
        if matches!(c, '-' | '−') && digits > 0 {
            let number = &after[..digits];
            markup.push_str(&format!("<tspan text-decoration=\"overline\">{number}</tspan>"));
            visible.push_str(number);
            rest = &after[digits..];
        } else {
            markup.push_str(&escape(&c.to_string()));
            visible.push(c);
            rest = after;
        }
    }
    Written { markup, visible }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_negative_index_gets_a_bar_and_loses_its_sign() {
        let label = written("1 -2 -10");
        assert_eq!(label.visible, "1 2 10");
        let bar = |n: u8| format!("<tspan text-decoration=\"overline\">{n}</tspan>");
        assert_eq!(label.markup, format!("1 {} {}", bar(2), bar(10)));
    }

    #[test]
    fn text_that_is_no_index_stays_and_is_escaped() {
        assert_eq!(written("Kα2-x <b>"), Written { markup: "Kα2-x &lt;b&gt;".into(), visible: "Kα2-x <b>".into() });
    }
}
