//! Which parameters of a cell a group leaves free: the metrics with `Rᵀ G R = G` for all its rotations.

use std::fmt;

use crate::metric_space::MetricSpace;
use crate::symmetry::SpaceGroup;
use crate::{Cell, CellError};

/// Shape that symmetry gives to a cell, with its free parameters. An axis is 0, 1 or 2 for a, b or c.
#[expect(clippy::large_enum_variant, reason = "one value per fit, and Copy is worth more there than 300 bytes")]
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum AxisSystem {
    /// All six are free.
    Triclinic,
    /// The angles beside the unique axis are right.
    Monoclinic {
        /// The unique axis.
        unique: usize,
    },
    /// All angles are right.
    Orthorhombic,
    /// All angles are right, the edges beside the unique axis are equal.
    Tetragonal {
        /// The unique axis.
        unique: usize,
    },
    /// a = b, γ = 120°, the other angles right.
    Hexagonal,
    /// a = b = c, α = β = γ.
    Rhombohedral,
    /// a = b = c, all angles right.
    Cubic,
    /// Any other shape, such as the primitive cell of a cubic F lattice: free entries of the metric tensor.
    Other(MetricSpace),
}

impl AxisSystem {
    /// The shape that the operations of a group ask for.
    #[must_use]
    pub fn from_group(group: &SpaceGroup) -> Self {
        let space = MetricSpace::invariant_under(group.laue_rotations());
        // A named shape that holds every invariant metric, with as many parameters, is the shape.
        Self::NAMED
            .into_iter()
            .find(|named| named.parameter_names().len() == space.dimension() && space.basis().all(|g| named.holds(&g)))
            .unwrap_or(Self::Other(space))
    }

    const NAMED: [Self; 11] = [
        Self::Cubic,
        Self::Hexagonal,
        Self::Rhombohedral,
        Self::Tetragonal { unique: 2 },
        Self::Tetragonal { unique: 0 },
        Self::Tetragonal { unique: 1 },
        Self::Orthorhombic,
        Self::Monoclinic { unique: 1 },
        Self::Monoclinic { unique: 2 },
        Self::Monoclinic { unique: 0 },
        Self::Triclinic,
    ];

    /// Whether a metric (G11, G22, G33, G23, G13, G12) obeys the conditions of the shape, which are linear in it.
    fn holds(self, [aa, bb, cc, bc, ac, ab]: &[f64; 6]) -> bool {
        let zero = |x: f64| x.abs() < 1e-9;
        let edges = [*aa, *bb, *cc];
        let off = [*bc, *ac, *ab];
        let beside = |unique: usize| edges[(unique + 1) % 3] - edges[(unique + 2) % 3];
        match self {
            Self::Triclinic | Self::Other(_) => true,
            Self::Monoclinic { unique } => (0..3).all(|i| i == unique || zero(off[i])),
            Self::Orthorhombic => off.into_iter().all(zero),
            Self::Tetragonal { unique } => off.into_iter().all(zero) && zero(beside(unique)),
            Self::Hexagonal => zero(aa - bb) && zero(bc.abs() + ac.abs()) && zero(2.0 * ab + aa),
            Self::Rhombohedral => zero(aa - bb) && zero(bb - cc) && zero(bc - ac) && zero(ac - ab),
            Self::Cubic => off.into_iter().all(zero) && zero(aa - bb) && zero(bb - cc),
        }
    }

    /// Names of the free parameters, in the order of [`free_parameters`](Self::free_parameters): `a`, `b`, `c` in Å,
    /// `alpha`, `beta`, `gamma` in degrees; `G11`… in Å² for [`AxisSystem::Other`].
    #[must_use]
    pub fn parameter_names(&self) -> &'static [&'static str] {
        match self {
            Self::Triclinic => &["a", "b", "c", "alpha", "beta", "gamma"],
            Self::Monoclinic { unique: 0 } => &["a", "b", "c", "alpha"],
            Self::Monoclinic { unique: 1 } => &["a", "b", "c", "beta"],
            Self::Monoclinic { .. } => &["a", "b", "c", "gamma"],
            Self::Orthorhombic => &["a", "b", "c"],
            Self::Tetragonal { unique: 0 | 1 } => &["a", "b"],
            Self::Tetragonal { .. } | Self::Hexagonal => &["a", "c"],
            Self::Rhombohedral => &["a", "alpha"],
            Self::Cubic => &["a"],
            Self::Other(space) => space.names(),
        }
    }

    /// The free parameters of a cell; those that symmetry fixes are not looked at.
    #[must_use]
    pub fn free_parameters(&self, cell: &Cell) -> Vec<f64> {
        if let Self::Other(space) = self {
            return space.coordinates(&cell.metric());
        }
        let names = self.parameter_names();
        let all = ["a", "b", "c", "alpha", "beta", "gamma"].into_iter().zip(cell.parameters());
        all.filter(|(name, _)| names.contains(name)).map(|(_, value)| value).collect()
    }

    /// The cell with these free parameters.
    ///
    /// # Errors
    /// [`CellError`] when their number is another one, or when they make no cell.
    pub fn cell_from(&self, free: &[f64]) -> Result<Cell, CellError> {
        let wrong = CellError::ParameterCount { expected: self.parameter_names().len(), found: free.len() };
        match (self, free) {
            (Self::Triclinic, &[a, b, c, alpha, beta, gamma]) => Cell::new(a, b, c, alpha, beta, gamma),
            (Self::Monoclinic { unique: 0 }, &[a, b, c, alpha]) => Cell::new(a, b, c, alpha, 90.0, 90.0),
            (Self::Monoclinic { unique: 1 }, &[a, b, c, beta]) => Cell::new(a, b, c, 90.0, beta, 90.0),
            (Self::Monoclinic { .. }, &[a, b, c, gamma]) => Cell::new(a, b, c, 90.0, 90.0, gamma),
            (Self::Orthorhombic, &[a, b, c]) => Cell::new(a, b, c, 90.0, 90.0, 90.0),
            (Self::Tetragonal { unique: 0 }, &[a, b]) => Cell::new(a, b, b, 90.0, 90.0, 90.0),
            (Self::Tetragonal { unique: 1 }, &[a, b]) => Cell::new(a, b, a, 90.0, 90.0, 90.0),
            (Self::Tetragonal { .. }, &[a, c]) => Cell::new(a, a, c, 90.0, 90.0, 90.0),
            (Self::Hexagonal, &[a, c]) => Cell::new(a, a, c, 90.0, 90.0, 120.0),
            (Self::Rhombohedral, &[a, alpha]) => Cell::new(a, a, a, alpha, alpha, alpha),
            (Self::Cubic, &[a]) => Cell::cubic(a),
            (Self::Other(space), free) if free.len() == space.dimension() => Cell::from_metric(space.metric(free)),
            _ => Err(wrong),
        }
    }
}

