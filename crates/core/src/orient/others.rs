use std::f64::consts::FRAC_PI_2;

use nalgebra::{Matrix3, Rotation3, UnitQuaternion, Vector3};

use super::shell::{Allowed, Fit, exact, greatest_image, laue_rotations, nodes_with_d, turned};
use super::two::{triad, turn_between};
use super::{Orientation, Setup, TwoPeakOrientation};
use crate::crystal::{LATTICE_TOLERANCE, UnitCell, lattice_rotations};
use crate::frames::Hkl;

/// Two orientations closer than this, in degrees, are one: it is the order of reading errors, and takes up what a
/// rotation of the lattice within its tolerance of 0.017° can be out for peaks 10° from one line.
pub const SAME_ORIENTATION_DEG: f64 = 0.1;

/// At most this many pairs of nodes are compared with the observations.
const MOST_PAIRS: usize = 4_000_000;

/// At most this many distinct assignments are followed further.
const MOST_KEPT: usize = 400;

/// At most this many fitting pairs are looked at, the best ones.
const MOST_FITTING: usize = 20_000;

/// Other indices for the two peaks that fit the readings as well.
#[derive(Debug, Clone, PartialEq)]
pub struct OtherAssignment {
    /// Indices of the first and of the second peak.
    pub hkl: [Hkl; 2],
    /// The orientation that follows from them.
    pub orientation: Orientation,
    /// How they fit.
    pub fit: Fit,
}

/// Everything that fits the two peaks besides the indices that were given.
#[derive(Debug, Clone, PartialEq)]
pub struct OtherAssignments {
    /// How many rotations the Laue class has, the identity among them: assignments that differ by one of these are the
    /// same thing under another name and are not listed.
    pub laue_rotations: usize,
    /// Turned by a rotation of the lattice that the Laue class lacks: every node falls on a node, so that positions can
    /// never decide; only intensities can.
    pub only_intensities: Vec<OtherAssignment>,
    /// Those that a third reflection can tell from the given one; the best fit first. Of several that differ by a rotation
    /// of the lattice one is kept.
    pub by_position: Vec<OtherAssignment>,
    /// How far the search went.
    pub search: Search,
}

/// How far the search for other assignments went.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Search {
    /// Every pair of nodes with the observed d was compared.
    Complete,
    /// So many nodes have the observed d, within the uncertainties, that not every pair was followed.
    Cut,
}

/// Searches all pairs of nodes whose d and angle agree with the observations as well as the uncertainties allow.
///
/// Method: nodes in the two shells of d, the first up to the rotations of the Laue class; each pair that fits gives U' by
/// the same construction, and the turn V = U⁻¹U' is held against the rotations of the Laue class and of the lattice.
/// Limitation: at most 4 million pairs are compared; where there are more, the nodes with the best d.
pub(super) fn find_others(setup: &Setup, pair: &TwoPeakOrientation) -> OtherAssignments {
    let given = [pair.first.hkl, pair.second.hkl];
    let allowed = Allowed::as_good_as_given(pair);
    let lattice = lattice_rotations(setup.cell, setup.group.centring(), LATTICE_TOLERANCE);
    let laue = laue_rotations(setup.group);
    let (fitting, search) = fitting_pairs(setup, pair, &allowed, &laue);
    let named = named_pairs(setup, given, &lattice);
    let mut sorter = Sorter::new(setup.cell, pair, &laue, &lattice);
    for hkl in named.into_iter().chain(fitting) {
        sorter.take(setup, pair, hkl);
    }
    let search = if sorter.full { Search::Cut } else { search };
    OtherAssignments {
        laue_rotations: laue.len(),
        only_intensities: sorter.only_intensities,
        by_position: sorter.by_position,
        search,
    }
}

/// The assignments that always fit, by name: both reversed, then both turned by rotations of the lattice, then both.
fn named_pairs(setup: &Setup, given: [Hkl; 2], lattice: &[Matrix3<f64>]) -> Vec<[Hkl; 2]> {
    let mut named = vec![given.map(|hkl| -hkl)];
    for sign in [1.0, -1.0] {
        let images = lattice.iter().skip(1).map(|m| given.map(|hkl| turned(&(m * sign), hkl)));
        named.extend(images.filter(|pair| !pair.iter().any(|&hkl| setup.group.absence(hkl).is_absent())));
    }
    named
}

