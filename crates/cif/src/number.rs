//! Numbers: `[+-]digits[.digits][e[+-]digits][(digits)]`, and what is often written instead.

use values::{Measured, MeasuredError};

/// Reads a number with its s.u.; without one u is 0.
pub(crate) fn read(token: &str) -> Result<Measured, MeasuredError> {
    token.parse()
}

/// `(2)` alone: the s.u. of the number before it, behind a blank.
pub(crate) fn is_lone_su(token: &str) -> bool {
    let digits = token.strip_prefix('(').and_then(|rest| rest.strip_suffix(')'));
    digits.is_some_and(|d| !d.is_empty() && d.bytes().all(|b| b.is_ascii_digit()))
}

/// Why a text that is no number was meant as one: what was found in it, and how to mend it.
pub(crate) fn hint(text: &str) -> Option<(&'static str, &'static str)> {
    const MINUS: [char; 4] = ['\u{2212}', '\u{2013}', '\u{2014}', '\u{2010}'];
    if is_lone_su(text) {
        return Some(("an s.u. alone", "delete the blank between the number and its s.u."));
    }
    // Each step undoes one habit; the first that was needed is named.
    let mut cause = None;
    let mut mended = text.to_owned();
    let mut step = |from: &[char], to: &str, found, mend| {
        if mended.contains(from) {
            mended = mended.replace(from, to);
            cause = cause.or(Some((found, mend)));
        }
    };
    step(&MINUS, "-", "a minus sign that is not the hyphen of ASCII", "write the sign as -");
    step(&[','], ".", "a comma for the decimal point", "write a point instead of the comma");
    step(&[' ', '\t', '\u{A0}'], "", "a blank inside", "delete the blank between the number and its s.u.");
    step(&['d', 'D'], "e", "an exponent with D", "write the exponent with E");
    cause.filter(|_| read(&mended).is_ok())
}

#[cfg(test)]
mod tests {
    use super::{hint, is_lone_su};

    #[test]
    fn common_habits_are_recognised_and_other_texts_are_not() {
        for (text, word) in [
            ("5,43", "comma"),
            ("\u{2212}0.5", "minus"),
            ("\u{2013}0,5(2)", "minus"),
            ("5.43 (2)", "blank"),
            ("(2)", "alone"),
            ("1.0D+03", "exponent"),
        ] {
            assert!(hint(text).unwrap().0.contains(word), "{text}");
        }
        for text in ["abc", "5.43(2", "1,2,3", "", "()"] {
            assert_eq!(hint(text), None, "{text}");
        }
        assert!(!is_lone_su("()") && !is_lone_su("(2") && !is_lone_su("(a)"));
    }
}
