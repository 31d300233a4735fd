//! What a space group asks of its cell.

use crate::crystal::{CrystalSystem, UnitCell};

/// Lengths that must be equal may differ by this fraction: a cell that was refined under its constraints differs by the
/// last printed digit at most, 5.4310 against 5.431; a real distortion worth a lower group is larger.
pub const EQUAL_LENGTHS: f64 = 1e-4;

/// Angles that must have a value may miss it by this many degrees, for the same reason: they are printed to 0.01°.
pub const EQUAL_ANGLES_DEG: f64 = 0.01;

/// The shape of the cell that a setting needs.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Constraint {
    Triclinic,
    MonoclinicA,
    MonoclinicB,
    MonoclinicC,
    Orthorhombic,
    Tetragonal,
    HexagonalAxes,
    RhombohedralAxes,
    Cubic,
}

impl Constraint {
    pub(super) fn of(number: u16, setting: &str) -> Self {
        match system(number) {
            CrystalSystem::Triclinic => Self::Triclinic,
            CrystalSystem::Monoclinic if setting.contains('a') => Self::MonoclinicA,
            CrystalSystem::Monoclinic if setting.contains('c') => Self::MonoclinicC,
            CrystalSystem::Monoclinic => Self::MonoclinicB,
            CrystalSystem::Orthorhombic => Self::Orthorhombic,
            CrystalSystem::Tetragonal => Self::Tetragonal,
            CrystalSystem::Trigonal if setting == "R" => Self::RhombohedralAxes,
            CrystalSystem::Trigonal | CrystalSystem::Hexagonal => Self::HexagonalAxes,
            CrystalSystem::Cubic => Self::Cubic,
        }
    }

    /// A cell of this shape and of no more special one.
    #[cfg(test)]
    #[allow(clippy::unwrap_used)]
    pub(super) fn example(self) -> UnitCell {
        let [a, b, c, alpha, beta, gamma] = match self {
            Self::Triclinic => [5.1, 6.3, 7.7, 82.0, 97.0, 104.0],
            Self::MonoclinicA => [5.1, 6.3, 7.7, 97.0, 90.0, 90.0],
            Self::MonoclinicB => [5.1, 6.3, 7.7, 90.0, 97.0, 90.0],
            Self::MonoclinicC => [5.1, 6.3, 7.7, 90.0, 90.0, 97.0],
            Self::Orthorhombic => [5.1, 6.3, 7.7, 90.0, 90.0, 90.0],
            Self::Tetragonal => [5.1, 5.1, 7.7, 90.0, 90.0, 90.0],
            Self::HexagonalAxes => [5.1, 5.1, 7.7, 90.0, 90.0, 120.0],
            Self::RhombohedralAxes => [5.1, 5.1, 5.1, 77.0, 77.0, 77.0],
            Self::Cubic => [5.1, 5.1, 5.1, 90.0, 90.0, 90.0],
        };
        UnitCell::new(a, b, c, alpha, beta, gamma).unwrap()
    }

    /// In symbols.
    pub(super) fn needs(self) -> &'static str {
        match self {
            Self::Triclinic => "nothing",
            Self::MonoclinicA => "β = γ = 90°",
            Self::MonoclinicB => "α = γ = 90°",
            Self::MonoclinicC => "α = β = 90°",
            Self::Orthorhombic => "α = β = γ = 90°",
            Self::Tetragonal => "a = b and α = β = γ = 90°",
            Self::HexagonalAxes => "a = b, α = β = 90° and γ = 120°",
            Self::RhombohedralAxes => "a = b = c and α = β = γ",
            Self::Cubic => "a = b = c and α = β = γ = 90°",
        }
    }

    pub(super) fn is_met_by(self, cell: &UnitCell) -> bool {
        self.broken_by(cell).is_empty()
    }

    /// Each way in which the cell misses the shape: `b = 5.5 Å where a = 5.43 Å`, `γ = 91°`.
    pub(super) fn broken_by(self, cell: &UnitCell) -> Vec<String> {
        let (angles, equal_lengths): ([Option<f64>; 3], &[usize]) = match self {
            Self::Triclinic => ([None; 3], &[]),
            Self::MonoclinicA => ([None, Some(90.0), Some(90.0)], &[]),
            Self::MonoclinicB => ([Some(90.0), None, Some(90.0)], &[]),
            Self::MonoclinicC => ([Some(90.0), Some(90.0), None], &[]),
            Self::Orthorhombic => ([Some(90.0); 3], &[]),
            Self::Tetragonal => ([Some(90.0); 3], &[1]),
            Self::HexagonalAxes => ([Some(90.0), Some(90.0), Some(120.0)], &[1]),
            Self::RhombohedralAxes => ([None, Some(cell.angles_deg()[0]), Some(cell.angles_deg()[0])], &[1, 2]),
            Self::Cubic => ([Some(90.0); 3], &[1, 2]),
        };
        let mut broken = Vec::new();
        let a = cell.lengths()[0];
        for (i, name) in ["a", "b", "c"].iter().enumerate() {
            let length = cell.lengths()[i];
            if equal_lengths.contains(&i) && (length - a).abs() > EQUAL_LENGTHS * a {
                broken.push(format!("{name} = {length} Å where a = {a} Å"));
            }
        }
        for (i, name) in ["α", "β", "γ"].iter().enumerate() {
            let angle = cell.angles_deg()[i];
            if angles[i].is_some_and(|wanted| (angle - wanted).abs() > EQUAL_ANGLES_DEG) {
                let beside = if self == Self::RhombohedralAxes {
                    format!(" where α = {}°", cell.angles_deg()[0])
                } else {
                    String::new()
                };
                broken.push(format!("{name} = {angle}°{beside}"));
            }
        }
        broken
    }
}

/// The crystal system of a space-group type by its number (International Tables A); 195 and above are cubic.
pub(super) fn system(number: u16) -> CrystalSystem {
    match number {
        0..=2 => CrystalSystem::Triclinic,
        3..=15 => CrystalSystem::Monoclinic,
        16..=74 => CrystalSystem::Orthorhombic,
        75..=142 => CrystalSystem::Tetragonal,
        143..=167 => CrystalSystem::Trigonal,
        168..=194 => CrystalSystem::Hexagonal,
        _ => CrystalSystem::Cubic,
    }
}
