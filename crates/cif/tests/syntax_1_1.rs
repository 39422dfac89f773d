//! The points of CIF 1.1 syntax, on small files made for them.
//!
//! Source of the expectations: International Tables for Crystallography G (2005), ch. 2.2, from memory; what gemmi reads
//! from the same files is in `outside.rs`.

use cif::{Document, Kind, Quoting, Version, parse};

const FILES: [(&str, &[u8]); 5] = [
    ("quotes_lf.cif", include_bytes!("data/quotes_lf.cif")),
    ("quotes_crlf.cif", include_bytes!("data/quotes_crlf.cif")),
    ("quotes_cr.cif", include_bytes!("data/quotes_cr.cif")),
    ("quotes_bom.cif", include_bytes!("data/quotes_bom.cif")),
    ("quotes_tabs.cif", include_bytes!("data/quotes_tabs.cif")),
];

fn read(text: &str) -> Document {
    parse(text.as_bytes(), "x.cif").unwrap_or_else(|error| panic!("{error}"))
}

fn text_of(document: &Document, tag: &str) -> String {
    let value = document.blocks().find_map(|block| block.get(tag));
    value.unwrap_or_else(|| panic!("{tag}")).text().unwrap_or_else(|| panic!("{tag}")).into_owned()
}

#[test]
fn every_line_end_mark_and_tab_gives_the_same_values() {
    let first = parse(FILES[0].1, FILES[0].0).unwrap();
    for (name, bytes) in FILES {
        let document = parse(bytes, name).unwrap_or_else(|error| panic!("{error}"));
        assert_eq!(document, first, "{name}");
        assert_eq!(document.version(), Version::V1_1);
        assert!(document.warnings().is_empty(), "{name}: {:?}", document.warnings());
        // The last value stands in line 48 of each file, whatever ends its lines.
        let last = document.block("SECOND").unwrap().column("_ONLY_one").unwrap().get(3).unwrap();
        assert_eq!((last.location().line, last.location().column), (48, 1), "{name}");
    }
}

#[test]
fn quotes_inside_quotes_comments_and_fields_are_read_as_the_standard_says() {
    let document = parse(FILES[0].1, FILES[0].0).unwrap();
    for (tag, text) in [
        ("_dog", "a dog's life"),
        ("_compound", "5'-bromo-\"2\"-chloro"),
        ("_prime", "5'-bromo"),
        ("_hash", "C#1"),
        ("_semicolon", "a;b"),
        ("_quoted_unknown", "?"),
        ("_empty", ""),
        ("_formula", "[Fe2O3]"),
        ("_text", "first line\n ; a semicolon inside the line\nsecond; line\n \nlast line"),
        ("_after_field", "following"),
        ("_folded", "one long line goes on\nnext line"),
        ("_prefixed", ";not the end\nend"),
        ("_backslash", "no marker\\\nnext"),
    ] {
        assert_eq!(text_of(&document, tag), text, "{tag}");
    }
    let block = document.block("quotes").unwrap();
    assert_eq!(block.get("_unknown").unwrap().kind(), Kind::Unknown);
    assert_eq!(block.get("_inapplicable").unwrap().kind(), Kind::Inapplicable);
    assert!(!block.get("_quoted_unknown").unwrap().is_missing());
    assert_eq!(block.get("_dog").unwrap().quoting(), Quoting::Quoted);
    assert_eq!(block.get("_hash").unwrap().quoting(), Quoting::Unquoted);
    assert_eq!(block.get("_text").unwrap().quoting(), Quoting::TextField);
}

#[test]
fn a_loop_split_over_lines_has_its_rows_and_columns() {
    let document = parse(FILES[0].1, FILES[0].0).unwrap();
    let block = document.block("Quotes").unwrap();
    let atoms = block.loop_of("_ATOM_SITE_FRACT_Y").unwrap();
    assert_eq!((atoms.width(), atoms.len()), (3, 3));
    assert_eq!(atoms.tags().collect::<Vec<_>>(), ["_atom_site_label", "_atom_site_fract_x", "_atom_site_fract_y"]);
    let labels: Vec<_> = atoms.column("_atom_site_label").unwrap().iter().map(|v| v.text().unwrap()).collect();
    assert_eq!(labels, ["Si1", "O 1", "O 2"]);
    let x = atoms.row(1).nth(1).unwrap().number().unwrap().unwrap();
    assert_eq!(x.to_string(), "0.333(2)");
    assert_eq!(atoms.row(3).len(), 0);
    assert_eq!(atoms.row(2).filter(|value| value.is_missing()).count(), 2);
    // A tag with several values is no single value; it is a column.
    assert!(block.get("_atom_site_label").is_none());
    assert_eq!(block.column("_cell_length_a").unwrap().len(), 1);
}

#[test]
fn places_count_characters_and_include_the_opening_delimiter() {
    let document = read("data_x\n_a 'α β' _b   2.5\n_c\n;long\ntext\n;\n");
    let block = document.blocks().next().unwrap();
    let place = |tag: &str| {
        let at = block.get(tag).unwrap().location();
        (at.line, at.column, at.width)
    };
    assert_eq!(place("_a"), (2, 4, 5));
    assert_eq!(place("_b"), (2, 15, 3));
    assert_eq!(place("_c"), (4, 1, 5));
    assert_eq!(block.location().to_string(), "x.cif:1:1");
    assert_eq!(block.tag_location("_B").unwrap().column, 10);
}

