//! Each fault of CIF 1.1 syntax gets a message at its place that says how to mend it.

use cif::parse;

fn refused(text: &[u8]) -> String {
    match parse(text, "x.cif") {
        Err(error) => error.to_string(),
        Ok(_) => panic!("{:?} was read", String::from_utf8_lossy(text)),
    }
}

#[test]
fn every_fault_is_named_where_it_is() {
    for (text, start) in [
        ("_a 1\ndata_x", "x.cif:1:1: `_a` before the first data block"),
        ("# c\n text", "x.cif:2:2: `text` before the first data block"),
        ("data_x\n_a 'open\n_b 1", "x.cif:2:4: the string opened here by ' is not closed in its line"),
        ("data_x\n_a \"open", "x.cif:2:4: the string opened here by \" is not closed in its line"),
        ("data_x\n_a\n;text\n ;\n", "x.cif:3:1: the text field opened here is not closed"),
        ("data_x\n_a\n;text\n;more\n;\n", "x.cif:4:1: the text field of line 3 is closed by this semicolon"),
        ("data_x\n_a _b 1", "x.cif:2:1: the tag `_a` has no value: `_b` follows"),
        ("data_x\n_a", "x.cif:2:1: the tag `_a` has no value: the file ends"),
        ("data_x\n_a loop_ _b 1", "x.cif:2:1: the tag `_a` has no value: `loop_` follows"),
        ("data_x\n_a 1 2", "x.cif:2:6: the value `2` without a tag"),
        ("data_x\n_ 1", "x.cif:2:1: a tag of a lone underscore"),
        ("data_x\n_a 1\n_A 2", "x.cif:3:1: the tag `_A` occurs a second time in its block; first in line 2"),
        ("data_x\n_a 1 loop_ _b _a 2 3", "x.cif:2:15: the tag `_a` occurs a second time"),
        ("data_x\nloop_\n_a _b\n1 2 3", "x.cif:2:1: the loop has 2 tags and 3 values: 1 left over"),
        ("data_x\nloop_\n_a _b\n_c", "x.cif:2:1: the loop has 3 tags and no values"),
        ("data_x\nloop_\n1 2", "x.cif:2:1: loop_ without tags"),
        ("data_x\nloop_", "x.cif:2:1: loop_ without tags"),
        ("data_x\nglobal_", "x.cif:2:1: the reserved word `global_`"),
        ("data_x\nloop_ _a 1 stop_", "x.cif:2:12: the reserved word `stop_`"),
        ("data_x\n_a $frame", "x.cif:2:4: the value `$frame` begins with $"),
        ("data_x\nsave_", "x.cif:2:1: save_ closes a save frame, but none is open"),
        ("data_x\nsave_f\n_a 1", "x.cif:2:1: the save frame opened here is not closed"),
        ("data_x\nsave_f\ndata_y", "x.cif:2:1: the save frame opened here is not closed"),
        ("data_x\nsave_f\nsave_g", "x.cif:3:1: a save frame inside the save frame of line 2"),
        ("data_x\n_a 1\u{0}", "x.cif:2:5: a NUL character"),
        ("data_x\n_a \u{7}", "x.cif:2:4: the character U+0007"),
        ("data_x\n_a '''two\nlines'''", "x.cif:2:4: the string opened here by ' is not closed in its line"),
    ] {
        let error = refused(text.as_bytes());
        assert!(error.starts_with(start), "{text:?}: {error}");
        assert!(error.contains("; expected ") && error.contains("; to mend: "), "{error}");
    }
}

#[test]
fn hints_name_the_likely_cause() {
    for (text, hint) in [
        ("data_x\n_a 5.43 (2)", "delete the blank between the number and its s.u."),
        ("data_x\nloop_ _a _b\n1 2 (3)", "delete the blank before the s.u. `(3)` in line 3"),
        ("data_x\nloop_ _a _b\n1 2\n3 4\n5", "the last full row ends in line 4"),
        ("data_x\n_a '''two\nlines'''", "#\\#CIF_2.0 as the first line"),
    ] {
        let error = refused(text.as_bytes());
        assert!(error.contains(hint), "{text:?}: {error}");
    }
}

