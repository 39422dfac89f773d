//! Hermann–Mauguin symbols in all their spellings, by look-up in a table of spellings.
//!
//! A text is brought to a key (lower case, no blanks, underscores, quotes or parentheses), its mark of origin or axes is
//! split off, and the key is looked up among those of all settings. Keys of complete symbols go before keys of
//! shortened ones.

use std::collections::HashMap;
use std::sync::LazyLock;

use super::settings::{SETTINGS, Setting};
use super::spellings;
use crate::SymmetryError;

/// Longest symbol that is read; the longest in use have some twenty characters.
const LONGEST: usize = 60;

/// Settings that a symbol may stand for, the best first.
#[derive(Clone, Debug)]
pub(crate) struct Reading {
    symbol: String,
    /// Never empty.
    pub settings: Vec<&'static Setting>,
}

impl Reading {
    /// The setting that is taken if nothing else is known.
    pub(crate) fn best(&self) -> &'static Setting {
        self.settings[0]
    }

    /// What was assumed, if the symbol stands for more than one setting.
    pub(crate) fn note(&self) -> Option<String> {
        self.note_on(self.best())
    }

    /// The same with `taken` in place of the best.
    pub(crate) fn note_on(&self, taken: &Setting) -> Option<String> {
        let others: Vec<String> = self
            .settings
            .iter()
            .filter(|other| other.xhm != taken.xhm && other.hall != taken.hall)
            .map(|other| format!("`{}`", other.xhm))
            .collect();
        if others.is_empty() {
            return None;
        }
        let convention = match taken.mark() {
            Some("1") => " (origin choice 1)",
            Some("2") => " (origin choice 2)",
            Some("H") => " (hexagonal axes)",
            Some("R") => " (rhombohedral axes)",
            _ if taken.choice.trim_start_matches('-').starts_with('a') => " (unique axis a)",
            _ if taken.choice.trim_start_matches('-').starts_with('b') && taken.number < 16 => " (unique axis b)",
            _ if taken.choice.trim_start_matches('-').starts_with('c') && taken.number < 16 => " (unique axis c)",
            _ => "",
        };
        let shown = others.iter().take(4).cloned().collect::<Vec<_>>().join(", ");
        let more = if others.len() > 4 { format!(" and {} more", others.len() - 4) } else { String::new() };
        Some(format!(
            "space group `{}` taken as `{}`{convention}; it may also mean {shown}{more}",
            self.symbol, taken.xhm
        ))
    }
}

/// Key → places in [`SETTINGS`], those of complete symbols and those of shortened ones.
type Index = HashMap<String, [Vec<usize>; 2]>;

static INDEX: LazyLock<Index> = LazyLock::new(|| {
    let mut index = Index::new();
    for (place, setting) in SETTINGS.iter().enumerate() {
        for (complete, spelling) in spellings::of(setting) {
            let places = &mut index.entry(key(&spelling)).or_default()[usize::from(!complete)];
            if !places.contains(&place) {
                places.push(place);
            }
        }
    }
    index
});

/// Reads a symbol.
pub(crate) fn read(symbol: &str) -> Result<Reading, SymmetryError> {
    let trimmed = symbol.trim().trim_matches(['\'', '"']).trim();
    if trimmed.is_empty() || trimmed.len() > LONGEST {
        return Err(SymmetryError::new(
            format!("a space-group symbol of {} bytes", trimmed.len()),
            format!("1 to {LONGEST} bytes"),
            "give a symbol such as `F d -3 m:2` or a number from 1 to 230",
        ));
    }
    if let Some(setting) = number(trimmed) {
        return Ok(Reading { symbol: trimmed.to_owned(), settings: vec![setting] });
    }
    for (body, mark) in attempts(trimmed) {
        let Some(places) = INDEX.get(&body) else { continue };
        let places = if places[0].is_empty() { &places[1] } else { &places[0] };
        let mut settings: Vec<&'static Setting> = places.iter().map(|place| &SETTINGS[*place]).collect();
        if let Some(mark) = &mark {
            let mut marked: Vec<_> = settings.iter().copied().filter(|s| has_mark(s, mark)).collect();
            if marked.is_empty() {
                // `P n m a:cab`: the mark belongs to the axes of another setting of the same number.
                let number = settings[0].number;
                marked = SETTINGS.iter().filter(|s| s.number == number && s.choice == mark).collect();
            }
            if marked.is_empty() {
                return Err(unknown_mark(trimmed, mark, &settings));
            }
            settings = marked;
        }
        settings.sort_by_key(|setting| preference(setting));
        return Ok(Reading { symbol: trimmed.to_owned(), settings });
    }
    Err(unknown(trimmed))
}

fn number(text: &str) -> Option<&'static Setting> {
    let number: u16 = text.parse().ok()?;
    SETTINGS.iter().find(|s| s.standard && s.number == number)
}

/// Lower case, without what spellings differ in.
fn key(text: &str) -> String {
    text.chars()
        .filter(|c| !c.is_whitespace() && !matches!(c, '_' | '(' | ')' | '\'' | '"' | '{' | '}' | '$' | '\\'))
        .map(|c| match c {
            '−' | '–' | '—' => '-',
            other => other.to_ascii_lowercase(),
        })
        .collect()
}

