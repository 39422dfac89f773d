//! What CIF 2.0 adds, and what it forbids.
//!
//! Source of the expectations: Bernstein et al. (2016), J. Appl. Cryst. 49, 277.

use cif::{Document, Kind, MAX_DEPTH, Quoting, Value, Version, parse};

const NEW: &[u8] = include_bytes!("data/new_syntax.cif");
const WITHOUT_FIRST_LINE: &[u8] = include_bytes!("data/new_syntax_without_first_line.cif");

fn read(body: &str) -> Document {
    parse(format!("#\\#CIF_2.0\ndata_x\n{body}").as_bytes(), "x.cif").unwrap_or_else(|error| panic!("{error}"))
}

fn refused(body: &str) -> String {
    let parsed = parse(format!("#\\#CIF_2.0\ndata_x\n{body}").as_bytes(), "x.cif");
    parsed.expect_err("a message").to_string()
}

fn texts<'a>(values: impl Iterator<Item = Value<'a>>) -> Vec<String> {
    values.map(|value| value.text().unwrap_or("-".into()).into_owned()).collect()
}

#[test]
fn triple_quotes_lists_tables_and_names_beyond_ascii_are_read() {
    let document = parse(NEW, "new_syntax.cif").unwrap_or_else(|error| panic!("{error}"));
    assert_eq!(document.version(), Version::V2_0);
    assert!(document.warnings().is_empty());
    let block = document.block("GRÖßE").unwrap();
    let get = |tag: &str| block.get(tag).unwrap();
    assert_eq!(get("_triple_single").text().unwrap(), "It's \"here\"");
    assert_eq!(get("_triple_lines").text().unwrap(), "first\n;no field\nlast");
    assert_eq!(get("_triple_lines").quoting(), Quoting::Quoted);
    assert_eq!(get("_accent").text().unwrap(), "Ångström");
    assert_eq!(get("_field").text().unwrap(), "text; with\n ; semicolons");

    let Kind::List(list) = get("_list").kind() else { panic!("no list") };
    assert_eq!(texts(list.iter()), ["1", "2.5(3)", "three", "-", "-"]);
    assert_eq!(list.iter().nth(1).unwrap().number().unwrap().unwrap().to_string(), "2.5(3)");
    assert_eq!(list.iter().nth(4).unwrap().kind(), Kind::Unknown);
    let Kind::List(inner) = list.iter().nth(3).unwrap().kind() else { panic!("no inner list") };
    assert_eq!(texts(inner.iter()), ["4", "-"]);
    let Kind::List(empty) = get("_empty_list").kind() else { panic!("no list") };
    assert_eq!(empty.iter().count(), 0);

    let Kind::Table(table) = get("_table").kind() else { panic!("no table") };
    let keys: Vec<_> = table.iter().map(|(key, _)| key.into_owned()).collect();
    assert_eq!(keys, ["a", "b c", "d'e", "field"]);
    assert_eq!(table.get("field").unwrap().text().unwrap(), "text\nin a table");
    let Kind::Table(deep) = table.get("d'e").unwrap().kind() else { panic!("no inner table") };
    assert_eq!(deep.get("deep").unwrap().kind(), Kind::Inapplicable);

    let vectors = block.column("_vector").unwrap();
    assert_eq!(vectors.len(), 2);
    assert!(matches!(vectors.get(1).unwrap().kind(), Kind::List(_)));
    assert_eq!(block.frame("frame").unwrap().get("_inside").unwrap().text().unwrap(), "1");
    assert_eq!(block.get("_after").unwrap().text().unwrap(), "2");
}

#[test]
fn the_same_file_without_its_first_line_is_said_to_look_like_cif_2_0() {
    let error = parse(WITHOUT_FIRST_LINE, "x.cif").unwrap_err().to_string();
    assert!(error.contains("#\\#CIF_2.0 as the first line"), "{error}");
    for (body, place) in
        [("_list [1 2 3]", "x.cif:2:7"), ("_table {'a':1}", "x.cif:2:8"), ("_list [\n1 ]", "x.cif:2:7")]
    {
        let error = parse(format!("data_x\n{body}").as_bytes(), "x.cif").unwrap_err().to_string();
        assert!(error.starts_with(place) && error.contains("looks like CIF 2.0 without its first line"), "{error}");
    }
}