#[test]
fn utf_16_gets_a_message_with_and_without_its_mark() {
    let little: Vec<u8> = "data_x _a 1".encode_utf16().flat_map(u16::to_le_bytes).collect();
    let big: Vec<u8> = "data_x _a 1".encode_utf16().flat_map(u16::to_be_bytes).collect();
    for bytes in [[&[0xFF, 0xFE], &little[..]].concat(), [&[0xFE, 0xFF], &big[..]].concat()] {
        assert!(refused(&bytes).starts_with("x.cif:1:1: the file begins with the byte order mark of UTF-16"));
    }
    assert!(refused(&little).starts_with("x.cif:1:2: a NUL character: the file is binary, or UTF-16"));
    assert!(refused(&big).starts_with("x.cif:1:1: a NUL character"));
}

#[test]
fn a_line_of_ten_megabytes_is_read_or_refused_at_once() {
    // As values of a loop: read, with a warning of the line.
    let mut text = String::from("data_x\nloop_ _a\n");
    text.push_str(&"0.1() ".repeat(10_000_000 / 6));
    let document = parse(text.as_bytes(), "x.cif").unwrap();
    assert!(document.warnings()[0].to_string().starts_with("x.cif:3:2049: a line has more than 2048 characters"));
    // As one token, one string without end, one tag: the message shows its beginning only.
    for body in ["x", "_a '", "_", "_a 1 _a", "_a [", "_a $"] {
        let error = refused(format!("data_x\n{body}{}", "y".repeat(10_000_000)).as_bytes());
        assert!(error.len() < 500, "{} characters for {body:?}", error.len());
    }
    // A fault at the end of such a line has its column.
    let error = refused(format!("data_x\n_a '{}' _a 2", "y".repeat(10_000_000)).as_bytes());
    assert!(error.starts_with("x.cif:2:10000007: the tag `_a` occurs a second time"), "{error}");
}

#[test]
fn numbers_say_what_is_wrong_with_them_at_their_place() {
    for (value, found) in [
        ("5,43", "a comma for the decimal point"),
        ("\u{2212}0.5", "a minus sign that is not the hyphen of ASCII"),
        ("'5.43 (2)'", "a blank inside"),
        ("(2)", "an s.u. alone"),
        ("1.0D+03", "an exponent with D"),
        ("1O23", "`1O23` is not a number"),
    ] {
        let document = parse(format!("data_x\n_a {value}").as_bytes(), "x.cif").unwrap();
        let error = document.blocks().next().unwrap().get("_a").unwrap().number().unwrap_err().to_string();
        assert!(error.starts_with("x.cif:2:4: ") && error.contains(found), "{error}");
    }
}

#[test]
fn numbers_have_their_standard_uncertainty_and_missing_ones_are_none() {
    // Outside: International Tables G (2005), section 2.2.7, from memory: the s.u. belongs to the last digits.
    for (value, expected, u) in [
        ("5.4311(8)", 5.4311, 0.0008),
        ("12.3(12)", 12.3, 1.2),
        ("1234(5)", 1234.0, 5.0),
        ("1.5E-3(2)", 0.0015, 0.0002),
        ("'5.43'", 5.43, 0.0),
        ("5.43()", 5.43, 0.0),
        ("0.333(?)", 0.333, 0.0),
        ("-.5", -0.5, 0.0),
    ] {
        let document = parse(format!("data_x\n_a {value}").as_bytes(), "x.cif").unwrap();
        let number = document.blocks().next().unwrap().get("_a").unwrap().number().unwrap().unwrap();
        assert!((number.value - expected).abs() <= 1e-12 * expected.abs(), "{value}: {number:?}");
        assert!((number.u - u).abs() <= 1e-12 * u, "{value}: {number:?}");
        let warned = document.warnings().iter().any(|w| w.found.contains("parentheses without an s.u."));
        assert_eq!(warned, value.contains("()") || value.contains("(?)"), "{value}");
    }
    let document = parse(b"data_x _a ? _b . _c '?'", "x.cif").unwrap();
    let block = document.blocks().next().unwrap();
    assert_eq!(block.get("_a").unwrap().number(), Ok(None));
    assert_eq!(block.get("_b").unwrap().number(), Ok(None));
    assert!(block.get("_c").unwrap().number().is_err(), "a quoted question mark is text");
}
