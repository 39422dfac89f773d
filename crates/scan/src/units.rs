//! A row of units under the names of the columns.

use values::Diagnostic;

use crate::decode::excerpt;
use crate::header::Column;
use crate::layout::Row;
use crate::number::{Number, number};

/// A row of units right under the names is skipped; units that contradict the names are refused.
pub(crate) fn skip_units(
    columns: &[Column],
    rows: &mut Vec<Row<'_>>,
    file: &str,
    notes: &mut Vec<String>,
) -> Result<(), Diagnostic> {
    const UNITS: [&str; 16] = [
        "", "deg", "°", "degree", "degrees", "°2θ", "å", "a", "angstrom", "counts", "cts", "cps", "%", "-", "a.u.",
        "au",
    ];
    let Some(first) = rows.first() else { return Ok(()) };
    let bare = |text: &str| text.trim_matches(['(', ')', '[', ']', ' ']).to_lowercase();
    let is_word = |text: &str| text.chars().next().is_some_and(|c| c.is_alphabetic() || "°([%".contains(c));
    let all_words = first.fields.iter().all(|field| field.text.is_empty() || field.text == "-" || is_word(field.text));
    if !all_words || first.fields.iter().all(|field| matches!(number(field.text, true), Ok(Number::Missing))) {
        return Ok(());
    }
    for (index, (field, column)) in first.fields.iter().zip(columns).enumerate() {
        let unit = bare(field.text);
        let angle = matches!(unit.as_str(), "deg" | "°" | "degree" | "degrees" | "°2θ" | "");
        let length = matches!(unit.as_str(), "å" | "a" | "angstrom" | "");
        let fits = match column {
            Column::TwoTheta | Column::UTwoTheta | Column::UCounting | Column::UModel | Column::Fwhm => angle,
            Column::D | Column::UD => length,
            Column::Ignored => true,
            _ => UNITS.contains(&unit.as_str()),
        };
        if !fits {
            return Err(Diagnostic::new(
                format!("`{}` in the row under the names", excerpt(field.text)),
                "numbers, or a row of units that agree with the names (deg, Å)",
                "convert the column to the unit in its name, and remove the row of units",
            )
            .at(first.place(file, index, 0)));
        }
    }
    notes.push(format!("row {} holds units and was skipped", first.number));
    rows.remove(0);
    Ok(())
}
