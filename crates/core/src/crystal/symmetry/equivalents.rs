use super::group::SpaceGroup;
use super::operation::scaled;
use crate::frames::Hkl;

/// Two indices closer than this are the same, as in [`Hkl::as_integers`].
const SAME_INDEX: f64 = 1e-6;

impl SpaceGroup {
    /// The distinct nodes that the point group makes equivalent to this one, itself first. Their number is the
    /// multiplicity; a Friedel mate is among them only if the group has an inversion.
    pub fn point_group_equivalents(&self, hkl: Hkl) -> Vec<Hkl> {
        let mut orbit = Vec::new();
        for op in self.representatives() {
            push_new(&mut orbit, turned(hkl, &op.rotation()));
        }
        orbit
    }

    /// The distinct nodes that the Laue class makes equivalent to this one, Friedel mates included, itself first.
    pub fn laue_equivalents(&self, hkl: Hkl) -> Vec<Hkl> {
        let mut orbit = self.point_group_equivalents(hkl);
        for mate in orbit.clone() {
            push_new(&mut orbit, -mate);
        }
        orbit
    }

    /// The rotations (determinant +1) of the Laue class, by rows, to be multiplied onto columns of indices; the identity
    /// first. The others of the class are these times −1.
    pub fn proper_laue_rotations(&self) -> Vec<[[i32; 3]; 3]> {
        let mut rotations: Vec<[[i32; 3]; 3]> = Vec::new();
        for op in self.representatives() {
            let r = scaled(&op.rotation(), op.determinant());
            let onto_columns = [0, 1, 2].map(|i| [r[0][i], r[1][i], r[2][i]]);
            if !rotations.contains(&onto_columns) {
                rotations.push(onto_columns);
            }
        }
        rotations
    }
}

/// h R.
fn turned(hkl: Hkl, r: &[[i32; 3]; 3]) -> Hkl {
    let [h, k, l] =
        [0, 1, 2].map(|j| hkl.h * f64::from(r[0][j]) + hkl.k * f64::from(r[1][j]) + hkl.l * f64::from(r[2][j]));
    Hkl::new(h, k, l)
}

fn push_new(orbit: &mut Vec<Hkl>, new: Hkl) {
    let same = |old: &Hkl| (old.to_vector() - new.to_vector()).abs().max() < SAME_INDEX;
    if !orbit.iter().any(same) {
        orbit.push(new);
    }
}
