//! The log of a series of batches: what the thermometer said.
//!
//! ```text
//! id,temperature_C,u_temperature_C
//! B-0117,22.4,0.3
//! B-0118,23.1,0.3
//! ```
//!
//! `id` is the name of the batch as its list is called; `u_temperature_C` may be left out. Other columns are left out with
//! a note. A row that starts with `#` is a comment.

use values::{Diagnostic, Location};

use crate::decode::{decode, excerpt, lines};
use crate::header::nearest;
use crate::layout::{Row, Separator, decimal_comma, split};
use crate::number::{Number, number};

/// Temperature of one batch.
#[derive(Clone, Debug, PartialEq)]
pub struct BatchEntry {
    /// Name of the batch.
    pub id: String,
    /// Temperature of the specimen, °C; `None` where the log has none.
    pub temperature_c: Option<f64>,
    /// Its standard uncertainty, K; `None` where none above zero is given.
    pub u_temperature_c: Option<f64>,
    /// Line of the file, from 1.
    pub source_line: usize,
}

/// A log of batches in file order.
#[derive(Clone, Debug, PartialEq)]
pub struct BatchLog {
    /// One entry for each batch; no id twice.
    pub entries: Vec<BatchEntry>,
    /// What was decided or left out while reading, one sentence each.
    pub notes: Vec<String>,
}

impl BatchLog {
    /// The entry of a batch.
    #[must_use]
    pub fn entry(&self, id: &str) -> Option<&BatchEntry> {
        self.entries.iter().find(|entry| entry.id == id)
    }
}

const ID: &str = "id";
const TEMPERATURE: &str = "temperature_C";
const U_TEMPERATURE: &str = "u_temperature_C";
const NAMES: [&str; 3] = [ID, TEMPERATURE, U_TEMPERATURE];

/// Reads the log of a series; `file` names it in messages.
///
/// # Errors
/// A [`Diagnostic`] with row and column: columns that are missing, misspelt or given twice, an id that is empty or repeated,
/// a temperature that is no number or below −273.15 °C, an ambiguous decimal mark, binary data, a file above 4 MiB.
pub fn read(bytes: &[u8], file: &str) -> Result<BatchLog, Diagnostic> {
    let decoded = decode(bytes, file)?;
    let mut notes = decoded.notes;
    let content: Vec<(usize, &str)> = lines(&decoded.text)
        .filter(|(_, line)| !line.trim().is_empty() && !line.trim_start().starts_with('#'))
        .collect();
    let Some((header_row, header_line)) = content.first().copied() else {
        return Err(Diagnostic::new(
            "a log without content",
            format!("the header `{}` and one row for each batch", NAMES.join(",")),
            "give the file that holds the log",
        )
        .at(Location::new(file, 1, 1)));
    };
    let separator = Separator::ALL
        .into_iter()
        .find(|separator| *separator != Separator::Blank && header_line.contains(mark(*separator)))
        .unwrap_or(Separator::Blank);
    if separator != Separator::Comma {
        notes.push(format!("the columns are separated by {}", separator.plural()));
    }
    let header = trimmed(split(header_line, header_row, separator, file)?, 0);
    let [id, temperature, u_temperature] = find_columns(&header, file, &mut notes)?;
    let (Some(id), Some(temperature)) = (id, temperature) else {
        let found: Vec<String> = header.fields.iter().map(|field| excerpt(field.text)).collect();
        let missing = if id.is_none() { ID } else { TEMPERATURE };
        let kelvin = header.fields.iter().any(|field| field.text.eq_ignore_ascii_case("temperature_K"));
        let mend = if kelvin { "convert to °C (subtract 273.15) and name the column temperature_C" } else { "add it" };
        return Err(Diagnostic::new(
            format!("the columns {} without `{missing}`", found.join(", ")),
            format!("the header `{}`", NAMES.join(",")),
            mend,
        )
        .at(Location::new(file, header_row, 1).wide(header_line.trim_end().chars().count().min(80))));
    };
    let mut rows = Vec::new();
    for (number, line) in &content[1..] {
        let row = trimmed(split(line, *number, separator, file)?, header.fields.len());
        if row.fields.len() != header.fields.len() {
            return Err(Diagnostic::new(
                format!("a row of {} fields, separated by {}", row.fields.len(), separator.plural()),
                format!("{}, as in the header", header.fields.len()),
                "complete the row; put an id that holds the separator into quotation marks",
            )
            .at(row.place(file, header.fields.len().min(row.fields.len()), 0)));
        }
        rows.push(row);
    }
    let numeric: Vec<Row<'_>> = rows
        .iter()
        .map(|row| {
            let fields = [Some(temperature), u_temperature].into_iter().flatten().map(|at| row.fields[at]).collect();
            Row { number: row.number, line: row.line, fields }
        })
        .collect();
    let reader = Reader { file, decimal_comma: decimal_comma(&numeric, 0, file)?, id, temperature, u_temperature };
    let entries = reader.entries(&rows, &mut notes)?;
    let temperatures: Vec<f64> = entries.iter().filter_map(|entry| entry.temperature_c).collect();
    if !temperatures.is_empty() && temperatures.iter().all(|t| (270.0..=320.0).contains(t)) {
        notes.push(format!(
            "all temperatures lie between 270 and 320: these look like kelvin, and `{TEMPERATURE}` means °C"
        ));
    }
    Ok(BatchLog { entries, notes })
}

