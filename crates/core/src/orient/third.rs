use nalgebra::Vector3;

use super::near::{Miss, nearest, nearest_within};
use super::{ALLOWED_SIGMAS, OtherAssignment, Setup, TwoPeakOrientation};
use crate::crystal::{AbsentNodes, DRange, NodesOutcome, nodes};
use crate::frames::{Head, Hkl, Vector};
use crate::pace::Unhurried;

/// A third peak proves something only if it is out of the plane of the first two by at least this many degrees.
pub const LEAST_OUT_OF_PLANE_DEG: f64 = 10.0;

/// A reflection decides only if no node of another assignment lies within this many degrees of where it is predicted: a
/// peak, with the search for it, is some tenths of a degree wide (common practice, no source).
pub const LEAST_MISS_DEG: f64 = 0.5;

/// The factor by which a miss must exceed what uncertainties allow.
pub const MISS_MARGIN: f64 = 2.0;

/// Reachable candidates that are tried, lowest order first.
const MOST_CANDIDATES: usize = 400;

/// About how many nodes are looked through for candidates.
const MOST_NODES_SEARCHED: f64 = 6000.0;

/// A reflection that tells assignments apart by where it lies.
#[derive(Debug, Clone, PartialEq)]
pub struct DecidingReflection {
    /// Its indices.
    pub hkl: Hkl,
    /// Its d in Å.
    pub d_angstrom: f64,
    /// Its 2θ in degrees.
    pub two_theta_deg: f64,
    /// How far it is out of the plane of the two peaks, in degrees.
    pub out_of_plane_deg: f64,
    /// Standard uncertainty in degrees of the direction in which it is predicted.
    pub predicted_sigma_deg: f64,
    /// How many of the other assignments it rules out when it is found where it is predicted.
    pub decides: usize,
    /// How many are to be ruled out.
    pub of: usize,
    /// The one of those it rules out that comes closest: the indices that it gives to the two peaks, and by how much its
    /// nearest node misses the place. Nothing where no other assignment is left to rule out.
    pub closest: Option<([Hkl; 2], Miss)>,
}

/// What to measure next.
#[derive(Debug, Clone, PartialEq)]
pub enum Third {
    /// This reflection decides, or decides most.
    Measure(DecidingReflection),
    /// No reachable reflection out of the plane tells any of them apart.
    NoneFound {
        /// Down to which d was searched, in Å.
        down_to_d_angstrom: f64,
        /// How many reachable reflections out of the plane were tried.
        tried: usize,
        /// By how many degrees, at least, a node must miss to decide.
        needed_deg: f64,
    },
}

/// Finds the reachable reflection of lowest order, out of the plane and allowed by symmetry, whose predicted place no node
/// of any other assignment comes near; else the one that rules out most of them.
pub(super) fn find_third(
    setup: &Setup,
    pair: &TwoPeakOrientation,
    others: &[&OtherAssignment],
    reachable: &dyn Fn(Vector<Head>) -> bool,
) -> Third {
    let down_to = lowest_d(setup);
    let range = DRange::down_to(down_to);
    let candidates = match range.map(|range| nodes(setup.cell, setup.group, range, AbsentNodes::Skip, &Unhurried)) {
        Ok(Ok(NodesOutcome::Complete(found))) => found.hkl,
        _ => Vec::new(),
    };
    let reading_deg = pair.first.readings.deg.max(pair.second.readings.deg);
    let mut none = NoneFound { down_to, tried: 0, needed_deg: LEAST_MISS_DEG };
    let mut best: Option<(usize, Candidate)> = None;
    for hkl in candidates.into_iter().map(Hkl::from) {
        let q = pair.orientation.q_in_head(hkl);
        let out_of_plane_deg = out_of_plane_deg(pair, &q);
        if out_of_plane_deg < LEAST_OUT_OF_PLANE_DEG || !reachable(q) {
            continue;
        }
        none.tried += 1;
        let predicted_sigma_deg = predicted_sigma_deg(pair, &q);
        let sigma = predicted_sigma_deg.hypot(reading_deg);
        let needed_deg = LEAST_MISS_DEG.max(MISS_MARGIN * ALLOWED_SIGMAS * sigma);
        none.needed_deg = none.needed_deg.max(needed_deg);
        let candidate = Candidate { hkl, q, out_of_plane_deg, predicted_sigma_deg, needed_deg };
        let decides = others.iter().filter(|other| candidate.rules_out(setup, other)).count();
        if decides == others.len() {
            return Third::Measure(candidate.describe(setup, others));
        }
        if decides > best.as_ref().map_or(0, |(most, _)| *most) {
            best = Some((decides, candidate));
        }
        if none.tried == MOST_CANDIDATES {
            none.down_to = setup.cell.d_spacing(hkl);
            break;
        }
    }
    match best {
        Some((_, candidate)) => Third::Measure(candidate.describe(setup, others)),
        None => Third::NoneFound { down_to_d_angstrom: none.down_to, tried: none.tried, needed_deg: none.needed_deg },
    }
}