#[test]
fn places_far_into_a_file_with_long_lines_are_exact() {
    let mut text = String::from("data_x\nloop_\n_v\n");
    for row in 0..3000 {
        text.push_str(&format!("{row:04} ä\r\n"));
    }
    text.push_str(&"é ".repeat(9000));
    let document = read(&text);
    let column = document.blocks().next().unwrap().column("_v").unwrap();
    for row in [0_usize, 1, 1000, 2047, 2999] {
        let at = column.get(2 * row).unwrap().location();
        assert_eq!((at.line, at.column, at.width), (4 + row, 1, 4));
    }
    for step in [0_usize, 17, 4095, 8999] {
        let at = column.get(6000 + step).unwrap().location();
        assert_eq!((at.line, at.column), (3004, 2 * step + 1));
    }
}

#[test]
fn keywords_and_names_count_whatever_their_case_and_an_empty_block_name_is_accepted() {
    let document = read("DATA_\n_Tag 1\nLoop_ _V 1 2\nData_B save_F _x 1 SAVE_ _y 2");
    let names: Vec<_> = document.blocks().map(|block| block.name()).collect();
    assert_eq!(names, ["", "B"]);
    let second = document.block("b").unwrap();
    assert_eq!(second.frame("f").unwrap().get("_X").unwrap().text().unwrap(), "1");
    assert!(second.get("_x").is_none(), "what stands in a frame does not stand in its block");
    assert_eq!(second.items().map(|item| item.tag).collect::<Vec<_>>(), ["_y"]);
    assert_eq!(second.frames().count(), 1);
}

#[test]
fn bytes_that_are_not_utf8_are_read_as_latin_1_with_a_warning() {
    let document = parse(b"data_x\n# Universit\xe4t\n_name 'M\xfcller'\n_utf8 'M\xc3\xbcller'", "x.cif").unwrap();
    assert_eq!(text_of(&document, "_name"), "Müller");
    assert_eq!(text_of(&document, "_utf8"), "Müller");
    let [warning] = document.warnings() else { panic!("{:?}", document.warnings()) };
    assert!(warning.to_string().starts_with("x.cif:2:12: the byte 0xE4 is not UTF-8"), "{warning}");
}

#[test]
fn long_lines_and_long_names_are_read_with_one_warning_each() {
    let name = format!("_{}", "n".repeat(75));
    let document = read(&format!("data_x\n{name} 1\n_long {}\n_short '{}'", "1 #".to_owned() + &"x".repeat(3000), "y"));
    assert_eq!(text_of(&document, &name), "1");
    assert_eq!(text_of(&document, "_long"), "1");
    let found: Vec<_> = document.warnings().iter().map(ToString::to_string).collect();
    assert_eq!(found.len(), 2, "{found:?}");
    assert!(found[0].starts_with("x.cif:3:2049: a line has more than 2048 characters"), "{}", found[0]);
    assert!(found[1].starts_with("x.cif:2:1: the tag `_nnn"), "{}", found[1]);
    // 2048 characters and 75 are within the limits.
    let name = format!("_{}", "n".repeat(74));
    let document = read(&format!("data_x\r\n{name} 1\r\n_a 1 #{}\r\n", "x".repeat(2048 - 6)));
    assert!(document.warnings().is_empty(), "{:?}", document.warnings());
}

#[test]
fn warnings_are_bounded_however_often_a_fault_occurs() {
    let document = read(&format!("data_x loop_ _v {}", "5.43() ".repeat(5000)));
    assert_eq!(document.warnings().len(), 101);
    assert!(document.warnings()[100].found.starts_with("49"), "{}", document.warnings()[100]);
}

#[test]
fn formulas_in_brackets_are_text_in_cif_1_1() {
    let document = read("data_x _a [Fe2O3] _b [Fe(CN)6]3- _c {x} _d a[1]");
    for (tag, text) in [("_a", "[Fe2O3]"), ("_b", "[Fe(CN)6]3-"), ("_c", "{x}"), ("_d", "a[1]")] {
        assert_eq!(text_of(&document, tag), text);
    }
}

#[test]
fn a_file_without_data_block_is_read_with_a_warning() {
    for text in ["", "# only a comment", "\u{feff}", "\r\n\r\n"] {
        let document = read(text);
        assert_eq!(document.blocks().count(), 0);
        assert_eq!(document.warnings().len(), 1, "{text:?}");
    }
}

#[test]
fn two_blocks_of_one_name_are_kept_with_a_warning() {
    let document = read("data_a _x 1\ndata_A _x 2");
    assert_eq!(document.blocks().count(), 2);
    assert!(document.warnings()[0].to_string().starts_with("x.cif:2:1: the data block name `A` occurs again"));
    assert_eq!(text_of(&document, "_x"), "1");
}

#[test]
fn an_end_of_file_mark_of_old_systems_is_skipped() {
    assert_eq!(text_of(&read("data_x _a 1\r\n\u{1a}"), "_a"), "1");
}
