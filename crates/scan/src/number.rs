//! One field to a number, to nothing, or to the reason why it is neither.

use values::Measured;

/// What a numeric field holds.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) enum Number {
    /// A number, its s.u. if one stands in parentheses, and the digits printed behind the decimal mark.
    Value { value: f64, u: Option<f64>, decimals: i32 },
    /// Empty, `-`, `?`, `nan`, `inf`, `****`: no value.
    Missing,
}

/// Why a field is no number: byte offset in the field, what was expected, how to mend it.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct NotNumber {
    pub offset: usize,
    pub expected: String,
    pub mend: &'static str,
}

/// Words and marks that mean "no value" (common practice, no source).
const MISSING: [&str; 13] = ["", "-", "--", "?", ".", "nan", "inf", "+inf", "-inf", "n/a", "na", "none", "null"];

/// Reads `5.43`, `5.`, `.5`, `+5`, `1e3`, `1.0D+03` (the exponent of Fortran), `5.4311(8)`; with `decimal_comma` also `5,43`.
pub(crate) fn number(text: &str, decimal_comma: bool) -> Result<Number, NotNumber> {
    if text.len() <= 4 && MISSING.iter().any(|word| word.eq_ignore_ascii_case(text))
        || !text.is_empty() && text.bytes().all(|b| b == b'*')
    {
        return Ok(Number::Missing);
    }
    // Replacing single bytes by single bytes keeps the offsets of messages right.
    let mut plain = text.to_owned();
    if decimal_comma && plain.bytes().filter(|b| *b == b',').count() == 1 && !plain.contains('.') {
        plain = plain.replace(',', ".");
    }
    if let Some(at) = plain.find(['d', 'D']) {
        let digit_before = at > 0 && matches!(plain.as_bytes()[at - 1], b'0'..=b'9' | b'.');
        if digit_before {
            plain.replace_range(at..=at, "e");
        }
    }
    let read: Measured = plain.parse().map_err(|wrong: values::MeasuredError| {
        let found = text.get(wrong.offset..).and_then(|rest| rest.chars().next());
        let mend = match found {
            Some('−' | '–') => "write the minus sign as `-`",
            Some(',') => {
                "write a decimal point, or separate columns by `;` and write every number with a decimal comma"
            }
            Some('°') => "leave the unit out; it stands in the name of the column",
            Some('O' | 'o' | 'l' | 'I') => "write the digit instead of the letter",
            _ => "correct the value, or start the row with # to leave it out",
        };
        NotNumber { offset: wrong.offset, expected: wrong.expected.to_owned(), mend }
    })?;
    let mantissa = plain.split(['e', 'E', '(']).next().unwrap_or("");
    let decimals = mantissa.split_once('.').map_or(0, |(_, digits)| i32::try_from(digits.len()).unwrap_or(i32::MAX));
    let exponent = plain
        .split(['e', 'E'])
        .nth(1)
        .and_then(|tail| tail.split('(').next())
        .and_then(|power| power.parse().ok())
        .unwrap_or(0);
    let u = (read.u > 0.0).then_some(read.u);
    Ok(Number::Value { value: read.value, u, decimals: decimals.saturating_sub(exponent) })
}

#[cfg(test)]
mod tests {
    use super::{Number, number};

    #[test]
    fn forms_that_other_programs_write_are_numbers() {
        for (text, value, u, decimals) in [
            ("28.4412", 28.4412, None, 4),
            ("+5", 5.0, None, 0),
            (".5", 0.5, None, 1),
            ("5.", 5.0, None, 0),
            ("1.0D+03", 1000.0, None, -2),
            ("1.25e1", 12.5, None, 1),
            ("5.4311(8)", 5.4311, Some(0.0008), 4),
        ] {
            let Number::Value { value: read, u: read_u, decimals: read_decimals } = number(text, false).unwrap() else {
                panic!("{text} is missing")
            };
            assert!((read - value).abs() < 1e-12, "{text}");
            assert_eq!(read_u.is_some(), u.is_some(), "{text}");
            assert!((read_u.unwrap_or(0.0) - u.unwrap_or(0.0)).abs() < 1e-12, "{text}");
            assert_eq!(read_decimals, decimals, "{text}");
        }
    }

    #[test]
    fn a_comma_is_decimal_only_where_the_file_says_so() {
        assert!(matches!(number("28,44", true), Ok(Number::Value { decimals: 2, .. })));
        assert_eq!(number("28,44", false).unwrap_err().offset, 2);
        assert!(number("1,234.5", true).is_err());
        assert!(number("1,234,567", true).is_err());
    }

    #[test]
    fn marks_for_no_value_are_missing_and_words_are_not() {
        for text in ["", "-", "NaN", "****", "?", "inf", "N/A"] {
            assert_eq!(number(text, false), Ok(Number::Missing), "{text}");
        }
        for text in ["weak", "28.4°", "−3", "1O23", "0x10", "1 2"] {
            assert!(number(text, false).is_err(), "{text}");
        }
    }
}
