//! Rotations of the bare lattice: what positions alone cannot tell apart.

use nalgebra::{Matrix3, Vector3};

use super::query::Centring;
use crate::crystal::UnitCell;

/// Default tolerance of [`lattice_rotations`]: 3e-4 of a length, or 3e-4 rad (0.017°) of an angle. Settings are read to about
/// 0.02°, so a rotation that moves nodes by less cannot be told from a true one by angles.
pub const LATTICE_TOLERANCE: f64 = 3e-4;

/// The proper rotations of the lattice of this cell, centring included: matrices M, to be multiplied onto columns of indices,
/// that take every node the lattice allows to another such node and keep |G| and the angles between nodes. The identity comes
/// first. Their number is 1, 2, 4, 6, 8, 12 or 24 where the tolerance is not of the order of a true distortion.
///
/// The elements are whole numbers where the rotation keeps the shape of the cell; where the lattice has more symmetry than its
/// cell shows (a rhombohedral cell on hexagonal axes that is a cube in truth) some are multiples of 1/2, 1/3 or 1/4, and a node
/// that the lattice forbids may then go to fractional indices.
///
/// `tolerance` is relative: lengths |G| may change by that part of themselves, angles between nodes by that many radians.
///
/// Method: a Selling-reduced basis of the reciprocal lattice (Delaunay 1933, Z. Kristallogr. 84, 109) has only short images,
/// so those are tried. Limitation: within the tolerance the set need not be closed under products.
pub fn lattice_rotations(cell: &UnitCell, centring: Centring, tolerance: f64) -> Vec<Matrix3<f64>> {
    let primitive = centring.indices_from_primitive();
    let reduced = reduce(&(cell.b_matrix() * primitive));
    let indices_from_reduced = primitive * reduced;
    let basis = cell.b_matrix() * indices_from_reduced;
    let Some(reduced_from_indices) = indices_from_reduced.try_inverse() else { return vec![Matrix3::identity()] };
    let mut rotations: Vec<Matrix3<f64>> = Vec::new();
    let images = [0, 1, 2].map(|i| images_of(&basis, i, tolerance));
    for first in &images[0] {
        for second in images[1].iter().filter(|v| angle_kept(&basis, (0, 1), first, v, tolerance)) {
            for third in images[2].iter().filter(|v| {
                angle_kept(&basis, (0, 2), first, v, tolerance) && angle_kept(&basis, (1, 2), second, v, tolerance)
            }) {
                let turned = Matrix3::from_columns(&[*first, *second, *third]);
                if turned.determinant() > 0.5 {
                    rotations.push(tidy(&(indices_from_reduced * turned * reduced_from_indices)));
                }
            }
        }
    }
    // The identity has the largest trace of all rotations.
    rotations.sort_by(|a, b| b.trace().total_cmp(&a.trace()));
    rotations
}

/// Twelve times an element is a whole number for every centring; removes the dust of the products.
fn tidy(m: &Matrix3<f64>) -> Matrix3<f64> {
    m.map(|x| (12.0 * x).round() / 12.0 + 0.0)
}

/// Lattice vectors, in the basis, as long as basis vector `i`. In a Selling-reduced basis they have elements of at most 2.
fn images_of(basis: &Matrix3<f64>, i: usize, tolerance: f64) -> Vec<Vector3<f64>> {
    let length = basis.column(i).norm();
    let steps = [-2.0, -1.0, 0.0, 1.0, 2.0];
    let mut images = Vec::new();
    for x in steps {
        for y in steps {
            for z in steps {
                let v = Vector3::new(x, y, z);
                if ((basis * v).norm() - length).abs() <= tolerance * length {
                    images.push(v);
                }
            }
        }
    }
    images
}

/// Whether two images enclose the angle of the two basis vectors they are images of.
fn angle_kept(basis: &Matrix3<f64>, of: (usize, usize), u: &Vector3<f64>, v: &Vector3<f64>, tolerance: f64) -> bool {
    let before = crate::frames::angle_between(&basis.column(of.0).into_owned(), &basis.column(of.1).into_owned());
    (crate::frames::angle_between(&(basis * u), &(basis * v)) - before).abs() <= tolerance
}

