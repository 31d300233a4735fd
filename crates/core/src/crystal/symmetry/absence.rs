//! Systematic absences, from the operations themselves.
//!
//! An operation (R, t) with h R = h multiplies the structure factor by exp(2πi h·t); if h·t is no whole number the factor
//! can only be zero (International Tables B, chapter 1.4).

use super::describe::order;
use super::generate::Operations;
use super::group::SpaceGroup;
use super::operation::{IDENTITY, Operation, TRANSLATION_STEPS, row_times};
use crate::frames::Hkl;

/// Whether symmetry lets a node diffract.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Presence {
    /// No operation forbids it.
    Allowed,
    /// The structure factor vanishes because of this operation: an index into [`SpaceGroup::operations`].
    Absent {
        /// The index.
        operation: u16,
    },
    /// The indices are no whole numbers: no node of this lattice, and so nothing symmetry speaks of.
    NotANode,
}

impl Presence {
    /// Whether the structure factor vanishes by symmetry.
    pub fn is_absent(self) -> bool {
        matches!(self, Self::Absent { .. })
    }
}

/// The test of one group, with all that does not depend on the node done once. Fit for millions of nodes.
#[derive(Debug, Clone, PartialEq)]
pub struct AbsenceTest {
    conditions: Vec<Condition>,
}

/// h·t must be whole for the h that (R − 1) takes to zero.
#[derive(Debug, Clone, PartialEq)]
struct Condition {
    moves: [[i32; 3]; 3],
    steps: [i64; 3],
    operation: u16,
}

impl AbsenceTest {
    pub(super) fn new(operations: &Operations) -> Self {
        let all = operations.all.iter().enumerate();
        let (lattice, others): (Vec<_>, Vec<_>) = all.skip(1).partition(|(i, _)| *i < operations.translations);
        // Once the lattice lets a node pass, all operations with the same R say the same: one of each is enough.
        let mut others: Vec<_> =
            others.into_iter().filter(|(i, op)| i % operations.translations == 0 && forbids_something(op)).collect();
        // Glide planes are the plainer reason, then screw axes of the highest order.
        others.sort_by_key(|(_, op)| match (op.determinant(), order(&op.rotation())) {
            (-1, _) => 0,
            (_, fold) => 10 - fold,
        });
        let conditions = lattice
            .into_iter()
            .chain(others)
            .filter_map(|(i, op)| {
                let mut moves = op.rotation();
                for (row, unit) in moves.iter_mut().zip(IDENTITY) {
                    for (x, one) in row.iter_mut().zip(unit) {
                        *x -= one;
                    }
                }
                Some(Condition { moves, steps: op.translation().map(i64::from), operation: u16::try_from(i).ok()? })
            })
            .collect();
        Self { conditions }
    }

    /// Whether symmetry lets the node with these whole indices diffract.
    pub fn test(&self, hkl: [i32; 3]) -> Presence {
        let h = hkl.map(i64::from);
        for condition in &self.conditions {
            let stays = row_times(h, &condition.moves) == [0; 3];
            let [x, y, z] = condition.steps;
            if stays && (h[0] * x + h[1] * y + h[2] * z) % i64::from(TRANSLATION_STEPS) != 0 {
                return Presence::Absent { operation: condition.operation };
            }
        }
        Presence::Allowed
    }
}

/// Whether any h with h R = h has a broken h·t: only if the intrinsic part of t, n w = (1 + R + … + Rⁿ⁻¹) t, is not zero.
fn forbids_something(op: &Operation) -> bool {
    let fold = order(&op.rotation());
    let mut power = Operation::identity();
    let mut total = [0; 3];
    for _ in 0..fold {
        for (sum, row) in total.iter_mut().zip(power.rotation()) {
            *sum += super::operation::dot(row, op.translation());
        }
        power = Operation::new(super::operation::product(&power.rotation(), &op.rotation()), [0; 3]);
    }
    total != [0; 3]
}

impl SpaceGroup {
    /// Whether symmetry lets a node diffract; lattice translations are asked first, then glide planes, then screw axes.
    pub fn absence(&self, hkl: Hkl) -> Presence {
        hkl.as_integers().map_or(Presence::NotANode, |whole| self.absences.test(whole))
    }

    /// The test behind [`Self::absence`], for many nodes.
    pub fn absence_test(&self) -> &AbsenceTest {
        &self.absences
    }

    /// The operation behind an absence, in words; empty for a node that is not absent.
    pub fn reason(&self, presence: Presence) -> String {
        match presence {
            Presence::Absent { operation } => {
                self.operations().get(usize::from(operation)).map(Operation::in_words).unwrap_or_default()
            }
            Presence::Allowed | Presence::NotANode => String::new(),
        }
    }
}
