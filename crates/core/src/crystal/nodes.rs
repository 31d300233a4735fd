//! Every node of the reciprocal lattice between two spacings, in columns.

use nalgebra::Matrix3;
use rayon::prelude::*;

use super::{Presence, SpaceGroup, UnitCell};
use crate::pace::Pace;
use crate::quantity::{Length, QuantityError};

/// Spacings from `d_min` to `d_max` in Å, both ends included.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct DRange {
    d_min: f64,
    d_max: f64,
}

/// Why nodes could not be generated.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum NodesError {
    /// A limit is no spacing.
    #[error(transparent)]
    Quantity(#[from] QuantityError),
    /// The limits stand the wrong way round.
    #[error("the smallest spacing {d_min} Å is above the largest, {d_max} Å")]
    WrongWayRound {
        /// Smallest spacing in Å.
        d_min: f64,
        /// Largest spacing in Å.
        d_max: f64,
    },
    /// More nodes than a computer should be asked to hold.
    #[error(
        "down to d = {d_min} Å a cell of {volume:.0} Å³ has about {estimate:.2e} nodes (4/3 π V/d³); at most {MOST_NODES:.0e} \
         are listed, here down to about d = {within:.3} Å"
    )]
    TooMany {
        /// Smallest spacing in Å that was asked for.
        d_min: f64,
        /// Cell volume in Å³.
        volume: f64,
        /// About how many nodes that would be.
        estimate: f64,
        /// The spacing in Å down to which the list would be allowed.
        within: f64,
    },
}

/// At most about this many nodes are generated: some 1 GB at the moment when the sorted nodes become columns.
pub const MOST_NODES: f64 = 2.0e7;

/// A spacing that misses a limit by no more than this fraction is within: limits are often the spacing of a node, and
/// rounding must not drop it, nor one half of its equivalents.
pub const D_EDGE: f64 = 1e-9;

/// Spacings that differ by no more than this fraction are one: the rounding of equivalent nodes, far below any spacing
/// that a measurement could tell apart.
const SAME_D: f64 = 1e-12;

impl DRange {
    /// From `d_min` to `d_max` in Å.
    ///
    /// # Errors
    /// If a limit is no length, or if they stand the wrong way round.
    pub fn new(d_min: f64, d_max: f64) -> Result<Self, NodesError> {
        Length::new(d_min)?;
        Length::new(d_max)?;
        if d_min > d_max {
            return Err(NodesError::WrongWayRound { d_min, d_max });
        }
        Ok(Self { d_min, d_max })
    }

    /// Every spacing down to `d_min` in Å.
    ///
    /// # Errors
    /// If the limit is no length.
    pub fn down_to(d_min: f64) -> Result<Self, NodesError> {
        Length::new(d_min)?;
        Ok(Self { d_min, d_max: f64::INFINITY })
    }

    /// Smallest spacing in Å.
    pub fn d_min(&self) -> f64 {
        self.d_min
    }

    /// Largest spacing in Å; infinite if there is no such limit.
    pub fn d_max(&self) -> f64 {
        self.d_max
    }

    /// Whether a spacing in Å lies within, the edges included.
    pub fn contains(&self, d: f64) -> bool {
        d >= self.d_min * (1.0 - D_EDGE) && d <= self.d_max * (1.0 + D_EDGE)
    }
}

/// What becomes of nodes that symmetry forbids.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum AbsentNodes {
    /// They are listed, with the operation.
    Keep,
    /// They are left out.
    Skip,
}

/// Nodes as a struct of arrays; row i of each column belongs to the same node.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct NodeColumns {
    /// Indices.
    pub hkl: Vec<[i32; 3]>,
    /// Spacing in Å.
    pub d_angstrom: Vec<f64>,
    /// What symmetry says.
    pub presence: Vec<Presence>,
}

impl NodeColumns {
    /// The number of rows.
    pub fn len(&self) -> usize {
        self.hkl.len()
    }

    /// Whether there is no row.
    pub fn is_empty(&self) -> bool {
        self.hkl.is_empty()
    }
}

/// How the generation ended.
#[derive(Debug, Clone, PartialEq)]
pub enum NodesOutcome {
    /// Every node is there.
    Complete(NodeColumns),
    /// The pace said stop; nothing is kept, because a part of the nodes would look like all of them.
    Stopped,
}

