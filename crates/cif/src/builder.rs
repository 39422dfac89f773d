//! Documents made from values: names are checked, quotes are chosen, the result is read once before it is given out.

use values::{Diagnostic, Measured};

use crate::parse::parse;
use crate::scan::is_blank;
use crate::source::Version;
use crate::write::{LINE, Sink, Written, is_word, written};

/// A value to be written.
#[derive(Clone, Debug, PartialEq)]
pub enum Datum {
    /// `?`.
    Unknown,
    /// `.`.
    Inapplicable,
    /// A number with its s.u., as in 5.43112(4); u = 0 writes the value alone, not finite writes `?`.
    Number(Measured),
    /// A text of any length; quoted where it could be taken for something else.
    Text(String),
}

impl From<&str> for Datum {
    fn from(text: &str) -> Self {
        Self::Text(text.to_owned())
    }
}

impl From<String> for Datum {
    fn from(text: String) -> Self {
        Self::Text(text)
    }
}

impl From<Measured> for Datum {
    fn from(number: Measured) -> Self {
        Self::Number(number)
    }
}

impl From<f64> for Datum {
    fn from(value: f64) -> Self {
        Self::Number(Measured::exact(value))
    }
}

impl From<i32> for Datum {
    fn from(value: i32) -> Self {
        Self::Number(Measured::exact(f64::from(value)))
    }
}

/// Blocks to be written.
///
/// ```
/// use values::Measured;
/// let mut file = cif::Builder::default();
/// let block = file.block("silicon");
/// block.item("_cell_length_a", Measured::new(5.431_123, 0.000_04));
/// block.looped(&["_atom_site_label", "_atom_site_fract_x"], vec![vec!["Si1".into(), 0.125.into()]]);
/// let text = file.write()?;
/// assert!(text.contains("5.43112(4)"));
/// # Ok::<(), values::Diagnostic>(())
/// ```
#[derive(Clone, Debug, Default)]
pub struct Builder {
    comments: Vec<String>,
    blocks: Vec<BlockBuilder>,
}

/// A data block to be written.
#[derive(Clone, Debug)]
pub struct BlockBuilder {
    name: String,
    entries: Vec<Part>,
}

#[derive(Clone, Debug)]
enum Part {
    Item(String, Datum),
    Loop(Vec<String>, Vec<Vec<Datum>>),
}

impl Builder {
    /// A comment behind the first line of the file, one line for each line of the text.
    pub fn comment(&mut self, text: &str) -> &mut Self {
        self.comments.extend(text.lines().map(str::to_owned));
        self
    }

    /// Begins a data block; its name holds no blanks.
    pub fn block(&mut self, name: &str) -> &mut BlockBuilder {
        self.blocks.push(BlockBuilder { name: name.to_owned(), entries: Vec::new() });
        let last = self.blocks.len() - 1;
        &mut self.blocks[last]
    }

    /// The text: CIF 1.1, or CIF 2.0 when a name or text has characters outside ASCII; lines below 80 characters where
    /// the values allow it; lines end in LF.
    ///
    /// # Errors
    /// A name with blanks, a tag without underscore or twice in a block, a loop without rows or with a row of another
    /// length, a character that CIF does not allow.
    pub fn write(&self) -> Result<String, Diagnostic> {
        let version = if self.is_ascii() { Version::V1_1 } else { Version::V2_0 };
        let mut sink = Sink::new(version);
        for line in &self.comments {
            sink.out.push_str(&format!("# {line}\n"));
        }
        for block in &self.blocks {
            check_name(&block.name, "block name")?;
            sink.heading("data_", &block.name);
            for entry in &block.entries {
                match entry {
                    Part::Item(tag, datum) => item(&mut sink, tag, datum, version)?,
                    Part::Loop(tags, rows) => looped(&mut sink, tags, rows, version)?,
                }
            }
        }
        // The reader knows every rule that is left: tags twice, forbidden characters.
        parse(sink.out.as_bytes(), "(text to be written)")?;
        Ok(sink.out)
    }

