//! From operations to the names of a group: by look-up, else by a change of basis that moyo finds.

use moyo::base::{Lattice, Operation as MoyoOperation};
use moyo::data::{Centering, Setting as MoyoSetting, hall_symbol_entry};
use nalgebra::{Matrix3, Vector3};

use super::basis::Basis;
use super::closure::close;
use super::group::Names;
use super::hall;
use super::operation::{Operation, TRANSLATION_UNIT};
use super::point_group::pure_translations;
use super::settings::{SETTINGS, Setting};

/// Largest entry of a rotation in the primitive basis that moyo is given: beyond it the basis is skew enough for its
/// products of whole numbers to overflow.
const LARGEST_ENTRY: i32 = 40;

/// Names of a closed, sorted group.
pub(crate) fn names(operations: &[Operation]) -> Names {
    tabulated(operations).or_else(|| transformed(operations)).unwrap_or_else(|| Names {
        xhm: format!("unnamed group of {} operations", operations.len()),
        ..Names::default()
    })
}

/// The first tabulated setting with exactly these operations.
fn tabulated(operations: &[Operation]) -> Option<Names> {
    SETTINGS
        .iter()
        .find(|setting| {
            // Cheap first: all generators must be there. Only then are the groups worth comparing.
            hall::generators(setting.hall).is_ok_and(|generators| {
                generators.iter().all(|g| operations.contains(g))
                    && close(&generators).is_ok_and(|group| group == operations)
            })
        })
        .map(Names::of)
}

/// The standard setting with a change of basis behind it.
fn transformed(operations: &[Operation]) -> Option<Names> {
    let primitive = primitive_basis(&pure_translations(operations))?;
    let inverse = primitive.try_inverse()?;
    let mut given: Vec<MoyoOperation> = Vec::new();
    for operation in operations {
        let rotation = Matrix3::from_fn(|i, j| f64::from(operation.rotation[i][j]));
        let turned = (inverse * rotation * primitive).map(|entry| entry.round() as i32);
        if turned.iter().any(|entry| entry.abs() > LARGEST_ENTRY) {
            return None;
        }
        let translation =
            inverse * Vector3::from(operation.translation.map(|t| f64::from(t) / f64::from(TRANSLATION_UNIT)));
        if !given.iter().any(|known| known.rotation == turned) {
            given.push(MoyoOperation::new(turned, translation.map(|t| t - t.round())));
        }
    }
    // Any metric with the symmetry of the group will do: the mean of `RᵀR`.
    let mean = given.iter().fold(Matrix3::zeros(), |sum: Matrix3<f64>, operation| {
        let rotation = operation.rotation.map(f64::from);
        sum + rotation.transpose() * rotation
    });
    let lattice = Lattice::new(mean.cholesky()?.l());
    let found = moyo::identify::SpaceGroup::from_lattice(&lattice, &given, MoyoSetting::Standard, 1e-5).ok()?;
    let setting = SETTINGS.get(usize::try_from(found.hall_number - 1).ok()?)?;
    let centring = hall_symbol_entry(found.hall_number)?.centering;
    let matrix = primitive * found.transformation.linear().map(f64::from) * conventional(centring);
    let shift = primitive * found.transformation.origin_shift();
    let number_only = Names {
        number: Some(setting.number),
        xhm: format!("unnamed setting of {}", setting.plain()),
        ..Names::default()
    };
    Some(with_basis(setting, &matrix, &shift, operations).unwrap_or(number_only))
}

fn conventional(centring: Centering) -> Matrix3<f64> {
    centring.linear().map(f64::from)
}

