//! A change of basis and origin, `x′ = V x + v`, in exact fractions.

use std::fmt;

use super::hall::error;
use super::operation::{Operation, TRANSLATION_UNIT};
use crate::SymmetryError;

/// Entries are counted in this fraction.
const UNIT: i64 = TRANSLATION_UNIT as i64;

/// New coordinates from old: `x′ = V x + v`, entries in 24ths.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Basis {
    /// V by rows, in 24ths.
    pub matrix: [[i64; 3]; 3],
    /// v in 24ths.
    pub shift: [i64; 3],
}

impl Basis {
    /// Reads the change of basis of a Hall symbol that opens with a parenthesis at byte `open`: three numbers in
    /// twelfths, or a triplet.
    pub(super) fn parse_hall(symbol: &str, open: usize) -> Result<Self, SymmetryError> {
        let inner = symbol[open + 1..].trim_end();
        let Some(inner) = inner.strip_suffix(')') else {
            return Err(error(
                symbol.len(),
                "a change of basis that is not closed".to_owned(),
                "a closing parenthesis",
            ));
        };
        let at = open + 1;
        let basis = if inner.contains(',') { triplet(inner, at)? } else { twelfths(inner, at)? };
        if basis.determinant() == 0 {
            return Err(error(at, format!("change of basis ({inner})"), "three independent axes"));
        }
        Ok(basis)
    }

    /// This change after `first`.
    pub(super) fn after(&self, first: &Self) -> Self {
        let matrix = product(&self.matrix, &first.matrix).map(|row| row.map(|entry| entry / UNIT));
        let shift = std::array::from_fn(|i| {
            let moved: i64 = (0..3).map(|k| self.matrix[i][k] * first.shift[k]).sum();
            (self.shift[i] + moved / UNIT).rem_euclid(UNIT)
        });
        Self { matrix, shift }
    }

    /// `24³ det V`.
    fn determinant(&self) -> i64 {
        let m = self.matrix;
        m[0][0] * (m[1][1] * m[2][2] - m[1][2] * m[2][1]) - m[0][1] * (m[1][0] * m[2][2] - m[1][2] * m[2][0])
            + m[0][2] * (m[1][0] * m[2][1] - m[1][1] * m[2][0])
    }

    /// `24² adj V`: V⁻¹ = 24 adj / determinant.
    fn adjoint(&self) -> [[i64; 3]; 3] {
        let m = self.matrix;
        std::array::from_fn(|i| {
            std::array::from_fn(|j| {
                let (a, b, c, d) = ((j + 1) % 3, (j + 2) % 3, (i + 1) % 3, (i + 2) % 3);
                m[a][c] * m[b][d] - m[a][d] * m[b][c]
            })
        })
    }

    /// Generators in the new basis: `V g V⁻¹`, and the old whole translations as far as they are fractions now.
    ///
    /// `None` when a rotation or a translation has no place on the new grid, or when a new axis is no translation of
    /// the old lattice (whose translations beside the whole ones are `centring`, in 24ths).
    pub(super) fn apply(&self, generators: &[Operation], centring: &[[i32; 3]]) -> Option<Vec<Operation>> {
        let (determinant, adjoint) = (self.determinant(), self.adjoint());
        // Each new axis, in old coordinates V⁻¹ eⱼ, must be a lattice translation.
        for column in 0..3 {
            let mut axis = [0_i64; 3];
            for (entry, row) in axis.iter_mut().zip(&adjoint) {
                *entry = whole_quotient(UNIT * UNIT * row[column], determinant)?.rem_euclid(UNIT);
            }
            if axis != [0; 3] && !centring.iter().any(|v| v.map(i64::from) == axis) {
                return None;
            }
        }
        let mut new = Vec::with_capacity(generators.len() + 3);
        for j in 0..3 {
            let translation: [i32; 3] = std::array::from_fn(|i| self.matrix[i][j].rem_euclid(UNIT) as i32);
            new.push(Operation { translation, ..Operation::IDENTITY });
        }
        for generator in generators {
            new.push(self.conjugate(generator, determinant, &adjoint)?);
        }
        Some(new)
    }

