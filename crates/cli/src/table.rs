//! Human tables, and numbers in them.

use comfy_table::{CellAlignment, Table, presets::NOTHING};

/// A plain table: a rule under the header, columns to the right unless named in `left`.
pub fn table(header: &[&str], left: &[usize], rows: &[Vec<String>]) -> String {
    let mut table = Table::new();
    table.load_style(NOTHING);
    table.set_header(header.to_vec());
    for row in rows {
        table.add_row(row.clone());
    }
    for (index, column) in table.column_iter_mut().enumerate() {
        column.set_cell_alignment(if left.contains(&index) { CellAlignment::Left } else { CellAlignment::Right });
        column.set_padding((0, 2));
    }
    let mut text = String::new();
    for (index, line) in table.lines().enumerate() {
        text.push_str(line.trim_end());
        text.push('\n');
        if index == 0 {
            text.push_str(&"─".repeat(line.trim_end().chars().count()));
            text.push('\n');
        }
    }
    text
}

/// `h k l` with blanks only where a minus or two digits need them.
pub fn hkl(hkl: [i32; 3]) -> String {
    if hkl.iter().all(|x| (0..10).contains(x)) {
        hkl.iter().map(i32::to_string).collect()
    } else {
        hkl.iter().map(i32::to_string).collect::<Vec<_>>().join(" ")
    }
}

/// Several triples in one field.
pub fn hkl_list(list: &[[i32; 3]]) -> String {
    list.iter().map(|h| hkl(*h)).collect::<Vec<_>>().join(", ")
}

/// A line of a tube as people write it: `Cu Kα2`, `W Lα1`, `Cu Kβ1,3` for `Cu Ka2`, `W La1`, `Cu Kb1,3`.
pub fn radiation(name: &str) -> String {
    let name = name.replace("Ka", "Kα").replace("Kb", "Kβ").replace("La", "Lα").replace("Lb", "Lβ");
    if name.ends_with("β13") { name.replace("β13", "β1,3") } else { name }
}

/// Columns that running text fills.
const TEXT_WIDTH: usize = 110;

/// A sentence or several as lines that fit a page; every line after the first is indented by `indent` blanks, as is the first.
pub fn paragraph(text: &str, indent: usize) -> String {
    let margin = " ".repeat(indent);
    let (mut lines, mut line) = (String::new(), String::new());
    for word in text.split(' ') {
        if !line.is_empty() && indent + line.chars().count() + 1 + word.chars().count() > TEXT_WIDTH {
            lines.push_str(&format!("{margin}{line}\n"));
            line.clear();
        }
        if !line.is_empty() {
            line.push(' ');
        }
        line.push_str(word);
    }
    lines.push_str(&format!("{margin}{line}\n"));
    lines
}

/// A remark as a sentence: with a capital where it begins with a plain word, and a full stop.
pub fn sentence(text: &str) -> String {
    let word = text.split(' ').next().unwrap_or_default();
    let plain = word.chars().all(|c| c.is_ascii_lowercase() || c == '-' || c == ',') && word.len() > 1;
    let mut text = if plain { text[..1].to_uppercase() + &text[1..] } else { text.to_owned() };
    if !text.ends_with(['.', '!', '?', ':']) {
        text.push('.');
    }
    text
}

/// A field of a CSV row, quoted where it must be.
pub fn csv_field(text: &str) -> String {
    if text.contains([',', '"', '\n', '\r']) { format!("\"{}\"", text.replace('"', "\"\"")) } else { text.to_owned() }
}

#[cfg(test)]
mod tests {
    use super::{csv_field, hkl, paragraph, radiation, sentence, table};

    #[test]
    fn indices_are_parted_only_where_they_must_be() {
        assert_eq!(hkl([1, 1, 1]), "111");
        assert_eq!(hkl([1, -1, 0]), "1 -1 0");
        assert_eq!(hkl([12, 0, 0]), "12 0 0");
    }

    #[test]
    fn fields_with_commas_and_quotes_are_quoted() {
        assert_eq!(csv_field("a"), "a");
        assert_eq!(csv_field("a,\"b\""), "\"a,\"\"b\"\"\"");
    }

    #[test]
    fn running_text_is_broken_between_words_and_loses_none() {
        let text = "one two three ".repeat(30);
        let broken = paragraph(text.trim(), 2);
        assert!(broken.lines().all(|line| line.starts_with("  o") || line.starts_with("  t")));
        assert!(broken.lines().all(|line| line.chars().count() <= 110));
        assert_eq!(broken.split_whitespace().collect::<Vec<_>>(), text.split_whitespace().collect::<Vec<_>>());
    }

    #[test]
    fn lines_of_a_tube_are_written_with_greek_letters() {
        assert_eq!(radiation("Cu Ka2"), "Cu Kα2");
        assert_eq!(radiation("Cu Kb13"), "Cu Kβ1,3");
        assert_eq!(radiation("W La1"), "W Lα1");
    }

    #[test]
    fn remarks_become_sentences_but_names_stay() {
        assert_eq!(sentence("not cubic"), "Not cubic.");
        assert_eq!(sentence("expansion_per_K stands alone."), "expansion_per_K stands alone.");
        assert_eq!(sentence("d is given"), "d is given.");
    }

    #[test]
    fn a_table_aligns_its_columns() {
        let text =
            table(&["hkl", "d / Å"], &[0], &[vec!["111".into(), "3.1356".into()], vec!["220".into(), "12.5".into()]]);
        let lines: Vec<&str> = text.lines().collect();
        assert_eq!(lines.len(), 4);
        assert_eq!(lines[2].len(), lines[3].len());
    }
}
