//! Nodes with a given d, and how well two of them fit two observations.

use nalgebra::Matrix3;

use super::{ALLOWED_SIGMAS, Setup, TwoPeakOrientation};
use crate::crystal::{AbsentNodes, DRange, NodesOutcome, SpaceGroup, nodes};
use crate::frames::Hkl;
use crate::pace::Unhurried;

/// By how much angle and d may be out.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Allowed {
    pub angle_deg: f64,
    pub d_angstrom: [f64; 2],
}

impl Allowed {
    /// What the readings' uncertainties allow.
    pub fn by_uncertainty(pair: &TwoPeakOrientation) -> Self {
        let [first, second] = pair.d_angstrom;
        Self {
            angle_deg: ALLOWED_SIGMAS * pair.angle_deg.sigma + 1e-9,
            d_angstrom: [first, second].map(|d| ALLOWED_SIGMAS * d.sigma + 1e-9),
        }
    }

    /// The same, but never less than what the indices that were given need: whatever fits as well as they do is within.
    pub fn as_good_as_given(pair: &TwoPeakOrientation) -> Self {
        let bare = Self::by_uncertainty(pair);
        let [first, second] = pair.d_angstrom;
        Self {
            angle_deg: bare.angle_deg.max(pair.angle_deg.misfit().abs() + 1e-6),
            d_angstrom: [
                bare.d_angstrom[0].max(first.misfit().abs() + 1e-6),
                bare.d_angstrom[1].max(second.misfit().abs() + 1e-6),
            ],
        }
    }
}

/// How a pair of indices fits the two observations: observed minus calculated.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Fit {
    /// Misfit of the angle in degrees.
    pub angle_deg: f64,
    /// Misfit of each d in Å.
    pub d_angstrom: [f64; 2],
    /// Sum of the squares of the three, each in units of its standard uncertainty.
    pub chi_square: f64,
}

impl Fit {
    pub(super) fn of(setup: &Setup, pair: &TwoPeakOrientation, [first, second]: [Hkl; 2]) -> Self {
        let angle_deg = pair.angle_deg.observed - setup.cell.angle_between(first, second).to_degrees();
        let d_angstrom = [
            pair.d_angstrom[0].observed - setup.cell.d_spacing(first),
            pair.d_angstrom[1].observed - setup.cell.d_spacing(second),
        ];
        let in_units = |misfit: f64, sigma: f64| (misfit / sigma.max(1e-12)).powi(2);
        let chi_square = in_units(angle_deg, pair.angle_deg.sigma)
            + in_units(d_angstrom[0], pair.d_angstrom[0].sigma)
            + in_units(d_angstrom[1], pair.d_angstrom[1].sigma);
        Self { angle_deg, d_angstrom, chi_square }
    }

    /// Smaller is better; fits that differ only by rounding rank the same.
    pub(super) fn rank(&self) -> u64 {
        (self.chi_square * 1e6).round() as u64
    }

    pub(super) fn within(&self, allowed: &Allowed) -> bool {
        self.angle_deg.abs() <= allowed.angle_deg
            && self.d_angstrom[0].abs() <= allowed.d_angstrom[0]
            && self.d_angstrom[1].abs() <= allowed.d_angstrom[1]
    }
}

/// Every node that symmetry allows with d within `allowed` of `d`, in Å; largest d first. Nothing if the lattice is so dense
/// that its nodes cannot be listed down there.
pub(super) fn nodes_with_d(setup: &Setup, d: f64, allowed: f64) -> Option<Vec<Hkl>> {
    let range = DRange::new((d - allowed).max(0.5 * d), d + allowed).ok()?;
    match nodes(setup.cell, setup.group, range, AbsentNodes::Skip, &Unhurried).ok()? {
        NodesOutcome::Complete(found) => Some(found.hkl.into_iter().map(Hkl::from).collect()),
        NodesOutcome::Stopped => None,
    }
}

/// The proper rotations of the Laue class, to be multiplied onto columns of indices; the identity first.
pub(super) fn laue_rotations(group: &SpaceGroup) -> Vec<Matrix3<f64>> {
    let from_rows = |r: [[i32; 3]; 3]| Matrix3::from_fn(|i, j| f64::from(r[i][j]));
    group.proper_laue_rotations().into_iter().map(from_rows).collect()
}

/// Indices as whole millionths, so that they can be compared and ordered.
pub(super) fn exact(hkl: Hkl) -> [i64; 3] {
    [hkl.h, hkl.k, hkl.l].map(|x| (x * 1e6).round() as i64)
}

/// The greatest of the images of several indices under rotations turning all of them at once: the same for all that
/// these rotations make equal.
pub(super) fn greatest_image<const N: usize>(rotations: &[Matrix3<f64>], of: [Hkl; N]) -> [[i64; 3]; N] {
    let image = |m: &Matrix3<f64>| of.map(|hkl| exact(turned(m, hkl)));
    rotations.iter().map(image).max().unwrap_or_else(|| of.map(exact))
}

pub(super) fn turned(m: &Matrix3<f64>, hkl: Hkl) -> Hkl {
    Hkl::from_vector(&(m * hkl.to_vector()))
}
