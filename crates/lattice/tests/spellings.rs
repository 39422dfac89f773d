//! Spellings of symbols as files have them, what is assumed, and what is refused.

#![allow(clippy::unwrap_used, reason = "what a fixture does not hold fails the test")]

use lattice::{Cell, Operation, Resolved, SpaceGroup, SymmetryStatement, resolve};
use proptest::prelude::{ProptestConfig, any, prop, prop_assert, proptest};

fn xhm(symbol: &str) -> String {
    SpaceGroup::from_symbol(symbol).unwrap_or_else(|e| panic!("{symbol}: {e}")).0.xhm().to_owned()
}

#[test]
fn spellings_of_the_open_formats_are_known() {
    // Outside: the forms listed in the note on open formats, section 3; the setting each stands for is common practice.
    for (symbol, setting) in [
        ("P m -3 m", "P m -3 m"),
        ("Pm-3m", "P m -3 m"),
        ("P M 3 M", "P m -3 m"),
        ("Pm3m", "P m -3 m"),
        ("Fm3m", "F m -3 m"),
        ("F m 3 m", "F m -3 m"),
        ("Fd3m", "F d -3 m:2"),
        ("F d 3 m S", "F d -3 m:1"),
        ("F d -3 m Z", "F d -3 m:2"),
        ("Fd-3mS", "F d -3 m:1"),
        ("F d -3 m :1", "F d -3 m:1"),
        ("F d -3 m:2", "F d -3 m:2"),
        ("F m 3- m", "F m -3 m"),
        ("F m 3\u{305} m", "F m -3 m"),
        ("F m −3 m", "F m -3 m"),
        ("P 21/c", "P 1 21/c 1"),
        ("P2(1)/c", "P 1 21/c 1"),
        ("P21/C", "P 1 21/c 1"),
        ("P_21/c", "P 1 21/c 1"),
        ("P 2_1/c", "P 1 21/c 1"),
        ("P 1 21/c 1", "P 1 21/c 1"),
        ("P 1 1 21/b", "P 1 1 21/b"),
        ("P 21/n", "P 1 21/n 1"),
        ("P 21/b", "P 1 1 21/b"),
        ("C 2/m", "C 1 2/m 1"),
        ("I 2/a", "I 1 2/a 1"),
        ("B 2/b", "B 1 1 2/b"),
        ("R -3 m", "R -3 m:H"),
        ("R -3 m :H", "R -3 m:H"),
        ("R -3 m h", "R -3 m:H"),
        ("R-3mH", "R -3 m:H"),
        ("R -3 m HR", "R -3 m:H"),
        ("R -3 m R", "R -3 m:R"),
        ("R-3c:r", "R -3 c:R"),
        ("R 3 2", "R 3 2:H"),
        ("H 3 2", "R 3 2:H"),
        ("H-3m", "R -3 m:H"),
        ("F 4/m -3 2/m", "F m -3 m"),
        ("P 21/n 21/m 21/a", "P n m a"),
        ("P 2_1/n 2_1/m 2_1/a", "P n m a"),
        ("P 63/m 2/m 2/c", "P 63/m m c"),
        ("I 41/a 2/m 2/d:2", "I 41/a m d:2"),
        ("C m c e", "C m c a"),
        ("Cmce", "C m c a"),
        ("C m m e", "C m m a"),
        ("A e m 2", "A b m 2"),
        ("A e a 2", "A b a 2"),
        ("C c c e", "C c c a:2"),
        ("C c c e :1", "C c c a:1"),
        ("C 2/m 2/c 21/e", "C m c a"),
        ("C 2/m 2/c 21/a", "C m c a"),
        ("P n m a:cab", "P b n m"),
        ("P b n m", "P b n m"),
        ("P 21/c:c1", "P 1 1 21/a"),
        ("I41/amd", "I 41/a m d:2"),
        ("P3121", "P 31 2 1"),
        ("P 4/n m m :1", "P 4/n m m:1"),
        ("'P n m a'", "P n m a"),
        ("225", "F m -3 m"),
        ("F 4/m m m", "F 4/m m m"),
        ("P 1", "P 1"),
        ("P-1", "P -1"),
    ] {
        assert_eq!(xhm(symbol), setting, "{symbol}");
    }
}

#[test]
fn an_ambiguous_symbol_says_what_was_taken_and_what_else_it_may_mean() {
    for (symbol, words) in [
        ("F d -3 m", ["`F d -3 m:2` (origin choice 2)", "`F d -3 m:1`"]),
        ("R -3 m", ["`R -3 m:H` (hexagonal axes)", "`R -3 m:R`"]),
        ("P 2/m", ["`P 1 2/m 1` (unique axis b)", "`P 1 1 2/m`, `P 2/m 1 1`"]),
        ("C m m e", ["`C m m a`", "`C m m b`"]),
    ] {
        let note = SpaceGroup::from_symbol(symbol).unwrap().1.unwrap();
        assert!(words.iter().all(|word| note.contains(word)), "{note}");
    }
    for symbol in ["F m -3 m", "P n m a", "R -3 m:H", "P 1 21/c 1", "F d -3 m:1"] {
        assert_eq!(SpaceGroup::from_symbol(symbol).unwrap().1, None, "{symbol}");
    }
}

