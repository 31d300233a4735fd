use nalgebra::Matrix3;

use crate::frames::{Hkl, Vector};
use crate::instrument::{Instrument, LIMIT_DUST_DEG, Setting};

/// How far the direction of R U B h may lie from Q, and 2θ from its due value, unless someone says otherwise.
pub const DEFAULT_TOLERANCE_DEG: f64 = 0.01;

/// A unit of the last decimal that lists are written with, in degrees: what rounding may do to an axis at rest.
const LAST_DECIMAL_DEG: f64 = 1e-4;

/// Proves or rejects rows of a drive list against one orientation, wavelength and machine, by the forward equation
/// R U B h = Q with the readings as they are written. It knows nothing of how a row was found.
#[derive(Debug, Clone, Copy)]
pub struct Prover<'a> {
    /// The machine.
    pub instrument: &'a Instrument,
    /// Columns a*, b*, c* in the head frame, Å⁻¹.
    pub ub: &'a Matrix3<f64>,
    /// Wavelength in Å.
    pub wavelength_angstrom: f64,
    /// How far direction and 2θ may be off, in degrees.
    pub tolerance_deg: f64,
}

/// What a row is wrong about. Axes are positions among all axes of the machine.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Fault {
    /// The indices 0 0 0.
    Origin,
    /// The node lies outside the sphere.
    OutsideSphere {
        /// The longest wavelength that would reach it, in Å.
        longest_wavelength_angstrom: f64,
    },
    /// R U B h does not point along Q.
    Direction {
        /// The angle between the two, in degrees.
        by_deg: f64,
    },
    /// The detector does not stand at 2θ.
    TwoTheta {
        /// Where it stands, in degrees.
        stands_at_deg: f64,
        /// 2θ of the node, in degrees.
        due_deg: f64,
    },
    /// The detector stands in the cone about the direct beam.
    InDirectBeam {
        /// By how many degrees.
        by_deg: f64,
    },
    /// A reading outside the limits.
    OverLimit {
        /// Which axis.
        axis: usize,
        /// Its reading in degrees.
        reading_deg: f64,
        /// By how many degrees.
        by_deg: f64,
    },
    /// An axis that is set by hand would have to move.
    SetByHand {
        /// Which axis.
        axis: usize,
        /// Its reading in degrees.
        reading_deg: f64,
        /// Where it was set, in degrees.
        set_to_deg: f64,
    },
    /// Between two rows an axis would have to pass readings outside its limits.
    NoDrive {
        /// Which axis.
        axis: usize,
        /// Where it stands, in degrees.
        from_deg: f64,
        /// Where it should go, in degrees.
        to_deg: f64,
    },
}

/// The figures of one row, and what is wrong with it.
#[derive(Debug, Clone, PartialEq)]
pub struct RowProof {
    /// The angle between R U B h and Q, in degrees; nothing where one of the two has no direction.
    pub direction_miss_deg: Option<f64>,
    /// 2θ where the detector stands less 2θ of the node, in degrees; nothing for a node outside the sphere.
    pub two_theta_miss_deg: Option<f64>,
    /// Empty if the row is proven.
    pub faults: Vec<Fault>,
}

