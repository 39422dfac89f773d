//! What must hold for any text: no panic; an operation or a group that keeps its rules, or a message that helps.

use lattice::{Operation, SpaceGroup, SymmetryError};

const REFLECTIONS: [[i32; 3]; 6] = [[0, 0, 0], [1, 0, 0], [1, 1, 1], [0, 3, 0], [2, -1, 3], [999, -1000, 1]];

/// Reads the text as an operation, as a Hall symbol, as an H–M symbol, and as operations separated by `;`. Which it is.
pub fn holds_for(text: &str) -> [bool; 4] {
    let operation = Operation::parse(text);
    match &operation {
        Ok(operation) => check_operation(operation),
        Err(error) => check_message(error, text),
    }
    let hall = SpaceGroup::from_hall(text);
    let symbol = SpaceGroup::from_symbol(text);
    if let Ok((_, Some(note))) = &symbol {
        assert!(!note.is_empty());
    }
    let symbol = symbol.map(|(group, _)| group);
    let operations: Result<Vec<Operation>, SymmetryError> = text.split(';').map(Operation::parse).collect();
    let listed = operations.ok().map(|mut operations| {
        operations.push(Operation::IDENTITY);
        SpaceGroup::from_operations(&operations)
    });
    let group = |read: &Result<SpaceGroup, SymmetryError>| match read {
        Ok(group) => check_group(group),
        Err(error) => check_message(error, text),
    };
    [&hall, &symbol].into_iter().chain(&listed).for_each(group);
    [operation.is_ok(), hall.is_ok(), symbol.is_ok(), listed.is_some_and(|read| read.is_ok())]
}

fn check_message(error: &SymmetryError, text: &str) {
    assert!(!error.found.is_empty() && !error.expected.is_empty() && !error.mend.is_empty(), "{error} of {text:?}");
    assert!(error.offset.is_none_or(|at| text.is_char_boundary(at)), "{error:?} of {text:?}");
    assert!(!error.to_string().contains(char::is_control), "{error:?} of {text:?}");
}

fn check_operation(operation: &Operation) {
    assert_eq!(operation.determinant().abs(), 1, "{operation}");
    assert!(operation.translation.iter().all(|t| (0..24).contains(t)), "{operation}");
    assert_eq!(Operation::parse(&operation.to_string()).as_ref(), Ok(operation));
    let inverse = operation.inverse().expect("a determinant of ±1");
    assert_eq!(operation.after(&inverse), Operation::IDENTITY, "{operation}");
}

fn check_group(group: &SpaceGroup) {
    let count = group.operations().len();
    assert!((1..=192).contains(&count) && group.operations()[0] == Operation::IDENTITY, "{group}");
    assert!(!group.xhm().is_empty() && !group.short_symbol().is_empty());
    // A setting whose change of basis was not found has no Hall symbol; every other is that of these operations.
    if !group.hall().is_empty() {
        assert_eq!(SpaceGroup::from_hall(group.hall()).as_ref(), Ok(group));
    }
    let again = SpaceGroup::from_operations(group.operations()).unwrap_or_else(|e| panic!("{group}: {e}"));
    assert!(again == *group && again.number() == group.number(), "{group} and {again}");
    for hkl in REFLECTIONS {
        let equivalents = group.equivalents(hkl);
        assert!(
            equivalents.contains(&hkl) && group.laue_rotations().len().is_multiple_of(equivalents.len()),
            "{group}"
        );
        let absent = group.is_absent(hkl);
        for other in equivalents {
            assert_eq!(group.is_absent(other), absent, "{group}: {hkl:?} and {other:?}");
        }
    }
}
