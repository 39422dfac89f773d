//! Coordinate triplets: from text to an [`Operation`] or to a change of basis, total over all texts.

use super::operation::{Operation, TRANSLATION_UNIT};
use crate::SymmetryError;

/// Longest triplet that is read; the longest in use have some forty characters.
const LONGEST: usize = 200;

const EXPECTED: &str = "a triplet such as -x+1/2,y,-z";

/// See [`Operation::parse`].
pub(super) fn parse(text: &str) -> Result<Operation, SymmetryError> {
    let mut reader = Reader { bytes: text.as_bytes(), at: 0, text };
    if text.len() > LONGEST {
        let end = text.floor_char_boundary(LONGEST);
        return Err(reader.error_at(end, format!("an operation of {} bytes", text.len()), EXPECTED));
    }
    let quote = reader.skip_opening();
    let mut operation = Operation { rotation: [[0; 3]; 3], translation: [0; 3] };
    for row in 0..3 {
        let (factors, shift) = reader.term()?;
        operation.rotation[row] = factors;
        operation.translation[row] = shift.rem_euclid(TRANSLATION_UNIT);
        reader.skip_blanks();
        if row < 2 {
            match reader.peek() {
                Some(b',') => reader.at += 1,
                _ => return Err(reader.error_here("a comma and the next coordinate")),
            }
        }
    }
    if let (Some(quote), Some(found)) = (quote, reader.peek())
        && quote == found
    {
        reader.at += 1;
        reader.skip_blanks();
    }
    if reader.peek().is_some() {
        return Err(reader.error_here("the end of the operation behind three coordinates"));
    }
    let determinant = operation.determinant();
    if determinant.abs() != 1 {
        return Err(reader.error_at(
            0,
            format!("`{}` whose rotation has determinant {determinant}", text.trim()),
            "determinant 1 or -1",
        ));
    }
    Ok(operation)
}

struct Reader<'a> {
    bytes: &'a [u8],
    at: usize,
    text: &'a str,
}

impl<'a> Reader<'a> {
    fn peek(&self) -> Option<u8> {
        self.bytes.get(self.at).copied()
    }

    fn skip_blanks(&mut self) {
        while self.peek().is_some_and(|b| b.is_ascii_whitespace()) {
            self.at += 1;
        }
    }

    /// Blanks, an opening quote, a leading number column. Returns the quote.
    fn skip_opening(&mut self) -> Option<u8> {
        self.skip_blanks();
        let quote = self.peek().filter(|b| matches!(b, b'\'' | b'"'));
        if quote.is_some() {
            self.at += 1;
            self.skip_blanks();
        }
        let start = self.at;
        while self.peek().is_some_and(|b| b.is_ascii_digit()) {
            self.at += 1;
        }
        let digits = self.at - start;
        self.skip_blanks();
        // A number column is set off by blanks and followed by a coordinate; `1 /2+x` and `1/2+x` are not.
        let column = digits > 0
            && self.at > start + digits
            && self.peek().is_some_and(|b| b.is_ascii_alphanumeric() || matches!(b, b'.' | b'+' | b'-' | b'\'' | b'"'));
        if !column {
            self.at = start;
            return quote;
        }
        let inner = self.peek().filter(|b| quote.is_none() && matches!(b, b'\'' | b'"'));
        if inner.is_some() {
            self.at += 1;
        }
        quote.or(inner)
    }

    /// One coordinate: factors of x, y, z and the translation in 24ths.
    fn term(&mut self) -> Result<([i8; 3], i32), SymmetryError> {
        let mut factors = [0_i8; 3];
        let mut shift = 0;
        let mut empty = true;
        loop {
            self.skip_blanks();
            let sign = match self.peek() {
                Some(b'+') => 1,
                Some(b'-') => -1,
                Some(b',') | None if !empty => return Ok((factors, shift)),
                Some(b'\'' | b'"') if !empty => return Ok((factors, shift)),
                _ if empty => 0,
                _ => return Err(self.error_here("a sign, a comma or the end of the operation")),
            };
            if sign != 0 {
                self.at += 1;
                self.skip_blanks();
            }
            let sign = if sign == 0 { 1 } else { sign };
            match self.peek() {
                Some(letter @ (b'x' | b'y' | b'z' | b'X' | b'Y' | b'Z')) => {
                    let axis = usize::from(letter.to_ascii_lowercase() - b'x');
                    if factors[axis] != 0 {
                        return Err(self.error_here("each of x, y and z at most once in a coordinate"));
                    }
                    factors[axis] = sign;
                    self.at += 1;
                }
                Some(b'0'..=b'9' | b'.') => {
                    shift = (shift + i32::from(sign) * self.number()?).rem_euclid(TRANSLATION_UNIT);
                }
                _ => return Err(self.error_here("x, y, z or a number")),
            }
            empty = false;
        }
    }