/// Selling's reduction: whole-number combinations of the columns after which no two of v₁, v₂, v₃ and −(v₁ + v₂ + v₃) enclose
/// an acute angle. Returns the combinations as columns.
fn reduce(basis: &Matrix3<f64>) -> Matrix3<f64> {
    let e = Matrix3::<f64>::identity();
    let mut vectors =
        [e.column(0).into_owned(), e.column(1).into_owned(), e.column(2).into_owned(), -Vector3::repeat(1.0)];
    let scale = (0..3).map(|i| basis.column(i).norm_squared()).fold(0.0, f64::max);
    let acute = |vs: &[Vector3<f64>; 4], (i, j): (usize, usize)| {
        // A product of rounding size is a right angle.
        (basis * vs[i]).dot(&(basis * vs[j])) > 1e-12 * scale
    };
    let pairs = [(0, 1), (0, 2), (0, 3), (1, 2), (1, 3), (2, 3)];
    // Each step shortens the sum of squares, so the loop ends; the bound is for numbers that are no lattice.
    for _ in 0..10_000 {
        let Some(&(i, j)) = pairs.iter().find(|pair| acute(&vectors, **pair)) else { break };
        let turned = vectors[i];
        for (n, v) in vectors.iter_mut().enumerate() {
            if n == i {
                *v = -turned;
            } else if n != j {
                *v += turned;
            }
        }
    }
    Matrix3::from_columns(&[vectors[0], vectors[1], vectors[2]])
}

