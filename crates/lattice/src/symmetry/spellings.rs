//! The spellings of one setting: complete symbols, and shortened ones that other settings may share.

use super::settings::Setting;

/// Numbers of the groups with a double glide plane e. Source: International Tables A (2002), section 1.3.2, note (x).
const DOUBLE_GLIDE: [u16; 5] = [39, 41, 64, 67, 68];

/// Spellings, each with whether it is complete (`true`) or shortened.
pub(super) fn of(setting: &Setting) -> Vec<(bool, String)> {
    let plain = setting.plain();
    let mut all = vec![(true, plain.to_owned())];
    if !setting.full.is_empty() {
        all.push((true, setting.full.clone()));
    }
    if let Some(position) = double_glide(setting) {
        all.push((true, with_letter(plain, position, 'e')));
        // `C 2/m 2/c 21/a`: the full symbol as it was before the letter e came into use.
        let old = plain.split(' ').nth(position).and_then(|word| word.chars().last());
        all.extend(old.filter(|_| !setting.full.is_empty()).map(|l| (true, with_letter(&setting.full, position, l))));
    }
    if matches!(setting.number, 200..=206 | 221..=230) {
        // Before 1935 the bar over the 3 of these classes was left out: F d 3 m.
        all.push((false, plain.replace("-3", "3")));
        all.push((false, setting.full.replace("-3", "3")));
    }
    all.extend(short_monoclinic(plain).map(|text| (false, text)));
    all
}

/// Place of the letter e among the words of the symbol: the plane across the centred face.
fn double_glide(setting: &Setting) -> Option<usize> {
    if !DOUBLE_GLIDE.contains(&setting.number) {
        return None;
    }
    match setting.xhm.chars().next() {
        Some('A') => Some(1),
        Some('B') => Some(2),
        Some('C') => Some(3),
        _ => None,
    }
}

/// The symbol with another last letter in one of its words.
fn with_letter(symbol: &str, position: usize, letter: char) -> String {
    let mut words: Vec<String> = symbol.split(' ').map(str::to_owned).collect();
    if let Some(word) = words.get_mut(position) {
        word.pop();
        word.push(letter);
    }
    words.join(" ")
}

/// `P 1 21/c 1` → `P 21/c`, `P 1 1 21/b` → `P 21/b`.
fn short_monoclinic(plain: &str) -> Option<String> {
    let words: Vec<&str> = plain.split(' ').collect();
    let [letter, axes @ ..] = words.as_slice() else { return None };
    let mut rest = axes.iter().filter(|word| **word != "1");
    match (axes.len(), rest.next(), rest.next()) {
        (3, Some(axis), None) => Some(format!("{letter} {axis}")),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::super::settings::SETTINGS;

    fn of(xhm: &str) -> Vec<String> {
        let setting = SETTINGS.iter().find(|s| s.xhm == xhm).unwrap();
        super::of(setting).into_iter().map(|(_, text)| text).collect()
    }

    #[test]
    fn double_glides_are_written_across_the_centred_face() {
        // Outside: International Tables A (2002), section 1.3.2, note (x): Aem2, Aea2, Cmce, Cmme, Ccce.
        assert_eq!(of("A b m 2")[2..], ["A e m 2", "A b m 2"]);
        assert!(of("A b a 2").contains(&"A e a 2".to_owned()));
        assert!(of("C m m a").contains(&"C m m e".to_owned()));
        assert!(of("C c c a:2").contains(&"C 2/c 2/c 2/a".to_owned()));
        assert_eq!(of("C m c a"), ["C m c a", "C 2/m 2/c 21/e", "C m c e", "C 2/m 2/c 21/a"]);
    }
}
