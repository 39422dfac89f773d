//! The unit cell and its metric: d of a line, volume, reciprocal cell.
//!
//! `1/d² = hᵀ G* h` with `G* = G⁻¹` and `G_ij = aᵢ·aⱼ`; every other formula of this page follows from it.

use std::fmt;

/// A unit cell: edges in Å, angles in degrees.
///
/// Built by [`Cell::new`] it is finite and has a volume above zero; the fields are public for reading and for patterns.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Cell {
    /// Edge a, Å.
    pub a: f64,
    /// Edge b, Å.
    pub b: f64,
    /// Edge c, Å.
    pub c: f64,
    /// Angle between b and c, degrees.
    pub alpha: f64,
    /// Angle between a and c, degrees.
    pub beta: f64,
    /// Angle between a and b, degrees.
    pub gamma: f64,
}

/// Why six numbers are no cell.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum CellError {
    /// An edge is not finite or not above zero.
    Edge {
        /// Which: `a`, `b` or `c`.
        name: &'static str,
        /// What was given, Å.
        value: f64,
    },
    /// An angle is not finite or not between 0° and 180°.
    Angle {
        /// Which: `alpha`, `beta` or `gamma`.
        name: &'static str,
        /// What was given, degrees.
        value: f64,
    },
    /// The three angles do not close a body: each must be below the sum of the other two, and the sum below 360°.
    Flat {
        /// The angles, degrees.
        angles: [f64; 3],
    },
    /// A metric tensor that no cell has: an eigenvalue is zero, negative or not finite.
    Metric,
    /// Free parameters of another number than the system has.
    ParameterCount {
        /// How many the system has.
        expected: usize,
        /// How many were given.
        found: usize,
    },
}

impl fmt::Display for CellError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Edge { name, value } => write!(f, "cell edge {name} is {value} Å; expected a finite number above 0"),
            Self::Angle { name, value } => write!(f, "cell angle {name} is {value}°; expected above 0° and below 180°"),
            Self::Flat { angles: [alpha, beta, gamma] } => write!(
                f,
                "cell angles {alpha}°, {beta}°, {gamma}° enclose no volume; expected each below the sum of the other two \
                 and their sum below 360°"
            ),
            Self::Metric => {
                f.write_str("metric tensor is not positive definite; expected that of a cell with a volume")
            }
            Self::ParameterCount { expected, found } => {
                write!(f, "{found} free cell parameters; expected {expected} in this crystal system")
            }
        }
    }
}

impl std::error::Error for CellError {}

/// Smallest squared ratio of the volume to that of a box with the same edges: below it rounding decides about d.
const FLATTEST: f64 = 1e-10;

impl Cell {
    /// A cell from its edges (Å) and angles (degrees).
    ///
    /// # Errors
    /// [`CellError`] names the first parameter that is not finite or out of range, or the angles when they enclose no
    /// volume.
    pub fn new(a: f64, b: f64, c: f64, alpha: f64, beta: f64, gamma: f64) -> Result<Self, CellError> {
        for (name, value) in [("a", a), ("b", b), ("c", c)] {
            // Squares and products of three edges must stay finite and above zero.
            if !(value.is_finite() && (1e-30..=1e30).contains(&value)) {
                return Err(CellError::Edge { name, value });
            }
        }
        for (name, value) in [("alpha", alpha), ("beta", beta), ("gamma", gamma)] {
            if !(value > 0.0 && value < 180.0) {
                return Err(CellError::Angle { name, value });
            }
        }
        let cell = Self { a, b, c, alpha, beta, gamma };
        if cell.shape() > FLATTEST { Ok(cell) } else { Err(CellError::Flat { angles: [alpha, beta, gamma] }) }
    }

    /// A cubic cell of edge `a` in Å.
    ///
    /// # Errors
    /// [`CellError::Edge`] unless `a` is finite and above zero.
    pub fn cubic(a: f64) -> Result<Self, CellError> {
        Self::new(a, a, a, 90.0, 90.0, 90.0)
    }

    /// The cell of a metric tensor `G_ij = aᵢ·aⱼ` in Å².
    ///
    /// # Errors
    /// [`CellError::Metric`] unless the tensor is finite, and positive definite.
    pub fn from_metric(metric: [[f64; 3]; 3]) -> Result<Self, CellError> {
        let edge = |i: usize| metric[i][i].sqrt();
        let [a, b, c] = [edge(0), edge(1), edge(2)];
        let angle = |i: usize, j: usize, product: f64| angle_deg(metric[i][j] / product);
        Self::new(a, b, c, angle(1, 2, b * c), angle(0, 2, a * c), angle(0, 1, a * b)).map_err(|_| CellError::Metric)
    }