impl fmt::Display for AxisSystem {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let letter = |axis: usize| ["a", "b", "c"][axis.min(2)];
        match self {
            Self::Triclinic => f.write_str("triclinic"),
            Self::Monoclinic { unique } => write!(f, "monoclinic, unique axis {}", letter(*unique)),
            Self::Orthorhombic => f.write_str("orthorhombic"),
            Self::Tetragonal { unique } => write!(f, "tetragonal, unique axis {}", letter(*unique)),
            Self::Hexagonal => f.write_str("hexagonal"),
            Self::Rhombohedral => f.write_str("rhombohedral"),
            Self::Cubic => f.write_str("cubic"),
            Self::Other(space) => write!(f, "free metric entries {}", space.names().join(", ")),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::AxisSystem;
    use crate::{Cell, SpaceGroup};

    fn of(hall: &str) -> AxisSystem {
        AxisSystem::from_group(&SpaceGroup::from_hall(hall).unwrap())
    }

    #[test]
    fn the_shape_follows_from_the_operations_in_every_setting() {
        for (hall, shape) in [
            ("-P 1", AxisSystem::Triclinic),
            ("-P 2ybc", AxisSystem::Monoclinic { unique: 1 }),
            ("-B 2", AxisSystem::Monoclinic { unique: 2 }),
            ("-P 2x", AxisSystem::Monoclinic { unique: 0 }),
            ("F 2 -2d", AxisSystem::Orthorhombic),
            ("-I 4 2", AxisSystem::Tetragonal { unique: 2 }),
            ("-P 4x 2y", AxisSystem::Tetragonal { unique: 0 }),
            ("-P 4y 2x", AxisSystem::Tetragonal { unique: 1 }),
            ("-R 3 2\"", AxisSystem::Hexagonal),
            ("-P 3* 2", AxisSystem::Rhombohedral),
            ("P 61 2 (0 0 5)", AxisSystem::Hexagonal),
            ("-F 4 2 3", AxisSystem::Cubic),
            ("-F 4 2", AxisSystem::Tetragonal { unique: 2 }),
        ] {
            assert_eq!(of(hall), shape, "{hall}");
        }
    }

    #[test]
    fn free_parameters_make_the_cell_again() {
        let cell = Cell::new(5.0, 6.0, 7.0, 80.0, 95.0, 110.0).unwrap();
        for hall in
            ["-P 1", "-P 2ybc", "-B 2", "-P 2x", "F 2 -2d", "-I 4 2", "-P 4x 2y", "-R 3 2\"", "-P 3* 2", "-F 4 2 3"]
        {
            let group = SpaceGroup::from_hall(hall).unwrap();
            let fitting = group.symmetrised(&cell).unwrap();
            let shape = AxisSystem::from_group(&group);
            let again = shape.cell_from(&shape.free_parameters(&fitting)).unwrap();
            for (a, b) in again.parameters().iter().zip(fitting.parameters()) {
                assert!((a / b - 1.0).abs() < 1e-12, "{hall}: {again:?} {fitting:?}");
            }
            assert_eq!(group.compatible(&again), Ok(()));
        }
    }

    #[test]
    fn the_primitive_cell_of_a_cubic_lattice_has_one_free_parameter() {
        // a′ = (b + c)/2 and cyclic: coordinates x′ = −x + y + z and cyclic.
        let group = SpaceGroup::from_hall("-F 4 2 3 (-x+y+z,x-y+z,x+y-z)").unwrap();
        assert_eq!(group.operations().len(), 48);
        let shape = AxisSystem::from_group(&group);
        assert_eq!(shape.parameter_names().len(), 1, "{shape}");
        let cell = Cell::new(4.0, 4.0, 4.0, 60.0, 60.0, 60.0).unwrap();
        let again = shape.cell_from(&shape.free_parameters(&cell)).unwrap();
        for (a, b) in again.parameters().iter().zip(cell.parameters()) {
            assert!((a / b - 1.0).abs() < 1e-12, "{again:?}");
        }
    }
}
