//! No bytes make the readers of structures panic.
#![allow(clippy::unwrap_used, reason = "tests may stop at what should be there")]

use std::path::Path;

use proptest::prelude::{ProptestConfig, any, prop, proptest};
use proptest::sample::Index;
use structure_factor::Structure;
use values::Diagnostic;

fn fixtures(ending: &str) -> Vec<Vec<u8>> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/structures");
    let mut paths: Vec<_> = std::fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    paths.retain(|path| path.extension().is_some_and(|extension| extension == ending));
    paths.sort();
    paths.iter().map(|path| std::fs::read(path).unwrap()).collect()
}

/// Replaces, removes or doubles a few bytes.
fn damaged(mut bytes: Vec<u8>, edits: &[(Index, u8, u8)]) -> Vec<u8> {
    const MARKS: &[u8] = b"0159.-+()?#';_\"[]{} \n\rxyzHO=,e\x00\xff";
    for (place, kind, mark) in edits {
        if bytes.is_empty() {
            break;
        }
        let at = place.index(bytes.len());
        match kind % 4 {
            0 => bytes[at] = MARKS[usize::from(*mark) % MARKS.len()],
            1 => drop(bytes.remove(at)),
            2 => bytes.insert(at, MARKS[usize::from(*mark) % MARKS.len()]),
            // A piece is lost.
            _ => drop(bytes.drain(at..(at + usize::from(*mark)).min(bytes.len()))),
        }
    }
    bytes
}

/// What holds for everything that is read, and for every refusal.
fn check(read: Result<Vec<Structure>, Diagnostic>) {
    match read {
        Ok(structures) => {
            assert!(!structures.is_empty());
            for structure in structures {
                assert!(structure.cell.volume() > 0.0 && !structure.atoms.is_empty());
                assert!(structure.atoms.iter().all(|atom| atom.position.iter().all(|x| x.is_finite())));
                assert!(structure.notes.iter().all(|note| !note.is_empty()));
            }
        }
        Err(message) => {
            let place = message.location.as_ref();
            assert!(place.is_some_and(|place| place.line > 0 && place.column > 0), "{message}");
            assert!(!message.found.is_empty() && !message.expected.is_empty() && !message.mend.is_empty(), "{message}");
        }
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 600, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn arbitrary_bytes_give_a_message(bytes in prop::collection::vec(any::<u8>(), 0..300)) {
        check(Structure::from_cif(&bytes, "any"));
        check(Structure::from_toml(&String::from_utf8_lossy(&bytes), "any").map(|structure| vec![structure]));
    }

    #[test]
    fn damaged_cifs_give_a_structure_or_a_message(
        which in any::<Index>(),
        edits in prop::collection::vec(any::<(Index, u8, u8)>(), 1..8),
    ) {
        let files = fixtures("cif");
        let bytes = damaged(files[which.index(files.len())].clone(), &edits);
        check(Structure::from_cif(&bytes, "damaged"));
    }

    #[test]
    fn damaged_toml_gives_a_structure_or_a_message(
        which in any::<Index>(),
        edits in prop::collection::vec(any::<(Index, u8, u8)>(), 1..8),
    ) {
        let files = fixtures("toml");
        let bytes = damaged(files[which.index(files.len())].clone(), &edits);
        check(Structure::from_toml(&String::from_utf8_lossy(&bytes), "damaged").map(|structure| vec![structure]));
    }
}

#[test]
fn many_atoms_are_read_in_proportion() {
    let mut text = "data_x _cell_length_a 50 _cell_length_b 50 _cell_length_c 50 _space_group_IT_number 1\nloop_ \
                    _atom_site_label _atom_site_fract_x _atom_site_fract_y _atom_site_fract_z\n"
        .to_owned();
    for number in 0..20_000 {
        text.push_str(&format!(
            "O{number} {:.4} {:.4} {:.4}\n",
            f64::from(number % 100) / 100.0,
            f64::from(number / 100 % 100) / 100.0,
            f64::from(number / 10_000) / 2.0
        ));
    }
    let start = std::time::Instant::now();
    let structure = Structure::from_cif(text.as_bytes(), "large").unwrap().remove(0);
    assert_eq!(structure.atoms.len(), 20_000);
    // Common practice, no source: a structure of this size in seconds even without optimisation.
    assert!(start.elapsed().as_secs_f64() < 10.0, "{:?}", start.elapsed());
}
