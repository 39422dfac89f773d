//! Against another reader: what gemmi 0.7.5 reads from the same file (`tools/cif_values.py` made the table).

use cif::{Entry, Kind, Value, parse};

fn line(block: &str, tag: &str, row: usize, value: Value<'_>) -> String {
    let (kind, text) = match value.kind() {
        Kind::Unknown => ("unknown", String::new()),
        Kind::Inapplicable => ("inapplicable", String::new()),
        Kind::Text(text) => ("text", text.replace('\\', "\\\\").replace('\n', "\\n").replace('\t', "\\t")),
        Kind::List(_) | Kind::Table(_) => panic!("no such value in CIF 1.1"),
    };
    format!("{block}\t{tag}\t{row}\t{kind}\t{text}")
}

#[test]
fn every_value_is_read_as_gemmi_reads_it() {
    let document = parse(include_bytes!("data/quotes_lf.cif"), "quotes_lf.cif").unwrap();
    let mut ours = Vec::new();
    for block in document.blocks() {
        for entry in block.entries() {
            match entry {
                // gemmi does not unfold text fields.
                Entry::Item(item) if matches!(item.tag, "_folded" | "_prefixed") => {}
                Entry::Item(item) => ours.push(line(block.name(), item.tag, 0, item.value)),
                Entry::Loop(found) => {
                    for row in 0..found.len() {
                        let cells = found.tags().zip(found.row(row));
                        ours.extend(cells.map(|(tag, value)| line(block.name(), tag, row, value)));
                    }
                }
            }
        }
    }
    let theirs: Vec<&str> = include_str!("data/gemmi_values.tsv").lines().skip(1).collect();
    assert_eq!(ours, theirs);
}
