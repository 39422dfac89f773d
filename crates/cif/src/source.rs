//! From bytes to text: byte order marks, encodings, forbidden characters, the version; and places in the text.

use std::borrow::Cow;
use std::fmt;
use std::sync::Arc;

use values::{Diagnostic, Location};

/// Largest file that is read, in bytes: a value keeps its length in 29 bits.
pub const MAX_BYTES: usize = (1 << 29) - 1;

/// Characters in a line that CIF allows; longer lines are read with a warning.
pub(crate) const LINE_LIMIT: usize = 2048;

/// Bytes between two marks of line and column: a place is found by reading at most that much.
const STRIDE: usize = 4096;

/// A caret of more characters than this says nothing more.
const MAX_WIDTH: usize = 120;

/// Version of the syntax, decided by the first line of the file.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Version {
    /// CIF 1.1, and 1.0 which it contains.
    V1_1,
    /// CIF 2.0.
    V2_0,
}

impl fmt::Display for Version {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::V1_1 => "1.1",
            Self::V2_0 => "2.0",
        })
    }
}

/// Line and column, both from 0, of the byte at a multiple of [`STRIDE`].
#[derive(Clone, Copy, Debug, Default)]
struct Mark {
    line: u32,
    column: u32,
}

impl Mark {
    /// The mark behind one byte. CR LF is one line end; characters count, not bytes.
    fn step(&mut self, byte: u8, next: Option<u8>) {
        match byte {
            b'\n' => *self = Self { line: self.line + 1, column: 0 },
            b'\r' if next != Some(b'\n') => *self = Self { line: self.line + 1, column: 0 },
            b'\r' => {}
            _ => self.column += u32::from(byte & 0xC0 != 0x80),
        }
    }
}

/// The text of a file, checked, with its places.
#[derive(Clone, Debug)]
pub(crate) struct Source {
    file: Arc<str>,
    text: String,
    version: Version,
    marks: Vec<Mark>,
}

impl Source {
    /// Decodes and checks a whole file; the warnings concern encoding, version line and long lines.
    pub(crate) fn new(bytes: &[u8], file: &str) -> Result<(Self, Vec<Diagnostic>), Diagnostic> {
        let place = |line, column| Location::new(file, line, column);
        if bytes.len() > MAX_BYTES {
            return Err(Diagnostic::new(
                format!("the file has {} bytes", bytes.len()),
                format!("at most {MAX_BYTES} bytes in one CIF"),
                "split the file at its data blocks",
            )
            .at(place(1, 1)));
        }
        if bytes.starts_with(&[0xFF, 0xFE]) || bytes.starts_with(&[0xFE, 0xFF]) {
            return Err(Diagnostic::new(
                "the file begins with the byte order mark of UTF-16",
                "UTF-8 or ASCII text",
                "save the file as UTF-8",
            )
            .at(place(1, 1)));
        }
        let bytes = bytes.strip_prefix(b"\xEF\xBB\xBF").unwrap_or(bytes);
        // End-of-file mark of old systems.
        let bytes = bytes.strip_suffix(b"\x1A").unwrap_or(bytes);
        let mut warnings = Vec::new();
        let version = version_of(bytes, file, &mut warnings);
        let text = decode(bytes, version, file, &mut warnings)?.into_owned();
        let mut source = Self { file: file.into(), text, version, marks: Vec::new() };
        warnings.extend(source.index_lines());
        match source.forbidden() {
            Some(error) => Err(error),
            None => Ok((source, warnings)),
        }
    }

    pub(crate) fn text(&self) -> &str {
        &self.text
    }

    pub(crate) fn version(&self) -> Version {
        self.version
    }

    pub(crate) fn file(&self) -> &str {
        &self.file
    }

    /// Place of the bytes from `start` to `end`; the caret stays in the first line.
    pub(crate) fn location(&self, start: usize, end: usize) -> Location {
        let bytes = self.text.as_bytes();
        let start = start.min(bytes.len());
        let mut mark = self.marks.get(start / STRIDE).copied().unwrap_or_default();
        for at in start / STRIDE * STRIDE..start {
            mark.step(bytes[at], bytes.get(at + 1).copied());
        }
        let width = bytes[start..end.clamp(start, bytes.len())]
            .iter()
            .take_while(|b| !matches!(b, b'\n' | b'\r'))
            .filter(|b| **b & 0xC0 != 0x80)
            .take(MAX_WIDTH)
            .count();
        Location {
            file: self.file.clone(),
            line: mark.line as usize + 1,
            column: mark.column as usize + 1,
            width: width.max(1),
        }
    }

    /// Sets the marks; a warning when lines are longer than CIF allows.
    fn index_lines(&mut self) -> Option<Diagnostic> {
        let bytes = self.text.as_bytes();
        let mut marks = Vec::with_capacity(bytes.len() / STRIDE + 1);
        let mut mark = Mark::default();
        let (mut long_lines, mut first_long) = (0_usize, 0);
        for (at, byte) in bytes.iter().copied().enumerate() {
            if at % STRIDE == 0 {
                marks.push(mark);
            }
            let before = mark.column;
            mark.step(byte, bytes.get(at + 1).copied());
            if before as usize == LINE_LIMIT && mark.column > before {
                long_lines += 1;
                first_long = if long_lines == 1 { at } else { first_long };
            }
        }
        marks.push(mark);
        self.marks = marks;
        (long_lines > 0).then(|| {
            let lines = if long_lines == 1 { "a line has".to_owned() } else { format!("{long_lines} lines have") };
            Diagnostic::new(
                format!("{lines} more than {LINE_LIMIT} characters, the first from here on"),
                format!("at most {LINE_LIMIT} characters in a line"),
                "break the line at a blank; it was read nonetheless",
            )
            .at(self.location(first_long, first_long))
        })
    }

