//! Where the names of the columns stand, and which separator fits them and all rows.

use values::{Diagnostic, Location};

use crate::decode::excerpt;
use crate::header::{self, Column};
use crate::layout::{Row, Separator, split};
use crate::number::{Number, number};
use crate::scan_like;

/// Index of the row with the names of the columns; free text above it is noted and skipped.
pub(crate) fn find_header(content: &[(usize, &str)], file: &str, notes: &mut Vec<String>) -> Result<usize, Diagnostic> {
    let place = |index: usize| {
        let (row, line) = content.get(index).copied().unwrap_or((1, ""));
        Location::new(file, row, 1).wide(line.trim_end().chars().count().min(80))
    };
    let header = "a first row with the names of the columns, `two_theta_deg` or `d_A` among them";
    for (index, (_, line)) in content.iter().enumerate() {
        if Separator::ALL.iter().any(|separator| names_a_position(line, *separator, file)) {
            if index > 0 {
                notes.push(format!("{index} rows of text above the names of the columns were skipped"));
            }
            return Ok(index);
        }
        if starts_with_number(line) {
            if index == 0 {
                return Err(headerless(content, file));
            }
            let (row, above) = content[index - 1];
            let mend =
                foreign_name(above).unwrap_or("name the column of 2θ in degrees two_theta_deg, or that of d in Å d_A");
            return Err(Diagnostic::new(format!("`{}` above the numbers", excerpt(above.trim())), header, mend)
                .at(Location::new(file, row, 1).wide(above.trim_end().chars().count().min(80))));
        }
    }
    if content.is_empty() {
        return Err(Diagnostic::new("a file without content", header, "give the file that holds the list").at(place(0)));
    }
    let mend = content.iter().find_map(|(_, line)| foreign_name(line)).unwrap_or("give the file that holds the list");
    Err(Diagnostic::new("text without columns of numbers", header, mend).at(place(0)))
}

fn names_a_position(line: &str, separator: Separator, file: &str) -> bool {
    split(line, 1, separator, file).is_ok_and(|row| {
        row.fields.iter().any(|field| matches!(header::known(field.text), Some(Column::TwoTheta | Column::D)))
    })
}

/// A name of another spelling or unit for the position in a row of names.
fn foreign_name(line: &str) -> Option<&'static str> {
    line.split([',', ';', '\t']).chain([line.trim()]).chain(line.split_whitespace()).find_map(header::foreign_position)
}

fn starts_with_number(line: &str) -> bool {
    let first = line.split([',', ';', '\t', ' ', '"']).find(|word| !word.is_empty()).unwrap_or("");
    matches!(number(first, true), Ok(Number::Value { .. }))
}

/// The message for numbers without a header; a scan gets its own.
fn headerless(content: &[(usize, &str)], file: &str) -> Diagnostic {
    let (row, line) = content[0];
    let place = Location::new(file, row, 1).wide(line.trim_end().chars().count().min(80));
    let firsts = content.iter().filter_map(|(_, line)| {
        let word = line.split([',', ';', '\t', ' ']).find(|word| !word.is_empty())?;
        match number(word, false) {
            Ok(Number::Value { value, decimals, .. }) => Some((value, decimals)),
            _ => None,
        }
    });
    let (positions, decimals): (Vec<f64>, Vec<i32>) = firsts.unzip();
    if let Some(scan) = scan_like::refusal(&positions, decimals.into_iter().max().unwrap_or(0), &place) {
        return scan;
    }
    let columns = line.split([',', ';', '\t', ' ']).filter(|word| !word.is_empty()).count();
    let example = match columns {
        1 => "two_theta_deg",
        2 => "two_theta_deg,intensity",
        _ => "two_theta_deg,u_two_theta_deg,intensity",
    };
    Diagnostic::new(
        format!("`{}` in the first row, without names of columns", excerpt(line.trim())),
        "a first row that names the columns",
        format!(
            "put a row such as `{example}` above it, with the separator of the file (d_A instead for spacings in Å)"
        ),
    )
    .at(place)
}

/// Splits all rows by the one separator that fits header and rows.
pub(crate) fn split_rows<'a>(
    content: &[(usize, &'a str)],
    file: &str,
) -> Result<(Separator, Row<'a>, Vec<Row<'a>>), Diagnostic> {
    let mut first_error = None;
    for separator in Separator::ALL {
        let (number, line) = content[0];
        if !names_a_position(line, separator, file) {
            continue;
        }
        match split_by(separator, number, line, &content[1..], file) {
            Ok((header, rows)) => return Ok((separator, header, rows)),
            // The first that fits the header is the one that was meant.
            Err(error) => first_error = first_error.or(Some(error)),
        }
    }
    Err(first_error.unwrap_or_else(|| {
        Diagnostic::new("no header", "a row with the names of the columns", "add it").at(Location::new(file, 1, 1))
    }))
}

fn split_by<'a>(
    separator: Separator,
    number: usize,
    line: &'a str,
    content: &[(usize, &'a str)],
    file: &str,
) -> Result<(Row<'a>, Vec<Row<'a>>), Diagnostic> {
    let mut header = split(line, number, separator, file)?;
    while header.fields.last().is_some_and(|field| field.text.is_empty()) {
        header.fields.pop();
    }
    let width = header.fields.len();
    let mut rows = Vec::new();
    for (number, line) in content {
        let mut row = split(line, *number, separator, file)?;
        while row.fields.len() > width && row.fields.last().is_some_and(|field| field.text.is_empty()) {
            row.fields.pop();
        }
        if let Some(second) = second_number(&row, width) {
            return Err(Diagnostic::new(
                "more than one number under a header of one name",
                "a name for each column",
                "name the second column too, such as `two_theta_deg,intensity`, with the separator of the rows",
            )
            .at(row.place(file, 0, second)));
        }
        if row.fields.len() != width {
            let (found, mend) = if row.fields.len() > width {
                let comma = separator == Separator::Comma && row.fields.len() > width;
                let hint = "name every column; with decimal commas, separate the columns by `;`";
                (row.fields.len(), if comma { hint } else { "name every column, or remove what is too much" })
            } else {
                (row.fields.len(), "write an empty field where there is no value")
            };
            return Err(Diagnostic::new(
                format!("a row of {found} fields, separated by {}", separator.plural()),
                format!("{width}, as in the header"),
                mend,
            )
            .at(row.place(file, width.min(row.fields.len()), 0)));
        }
        rows.push(row);
    }
    Ok((header, rows))
}

/// Offset of a second number in the only field of a row; one comma without a point is a decimal mark instead.
fn second_number(row: &Row<'_>, width: usize) -> Option<usize> {
    let [field] = row.fields[..] else { return None };
    if width != 1 {
        return None;
    }
    let inside = field.text.find([';', ' ', '\t']);
    let comma = field.text.find(',').filter(|at| field.text.contains('.') || field.text[at + 1..].contains(','));
    inside.or(comma).map(|at| at + 1)
}
