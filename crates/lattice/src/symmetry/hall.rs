//! Hall symbols: from text to generators, total over all texts.
//!
//! `L N₁ N₂ … V`: a lattice letter with or without a minus (inversion at the origin), up to four matrices
//! `[-]n[axis][translations]`, and a change of basis in parentheses, as a shift in twelfths `(0 0 1)` or as a triplet
//! `(x-y,x+y,z)`. Source: S. R. Hall (1981), Acta Cryst. A37, 517; International Tables for Crystallography B (2010),
//! Appendix A1.4.2. Beyond the tables there: underscores for blanks, `^` for `'` and `=` for `"` (as programs write
//! them), letters of either case, no blank behind the lattice letter.

use super::basis::Basis;
use super::closure::close;
use super::operation::{Operation, TRANSLATION_UNIT};
use super::point_group::pure_translations;
use crate::SymmetryError;

/// Longest symbol that is read.
const LONGEST: usize = 120;

/// What a Hall symbol says: generators of the group, pure translations among them.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Hall {
    /// Generators in the basis of the lattice letter, centring translations and inversion included.
    pub generators: Vec<Operation>,
    /// Change of basis, if the symbol ends with one.
    pub basis: Option<Basis>,
}

/// Reads a Hall symbol.
pub(crate) fn parse(symbol: &str) -> Result<Hall, SymmetryError> {
    if symbol.len() > LONGEST {
        return Err(error(
            symbol.floor_char_boundary(LONGEST),
            format!("a Hall symbol of {} bytes", symbol.len()),
            "at most 120",
        ));
    }
    let text: Vec<(usize, char)> = symbol.char_indices().map(|(at, c)| (at, plain(c))).collect();
    let open = text.iter().position(|(_, c)| *c == '(').unwrap_or(text.len());
    let mut tokens: Vec<&[(usize, char)]> =
        text[..open].split(|(_, c)| *c == ' ').filter(|token| !token.is_empty()).collect();
    let Some(first) = tokens.first().copied() else {
        return Err(error(0, "an empty Hall symbol".to_owned(), "a lattice letter"));
    };
    let inversion = first[0].1 == '-';
    let Some((at, letter)) = first.get(usize::from(inversion)).copied() else {
        return Err(error(
            symbol.len(),
            format!("Hall symbol `{}`", symbol.trim()),
            "a lattice letter behind the minus",
        ));
    };
    let Some(vectors) = centring_vectors(letter) else {
        return Err(error(at, format!("lattice letter `{}`", letter.escape_debug()), "one of P A B C I F R S T H"));
    };
    // `-P2ybc`: the first matrix may follow the letter at once.
    let rest = &first[usize::from(inversion) + 1..];
    if rest.is_empty() {
        tokens.remove(0);
    } else {
        tokens[0] = rest;
    }
    if tokens.is_empty() || tokens.len() > 4 {
        return Err(error(
            symbol.len(),
            format!("{} matrices in Hall symbol `{}`", tokens.len(), symbol.trim()),
            "one to four",
        ));
    }
    let mut generators: Vec<Operation> =
        vectors.iter().map(|v| Operation { translation: *v, ..Operation::IDENTITY }).collect();
    if inversion {
        generators.push(Operation { rotation: [[-1, 0, 0], [0, -1, 0], [0, 0, -1]], translation: [0; 3] });
    }
    let mut before = Before { fold: 0, axis: 'z' };
    for (position, token) in tokens.iter().enumerate() {
        generators.push(matrix(token, position, &mut before)?);
    }
    let basis = if open < text.len() { Some(Basis::parse_hall(symbol, text[open].0)?) } else { None };
    Ok(Hall { generators, basis })
}

/// Characters that stand for others in files.
fn plain(c: char) -> char {
    match c {
        '_' | '\t' | '\r' | '\n' => ' ',
        '^' | '’' | '′' => '\'',
        '=' | '”' | '″' => '"',
        '−' | '–' => '-',
        other => other,
    }
}

/// Translations of a lattice letter beside the whole ones, in 24ths. Source: International Tables B (2010), Table
/// A1.4.2.2; S and T (rhombohedral along b and along a) from Hall (1981).
fn centring_vectors(letter: char) -> Option<&'static [[i32; 3]]> {
    Some(match letter.to_ascii_uppercase() {
        'P' => &[],
        'A' => &[[0, 12, 12]],
        'B' => &[[12, 0, 12]],
        'C' => &[[12, 12, 0]],
        'I' => &[[12, 12, 12]],
        'F' => &[[0, 12, 12], [12, 0, 12]],
        'R' => &[[16, 8, 8]],
        'S' => &[[8, 8, 16]],
        'T' => &[[8, 16, 8]],
        'H' => &[[16, 8, 0]],
        _ => return None,
    })
}

/// What the default axis of a matrix depends on.
struct Before {
    fold: u8,
    axis: char,
}