    fn conjugate(&self, g: &Operation, determinant: i64, adjoint: &[[i64; 3]; 3]) -> Option<Operation> {
        let turned = product(&product(&self.matrix, &g.rotation.map(|row| row.map(i64::from))), adjoint);
        let mut whole = [[0_i64; 3]; 3];
        let mut rotation = [[0_i8; 3]; 3];
        for i in 0..3 {
            for j in 0..3 {
                whole[i][j] = whole_quotient(turned[i][j], determinant)?;
                rotation[i][j] = i8::try_from(whole[i][j]).ok()?;
            }
        }
        let mut translation = [0; 3];
        for i in 0..3 {
            // v + V t − R′ v, with V in 24ths and t in 24ths.
            let moved: i64 = (0..3).map(|k| self.matrix[i][k] * i64::from(g.translation[k])).sum();
            let back: i64 = (0..3).map(|k| whole[i][k] * self.shift[k]).sum();
            translation[i] = (self.shift[i] + whole_quotient(moved, UNIT)? - back).rem_euclid(UNIT) as i32;
        }
        Some(Operation { rotation, translation })
    }
}

impl fmt::Display for Basis {
    /// `x-y,1/2*x+1/2*y,z+1/4`.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (i, row) in self.matrix.iter().enumerate() {
            let mut text = String::new();
            for (entry, letter) in row.iter().zip(["*x", "*y", "*z"]).chain([(&self.shift[i], "")]) {
                let sign = if *entry < 0 { "-" } else { "+" };
                let size = match entry.abs() {
                    0 => continue,
                    UNIT if !letter.is_empty() => letter.trim_start_matches('*').to_owned(),
                    size => format!("{}{letter}", in_lowest_terms(size)),
                };
                text.push_str(sign);
                text.push_str(&size);
            }
            let text = text.strip_prefix('+').unwrap_or(&text);
            write!(f, "{}{}", if i > 0 { "," } else { "" }, if text.is_empty() { "0" } else { text })?;
        }
        Ok(())
    }
}

/// A number of 24ths above zero as `1/2` or `3`.
fn in_lowest_terms(size: i64) -> String {
    let divisor = (1..=UNIT).rev().find(|d| size % d == 0 && UNIT % d == 0).unwrap_or(1);
    match (size / divisor, UNIT / divisor) {
        (whole, 1) => whole.to_string(),
        (top, bottom) => format!("{top}/{bottom}"),
    }
}

/// The quotient if it is whole.
fn whole_quotient(a: i64, b: i64) -> Option<i64> {
    (a % b == 0).then_some(a / b)
}

fn product(a: &[[i64; 3]; 3], b: &[[i64; 3]; 3]) -> [[i64; 3]; 3] {
    std::array::from_fn(|i| std::array::from_fn(|j| (0..3).map(|k| a[i][k] * b[k][j]).sum()))
}

/// `0 0 1`: an origin shift in twelfths.
fn twelfths(inner: &str, at: usize) -> Result<Basis, SymmetryError> {
    let expected = "three whole numbers from -11 to 11, or a triplet such as x-y,x+y,z";
    let mut shift = [0; 3];
    let mut words = inner.split(|c: char| c.is_whitespace() || c == '_').filter(|word| !word.is_empty());
    for entry in &mut shift {
        let word = words.next().ok_or_else(|| error(at, format!("change of basis ({inner})"), expected))?;
        let twelfth: i64 = word.parse().map_err(|_| error(at, format!("`{word}` in ({inner})"), expected))?;
        if twelfth.abs() > 11 {
            return Err(error(at, format!("`{word}` in ({inner})"), expected));
        }
        *entry = twelfth * (UNIT / 12);
    }
    if words.next().is_some() {
        return Err(error(at, format!("change of basis ({inner})"), expected));
    }
    Ok(Basis { matrix: [[UNIT, 0, 0], [0, UNIT, 0], [0, 0, UNIT]], shift })
}