#[test]
fn the_first_line_decides_the_version_behind_a_mark_too() {
    for (head, version) in [
        ("#\\#CIF_2.0\n", Version::V2_0),
        ("\u{feff}#\\#CIF_2.0  \r\n", Version::V2_0),
        ("#\\#CIF_1.1\n", Version::V1_1),
        ("# comment\n#\\#CIF_2.0\n", Version::V1_1),
        ("", Version::V1_1),
    ] {
        let document = parse(format!("{head}data_x _a 1").as_bytes(), "x.cif").unwrap();
        assert_eq!(document.version(), version, "{head:?}");
    }
    let document = parse(b"#\\#CIF_9.7\ndata_x _a 1", "x.cif").unwrap();
    assert!(document.warnings()[0].to_string().starts_with("x.cif:1:1: the first line states CIF version `9.7`"));
}

#[test]
fn a_string_may_not_hold_its_own_delimiter() {
    let error = refused("_a 'a dog's life'");
    assert!(error.starts_with("x.cif:3:11: `s` directly behind the end of a quoted string"), "{error}");
    assert!(error.contains("three quotes"), "{error}");
}

#[test]
fn values_must_be_separated_and_unquoted_values_hold_no_brackets() {
    for (body, start) in [
        ("_a [1 2]3", "x.cif:3:9: `3` directly behind the end of a list or table"),
        ("_a ['a''b']", "x.cif:3:8: `'b']` directly behind the end of a quoted string"),
        ("_a [[1][2]]", "x.cif:3:8: `[2]]` directly behind another value"),
        ("_a a[1]", "x.cif:3:5: `[` in an unquoted value"),
        ("_a x}", "x.cif:3:5: `}` in an unquoted value"),
        ("_a ]", "x.cif:3:4: `]` in an unquoted value"),
        ("_a {'k' :1}", "x.cif:3:5: no colon behind the key `k`"),
        ("_a {k:1}", "x.cif:3:5: `k:1}` where the key of a table belongs"),
        ("_a {'k':}", "x.cif:3:9: the table ends behind a key"),
        ("_a [1 2}", "x.cif:3:8: `}` closes what `[` opened in line 3"),
        ("_a [1 2", "x.cif:3:4: the list opened here is not closed"),
        ("_a [1 2\n_b 3", "x.cif:3:4: the list opened here is not closed before `_b` in line 4"),
        ("_a {'k':1", "x.cif:3:4: the table opened here is not closed"),
        ("_a '''x\ny", "x.cif:3:4: the string opened here by ''' is not closed"),
    ] {
        let error = refused(body);
        assert!(error.starts_with(start), "{body}: {error}");
    }
}

#[test]
fn blanks_may_follow_a_colon_and_brackets_need_none_before_they_close() {
    let document = read("_t { 'a': 1 \"b\":\n2 }\n_l ['x' [y]{'k':z}]".replace("]{", "] {").as_str());
    let block = document.blocks().next().unwrap();
    let Kind::Table(table) = block.get("_t").unwrap().kind() else { panic!("no table") };
    assert_eq!(texts(table.iter().map(|entry| entry.1)), ["1", "2"]);
}

#[test]
fn nesting_has_a_bound_with_a_message() {
    let nested = |depth: usize| format!("_a {}{}", "[".repeat(depth), "]".repeat(depth));
    read(&nested(MAX_DEPTH));
    let error = refused(&nested(MAX_DEPTH + 1));
    assert!(error.starts_with("x.cif:3:68: more than 64 lists or tables inside each other"), "{error}");
    // A million brackets end at the same bound, at once.
    assert!(refused(&nested(1_000_000)).contains("more than 64"));
    assert!(refused("_a [{'k':").contains("not closed"));
}

#[test]
fn names_are_compared_without_case_in_any_script() {
    let error = refused("_größe 1 _GRÖßE 2");
    assert!(
        error.starts_with("x.cif:3:10: the tag `_GRÖßE` occurs a second time in its block; first in line 3"),
        "{error}"
    );
}

#[test]
fn bytes_that_are_not_utf8_are_refused_at_their_place() {
    let error = parse(b"#\\#CIF_2.0\ndata_x\n_a M\xfcller", "x.cif").unwrap_err().to_string();
    assert!(error.starts_with("x.cif:3:5: the byte 0xFC is not UTF-8"), "{error}");
}

#[test]
fn characters_outside_the_set_of_cif_2_0_are_refused() {
    for (c, place) in [('\u{7}', "U+0007"), ('\u{ffff}', "U+FFFF"), ('\u{1fffe}', "U+1FFFE"), ('\0', "NUL")] {
        let error = refused(&format!("_a 'é{c}'"));
        assert!(error.starts_with("x.cif:3:6:") && error.contains(place), "{error}");
    }
    // Characters that share bytes with those, and the edges of the allowed ranges.
    read("_a 'ÿ\u{bf}\u{fffd}\u{10fffd}\u{d7ff}\u{e000}\u{3fbf}'");
}
