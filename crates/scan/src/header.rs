//! The names of the columns of a peak list.

use values::Diagnostic;

use crate::decode::excerpt;
use crate::layout::Row;

/// What a column of a peak list holds.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Column {
    TwoTheta,
    D,
    UTwoTheta,
    UD,
    UCounting,
    UModel,
    Intensity,
    Area,
    UArea,
    Height,
    Fwhm,
    /// A name that this program does not know; kept out, and said.
    Ignored,
}

/// Every known name, in the order in which they are written.
pub(crate) const NAMES: [(&str, Column); 11] = [
    ("two_theta_deg", Column::TwoTheta),
    ("u_two_theta_deg", Column::UTwoTheta),
    ("u_counting_deg", Column::UCounting),
    ("u_model_deg", Column::UModel),
    ("d_A", Column::D),
    ("u_d_A", Column::UD),
    ("intensity", Column::Intensity),
    ("area", Column::Area),
    ("u_area", Column::UArea),
    ("height", Column::Height),
    ("fwhm_deg", Column::Fwhm),
];

/// Names of other abscissae and units, and how to mend them. A unit is never converted on a guess.
const FOREIGN: [(&[&str], &str); 5] = [
    (
        &["2theta", "2th", "2t", "twotheta", "2thetadeg", "angle", "position", "pos", "2θ", "2θdeg", "2thdeg"],
        "name the column two_theta_deg if it holds 2θ in degrees",
    ),
    (&["d", "dspacing", "dvalue", "dangstrom", "dang", "dhkl", "spacing"], "name the column d_A if it holds d in Å"),
    (&["theta", "thetadeg", "th", "θ"], "double the values and name the column two_theta_deg"),
    (&["dnm", "dpm"], "convert to Å (1 nm = 10 Å, 100 pm = 1 Å) and name the column d_A"),
    (&["q", "q1", "qa1", "q1a", "s", "1d", "invd"], "convert to d in Å (d = 2π/Q = 1/s) and name the column d_A"),
];

/// The column of a known name, in any case.
pub(crate) fn known(name: &str) -> Option<Column> {
    NAMES.iter().find(|(known, _)| known.eq_ignore_ascii_case(name)).map(|(_, column)| *column)
}

/// Letters, digits and θ only, in lower case: what stays of a name when its spelling is forgotten.
fn bare(name: &str) -> String {
    name.chars().take(40).flat_map(char::to_lowercase).filter(|c| c.is_ascii_alphanumeric() || *c == 'θ').collect()
}

/// How to mend a name that means a position in another spelling or unit.
pub(crate) fn foreign_position(name: &str) -> Option<&'static str> {
    let bare = bare(name);
    FOREIGN.iter().find(|(names, _)| names.contains(&bare.as_str())).map(|(_, mend)| *mend)
}

/// Reads the names of a header row whose separator is settled.
///
/// # Errors
/// A name twice; a name that is nearly a known one (a misspelt `u_…` would silently lose the uncertainties).
pub(crate) fn columns(row: &Row<'_>, file: &str, notes: &mut Vec<String>) -> Result<Vec<Column>, Diagnostic> {
    let mut columns = Vec::new();
    for (index, field) in row.fields.iter().enumerate() {
        let Some(column) = known(field.text) else {
            if let Some(near) = nearest(field.text, NAMES.iter().map(|(name, _)| *name)) {
                return Err(Diagnostic::new(
                    format!("the unknown column `{}`", excerpt(field.text)),
                    format!("one of {}", NAMES.map(|(name, _)| name).join(", ")),
                    format!("write `{near}` if that is meant, or give the column a name of its own"),
                )
                .at(row.place(file, index, 0)));
            }
            notes.push(format!("the column `{}` is not known and was left out", excerpt(field.text)));
            columns.push(Column::Ignored);
            continue;
        };
        if columns.contains(&column) {
            return Err(Diagnostic::new(
                format!("the column `{}` twice", excerpt(field.text)),
                "each name once",
                "remove or rename one of the two",
            )
            .at(row.place(file, index, 0)));
        }
        columns.push(column);
    }
    Ok(columns)
}

/// The known name that differs from `name` in at most a quarter of its letters, or only in spelling marks.
pub(crate) fn nearest<'k>(name: &str, known: impl Iterator<Item = &'k str>) -> Option<&'k str> {
    let bare_name = bare(name);
    if bare_name.is_empty() {
        return None;
    }
    known
        .map(|candidate| (distance(&bare_name, &bare(candidate)), candidate))
        .filter(|(distance, candidate)| distance * 4 <= bare(candidate).len())
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, candidate)| candidate)
}

/// Levenshtein's distance of two short words: insertions, deletions, replacements.
fn distance(a: &str, b: &str) -> usize {
    let b: Vec<char> = b.chars().collect();
    let mut row: Vec<usize> = (0..=b.len()).collect();
    for (i, letter) in a.chars().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, other) in b.iter().enumerate() {
            let replaced = diagonal + usize::from(letter != *other);
            diagonal = row[j + 1];
            row[j + 1] = replaced.min(diagonal + 1).min(row[j] + 1);
        }
    }
    row[b.len()]
}

#[cfg(test)]
mod tests {
    use super::{Column, foreign_position, known, nearest};

    #[test]
    fn names_are_known_in_any_case() {
        assert_eq!(known("Two_Theta_Deg"), Some(Column::TwoTheta));
        assert_eq!(known("d_a"), Some(Column::D));
        assert_eq!(known("2theta"), None);
    }

    #[test]
    fn a_misspelt_name_finds_its_neighbour_and_a_foreign_one_does_not() {
        let names = || ["two_theta_deg", "u_two_theta_deg", "intensity", "area"].into_iter();
        assert_eq!(nearest("u_twotheta_deg", names()), Some("u_two_theta_deg"));
        assert_eq!(nearest("intensty", names()), Some("intensity"));
        assert_eq!(nearest("comment", names()), None);
        assert_eq!(nearest("hkl", names()), None);
    }

    #[test]
    fn other_abscissae_are_named_with_their_conversion() {
        assert!(foreign_position("2Theta (deg)").unwrap().contains("two_theta_deg"));
        assert!(foreign_position("Theta").unwrap().contains("double"));
        assert!(foreign_position("d (nm)").unwrap().contains("10 Å"));
        assert!(foreign_position("Q (1/Å)").unwrap().contains("2π/Q"));
        assert_eq!(foreign_position("counts"), None);
    }
}