fn mark(separator: Separator) -> char {
    match separator {
        Separator::Tab => '\t',
        Separator::Semicolon => ';',
        Separator::Comma => ',',
        Separator::Blank => ' ',
    }
}

/// Without empty fields at the end, down to `width`.
fn trimmed(mut row: Row<'_>, width: usize) -> Row<'_> {
    while row.fields.len() > width && row.fields.last().is_some_and(|field| field.text.is_empty()) {
        row.fields.pop();
    }
    row
}

/// Where the three columns stand.
fn find_columns(header: &Row<'_>, file: &str, notes: &mut Vec<String>) -> Result<[Option<usize>; 3], Diagnostic> {
    let mut found = [None; 3];
    for (index, field) in header.fields.iter().enumerate() {
        if let Some(slot) = NAMES.iter().position(|name| name.eq_ignore_ascii_case(field.text)) {
            if found[slot].is_some() {
                return Err(Diagnostic::new(
                    format!("the column `{}` twice", NAMES[slot]),
                    "each name once",
                    "remove one",
                )
                .at(header.place(file, index, 0)));
            }
            found[slot] = Some(index);
        } else if let Some(near) =
            nearest(field.text, NAMES.into_iter()).filter(|_| !field.text.to_lowercase().ends_with("_k"))
        {
            return Err(Diagnostic::new(
                format!("the unknown column `{}`", excerpt(field.text)),
                format!("one of {}", NAMES.join(", ")),
                format!("write `{near}` if that is meant, or give the column a name of its own"),
            )
            .at(header.place(file, index, 0)));
        } else {
            notes.push(format!("the column `{}` is not known and was left out", excerpt(field.text)));
        }
    }
    Ok(found)
}

struct Reader<'a> {
    file: &'a str,
    decimal_comma: bool,
    id: usize,
    temperature: usize,
    u_temperature: Option<usize>,
}

impl Reader<'_> {
    fn entries(&self, rows: &[Row<'_>], notes: &mut Vec<String>) -> Result<Vec<BatchEntry>, Diagnostic> {
        let mut entries: Vec<BatchEntry> = Vec::with_capacity(rows.len());
        let mut seen = std::collections::HashMap::new();
        for row in rows {
            let id = row.fields[self.id].text.replace("\"\"", "\"");
            if id.is_empty() {
                return Err(Diagnostic::new("a row without id", "the name of the batch", "write the id into the row")
                    .at(row.place(self.file, self.id, 0)));
            }
            if let Some(first) = seen.insert(id.clone(), row.number) {
                return Err(Diagnostic::new(
                    format!("the batch `{}` again, as in row {first}", excerpt(&id)),
                    "each batch once",
                    "keep the row that is right",
                )
                .at(row.place(self.file, self.id, 0)));
            }
            let temperature_c = self.number(row, self.temperature)?.map(|(value, _)| value);
            if temperature_c.is_some_and(|t| t < -273.15) {
                return Err(Diagnostic::new(
                    format!("a temperature of {} °C", excerpt(row.fields[self.temperature].text)),
                    "a temperature above −273.15 °C",
                    "correct the value",
                )
                .at(row.place(self.file, self.temperature, 0)));
            }
            let inside = self.number(row, self.temperature)?.and_then(|(_, u)| u);
            let own = self.u_temperature.map(|at| self.number(row, at)).transpose()?.flatten().map(|(value, _)| value);
            let u_temperature_c = own.or(inside).filter(|u| *u > 0.0);
            match (temperature_c, u_temperature_c) {
                (None, _) => {
                    notes.push(format!("the batch `{}` has no temperature (row {})", excerpt(&id), row.number))
                }
                (Some(_), None) => notes.push(format!(
                    "the temperature of the batch `{}` has no s.u. above zero (row {}), which was taken as missing",
                    excerpt(&id),
                    row.number
                )),
                _ => {}
            }
            entries.push(BatchEntry { id, temperature_c, u_temperature_c, source_line: row.number });
        }
        if entries.is_empty() {
            notes.push("the log holds no batch".to_owned());
        }
        Ok(entries)
    }

    fn number(&self, row: &Row<'_>, index: usize) -> Result<Option<(f64, Option<f64>)>, Diagnostic> {
        let text = row.fields[index].text;
        match number(text, self.decimal_comma) {
            Ok(Number::Missing) => Ok(None),
            Ok(Number::Value { value, u, .. }) => Ok(Some((value, u))),
            Err(wrong) => {
                Err(Diagnostic::new(format!("`{}` is not a number", excerpt(text)), wrong.expected, wrong.mend)
                    .at(row.place(self.file, index, wrong.offset).wide(1)))
            }
        }
    }
}
