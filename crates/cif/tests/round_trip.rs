//! Written text is read back the same: any text that is a CIF, and any values given to the builder.

mod check;

use cif::{Builder, Datum, Kind, Value, parse};
use proptest::prelude::{Just, ProptestConfig, Strategy, any, prop, prop_assert, prop_assert_eq, prop_oneof, proptest};
use values::Measured;

/// Pieces that matter to the grammar, so that random texts come close to its corners.
fn piece() -> impl Strategy<Value = String> {
    let fixed = prop::sample::select(vec![
        " ",
        "\n",
        "\r\n",
        "\r",
        "\t",
        "\n;",
        ";",
        ";\\\n",
        ";>\\\n>",
        "\\\n",
        ";>\\\\\n>",
        "'",
        "\"",
        "'''",
        "\"\"\"",
        "' ",
        "\" ",
        "[",
        "]",
        "{",
        "}",
        "':",
        "?",
        ".",
        "# c\n",
        " #",
        "_a",
        "_B ",
        "_a.b",
        " loop_ ",
        " data_",
        "data_x ",
        " save_",
        "save_f ",
        "stop_",
        "$",
        "1.5(2)",
        "5.43()",
        "5,43",
        "é",
        "α",
        "\u{2212}",
        "\u{0}",
        "\\",
        ":",
        "x",
        "'k':",
        "[Fe2O3]",
    ]);
    prop_oneof![8 => fixed.prop_map(str::to_owned), 1 => "[ -~]{0,6}", 1 => "\\PC{0,3}"]
}

fn soup() -> impl Strategy<Value = Vec<u8>> {
    let head = prop::sample::select(vec![
        "",
        "#\\#CIF_1.1\n",
        "#\\#CIF_2.0\n",
        "\u{feff}#\\#CIF_2.0\n",
        "#\\#CIF_2.0\ndata_x _a ",
    ]);
    (head, prop::collection::vec(piece(), 0..40))
        .prop_map(|(head, parts)| format!("{head}{}", parts.concat()).into_bytes())
}

/// A text that a person could put into an item.
fn text() -> impl Strategy<Value = String> {
    prop::collection::vec(piece(), 0..12).prop_map(|parts| parts.concat().replace('\0', "")).boxed()
}

/// Valid CIF 2.0 values, nested.
fn value() -> impl Strategy<Value = String> {
    let quoted = prop_oneof![
        "[a-z?.\"\\[:;#]{0,8}".prop_map(|s| format!("'{s}'")),
        "[a-z' ;\\n]{0,8}".prop_map(|s| format!("\"\"\"{s}\"\"\"")),
        "[a-z\\\\ \"']{0,9}".prop_map(|s| format!("\n;{s}\n;\n")),
        "[a-zA-Z0-9+.-]{1,9}".prop_filter("reserved", |s| !s.is_empty()),
        Just("?".to_owned()),
        Just(".".to_owned()),
    ];
    quoted.prop_recursive(4, 24, 5, |inner| {
        prop_oneof![
            prop::collection::vec(inner.clone(), 0..5).prop_map(|list| format!("[{}]", list.join(" "))),
            prop::collection::vec(("[a-z ]{0,4}", inner), 0..4).prop_map(|table| {
                let entries: Vec<_> = table.into_iter().map(|(key, value)| format!("'{key}':{value}")).collect();
                format!("{{{}}}", entries.join(" "))
            }),
        ]
    })
}

fn datum() -> impl Strategy<Value = Datum> {
    prop_oneof![
        Just(Datum::Unknown),
        Just(Datum::Inapplicable),
        (-1e6..1e6_f64, 1e-6..1.0_f64).prop_map(|(value, u)| Datum::Number(Measured::new(value, u))),
        text().prop_map(Datum::Text),
    ]
}

/// What a value is read as must be what was given.
fn same(value: Value<'_>, datum: &Datum) -> bool {
    match (value.kind(), datum) {
        (Kind::Unknown, Datum::Unknown) | (Kind::Inapplicable, Datum::Inapplicable) => true,
        (Kind::Text(text), Datum::Text(given)) => text == given.replace("\r\n", "\n").replace('\r', "\n"),
        (Kind::Text(_), Datum::Number(given)) => {
            let Ok(Some(read)) = value.number() else { return false };
            // The rule of 19 keeps two digits up to 19: half of 1 in 2 is the coarsest rounding.
            (read.value - given.value).abs() <= 0.51 * read.u && (read.u - given.u).abs() <= 0.26 * given.u
        }
        _ => false,
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 4000, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn any_text_is_refused_or_read_back_the_same(bytes in soup()) {
        check::holds_for(&bytes);
    }

    #[test]
    fn any_bytes_are_refused_or_read_back_the_same(bytes in prop::collection::vec(any::<u8>(), 0..200)) {
        check::holds_for(&[b"data_x\n_a ".to_vec(), bytes].concat());
    }

    #[test]
    fn nested_lists_and_tables_are_read_back_the_same(values in prop::collection::vec(value(), 1..4)) {
        let text = format!("#\\#CIF_2.0\ndata_x\nloop_ _v\n{}\n", values.join(" "));
        prop_assert!(check::holds_for(text.as_bytes()), "refused: {text}");
    }

    #[test]
    fn what_is_given_to_the_builder_is_read_from_its_text(
        single in datum(),
        rows in prop::collection::vec((datum(), datum(), datum()), 1..6),
    ) {
        let mut file = Builder::default();
        let rows: Vec<Vec<Datum>> = rows.into_iter().map(|(a, b, c)| vec![a, b, c]).collect();
        file.block("x").item("_single", single.clone()).looped(&["_a", "_b", "_c"], rows.clone());
        let text = file.write().unwrap();
        let document = parse(text.as_bytes(), "built").unwrap();
        let block = document.blocks().next().unwrap();
        prop_assert!(same(block.get("_single").unwrap(), &single), "{single:?}\n{text}");
        let found = block.loop_of("_a").unwrap();
        prop_assert_eq!(found.len(), rows.len());
        for (value, datum) in found.values().zip(rows.iter().flatten()) {
            prop_assert!(same(value, datum), "{datum:?}\n{text}");
        }
        prop_assert!(check::holds_for(text.as_bytes()));
    }
}
