//! A value with its standard uncertainty, printed and read as the CIF standard writes it: 5.43112(4).

use std::fmt;
use std::str::FromStr;

/// A value and its standard uncertainty, in the same unit.
///
/// Printed by the rule of the IUCr journals: the s.u. has two digits up to 19, else one, and the value ends at the same
/// digit. Source: International Tables for Crystallography G (2005), section 2.2.7.2.5 (numbers with s.u. in
/// parentheses); the rule of 19 from the notes for authors of the IUCr journals (from memory).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Measured {
    /// The value.
    pub value: f64,
    /// Standard uncertainty (one sigma), zero or above; zero means exact or fixed.
    pub u: f64,
}

/// Why a text is no number with an s.u.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct MeasuredError {
    /// Byte offset of the first character that does not fit.
    pub offset: usize,
    /// What was expected there.
    pub expected: &'static str,
}

impl fmt::Display for MeasuredError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "expected {} at byte {}", self.expected, self.offset)
    }
}

impl std::error::Error for MeasuredError {}

impl Measured {
    /// A value with its s.u.
    #[must_use]
    pub fn new(value: f64, u: f64) -> Self {
        Self { value, u }
    }

    /// A value without uncertainty.
    #[must_use]
    pub fn exact(value: f64) -> Self {
        Self { value, u: 0.0 }
    }
}

impl fmt::Display for Measured {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if !self.value.is_finite() || !self.u.is_finite() {
            return f.write_str("?");
        }
        if self.u <= 0.0 {
            return write!(f, "{}", self.value);
        }
        let (digits, exponent) = significant(self.u);
        // Plain notation while it stays short; otherwise a power of ten that the s.u. shares.
        if (-12..=6).contains(&exponent) {
            let places = usize::try_from(-exponent).unwrap_or(0);
            let unit = 10f64.powi(exponent.max(0));
            let value = (self.value / unit).round() * unit;
            let value = if exponent > 0 { value } else { self.value };
            let su =
                if exponent > 0 { format!("{digits}{}", "0".repeat(exponent as usize)) } else { digits.to_string() };
            return write!(f, "{}({su})", unsigned_zero(format!("{value:.places$}")));
        }
        let power = if self.value == 0.0 { exponent } else { (self.value.abs().log10().floor() as i32).max(exponent) };
        let places = usize::try_from(power - exponent).unwrap_or(0);
        // Two steps keep the scale finite for powers beyond 308.
        let mantissa = self.value / 10f64.powi(power / 2) / 10f64.powi(power - power / 2);
        write!(f, "{}E{power}({digits})", unsigned_zero(format!("{mantissa:.places$}")))
    }
}

/// The one or two leading digits of an s.u. and the power of ten of the last of them.
fn significant(u: f64) -> (u32, i32) {
    // Formatting rounds correctly where multiplying by a power of ten would not.
    let text = format!("{u:.1e}");
    let (mantissa, power) = text.split_once('e').unwrap_or((&text, "0"));
    let power: i32 = power.parse().unwrap_or(0);
    let two: u32 = mantissa.replace('.', "").parse().unwrap_or(0);
    if two <= 19 {
        return (two, power - 1);
    }
    let text = format!("{u:.0e}");
    let (mantissa, power) = text.split_once('e').unwrap_or((&text, "0"));
    let one: u32 = mantissa.parse().unwrap_or(0);
    let power: i32 = power.parse().unwrap_or(0);
    // 0.096 rounds up to 0.1: keep the two digits that the rule gives to a ten.
    if one == 1 { (10, power - 1) } else { (one, power) }
}

/// "-0.000" reads as a sign where there is none.
fn unsigned_zero(text: String) -> String {
    match text.strip_prefix('-') {
        Some(rest) if rest.chars().all(|c| c == '0' || c == '.') => rest.to_owned(),
        _ => text,
    }
}

impl FromStr for Measured {
    type Err = MeasuredError;

