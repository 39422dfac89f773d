//! How the columns of a file are separated, decided once for the whole file.

use values::{Diagnostic, Location, column_of};

use crate::decode::excerpt;

/// More columns than this are no list; the bound keeps one long line from filling the memory.
const MAX_FIELDS: usize = 64;

/// What stands between two columns.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Separator {
    Tab,
    Semicolon,
    Comma,
    Blank,
}

impl Separator {
    /// In the order of trust: a tab in a header never belongs to a name, a blank may.
    pub const ALL: [Separator; 4] = [Separator::Tab, Separator::Semicolon, Separator::Comma, Separator::Blank];

    fn character(self) -> Option<char> {
        match self {
            Separator::Tab => Some('\t'),
            Separator::Semicolon => Some(';'),
            Separator::Comma => Some(','),
            Separator::Blank => None,
        }
    }

    /// For notes and messages.
    pub fn plural(self) -> &'static str {
        match self {
            Separator::Tab => "tabs",
            Separator::Semicolon => "semicolons",
            Separator::Comma => "commas",
            Separator::Blank => "blanks",
        }
    }
}

/// One field of a row: its text without surrounding blanks and quotes, and where it begins.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Field<'a> {
    pub text: &'a str,
    /// Byte offset in the line.
    pub offset: usize,
}

/// A row of a file.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Row<'a> {
    /// Line of the file, from 1.
    pub number: usize,
    pub line: &'a str,
    pub fields: Vec<Field<'a>>,
}

impl Row<'_> {
    /// The place of a field, `offset` bytes into it.
    pub fn place(&self, file: &str, field: usize, offset: usize) -> Location {
        let Some(found) = self.fields.get(field) else {
            return Location::new(file, self.number, self.line.chars().count() + 1);
        };
        let column = column_of(self.line, found.offset + offset);
        let width = found.text.get(offset..).map_or(1, |rest| rest.chars().count());
        Location::new(file, self.number, column).wide(width)
    }
}

/// Splits one line. Fields may be quoted by `"`; inside, `""` stands for one quotation mark and is left as it is. Trailing
/// empty fields are kept.
///
/// # Errors
/// A quotation mark that is not closed, text behind a closing one, more than 64 fields.
pub(crate) fn split<'a>(line: &'a str, number: usize, separator: Separator, file: &str) -> Result<Row<'a>, Diagnostic> {
    let wrong = |offset: usize, found: &str, expected: &str, mend: &str| {
        Diagnostic::new(found, expected, mend).at(Location::new(file, number, column_of(line, offset)))
    };
    let mut fields = Vec::new();
    let mut at = 0;
    let is_blank = |c: char| c.is_whitespace() && Some(c) != separator.character();
    loop {
        at += line[at..].len() - line[at..].trim_start_matches(is_blank).len();
        if separator == Separator::Blank && at == line.len() {
            break;
        }
        if fields.len() == MAX_FIELDS {
            return Err(wrong(
                at,
                "a row of more than 64 columns",
                "the few columns of a list",
                "leave out the others",
            ));
        }
        let rest = &line[at..];
        let end = if rest.starts_with('"') {
            let length = closing_quote(rest).ok_or_else(|| {
                wrong(at, "a quotation mark that is not closed", "a second one in this row", "close or remove it")
            })?;
            fields.push(Field { text: &rest[1..length], offset: at + 1 });
            at + length + 1
        } else {
            let length = match separator.character() {
                Some(mark) => rest.find(mark),
                None => rest.find(char::is_whitespace),
            };
            let text = &rest[..length.unwrap_or(rest.len())];
            fields.push(Field { text: text.trim_end(), offset: at });
            at + text.len()
        };
        let behind = line[end..].trim_start_matches(is_blank);
        at = line.len() - behind.len();
        match separator.character() {
            None if at > end || behind.is_empty() => {}
            _ if behind.is_empty() => break,
            Some(mark) if behind.starts_with(mark) => at += mark.len_utf8(),
            _ => {
                return Err(wrong(
                    at,
                    &format!("`{}` behind a closing quotation mark", excerpt(behind)),
                    &format!("the next column, separated by {}", separator.plural()),
                    "put the whole field into the quotation marks",
                ));
            }
        }
    }
    Ok(Row { number, line, fields })
}

/// Byte offset of the quotation mark that closes the one at the start; doubled ones are skipped.
fn closing_quote(text: &str) -> Option<usize> {
    let mut at = 1;
    loop {
        at += text[at..].find('"')?;
        if !text[at + 1..].starts_with('"') {
            return Some(at);
        }
        at += 2;
    }
}

