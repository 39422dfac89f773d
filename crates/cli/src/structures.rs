//! Structure files named on the command line.

use std::path::Path;

use structure_factor::Structure;
use values::Diagnostic;

use crate::failure::Failure;
use crate::output;

/// Reads the structure of a file: CIF, or TOML where the name ends in `.toml` or the text is none of CIF.
///
/// `block`: name or number (from 1) of the data block to take; without it the first with a cell and atoms, and a note names the
/// others.
///
/// # Errors
/// Wrong input: an unreadable file, a file that is neither, a block that is not there.
pub fn load(path: &Path, block: Option<&str>) -> Result<Structure, Failure> {
    let (bytes, name) = output::read(path)?;
    if is_toml(path, &bytes) {
        let text = std::str::from_utf8(&bytes).map_err(|error| {
            let line = bytes[..error.valid_up_to()].iter().filter(|b| **b == b'\n').count() + 1;
            let message = Diagnostic::new("bytes that are not UTF-8", "a TOML file in UTF-8", "save the file as UTF-8");
            Failure::input(message.at(values::Location::new(&name, line, 1)), &bytes)
        })?;
        return Structure::from_toml(text, &name).map_err(|message| Failure::input(message, &bytes));
    }
    let mut structures = Structure::from_cif(&bytes, &name).map_err(|message| Failure::input(message, &bytes))?;
    let names: Vec<String> = structures.iter().map(|s| s.name.clone()).collect();
    let chosen = match block {
        None => 0,
        Some(wanted) => names
            .iter()
            .position(|n| n.eq_ignore_ascii_case(wanted))
            .or_else(|| wanted.parse::<usize>().ok().and_then(|n| n.checked_sub(1)).filter(|n| *n < names.len()))
            .ok_or_else(|| {
                Failure::option(Diagnostic::new(
                    format!("--block {wanted}, which {name} does not hold"),
                    format!("one of {}, or its number from 1", names.join(", ")),
                    "name one of the blocks with a cell and atoms",
                ))
            })?,
    };
    let mut structure = structures.swap_remove(chosen);
    if block.is_none() && names.len() > 1 {
        structure.notes.push(format!(
            "{name} holds {} structures ({}); the first was taken, --block chooses another.",
            names.len(),
            names.join(", ")
        ));
    }
    Ok(structure)
}

/// By name, else by the first word that is no comment: CIF data start with `data_`.
fn is_toml(path: &Path, bytes: &[u8]) -> bool {
    match path.extension().and_then(|e| e.to_str()).map(str::to_ascii_lowercase).as_deref() {
        Some("toml") => return true,
        Some("cif" | "mcif" | "pcif") => return false,
        _ => {}
    }
    let text = String::from_utf8_lossy(&bytes[..bytes.len().min(1 << 16)]);
    let first = text.lines().map(str::trim).find(|line| !line.is_empty() && !line.starts_with('#')).unwrap_or_default();
    first.starts_with('[')
        || first.split_once('=').is_some_and(|(key, _)| key.trim().chars().all(|c| c.is_alphanumeric() || c == '_'))
}

#[cfg(test)]
mod tests {
    use super::is_toml;
    use std::path::Path;

    #[test]
    fn a_structure_file_is_told_by_its_name_else_by_its_first_words() {
        assert!(is_toml(Path::new("a.toml"), b""));
        assert!(!is_toml(Path::new("a.cif"), b"name = 1"));
        assert!(is_toml(Path::new("-"), b"# mine\nname = \"x\"\n"));
        assert!(!is_toml(Path::new("-"), b"# mine\ndata_x\n_cell_length_a 5\n"));
    }
}
