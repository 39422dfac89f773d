//! Rows of a list, column by column, to lines.

use values::{Diagnostic, Location, Peak, TwoTheta, Wavelength};

use crate::decode::excerpt;
use crate::header::{self, Column};
use crate::layout::{Row, Separator, decimal_comma};
use crate::number::{Number, number};
use crate::peak_list::PositionKind;
use crate::units::skip_units;
use crate::{merge, scan_like};

/// Rows whose columns, decimal mark and position are settled.
pub(crate) struct Columns<'a> {
    columns: Vec<Column>,
    rows: Vec<Row<'a>>,
    decimal_comma: bool,
    pub position: PositionKind,
    position_at: usize,
    /// Most decimals that any position has: a spreadsheet drops final zeros, so fewer say nothing.
    pub decimals: i32,
    header_row: usize,
    file: &'a str,
}

impl<'a> Columns<'a> {
    pub fn new(
        columns: Vec<Column>,
        header_row: usize,
        mut rows: Vec<Row<'a>>,
        separator: Separator,
        file: &'a str,
        notes: &mut Vec<String>,
    ) -> Result<Self, Diagnostic> {
        let at = |column: Column| columns.iter().position(|c| *c == column);
        let (position, position_at) = match (at(Column::TwoTheta), at(Column::D)) {
            (Some(index), _) => (PositionKind::TwoTheta, index),
            (None, index) => (PositionKind::D, index.unwrap_or(0)),
        };
        skip_units(&columns, &mut rows, file, notes)?;
        let numeric: Vec<Row<'_>> = rows
            .iter()
            .map(|row| {
                let kept = row.fields.iter().zip(&columns).filter(|(_, column)| **column != Column::Ignored);
                Row { number: row.number, line: row.line, fields: kept.map(|(field, _)| *field).collect() }
            })
            .collect();
        let ignored_before = columns[..position_at].iter().filter(|c| **c == Column::Ignored).count();
        let decimal_comma = decimal_comma(&numeric, position_at - ignored_before, file)?;
        if decimal_comma {
            notes.push("numbers are read with decimal commas".to_owned());
        }
        let mut table = Self { columns, rows, decimal_comma, position, position_at, decimals: 0, header_row, file };
        let mut positions = Vec::new();
        for row in &table.rows {
            if let Some((value, _, decimals)) = table.number(row, position_at)? {
                positions.push(value);
                table.decimals = table.decimals.max(decimals);
            }
        }
        let first = table.rows.first().map_or_else(|| Location::new(file, 1, 1), |row| row.place(file, position_at, 0));
        if let Some(scan) = scan_like::refusal(&positions, table.decimals, &first) {
            return Err(scan);
        }
        // `28,441` under two names: 28 and 441, or one number and nothing? No list has only whole degrees.
        if separator == Separator::Comma && table.columns.len() > 1 && table.decimals == 0 && !positions.is_empty() {
            let row = &table.rows[0];
            return Err(Diagnostic::new(
                format!("`{}`: only whole numbers as positions in a file separated by commas", excerpt(row.line.trim())),
                "positions with decimals",
                "if the commas are decimal marks, separate the columns by `;`; if not, write the positions with all their digits (28.00)",
            )
            .at(first));
        }
        Ok(table)
    }

    /// A number of a row: value, s.u. in parentheses, decimals.
    fn number(&self, row: &Row<'_>, index: usize) -> Result<Option<(f64, Option<f64>, i32)>, Diagnostic> {
        let text = row.fields[index].text;
        match number(text, self.decimal_comma) {
            Ok(Number::Missing) => Ok(None),
            Ok(Number::Value { value, u, decimals }) => Ok(Some((value, u, decimals))),
            Err(wrong) => {
                let name = header::NAMES.iter().find(|(_, column)| *column == self.columns[index]);
                Err(Diagnostic::new(
                    format!("{} `{}` is not a number", name.map_or("the value", |(name, _)| name), excerpt(text)),
                    wrong.expected,
                    wrong.mend,
                )
                .at(row.place(self.file, index, wrong.offset).wide(1)))
            }
        }
    }

