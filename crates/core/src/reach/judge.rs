use super::Verdict;
use super::score::Score;
use crate::aim::{Attempt, Attempts, Branch, Freedom, OutsideSphere, Preference, Rule, RuleError, Solved, Solver};
use crate::frames::{Head, Vector};
use crate::instrument::{Instrument, LIMIT_DUST_DEG, MAX_AXES, Setting};

/// Judges every setting of a reflection against the machine's limits, and chooses among those allowed.
#[derive(Debug, Clone)]
pub struct Judge {
    solver: Solver,
    pub(super) score: Score,
    cone_deg: f64,
    sin_half_cone: f64,
}

/// A setting with its verdict.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct JudgedSetting {
    /// Which closed-form solution.
    pub branch: Branch,
    /// Readings in degrees, of each axis the representative deepest inside its limits or nearest to them; nothing where
    /// the axes cannot make it.
    pub setting: Option<Setting>,
    /// What was free.
    pub freedom: Freedom,
    /// Allowed, or why not.
    pub verdict: Verdict,
    /// Degrees from the nearest limit of any moving sample axis; negative outside, infinite if none is limited.
    pub clearance_deg: f64,
}

/// What became of one reflection: its verdict, and the setting chosen or the one that misses least.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Judgement {
    /// Reachable, or the reason of the setting that misses least.
    pub verdict: Verdict,
    /// The setting chosen, or the one that misses least; nothing where no setting exists at all.
    pub setting: Option<JudgedSetting>,
}

/// Every setting of one reflection.
#[derive(Debug, Clone, PartialEq)]
pub enum Settings {
    /// The node is beyond the sphere.
    Outside(OutsideSphere),
    /// One entry for each closed-form solution, equal ones merged.
    Judged(Vec<JudgedSetting>),
}

/// Settings that differ by less than this on every axis, in degrees, are one: double roots come out this close.
const SAME_SETTING_DEG: f64 = 1e-5;

impl Judge {
    /// Prepares a machine under a set of rules and a preference.
    ///
    /// # Errors
    /// If the rules do not fit the machine.
    pub fn new(instrument: &Instrument, rules: &[Rule], preference: &Preference) -> Result<Self, RuleError> {
        let solver = Solver::new(instrument, rules)?;
        let score = Score::new(instrument, solver.moving_sample_axes(), preference);
        let cone_deg = instrument.direct_beam_half_angle_deg();
        let sin_half_cone = (0.5 * cone_deg).to_radians().sin();
        Ok(Self { solver, score, cone_deg, sin_half_cone })
    }

    /// The solver underneath.
    pub fn solver(&self) -> &Solver {
        &self.solver
    }

