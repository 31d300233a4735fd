use super::attempts::{Attempt, Attempts, Freedom, MAX_BRANCHES};
use super::bisecting::Bisecting;
use super::chain::Chain;
use super::detector::{DetectorArm, DetectorPlace};
use super::fit::{self, RuleError, bisectable, held_readings};
use super::pair::Pair;
use super::rule::Rule;
use crate::frames::{Head, Vector};
use crate::instrument::{Instrument, MAX_AXES};

/// A node beyond the sphere of radius 2/λ.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct OutsideSphere {
    /// The longest wavelength, 2d, at which it can diffract, in Å.
    pub longest_wavelength_angstrom: f64,
}

/// Solves the diffraction condition R U B h = Q for one machine under one set of rules.
#[derive(Debug, Clone, PartialEq)]
pub struct Solver {
    chain: Chain,
    arm: DetectorArm,
    method: Method,
    /// Readings of held axes; the others are filled in.
    template_deg: [f64; MAX_AXES],
    zero_deg: [f64; MAX_AXES],
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
        fit::check(instrument, rules, None)?;
        let short = "bisecting or hold on a machine with one detector axis across the beam";
        Self::short(instrument, rules).ok_or_else(|| RuleError::NotCovered(format!("accepted is {short}")))
    }

    /// For rules that fit: nothing if the stack or the rules want the general road.
    pub(super) fn short(instrument: &Instrument, rules: &[Rule]) -> Option<Self> {
        let held_deg = held_readings(instrument, rules)?;
        let [detector_axis] = instrument.detector_axes() else { return None };
        let arm = DetectorArm::new(&detector_axis.direction)?;
        let chain = Chain::new(instrument, &held_deg);
        let method = match chain.indices.len() {
            2 => Method::Pair(Pair::new(&chain)?),
            3 if bisectable(instrument, &chain) => Method::Bisecting(Bisecting::new(&chain, &arm)?),
            _ => return None,
        };
        let (mut template_deg, mut zero_deg) = ([0.0; MAX_AXES], [0.0; MAX_AXES]);
        for (i, axis) in instrument.axes().enumerate() {
            template_deg[i] = held_deg.get(i).copied().flatten().unwrap_or(0.0);
            zero_deg[i] = axis.zero_offset_deg;
        }
        Some(Self { chain, arm, method, template_deg, zero_deg, axis_count: instrument.axis_count() })
    }

    /// The sample axes that move, as positions among all axes.
    pub fn moving_sample_axes(&self) -> &[usize] {
        &self.chain.indices
    }

    /// How many closed-form solutions there are for each reflection, counted without limits.
    pub fn branch_count(&self) -> usize {
        match self.method {
            Method::Bisecting(_) => MAX_BRANCHES,
            Method::Pair(_) => MAX_BRANCHES / 2,
        }
    }

    /// Room for the solutions of one reflection, to be filled by [`Self::solve`].
    pub fn attempts(&self) -> Attempts {
        Attempts {
            count: self.branch_count(),
            readings_deg: self.template_deg.map(|held| [held; MAX_BRANCHES]),
            miss_deg: [0.0; MAX_BRANCHES],
            freedom: [Freedom::None; MAX_BRANCHES],
            axis_count: self.axis_count,
        }
    }

    /// Every closed-form solution for a node at `q_in_head` = U B h (Å⁻¹, not zero) and a wavelength in Å.
    ///
    /// # Errors
    /// If the node lies outside the sphere of radius 2/λ.
    #[inline]
    pub fn solve(
        &self,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
        attempts: &mut Attempts,
    ) -> Result<(), OutsideSphere> {
        let length = q_in_head.norm();
        let sin_theta = 0.5 * wavelength_angstrom * length;
        // A node on the sphere's edge to rounding, d = λ/2, is on it.
        if sin_theta > 1.0 + 1e-14 {
            return Err(OutsideSphere { longest_wavelength_angstrom: 2.0 / length });
        }
        let places = match self.arm.places(sin_theta.min(1.0)) {
            Ok(places) => places,
            Err(by_rad) => {
                attempts.fail_all(by_rad.to_degrees());
                return Ok(());
            }
        };
        let carried = self.chain.held * (q_in_head.raw() * (1.0 / length));
        match &self.method {
            Method::Bisecting(method) => method.solve(&carried, &places, &self.chain.indices, attempts),
            Method::Pair(method) => method.solve(&carried, &places, &self.chain.indices, attempts),
        }
        self.place_detector(&places, attempts);
        for &axis in &self.chain.indices {
            let zero = self.zero_deg[axis];
            attempts.readings_deg[axis].iter_mut().for_each(|reading| *reading += zero);
        }
        Ok(())
    }

    /// [`Self::solve`] with room made for the purpose; `found` gets the solutions in the order of branches.
    ///
    /// # Errors
    /// If the node lies outside the sphere of radius 2/λ.
    pub fn each_attempt(
        &self,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
        found: impl FnMut(Attempt),
    ) -> Result<(), OutsideSphere> {
        let mut attempts = self.attempts();
        self.solve(q_in_head, wavelength_angstrom, &mut attempts)?;
        attempts.iter().for_each(found);
        Ok(())
    }

    /// The first half of the branches has the detector at a positive angle.
    #[inline]
    fn place_detector(&self, places: &[DetectorPlace; 2], attempts: &mut Attempts) {
        let detector = self.axis_count - 1;
        let half = attempts.count / 2;
        let [plus, minus] = places.map(|place| place.angle_rad.to_degrees() + self.zero_deg[detector]);
        for (branch, reading) in attempts.readings_deg[detector].iter_mut().enumerate() {
            *reading = if branch < half { plus } else { minus };
        }
    }
}
