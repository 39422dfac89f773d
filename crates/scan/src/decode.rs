//! Bytes to text: encodings, line ends, and what is no text at all.

use values::{Diagnostic, Location};

/// Largest file that is read as a list, in bytes; 4 MiB hold about 100 000 lines, a pattern shows a few hundred.
pub(crate) const MAX_BYTES: usize = 4 << 20;

/// Text of a file, and what had to be assumed to get it.
pub(crate) struct Decoded {
    pub text: String,
    pub notes: Vec<String>,
}

/// Decodes UTF-8 (with or without byte order mark), UTF-16 with its mark, and Latin-1 where it is no UTF-8.
///
/// # Errors
/// A message for a file above [`MAX_BYTES`], for NUL bytes and other control characters (binary data), and for broken UTF-16.
pub(crate) fn decode(bytes: &[u8], file: &str) -> Result<Decoded, Diagnostic> {
    let start = || Location::new(file, 1, 1);
    if bytes.len() > MAX_BYTES {
        return Err(Diagnostic::new(
            format!("a file of {} bytes", bytes.len()),
            format!("a list of at most {MAX_BYTES} bytes"),
            "give the list of lines; a scan has to be reduced to its lines first",
        )
        .at(start()));
    }
    let mut notes = Vec::new();
    let text = match bytes {
        [0xff, 0xfe, rest @ ..] => {
            notes.push("the file is UTF-16 and was decoded as such".to_owned());
            utf16(rest, u16::from_le_bytes, file)?
        }
        [0xfe, 0xff, rest @ ..] => {
            notes.push("the file is UTF-16 and was decoded as such".to_owned());
            utf16(rest, u16::from_be_bytes, file)?
        }
        _ => {
            let bytes = bytes.strip_prefix(&[0xef, 0xbb, 0xbf]).unwrap_or(bytes);
            match std::str::from_utf8(bytes) {
                Ok(text) => text.to_owned(),
                Err(wrong) => {
                    let line = 1 + bytes[..wrong.valid_up_to()].iter().filter(|b| **b == b'\n').count();
                    notes.push(format!("row {line} is not UTF-8; the file was read as Latin-1"));
                    bytes.iter().map(|byte| char::from(*byte)).collect()
                }
            }
        }
    };
    // A Ctrl-Z ends a text file of old systems; nothing behind it belongs to the list.
    let text = match text.split_once('\u{1a}') {
        Some((before, behind)) if behind.trim_matches(['\u{1a}', '\n', '\r', ' ']).is_empty() => before.to_owned(),
        _ => text,
    };
    for (index, line) in lines(&text) {
        if let Some(at) = line.find(|c: char| c.is_control() && c != '\t' && c != '\u{c}') {
            let code = line[at..].chars().next().map_or(0, u32::from);
            return Err(Diagnostic::new(
                format!("the control character U+{code:04X}, as in binary data"),
                "a text file with columns",
                "export the list as text (CSV, UTF-8); closed formats of instruments are not read",
            )
            .at(Location::new(file, index, values::column_of(line, at))));
        }
    }
    Ok(Decoded { text, notes })
}

fn utf16(bytes: &[u8], join: fn([u8; 2]) -> u16, file: &str) -> Result<String, Diagnostic> {
    let units = bytes.chunks_exact(2).map(|pair| join([pair[0], pair[1]]));
    let text: Result<String, _> = char::decode_utf16(units).collect();
    match text {
        Ok(text) if bytes.len().is_multiple_of(2) => Ok(text),
        _ => Err(Diagnostic::new(
            "a file that begins as UTF-16 but is cut or damaged",
            "whole characters of two bytes",
            "save the list again as UTF-8 text",
        )
        .at(Location::new(file, 1, 1))),
    }
}

/// Lines with their number from 1; they end in LF, CR LF or CR.
pub(crate) fn lines(text: &str) -> impl Iterator<Item = (usize, &str)> {
    let mut rest = Some(text);
    std::iter::from_fn(move || {
        let text = rest?;
        let Some(end) = text.find(['\n', '\r']) else {
            rest = None;
            return (!text.is_empty()).then_some(text);
        };
        let skip = if text[end..].starts_with("\r\n") { 2 } else { 1 };
        rest = Some(&text[end + skip..]);
        Some(&text[..end])
    })
    .enumerate()
    .map(|(index, line)| (index + 1, line))
}

/// A piece of a foreign text for a message: at most 40 characters, control characters left out.
pub(crate) fn excerpt(text: &str) -> String {
    let mut shown: String = text.chars().take(40).filter(|c| !c.is_control()).collect();
    if text.chars().nth(40).is_some() {
        shown.push('…');
    }
    shown
}

#[cfg(test)]
mod tests {
    use super::{decode, lines};

    #[test]
    fn all_three_line_ends_count_as_one_line_each() {
        let read: Vec<_> = lines("a\r\nb\rc\n\nd").collect();
        assert_eq!(read, [(1, "a"), (2, "b"), (3, "c"), (4, ""), (5, "d")]);
    }

    #[test]
    fn utf16_in_both_orders_is_decoded_with_a_note() {
        for little in [true, false] {
            let mut bytes = if little { vec![0xff, 0xfe] } else { vec![0xfe, 0xff] };
            for unit in "d_Å".encode_utf16() {
                bytes.extend(if little { unit.to_le_bytes() } else { unit.to_be_bytes() });
            }
            let read = decode(&bytes, "a").unwrap();
            assert_eq!(read.text, "d_Å");
            assert_eq!(read.notes.len(), 1);
            bytes.push(0);
            assert!(decode(&bytes, "a").is_err());
        }
    }

    #[test]
    fn latin_1_is_read_with_a_note_and_nul_bytes_are_refused() {
        let read = decode(b"# 28.4\xb0\nd_A\n", "a").unwrap();
        assert_eq!(read.text, "# 28.4°\nd_A\n");
        assert!(read.notes[0].contains("row 1 is not UTF-8"), "{:?}", read.notes);
        let refused = decode(b"d_A\n3.1\0\n", "a").err().unwrap();
        assert_eq!(refused.location.unwrap().to_string(), "a:2:4");
    }
}