#[test]
fn what_is_unknown_is_refused_with_the_nearest_symbols() {
    for (symbol, found, expected) in [
        ("F d -3 n", "unknown space group `F d -3 n`", "nearest are `F d -3 m`"),
        ("P 21/x", "unknown space group `P 21/x`", "`P 1 21/"),
        ("F d -3 m:3", "mark `3` in space group `F d -3 m:3`", "`F d -3 m:1`, `F d -3 m:2`"),
        ("F m -3 m:1", "mark `1` in space group `F m -3 m:1`", "`F m -3 m`"),
        ("", "a space-group symbol of 0 bytes", "1 to 60 bytes"),
        ("231", "unknown space group `231`", "nearest"),
        ("R 3 m H H", "unknown space group", "nearest"),
    ] {
        let error = SpaceGroup::from_symbol(symbol).unwrap_err();
        assert!(error.found.contains(found) && error.expected.contains(expected), "{symbol}: {error}");
    }
    assert!(SpaceGroup::from_number(0).is_err() && SpaceGroup::from_number(231).is_err());
}

#[test]
fn wrong_hall_symbols_are_refused_with_their_place() {
    for (symbol, offset) in [
        ("", 0),
        ("-", 1),
        ("Q 2", 0),
        ("P 5", 2),
        ("P 2yq", 4),
        ("P 22", 3),
        ("P 44", 3),
        ("P 2 3", 4),
        ("P 2 2 2", 6),
        ("P", 1),
        ("P 1 1 1 1 1", 11),
        ("P 2 (0 0 1", 10),
        ("P 2 (0 0)", 5),
        ("P 2 (0 0 12)", 5),
        ("P 2 (x,y)", 5),
        ("P 2 (x,y,2)", 5),
        ("P 2 (x,x,y)", 5),
        ("P 2 (q,x,y)", 5),
        ("P 2''", 4),
        ("P 21'", 2),
    ] {
        let error = SpaceGroup::from_hall(symbol).unwrap_err();
        assert_eq!(error.offset, Some(offset), "{symbol}: {error}");
    }
    // A change of basis to a cell that the lattice does not have, and matrices of no common group.
    assert!(SpaceGroup::from_hall("P 1 (2*x,y,z)").unwrap_err().found.contains("leaves the lattice"));
    assert!(SpaceGroup::from_hall("P 6 4x").unwrap_err().found.contains("do not close"));
}

#[test]
fn hall_symbols_are_read_as_old_files_write_them() {
    for (symbol, plain) in [
        ("-F_4vw_2vw_3", "-F 4vw 2vw 3"),
        ("-P2ybc", "-P 2ybc"),
        ("-p 2YBC", "-P 2ybc"),
        ("-R 3 2=", "-R 3 2\""),
        ("P 3 2''", "P 3 2\""),
        ("  P  2  2ab  -1ab ", "P 2 2ab -1ab"),
        ("R 3 -2”c", "R 3 -2\"c"),
    ] {
        if symbol.ends_with("''") {
            // Two apostrophes are no quotation mark.
            assert!(SpaceGroup::from_hall(symbol).is_err());
            continue;
        }
        assert_eq!(SpaceGroup::from_hall(symbol).unwrap().hall(), plain, "{symbol}");
    }
}

#[test]
fn a_diagonal_axis_lies_across_the_axis_before_it() {
    // Outside: International Tables B (2010), Table A1.4.2.5: behind x, 2' is along b - c and 2" along b + c; behind z,
    // along a - b and a + b. moyo 0.22 has the same rule; gemmi takes z always.
    for (hall, operation) in [
        ("P 2x 2'", "-x,-z,-y"),
        ("P 2x 2\"", "-x,z,y"),
        ("P 2y 2'", "-z,-y,-x"),
        ("P 2 2'", "-y,-x,-z"),
        ("P 2 2\"", "y,x,-z"),
    ] {
        let group = SpaceGroup::from_hall(hall).unwrap();
        assert_eq!(group.operations().len(), 4, "{hall}");
        assert!(group.operations().contains(&Operation::parse(operation).unwrap()), "{hall}");
    }
}

