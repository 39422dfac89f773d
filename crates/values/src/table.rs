//! Tables of `data/`: comma-separated rows under a header that says where the numbers come from.
//!
//! ```text
//! # Scattering factors of free atoms and ions
//! # units: a and c electrons; b Å²
//! # source: International Tables for Crystallography C (1992), Table 6.1.1.4
//! # range: 0 ≤ s ≤ 2 Å⁻¹
//! # made by: tools/f0.py
//! # checked by: crates/structure-factor/tests/f0_table.rs
//! ion,a1,b1
//! H,0.493002,10.5109
//! ```
//!
//! A header line that is indented by three blanks continues the one above. A table without one of the five keys, or whose
//! maker is its own checker, is refused: a number without an origin can't be corrected.

use crate::{Diagnostic, Location};

/// Keys that every table must carry.
const KEYS: [&str; 5] = ["units", "source", "range", "made by", "checked by"];

/// A table with its origin.
#[derive(Clone, Debug, PartialEq)]
pub struct Table<'a> {
    /// First line of the header.
    pub title: &'a str,
    /// Header entries in file order, key in lower case; values without their continuation lines joined by blanks.
    pub header: Vec<(String, String)>,
    /// Column names.
    pub columns: Vec<&'a str>,
    /// Rows in file order.
    pub rows: Vec<Row<'a>>,
}

/// One row of a table.
#[derive(Clone, Debug, PartialEq)]
pub struct Row<'a> {
    /// Line of the file, from 1.
    pub line: usize,
    /// Fields, as many as there are columns.
    pub fields: Vec<&'a str>,
}

impl<'a> Table<'a> {
    /// Reads a table; `file` names it in messages.
    ///
    /// # Errors
    /// A [`Diagnostic`] with the line: a missing key of the header, a maker that is also the checker, a row with another
    /// number of fields than there are columns, or no row at all.
    pub fn parse(text: &'a str, file: &str) -> Result<Self, Diagnostic> {
        let mut title = "";
        let mut header: Vec<(String, String)> = Vec::new();
        let mut columns: Vec<&str> = Vec::new();
        let mut rows = Vec::new();
        for (index, raw) in text.lines().enumerate() {
            let line = index + 1;
            let raw = raw.trim_end();
            if let Some(comment) = raw.strip_prefix('#') {
                if title.is_empty() {
                    title = comment.trim();
                } else if comment.starts_with("   ") {
                    if let Some((_, value)) = header.last_mut() {
                        value.push(' ');
                        value.push_str(comment.trim());
                    }
                } else if let Some((key, value)) = comment.split_once(':') {
                    header.push((key.trim().to_lowercase(), value.trim().to_owned()));
                }
            } else if raw.is_empty() {
            } else if columns.is_empty() {
                columns = raw.split(',').map(str::trim).collect();
            } else {
                let fields: Vec<&str> = raw.split(',').map(str::trim).collect();
                if fields.len() != columns.len() {
                    return Err(Diagnostic::new(
                        format!("a row of {} fields", fields.len()),
                        format!("{}, one for each column", columns.len()),
                        "complete the row",
                    )
                    .at(Location::new(file, line, 1)));
                }
                rows.push(Row { line, fields });
            }
        }
        let table = Self { title, header, columns, rows };
        table.check(file)?;
        Ok(table)
    }

    fn check(&self, file: &str) -> Result<(), Diagnostic> {
        let at = |message: Diagnostic| message.at(Location::new(file, 1, 1));
        for key in KEYS {
            if self.entry(key).is_none_or(str::is_empty) {
                return Err(at(Diagnostic::new(
                    format!("a table without `{key}` in its header"),
                    format!("the keys {}", KEYS.join(", ")),
                    format!("add a line `# {key}: …`"),
                )));
            }
        }
        if self.entry("made by") == self.entry("checked by") {
            return Err(at(Diagnostic::new(
                "a table whose maker is its only checker",
                "two different names behind `made by` and `checked by`",
                "let something else check the table, and name it",
            )));
        }
        if self.rows.is_empty() {
            return Err(at(Diagnostic::new("a table without rows", "at least one row", "restore the table")));
        }
        Ok(())
    }

    /// Value of a header key, in lower case.
    #[must_use]
    pub fn entry(&self, key: &str) -> Option<&str> {
        self.header.iter().find(|(name, _)| name == key).map(|(_, value)| value.as_str())
    }

    /// Index of a column.
    #[must_use]
    pub fn column(&self, name: &str) -> Option<usize> {
        self.columns.iter().position(|c| *c == name)
    }
}

#[cfg(test)]
mod tests {
    use super::Table;

    const GOOD: &str = "# Masses\n# units: g/mol\n# source: A (2020),\n#    table 1\n# range: all\n# made by: x.py\n# checked by: y.rs\nname,mass\nH,1.008\n";

    #[test]
    fn a_table_with_its_origin_is_read() {
        let table = Table::parse(GOOD, "masses.csv").unwrap();
        assert_eq!(table.title, "Masses");
        assert_eq!(table.entry("source"), Some("A (2020), table 1"));
        assert_eq!(table.rows[0].fields, ["H", "1.008"]);
        assert_eq!((table.rows[0].line, table.column("mass")), (9, Some(1)));
    }

    #[test]
    fn a_table_without_any_one_of_its_keys_is_refused() {
        for key in ["units", "source", "range", "made by", "checked by"] {
            let text = GOOD.replace(&format!("# {key}:"), "# other:");
            let message = Table::parse(&text, "masses.csv").unwrap_err();
            assert!(message.found.contains(key), "{message}");
        }
    }

    #[test]
    fn a_maker_is_not_its_own_checker() {
        let text = GOOD.replace("y.rs", "x.py");
        assert!(Table::parse(&text, "masses.csv").unwrap_err().found.contains("only checker"));
    }

    #[test]
    fn a_short_row_is_refused_with_its_line() {
        let text = format!("{GOOD}He\n");
        assert_eq!(Table::parse(&text, "masses.csv").unwrap_err().location.unwrap().line, 10);
    }
}
