//! Names are the same whatever their case, and are found by their hash.
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

/// From a name to the number of its record: the hashes of all names in order, each with its record, in eight bytes.
///
/// The records stay with the caller, who compares them; a `HashMap` would hold every name a second time, and takes a
/// cache miss for each name where sorting takes none. The hash is keyed at random, so that no file can be made to
/// collide. A name is found once [`NameIndex::sort`] was called.
#[derive(Clone, Debug, Default)]
pub(crate) struct NameIndex {
    keys: RandomState,
    /// Hash in the upper half, record in the lower.
    entries: Vec<u64>,
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

    pub(crate) fn add(&mut self, container: u32, name: &str, record: u32) {
        self.entries.push(u64::from(self.hash(container, name)) << 32 | u64::from(record));
    }

    pub(crate) fn sort(&mut self) {
        self.entries.sort_unstable();
        self.entries.shrink_to_fit();
    }

    /// Number of the first record with that name, which `is_same` recognises.
    pub(crate) fn find(&self, container: u32, name: &str, is_same: impl Fn(u32) -> bool) -> Option<u32> {
        let hash = self.hash(container, name);
        let first = self.entries.partition_point(|entry| hash_of(*entry) < hash);
        let run = self.entries[first..].iter().take_while(|entry| hash_of(**entry) == hash);
        run.map(|entry| record_of(*entry)).find(|record| is_same(*record))
    }

    /// Calls `found` with each record whose name occurred before, and the record of its first occurrence.
    pub(crate) fn repeats(&self, is_same: impl Fn(u32, u32) -> bool, mut found: impl FnMut(u32, u32)) {
        for run in self.entries.chunk_by(|a, b| hash_of(*a) == hash_of(*b)).filter(|run| run.len() > 1) {
            // Names of equal hash are nearly always equal: one first record for all.
            let mut firsts: Vec<u32> = Vec::new();
            for record in run.iter().map(|entry| record_of(*entry)) {
                match firsts.iter().find(|first| is_same(**first, record)) {
                    Some(first) => found(*first, record),
                    None => firsts.push(record),
                }
            }
        }
    }
}

fn hash_of(entry: u64) -> u32 {
    (entry >> 32) as u32
}

fn record_of(entry: u64) -> u32 {
    (entry & u64::from(u32::MAX)) as u32
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
        let mut names: Vec<String> = (0..10_000).map(|i| format!("_Name_{i}")).collect();
        names.extend(["_NAME_7".to_owned(), "_name_3".to_owned(), "_name_7".to_owned()]);
        let mut index = NameIndex::default();
        for (i, name) in names.iter().enumerate() {
            index.add(7, name, u32::try_from(i).unwrap());
        }
        index.sort();
        for (i, name) in names.iter().enumerate().take(10_000) {
            let upper = name.to_uppercase();
            let found = index.find(7, &upper, |other| same(&names[other as usize], &upper));
            assert_eq!(found, Some(u32::try_from(i).unwrap()));
            assert_eq!(index.find(8, &upper, |_| false), None);
        }
        let mut repeats = Vec::new();
        index.repeats(|a, b| same(&names[a as usize], &names[b as usize]), |first, again| repeats.push((again, first)));
        repeats.sort_unstable();
        assert_eq!(repeats, [(10_000, 7), (10_001, 3), (10_002, 7)]);
    }
}