impl Centring {
    /// Columns: the indices, on the centred cell, of a basis of the nodes that the centring allows.
    fn indices_from_primitive(self) -> Matrix3<f64> {
        let (a, b, c) = match self {
            Self::P => ([1, 0, 0], [0, 1, 0], [0, 0, 1]),
            Self::A => ([1, 0, 0], [0, 1, 1], [0, -1, 1]),
            Self::B => ([0, 1, 0], [1, 0, 1], [-1, 0, 1]),
            Self::C => ([0, 0, 1], [1, 1, 0], [-1, 1, 0]),
            Self::I => ([0, 1, 1], [1, 0, 1], [1, 1, 0]),
            Self::F => ([-1, 1, 1], [1, -1, 1], [1, 1, -1]),
            Self::R => ([1, 0, 1], [-1, 1, 1], [0, -1, 1]),
        };
        Matrix3::from_columns(&[a, b, c].map(|v| Vector3::from(v.map(f64::from))))
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::crystal::{SpaceGroup, SymmetryQuery};
    use crate::frames::Hkl;

    fn cell(numbers: [f64; 6]) -> UnitCell {
        let [a, b, c, alpha, beta, gamma] = numbers;
        UnitCell::new(a, b, c, alpha, beta, gamma).unwrap()
    }

    // Orders of the rotation groups of the seven lattice systems: 24, 8, 12, 6, 4, 2, 1 (International Tables A, chapter 3.1).
    #[test]
    fn lattices_have_the_rotations_of_their_system() {
        let rhombohedron = 2.0 * (0.5f64.sqrt()).asin().to_degrees();
        for (numbers, centring, count) in [
            ([5.0, 5.0, 5.0, 90.0, 90.0, 90.0], Centring::P, 24),
            ([5.0, 5.0, 5.0, 90.0, 90.0, 90.0], Centring::I, 24),
            ([5.0, 5.0, 5.0, 90.0, 90.0, 90.0], Centring::F, 24),
            ([5.0, 5.0, 5.0, 90.0, 90.0, 90.0], Centring::C, 8),
            ([5.0, 5.0, 7.0, 90.0, 90.0, 90.0], Centring::I, 8),
            ([5.0, 5.0, 7.0, 90.0, 90.0, 120.0], Centring::P, 12),
            ([5.0, 5.0, 7.0, 90.0, 90.0, 120.0], Centring::R, 6),
            ([5.0, 5.0, 5.0, 77.0, 77.0, 77.0], Centring::P, 6),
            ([5.0, 6.0, 7.0, 90.0, 90.0, 90.0], Centring::P, 4),
            ([5.0, 6.0, 7.0, 90.0, 90.0, 90.0], Centring::C, 4),
            ([5.0, 6.0, 7.0, 90.0, 101.0, 90.0], Centring::C, 2),
            ([5.0, 6.0, 7.0, 83.0, 101.0, 95.0], Centring::P, 1),
            // More than the cell shows: b = a √3 centred on C is hexagonal, c = a √6 on hexagonal axes centred R is a cube,
            // c = a √2 centred on I is face-centred cubic, a primitive rhombohedron of 60° is face-centred cubic.
            ([5.0, 5.0 * 3.0f64.sqrt(), 7.0, 90.0, 90.0, 90.0], Centring::C, 12),
            ([5.0, 5.0, 5.0 * 1.5f64.sqrt(), 90.0, 90.0, 120.0], Centring::R, 24),
            ([5.0, 5.0, 5.0 * 2.0f64.sqrt(), 90.0, 90.0, 90.0], Centring::I, 24),
            ([5.0, 5.0, 5.0, 60.0, 60.0, 60.0], Centring::P, 24),
            ([5.0, 5.0, 5.0, rhombohedron, rhombohedron, rhombohedron], Centring::P, 24),
            // A monoclinic cell chosen badly: c' = c + 3a is very oblique, the lattice is orthorhombic.
            ([5.0, 6.0, 275f64.sqrt(), 90.0, (15.0 / 275f64.sqrt()).acos().to_degrees(), 90.0], Centring::P, 4),
        ] {
            let rotations = lattice_rotations(&cell(numbers), centring, LATTICE_TOLERANCE);
            assert_eq!(rotations.len(), count, "{numbers:?} {centring:?}");
        }
    }

    #[test]
    fn rotations_keep_the_metric_and_the_allowed_nodes() {
        for (numbers, centring) in [
            ([5.0, 5.0 * 3.0f64.sqrt(), 7.0, 90.0, 90.0, 90.0], Centring::C),
            ([5.0, 5.0, 5.0 * 1.5f64.sqrt(), 90.0, 90.0, 120.0], Centring::R),
            ([5.0, 5.0, 7.0, 90.0, 90.0, 120.0], Centring::R),
            ([5.0, 5.0, 5.0, 90.0, 90.0, 90.0], Centring::F),
            ([5.0, 5.0, 5.0 * 2.0f64.sqrt(), 90.0, 90.0, 90.0], Centring::I),
        ] {
            let cell = cell(numbers);
            let metric = cell.reciprocal_metric();
            let group = SpaceGroup::resolve(&SymmetryQuery::Centring(centring), &cell).unwrap();
            let rotations = lattice_rotations(&cell, centring, LATTICE_TOLERANCE);
            assert_eq!(rotations.first(), Some(&Matrix3::identity()));
            for m in &rotations {
                assert!((m.determinant() - 1.0).abs() < 1e-12);
                assert!((m.transpose() * metric * m - metric).abs().max() < 1e-12);
                for node in [[1, 1, 1], [2, 0, 0], [1, 1, 0], [1, 0, 1], [0, 1, -1], [0, 0, 3], [3, 1, 2], [4, -2, 6]] {
                    if !group.absence(Hkl::from(node)).is_absent() {
                        let image = Hkl::from_vector(&(m * Hkl::from(node).to_vector()));
                        assert_eq!(group.absence(image), crate::crystal::Presence::Allowed, "{node:?} to {image}");
                    }
                }
            }
        }
    }

    #[test]
    fn a_small_distortion_counts_by_the_tolerance() {
        let nearly_cubic = cell([5.0, 5.0, 5.01, 90.0, 90.0, 90.0]);
        assert_eq!(lattice_rotations(&nearly_cubic, Centring::P, LATTICE_TOLERANCE).len(), 8);
        assert_eq!(lattice_rotations(&nearly_cubic, Centring::P, 5e-3).len(), 24);
        let sheared = cell([5.0, 5.0, 5.0, 90.0, 90.0, 90.2]);
        assert_eq!(lattice_rotations(&sheared, Centring::P, LATTICE_TOLERANCE).len(), 4);
    }
}
