//! What must hold for any bytes: no panic; and what is read is written so that it is read back the same.

use cif::{Block, Document, Entry, Kind, Value, parse, write};

/// Reads, uses every view, writes, reads again, compares. Whether the bytes are a CIF at all.
pub fn holds_for(bytes: &[u8]) -> bool {
    let document = match parse(bytes, "any") {
        Ok(document) => document,
        Err(error) => {
            assert!(error.location.is_some(), "a message without a place: {error}");
            return false;
        }
    };
    for block in document.blocks() {
        visit(block);
        block.frames().for_each(visit);
    }
    let text = write(&document);
    let again = parse(text.as_bytes(), "written").unwrap_or_else(|error| panic!("{error}\n{text}"));
    assert_eq!(again, document, "{text}");
    assert_eq!(write(&again), text, "writing again changes the text");
    assert!(again.version() == cif::Version::V2_0 || text.is_ascii(), "{text}");
    assert!(!text.contains('\r'), "{text:?}");
    check_lengths(&text, &document);
    true
}

fn visit(block: Block<'_>) {
    for entry in block.entries() {
        match entry {
            Entry::Item(item) => {
                // A looped tag of the same name cannot be: the item is what the name finds.
                assert_eq!(block.get(item.tag).map(|value| value.location()), Some(item.value.location()));
                use_value(item.value);
            }
            Entry::Loop(found) => {
                assert_eq!(found.values().len(), found.width() * found.len());
                found.tags().for_each(|tag| assert_eq!(block.column(tag).map(|c| c.len()), Some(found.len())));
                found.values().take(1000).for_each(use_value);
            }
        }
    }
}

fn use_value(value: Value<'_>) {
    assert!(value.location().line > 0);
    let _ = value.number().map_err(|error| error.to_string());
    match value.kind() {
        Kind::List(list) => list.iter().for_each(use_value),
        Kind::Table(table) => table.iter().for_each(|(_, element)| use_value(element)),
        Kind::Text(_) | Kind::Unknown | Kind::Inapplicable => {}
    }
}

/// No line is beyond the limit of CIF unless a name or a key is.
fn check_lengths(text: &str, document: &Document) {
    let longest = text.lines().map(|line| line.chars().count()).max().unwrap_or(0);
    if longest <= 2048 {
        return;
    }
    let names_long = document.blocks().any(|block| {
        block.name().len() > 2000
            || block.entries().any(|entry| match entry {
                Entry::Item(item) => {
                    item.tag.len() > 2000 || matches!(item.value.kind(), Kind::Table(_) | Kind::List(_))
                }
                Entry::Loop(found) => {
                    found.tags().any(|tag| tag.len() > 2000)
                        || found.values().any(|v| matches!(v.kind(), Kind::Table(_) | Kind::List(_)))
                }
            })
            || block.frames().next().is_some()
    });
    assert!(names_long, "a line of {longest} characters: {text}");
}
