//! One symmetry operation, `x′ = R x + t`, and its spellings.

use std::fmt;

use crate::SymmetryError;

/// Translations are counted in this fraction of a cell edge: it holds all of the 230 groups in all tabulated settings.
pub const TRANSLATION_UNIT: i32 = 24;

/// A symmetry operation `x′ = R x + t` on fractional coordinates (columns).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Operation {
    /// R, by rows.
    pub rotation: [[i8; 3]; 3],
    /// t in 24ths of the cell edges, each 0..24.
    pub translation: [i32; 3],
}

impl Operation {
    /// x, y, z.
    pub const IDENTITY: Self = Self { rotation: [[1, 0, 0], [0, 1, 0], [0, 0, 1]], translation: [0, 0, 0] };

    /// Reads an operation: `x,y,z`, `-x+1/2, y, -z`, `1/2-X,Y,Z`, `0.5+x,y,z`, with or without blanks, quotes and a
    /// leading number column (`12 x,y,z`).
    ///
    /// Decimals of two or more digits stand for the nearest 24th within one unit of their last digit: 0.333, 0.67.
    ///
    /// # Errors
    /// [`SymmetryError`] with the byte offset of the first character that does not fit: another character, a factor or
    /// a repeated letter (`2x`, `x+x`), a translation that is no 24th, not three terms, a determinant other than ±1.
    pub fn parse(text: &str) -> Result<Self, SymmetryError> {
        super::triplet::parse(text)
    }

    /// This operation after `first`: `x′ = R (R₁ x + t₁) + t`, translation mod 1.
    ///
    /// Rotations of crystallographic groups have small entries; one beyond ±127 saturates, and what holds such a
    /// rotation is refused as a group.
    #[must_use]
    pub fn after(&self, first: &Self) -> Self {
        let product = |i: usize, j: usize| -> i32 {
            (0..3).map(|k| i32::from(self.rotation[i][k]) * i32::from(first.rotation[k][j])).sum()
        };
        let rotation = std::array::from_fn(|i| std::array::from_fn(|j| product(i, j).clamp(-127, 127) as i8));
        let moved = |i: usize| -> i32 { (0..3).map(|k| i32::from(self.rotation[i][k]) * first.translation[k]).sum() };
        let translation: [i32; 3] = std::array::from_fn(|i| self.translation[i] + moved(i));
        Self { rotation, translation: translation.map(|t| t.rem_euclid(TRANSLATION_UNIT)) }
    }

    /// The inverse operation, `x′ = R⁻¹ x − R⁻¹ t`; `None` unless det R = ±1.
    #[must_use]
    pub fn inverse(&self) -> Option<Self> {
        let determinant = self.determinant();
        if determinant.abs() != 1 {
            return None;
        }
        let r = self.rotation.map(|row| row.map(i32::from));
        let mut rotation = [[0_i8; 3]; 3];
        for (i, row) in rotation.iter_mut().enumerate() {
            for (j, entry) in row.iter_mut().enumerate() {
                let (a, b, c, d) = ((j + 1) % 3, (j + 2) % 3, (i + 1) % 3, (i + 2) % 3);
                *entry = i8::try_from((r[a][c] * r[b][d] - r[a][d] * r[b][c]) * determinant).ok()?;
            }
        }
        let back = Self { rotation, translation: [0; 3] };
        let moved = back.after(&Self { translation: self.translation, ..Self::IDENTITY }).translation;
        Some(Self { rotation, translation: moved.map(|t| (-t).rem_euclid(TRANSLATION_UNIT)) })
    }

    /// det R: 1 for a proper rotation, −1 for an improper one.
    #[must_use]
    pub fn determinant(&self) -> i32 {
        let r = self.rotation.map(|row| row.map(i32::from));
        r[0][0] * (r[1][1] * r[2][2] - r[1][2] * r[2][1]) - r[0][1] * (r[1][0] * r[2][2] - r[1][2] * r[2][0])
            + r[0][2] * (r[1][0] * r[2][1] - r[1][1] * r[2][0])
    }