/// Names with the change of basis `x = M x_standard + s` written behind them, if it lies on the grid and gives exactly
/// these operations.
fn with_basis(setting: &Setting, m: &Matrix3<f64>, s: &Vector3<f64>, operations: &[Operation]) -> Option<Names> {
    let unit = f64::from(TRANSLATION_UNIT);
    let to_grid = |value: f64| (value * unit).round() as i64;
    let mut basis = Basis {
        matrix: std::array::from_fn(|i| std::array::from_fn(|j| to_grid(m[(i, j)]))),
        shift: std::array::from_fn(|i| to_grid(s[i]).rem_euclid(i64::from(TRANSLATION_UNIT))),
    };
    let (head, inner) = setting.hall.split_once(" (").unwrap_or((setting.hall, ""));
    if !inner.is_empty() {
        basis = basis.after(&hall::parse(setting.hall).ok()?.basis?);
    }
    let hall = format!("{head} ({basis})");
    if hall::operations(&hall).ok()? != operations {
        return None;
    }
    Some(Names { number: Some(setting.number), xhm: format!("{} ({basis})", setting.plain()), hall, tabulated: false })
}

/// Columns: a basis of the lattice that the whole translations and the given ones (24ths) make.
fn primitive_basis(translations: &[[i32; 3]]) -> Option<Matrix3<f64>> {
    let mut rows: Vec<[i64; 3]> = translations.iter().map(|t| t.map(i64::from)).collect();
    let unit = i64::from(TRANSLATION_UNIT);
    rows.extend([[unit, 0, 0], [0, unit, 0], [0, 0, unit]]);
    let mut basis = Vec::with_capacity(3);
    for column in 0..3 {
        // Euclid's algorithm down the column leaves one row with an entry there.
        loop {
            rows.sort_by_key(|row| (row[column] == 0, row[column].abs()));
            let pivot = rows[0];
            if pivot[column] == 0 || rows.len() < 2 || rows[1][column] == 0 {
                break;
            }
            for row in &mut rows[1..] {
                let factor = row[column] / pivot[column];
                *row = std::array::from_fn(|i| row[i] - factor * pivot[i]);
            }
        }
        basis.push(rows.remove(0));
    }
    let fraction = |entry: i64| entry as f64 / unit as f64;
    let matrix = Matrix3::from_fn(|i, j| fraction(basis[j][i]));
    (matrix.determinant().abs() > 1e-9).then_some(matrix)
}

#[cfg(test)]
mod tests {
    use super::super::settings::SETTINGS;
    use crate::SpaceGroup;

    /// Changes of basis by which a setting leaves the tables.
    const BASES: [&str; 6] =
        ["x-y,x,z", "x+1/8,y+1/4,z+1/3", "y,z+x,x", "x+2*z,y-z,z", "-x+1/12,-y,-z+1/24", "x,x+y+1/2,2*y+z"];

    #[test]
    fn every_setting_is_known_after_a_change_of_basis() {
        let mut unnamed = 0;
        for (place, setting) in SETTINGS.iter().enumerate() {
            // A mirrored basis would turn P 31 into P 32; those above keep the hand, but for the last but one.
            let basis = BASES[place % BASES.len()];
            let (head, inner) = setting.hall.split_once(" (").unwrap_or((setting.hall, ""));
            if !inner.is_empty() {
                continue;
            }
            let symbol = format!("{head} ({basis})");
            let made = SpaceGroup::from_hall(&symbol).unwrap_or_else(|e| panic!("{symbol}: {e}"));
            let group = SpaceGroup::from_operations(made.operations()).unwrap();
            let mirrored = [
                76, 78, 91, 95, 92, 96, 144, 145, 151, 153, 152, 154, 169, 170, 171, 172, 178, 179, 180, 181, 212, 213,
            ];
            if !(basis.starts_with("-x") && mirrored.contains(&setting.number)) {
                assert_eq!(group.number(), Some(setting.number), "{symbol}");
            }
            if group.hall().is_empty() {
                unnamed += 1;
            } else {
                assert_eq!(SpaceGroup::from_hall(group.hall()).unwrap(), group, "{symbol}");
            }
        }
        assert_eq!(unnamed, 0);
    }
}