/// One matrix symbol, `[-]n[axis][translations]`. Rules of the axes left out: International Tables B (2010), A1.4.2.3.1.
fn matrix(token: &[(usize, char)], position: usize, before: &mut Before) -> Result<Operation, SymmetryError> {
    let written: String = token.iter().map(|(_, c)| c).collect();
    let improper = token[0].1 == '-';
    let body = &token[usize::from(improper)..];
    let start = token[0].0;
    let Some((at, digit)) = body.first().copied() else {
        return Err(error(start, format!("matrix `{written}`"), "a fold 1, 2, 3, 4 or 6"));
    };
    let fold = match digit {
        '1' | '2' | '3' | '4' | '6' => digit as u8 - b'0',
        _ => {
            return Err(error(
                at,
                format!("`{}` in matrix `{written}`", digit.escape_debug()),
                "a fold 1, 2, 3, 4 or 6",
            ));
        }
    };
    let (mut axis, mut diagonal, mut screw) = (None, None, 0);
    let mut translation = [0; 3];
    for (at, c) in body[1..].iter().copied() {
        let lower = c.to_ascii_lowercase();
        match lower {
            'x' | 'y' | 'z' if axis.is_none() && fold != 1 => axis = Some(lower),
            '\'' | '"' if diagonal.is_none() && fold == 2 => diagonal = Some(lower),
            '*' if diagonal.is_none() && fold == 3 => diagonal = Some('*'),
            '1'..='5' if screw == 0 && c as u8 - b'0' < fold => screw = i32::from(c as u8 - b'0'),
            _ => match translation_of(lower) {
                Some(step) => translation = std::array::from_fn(|i| translation[i] + step[i]),
                None => {
                    return Err(error(
                        at,
                        format!("`{}` in matrix `{written}`", c.escape_debug()),
                        "an axis (x y z ' \" *), a screw below the fold, or translations a b c n u v w d",
                    ));
                }
            },
        }
    }
    if axis.is_none() && diagonal.is_none() {
        match (position, fold, before.fold) {
            (_, 1, _) => {}
            (0, _, _) => axis = Some('z'),
            (1, 2, 2 | 4) => axis = Some('x'),
            (1, 2, 3 | 6) => diagonal = Some('\''),
            (2, 3, _) => diagonal = Some('*'),
            _ => return Err(error(start, format!("matrix `{written}` without an axis"), "x, y or z behind the fold")),
        }
    }
    if screw != 0 {
        let along = match axis {
            Some(letter) if diagonal.is_none() => usize::from(letter as u8 - b'x'),
            _ => {
                return Err(error(start, format!("matrix `{written}`"), "a screw only along x, y or z"));
            }
        };
        translation[along] += TRANSLATION_UNIT / i32::from(fold) * screw;
    }
    let around = axis.unwrap_or(before.axis);
    let mut rotation = match diagonal {
        Some('*') => [[0, 0, 1], [1, 0, 0], [0, 1, 0]],
        Some('\'') => turned([[0, -1, 0], [-1, 0, 0], [0, 0, -1]], around),
        Some(_) => turned([[0, 1, 0], [1, 0, 0], [0, 0, -1]], around),
        None => turned(about_z(fold), around),
    };
    if improper {
        rotation = rotation.map(|row| row.map(|entry: i8| -entry));
    }
    before.fold = fold;
    before.axis = if fold == 1 { before.axis } else { axis.unwrap_or('z') };
    Ok(Operation { rotation, translation: translation.map(|t| t.rem_euclid(TRANSLATION_UNIT)) })
}

/// Translation letters in 24ths. Source: International Tables B (2010), Table A1.4.2.3.
fn translation_of(letter: char) -> Option<[i32; 3]> {
    Some(match letter {
        'a' => [12, 0, 0],
        'b' => [0, 12, 0],
        'c' => [0, 0, 12],
        'n' => [12, 12, 12],
        'u' => [6, 0, 0],
        'v' => [0, 6, 0],
        'w' => [0, 0, 6],
        'd' => [6, 6, 6],
        _ => return None,
    })
}

/// Rotation about z. Source: International Tables B (2010), Table A1.4.2.4.
fn about_z(fold: u8) -> [[i8; 3]; 3] {
    match fold {
        2 => [[-1, 0, 0], [0, -1, 0], [0, 0, 1]],
        3 => [[0, -1, 0], [1, -1, 0], [0, 0, 1]],
        4 => [[0, -1, 0], [1, 0, 0], [0, 0, 1]],
        6 => [[1, -1, 0], [1, 0, 0], [0, 0, 1]],
        _ => [[1, 0, 0], [0, 1, 0], [0, 0, 1]],
    }
}

/// The same matrix about x or y: coordinates moved on in the order x → y → z → x.
fn turned(about_z: [[i8; 3]; 3], axis: char) -> [[i8; 3]; 3] {
    let shift = match axis {
        'x' => 1,
        'y' => 2,
        _ => 0,
    };
    std::array::from_fn(|i| std::array::from_fn(|j| about_z[(i + 3 - shift) % 3][(j + 3 - shift) % 3]))
}

pub(super) fn error(offset: usize, found: String, expected: &str) -> SymmetryError {
    SymmetryError::new(found, expected, "write the Hall symbol as International Tables B do, such as -P 2ybc")
        .at(offset)
}

/// Generators of the group that a Hall symbol stands for, in the basis at the end of it.
pub(crate) fn generators(symbol: &str) -> Result<Vec<Operation>, SymmetryError> {
    let hall = parse(symbol)?;
    let Some(basis) = hall.basis else { return Ok(hall.generators) };
    let translations = pure_translations(&close(&hall.generators)?);
    basis.apply(&hall.generators, &translations).ok_or_else(|| {
        SymmetryError::new(
            format!("Hall symbol `{}` whose change of basis leaves the lattice", symbol.trim()),
            "new axes that are translations of the lattice, and an origin on the grid of 1/24",
            "correct the change of basis, or list the operations",
        )
    })
}

/// All operations of the group that a Hall symbol stands for, the identity first, the others sorted.
pub(crate) fn operations(symbol: &str) -> Result<Vec<Operation>, SymmetryError> {
    close(&generators(symbol)?)
}