    /// Every row as a line, in file order, with the s.u. of its digits.
    pub fn lines(&self, wavelength: Wavelength, notes: &mut Vec<String>) -> Result<Vec<merge::WithDigits>, Diagnostic> {
        let mut lines = Vec::with_capacity(self.rows.len());
        let mut skipped = Skipped::default();
        for row in &self.rows {
            match self.line(row, wavelength, &mut skipped)? {
                Some(line) => lines.push(line),
                None => skipped.position.push(row.number),
            }
        }
        skipped.into_notes(notes);
        if lines.is_empty() {
            return Err(Diagnostic::new(
                "no row with a position under the header",
                "at least one line",
                "give the positions of the lines, one in each row",
            )
            .at(Location::new(self.file, self.rows.first().map_or(self.header_row, |row| row.number), 1)));
        }
        Ok(lines)
    }

    fn line(
        &self,
        row: &Row<'_>,
        wavelength: Wavelength,
        skipped: &mut Skipped,
    ) -> Result<Option<merge::WithDigits>, Diagnostic> {
        let mut values = [None; header::NAMES.len()];
        for (index, column) in self.columns.iter().enumerate() {
            if let Some(slot) = header::NAMES.iter().position(|(_, known)| known == column) {
                values[slot] = self.number(row, index)?;
            }
        }
        let get = |column: Column| {
            let slot = header::NAMES.iter().position(|(_, known)| *known == column);
            slot.and_then(|slot| values[slot]).map(|(value, _, _)| value)
        };
        let Some((position, u_inside, _)) = self.number(row, self.position_at)? else { return Ok(None) };
        let two_theta = self.two_theta(row, position, wavelength)?;
        if let (PositionKind::TwoTheta, Some(d)) = (self.position, get(Column::D)) {
            self.agree(row, two_theta, d, wavelength)?;
        }
        // Bragg's law: u(2θ) = 2 tan θ u(d)/d, in radians.
        let from_d =
            |u_d: f64| (2.0 * two_theta.theta_rad().tan() * u_d / two_theta.d_angstrom(wavelength)).to_degrees();
        let mut above_zero = |value: Option<f64>| match value {
            Some(value) if value > 0.0 => Some(value),
            Some(_) => {
                skipped.not_positive.push(row.number);
                None
            }
            None => None,
        };
        let own = above_zero(get(Column::UTwoTheta));
        let own_d = above_zero(get(Column::UD).map(from_d));
        let counting = above_zero(get(Column::UCounting));
        let model = above_zero(get(Column::UModel));
        let fwhm_deg = above_zero(get(Column::Fwhm));
        let from_digits = |u: f64| if self.position == PositionKind::D { from_d(u) } else { u };
        let inside = u_inside.map(from_digits).filter(|u| *u > 0.0);
        if inside.is_some() && (own.is_some() || own_d.is_some()) {
            return Err(Diagnostic::new(
                "an s.u. in parentheses and another in a column of its own",
                "one s.u. for each position",
                "remove one of the two",
            )
            .at(row.place(self.file, self.position_at, 0)));
        }
        let parts = counting.zip(model).map(|(counting, model)| counting.hypot(model));
        let peak = Peak {
            two_theta,
            u_two_theta_deg: own.or(own_d).or(inside).or(parts),
            u_counting_deg: counting,
            u_model_deg: model,
            intensity: get(Column::Intensity).or_else(|| get(Column::Height)),
            area: get(Column::Area),
            fwhm_deg,
            source_line: row.number,
        };
        if peak.u_two_theta_deg.is_some_and(f64::is_infinite) {
            return Err(Diagnostic::new(
                "an s.u. beyond the largest number, 1.8E308",
                "an s.u. far below the position itself",
                "correct the s.u. of this row, or leave it empty",
            )
            .at(row.place(self.file, self.position_at, 0)));
        }
        let half_unit = 0.5 * 10f64.powi(-self.decimals.clamp(-300, 300)) / 3f64.sqrt();
        Ok(Some((peak, from_digits(half_unit))))
    }

