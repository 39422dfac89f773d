//! From generators to the whole group.

use std::collections::HashSet;

use super::operation::Operation;
use crate::SymmetryError;

/// Most operations that a group has in a conventional cell: 48 rotations times 4 centring translations.
pub(crate) const MOST_OPERATIONS: usize = 192;

/// Entries of a rotation at which products saturate, so that those of a shear would seem to close.
const SATURATED: u8 = 127;

/// All products of `generators`, the identity first and the others sorted.
///
/// # Errors
/// [`SymmetryError`] when there are more than [`MOST_OPERATIONS`], when an entry of a rotation reaches ±[`SATURATED`], or
/// when a rotation has no inverse among whole numbers: the generators belong to no group of this kind.
pub(crate) fn close(generators: &[Operation]) -> Result<Vec<Operation>, SymmetryError> {
    if let Some(wrong) = generators.iter().find(|generator| generator.determinant().abs() != 1) {
        return Err(SymmetryError::new(
            format!("operation `{wrong}` whose rotation has determinant {}", wrong.determinant()),
            "determinant 1 or -1",
            "correct the operation",
        ));
    }
    let mut known = HashSet::from([Operation::IDENTITY]);
    let mut group = vec![Operation::IDENTITY];
    let mut used: Vec<Operation> = Vec::new();
    for generator in generators {
        if known.contains(generator) {
            continue;
        }
        used.push(*generator);
        // Everything known is multiplied by the new generator, everything that this adds by all of them.
        let mut next = 0;
        let old = group.len();
        while next < group.len() {
            let first = if next < old { used.len() - 1 } else { 0 };
            for factor in &used[first..] {
                let product = group[next].after(factor);
                if known.insert(product) {
                    group.push(product);
                }
                let endless = product.rotation.as_flattened().iter().any(|entry| entry.unsigned_abs() >= SATURATED);
                if endless || group.len() > MOST_OPERATIONS {
                    return Err(SymmetryError::new(
                        format!(
                            "operations that do not close: their products exceed {MOST_OPERATIONS}, `{product}` among them"
                        ),
                        "operations of one space group in one setting",
                        "look for a wrong sign or fraction among the operations, or leave them out and give the symbol",
                    ));
                }
            }
            next += 1;
        }
    }
    group[1..].sort_unstable();
    Ok(group)
}