    /// Every setting of the reflection at `q_in_head` = U B h in Å⁻¹, for a wavelength in Å.
    pub fn every_setting(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> Settings {
        let (attempts, solved) = self.attempts(q_in_head, wavelength_angstrom);
        if let Err(outside) = solved.inside() {
            return Settings::Outside(outside);
        }
        let mut all: Vec<JudgedSetting> = Vec::with_capacity(attempts.count);
        for attempt in attempts.iter() {
            let judged = self.judge(&attempt, &solved);
            if !all.iter().any(|other| same_place(other, &judged)) {
                all.push(judged);
            }
        }
        Settings::Judged(all)
    }

    /// The verdict on the reflection at `q_in_head` = U B h in Å⁻¹, for a wavelength in Å, and the setting chosen.
    pub fn verdict(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> Judgement {
        let (attempts, solved) = self.attempts(q_in_head, wavelength_angstrom);
        if let Err(outside) = solved.inside() {
            return Judgement { verdict: outside.into(), setting: None };
        }
        let best = self.score.best(&attempts);
        let judged = self.judge(&attempts.get(best.branch as usize), &solved);
        Judgement { verdict: judged.verdict, setting: Some(judged) }
    }

    fn attempts(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> (Attempts<f64>, Solved<f64>) {
        let mut attempts = self.solver.attempts(0.0);
        let solved = self.solver.solve(&(*q_in_head.raw()).into(), wavelength_angstrom, &mut attempts);
        (attempts, solved)
    }

    fn judge(&self, attempt: &Attempt, solved: &Solved<f64>) -> JudgedSetting {
        match *attempt {
            Attempt::CannotMake { branch, by_deg } => JudgedSetting {
                branch,
                setting: None,
                freedom: Freedom::None,
                verdict: self.reason(solved, by_deg, 0, 0.0),
                clearance_deg: f64::NEG_INFINITY,
            },
            Attempt::Setting { branch, setting, freedom } => {
                let given = setting.readings_deg();
                let mut readings_deg = [0.0; MAX_AXES];
                readings_deg[..given.len()].copy_from_slice(given);
                let check = self.score.check(&readings_deg);
                JudgedSetting {
                    branch,
                    setting: Some(Setting::new(&check.readings_deg[..given.len()])),
                    freedom,
                    verdict: self.reason(solved, 0.0, check.worst_axis as u8, check.worst_deg),
                    clearance_deg: check.clearance_deg,
                }
            }
        }
    }

    /// The verdict on a setting that the axes miss by `miss_deg` and whose `worst_axis` has `worst_deg` to its limit. The
    /// cone comes before limits, because it depends on 2θ alone and holds for every setting of a reflection.
    #[inline(always)]
    pub(super) fn reason(&self, solved: &Solved<f64>, miss_deg: f64, worst_axis: u8, worst_deg: f64) -> Verdict {
        if let Err(outside) = solved.inside() {
            return outside.into();
        }
        if solved.sin_theta <= self.sin_half_cone {
            let by_deg = self.cone_deg - 2.0 * solved.sin_theta.asin().to_degrees();
            if by_deg > LIMIT_DUST_DEG {
                return Verdict::InDirectBeam { by_deg };
            }
        }
        if miss_deg > 0.0 {
            return Verdict::CannotMake { by_deg: miss_deg };
        }
        if worst_deg < -LIMIT_DUST_DEG {
            return Verdict::OverLimit { axis: worst_axis, by_deg: -worst_deg };
        }
        Verdict::Reachable
    }
}

fn same_place(a: &JudgedSetting, b: &JudgedSetting) -> bool {
    match (&a.setting, &b.setting) {
        (Some(a), Some(b)) => {
            let pairs = a.readings_deg().iter().zip(b.readings_deg());
            pairs.into_iter().all(|(x, y)| crate::instrument::wrap_deg(x - y).abs() < SAME_SETTING_DEG)
        }
        _ => false,
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use nalgebra::Vector3;

    use super::*;
    use crate::instrument::built_in_machine;

    fn judge(preference: &Preference) -> Judge {
        let instrument = built_in_machine("eulerian-four-circle").unwrap();
        Judge::new(&instrument, &[Rule::Bisecting], preference).unwrap()
    }

    fn q(x: f64, y: f64, z: f64, length: f64) -> Vector<Head> {
        Vector::from_raw(Vector3::new(x, y, z).normalize() * length)
    }

    const WAVELENGTH: f64 = 0.71;

    #[test]
    fn the_roomiest_setting_is_chosen() {
        let judge = judge(&Preference::FarthestFromLimits);
        let node = q(0.3, 0.5, 0.8, 0.9);
        let chosen = judge.verdict(node, WAVELENGTH);
        assert_eq!(chosen.verdict, Verdict::Reachable);
        let Settings::Judged(all) = judge.every_setting(node, WAVELENGTH) else { panic!() };
        assert_eq!(all.len(), 8);
        let roomiest = all.iter().filter(|s| s.verdict.is_reachable()).map(|s| s.clearance_deg).fold(0.0, f64::max);
        assert!((chosen.setting.unwrap().clearance_deg - roomiest).abs() < 1e-8);
        // omega may go from -65° to 95° and chi from -100° to 100°: the clearance by hand.
        let setting = chosen.setting.unwrap().setting.unwrap();
        let r = setting.readings_deg();
        let by_hand = (r[0] + 65.0).min(95.0 - r[0]).min(100.0 - r[1].abs());
        assert!((chosen.setting.unwrap().clearance_deg - by_hand).abs() < 1e-9);
    }

    #[test]
    fn nearest_to_a_position_is_an_option() {
        for chi in [-70.0, 70.0] {
            let text = format!("NearestTo(readings_deg: {{\"chi\": {chi}}})");
            let judge = judge(&ron::from_str(&text).unwrap());
            let chosen = judge.verdict(q(0.5, 0.8, 0.2, 0.9), WAVELENGTH).setting.unwrap();
            assert!(chosen.verdict.is_reachable());
            assert_eq!(chosen.setting.unwrap().readings_deg()[1].signum(), f64::signum(chi));
        }
    }

    #[test]
    fn every_reason_is_met() {
        let judge = judge(&Preference::FarthestFromLimits);
        let kind = |length| judge.verdict(q(0.3, 0.5, 0.8, length), WAVELENGTH).verdict;
        let Verdict::InDirectBeam { by_deg } = kind(0.05) else { panic!("{:?}", kind(0.05)) };
        assert!((by_deg - (3.0 - 2.0 * (0.5 * WAVELENGTH * 0.05f64).asin().to_degrees())).abs() < 1e-12);
        assert!(
            matches!(kind(3.0), Verdict::OutsideSphere { longest_wavelength_angstrom } if (longest_wavelength_angstrom - 2.0 / 3.0).abs() < 1e-12)
        );
        // 2θ = 140° is 10° beyond the detector's limit of 130°.
        let beyond = 2.0 * 70f64.to_radians().sin() / WAVELENGTH;
        let Verdict::OverLimit { axis: 3, by_deg } = kind(beyond) else { panic!("{:?}", kind(beyond)) };
        assert!((by_deg - 10.0).abs() < 1e-9);
    }

    #[test]
    fn the_nearest_miss_is_what_is_told() {
        let judge = judge(&Preference::FarthestFromLimits);
        let beyond = 2.0 * 70f64.to_radians().sin() / WAVELENGTH;
        let node = q(0.3, 0.5, 0.8, beyond);
        let Settings::Judged(all) = judge.every_setting(node, WAVELENGTH) else { panic!() };
        let least = all.iter().filter_map(|s| s.verdict.miss_deg()).fold(f64::INFINITY, f64::min);
        let told = judge.verdict(node, WAVELENGTH).verdict.miss_deg().unwrap();
        assert!((told - least).abs() < 1e-8);
    }
}
