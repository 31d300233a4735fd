use super::attempts::Attempt;
use super::fit::{self, RuleError};
use super::general::{General, NoAzimuth};
use super::reference::CrystalOnHead;
use super::rule::Rule;
use super::solver::{OutsideSphere, Solver};
use crate::frames::{Head, Vector};
use crate::instrument::{Instrument, Setting};

/// Why a reflection has no setting at all, whatever the axes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum NoSetting {
    /// The node is beyond the sphere.
    Outside(OutsideSphere),
    /// The rules want an azimuth, and the reflection has none.
    NoAzimuth(NoAzimuth),
}

/// From a node to every setting: one machine under one set of rules, and the crystal where a rule speaks of it.
#[derive(Debug, Clone, PartialEq)]
pub struct Road {
    way: Way,
    /// The sample axes that no rule holds, as positions among all axes.
    moving: Vec<usize>,
    /// Whether a rule leaves the azimuth open.
    open: bool,
}

#[derive(Debug, Clone, PartialEq)]
enum Way {
    Short(Box<Solver>),
    General(Box<General>),
}

impl Road {
    /// Prepares a machine under a set of rules. `crystal` is needed by rules that speak of an azimuth or a surface.
    ///
    /// # Errors
    /// If the rules do not fit the machine, if they need a crystal and there is none, or if no road covers them.
    pub fn new(instrument: &Instrument, rules: &[Rule], crystal: Option<&CrystalOnHead>) -> Result<Self, RuleError> {
        fit::check(instrument, rules, crystal.map(|crystal| crystal.surface.as_ref()))?;
        let held = |i: &usize| {
            let name = &instrument.sample_axes()[*i].name;
            rules.iter().any(|rule| matches!(rule, Rule::Hold { axis, .. } if axis == name))
        };
        let moving = fit::moving_sample(instrument).filter(|i| !held(i)).collect();
        let open = rules.iter().any(|rule| matches!(rule, Rule::Freest { .. }));
        let way = match Solver::short(instrument, rules) {
            Some(solver) => Way::Short(Box::new(solver)),
            None => Way::General(Box::new(General::new(instrument, rules, crystal)?)),
        };
        Ok(Self { way, moving, open })
    }

    /// The short road, if it serves.
    pub fn solver(&self) -> Option<&Solver> {
        match &self.way {
            Way::Short(solver) => Some(solver),
            Way::General(_) => None,
        }
    }

    /// The sample axes that move, as positions among all axes.
    pub fn moving_sample_axes(&self) -> &[usize] {
        &self.moving
    }

    /// Whether a rule (*freest*) leaves the azimuth open, so that [`Self::each_attempt_at`] is the one to ask.
    pub fn leaves_azimuth_open(&self) -> bool {
        self.open
    }

    /// Whether every solution keeps its number from node to node and along ψ: true of closed forms, not of searches.
    pub fn has_steady_branches(&self) -> bool {
        match &self.way {
            Way::Short(_) => true,
            Way::General(general) => general.is_closed(),
        }
    }

    /// Every solution for a node at `q_in_head` = U B h (Å⁻¹, not zero) and a wavelength in Å, in the order of branches.
    ///
    /// # Errors
    /// If the node lies outside the sphere of radius 2/λ, or if it has no azimuth and the rules want one.
    pub fn each_attempt(
        &self,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
        found: &mut dyn FnMut(Attempt),
    ) -> Result<(), NoSetting> {
        self.each(q_in_head, wavelength_angstrom, None, found)
    }

    /// [`Self::each_attempt`] at an azimuth in radians, for rules that leave it open.
    ///
    /// # Errors
    /// As there.
    pub fn each_attempt_at(
        &self,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
        psi_rad: f64,
        found: &mut dyn FnMut(Attempt),
    ) -> Result<(), NoSetting> {
        self.each(q_in_head, wavelength_angstrom, Some(psi_rad), found)
    }

    fn each(
        &self,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
        psi_rad: Option<f64>,
        found: &mut dyn FnMut(Attempt),
    ) -> Result<(), NoSetting> {
        match &self.way {
            Way::Short(solver) => {
                solver.each_attempt(q_in_head, wavelength_angstrom, found).map_err(NoSetting::Outside)
            }
            Way::General(general) => {
                let sin_theta = on_sphere(q_in_head.norm(), wavelength_angstrom).map_err(NoSetting::Outside)?;
                let direction = q_in_head.raw() / q_in_head.norm();
                general.each_attempt(&direction, sin_theta, psi_rad, found).map_err(NoSetting::NoAzimuth)
            }
        }
    }
}

/// sin θ of a node at a distance of 1/d Å⁻¹ from the origin.
///
/// # Errors
/// If it lies outside the sphere; on its edge to rounding, d = λ/2, it is on it.
fn on_sphere(length: f64, wavelength_angstrom: f64) -> Result<f64, OutsideSphere> {
    let sin_theta = 0.5 * wavelength_angstrom * length;
    if sin_theta > 1.0 + 1e-14 {
        return Err(OutsideSphere { longest_wavelength_angstrom: 2.0 / length });
    }
    Ok(sin_theta.min(1.0))
}

/// The azimuth ψ in radians of a reference direction at a setting, −π to π, as [`crate::conventions`] defines it.
///
/// # Errors
/// If the reference is parallel to Q, or the beams lie along one line.
pub fn azimuth_rad(
    instrument: &Instrument,
    setting: &Setting,
    q_in_head: Vector<Head>,
    reference: Vector<Head>,
) -> Result<f64, NoAzimuth> {
    General::azimuth_rad(instrument, setting, q_in_head, reference)
}
