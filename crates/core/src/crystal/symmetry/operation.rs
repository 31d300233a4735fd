use std::fmt;

use super::describe;

/// Translations are counted in this fraction of a cell edge. Twelfths would do for every tabulated setting; a
/// twenty-fourth leaves room for an origin halfway.
pub const TRANSLATION_STEPS: i32 = 24;

pub(super) const IDENTITY: [[i32; 3]; 3] = [[1, 0, 0], [0, 1, 0], [0, 0, 1]];

/// A symmetry operation x' = R x + t on fractional coordinates, exact. Indices transform as rows: h' = h R.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Operation {
    rotation: [[i32; 3]; 3],
    translation: [i32; 3],
}

impl Operation {
    /// `rotation` by rows; `translation` in 1/[`TRANSLATION_STEPS`] of an edge, brought into one cell.
    pub(super) fn new(rotation: [[i32; 3]; 3], translation: [i32; 3]) -> Self {
        Self { rotation, translation: translation.map(|t| t.rem_euclid(TRANSLATION_STEPS)) }
    }

    pub(super) fn identity() -> Self {
        Self::new(IDENTITY, [0; 3])
    }

    /// R by rows: `rotation()[row][column]`.
    pub fn rotation(&self) -> [[i32; 3]; 3] {
        self.rotation
    }

    /// t in 1/[`TRANSLATION_STEPS`] of a, b and c, from 0 to one step below a whole edge.
    pub fn translation(&self) -> [i32; 3] {
        self.translation
    }

    /// `self` after `first`.
    pub(super) fn after(&self, first: &Self) -> Self {
        let mut translation = self.translation;
        for (sum, row) in translation.iter_mut().zip(self.rotation) {
            *sum += dot(row, first.translation);
        }
        Self::new(product(&self.rotation, &first.rotation), translation)
    }

    /// det R: +1 for a rotation, −1 with an inversion in it.
    pub fn determinant(&self) -> i32 {
        determinant(&self.rotation)
    }

    /// Whether this is a pure translation, the identity included.
    pub fn is_translation(&self) -> bool {
        self.rotation == IDENTITY
    }

    /// In plain words: `mirror plane ⊥ [0 1 0]`, `glide plane ⊥ [0 1 0] by c/2`, `4-fold screw axis ∥ [0 0 1] by c/4`,
    /// `centring by a/2 + b/2`. Directions are those of the direct lattice.
    pub fn in_words(&self) -> String {
        describe::in_words(self)
    }
}

/// As a triplet: `-x,y+1/2,-z+1/2`.
impl fmt::Display for Operation {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (i, (row, shift)) in self.rotation.iter().zip(self.translation).enumerate() {
            let comma = if i == 0 { "" } else { "," };
            write!(f, "{comma}{}", describe::sum_of_terms(row, ["x", "y", "z"]))?;
            if shift != 0 {
                write!(f, "+{}", describe::fraction(shift, TRANSLATION_STEPS))?;
            }
        }
        Ok(())
    }
}

pub(super) fn dot(a: [i32; 3], b: [i32; 3]) -> i32 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

/// The row vector h times a matrix given by rows.
pub(super) fn row_times(h: [i64; 3], m: &[[i32; 3]; 3]) -> [i64; 3] {
    [0, 1, 2].map(|j| h[0] * i64::from(m[0][j]) + h[1] * i64::from(m[1][j]) + h[2] * i64::from(m[2][j]))
}

pub(super) fn product(a: &[[i32; 3]; 3], b: &[[i32; 3]; 3]) -> [[i32; 3]; 3] {
    a.map(|row| [0, 1, 2].map(|j| dot(row, [b[0][j], b[1][j], b[2][j]])))
}

pub(super) fn determinant(m: &[[i32; 3]; 3]) -> i32 {
    m[0][0] * (m[1][1] * m[2][2] - m[1][2] * m[2][1]) - m[0][1] * (m[1][0] * m[2][2] - m[1][2] * m[2][0])
        + m[0][2] * (m[1][0] * m[2][1] - m[1][1] * m[2][0])
}

pub(super) fn scaled(m: &[[i32; 3]; 3], factor: i32) -> [[i32; 3]; 3] {
    m.map(|row| row.map(|x| x * factor))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_operation_prints_as_a_triplet() {
        let op = Operation::new([[-1, 0, 0], [0, 1, 0], [0, 0, -1]], [0, 12, -12]);
        assert_eq!(op.to_string(), "-x,y+1/2,-z+1/2");
        let op = Operation::new([[0, -1, 0], [1, -1, 0], [0, 0, 1]], [0, 0, 8]);
        assert_eq!(op.to_string(), "-y,x-y,z+1/3");
    }

    #[test]
    fn a_screw_done_twice_is_a_translation() {
        let screw = Operation::new([[-1, 0, 0], [0, 1, 0], [0, 0, -1]], [0, 12, 12]);
        assert_eq!(screw.after(&screw), Operation::identity());
        assert_eq!(screw.determinant(), 1);
    }
}
