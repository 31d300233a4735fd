use super::near::nearest_within;
use super::third::{LEAST_OUT_OF_PLANE_DEG, MISS_MARGIN, find_third, out_of_plane_deg, place_in};
use super::two::check_sphere;
use super::{
    ALLOWED_SIGMAS, Compared, Observation, OrientError, OtherAssignment, OtherAssignments, Peak, Search, Setup, Third,
    TwoPeakOrientation,
};
use crate::frames::{Head, Hkl, Vector};

/// A third or later peak, held against the orientation from the first two.
#[derive(Debug, Clone, PartialEq)]
pub struct LaterPeak {
    /// Its position among the peaks that were given, counted from 0.
    pub index: usize,
    /// What was seen.
    pub observation: Observation,
    /// The angle in degrees between the observed and the predicted direction (calculated: 0), with the standard
    /// uncertainty along that misfit, U's included.
    pub direction_deg: Compared,
    /// d in Å.
    pub d_angstrom: Compared,
    /// How far it is out of the plane of the first two, in degrees.
    pub out_of_plane_deg: f64,
    /// Standard uncertainty in degrees of observed and predicted direction together, along the worse direction.
    pub sigma_deg: f64,
}

impl LaterPeak {
    /// Whether direction and d agree within the uncertainties.
    pub fn agrees(&self) -> bool {
        self.direction_deg.agrees() && self.d_angstrom.agrees()
    }

    /// Whether it is far enough out of the plane of the first two to prove anything.
    pub fn is_out_of_plane(&self) -> bool {
        self.out_of_plane_deg >= LEAST_OUT_OF_PLANE_DEG
    }

    pub(super) fn of(setup: &Setup, pair: &TwoPeakOrientation, index: usize, peak: &Peak) -> Result<Self, OrientError> {
        check_sphere(setup.cell, setup.wavelength_angstrom(), peak.hkl())?;
        let observation = Observation::of(peak, setup.instrument, setup.wavelength_angstrom())?;
        let predicted = pair.orientation.q_in_head(peak.hkl()).raw().normalize();
        let observed = observation.direction();
        let covariance = observation.direction_covariance() + pair.predicted_covariance(&predicted);
        let worst = covariance.symmetric_eigenvalues().max().max(0.0).sqrt();
        let off = observed - predicted;
        let along = off.try_normalize(1e-12).map_or(worst, |e| e.dot(&(covariance * e)).max(0.0).sqrt());
        let angle = crate::frames::angle_between(&observed, &predicted);
        Ok(Self {
            index,
            direction_deg: Compared { observed: angle.to_degrees(), sigma: along.to_degrees(), calculated: 0.0 },
            d_angstrom: Compared {
                observed: observation.d_angstrom,
                sigma: observation.d_sigma_angstrom,
                calculated: setup.cell.d_spacing(peak.hkl()),
            },
            out_of_plane_deg: out_of_plane_deg(pair, &observation.q_in_head),
            sigma_deg: worst.to_degrees(),
            observation,
        })
    }

    /// Whether another assignment has no node where this peak was found.
    fn rules_out(&self, setup: &Setup, other: &OtherAssignment) -> bool {
        let window_deg = MISS_MARGIN * ALLOWED_SIGMAS * self.sigma_deg;
        nearest_within(setup, &place_in(other, &self.observation.q_in_head), window_deg).is_none()
    }
}

/// Whether anything besides the two peaks themselves speaks for the orientation.
#[derive(Debug, Clone, PartialEq)]
pub enum Confirmation {
    /// Later peaks out of the plane agree and leave no other assignment that positions can rule out.
    Confirmed {
        /// Their positions among the peaks, counted from 0.
        by: Vec<usize>,
        /// Other assignments so alike that no reachable reflection tells them apart with readings of this accuracy.
        too_alike: usize,
    },
    /// Not yet.
    Unconfirmed {
        /// What is missing.
        because: Doubt,
        /// What to measure next.
        next: Third,
    },
}

impl Confirmation {
    /// Whether it is confirmed.
    pub fn is_confirmed(&self) -> bool {
        matches!(self, Self::Confirmed { .. })
    }
}

/// Why an orientation is not confirmed.
#[derive(Debug, Clone, PartialEq)]
pub enum Doubt {
    /// The two peaks do not agree with their own indices.
    PairDisagrees,
    /// There are only the two.
    NoThirdPeak,
    /// Later peaks agree but lie in, or nearly in, the plane of the first two.
    AllInPlane,
    /// Later peaks disagree; their positions among the peaks, counted from 0.
    Contradicted(Vec<usize>),
    /// Later peaks agree, but so many nodes fit the first two that the search for other assignments was cut short.
    NotAllCompared,
    /// Later peaks agree, but other assignments explain them too.
    OthersLeft {
        /// The indices that each of these gives to the first two peaks.
        assignments: Vec<[Hkl; 2]>,
    },
}

/// Weighs the later peaks.
pub(super) fn weigh(
    setup: &Setup,
    pair: &TwoPeakOrientation,
    others: &OtherAssignments,
    later: &[LaterPeak],
    reachable: &dyn Fn(Vector<Head>) -> bool,
) -> Confirmation {
    let mut left: Vec<&OtherAssignment> = others.by_position.iter().collect();
    let mut by = Vec::new();
    for peak in later.iter().filter(|peak| peak.agrees() && peak.is_out_of_plane()) {
        let before = left.len();
        left.retain(|other| !peak.rules_out(setup, other));
        if by.is_empty() || left.len() < before {
            by.push(peak.index);
        }
    }
    let disagreeing: Vec<usize> = later.iter().filter(|peak| !peak.agrees()).map(|peak| peak.index).collect();
    let next = || find_third(setup, pair, &left, reachable);
    let because = if !pair.agrees() {
        Doubt::PairDisagrees
    } else if !disagreeing.is_empty() {
        Doubt::Contradicted(disagreeing)
    } else if later.is_empty() {
        Doubt::NoThirdPeak
    } else if by.is_empty() {
        Doubt::AllInPlane
    } else if others.search == Search::Cut {
        Doubt::NotAllCompared
    } else if left.is_empty() {
        return Confirmation::Confirmed { by, too_alike: 0 };
    } else {
        let next = next();
        if matches!(next, Third::NoneFound { tried: 1.., .. }) {
            return Confirmation::Confirmed { by, too_alike: left.len() };
        }
        let assignments = left.iter().map(|other| other.hkl).collect();
        return Confirmation::Unconfirmed { because: Doubt::OthersLeft { assignments }, next };
    };
    Confirmation::Unconfirmed { because, next: next() }
}
