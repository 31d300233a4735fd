//! Simultaneous reflections: nodes that come onto the sphere while a reflection is turned about its own Q.
//!
//! With Q of a reflection H fixed in the lab, a node G meets the sphere where |k_i + G| = 1/λ, that is 2 k_i·G + |G|² = 0.
//! Along the azimuth this is one equation a cos ψ + b sin ψ = c (Renninger 1937, Z. Phys. 106, 141), whatever the machine.

use nalgebra::Vector3;

use crate::frames::{Head, Hkl, Vector};

/// Below this the equation has no ψ in it: G lies along Q, or the beams along one line.
const NO_TURN: f64 = 1e-12;

/// A reflection that is turned about its Q.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Turning {
    /// Along Q, along the reference's part across it, and the third: unit vectors in the head frame.
    frame: [Vector3<f64>; 3],
    sin_theta: f64,
    cos_theta: f64,
    wavelength_angstrom: f64,
}

/// A node that meets the sphere at an azimuth.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Crossing {
    /// The azimuth ψ in degrees, −180 to 180.
    pub psi_deg: f64,
    /// The node.
    pub node: Hkl,
}

impl Turning {
    /// For U B h in Å⁻¹, the reference of ψ in the head frame and a wavelength in Å; nothing outside the sphere or with the
    /// reference along Q.
    pub fn new(q_in_head: Vector<Head>, reference: Vector<Head>, wavelength_angstrom: f64) -> Option<Self> {
        let q = q_in_head.direction()?.into_inner();
        let sin_theta = 0.5 * wavelength_angstrom * q_in_head.norm();
        let across = reference.raw() - q * q.dot(reference.raw());
        if sin_theta > 1.0 || across.norm() < 1e-9 * reference.norm() {
            return None;
        }
        let p = across.normalize();
        let cos_theta = ((1.0 - sin_theta) * (1.0 + sin_theta)).sqrt();
        Some(Self { frame: [q, p, q.cross(&p)], sin_theta, cos_theta, wavelength_angstrom })
    }

    /// a, b and c of a cos ψ + b sin ψ = c for a node G in the head frame, all in Å⁻¹.
    ///
    /// k_i = (t̂ cos θ − Q̂ sin θ)/λ, and at ψ the node's part along t̂ is g₂ cos ψ − g₃ sin ψ.
    fn equation(&self, node_in_head: Vector<Head>) -> [f64; 3] {
        let [along, second, third] = self.frame.map(|axis| axis.dot(node_in_head.raw()));
        let square = node_in_head.raw().norm_squared();
        let c = along * self.sin_theta - 0.5 * self.wavelength_angstrom * square;
        [second * self.cos_theta, -third * self.cos_theta, c]
    }

    /// The azimuths in radians, −π to π, at which a node meets the sphere: none, one (touching) or two.
    pub fn azimuths_rad(&self, node_in_head: Vector<Head>) -> impl Iterator<Item = f64> + use<> {
        let [a, b, c] = self.equation(node_in_head);
        let size = a.hypot(b);
        let meets = size > NO_TURN && c.abs() <= size;
        // By half angles: near touching, acos would lose half the digits.
        let half = ((size - c).max(0.0)).sqrt().atan2((size + c).max(0.0).sqrt());
        let centre = b.atan2(a);
        let both =
            if half == 0.0 { [Some(centre), None] } else { [Some(centre - 2.0 * half), Some(centre + 2.0 * half)] };
        let wrap = |psi: f64| psi - std::f64::consts::TAU * (psi / std::f64::consts::TAU).round();
        both.into_iter().flatten().map(wrap).take(if meets { 2 } else { 0 })
    }

    /// Distance of a node from the sphere at an azimuth in radians, | |k_i + G| − 1/λ | in Å⁻¹.
    pub fn distance(&self, node_in_head: Vector<Head>, psi_rad: f64) -> f64 {
        let [a, b, c] = self.equation(node_in_head);
        let k = 1.0 / self.wavelength_angstrom;
        // |k_i + G|² − 1/λ² = 2 (a cos ψ + b sin ψ − c)/λ, without taking two near numbers from each other.
        let excess = 2.0 * k * (a * psi_rad.cos() + b * psi_rad.sin() - c);
        (excess / ((k * k + excess).max(0.0).sqrt() + k)).abs()
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use nalgebra::{Rotation3, Unit};
    use proptest::prelude::*;

    use super::*;
    use crate::testing::{cases, unit_vector};

    proptest! {
        #![proptest_config(cases())]

        /// The closed form against |k_i + R G| = 1/λ itself, with R made from the definition of ψ.
        #[test]
        fn crossings_lie_on_the_sphere(
            q in unit_vector(), n in unit_vector(), g in unit_vector(), length in 0.1..1.9f64, size in 0.05..1.5f64,
        ) {
            prop_assume!(q.cross(&n).norm() > 0.05);
            let (wavelength, node) = (1.0, Vector::from_raw(g * size));
            let turning = Turning::new(Vector::from_raw(q * length), Vector::from_raw(n), wavelength).unwrap();
            // In the lab: Q and k_i in the plane of x and z.
            let theta = (0.5 * length * wavelength).asin();
            let q_lab = Vector3::new(theta.cos(), 0.0, -theta.sin());
            let t_lab = Vector3::new(theta.sin(), 0.0, theta.cos());
            let p = (n - q * q.dot(&n)).normalize();
            let from = nalgebra::Matrix3::from_columns(&[q, p, q.cross(&p)]);
            let to = nalgebra::Matrix3::from_columns(&[q_lab, t_lab, q_lab.cross(&t_lab)]);
            let at_zero = to * from.transpose();
            let on = |psi: f64| {
                let turned = Rotation3::from_axis_angle(&Unit::new_unchecked(q_lab), psi) * (at_zero * node.raw());
                (Vector3::z() / wavelength + turned).norm() - 1.0 / wavelength
            };
            let found: Vec<f64> = turning.azimuths_rad(node).collect();
            for &psi in &found {
                prop_assert!(on(psi).abs() < 1e-12, "{psi}: {}", on(psi));
            }
            for step in 0..24 {
                let psi = f64::from(step) * 0.26;
                prop_assert!((turning.distance(node, psi) - on(psi).abs()).abs() < 1e-13);
            }
            // As many as there are changes of sign.
            let signs = (0..3600).filter(|i| (on(f64::from(*i) * 0.1f64.to_radians()) > 0.0) != (on(f64::from(*i + 1) * 0.1f64.to_radians()) > 0.0));
            prop_assert!(found.len() >= signs.count());
        }
    }
}
