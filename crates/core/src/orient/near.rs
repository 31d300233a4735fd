//! How far the nearest node of an assignment lies from a place in reciprocal space.

use nalgebra::{Matrix3, Vector3};

use super::Setup;
use crate::crystal::Presence;
use crate::frames::{Hkl, angle_between};

/// The nearest node of an assignment to a place where a reflection is predicted or was found.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Miss {
    /// The nearest node is off by this many degrees: the larger of the angle between the directions and the difference
    /// in 2θ.
    By {
        /// The node, in the indices of that assignment.
        hkl: Hkl,
        /// In degrees.
        deg: f64,
    },
    /// No node is nearer than this many degrees.
    MoreThan {
        /// In degrees.
        deg: f64,
    },
}

impl Miss {
    /// Degrees that the nearest node is off, at least.
    pub fn at_least_deg(self) -> f64 {
        match self {
            Self::By { deg, .. } | Self::MoreThan { deg } => deg,
        }
    }
}

/// Windows in degrees that are searched one after the other for the nearest node.
const WINDOWS_DEG: [f64; 4] = [1.0, 4.0, 12.0, 30.0];

/// The nearest node to a place in the crystal Cartesian frame (Å⁻¹).
pub(super) fn nearest(setup: &Setup, place: &Vector3<f64>) -> Miss {
    let mut last = 0.0;
    for window in WINDOWS_DEG {
        if let Some((hkl, deg)) = nearest_within(setup, place, window) {
            return Miss::By { hkl, deg };
        }
        last = window;
    }
    Miss::MoreThan { deg: last }
}

/// The nearest node among those that miss a place by at most so many degrees. Nodes that the lattice itself forbids are
/// none; those that only glide planes or screw axes forbid count, because double diffraction can light them up.
pub(super) fn nearest_within(setup: &Setup, place: &Vector3<f64>, window_deg: f64) -> Option<(Hkl, f64)> {
    let wavelength = setup.wavelength_angstrom();
    let two_theta = |length: f64| 2.0 * (0.5 * wavelength * length).clamp(0.0, 1.0).asin();
    let length = place.norm();
    let here = two_theta(length);
    let radius = reach_of(length, here, window_deg.to_radians(), wavelength);
    let lattice_only = setup.group.lattice_translations().len();
    let mut best: Option<(Hkl, f64)> = None;
    each_within(setup.cell.b_matrix(), place, radius, |indices| {
        let hkl = Hkl::from(indices);
        let node = setup.cell.node(hkl);
        let forbidden = match setup.group.absence_test().test(indices) {
            Presence::Absent { operation } => usize::from(operation) < lattice_only,
            Presence::Allowed | Presence::NotANode => false,
        };
        if indices == [0; 3] || forbidden || 0.5 * wavelength * node.norm() > 1.0 {
            return;
        }
        let turn = angle_between(node.raw(), place);
        let miss = turn.max((two_theta(node.norm()) - here).abs()).to_degrees();
        if miss <= window_deg && best.is_none_or(|(_, least)| miss < least) {
            best = Some((hkl, miss));
        }
    });
    best
}

/// The largest distance of a place within a window of `window` radians in direction and in 2θ.
fn reach_of(length: f64, two_theta: f64, window: f64, wavelength: f64) -> f64 {
    let end = |two_theta: f64| 2.0 * (0.5 * two_theta.clamp(0.0, std::f64::consts::PI)).sin() / wavelength;
    let distance = |other: f64| {
        (length * length + other * other - 2.0 * length * other * window.cos()).max(0.0).sqrt() * (1.0 + 1e-9)
    };
    distance(end(two_theta - window)).max(distance(end(two_theta + window)))
}

/// Visits all whole h with |B h − centre| ≤ radius. B is upper triangular, so each range of an index is exact.
fn each_within(b: &Matrix3<f64>, centre: &Vector3<f64>, radius: f64, mut visit: impl FnMut([i32; 3])) {
    let range = |start: f64, step: f64, left: f64| {
        let half = left.max(0.0).sqrt();
        (((start - half) / step).ceil() as i32)..=(((start + half) / step).floor() as i32)
    };
    let square = radius * radius;
    for l in range(centre.z, b[(2, 2)], square) {
        let z = centre.z - b[(2, 2)] * f64::from(l);
        let y_left = centre.y - b[(1, 2)] * f64::from(l);
        for k in range(y_left, b[(1, 1)], square - z * z) {
            let y = y_left - b[(1, 1)] * f64::from(k);
            let x_left = centre.x - b[(0, 1)] * f64::from(k) - b[(0, 2)] * f64::from(l);
            for h in range(x_left, b[(0, 0)], square - z * z - y * y) {
                visit([h, k, l]);
            }
        }
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::crystal::{SpaceGroup, SymmetryQuery, UnitCell};
    use crate::instrument::built_in_machine;
    use crate::quantity::WavelengthInAngstrom;
    use crate::radiation::Radiation;

    #[test]
    fn nothing_within_the_radius_is_missed_in_an_oblique_cell() {
        let cell = UnitCell::new(5.0, 6.0, 21.0, 68.0, 44.0, 58.0).unwrap();
        let centre = Vector3::new(0.31, -0.12, 0.2);
        let (mut found, mut expected) = (Vec::new(), Vec::new());
        each_within(cell.b_matrix(), &centre, 0.2, |hkl| found.push(hkl));
        for h in -40..=40 {
            for k in -40..=40 {
                for l in -40..=40 {
                    if (cell.node(Hkl::from([h, k, l])).raw() - centre).norm() <= 0.2 {
                        expected.push([h, k, l]);
                    }
                }
            }
        }
        found.sort_unstable();
        expected.sort_unstable();
        assert!(expected.len() > 3);
        assert_eq!(found, expected);
    }

    #[test]
    fn a_place_off_a_node_by_two_degrees_misses_by_two_degrees() {
        let cell = UnitCell::new(5.0, 5.0, 5.0, 90.0, 90.0, 90.0).unwrap();
        let group = SpaceGroup::resolve(&SymmetryQuery::Number(225), &cell).unwrap();
        let radiation = Radiation::XrayWavelength { angstrom: WavelengthInAngstrom::new(0.7).unwrap() };
        let instrument = built_in_machine("eulerian-four-circle").unwrap();
        let setup = Setup { cell: &cell, group: &group, radiation: &radiation, instrument: &instrument };
        let off = 2f64.to_radians();
        let turned = Vector3::new(0.4 * off.cos(), 0.4 * off.sin(), 0.0);
        let Miss::By { hkl, deg } = nearest(&setup, &turned) else { panic!("a node is near") };
        assert_eq!(hkl.as_integers(), Some([2, 0, 0]));
        assert!((deg - 2.0).abs() < 1e-9);
        // Along the line: |Q| for a 2θ that is 1.5° larger.
        let two_theta = 2.0 * (0.35f64 * 0.4).asin() + 1.5f64.to_radians();
        let longer = Vector3::new(2.0 * (0.5 * two_theta).sin() / 0.7, 0.0, 0.0);
        let Miss::By { deg, .. } = nearest(&setup, &longer) else { panic!("a node is near") };
        assert!((deg - 1.5).abs() < 1e-9);
        // 1 0 0 is forbidden by the F lattice and therefore no node.
        assert_eq!(nearest_within(&setup, &Vector3::new(0.2, 0.0, 0.0), 5.0), None);
    }
}
