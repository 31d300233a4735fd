//! Crystals, machines and peaks with a known truth.

use nalgebra::{Matrix3, Rotation3, UnitQuaternion, Vector3};
use proptest::prelude::*;

use crate::aim::{Attempt, Preference, Rule, Solver};
use crate::crystal::{SpaceGroup, SymmetryQuery, UnitCell};
use crate::frames::{Head, Hkl, Rotation, Vector};
use crate::instrument::{Instrument, MachineDescription, Setting, built_in_machine};
use crate::orient::{Orientation, OrientationReport, Peak, Setup};
use crate::quantity::{AngleUncertainty, Degrees, WavelengthInAngstrom};
use crate::radiation::Radiation;
use crate::reach::Judge;
use crate::testing::unit_vector;

pub const WAVELENGTH: f64 = 0.71;

/// A cell of one of the seven systems, 4 to 25 Å.
pub fn any_cell() -> impl Strategy<Value = UnitCell> {
    let lengths = prop::array::uniform3(4.0..25.0f64);
    let angles = prop::array::uniform3(72.0..108.0f64);
    (0..7usize, lengths, angles).prop_map(|(system, [a, b, c], [al, be, ga])| {
        let right = 90.0;
        let [a, b, c, al, be, ga] = match system {
            0 => [a, b, c, al, be, ga],
            1 => [a, b, c, right, be, right],
            2 => [a, b, c, right, right, right],
            3 => [a, a, c, right, right, right],
            4 => [a, a, a, al, al, al],
            5 => [a, a, c, right, right, 120.0],
            _ => [a, a, a, right, right, right],
        };
        UnitCell::new(a, b, c, al, be, ga).unwrap()
    })
}

/// A turn of the crystal, evenly spread over directions.
pub fn any_u() -> impl Strategy<Value = Rotation3<f64>> {
    (unit_vector(), -180.0..180.0f64)
        .prop_map(|(axis, deg)| Rotation3::from_axis_angle(&nalgebra::Unit::new_normalize(axis), deg.to_radians()))
}

/// A built-in machine whose zero offsets are these.
pub fn machine_with_zeros(name: &str, zeros_deg: &[f64]) -> Instrument {
    let mut description = built_in_machine(name).unwrap().description().clone();
    let axes = description.sample_axes.iter_mut().chain(description.detector_axes.iter_mut());
    for (axis, &zero) in axes.zip(zeros_deg) {
        axis.zero_offset_deg = Degrees::new(zero).unwrap();
    }
    Instrument::new(description).unwrap()
}

/// A machine that nobody would build: axes in any direction, each with a zero offset in degrees.
pub fn odd_machine(sample: &[(Vector3<f64>, f64)], detector: &[(Vector3<f64>, f64)]) -> Instrument {
    let axis = |name: String, (v, zero): &(Vector3<f64>, f64)| {
        format!(
            "(name: \"{name}\", direction: ({}, {}, {}), limits: Endless, speed_deg_per_s: 1, zero_offset_deg: {zero})",
            v.x, v.y, v.z
        )
    };
    let list = |letter: char, axes: &[(Vector3<f64>, f64)]| {
        axes.iter().enumerate().map(|(i, a)| axis(format!("{letter}{i}"), a)).collect::<Vec<_>>().join(", ")
    };
    let text = format!(
        "(version: 1, name: \"odd\", sample_axes: [{}], detector_axes: [{}])",
        list('s', sample),
        list('d', detector)
    );
    Instrument::new(ron::from_str::<MachineDescription>(&text).unwrap()).unwrap()
}

pub fn rules(machine: &str) -> Vec<Rule> {
    if machine == "fixed-chi-three-circle" { Vec::new() } else { vec![Rule::Bisecting] }
}

pub fn peak(hkl: Hkl, setting: Setting, sigma_deg: Option<f64>) -> Peak {
    Peak::new(hkl, setting, sigma_deg.map(|s| AngleUncertainty::new(s).unwrap())).unwrap()
}

/// A crystal of known orientation on a machine.
pub struct Night {
    pub cell: UnitCell,
    pub group: SpaceGroup,
    pub radiation: Radiation,
    pub instrument: Instrument,
    pub rules: Vec<Rule>,
    pub ub: Matrix3<f64>,
}

impl Night {
    /// On the Eulerian cradle, with U a turn by 67° about an odd axis.
    pub fn new(cell: [f64; 6], query: SymmetryQuery) -> Self {
        let u = UnitQuaternion::new(Vector3::new(0.31, -0.87, 0.44) * 1.17).to_rotation_matrix();
        Self::with(cell, query, "eulerian-four-circle", u)
    }

    pub fn with([a, b, c, al, be, ga]: [f64; 6], query: SymmetryQuery, machine: &str, u: Rotation3<f64>) -> Self {
        let cell = UnitCell::new(a, b, c, al, be, ga).unwrap();
        let group = SpaceGroup::resolve(&query, &cell).unwrap();
        let ub = u.matrix() * cell.b_matrix();
        let radiation = Radiation::XrayWavelength { angstrom: WavelengthInAngstrom::new(WAVELENGTH).unwrap() };
        let instrument = machine_with_zeros(machine, &[0.4, -0.3, 1.1, 0.2]);
        Self { cell, group, radiation, instrument, rules: rules(machine), ub }
    }

    pub fn setup(&self) -> Setup<'_> {
        Setup { cell: &self.cell, group: &self.group, radiation: &self.radiation, instrument: &self.instrument }
    }

    /// The readings at which the node `truth` diffracts, entered with the indices `given`.
    pub fn found(&self, truth: [i32; 3], given: [i32; 3], sigma_deg: f64) -> Peak {
        let q = Vector::from_raw(self.ub * Hkl::from(truth).to_vector());
        let solver = Solver::new(&self.instrument, &self.rules).unwrap();
        peak(Hkl::from(given), setting_of(&solver, q).unwrap(), Some(sigma_deg))
    }

    pub fn report(&self, peaks: &[Peak]) -> OrientationReport {
        let judge = Judge::new(&self.instrument, &self.rules, &Preference::default()).unwrap();
        let reachable = |q: Vector<Head>| judge.verdict(q, WAVELENGTH).verdict.is_reachable();
        OrientationReport::new(&self.setup(), peaks, &reachable).unwrap()
    }

    /// The same crystal, sitting otherwise.
    pub fn turned_to(mut self, orientation: &Orientation) -> Self {
        self.ub = orientation.ub;
        self
    }
}

/// The first setting that brings Q (head frame) to diffraction, whatever the limits.
pub fn setting_of(solver: &Solver, q: Vector<Head>) -> Option<Setting> {
    let mut first = None;
    solver
        .each_attempt(q, WAVELENGTH, |attempt| {
            if let (None, Attempt::Setting { setting, .. }) = (first, attempt) {
                first = Some(setting);
            }
        })
        .ok()?;
    first
}

pub fn head_from_crystal(u: &Rotation3<f64>) -> Rotation<Head, crate::frames::CrystalCartesian> {
    Rotation::from_rotation(*u)
}