    /// The cell of a reciprocal metric tensor `G*_ij = a*ᵢ·a*ⱼ` in Å⁻², such as a linear fit of 1/d² gives it.
    ///
    /// # Errors
    /// [`CellError::Metric`] unless the tensor is finite and positive definite.
    pub fn from_reciprocal_metric(reciprocal: [[f64; 3]; 3]) -> Result<Self, CellError> {
        // A shape that is no cell must not pass through the inverse, which would hide two negative eigenvalues.
        Self::from_metric(reciprocal)?;
        Self::from_metric(inverse(&reciprocal))
    }

    /// a, b, c in Å and α, β, γ in degrees.
    #[must_use]
    pub fn parameters(&self) -> [f64; 6] {
        [self.a, self.b, self.c, self.alpha, self.beta, self.gamma]
    }

    /// Metric tensor `G_ij = aᵢ·aⱼ`, Å².
    #[must_use]
    pub fn metric(&self) -> [[f64; 3]; 3] {
        let [cos_alpha, cos_beta, cos_gamma] = self.cosines();
        let (ab, ac, bc) = (self.a * self.b * cos_gamma, self.a * self.c * cos_beta, self.b * self.c * cos_alpha);
        [[self.a * self.a, ab, ac], [ab, self.b * self.b, bc], [ac, bc, self.c * self.c]]
    }

    /// Reciprocal metric tensor `G* = G⁻¹`, Å⁻².
    #[must_use]
    pub fn reciprocal_metric(&self) -> [[f64; 3]; 3] {
        let [ca, cb, cg] = self.cosines();
        let shape = self.shape();
        let [a, b, c] = [self.a, self.b, self.c];
        let off = |cosines: f64, edges: f64| cosines / (edges * shape);
        let (ab, ac, bc) = (off(ca * cb - cg, a * b), off(ca * cg - cb, a * c), off(cb * cg - ca, b * c));
        [
            [(1.0 - ca * ca) / (a * a * shape), ab, ac],
            [ab, (1.0 - cb * cb) / (b * b * shape), bc],
            [ac, bc, (1.0 - cg * cg) / (c * c * shape)],
        ]
    }

    /// The reciprocal cell: a*, b*, c* in Å⁻¹, angles in degrees.
    #[must_use]
    pub fn reciprocal(&self) -> Self {
        let g = self.reciprocal_metric();
        let [a, b, c] = [g[0][0].sqrt(), g[1][1].sqrt(), g[2][2].sqrt()];
        Self {
            a,
            b,
            c,
            alpha: angle_deg(g[1][2] / (b * c)),
            beta: angle_deg(g[0][2] / (a * c)),
            gamma: angle_deg(g[0][1] / (a * b)),
        }
    }

    /// Volume in Å³, `V = a b c √(1 − cos²α − cos²β − cos²γ + 2 cos α cos β cos γ)`.
    #[must_use]
    pub fn volume(&self) -> f64 {
        self.a * self.b * self.c * self.shape().sqrt()
    }

    /// `Q = 1/d² = hᵀ G* h` of a reflection, Å⁻².
    #[must_use]
    pub fn q(&self, hkl: [i32; 3]) -> f64 {
        quadratic(&self.reciprocal_metric(), hkl)
    }

    /// Spacing d of a reflection, Å; infinite for 000.
    #[must_use]
    pub fn d(&self, hkl: [i32; 3]) -> f64 {
        1.0 / self.q(hkl).sqrt()
    }

    /// The cell of the basis `a'ⱼ = Σᵢ aᵢ P_ij` (columns of `basis` are the new axes in terms of the old).
    ///
    /// # Errors
    /// [`CellError::Metric`] when the new axes lie in a plane.
    pub fn transformed(&self, basis: [[f64; 3]; 3]) -> Result<Self, CellError> {
        let g = self.metric();
        let mut new = [[0.0; 3]; 3];
        for (i, row) in new.iter_mut().enumerate() {
            for (j, entry) in row.iter_mut().enumerate() {
                for k in 0..3 {
                    for l in 0..3 {
                        *entry += basis[k][i] * g[k][l] * basis[l][j];
                    }
                }
            }
        }
        Self::from_metric(new)
    }

    fn cosines(&self) -> [f64; 3] {
        [self.alpha, self.beta, self.gamma].map(cos_deg)
    }

    /// `(V / abc)²`, 1 for a box and 0 for a flat cell.
    fn shape(&self) -> f64 {
        let [ca, cb, cg] = self.cosines();
        1.0 - ca * ca - cb * cb - cg * cg + 2.0 * ca * cb * cg
    }
}