fn statement(operations: &[&str], hall: &str, hm: &str, number: u16) -> SymmetryStatement {
    let given = |text: &str| (!text.is_empty()).then(|| text.to_owned());
    SymmetryStatement {
        operations: operations.iter().map(|text| Operation::parse(text).unwrap()).collect(),
        hall: given(hall),
        hm: given(hm),
        number: (number > 0).then_some(number),
    }
}

fn resolved(statement: &SymmetryStatement, [a, b, c, alpha, beta, gamma]: [f64; 6]) -> Resolved {
    resolve(statement, &Cell::new(a, b, c, alpha, beta, gamma).unwrap()).unwrap()
}

const BOX: [f64; 6] = [5.0, 6.0, 7.0, 90.0, 90.0, 90.0];
const OBLIQUE: [f64; 6] = [5.0, 6.0, 7.0, 90.0, 101.0, 90.0];

#[test]
fn operations_win_over_symbols_and_contradictions_are_named() {
    let found = resolved(&statement(&["x,y,z", "-x,y+1/2,-z"], "-P 2ybc", "P 21/m", 14), OBLIQUE);
    assert_eq!((found.group.xhm(), found.group.number()), ("P 1 21 1", Some(4)));
    let notes = found.notes.join("\n");
    for part in ["Hall symbol `-P 2ybc` contradicts", "symbol `P 21/m` contradicts", "number 14 contradicts"] {
        assert!(notes.contains(part), "{notes}");
    }
    let agreeing = resolved(&statement(&["x,y,z", "-x,y+1/2,-z"], "P 2yb", "P 21", 4), OBLIQUE);
    assert_eq!(agreeing.notes, Vec::<String>::new());
}

#[test]
fn the_order_of_trust_is_operations_hall_symbol_number() {
    assert_eq!(resolved(&statement(&[], "-P 2ybc", "P 21/m", 4), OBLIQUE).group.xhm(), "P 1 21/c 1");
    assert_eq!(resolved(&statement(&[], "", "P 21/m", 4), OBLIQUE).group.xhm(), "P 1 21/m 1");
    let by_number = resolved(&statement(&[], "", "", 4), OBLIQUE);
    assert_eq!(by_number.group.xhm(), "P 1 21 1");
    assert!(by_number.notes[0].contains("only its number is known"));
    let nothing = resolved(&statement(&[], "", "", 0), OBLIQUE);
    assert_eq!(nothing.group.number(), Some(1));
    assert!(nothing.notes[0].contains("no symmetry operations, Hall symbol"), "{:?}", nothing.notes);
    // What can't be read is named, and the next item takes its place.
    let unread = resolved(&statement(&[], "nonsense", "P 21/m", 0), OBLIQUE);
    assert_eq!(unread.group.xhm(), "P 1 21/m 1");
    assert!(unread.notes.iter().any(|note| note.contains("Hall symbol `nonsense` is not used")), "{:?}", unread.notes);
    let cell = Cell::cubic(4.0).unwrap();
    assert!(resolve(&statement(&[], "", "nonsense", 0), &cell).is_err());
}

#[test]
fn the_cell_decides_between_axes_that_a_symbol_leaves_open() {
    let hexagonal = [4.9, 4.9, 5.4, 90.0, 90.0, 120.0];
    let rhombohedral = [5.13, 5.13, 5.13, 55.3, 55.3, 55.3];
    for (hm, number) in [("R -3 c", 0), ("", 167)] {
        let statement = statement(&[], "", hm, number);
        assert_eq!(resolved(&statement, hexagonal).group.xhm(), "R -3 c:H");
        assert_eq!(resolved(&statement, rhombohedral).group.xhm(), "R -3 c:R");
    }
    let unique_c = [5.0, 6.0, 7.0, 90.0, 90.0, 101.0];
    assert_eq!(resolved(&statement(&[], "", "P 2/m", 0), unique_c).group.xhm(), "P 1 1 2/m");
    assert_eq!(resolved(&statement(&[], "", "", 10), unique_c).group.xhm(), "P 1 1 2/m");
    assert_eq!(resolved(&statement(&[], "", "P 2/m", 0), BOX).group.xhm(), "P 1 2/m 1");
}

#[test]
fn a_cell_against_the_system_is_named_with_both_shapes() {
    let found = resolved(&statement(&[], "", "F m -3 m", 0), BOX);
    assert!(found.notes[0].contains("5.0000 6.0000 7.0000") && found.notes[0].contains("cubic"), "{:?}", found.notes);
    // Rounded thirds of published cells pass.
    assert_eq!(
        resolved(&statement(&[], "", "P 63/m m c", 0), [3.2094, 3.2093, 5.21, 90.0, 90.0, 120.0]).notes.len(),
        0
    );
}

