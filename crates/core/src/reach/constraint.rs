use nalgebra::{Matrix3, Vector3};

use super::Verdict;
use crate::aim::Reference;
use crate::frames::{Head, Vector};
use crate::instrument::{Instrument, LIMIT_DUST_DEG, MAX_AXES, Setting};

/// A scan: a setting, and how far each axis moves to either side of it, in degrees.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Scan {
    /// Its middle.
    pub setting: Setting,
    /// Half of the range of each axis in degrees; 0 where it stands still.
    pub half_range_deg: [f64; MAX_AXES],
}

impl Scan {
    /// A scan of no width.
    pub fn at(setting: Setting) -> Self {
        Self { setting, half_range_deg: [0.0; MAX_AXES] }
    }
}

/// Something besides the limits that allows a setting or says why not. It is asked about a whole scan: nothing in it may
/// be against the constraint.
pub trait Constraint: std::fmt::Debug + Send + Sync {
    /// Why the scan is not allowed; nothing if it is.
    fn refusal(&self, scan: &Scan) -> Option<Verdict>;
}

/// Neither beam may come from below the crystal's surface.
#[derive(Debug, Clone)]
pub struct AboveSurface {
    instrument: Instrument,
    normal: Vector<Head>,
}

impl AboveSurface {
    /// For the outward normal of a surface; nothing for one without direction.
    pub fn new(instrument: &Instrument, surface: &Reference, ub: &Matrix3<f64>) -> Option<Self> {
        Some(Self { instrument: instrument.clone(), normal: surface.in_head(ub)? })
    }

    /// The angles α_i and α_f of incident and diffracted beam to the surface, in degrees: sin α_i = −n·k̂_i,
    /// sin α_f = n·k̂_f.
    pub fn grazing_deg(&self, setting: &Setting) -> [f64; 2] {
        let n = self.instrument.lab_from_head(setting) * self.normal;
        let k_f = self.instrument.diffracted_direction(setting);
        let above = |beam: Vector3<f64>| n.raw().dot(&beam).clamp(-1.0, 1.0).asin().to_degrees();
        [above(-Vector3::z()), above(*k_f.raw())]
    }
}

impl Constraint for AboveSurface {
    /// The middle of the scan decides: a beam that grazes the surface within a scan is still measured in part.
    fn refusal(&self, scan: &Scan) -> Option<Verdict> {
        let [incident, diffracted] = self.grazing_deg(&scan.setting);
        let by_deg = -incident.min(diffracted);
        (by_deg > LIMIT_DUST_DEG).then_some(Verdict::BelowSurface { incident: incident <= diffracted, by_deg })
    }
}
