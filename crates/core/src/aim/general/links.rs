use nalgebra::{Matrix3, Rotation3, Unit, Vector3};

/// The most moving axes of a chain: four of the sample, and one for the beam.
pub const MAX_LINKS: usize = 5;

/// Stands for the beam as an outermost axis: a detector that no rule settles follows Q around the beam.
pub const BEAM: usize = usize::MAX;

/// A direction carried by some axes of a chain: by the first `position` moving ones.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Mark {
    /// Number of moving axes that carry it.
    pub position: usize,
    /// The direction when those are at angle zero.
    pub direction: Vector3<f64>,
}

/// A chain of moving axes, R = A₀(t₀) A₁(t₁) … M, with two directions marked on it.
#[derive(Debug, Clone, PartialEq)]
pub struct Links {
    directions: [Vector3<f64>; MAX_LINKS],
    slots: [usize; MAX_LINKS],
    len: usize,
    /// M: what the held axes do to the head frame.
    pub held: Matrix3<f64>,
    /// The spindle.
    pub spindle: Mark,
    /// The reference axis of *bisecting*.
    pub reference: Mark,
}

impl Links {
    /// A chain of axes, each a unit vector and its position among all axes of the machine, from the base. `spindle` and
    /// `reference` are positions in this chain.
    pub fn new(axes: &[(Vector3<f64>, usize)], spindle: usize, reference: usize) -> Option<Self> {
        let mark = |position: usize| axes.get(position).map(|&(direction, _)| Mark { position, direction });
        let (mut directions, mut slots) = ([Vector3::zeros(); MAX_LINKS], [0; MAX_LINKS]);
        if axes.len() > MAX_LINKS {
            return None;
        }
        for (i, &(direction, slot)) in axes.iter().enumerate() {
            (directions[i], slots[i]) = (direction, slot);
        }
        let (spindle, reference) = (mark(spindle)?, mark(reference)?);
        Some(Self { directions, slots, len: axes.len(), held: Matrix3::identity(), spindle, reference })
    }

    /// The moving axes, outermost first.
    pub fn directions(&self) -> &[Vector3<f64>] {
        &self.directions[..self.len]
    }

    /// Their positions among all axes of the machine.
    pub fn slots(&self) -> &[usize] {
        &self.slots[..self.len]
    }

    /// Where in the chain an axis of the machine stands, if it moves.
    pub fn place_of(&self, slot: usize) -> Option<usize> {
        self.slots().iter().position(|&other| other == slot)
    }

    /// The same chain with one axis held at an angle in radians: A (B C) M = (A B A⁻¹)(A C A⁻¹) A M.
    pub fn hold(&self, link: usize, angle_rad: f64) -> Self {
        let mut held = self.clone();
        let turn = rotation(&self.directions[link], angle_rad);
        for i in link + 1..self.len {
            held.directions[i - 1] = turn * self.directions[i];
            held.slots[i - 1] = self.slots[i];
        }
        held.len -= 1;
        held.held = turn.matrix() * self.held;
        for mark in [&mut held.spindle, &mut held.reference] {
            if mark.position > link {
                mark.direction = turn * mark.direction;
                mark.position -= 1;
            }
        }
        held
    }

    /// Whether a mark stands still against the crystal, however the axes turn.
    pub fn carried_by_crystal(&self, mark: &Mark) -> bool {
        mark.position >= self.len
            || (mark.position + 1 == self.len
                && self.directions().last().is_some_and(|a| a.cross(&mark.direction).norm() < 1e-12))
    }

    /// Where a mark points with the moving axes at these angles in radians.
    pub fn pointing(&self, mark: &Mark, angles_rad: &[f64]) -> Vector3<f64> {
        let carriers = self.directions[..mark.position.min(self.len)].iter().zip(angles_rad);
        carriers.rev().fold(mark.direction, |v, (axis, &angle)| rotation(axis, angle) * v)
    }
}

/// The right-handed rotation about a unit vector.
#[inline]
pub fn rotation(axis: &Vector3<f64>, angle_rad: f64) -> Rotation3<f64> {
    Rotation3::from_axis_angle(&Unit::new_unchecked(*axis), angle_rad)
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use proptest::prelude::*;

    use super::*;
    use crate::testing::{cases, unit_vector};

    proptest! {
        #![proptest_config(cases())]

        /// Holding axes in any order changes nothing of what the chain does at those angles.
        #[test]
        fn holding_changes_no_rotation(
            axes in prop::array::uniform4(unit_vector()), t in prop::array::uniform4(-3.0..3.0f64), first in 0..4usize, second in 0..3usize,
        ) {
            let all: Vec<_> = axes.iter().copied().zip(0..).collect();
            let whole = Links::new(&all, 3, 1).unwrap();
            let full = (0..4).fold(Rotation3::identity(), |r, i| r * rotation(&axes[i], t[i]));
            let mut left: Vec<f64> = t.to_vec();
            let once = whole.hold(first, left.remove(first));
            let held = once.hold(second, left.remove(second));
            let moving = (0..2).fold(Rotation3::identity(), |r, i| r * rotation(&held.directions()[i], left[i]));
            prop_assert!((moving.matrix() * held.held - full.matrix()).norm() < 1e-13);
            for (before, after) in [(&whole.spindle, &held.spindle), (&whole.reference, &held.reference)] {
                prop_assert!((whole.pointing(before, &t) - held.pointing(after, &left)).norm() < 1e-13);
            }
        }
    }
}
