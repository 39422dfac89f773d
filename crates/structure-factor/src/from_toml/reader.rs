//! Values of TOML with their places: what every key needs.

use std::ops::{Range, RangeInclusive};

use toml::Spanned;
use toml::de::{DeTable, DeValue};
use values::{Diagnostic, Location, column_of};

/// A TOML text, to turn byte offsets into places.
pub(super) struct Reader<'a> {
    text: &'a str,
    file: &'a str,
}

/// Largest structure file in bytes: 16 MiB hold some 100 000 sites.
const MAX_BYTES: usize = 16 << 20;

impl<'a> Reader<'a> {
    pub fn new(text: &'a str, file: &'a str) -> Self {
        Self { text, file }
    }

    /// The document.
    pub fn parse(&self) -> Result<Spanned<DeTable<'a>>, Diagnostic> {
        if self.text.len() > MAX_BYTES {
            return Err(Diagnostic::new(
                format!("a file of {} bytes", self.text.len()),
                format!("a structure of at most {MAX_BYTES} bytes"),
                "give the asymmetric unit only",
            )
            .at(self.place(0..0)));
        }
        DeTable::parse(self.text.trim_start_matches('\u{feff}')).map_err(|error| {
            let message = error.message().lines().next().unwrap_or("").to_owned();
            // A byte order mark that was skipped shifts all places of the first line only by itself.
            let shift = self.text.len() - self.text.trim_start_matches('\u{feff}').len();
            let span = error.span().map_or(0..0, |span| span.start + shift..span.end + shift);
            Diagnostic::new(
                format!("text that is no TOML ({message})"),
                "lines of the form `key = value`",
                "correct this place; texts stand in quotes, arrays in brackets",
            )
            .at(self.place(span))
        })
    }

    /// Place of a range of bytes; the caret stays in its first line.
    pub fn place(&self, span: Range<usize>) -> Location {
        let start = span.start.min(self.text.len());
        let before = &self.text.as_bytes()[..start];
        let line = before.iter().filter(|byte| **byte == b'\n').count() + 1;
        let line_start = before.iter().rposition(|byte| *byte == b'\n').map_or(0, |at| at + 1);
        let rest = self.text.get(line_start..).unwrap_or("").lines().next().unwrap_or("");
        let from = column_of(rest, start - line_start);
        let to = column_of(rest, (span.end.min(self.text.len()).max(start) - line_start).min(rest.len()));
        Location::new(self.file, line, from).wide(to.saturating_sub(from))
    }

    /// A message at a key of a table, at the top of the file if the key is not there.
    pub fn at_key(&self, table: &DeTable<'_>, key: &str, message: Diagnostic) -> Diagnostic {
        message.at(self.place(table.get(key).map_or(0..0, Spanned::span)))
    }

    /// A key that must be there is not.
    pub fn missing(&self, key: &str, mend: &str) -> Diagnostic {
        Diagnostic::new(format!("a structure without `{key}`"), format!("the key `{key}`"), mend).at(self.place(0..0))
    }

    pub fn wrong_type(&self, value: &Spanned<DeValue<'_>>, key: &str, expected: &str) -> Diagnostic {
        let found = value.get_ref().type_str();
        let article = if found.starts_with(['a', 'i', 'o']) { "an" } else { "a" };
        Diagnostic::new(format!("`{key}` is {article} {found}"), expected, "correct the value")
            .at(self.place(value.span()))
    }

    /// Refuses keys that the table does not have.
    pub fn only_keys(&self, table: &DeTable<'_>, known: &[&str], what: &str) -> Result<(), Diagnostic> {
        for key in table.keys() {
            let name: &str = key.get_ref();
            if known.contains(&name) {
                continue;
            }
            let shown: String = name.chars().take(40).collect();
            let mend = match nearest(name, known) {
                Some(near) => format!("write `{near}` if that is meant"),
                None => "remove it, or turn it into a comment with #".to_owned(),
            };
            return Err(Diagnostic::new(
                format!("the unknown key `{shown}` in {what}"),
                format!("one of {}", known.join(", ")),
                mend,
            )
            .at(self.place(key.span())));
        }
        Ok(())
    }

    pub fn text<'t>(&self, value: &'t Spanned<DeValue<'_>>, key: &str) -> Result<&'t str, Diagnostic> {
        value.get_ref().as_str().ok_or_else(|| self.wrong_type(value, key, "a text in quotes"))
    }

    /// A number in a range; integers and floats alike, a text for fractions such as `"1/3"`.
    pub fn number(
        &self,
        value: &Spanned<DeValue<'_>>,
        key: &str,
        range: RangeInclusive<f64>,
    ) -> Result<f64, Diagnostic> {
        let number = match value.get_ref() {
            // The parser has checked the digits; radix and sign are in the text.
            DeValue::Integer(integer) => i64::from_str_radix(integer.as_str(), integer.radix()).ok().map(|i| i as f64),
            DeValue::Float(float) => float.as_str().parse().ok(),
            DeValue::String(text) => fraction(text),
            _ => None,
        };
        let Some(number) = number else { return Err(self.wrong_type(value, key, "a number")) };
        if range.contains(&number) {
            return Ok(number);
        }
        Err(Diagnostic::new(
            format!("`{key}` is {number}"),
            format!("a number from {} to {}", plain(*range.start()), plain(*range.end())),
            "correct the value",
        )
        .at(self.place(value.span())))
    }

    /// An array of exactly `N` numbers, each in its range.
    pub fn numbers<const N: usize>(
        &self,
        value: &Spanned<DeValue<'_>>,
        key: &str,
        range: impl Fn(usize) -> RangeInclusive<f64>,
    ) -> Result<[f64; N], Diagnostic> {
        let expected = format!("an array of {N} numbers");
        let Some(array) = value.get_ref().as_array() else { return Err(self.wrong_type(value, key, &expected)) };
        if array.len() != N {
            let found = format!("`{key}` has {} entries", array.len());
            return Err(Diagnostic::new(found, expected, "complete or shorten the array").at(self.place(value.span())));
        }
        let mut numbers = [0.0; N];
        for (index, (slot, entry)) in numbers.iter_mut().zip(array.iter()).enumerate() {
            *slot = self.number(entry, key, range(index))?;
        }
        Ok(numbers)
    }
}