/// Pairs from the two shells that fit, the best first.
fn fitting_pairs(
    setup: &Setup,
    pair: &TwoPeakOrientation,
    allowed: &Allowed,
    laue: &[Matrix3<f64>],
) -> (Vec<[Hkl; 2]>, Search) {
    let shell = |i: usize| nodes_with_d(setup, pair.d_angstrom[i].observed, allowed.d_angstrom[i]);
    let (Some(mut firsts), Some(mut seconds)) = (shell(0), shell(1)) else { return (Vec::new(), Search::Cut) };
    firsts.retain(|&hkl| greatest_image(laue, [hkl]) == [exact(hkl)]);
    let mut search = Search::Complete;
    if firsts.len().saturating_mul(seconds.len()) > MOST_PAIRS {
        search = Search::Cut;
        let side = (MOST_PAIRS as f64).sqrt() as usize;
        for (list, d) in [(&mut firsts, pair.d_angstrom[0].observed), (&mut seconds, pair.d_angstrom[1].observed)] {
            let off = |hkl: &Hkl| (setup.cell.d_spacing(*hkl) - d).abs();
            list.sort_by(|a, b| off(a).total_cmp(&off(b)));
            list.truncate(side);
        }
    }
    let direction = |hkl: &Hkl| setup.cell.node(*hkl).raw().normalize();
    let second_directions: Vec<Vector3<f64>> = seconds.iter().map(direction).collect();
    // A first look at the sine of the misfit, with room for its curvature, spares most of the arctangents.
    let (cosine, room) =
        (pair.angle_deg.observed.to_radians().cos(), allowed.angle_deg.to_radians().min(FRAC_PI_2) * 1.001 + 1e-9);
    let mut fitting = Vec::new();
    for h in &firsts {
        let u = direction(h);
        for (k, v) in seconds.iter().zip(&second_directions) {
            if (u.dot(v) - cosine).abs() <= room {
                let fit = Fit::of(setup, pair, [*h, *k]);
                if fit.within(allowed) {
                    fitting.push((fit.rank(), [*h, *k]));
                }
            }
        }
    }
    fitting.sort_by_key(|(rank, _)| *rank);
    if fitting.len() > MOST_FITTING {
        search = Search::Cut;
        fitting.truncate(MOST_FITTING);
    }
    (fitting.into_iter().map(|(_, hkl)| hkl).collect(), search)
}

/// Sorts assignments by what their turn against the given one is.
struct Sorter {
    laue: Vec<UnitQuaternion<f64>>,
    lattice: Vec<UnitQuaternion<f64>>,
    head_triad: Matrix3<f64>,
    crystal_from_head: Rotation3<f64>,
    only_intensities: Vec<OtherAssignment>,
    by_position: Vec<OtherAssignment>,
    intensity_turns: Vec<UnitQuaternion<f64>>,
    position_turns: Vec<UnitQuaternion<f64>>,
    full: bool,
}

impl Sorter {
    fn new(cell: &UnitCell, pair: &TwoPeakOrientation, laue: &[Matrix3<f64>], lattice: &[Matrix3<f64>]) -> Self {
        let u = Rotation3::from_matrix_unchecked(*pair.orientation.head_from_crystal.matrix());
        Self {
            laue: laue.iter().filter_map(|m| turn_of(cell, m)).collect(),
            // A cell that keeps its group's constraints only roughly may lack rotations of its own Laue class.
            lattice: lattice.iter().chain(laue).filter_map(|m| turn_of(cell, m)).collect(),
            head_triad: triad(&pair.first.direction(), &pair.second.direction()),
            crystal_from_head: u.inverse(),
            only_intensities: Vec::new(),
            by_position: Vec::new(),
            intensity_turns: vec![UnitQuaternion::identity()],
            position_turns: Vec::new(),
            full: false,
        }
    }

    fn take(&mut self, setup: &Setup, pair: &TwoPeakOrientation, hkl: [Hkl; 2]) {
        let angle = setup.cell.angle_between(hkl[0], hkl[1]);
        if angle.sin() < 1e-6 {
            return;
        }
        let head_from_crystal = turn_between(setup.cell, (hkl[0], hkl[1]), &self.head_triad);
        let u = Rotation3::from_matrix_unchecked(*head_from_crystal.matrix());
        let turn = UnitQuaternion::from_rotation_matrix(&(self.crystal_from_head * u));
        let assignment = || OtherAssignment {
            hkl,
            orientation: Orientation::new(head_from_crystal, setup.cell, false),
            fit: Fit::of(setup, pair, hkl),
        };
        if equal_up_to(&turn, &UnitQuaternion::identity(), &self.lattice) {
            if !self.intensity_turns.iter().any(|known| equal_up_to(&turn, known, &self.laue)) {
                self.only_intensities.push(assignment());
                self.intensity_turns.push(turn);
            }
        } else if !self.position_turns.iter().any(|known| equal_up_to(&turn, known, &self.lattice)) {
            if self.position_turns.len() >= MOST_KEPT {
                self.full = true;
                return;
            }
            self.by_position.push(assignment());
            self.position_turns.push(turn);
        }
    }
}

/// The rotation in the crystal Cartesian frame that is nearest to a rotation of indices.
fn turn_of(cell: &UnitCell, m: &Matrix3<f64>) -> Option<UnitQuaternion<f64>> {
    let b = cell.b_matrix();
    let cartesian = b * m * b.try_inverse()?;
    let svd = cartesian.svd(true, true);
    let nearest = svd.u? * svd.v_t?;
    Some(UnitQuaternion::from_rotation_matrix(&Rotation3::from_matrix_unchecked(nearest)))
}

/// Whether two turns differ by one of a group's rotations, turning the crystal first.
fn equal_up_to(a: &UnitQuaternion<f64>, b: &UnitQuaternion<f64>, group: &[UnitQuaternion<f64>]) -> bool {
    let least = (0.5 * SAME_ORIENTATION_DEG.to_radians()).cos();
    group.iter().any(|g| (b * g).coords.dot(&a.coords).abs() >= least)
}
