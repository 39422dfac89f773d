//! Chemical formulas as files state them: `Ce0.9 Gd0.1 O1.95`.

use crate::elements;

/// Longest formula that is read, in bytes.
const LONGEST: usize = 2000;

/// Elements with their numbers, in the order of the text; isotopes count as hydrogen. `None` for what is no plain sum of
/// elements, such as `Fe2(SO4)3` or `C6 H12 x H2O`.
pub(crate) fn parse(text: &str) -> Option<Vec<(&'static str, f64)>> {
    let mut parts: Vec<(&'static str, f64)> = Vec::new();
    let mut rest = text.trim();
    if rest.len() > LONGEST {
        return None;
    }
    while !rest.is_empty() {
        let letters = rest.bytes().take_while(u8::is_ascii_alphabetic).count();
        // Two letters where the second is small, else one: `CO` are two elements here.
        let two = letters >= 2 && rest.as_bytes()[1].is_ascii_lowercase();
        let name = rest.get(..if two { 2 } else { 1 })?;
        if !name.starts_with(|c: char| c.is_ascii_uppercase()) {
            return None;
        }
        let symbol = elements::chemical(elements::symbol(name)?);
        rest = &rest[name.len()..];
        let digits = rest.bytes().take_while(|b| b.is_ascii_digit() || *b == b'.').count();
        let number = if digits == 0 { 1.0 } else { rest[..digits].parse().ok()? };
        rest = rest[digits..].trim_start();
        match parts.iter_mut().find(|(known, _)| *known == symbol) {
            Some((_, sum)) => *sum += number,
            None => parts.push((symbol, number)),
        }
    }
    (!parts.is_empty()).then_some(parts)
}

#[cfg(test)]
mod tests {
    use super::parse;

    #[test]
    fn sums_are_read_with_and_without_blanks() {
        assert_eq!(parse("Fe2 O3"), Some(vec![("Fe", 2.0), ("O", 3.0)]));
        assert_eq!(parse("Fe2O3"), parse("Fe2 O3"));
        assert_eq!(parse("Ce0.9 Gd0.1 O1.95"), Some(vec![("Ce", 0.9), ("Gd", 0.1), ("O", 1.95)]));
        assert_eq!(parse("C O2"), Some(vec![("C", 1.0), ("O", 2.0)]));
        assert_eq!(parse("Co"), Some(vec![("Co", 1.0)]));
        assert_eq!(parse("D2 H O"), Some(vec![("H", 3.0), ("O", 1.0)]));
    }

    #[test]
    fn what_is_no_plain_sum_is_left_alone() {
        for text in ["", "Fe2(SO4)3", "x", "fe2 o3", "Zz", "Fe1.2.3", "é"] {
            assert_eq!(parse(text), None, "{text}");
        }
    }
}