    /// The first character that no CIF may hold.
    fn forbidden(&self) -> Option<Diagnostic> {
        let bytes = self.text.as_bytes();
        let suspicious = |b: u8| (b < 0x20 && !matches!(b, b'\t' | b'\n' | b'\r')) || b == 0x7F || b == 0xBF;
        let mut from = 0;
        while let Some(offset) = bytes[from..].iter().position(|b| suspicious(*b)) {
            let mut at = from + offset;
            while !self.text.is_char_boundary(at) {
                at -= 1;
            }
            let c = self.text[at..].chars().next()?;
            from = (at + c.len_utf8()).max(from + offset + 1);
            let code = u32::from(c);
            let allowed = match c {
                '\u{7F}' => self.version == Version::V2_0,
                // U+xFFFE and U+xFFFF are no characters in any plane.
                _ => code >= 0x20 && code & 0xFFFE != 0xFFFE,
            };
            if !allowed {
                return Some(self.forbidden_message(c).at(self.location(at, at + c.len_utf8())));
            }
        }
        None
    }

    fn forbidden_message(&self, c: char) -> Diagnostic {
        let expected = match self.version {
            Version::V1_1 => "printable characters, tabs and line ends",
            Version::V2_0 => "the characters of CIF 2.0: tab, line ends, U+0020 and above without U+xFFFE and U+xFFFF",
        };
        if c == '\0' {
            return Diagnostic::new(
                "a NUL character: the file is binary, or UTF-16 without its mark",
                expected,
                "export the data as CIF text and save it as UTF-8",
            );
        }
        Diagnostic::new(format!("the character U+{:04X}", u32::from(c)), expected, "delete the character")
    }
}

/// The version that the first line states; no such line is CIF 1.1.
fn version_of(bytes: &[u8], file: &str, warnings: &mut Vec<Diagnostic>) -> Version {
    let Some(rest) = bytes.strip_prefix(b"#\\#CIF_") else { return Version::V1_1 };
    let length = rest.iter().take_while(|b| !b.is_ascii_whitespace()).count();
    match &rest[..length] {
        b"2.0" => Version::V2_0,
        b"1.1" | b"1.0" => Version::V1_1,
        other => {
            warnings.push(
                Diagnostic::new(
                    format!("the first line states CIF version `{}`", shorten(&String::from_utf8_lossy(other))),
                    "#\\#CIF_1.1 or #\\#CIF_2.0",
                    "correct the first line; the file was read as CIF 1.1",
                )
                .at(Location::new(file, 1, 1).wide(7 + length.min(MAX_WIDTH))),
            );
            Version::V1_1
        }
    }
}

/// UTF-8 as it is; other bytes are an error in CIF 2.0 and Latin-1 in CIF 1.1, where they occur in names and comments.
fn decode<'a>(
    bytes: &'a [u8],
    version: Version,
    file: &str,
    warnings: &mut Vec<Diagnostic>,
) -> Result<Cow<'a, str>, Diagnostic> {
    let error = match std::str::from_utf8(bytes) {
        Ok(text) => return Ok(Cow::Borrowed(text)),
        Err(error) => error,
    };
    let mut mark = Mark::default();
    for at in 0..error.valid_up_to() {
        mark.step(bytes[at], bytes.get(at + 1).copied());
    }
    let location = Location::new(file, mark.line as usize + 1, mark.column as usize + 1);
    let found = format!("the byte 0x{:02X} is not UTF-8", bytes.get(error.valid_up_to()).copied().unwrap_or(0));
    if version == Version::V2_0 {
        return Err(Diagnostic::new(found, "UTF-8, as CIF 2.0 demands", "save the file as UTF-8").at(location));
    }
    let mend = "save the file as UTF-8; such bytes were read as Latin-1";
    warnings.push(Diagnostic::new(found, "ASCII or UTF-8", mend).at(location));
    let mut text = String::with_capacity(bytes.len() + bytes.len() / 16);
    for chunk in bytes.utf8_chunks() {
        text.push_str(chunk.valid());
        text.extend(chunk.invalid().iter().copied().map(char::from));
    }
    if text.len() > MAX_BYTES {
        let found = format!("the file has {} bytes as UTF-8", text.len());
        return Err(Diagnostic::new(found, format!("at most {MAX_BYTES} bytes in one CIF"), "split the file"));
    }
    Ok(Cow::Owned(text))
}

/// A token as a message shows it.
pub(crate) fn shorten(token: &str) -> String {
    const SHOWN: usize = 40;
    let line = token.lines().next().unwrap_or("");
    match line.char_indices().nth(SHOWN) {
        Some((end, _)) => format!("{}…", &line[..end]),
        None if line.len() < token.len() => format!("{line}…"),
        None => line.to_owned(),
    }
}