    /// A fraction or a decimal, in 24ths.
    fn number(&mut self) -> Result<i32, SymmetryError> {
        let start = self.at;
        let whole = self.digits();
        let mut decimals = "";
        let is_decimal = self.peek() == Some(b'.');
        if is_decimal {
            self.at += 1;
            decimals = self.digits();
        }
        if whole.is_empty() && decimals.is_empty() {
            return Err(self.error_here("a digit"));
        }
        let before_blanks = self.at;
        self.skip_blanks();
        let shift = if self.peek() == Some(b'/') {
            self.at += 1;
            self.skip_blanks();
            let divisor = self.digits();
            if divisor.is_empty() {
                return Err(self.error_here("a denominator"));
            }
            let (Ok(top), Ok(bottom), false) = (whole.parse::<i64>(), divisor.parse::<i64>(), is_decimal) else {
                return Err(self.no_24th(start));
            };
            let scaled = top.checked_mul(i64::from(TRANSLATION_UNIT)).ok_or_else(|| self.no_24th(start))?;
            if bottom == 0 || scaled % bottom != 0 {
                return Err(self.no_24th(start));
            }
            scaled / bottom
        } else {
            self.at = before_blanks;
            self.decimal(start, whole, decimals)?
        };
        self.skip_blanks();
        if let Some(next @ (b'*' | b'x' | b'y' | b'z' | b'X' | b'Y' | b'Z')) = self.peek() {
            let expected =
                if next == b'*' { "no factor: rotations are x, y or z with a sign" } else { "a sign before it" };
            return Err(self.error_here(expected));
        }
        // Reduced, it fits.
        Ok((shift % i64::from(TRANSLATION_UNIT)) as i32)
    }

    /// A decimal, to the nearest 24th within one unit of its last digit (two digits at least) or exactly.
    fn decimal(&self, start: usize, whole: &str, decimals: &str) -> Result<i64, SymmetryError> {
        let value: f64 = format!("0{whole}.{decimals}0").parse().map_err(|_| self.no_24th(start))?;
        if value > 1e6 {
            return Err(self.no_24th(start));
        }
        let unit = f64::from(TRANSLATION_UNIT);
        let nearest = (value * unit).round();
        let digits = i32::try_from(decimals.len()).unwrap_or(i32::MAX).min(12);
        let tolerance = if digits >= 2 { 10f64.powi(-digits) } else { 0.0 };
        if (value - nearest / unit).abs() <= tolerance + 1e-12 { Ok(nearest as i64) } else { Err(self.no_24th(start)) }
    }

    fn digits(&mut self) -> &'a str {
        let start = self.at;
        while self.peek().is_some_and(|b| b.is_ascii_digit()) {
            self.at += 1;
        }
        &self.text[start..self.at]
    }

    fn no_24th(&self, start: usize) -> SymmetryError {
        self.error_at(
            start,
            format!("translation `{}`", self.text[start..self.at].trim()),
            "a multiple of 1/24, as a fraction or a decimal of two or more digits (0.5, 1/3, 0.333)",
        )
    }

    fn error_here(&self, expected: &str) -> SymmetryError {
        let found = match self.text.get(self.at..).and_then(|rest| rest.chars().next()) {
            Some(character) => format!("`{}` in operation `{}`", character.escape_debug(), self.text.trim()),
            None => format!("the end of operation `{}`", self.text.trim()),
        };
        self.error_at(self.at, found, expected)
    }

    fn error_at(&self, offset: usize, found: String, expected: &str) -> SymmetryError {
        SymmetryError::new(found, expected, "write the operation as in -x+1/2,y,-z").at(offset)
    }
}

#[cfg(test)]
mod tests {
    use super::super::operation::Operation;

    #[test]
    fn all_spellings_of_the_open_formats_are_read() {
        // Outside: the forms listed in the note on open formats, section 3.
        for (text, plain) in [
            ("x,y,z", "x,y,z"),
            ("-x+1/2,y,-z", "-x+1/2,y,-z"),
            ("1/2-x, y, z", "-x+1/2,y,z"),
            ("X,Y,Z", "x,y,z"),
            ("'x, y, z'", "x,y,z"),
            ("\"x, y, z\"", "x,y,z"),
            ("+x,+y,+z", "x,y,z"),
            ("0.5+x,.5+y,1.5+z", "x+1/2,y+1/2,z+1/2"),
            ("0.3333+x,0.667-y,z+.33", "x+1/3,-y+2/3,z+1/3"),
            ("1 x,y,z", "x,y,z"),
            ("12 'x,y,z'", "x,y,z"),
            ("2 1/2+x,y,z", "x+1/2,y,z"),
            (" x - y , x , z + 5 / 6 ", "x-y,x,z+5/6"),
            ("1/4+y,-3/4-x,z-1", "y+1/4,-x+1/4,z"),
            ("x+0.125,y,z", "x+1/8,y,z"),
            ("z,x,-1/2+y", "z,x,y+1/2"),
            ("x+1/2+1/4,y,z", "x+3/4,y,z"),
        ] {
            let read = Operation::parse(text).unwrap_or_else(|e| panic!("{text}: {e}"));
            assert_eq!(read.to_string(), plain, "{text}");
        }
    }

    #[test]
    fn what_is_no_operation_is_refused_with_its_place() {
        for (text, offset) in [
            ("", 0),
            ("x,y", 3),
            ("x,y,z,", 5),
            ("2x,y,z", 1),
            ("2*x,y,z", 1),
            ("x+x,y,z", 2),
            ("x,,z", 2),
            ("x,y,w", 4),
            ("x,y,z+1/5", 6),
            ("x,y,z+0.3", 6),
            ("x,y,z+1/0", 6),
            ("x,y,z+1/", 8),
            ("x,x,z", 0),
            ("x,y,x", 0),
            ("x y z", 2),
            ("x,y,−z", 4),
            ("x,y,z'", 5),
            ("x,y,z+99999999999999999999/2", 6),
            ("x,y,1.5.5+z", 7),
        ] {
            let error = Operation::parse(text).unwrap_err();
            assert_eq!(error.offset, Some(offset), "{text}: {error}");
        }
    }
}