/// Is a comma the decimal mark of this file?
///
/// `rows` hold only numbers; `position` is the column of 2θ or d, where a thousands separator can't stand (no line lies at
/// 1000° or 1000 Å).
///
/// # Errors
/// Commas and points as decimal marks in one file; commas that can be decimal marks as well as thousands separators.
pub(crate) fn decimal_comma(rows: &[Row<'_>], position: usize, file: &str) -> Result<bool, Diagnostic> {
    let with = |mark: char, only_position: bool| {
        rows.iter().find_map(|row| {
            let found = row.fields.iter().enumerate().find(|(index, field)| {
                (!only_position || *index == position) && field.text.contains(mark) && field.text != "."
            });
            found.map(|(index, _)| (row, index))
        })
    };
    let Some((row, index)) = with(',', false) else { return Ok(false) };
    let comma = row.fields[index].text;
    if let Some((other, _)) = with('.', false) {
        return Err(Diagnostic::new(
            format!("`{}`, while row {} has a decimal point", excerpt(comma), other.number),
            "one decimal mark in the whole file and no thousands separators",
            "write every number with a decimal point and without thousands separators",
        )
        .at(row.place(file, index, 0)));
    }
    let all_like_thousands =
        rows.iter().flat_map(|row| &row.fields).all(|field| !field.text.contains(',') || grouped(field.text));
    if with(',', true).is_none() && all_like_thousands {
        return Err(Diagnostic::new(
            format!("`{}`, which can be a decimal number or have a thousands separator", excerpt(comma)),
            "a number that can be read in one way only",
            "write every number with a decimal point and without thousands separators",
        )
        .at(row.place(file, index, 0)));
    }
    Ok(true)
}

/// `1,234` and `12,345,678`: digits grouped by threes.
fn grouped(text: &str) -> bool {
    let mut groups = text.trim_start_matches(['+', '-']).split(',');
    let first = groups.next().unwrap_or("");
    (1..=3).contains(&first.len())
        && first.bytes().all(|b| b.is_ascii_digit())
        && groups.all(|group| group.len() == 3 && group.bytes().all(|b| b.is_ascii_digit()))
}

#[cfg(test)]
mod tests {
    use super::{Separator, decimal_comma, split};

    fn texts(line: &str, separator: Separator) -> Vec<String> {
        split(line, 1, separator, "a").unwrap().fields.iter().map(|f| f.text.to_owned()).collect()
    }

    #[test]
    fn each_separator_splits_and_empty_fields_stay() {
        assert_eq!(texts("1; 2 ;;", Separator::Semicolon), ["1", "2", "", ""]);
        assert_eq!(texts("1\t\t3", Separator::Tab), ["1", "", "3"]);
        assert_eq!(texts("  1   2 ", Separator::Blank), ["1", "2"]);
        assert_eq!(texts("\"1,5\" , \"a \"\"b\"\"\"", Separator::Comma), ["1,5", "a \"\"b\"\""]);
        assert_eq!(texts("", Separator::Comma), [""]);
    }

    #[test]
    fn quotation_marks_must_close_before_the_next_column() {
        assert_eq!(split("1,\"2", 7, Separator::Comma, "a").unwrap_err().location.unwrap().to_string(), "a:7:3");
        assert_eq!(split("\"1\"2,3", 7, Separator::Comma, "a").unwrap_err().location.unwrap().to_string(), "a:7:4");
        assert_eq!(split("\"1\"2", 7, Separator::Blank, "a").unwrap_err().location.unwrap().to_string(), "a:7:4");
    }

    #[test]
    fn a_comma_is_read_only_where_it_has_one_meaning() {
        let decide = |lines: &[&str]| {
            let rows: Vec<_> = lines
                .iter()
                .enumerate()
                .map(|(i, line)| split(line, i + 1, Separator::Semicolon, "a").unwrap())
                .collect();
            decimal_comma(&rows, 0, "a")
        };
        assert_eq!(decide(&["28.44;100"]), Ok(false));
        assert_eq!(decide(&["28,44;100"]), Ok(true));
        assert_eq!(decide(&["28,441;1,234"]), Ok(true));
        assert_eq!(decide(&["28;100,5"]), Ok(true));
        assert!(decide(&["28;1,234"]).unwrap_err().found.contains("thousands"));
        assert!(decide(&["28.44;1,234"]).unwrap_err().found.contains("decimal point"));
    }

    #[test]
    fn a_row_of_many_columns_is_refused_before_it_fills_the_memory() {
        assert!(split(&"1,".repeat(100), 1, Separator::Comma, "a").is_err());
    }
}
