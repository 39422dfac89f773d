//! The text that is written: quotes, lines below 80 characters, versions.

use cif::{Builder, Datum, Version, parse, write};
use values::Measured;

/// The lines of an item alone.
fn one(value: impl Into<Datum>) -> String {
    let mut file = Builder::default();
    file.block("x").item("_a", value);
    let text = file.write().unwrap_or_else(|error| panic!("{error}"));
    text.lines().skip(3).collect::<Vec<_>>().join("\n")
}

#[test]
fn quotes_are_chosen_by_what_the_text_holds() {
    let column = |value: &str| format!("_a                                {value}");
    for (text, written) in [
        ("word", "word"),
        ("two words", "'two words'"),
        ("a dog's life", "\"a dog's life\""),
        ("?", "'?'"),
        (".", "'.'"),
        ("", "''"),
        ("5.43(2)", "'5.43(2)'"),
        ("data_x", "'data_x'"),
        ("Loop_", "'Loop_'"),
        ("_tag", "'_tag'"),
        ("#c", "'#c'"),
        ("C#1", "C#1"),
        (";x", "';x'"),
        ("[Fe2O3]", "'[Fe2O3]'"),
        ("5'-bromo-\"2\"-x", "5'-bromo-\"2\"-x"),
        ("5'-bromo \"2\"-x", "'5'-bromo \"2\"-x'"),
    ] {
        assert_eq!(one(text), column(written), "{text}");
    }
    assert_eq!(one("it' s \"x\" y"), "_a\n;it' s \"x\" y\n;");
    assert_eq!(one("two\nlines"), "_a\n;two\nlines\n;");
    assert_eq!(one("two\r\nlines"), "_a\n;two\nlines\n;");
    assert_eq!(one("a\n;b"), "_a\n;>\\\\\n>a\n>;b\n;");
    assert_eq!(one(Datum::Unknown), column("?"));
    assert_eq!(one(Datum::Inapplicable), column("."));
    assert_eq!(one(f64::NAN), column("?"));
    assert_eq!(one(Measured::new(5.431_123, 0.000_04)), column("5.43112(4)"));
}

#[test]
fn lines_stay_below_eighty_characters_where_values_allow_it() {
    let mut file = Builder::default();
    let row = || (0..12).map(|i| Datum::from(Measured::new(f64::from(i) + 0.123_45, 0.000_12))).collect::<Vec<_>>();
    let tags: Vec<String> = (0..12).map(|i| format!("_column_{i}")).collect();
    let tags: Vec<&str> = tags.iter().map(String::as_str).collect();
    file.comment("made for a test\nof lines")
        .block("x")
        .item("_a_tag_that_is_quite_long_for_a_tag_of_an_item", "a text that does not fit behind it in the line")
        .looped(&tags, vec![row(), row()]);
    let text = file.write().unwrap();
    assert!(text.starts_with("#\\#CIF_1.1\n# made for a test\n# of lines\n\ndata_x\n"), "{text}");
    assert!(text.lines().all(|line| line.len() < 80), "{text}");
    assert!(text.ends_with("\n") && !text.contains('\r'));
    // Each row begins on a new line.
    assert_eq!(text.lines().filter(|line| line.starts_with("0.12345(12) ")).count(), 2, "{text}");
}

#[test]
fn only_lines_beyond_the_limit_of_cif_are_folded() {
    let long = "x ".repeat(500);
    assert_eq!(one(long.as_str()), format!("_a\n'{long}'"));
    let beyond = "x ".repeat(1500);
    let folded = one(beyond.as_str());
    assert!(folded.starts_with("_a\n;\\\nx x "), "{folded}");
    assert!(folded.lines().all(|line| line.len() < 80), "{folded}");
}

#[test]
fn characters_outside_ascii_make_it_cif_2_0() {
    let mut file = Builder::default();
    file.block("x").item("_name", "Müller's \"x\"").item("_b", "[a]");
    let text = file.write().unwrap();
    assert!(text.starts_with("#\\#CIF_2.0\n"), "{text}");
    assert!(text.contains("'''Müller's \"x\"'''"), "{text}");
    // A document of CIF 1.1 likewise, but not for what stands in comments.
    for (source, version) in [
        ("data_x _a Müller", Version::V2_0),
        ("data_x # Müller\n_a 1", Version::V1_1),
        ("data_ü _a 1", Version::V2_0),
        ("data_x save_f loop_ _a ü save_", Version::V2_0),
    ] {
        let written = write(&parse(source.as_bytes(), "x.cif").unwrap());
        assert_eq!(parse(written.as_bytes(), "x.cif").unwrap().version(), version, "{source}");
    }
}

#[test]
fn what_the_builder_cannot_write_is_refused() {
    type Fill = fn(&mut Builder);
    let cases: [(Fill, &str); 9] = [
        (
            |file| {
                file.block("two words");
            },
            "the block name `two words`",
        ),
        (
            |file| {
                file.block("");
            },
            "the block name ``",
        ),
        (
            |file| {
                file.block("x").item("a", 1);
            },
            "the tag `a`",
        ),
        (
            |file| {
                file.block("x").item("_a b", 1);
            },
            "the tag `_a b`",
        ),
        (
            |file| {
                file.block("x").item("_", 1);
            },
            "the tag `_`",
        ),
        (
            |file| {
                file.block("x").item("_a", 1).item("_A", 2);
            },
            "the tag `_A` occurs a second time",
        ),
        (
            |file| {
                file.block("x").looped(&["_a"], vec![]);
            },
            "a loop with 1 tags and 0 rows",
        ),
        (
            |file| {
                file.block("x").looped(&["_a", "_b"], vec![vec![1.into()]]);
            },
            "row 1 of the loop of `_a`",
        ),
        (
            |file| {
                file.block("x").item("_a", "bell\u{7}");
            },
            "the character U+0007",
        ),
    ];
    for (fill, found) in cases {
        let mut file = Builder::default();
        fill(&mut file);
        let error = file.write().unwrap_err().to_string();
        assert!(error.contains(found), "{found}: {error}");
    }
}
