//! The log of temperatures.

use scan::batch_log::{BatchLog, read};

fn log(text: &str) -> BatchLog {
    read(text.as_bytes(), "batches.csv").unwrap_or_else(|message| panic!("{text:?}: {message}"))
}

#[test]
fn the_documented_form_is_read_without_a_note() {
    let log = log("# thermometer 4\nid,temperature_C,u_temperature_C\nB-1,22.4,0.3\n\"B-2, again\",-5,0.3\n");
    assert!(log.notes.is_empty(), "{:?}", log.notes);
    assert_eq!(
        log.entry("B-1").map(|entry| (entry.temperature_c, entry.u_temperature_c)),
        Some((Some(22.4), Some(0.3)))
    );
    assert_eq!(log.entry("B-2, again").map(|entry| (entry.temperature_c, entry.source_line)), Some((Some(-5.0), 4)));
    assert_eq!(log.entry("B-3"), None);
}

#[test]
fn other_separators_decimal_commas_and_columns_are_read_with_a_note() {
    let log = log("date;temperature_C;id;u_temperature_C\n2.3.2024;22,4;B #1;0,3\n");
    assert_eq!(
        log.entry("B #1").map(|entry| (entry.temperature_c, entry.u_temperature_c)),
        Some((Some(22.4), Some(0.3)))
    );
    assert_eq!(log.notes.len(), 2, "{:?}", log.notes);
}

#[test]
fn an_uncertainty_may_stand_in_parentheses_and_a_missing_one_is_said() {
    let log = log("id,temperature_C\nB1,22.4(3)\nB2,22.4\nB3,\n");
    assert!((log.entries[0].u_temperature_c.unwrap() - 0.3).abs() < 1e-12);
    assert_eq!((log.entries[1].u_temperature_c, log.entries[2].temperature_c), (None, None));
    assert!(
        log.notes[0].contains("`B2` has no s.u.") && log.notes[1].contains("`B3` has no temperature"),
        "{:?}",
        log.notes
    );
}

#[test]
fn temperatures_near_300_look_like_kelvin() {
    assert!(log("id,temperature_C,u_temperature_C\nB1,295.6,0.3\n").notes[0].contains("look like kelvin"));
}