struct NoneFound {
    down_to: f64,
    tried: usize,
    needed_deg: f64,
}

struct Candidate {
    hkl: Hkl,
    q: Vector<Head>,
    out_of_plane_deg: f64,
    predicted_sigma_deg: f64,
    needed_deg: f64,
}

impl Candidate {
    fn rules_out(&self, setup: &Setup, other: &OtherAssignment) -> bool {
        nearest_within(setup, &place_in(other, &self.q), self.needed_deg).is_none()
    }

    fn describe(&self, setup: &Setup, others: &[&OtherAssignment]) -> DecidingReflection {
        let ruled_out: Vec<_> = others.iter().filter(|other| self.rules_out(setup, other)).collect();
        let misses = ruled_out.iter().map(|other| (other.hkl, nearest(setup, &place_in(other, &self.q))));
        let closest = misses.min_by(|(_, a), (_, b)| a.at_least_deg().total_cmp(&b.at_least_deg()));
        let d_angstrom = setup.cell.d_spacing(self.hkl);
        let sin_theta = (0.5 * setup.wavelength_angstrom() / d_angstrom).min(1.0);
        DecidingReflection {
            hkl: self.hkl,
            d_angstrom,
            two_theta_deg: 2.0 * sin_theta.asin().to_degrees(),
            out_of_plane_deg: self.out_of_plane_deg,
            predicted_sigma_deg: self.predicted_sigma_deg,
            decides: ruled_out.len(),
            of: others.len(),
            closest,
        }
    }
}

/// A place in the head frame as another assignment sees it: in the crystal Cartesian frame of that one.
pub(super) fn place_in(other: &OtherAssignment, q: &Vector<Head>) -> Vector3<f64> {
    *(other.orientation.head_from_crystal.inverse() * *q).raw()
}

/// How far a vector is out of the plane of the two peaks, in degrees, 0 to 90.
pub(super) fn out_of_plane_deg(pair: &TwoPeakOrientation, q: &Vector<Head>) -> f64 {
    let (u, v) = (pair.first.direction(), pair.second.direction());
    let normal = u.cross(&v).normalize();
    let along = q.raw().dot(&normal);
    along.abs().atan2((q.raw() - normal * along).norm()).to_degrees()
}

/// Standard uncertainty in degrees of a predicted direction, along the worse of the two directions across it.
pub(super) fn predicted_sigma_deg(pair: &TwoPeakOrientation, q: &Vector<Head>) -> f64 {
    let covariance = pair.predicted_covariance(&q.raw().normalize());
    covariance.symmetric_eigenvalues().max().max(0.0).sqrt().to_degrees()
}

/// The smallest d in Å that can diffract, or the one down to which there are not too many nodes.
fn lowest_d(setup: &Setup) -> f64 {
    let crowded = (4.0 / 3.0 * std::f64::consts::PI * setup.cell.volume() / MOST_NODES_SEARCHED).cbrt();
    crowded.max(0.5 * setup.wavelength_angstrom()).clamp(0.1, 1.0e4)
}