    fn is_ascii(&self) -> bool {
        let plain = |datum: &Datum| !matches!(datum, Datum::Text(text) if !text.is_ascii());
        self.comments.iter().all(|line| line.is_ascii())
            && self.blocks.iter().all(|block| {
                block.name.is_ascii()
                    && block.entries.iter().all(|entry| match entry {
                        Part::Item(tag, datum) => tag.is_ascii() && plain(datum),
                        Part::Loop(tags, rows) => tags.iter().all(|t| t.is_ascii()) && rows.iter().flatten().all(plain),
                    })
            })
    }
}

impl BlockBuilder {
    /// A tag with its value.
    pub fn item(&mut self, tag: &str, value: impl Into<Datum>) -> &mut Self {
        self.entries.push(Part::Item(tag.to_owned(), value.into()));
        self
    }

    /// A loop: tags, and rows with one value for each tag.
    pub fn looped(&mut self, tags: &[&str], rows: Vec<Vec<Datum>>) -> &mut Self {
        self.entries.push(Part::Loop(tags.iter().map(|&tag| tag.to_owned()).collect(), rows));
        self
    }
}

fn check_name(name: &str, what: &str) -> Result<(), Diagnostic> {
    if name.is_empty() || name.bytes().any(is_blank) {
        return Err(Diagnostic::new(format!("the {what} `{name}`"), "a name without blanks", "write _ for each blank"));
    }
    Ok(())
}

fn check_tag(tag: &str) -> Result<(), Diagnostic> {
    check_name(tag, "tag")?;
    if !tag.starts_with('_') || tag.len() == 1 {
        return Err(Diagnostic::new(format!("the tag `{tag}`"), "a tag such as _cell_length_a", "begin it with _"));
    }
    Ok(())
}

fn item(sink: &mut Sink, tag: &str, datum: &Datum, version: Version) -> Result<(), Diagnostic> {
    check_tag(tag)?;
    let text = text_of(datum);
    let value = written_datum(datum, &text, version);
    let width = match &value {
        Written::Token(token) => token.chars().count(),
        Written::Field(_) => LINE,
    };
    sink.tag(tag, width);
    sink.written(&value);
    sink.end_row();
    Ok(())
}

fn looped(sink: &mut Sink, tags: &[String], rows: &[Vec<Datum>], version: Version) -> Result<(), Diagnostic> {
    tags.iter().try_for_each(|tag| check_tag(tag))?;
    let first = tags.first().map_or("", String::as_str);
    if tags.is_empty() || rows.is_empty() {
        let found = format!("a loop with {} tags and {} rows, first tag `{first}`", tags.len(), rows.len());
        return Err(Diagnostic::new(found, "at least one of both", "leave the loop out"));
    }
    sink.loop_header(tags.iter().map(String::as_str));
    for (number, row) in rows.iter().enumerate() {
        if row.len() != tags.len() {
            let found = format!("row {} of the loop of `{first}` has {} values", number + 1, row.len());
            return Err(Diagnostic::new(found, format!("{} values", tags.len()), "give ? for what is unknown"));
        }
        for datum in row {
            sink.written(&written_datum(datum, &text_of(datum), version));
        }
        sink.end_row();
    }
    Ok(())
}

/// The text behind a datum, its line ends LF.
fn text_of(datum: &Datum) -> String {
    match datum {
        Datum::Unknown => "?".to_owned(),
        Datum::Inapplicable => ".".to_owned(),
        Datum::Number(number) => number.to_string(),
        Datum::Text(text) => crate::field::normalise(text).into_owned(),
    }
}

fn written_datum<'t>(datum: &Datum, text: &'t str, version: Version) -> Written<'t> {
    match datum {
        Datum::Text(_) => written(text, is_word(text, version), version),
        _ => Written::Token(text.into()),
    }
}
