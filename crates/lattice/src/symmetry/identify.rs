//! From operations to the names of a group.

use super::closure::close;
use super::group::Names;
use super::hall;
use super::operation::Operation;
use super::settings::SETTINGS;

/// Names of a closed, sorted group.
pub(crate) fn names(operations: &[Operation]) -> Names {
    tabulated(operations).unwrap_or_default()
}

/// The first tabulated setting with exactly these operations.
fn tabulated(operations: &[Operation]) -> Option<Names> {
    SETTINGS
        .iter()
        .find(|setting| {
            // Cheap first: all generators must be there. Only then are the groups worth comparing.
            hall::parse(setting.hall).is_ok_and(|hall| {
                hall.generators.iter().all(|g| operations.contains(g))
                    && close(&hall.generators).is_ok_and(|group| group == operations)
            })
        })
        .map(Names::of)
}