/// `x-y,x+y,z`, `1/2*x+y/2,…,z+1/4`.
fn triplet(inner: &str, at: usize) -> Result<Basis, SymmetryError> {
    let mut basis = Basis { matrix: [[0; 3]; 3], shift: [0; 3] };
    let parts: Vec<&str> = inner.split(',').collect();
    if parts.len() != 3 {
        return Err(error(at, format!("change of basis ({inner})"), "three coordinates"));
    }
    for (row, part) in parts.iter().enumerate() {
        let compact: String = part.chars().filter(|c| !c.is_whitespace() && *c != '_').collect();
        for term in terms(&compact) {
            let (column, value) = term_value(term).ok_or_else(|| {
                error(at, format!("`{term}` in ({inner})"), "x, y, z or a number, with fractions of 1/24 up to 24")
            })?;
            let place = match column {
                Some(axis) => &mut basis.matrix[row][axis],
                None => &mut basis.shift[row],
            };
            *place += value;
        }
        if basis.matrix[row].iter().any(|entry| entry.abs() > 24 * UNIT) || basis.shift[row].abs() > 24 * UNIT {
            return Err(error(at, format!("`{part}` in ({inner})"), "entries up to 24"));
        }
    }
    Ok(basis)
}

/// Splits `x-y+1/4` before each sign.
fn terms(text: &str) -> impl Iterator<Item = &str> {
    let mut cuts: Vec<usize> = text.match_indices(['+', '-']).map(|(at, _)| at).filter(|at| *at > 0).collect();
    cuts.insert(0, 0);
    cuts.push(text.len());
    (0..cuts.len() - 1).map(move |i| &text[cuts[i]..cuts[i + 1]])
}

/// One term: the column (`None` for the shift) and its value in 24ths.
fn term_value(term: &str) -> Option<(Option<usize>, i64)> {
    let (sign, body) = match term.as_bytes().first()? {
        b'+' => (1, &term[1..]),
        b'-' => (-1, &term[1..]),
        _ => (1, term),
    };
    let letter = body.find(['x', 'y', 'z', 'X', 'Y', 'Z']);
    let (column, factor) = match letter {
        None => (None, fraction(body)?),
        Some(at) => {
            let axis = usize::from(body.as_bytes()[at].to_ascii_lowercase() - b'x');
            let (before, behind) = (&body[..at], &body[at + 1..]);
            let factor = match (before.trim_end_matches('*'), behind.strip_prefix('/')) {
                ("", None) if behind.is_empty() => UNIT,
                ("", Some(divisor)) => fraction(&format!("1/{divisor}"))?,
                (number, None) if behind.is_empty() => fraction(number)?,
                _ => return None,
            };
            (Some(axis), factor)
        }
    };
    Some((column, sign * factor))
}

/// `3`, `1/2` or `0.25` in 24ths, up to 24.
fn fraction(text: &str) -> Option<i64> {
    let number = |digits: &str| {
        (!digits.is_empty() && digits.len() <= 4 && digits.bytes().all(|b| b.is_ascii_digit()))
            .then(|| digits.parse::<i64>().ok())
            .flatten()
    };
    let (top, bottom) = match (text.split_once('/'), text.split_once('.')) {
        (Some((top, bottom)), _) => (number(top)?, number(bottom)?),
        (None, Some((whole, decimals))) => {
            let scale = 10_i64.pow(u32::try_from(decimals.len().min(5)).ok()?);
            (number(whole)? * scale + number(decimals)?, scale)
        }
        (None, None) => (number(text)?, 1),
    };
    if bottom == 0 || (top * UNIT) % bottom != 0 || top > 24 * bottom {
        return None;
    }
    Some(top * UNIT / bottom)
}
