//! Names are the same whatever their case; finding one among millions takes constant time.
//!
//! CIF 2.0 compares names after Unicode normalisation and case folding. Here each character is lower-cased and not
//! normalised: two names that differ only in how an accent is composed stay two names.

use std::hash::{BuildHasher, Hasher, RandomState};

/// Whether two names differ only in case.
pub(crate) fn same(a: &str, b: &str) -> bool {
    if a.is_ascii() && b.is_ascii() {
        return a.eq_ignore_ascii_case(b);
    }
    a.chars().flat_map(char::to_lowercase).eq(b.chars().flat_map(char::to_lowercase))
}

const EMPTY: u32 = u32::MAX;

/// Open-addressing table from a name to the number of its record, eight bytes a slot.
///
/// The records stay with the caller, who compares them; a `HashMap` would hold every name a second time. The hash is
/// keyed at random, so that no file can be made to collide.
#[derive(Clone, Debug, Default)]
pub(crate) struct NameIndex {
    keys: RandomState,
    slots: Vec<(u32, u32)>,
    filled: usize,
}

impl NameIndex {
    /// Hash of a name inside the container of that number.
    fn hash(&self, container: u32, name: &str) -> u32 {
        let mut hasher = self.keys.build_hasher();
        hasher.write_u32(container);
        if name.is_ascii() {
            let mut buffer = [0_u8; 64];
            for part in name.as_bytes().chunks(buffer.len()) {
                let lower = &mut buffer[..part.len()];
                lower.copy_from_slice(part);
                lower.make_ascii_lowercase();
                hasher.write(lower);
            }
        } else {
            for c in name.chars().flat_map(char::to_lowercase) {
                hasher.write(c.encode_utf8(&mut [0; 4]).as_bytes());
            }
        }
        // The upper and lower halves of the 64 bits are equally good.
        (hasher.finish() >> 32) as u32
    }

    /// Number of the record with that name, which `is_same` recognises.
    pub(crate) fn find(&self, container: u32, name: &str, is_same: impl Fn(u32) -> bool) -> Option<u32> {
        if self.slots.is_empty() {
            return None;
        }
        self.slots[self.slot(self.hash(container, name), &is_same)].found()
    }

    /// Adds a record; the number of the one that has the name already, if there is one.
    pub(crate) fn insert(
        &mut self,
        container: u32,
        name: &str,
        record: u32,
        is_same: impl Fn(u32) -> bool,
    ) -> Option<u32> {
        if (self.filled + 1) * 4 > self.slots.len() * 3 {
            self.grow();
        }
        let hash = self.hash(container, name);
        let slot = self.slot(hash, &is_same);
        let found = self.slots[slot].found();
        if found.is_none() {
            self.slots[slot] = (hash, record);
            self.filled += 1;
        }
        found
    }

    /// Slot of the record, or the empty one where it belongs. At least a quarter of the slots is empty.
    fn slot(&self, hash: u32, is_same: &impl Fn(u32) -> bool) -> usize {
        let mask = self.slots.len() - 1;
        let mut slot = hash as usize & mask;
        loop {
            let (other, record) = self.slots[slot];
            if record == EMPTY || (other == hash && is_same(record)) {
                return slot;
            }
            slot = (slot + 1) & mask;
        }
    }

    fn grow(&mut self) {
        let size = (self.slots.len() * 2).max(16);
        let old = std::mem::replace(&mut self.slots, vec![(0, EMPTY); size]);
        for (hash, record) in old.into_iter().filter(|slot| slot.1 != EMPTY) {
            let slot = self.slot(hash, &|_| false);
            self.slots[slot] = (hash, record);
        }
    }
}

trait Slot {
    fn found(&self) -> Option<u32>;
}

impl Slot for (u32, u32) {
    fn found(&self) -> Option<u32> {
        (self.1 != EMPTY).then_some(self.1)
    }
}

#[cfg(test)]
mod tests {
    use super::{NameIndex, same};

    #[test]
    fn names_that_differ_in_case_are_the_same_in_any_script() {
        assert!(same("_Cell_Length_A", "_cell_length_a"));
        assert!(same("_ΩMEGA", "_ωmega"));
        assert!(!same("_cell_length_a", "_cell_length_b"));
        assert!(!same("_a", "_ä"));
    }

    #[test]
    fn each_of_ten_thousand_names_is_found_in_its_own_container() {
        let names: Vec<String> = (0..10_000).map(|i| format!("_Name_{i}")).collect();
        let mut index = NameIndex::default();
        for (i, name) in names.iter().enumerate() {
            let is_same = |other: u32| same(&names[other as usize], name);
            assert_eq!(index.insert(7, name, u32::try_from(i).unwrap(), is_same), None);
        }
        for (i, name) in names.iter().enumerate() {
            let upper = name.to_uppercase();
            let found = index.find(7, &upper, |other| same(&names[other as usize], &upper));
            assert_eq!(found, Some(u32::try_from(i).unwrap()));
            assert_eq!(index.find(8, &upper, |_| false), None);
        }
        assert_eq!(index.insert(7, "_NAME_5", 1, |other| same(&names[other as usize], "_NAME_5")), Some(5));
    }
}