    /// Reads `[+-]digits[.digits][e[+-]digits][(digits)]`. The s.u. belongs to the last digits before it and scales with the
    /// exponent: 1.5E-3(2) is 0.0015 ± 0.0002. Empty parentheses or `(?)` mean no s.u.: u = 0.
    fn from_str(text: &str) -> Result<Self, MeasuredError> {
        let bytes = text.as_bytes();
        let mut at = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
        let run = |from: usize| bytes[from.min(bytes.len())..].iter().take_while(|b| b.is_ascii_digit()).count();
        let whole = run(at);
        at += whole;
        let mut decimals = 0;
        if bytes.get(at) == Some(&b'.') {
            decimals = run(at + 1);
            at += 1 + decimals;
        }
        if whole + decimals == 0 {
            return Err(MeasuredError { offset: at, expected: "a digit" });
        }
        let mut exponent = 0_i32;
        if matches!(bytes.get(at), Some(b'e' | b'E')) {
            let sign = usize::from(matches!(bytes.get(at + 1), Some(b'+' | b'-')));
            let digits = run(at + 1 + sign);
            if digits == 0 {
                return Err(MeasuredError { offset: at + 1 + sign, expected: "digits of the exponent" });
            }
            let end = at + 1 + sign + digits;
            exponent = text[at + 1..end].parse().unwrap_or(if bytes[at + 1] == b'-' { -9999 } else { 9999 });
            at = end;
        }
        let value: f64 = text[..at].parse().map_err(|_| MeasuredError { offset: 0, expected: "a number" })?;
        if !value.is_finite() {
            return Err(MeasuredError { offset: 0, expected: "a number below 1.8E308" });
        }
        if at == bytes.len() {
            return Ok(Self::exact(value));
        }
        if bytes[at] != b'(' {
            return Err(MeasuredError { offset: at, expected: "a digit, the exponent, or the s.u. in parentheses" });
        }
        let digits = run(at + 1);
        let unknown = digits == 0 && bytes.get(at + 1) == Some(&b'?');
        let close = at + 1 + digits + usize::from(unknown);
        if bytes.get(close) != Some(&b')') {
            return Err(MeasuredError { offset: close, expected: "digits and a closing parenthesis" });
        }
        if close + 1 != bytes.len() {
            return Err(MeasuredError { offset: close + 1, expected: "nothing behind the parenthesis" });
        }
        if digits == 0 {
            return Ok(Self::exact(value));
        }
        let scale = exponent.saturating_sub(i32::try_from(decimals).unwrap_or(i32::MAX));
        let u = format!("{}e{scale}", &text[at + 1..at + 1 + digits]).parse().unwrap_or(0.0);
        if f64::is_finite(u) {
            Ok(Self::new(value, u))
        } else {
            Err(MeasuredError { offset: at + 1, expected: "an s.u. below 1.8E308" })
        }
    }
}

#[cfg(test)]
mod tests {
    use super::Measured;

    #[test]
    fn prints_by_the_rule_of_nineteen() {
        for (value, u, text) in [
            (5.431_123, 0.000_04, "5.43112(4)"),
            (5.431_123, 0.000_019, "5.431123(19)"),
            (5.431_123, 0.000_02, "5.43112(2)"),
            (5.431_123, 0.000_019_6, "5.43112(2)"),
            (12.34, 1.2, "12.3(12)"),
            (1234.4, 5.0, "1234(5)"),
            (12_345.0, 230.0, "12300(200)"),
            (0.0996, 0.0096, "0.100(10)"),
            (-0.000_01, 0.001, "0.0000(10)"),
            (28.441_2, 0.0, "28.4412"),
            (1e-20, 2e-22, "1.00E-20(2)"),
            (6.022e23, 3e20, "6.022E23(3)"),
        ] {
            assert_eq!(Measured::new(value, u).to_string(), text);
        }
        assert_eq!(Measured::new(f64::NAN, 1.0).to_string(), "?");
    }

    #[test]
    fn reads_what_the_standard_allows() {
        // Outside: the examples of International Tables G (2005), section 2.2.7, in our own numbers; open formats, section 1.
        for (text, value, u) in [
            ("5.4311(8)", 5.4311, 0.0008),
            ("12.3(12)", 12.3, 1.2),
            ("1234(5)", 1234.0, 5.0),
            ("1.5E-3(2)", 0.0015, 0.0002),
            ("-.5", -0.5, 0.0),
            ("+5.", 5.0, 0.0),
            ("5.43()", 5.43, 0.0),
            ("0.333(?)", 0.333, 0.0),
        ] {
            let read: Measured = text.parse().unwrap();
            assert!((read.value - value).abs() <= 1e-12 * value.abs(), "{text}: {read:?}");
            assert!((read.u - u).abs() <= 1e-12 * u, "{text}: {read:?}");
        }
    }

    #[test]
    fn refuses_with_the_place_of_the_first_wrong_character() {
        for (text, offset) in [
            ("", 0),
            ("-", 1),
            ("5.4x", 3),
            ("5.43 (2)", 4),
            ("5,43", 1),
            ("1e", 2),
            ("1(2", 3),
            ("1(2)x", 4),
            ("−5", 0),
            ("1e999", 0),
            (".", 1),
            ("nan", 0),
            ("inf", 0),
        ] {
            assert_eq!(text.parse::<Measured>().unwrap_err().offset, offset, "{text}");
        }
    }

    #[test]
    fn what_is_printed_is_read_back_within_half_a_unit_of_the_last_digit() {
        let mut x = 0.123_456_7_f64;
        for step in 0..4000 {
            x = (x * 3.9 * (1.0 - x)).clamp(1e-6, 1.0 - 1e-6);
            let value = (x - 0.5) * 10f64.powi(step % 40 - 20);
            // Beyond fourteen digits the value itself is rounded by f64.
            let u = ((x * 7.0 % 1.0 + 0.01) * 10f64.powi(step % 23 - 16)).max(1e-14 * value.abs());
            let text = Measured::new(value, u).to_string();
            let read: Measured = text.parse().unwrap_or_else(|e| panic!("{text}: {e}"));
            // Two digits up to 19 and one from 2 on: the coarsest rounding is half of 1 in 2.
            assert!((read.u - u).abs() <= 0.26 * u, "{text} for u {u}");
            assert!((read.value - value).abs() <= 0.51 * read.u, "{text} for {value} ± {u}");
        }
    }
}