impl Prover<'_> {
    /// Checks one row by itself: the forward equation, 2θ, the limits and the direct beam.
    pub fn row(&self, hkl: Hkl, setting: &Setting) -> RowProof {
        let mut proof = RowProof { direction_miss_deg: None, two_theta_miss_deg: None, faults: Vec::new() };
        self.diffraction(hkl, setting, &mut proof);
        let stands_at_deg = self.instrument.two_theta_rad(setting).to_degrees();
        let by_deg = self.instrument.direct_beam_half_angle_deg() - stands_at_deg;
        if by_deg > LIMIT_DUST_DEG {
            proof.faults.push(Fault::InDirectBeam { by_deg });
        }
        self.limits(setting, &mut proof.faults);
        proof
    }

    fn diffraction(&self, hkl: Hkl, setting: &Setting, proof: &mut RowProof) {
        let node = Vector::from_raw(self.ub * hkl.to_vector());
        if node.direction().is_none() {
            proof.faults.push(Fault::Origin);
            return;
        }
        let sin_theta = 0.5 * self.wavelength_angstrom * node.norm();
        // A node on the sphere's edge to rounding, d = λ/2, is on it.
        if sin_theta > 1.0 + 1e-14 {
            let longest_wavelength_angstrom = 2.0 / node.norm();
            proof.faults.push(Fault::OutsideSphere { longest_wavelength_angstrom });
            return;
        }
        let due_deg = 2.0 * sin_theta.min(1.0).asin().to_degrees();
        let stands_at_deg = self.instrument.two_theta_rad(setting).to_degrees();
        let two_theta_miss_deg = stands_at_deg - due_deg;
        proof.two_theta_miss_deg = Some(two_theta_miss_deg);
        if two_theta_miss_deg.abs() > self.tolerance_deg {
            proof.faults.push(Fault::TwoTheta { stands_at_deg, due_deg });
        }
        // With the detector in the direct beam Q has no direction; its 2θ is wrong then, and the row rejected for that.
        let q = self.instrument.q_in_lab(setting, self.wavelength_angstrom);
        if q.norm() * self.wavelength_angstrom > 1e-12 {
            let by_deg = (self.instrument.lab_from_head(setting) * node).angle_to(&q).to_degrees();
            proof.direction_miss_deg = Some(by_deg);
            if by_deg > self.tolerance_deg {
                proof.faults.push(Fault::Direction { by_deg });
            }
        }
    }

    fn limits(&self, setting: &Setting, faults: &mut Vec<Fault>) {
        for (axis, (one, &reading_deg)) in self.instrument.axes().zip(setting.readings_deg()).enumerate() {
            let by_deg = -one.travel.clearance_as_read_deg(reading_deg);
            if by_deg > LIMIT_DUST_DEG {
                faults.push(Fault::OverLimit { axis, reading_deg, by_deg });
            }
            if one.set_by_hand && (reading_deg - one.park_deg).abs() > LAST_DECIMAL_DEG + LIMIT_DUST_DEG {
                faults.push(Fault::SetByHand { axis, reading_deg, set_to_deg: one.park_deg });
            }
        }
    }

    /// Checks the drive between two settings, readings taken as they stand: every axis stays in one interval of its limits.
    /// Readings outside all intervals are a fault of their row, not of the drive.
    pub fn drive(&self, from: &Setting, to: &Setting) -> Vec<Fault> {
        let pairs = from.readings_deg().iter().zip(to.readings_deg());
        let gap = |(axis, (one, (&from_deg, &to_deg))): (usize, (&crate::instrument::Axis, (&f64, &f64)))| {
            let interval = |reading: f64| {
                let holds = |(low, high)| reading >= low - LIMIT_DUST_DEG && reading <= high + LIMIT_DUST_DEG;
                one.travel.intervals_deg().position(holds)
            };
            match (interval(from_deg), interval(to_deg)) {
                (Some(a), Some(b)) if a != b => Some(Fault::NoDrive { axis, from_deg, to_deg }),
                _ => None,
            }
        };
        self.instrument.axes().zip(pairs).enumerate().filter_map(gap).collect()
    }

    /// Seconds of a drive with the readings as they stand: the slowest axis decides.
    pub fn drive_s(&self, from: &Setting, to: &Setting) -> f64 {
        let pairs = from.readings_deg().iter().zip(to.readings_deg());
        self.instrument.axes().zip(pairs).map(|(axis, (from, to))| axis.drive_s(*from, *to)).fold(0.0, f64::max)
    }
}

impl Fault {
    /// What is wrong, in words with figures and units.
    pub fn text(&self, instrument: &Instrument) -> String {
        let name = |axis: usize| instrument.axes().nth(axis).map_or("?", |axis| axis.name.as_str());
        match *self {
            Self::Origin => "0 0 0 is the direct beam, not a reflection".to_owned(),
            Self::OutsideSphere { longest_wavelength_angstrom } => {
                format!("outside the sphere: needs a wavelength of at most {longest_wavelength_angstrom:.4} Å")
            }
            Self::Direction { by_deg } => format!("the node points {by_deg:.4}° away from Q"),
            Self::TwoTheta { stands_at_deg, due_deg } => {
                format!("the detector stands at 2θ = {stands_at_deg:.4}°, the node diffracts at {due_deg:.4}°")
            }
            Self::InDirectBeam { by_deg } => format!("detector inside the direct-beam cone by {by_deg:.4}°"),
            Self::OverLimit { axis, reading_deg, by_deg } => {
                format!("{} = {reading_deg:.4}° is over its limit by {by_deg:.4}°", name(axis))
            }
            Self::SetByHand { axis, reading_deg, set_to_deg } => format!(
                "{} = {reading_deg:.4}°, but it is set by hand to {set_to_deg:.4}° and does not move",
                name(axis)
            ),
            Self::NoDrive { axis, from_deg, to_deg } => {
                format!("{} cannot go from {from_deg:.4}° to {to_deg:.4}° without leaving its limits", name(axis))
            }
        }
    }
}