/// Without the noise of a power of ten where the number is short.
fn plain(number: f64) -> String {
    if number != 0.0 && (number.abs() < 1e-3 || number.abs() >= 1e6) {
        format!("{number:e}")
    } else {
        number.to_string()
    }
}

/// `1/3`, `-2/3`: what no decimal fraction says exactly.
fn fraction(text: &str) -> Option<f64> {
    let (above, below) = text.split_once('/')?;
    let above: i32 = above.trim().parse().ok()?;
    let below: i32 = below.trim().parse().ok()?;
    (below > 0).then(|| f64::from(above) / f64::from(below))
}

/// The known key that is a letter or two away.
fn nearest<'k>(name: &str, known: &[&'k str]) -> Option<&'k str> {
    let bare = |text: &str| -> Vec<char> {
        text.chars().take(40).flat_map(char::to_lowercase).filter(char::is_ascii_alphanumeric).collect()
    };
    let name = bare(name);
    known
        .iter()
        .map(|key| (distance(&name, &bare(key)), *key))
        .filter(|(distance, key)| distance * 3 <= key.len())
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, key)| key)
}

/// Levenshtein's distance of two short words.
fn distance(a: &[char], b: &[char]) -> usize {
    let mut row: Vec<usize> = (0..=b.len()).collect();
    for (i, letter) in a.iter().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, other) in b.iter().enumerate() {
            let replaced = diagonal + usize::from(letter != other);
            diagonal = row[j + 1];
            row[j + 1] = replaced.min(diagonal + 1).min(row[j] + 1);
        }
    }
    row[b.len()]
}