/// Every node with a spacing in `range`, each once, 0 0 0 never. Rows run from the largest spacing to the smallest; among
/// equal spacings by h, then k, then l, from the largest down, so that 1 0 0 stands before -1 0 0.
///
/// Method: B is upper triangular, so l is bounded by the component along c alone, k by two components once l is fixed,
/// and h by all three; each range is exact and nothing outside the sphere is visited (Fincke & Pohst 1985, Math. Comp.
/// 44, 463).
///
/// # Errors
/// If more than about [`MOST_NODES`] would come.
pub fn nodes(
    cell: &UnitCell,
    group: &SpaceGroup,
    range: DRange,
    absent: AbsentNodes,
    pace: &dyn Pace,
) -> Result<NodesOutcome, NodesError> {
    let estimate = sphere(cell.volume() / range.d_min.powi(3)) - sphere(cell.volume() / range.d_max.powi(3));
    // The whole sphere is walked through, so it counts even where a thin shell is asked for.
    if sphere(cell.volume() / range.d_min.powi(3)) > MOST_NODES {
        let within = (sphere(cell.volume()) / MOST_NODES).cbrt();
        return Err(NodesError::TooMany { d_min: range.d_min, volume: cell.volume(), estimate, within });
    }
    let walk = Walk { b: *cell.b_matrix(), range, group, absent };
    let last = walk.largest_l();
    let planes = 2 * last as usize + 1;
    let mut found = Vec::with_capacity(estimate as usize + 64);
    for (done, l) in (-last..=last).enumerate() {
        if !pace.proceed(done, planes) {
            return Ok(NodesOutcome::Stopped);
        }
        walk.plane(l, &mut found);
    }
    put_in_order(&mut found);
    if !pace.proceed(planes, planes) {
        return Ok(NodesOutcome::Stopped);
    }
    Ok(NodesOutcome::Complete(into_columns(&found)))
}

fn sphere(radius_cubed: f64) -> f64 {
    4.0 / 3.0 * std::f64::consts::PI * radius_cubed
}

struct Found {
    d: f64,
    hkl: [i32; 3],
    presence: Presence,
}

struct Walk<'a> {
    b: Matrix3<f64>,
    range: DRange,
    group: &'a SpaceGroup,
    absent: AbsentNodes,
}

/// Widens the ranges of indices a little; every node is then tested on its spacing. In units of an index.
const INDEX_SLACK: f64 = 1e-6;

impl Walk<'_> {
    /// 1/d_min², a little more than that.
    fn largest_square(&self) -> f64 {
        (1.0 + 4.0 * D_EDGE) / (self.range.d_min * self.range.d_min)
    }

    fn largest_l(&self) -> i32 {
        (self.largest_square().sqrt() / self.b[(2, 2)] + INDEX_SLACK).floor() as i32
    }

    /// All nodes with this l.
    fn plane(&self, l: i32, found: &mut Vec<Found>) {
        let b = &self.b;
        let z = b[(2, 2)] * f64::from(l);
        let left = self.largest_square() - z * z;
        let y_of_l = b[(1, 2)] * f64::from(l);
        for k in indices(y_of_l, b[(1, 1)], left) {
            let y = y_of_l + b[(1, 1)] * f64::from(k);
            let x_of_kl = b[(0, 1)] * f64::from(k) + b[(0, 2)] * f64::from(l);
            for h in indices(x_of_kl, b[(0, 0)], left - y * y) {
                let x = x_of_kl + b[(0, 0)] * f64::from(h);
                let square = x * x + y * y + z * z;
                let d = 1.0 / square.sqrt();
                if [h, k, l] == [0; 3] || !self.range.contains(d) {
                    continue;
                }
                let presence = self.group.absence_test().test([h, k, l]);
                if self.absent == AbsentNodes::Keep || !presence.is_absent() {
                    found.push(Found { d, hkl: [h, k, l], presence });
                }
            }
        }
    }
}

/// The whole n with (start + step n)² ≤ square, give or take [`INDEX_SLACK`].
fn indices(start: f64, step: f64, square: f64) -> std::ops::RangeInclusive<i32> {
    let half = square.max(0.0).sqrt();
    let first = ((-half - start) / step - INDEX_SLACK).ceil() as i32;
    let last = ((half - start) / step + INDEX_SLACK).floor() as i32;
    first..=last
}

/// Sorts by spacing, finds the runs of nodes that differ only by rounding, gives each run one spacing and sorts it by
/// indices.
fn put_in_order(found: &mut [Found]) {
    found.par_sort_unstable_by(|a, b| b.d.total_cmp(&a.d));
    let same = |first: &Found, next: &Found| first.d - next.d <= SAME_D * first.d;
    let mut rest = found;
    while let Some(first) = rest.first() {
        let d = first.d;
        let length = rest.iter().position(|next| !same(first, next)).unwrap_or(rest.len());
        let (run, after) = rest.split_at_mut(length);
        run.iter_mut().for_each(|node| node.d = d);
        run.sort_unstable_by_key(|node| std::cmp::Reverse(node.hkl));
        rest = after;
    }
}

fn into_columns(found: &[Found]) -> NodeColumns {
    NodeColumns {
        hkl: found.iter().map(|node| node.hkl).collect(),
        d_angstrom: found.iter().map(|node| node.d).collect(),
        presence: found.iter().map(|node| node.presence).collect(),
    }
}

#[cfg(test)]
mod tests;
