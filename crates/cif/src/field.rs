//! Text fields: line folding and line prefixes, undone on reading and used in writing where a text needs them.
//!
//! A field whose first line is a lone backslash is folded: a backslash at the end of a line joins it with the next. A
//! first line `PREFIX\` or `PREFIX\\` says that every line begins with the prefix; with two backslashes the lines are
//! folded as well. Without such a marker nothing is changed but the line ends, which become LF.
//!
//! Sources: International Tables G (2005), section 2.2.7.4.11 (folding, from memory); Bernstein et al. (2016), J. Appl.
//! Cryst. 49, 277 (prefix, from memory).

use std::borrow::Cow;

use crate::source::LINE_LIMIT;

/// Characters of text in a line that is folded: with prefix and backslash the line stays below 80.
const FOLDED: usize = 76;

/// Prefix of the fields that are written with one.
const PREFIX: &str = ">";

/// Line ends as LF.
pub(crate) fn normalise(raw: &str) -> Cow<'_, str> {
    if raw.contains('\r') { Cow::Owned(raw.replace("\r\n", "\n").replace('\r', "\n")) } else { Cow::Borrowed(raw) }
}

/// The text that a field with this raw content stands for.
pub(crate) fn decode(raw: &str) -> Cow<'_, str> {
    let text = normalise(raw);
    match decode_marked(&text) {
        Some(decoded) => Cow::Owned(decoded),
        None => text,
    }
}

/// `None` when the first line is no marker.
fn decode_marked(text: &str) -> Option<String> {
    let (first, rest) = text.split_once('\n').map_or((text, None), |(first, rest)| (first, Some(rest)));
    let marker = first.trim_end_matches([' ', '\t']);
    let (prefix, backslashes) = marker.split_at(marker.find('\\')?);
    let folded = match (prefix.is_empty(), backslashes) {
        (true, "\\") | (false, "\\\\") => true,
        (false, "\\") => false,
        _ => return None,
    };
    if !prefix.is_empty() && !rest?.split('\n').all(|line| line.starts_with(prefix)) {
        return None;
    }
    let lines = rest.into_iter().flat_map(|rest| rest.split('\n')).map(|line| &line[prefix.len()..]);
    let mut decoded = String::with_capacity(text.len());
    let mut between = "";
    for line in lines {
        decoded.push_str(between);
        let trimmed = line.trim_end_matches([' ', '\t']);
        match trimmed.strip_suffix('\\').filter(|_| folded) {
            Some(joined) => {
                decoded.push_str(joined);
                between = "";
            }
            None => {
                decoded.push_str(line);
                between = "\n";
            }
        }
    }
    Some(decoded)
}

/// Raw content of a field that stands for `text`, whose line ends are LF.
///
/// The text as it is, unless it would be read differently or has a line beyond the limit. Long lines within the limit
/// are not folded: a reader that does not know the protocol would see the backslashes.
pub(crate) fn encode(text: &str) -> Cow<'_, str> {
    let short = text.split('\n').all(|line| line.chars().nth(LINE_LIMIT - 1).is_none());
    if short && !text.contains("\n;") && matches!(decode(text), Cow::Borrowed(_)) {
        return Cow::Borrowed(text);
    }
    // A folded piece may begin with any character, so that any semicolon calls for a prefix.
    let prefix = if text.contains(';') { PREFIX } else { "" };
    let mut raw = format!("{prefix}{}", if prefix.is_empty() { "\\" } else { "\\\\" });
    for line in text.split('\n') {
        let mut left = line;
        while let Some((end, _)) = left.char_indices().nth(FOLDED) {
            raw.push('\n');
            raw.push_str(prefix);
            raw.push_str(&left[..end]);
            raw.push('\\');
            left = &left[end..];
        }
        raw.push('\n');
        raw.push_str(prefix);
        raw.push_str(left);
        if left.trim_end_matches([' ', '\t']).ends_with('\\') {
            raw.push_str("\\\n");
            raw.push_str(prefix);
        }
    }
    Cow::Owned(raw)
}

#[cfg(test)]
mod tests {
    use super::{decode, encode};

    #[test]
    fn fields_are_unfolded_only_behind_a_marker() {
        for (raw, text) in [
            ("\\\nC:\\folder\\\nname\nnext", "C:\\foldername\nnext"),
            ("\\  \nlong \\ \nline", "long line"),
            ("no marker\\\nnext", "no marker\\\nnext"),
            ("\\\\\nnext", "\\\\\nnext"),
            ("\\", ""),
            ("\\\nabc\\", "abc"),
            ("\\\nabc\\\\\n", "abc\\"),
            ("a\r\nb\rc", "a\nb\nc"),
        ] {
            assert_eq!(decode(raw), text, "{raw:?}");
        }
    }

    #[test]
    fn a_prefix_is_removed_only_when_every_line_has_it() {
        for (raw, text) in [
            (">\\\n>;data\n>next", ";data\nnext"),
            ("CIF>\\\\\nCIF>long \\\nCIF>line\nCIF>end", "long line\nend"),
            (">\\\\\r\n>a\\\r\n>b", "ab"),
            (">\\\n>one\ntwo", ">\\\n>one\ntwo"),
            (">\\", ">\\"),
            (">\\\\\\\n>a", ">\\\\\\\n>a"),
        ] {
            assert_eq!(decode(raw), text, "{raw:?}");
        }
    }

    #[test]
    fn any_text_comes_back_from_the_field_that_holds_it_and_no_line_closes_the_field() {
        let long = format!("{} {};\\", "x".repeat(3000), "; ".repeat(400));
        for text in ["", "\n", "\\", "a\\\nb", ";", "a\n;b\\", "\\\n", ">\\\n>x", "a \\  ", "\\\n\\\n;", &long] {
            let raw = encode(text);
            assert_eq!(decode(&raw), text, "{raw:?}");
            assert!(!raw.contains("\n;"), "{raw:?}");
            assert!(raw.lines().all(|line| line.chars().count() < 2048), "{raw:?}");
        }
    }
}
