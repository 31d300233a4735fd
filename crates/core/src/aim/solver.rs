use nalgebra::Vector3;

use super::attempts::{Attempt, Attempts, MAX_BRANCHES};
use super::bisecting::Bisecting;
use super::chain::Chain;
use super::detector::DetectorArm;
use super::fit::{RuleError, bisectable, held_readings};
use super::pair::Pair;
use super::rule::Rule;
use crate::frames::{Head, Vector};
use crate::instrument::{Instrument, MAX_AXES};
use crate::lanes::{Mask, Real, Triple, dot};

/// A node beyond the sphere of radius 2/λ.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct OutsideSphere {
    /// The longest wavelength, 2d, at which it can diffract, in Å.
    pub longest_wavelength_angstrom: f64,
}

/// Solves the diffraction condition R U B h = Q for one machine under one set of rules.
#[derive(Debug, Clone, PartialEq)]
pub struct Solver {
    /// The sample axes that move, as positions among all axes.
    moving: Vec<usize>,
    arm: DetectorArm,
    method: Method,
    /// Rows of M, which takes the head frame to where the moving axes see it.
    held_rows: [Vector3<f64>; 3],
    /// Readings of held axes; the others are filled in.
    template_deg: [f64; MAX_AXES],
    detector_zero_deg: f64,
    axis_count: usize,
}

#[derive(Debug, Clone, PartialEq)]
enum Method {
    Bisecting(Bisecting),
    Pair(Pair),
}

impl Solver {
    /// Prepares a machine under a set of rules.
    ///
    /// # Errors
    /// If the rules do not fit the machine; the count of spare angles is in the message.
    pub fn new(instrument: &Instrument, rules: &[Rule]) -> Result<Self, RuleError> {
        let held_deg = held_readings(instrument, rules)?;
        let sample = held_deg.iter().filter(|held| held.is_none()).count();
        let not_covered = || RuleError::NotCovered { sample, detector: instrument.detector_axes().len() };
        let [detector_axis] = instrument.detector_axes() else { return Err(not_covered()) };
        let arm = DetectorArm::new(&detector_axis.direction).ok_or_else(not_covered)?;
        let chain = Chain::new(instrument, &held_deg);
        let method = match chain.indices.len() {
            2 => Method::Pair(Pair::new(&chain).ok_or_else(not_covered)?),
            3 if bisectable(instrument, &chain) => {
                Method::Bisecting(Bisecting::new(&chain, &arm).ok_or(RuleError::NotBisectable)?)
            }
            3 => return Err(RuleError::NotBisectable),
            _ => return Err(not_covered()),
        };
        let mut template_deg = [0.0; MAX_AXES];
        for (template, held) in template_deg.iter_mut().zip(held_deg) {
            *template = held.unwrap_or(0.0);
        }
        let held_rows = [0, 1, 2].map(|row| chain.held.row(row).transpose());
        let detector_zero_deg = detector_axis.zero_offset_deg;
        let axis_count = instrument.axis_count();
        Ok(Self { moving: chain.indices, arm, method, held_rows, template_deg, detector_zero_deg, axis_count })
    }

    /// The sample axes that move, as positions among all axes.
    pub fn moving_sample_axes(&self) -> &[usize] {
        &self.moving
    }

    /// How many closed-form solutions there are for each reflection, counted without limits.
    pub fn branch_count(&self) -> usize {
        match self.method {
            Method::Bisecting(_) => MAX_BRANCHES,
            Method::Pair(_) => MAX_BRANCHES / 2,
        }
    }

    /// Room for the solutions of as many reflections as `zero` has numbers, to be filled by [`Self::solve`].
    pub(crate) fn attempts<T: Real>(&self, zero: T) -> Attempts<T> {
        Attempts {
            count: self.branch_count(),
            readings_deg: self.template_deg.map(|held| [zero.like(held); MAX_BRANCHES]),
            miss_deg: [zero; MAX_BRANCHES],
            freedom: [zero; MAX_BRANCHES],
            axis_count: self.axis_count,
        }
    }

    /// Every closed-form solution for a node at `q_in_head` = U B h (Å⁻¹, not zero) and a wavelength in Å. For a
    /// node outside the sphere of radius 2/λ they are without meaning: see [`Solved::inside`].
    #[inline(always)]
    pub(crate) fn solve<T: Real>(
        &self,
        q_in_head: &Triple<T>,
        wavelength_angstrom: f64,
        attempts: &mut Attempts<T>,
    ) -> Solved<T> {
        let [x, y, z] = *q_in_head;
        let length = (x * x + y * y + z * z).sqrt();
        let sin_theta = length * (0.5 * wavelength_angstrom);
        let (places, beyond_deg) = self.arm.places(sin_theta.smaller(x.like(1.0)));
        let unit = x.like(1.0) / length;
        let (direction, held) = ([x * unit, y * unit, z * unit], &self.held_rows);
        let carried = [dot(&held[0], &direction), dot(&held[1], &direction), dot(&held[2], &direction)];
        match &self.method {
            Method::Bisecting(method) => method.solve(&carried, &places, attempts),
            Method::Pair(method) => method.solve(&carried, &places, attempts),
        }
        // The first half of the branches has the detector at a positive angle.
        let (detector, half) = (self.axis_count - 1, attempts.count / 2);
        let [plus, minus] =
            [places[0].angle_deg + self.detector_zero_deg, places[1].angle_deg + self.detector_zero_deg];
        for (branch, reading) in attempts.readings_deg[detector].iter_mut().enumerate() {
            *reading = if branch < half { plus } else { minus };
        }
        if x.like(0.0).below(beyond_deg).any() {
            attempts.miss_at_least(beyond_deg);
        }
        Solved { length, sin_theta }
    }

    /// Every closed-form solution for a node at `q_in_head` = U B h (Å⁻¹, not zero) and a wavelength in Å; `found` gets them
    /// in the order of branches.
    ///
    /// # Errors
    /// If the node lies outside the sphere of radius 2/λ.
    pub fn each_attempt(
        &self,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
        found: impl FnMut(Attempt),
    ) -> Result<(), OutsideSphere> {
        let mut attempts = self.attempts(0.0);
        let solved = self.solve(&(*q_in_head.raw()).into(), wavelength_angstrom, &mut attempts);
        solved.inside()?;
        attempts.iter().for_each(found);
        Ok(())
    }
}

/// What [`Solver::solve`] found on the way.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Solved<T> {
    /// |Q| in Å⁻¹.
    pub length: T,
    /// sin θ; above 1 outside the sphere of radius 2/λ.
    pub sin_theta: T,
}

impl Solved<f64> {
    /// # Errors
    /// If the node lies outside the sphere of radius 2/λ.
    pub fn inside(&self) -> Result<(), OutsideSphere> {
        // A node on the sphere's edge to rounding, d = λ/2, is on it.
        if self.sin_theta > 1.0 + 1e-14 {
            return Err(OutsideSphere { longest_wavelength_angstrom: 2.0 / self.length });
        }
        Ok(())
    }
}