#[test]
fn operations_that_are_no_group_are_refused() {
    let cell = Cell::cubic(4.0).unwrap();
    let without_identity = resolve(&statement(&["-x,-y,-z"], "", "", 0), &cell).unwrap_err();
    assert!(without_identity.found.contains("without x,y,z"), "{without_identity}");
    let open = resolve(&statement(&["x,y,z", "-y,x-y,z", "-y,x,z"], "", "", 0), &cell).unwrap_err();
    assert!(open.found.contains("do not close"), "{open}");
    // The powers of a shear are x+2y, x+3y and so on without end.
    for shear in ["x+y,y,z", "x,y,z-y", "-x+y,-y,z+1/2"] {
        let endless = resolve(&statement(&["x,y,z", shear], "", "", 0), &cell).unwrap_err();
        assert!(endless.found.contains("do not close"), "{shear}: {endless}");
    }
    let generators = resolve(&statement(&["x,y,z", "-y,x,z", "-x,-y,-z", "z,x,y"], "", "", 0), &cell).unwrap();
    assert_eq!((generators.group.xhm(), generators.group.operations().len()), ("P m -3 m", 48));
    assert!(generators.notes[0].contains("the 4 symmetry operations given generate 48"), "{:?}", generators.notes);
}

#[test]
fn a_setting_outside_the_tables_keeps_its_number_and_its_operations() {
    // Body-centred tetragonal in a face-centred cell turned once more: no table has it.
    let group = SpaceGroup::from_hall("-I 4 2 (x-y,x+y,z+1/8)");
    assert!(group.is_err(), "a cell half as large is none of the lattice");
    let group = SpaceGroup::from_hall("-I 4 2 (1/2*x+1/2*y,-1/2*x+1/2*y,z+1/8)").unwrap();
    assert_eq!((group.number(), group.operations().len(), group.is_tabulated()), (Some(139), 64, false));
    assert_eq!(group.centring(), Some(lattice::Centring::F));
    let again = SpaceGroup::from_operations(group.operations()).unwrap();
    assert_eq!(again.number(), Some(139));
    assert_eq!(SpaceGroup::from_hall(again.hall()).unwrap(), group, "{}", again.hall());
    assert!(again.xhm().starts_with("I 4/m m m ("), "{}", again.xhm());
}

#[test]
fn the_place_of_what_is_too_long_is_the_start_of_a_character() {
    let text = format!("P{}", "é".repeat(200));
    for (error, offset) in
        [(Operation::parse(&text).unwrap_err(), 199), (SpaceGroup::from_hall(&text).unwrap_err(), 119)]
    {
        assert_eq!(error.offset, Some(offset), "{error}");
        assert!(text.is_char_boundary(offset), "{error}");
    }
}

#[test]
fn a_message_never_passes_on_the_control_characters_of_a_text() {
    let text = "Pq\u{1b}[31m\n\0";
    let operation = Operation::parse(text).unwrap_err();
    let (hall, symbol) = (SpaceGroup::from_hall(text).unwrap_err(), SpaceGroup::from_symbol(text).unwrap_err());
    for error in [operation, hall, symbol] {
        assert!(!error.to_string().contains(char::is_control) && !error.found.is_empty(), "{error:?}");
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 1000, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn no_text_makes_a_reader_panic(text in any::<String>()) {
        let _ = (Operation::parse(&text), SpaceGroup::from_hall(&text), SpaceGroup::from_symbol(&text));
    }

    #[test]
    fn no_text_of_their_own_characters_makes_a_reader_panic(
        triplet in "[-+*/.,xyzXY0-9' ]{0,30}",
        hall in "[-]?[PABCIFRSTH][-'\"*^=xyz1-6abcnuvwd _]{0,16}(\\([-+*/.,xyz0-9 ]{0,16}\\)?)?",
        symbol in "[-PABCIRFHabcdemn1-6/ :_()SZ\u{305}]{0,14}",
    ) {
        if let Ok(operation) = Operation::parse(&triplet) {
            prop_assert!(Operation::parse(&operation.to_string()) == Ok(operation));
        }
        if let Ok(group) = SpaceGroup::from_hall(&hall) {
            let again = SpaceGroup::from_operations(group.operations());
            prop_assert!(again.is_ok_and(|again| again == group && again.number() == group.number()));
        }
        let _ = SpaceGroup::from_symbol(&symbol);
    }

    #[test]
    fn no_operations_make_a_group_panic(
        entries in prop::collection::vec((prop::array::uniform3(prop::array::uniform3(-2_i8..=2)), prop::array::uniform3(0_i32..24)), 0..5),
    ) {
        let mut operations = vec![Operation::IDENTITY];
        operations.extend(entries.into_iter().map(|(rotation, translation)| Operation { rotation, translation }));
        if let Ok(group) = SpaceGroup::from_operations(&operations) {
            prop_assert!(group.operations().len() <= 192);
        }
    }
}