    fn two_theta(&self, row: &Row<'_>, position: f64, wavelength: Wavelength) -> Result<TwoTheta, Diagnostic> {
        let place = || row.place(self.file, self.position_at, 0);
        let text = excerpt(row.fields[self.position_at].text);
        // Asked of the angle in radians, where the last bits below 180° and the smallest numbers above 0° are lost.
        let inside = |angle: &TwoTheta| angle.deg() > 0.0 && angle.deg() < 180.0;
        if self.position == PositionKind::TwoTheta {
            if let Some(angle) = Some(TwoTheta::from_deg(position)).filter(inside) {
                return Ok(angle);
            }
            return Err(Diagnostic::new(
                format!("2θ = {text}°"),
                "an angle above 0° and below 180°",
                "correct the value, or start the row with # to leave it out; spacings belong under `d_A`",
            )
            .at(place()));
        }
        if position <= 0.0 {
            return Err(Diagnostic::new(
                format!("d = {text} Å"),
                "a spacing above zero",
                "correct the value, or start the row with # to leave it out",
            )
            .at(place()));
        }
        TwoTheta::from_d(position, wavelength).filter(inside).ok_or_else(|| {
            Diagnostic::new(
                format!(
                    "d = {text} Å, less than half of the wavelength {} Å: no such line exists",
                    wavelength.angstrom()
                ),
                format!("a spacing above {:.5} Å", wavelength.angstrom() / 2.0),
                "give the wavelength of the measurement, or correct the value; 2θ belongs under `two_theta_deg`",
            )
            .at(place())
        })
    }

    /// 2θ and d in one row must mean the same line: otherwise the list belongs to another wavelength.
    fn agree(&self, row: &Row<'_>, two_theta: TwoTheta, d: f64, wavelength: Wavelength) -> Result<(), Diagnostic> {
        let index = self.columns.iter().position(|column| *column == Column::D).unwrap_or(0);
        let decimals = self.number(row, index)?.map_or(0, |(_, _, decimals)| decimals);
        let here = two_theta.d_angstrom(wavelength);
        let last_angle_digit = 10f64.powi(-self.decimals.clamp(-300, 300)).to_radians();
        // One unit of the last digit of d, of the angle, and 100 ppm for what a program does with the wavelength.
        let tolerance = 10f64.powi(-decimals.clamp(-300, 300))
            + here * (1e-4 + last_angle_digit / (2.0 * two_theta.theta_rad().tan()).max(1e-9));
        if (d - here).abs() <= tolerance {
            return Ok(());
        }
        let meant = 2.0 * d * two_theta.theta_rad().sin();
        Err(Diagnostic::new(
            format!(
                "d = {} Å beside 2θ = {:.4}°, which is {here:.4} Å at {} Å",
                excerpt(row.fields[index].text),
                two_theta.deg(),
                wavelength.angstrom()
            ),
            "2θ and d that belong together",
            format!("give the wavelength of the list (this row means {meant:.4} Å), or remove the column `d_A`"),
        )
        .at(row.place(self.file, index, 0)))
    }
}

/// Rows of which something was left out, for the notes.
#[derive(Default)]
struct Skipped {
    position: Vec<usize>,
    not_positive: Vec<usize>,
}

impl Skipped {
    fn into_notes(mut self, notes: &mut Vec<String>) {
        if !self.position.is_empty() {
            notes.push(format!("{} have no position and were left out", rows_in_words(&mut self.position)));
        }
        if !self.not_positive.is_empty() {
            let rows = rows_in_words(&mut self.not_positive);
            notes.push(format!("{rows} have an s.u. or a width of zero or below, which was taken as missing"));
        }
    }
}

/// "rows 3, 7 and 12", at most five of them by number.
pub(crate) fn rows_in_words(rows: &mut Vec<usize>) -> String {
    rows.sort_unstable();
    rows.dedup();
    let shown: Vec<String> = rows.iter().take(5).map(usize::to_string).collect();
    let word = if rows.len() == 1 { "row" } else { "rows" };
    match (shown.split_last(), rows.len()) {
        (Some((last, [])), _) => format!("{word} {last}"),
        (Some((last, before)), count) if count <= 5 => format!("{word} {} and {last}", before.join(", ")),
        (_, count) => format!("{word} {} and {} more", shown.join(", "), count - shown.len()),
    }
}
