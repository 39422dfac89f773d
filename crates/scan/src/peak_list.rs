//! A list of lines: CSV with a header that names 2θ or d, as written by hand or by a program.
//!
//! ```text
//! # silicon, plate 3
//! two_theta_deg,u_two_theta_deg,intensity
//! 28.4412,0.0021,100
//! 47.3021,0.0023,55
//! ```
//!
//! | column | holds |
//! | --- | --- |
//! | `two_theta_deg` or `d_A` | observed position, degrees 2θ or Å; one of the two must be there |
//! | `u_two_theta_deg`, `u_d_A` | its total s.u.; `28.4412(21)` in the position's own column says the same |
//! | `u_counting_deg`, `u_model_deg` | its parts from counting and from the model, degrees 2θ |
//! | `intensity`, `area`, `u_area`, `height`, `fwhm_deg` | strength and width, any scale |
//!
//! Separator and decimal mark are decided once per file. What can be read in two ways is refused, and every other decision
//! is a note. What real files hold beyond this: common practice, no source.

use values::{Diagnostic, Peak, Wavelength};

use crate::decode::{decode, lines};
use crate::find::{find_header, split_rows};
use crate::layout::Separator;
use crate::rows::Columns;
use crate::{header, merge};

pub use crate::write::write;

/// What the positions of a list were given as.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PositionKind {
    /// Degrees 2θ.
    TwoTheta,
    /// Spacings d in Å.
    D,
}

/// The lines of a list, by rising 2θ.
#[derive(Clone, Debug, PartialEq)]
pub struct PeakList {
    /// The lines. A missing, zero or negative s.u. is `None`.
    pub peaks: Vec<Peak>,
    /// What was decided or left out while reading, one sentence each.
    pub notes: Vec<String>,
    /// How the positions were given.
    pub position: PositionKind,
    /// For each line, the s.u. in degrees 2θ that the rounding of the printed position alone gives: half a unit of the last
    /// digit over √3 (GUM, section 4.3.7: a rectangular distribution); for d carried over by Bragg's law. Never put into
    /// [`Peak::u_two_theta_deg`] here: real positions are less certain than their digits.
    pub digits_u_deg: Vec<f64>,
}

/// Reads a list of lines. `file` names it in messages; `wavelength` turns d into 2θ.
///
/// # Errors
/// A [`Diagnostic`] with row and column: no header, no known position column, a misspelt column, a field that is no number,
/// a 2θ outside 0–180°, a d below λ/2, an ambiguous decimal mark, 2θ and d that contradict each other, a scan instead of
/// a list, binary data, a file above 4 MiB.
pub fn read(bytes: &[u8], file: &str, wavelength: Wavelength) -> Result<PeakList, Diagnostic> {
    let decoded = decode(bytes, file)?;
    let mut notes = decoded.notes;
    let content: Vec<(usize, &str)> = lines(&decoded.text)
        .map(|(row, line)| (row, without_comment(line)))
        .filter(|(_, line)| !line.trim().is_empty())
        .collect();
    let header_at = find_header(&content, file, &mut notes)?;
    let (separator, header_row, rows) = split_rows(&content[header_at..], file)?;
    if separator != Separator::Comma && header_row.fields.len() > 1 {
        notes.push(format!("the columns are separated by {}", separator.plural()));
    }
    let columns = header::columns(&header_row, file, &mut notes)?;
    let table = Columns::new(columns, header_row.number, rows, separator, file, &mut notes)?;
    let list = table.lines(wavelength, &mut notes)?;
    let lines = merge::sorted_and_joined(list, file, &mut notes)?;
    let position = table.position;
    let (peaks, digits_u_deg): (Vec<Peak>, Vec<f64>) = lines.into_iter().unzip();
    if position == PositionKind::D && peaks.iter().all(|peak| peak.u_two_theta_deg.is_none()) {
        let largest = digits_u_deg.iter().copied().fold(0.0, f64::max);
        notes.push(format!(
            "d is given without s.u.; the {} digits printed behind the point alone stand for an s.u. of up to {largest:.4}° 2θ",
            table.decimals
        ));
    }
    Ok(PeakList { peaks, notes, position, digits_u_deg })
}

/// A `#` begins a comment wherever it stands: no number and no name of a column holds one.
fn without_comment(line: &str) -> &str {
    line.split('#').next().unwrap_or("")
}