    /// Image of a point in fractional coordinates, not brought back into the cell.
    #[must_use]
    pub fn apply(&self, x: [f64; 3]) -> [f64; 3] {
        std::array::from_fn(|i| {
            let turned: f64 = (0..3).map(|j| f64::from(self.rotation[i][j]) * x[j]).sum();
            turned + f64::from(self.translation[i]) / f64::from(TRANSLATION_UNIT)
        })
    }

    /// `h R` of a reflection (a row): the index that the operation maps `hkl` to.
    #[must_use]
    pub fn reflect(&self, hkl: [i32; 3]) -> [i32; 3] {
        std::array::from_fn(|j| (0..3).map(|i| hkl[i] * i32::from(self.rotation[i][j])).sum())
    }

    /// `h·t` in 24ths of a turn, not reduced.
    #[must_use]
    pub fn phase_24ths(&self, hkl: [i32; 3]) -> i64 {
        (0..3).map(|i| i64::from(hkl[i]) * i64::from(self.translation[i])).sum()
    }
}

impl fmt::Display for Operation {
    /// `-x+1/2,y,-z`.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (i, row) in self.rotation.iter().enumerate() {
            if i > 0 {
                f.write_str(",")?;
            }
            let mut first = true;
            for (factor, letter) in row.iter().zip(["x", "y", "z"]) {
                match factor {
                    0 => continue,
                    1 if first => f.write_str(letter)?,
                    1 => write!(f, "+{letter}")?,
                    -1 => write!(f, "-{letter}")?,
                    other => write!(f, "{other:+}*{letter}")?,
                }
                first = false;
            }
            let t = self.translation[i].rem_euclid(TRANSLATION_UNIT);
            if t != 0 {
                let divisor = greatest_common_divisor(t, TRANSLATION_UNIT);
                let sign = if first { "" } else { "+" };
                write!(f, "{sign}{}/{}", t / divisor, TRANSLATION_UNIT / divisor)?;
            } else if first {
                f.write_str("0")?;
            }
        }
        Ok(())
    }
}

/// Greatest common divisor of two numbers above zero.
fn greatest_common_divisor(a: i32, b: i32) -> i32 {
    if b == 0 { a } else { greatest_common_divisor(b, a % b) }
}

#[cfg(test)]
mod tests {
    use super::Operation;

    #[test]
    fn an_operation_after_its_inverse_is_the_identity() {
        for text in ["-y,x-y,z+1/3", "z+1/4,x,-y+3/4", "-x+1/2,y+1/2,-z", "x-y,x,z+5/6"] {
            let operation = Operation::parse(text).unwrap();
            let inverse = operation.inverse().unwrap();
            assert_eq!(operation.after(&inverse), Operation::IDENTITY, "{text}");
            assert_eq!(inverse.after(&operation), Operation::IDENTITY, "{text}");
        }
    }

    #[test]
    fn a_product_moves_a_point_as_its_factors_do() {
        let (first, second) = (Operation::parse("-y,x-y,z+1/3").unwrap(), Operation::parse("y,x,-z+1/2").unwrap());
        let (there, product) =
            (second.apply(first.apply([0.1, 0.23, 0.4])), second.after(&first).apply([0.1, 0.23, 0.4]));
        for (a, b) in there.iter().zip(product) {
            assert!((a - b - (a - b).round()).abs() < 1e-12);
        }
    }

    #[test]
    fn a_reflection_turns_as_a_row() {
        // h·(R x) = (h R)·x for a point x.
        let operation = Operation::parse("-y,x-y,z").unwrap();
        let (x, h) = ([0.1, 0.23, 0.4], [1, 2, 3]);
        let dot = |h: [i32; 3], x: [f64; 3]| (0..3).map(|i| f64::from(h[i]) * x[i]).sum::<f64>();
        assert!((dot(h, operation.apply(x)) - dot(operation.reflect(h), x)).abs() < 1e-12);
    }
}