/// Bodies and marks that a text may mean, the plainest first.
fn attempts(text: &str) -> Vec<(String, Option<String>)> {
    if let Some((body, mark)) = text.split_once(':') {
        let (body, mark) = (key(body), key(mark));
        return with_bars(body).into_iter().map(|body| (body, Some(mark.clone()))).collect();
    }
    let whole = key(text);
    let mut attempts: Vec<(String, Option<String>)> = Vec::new();
    for body in with_bars(whole) {
        attempts.push((body.clone(), None));
        for mark in ["hr", "rs", "o1", "o2", "h", "r", "s", "z"] {
            if let Some(short) = body.strip_suffix(mark) {
                attempts.push((short.to_owned(), Some(mark.to_owned())));
            }
        }
        // H as the lattice letter of rhombohedral groups on hexagonal axes.
        if let Some(rest) = body.strip_prefix('h') {
            attempts.push((format!("r{rest}"), Some("h".to_owned())));
        }
    }
    attempts
}

/// The text itself, and with minus signs or overbars moved from behind a digit to before it: `fm3-m`, `fm3̅m`.
fn with_bars(body: String) -> Vec<String> {
    let mut moved = String::with_capacity(body.len());
    for c in body.chars() {
        match (c, moved.chars().last()) {
            ('-' | '\u{304}' | '\u{305}' | '¯', Some(last @ ('1' | '3' | '4' | '6'))) => {
                moved.pop();
                moved.push('-');
                moved.push(last);
            }
            _ => moved.push(c),
        }
    }
    if moved == body { vec![body] } else { vec![body, moved] }
}

/// Whether a setting has a mark. S and Z: first and second origin; HR and RS: axes of rhombohedral groups (as older
/// data collections write them; from memory).
fn has_mark(setting: &Setting, mark: &str) -> bool {
    let own = match mark {
        "1" | "s" | "o1" => "1",
        "2" | "z" | "o2" => "2",
        "h" | "hr" => "H",
        "r" | "rs" => "R",
        other => return setting.choice == other,
    };
    setting.mark() == Some(own) || setting.choice == own
}

/// Order among the settings that one symbol may mean: the standard one, then origin 2 and hexagonal axes, then as the
/// table has them (unique axis b, c, a).
fn preference(setting: &Setting) -> (bool, bool) {
    (!setting.standard, matches!(setting.mark(), Some("1" | "R")))
}

fn unknown_mark(symbol: &str, mark: &str, settings: &[&Setting]) -> SymmetryError {
    let known: Vec<String> = settings.iter().take(4).map(|s| format!("`{}`", s.xhm)).collect();
    SymmetryError::new(
        format!("mark `{mark}` in space group `{symbol}`"),
        format!("a setting of it: {}", known.join(", ")),
        "correct the mark or leave it out",
    )
}

fn unknown(symbol: &str) -> SymmetryError {
    let wanted: Vec<char> = key(symbol).chars().collect();
    let mut near: Vec<(usize, usize, usize, &str)> = INDEX
        .iter()
        .filter(|(key, _)| !key.contains(':'))
        .flat_map(|(key, places)| {
            let distance = edit_distance(&wanted, &key.chars().collect::<Vec<_>>());
            // Of symbols equally near, a wrong letter is likelier than a missing one.
            let missing = wanted.len().abs_diff(key.chars().count());
            places.iter().flatten().map(move |place| (distance, missing, *place, SETTINGS[*place].plain()))
        })
        .collect();
    near.sort_unstable();
    let mut names: Vec<&str> = Vec::new();
    for (.., name) in near {
        if names.len() < 3 && !names.contains(&name) {
            names.push(name);
        }
    }
    let names: Vec<String> = names.iter().map(|name| format!("`{name}`")).collect();
    SymmetryError::new(
        format!("unknown space group `{}`", symbol.escape_debug()),
        format!("a Hermann–Mauguin symbol; the nearest are {}", names.join(", ")),
        "correct the symbol, or give the number, the Hall symbol or the operations",
    )
}

/// Fewest insertions, deletions and replacements between two texts (Levenshtein).
fn edit_distance(a: &[char], b: &[char]) -> usize {
    let mut row: Vec<usize> = (0..=b.len()).collect();
    for (i, ca) in a.iter().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, cb) in b.iter().enumerate() {
            let replaced = diagonal + usize::from(ca != cb);
            diagonal = row[j + 1];
            row[j + 1] = replaced.min(diagonal + 1).min(row[j] + 1);
        }
    }
    row[b.len()]
}

/// `P 1 21/c 1` → `P21/c`, `R -3 c:H` → `R-3c`.
pub(crate) fn short(xhm: &str) -> String {
    let plain = xhm.split(':').next().unwrap_or(xhm);
    let words: Vec<&str> = plain.split(' ').collect();
    match words.as_slice() {
        [letter, "1", axis, "1"] => format!("{letter}{axis}"),
        _ => words.concat(),
    }
}