/// `hᵀ M h`.
pub(crate) fn quadratic(metric: &[[f64; 3]; 3], hkl: [i32; 3]) -> f64 {
    let [h, k, l] = hkl.map(f64::from);
    let cross = k * l * metric[1][2] + h * l * metric[0][2] + h * k * metric[0][1];
    h * h * metric[0][0] + k * k * metric[1][1] + l * l * metric[2][2] + 2.0 * cross
}

/// Cosine of an angle in degrees. The angles that symmetry fixes get the exact value: 6e-17 for a right angle would tie
/// a cubic d to the order of h, k and l.
fn cos_deg(degrees: f64) -> f64 {
    match degrees {
        90.0 => 0.0,
        120.0 => -0.5,
        60.0 => 0.5,
        _ => degrees.to_radians().cos(),
    }
}

/// Inverse of [`cos_deg`], with the same angles exact to rounding; NaN outside −1..1 (which no cell passes).
fn angle_deg(cosine: f64) -> f64 {
    for exact in [90.0, 120.0, 60.0] {
        if (cosine - cos_deg(exact)).abs() < 4.0 * f64::EPSILON {
            return exact;
        }
    }
    cosine.acos().to_degrees()
}

/// Inverse of a symmetric 3 × 3 matrix by cofactors.
fn inverse(m: &[[f64; 3]; 3]) -> [[f64; 3]; 3] {
    let cofactor = |i: usize, j: usize| {
        let (r, s, p, q) = ((i + 1) % 3, (i + 2) % 3, (j + 1) % 3, (j + 2) % 3);
        m[r][p] * m[s][q] - m[r][q] * m[s][p]
    };
    let determinant = (0..3).map(|j| m[0][j] * cofactor(0, j)).sum::<f64>();
    std::array::from_fn(|i| std::array::from_fn(|j| cofactor(j, i) / determinant))
}

#[cfg(test)]
mod tests {
    use super::{Cell, CellError};

    #[test]
    fn d_of_a_triclinic_line_agrees_with_gemmi() {
        // Outside: gemmi 0.7.5, UnitCell(5, 6, 7, 80, 95, 110): calculate_d([1, -2, 3]), volume.
        let cell = Cell::new(5.0, 6.0, 7.0, 80.0, 95.0, 110.0).unwrap();
        assert!((cell.d([1, -2, 3]) / 1.651_995_133_527_136_3 - 1.0).abs() < 1e-12, "{}", cell.d([1, -2, 3]));
    }

    #[test]
    fn the_reciprocal_of_the_reciprocal_is_the_cell() {
        let cell = Cell::new(5.0, 6.0, 7.0, 80.0, 95.0, 110.0).unwrap();
        for back in [cell.reciprocal().reciprocal(), Cell::from_reciprocal_metric(cell.reciprocal_metric()).unwrap()] {
            for (there, here) in back.parameters().iter().zip(cell.parameters()) {
                assert!((there / here - 1.0).abs() < 1e-12, "{back:?}");
            }
        }
        assert!((cell.reciprocal().volume() * cell.volume() - 1.0).abs() < 1e-12);
    }

    #[test]
    fn each_wrong_parameter_is_named() {
        let error = |p: [f64; 6]| Cell::new(p[0], p[1], p[2], p[3], p[4], p[5]).unwrap_err().to_string();
        assert!(error([0.0, 1.0, 1.0, 90.0, 90.0, 90.0]).starts_with("cell edge a is 0 Å"));
        assert!(error([1.0, f64::NAN, 1.0, 90.0, 90.0, 90.0]).starts_with("cell edge b is NaN Å"));
        assert!(error([1.0, 1.0, f64::INFINITY, 90.0, 90.0, 90.0]).starts_with("cell edge c is inf Å"));
        assert!(error([1.0, 1.0, 1.0, 180.0, 90.0, 90.0]).starts_with("cell angle alpha is 180°"));
        assert!(error([1.0, 1.0, 1.0, 90.0, -5.0, 90.0]).starts_with("cell angle beta is -5°"));
        assert!(error([1.0, 1.0, 1.0, 90.0, 90.0, f64::NAN]).starts_with("cell angle gamma is NaN°"));
        assert!(error([1.0, 1.0, 1.0, 120.0, 120.0, 120.0]).contains("enclose no volume"));
        assert!(error([1.0, 1.0, 1.0, 30.0, 40.0, 80.0]).contains("enclose no volume"));
    }

    #[test]
    fn a_metric_without_a_cell_is_refused() {
        let wrong = [[1.0, 0.0, 0.0], [0.0, -1.0, 0.0], [0.0, 0.0, -1.0]];
        assert_eq!(Cell::from_reciprocal_metric(wrong), Err(CellError::Metric));
        assert_eq!(Cell::from_metric([[f64::NAN; 3]; 3]), Err(CellError::Metric));
    }
}
