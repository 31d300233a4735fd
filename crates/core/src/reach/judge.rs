use crate::aim::{
    Attempt, Attempts, Branch, Freedom, MAX_BRANCHES, OutsideSphere, Preference, Rule, RuleError, Solver,
};
use crate::frames::{Head, Vector};
use crate::instrument::{Instrument, LIMIT_DUST_DEG, MAX_AXES, Setting, Travel};

use super::Verdict;

/// Judges every setting of a reflection against the machine's limits, and chooses among those allowed.
#[derive(Debug, Clone)]
pub struct Judge {
    solver: Solver,
    travel: Vec<Travel>,
    /// Whether an axis counts in the measure *farthest from every limit*: moving sample axes do.
    counts: [bool; MAX_AXES],
    limited: Vec<LimitedAxis>,
    preferred_deg: Option<[Option<f64>; MAX_AXES]>,
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

/// A setting must be better by more than this, in degrees, to displace an earlier one: rounding decides no choice.
const BETTER_BY_DEG: f64 = 1e-9;

/// Where merits of settings that miss begin, far below that of any allowed one.
const BELOW_ALL_ALLOWED: f64 = -1e6;

/// Stands for the clearance of a machine without limits, so that comparisons stay defined.
const MORE_THAN_ANY_LIMIT_DEG: f64 = 1e5;

impl Judge {
    /// Prepares a machine under a set of rules and a preference.
    ///
    /// # Errors
    /// If the rules do not fit the machine.
    pub fn new(instrument: &Instrument, rules: &[Rule], preference: &Preference) -> Result<Self, RuleError> {
        let solver = Solver::new(instrument, rules)?;
        let mut counts = [false; MAX_AXES];
        for &axis in solver.moving_sample_axes() {
            counts[axis] = true;
        }
        let preferred_deg = match preference {
            Preference::FarthestFromLimits => None,
            Preference::NearestTo { readings_deg } => {
                let mut wanted = [None; MAX_AXES];
                for (slot, axis) in wanted.iter_mut().zip(instrument.axes()) {
                    *slot = readings_deg.get(&axis.name).map(|deg| deg.get());
                }
                Some(wanted)
            }
        };
        let travel: Vec<Travel> = instrument.axes().map(|axis| axis.travel.clone()).collect();
        let limited = |(axis, travel): (usize, &Travel)| {
            (!travel.is_endless()).then(|| LimitedAxis { axis, counts: counts[axis], travel: travel.clone() })
        };
        let limited = travel.iter().enumerate().filter_map(limited).collect();
        let cone_deg = instrument.direct_beam_half_angle_deg();
        let sin_half_cone = (0.5 * cone_deg).to_radians().sin();
        Ok(Self { solver, travel, counts, limited, preferred_deg, cone_deg, sin_half_cone })
    }

    /// The solver underneath.
    pub fn solver(&self) -> &Solver {
        &self.solver
    }

    /// Every setting of the reflection at `q_in_head` = U B h in Å⁻¹, for a wavelength in Å.
    pub fn every_setting(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> Settings {
        let cone = self.cone_verdict(q_in_head, wavelength_angstrom);
        let mut all: Vec<JudgedSetting> = Vec::with_capacity(8);
        let solved = self.solver.each_attempt(q_in_head, wavelength_angstrom, |attempt| {
            let mut judged = self.judge(&attempt);
            if let Some(verdict) = cone {
                judged.verdict = verdict;
            }
            if !all.iter().any(|other| same_place(other, &judged)) {
                all.push(judged);
            }
        });
        match solved {
            Ok(()) => Settings::Judged(all),
            Err(outside) => Settings::Outside(outside),
        }
    }

    /// The verdict on one reflection and the setting chosen. `attempts` is room made by [`Solver::attempts`].
    #[inline]
    pub fn verdict_in(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64, attempts: &mut Attempts) -> Judgement {
        if let Err(outside) = self.solver.solve(q_in_head, wavelength_angstrom, attempts) {
            let longest_wavelength_angstrom = outside.longest_wavelength_angstrom;
            return Judgement { verdict: Verdict::OutsideSphere { longest_wavelength_angstrom }, setting: None };
        }
        let merits = self.merits(attempts);
        let (mut best, mut best_merit) = (0, merits[0]);
        for (branch, &merit) in merits.iter().enumerate().take(attempts.count).skip(1) {
            if merit > best_merit + BETTER_BY_DEG {
                (best, best_merit) = (branch, merit);
            }
        }
        let mut judged = self.judge(&attempts.get(best));
        if let Some(verdict) = self.cone_verdict(q_in_head, wavelength_angstrom) {
            judged.verdict = verdict;
        }
        Judgement { verdict: judged.verdict, setting: Some(judged) }
    }

    /// [`Self::verdict_in`] with room made for the purpose.
    pub fn verdict(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> Judgement {
        self.verdict_in(q_in_head, wavelength_angstrom, &mut self.solver.attempts())
    }

    /// The cone holds for every setting of a reflection, because it depends on 2θ alone.
    #[inline]
    fn cone_verdict(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> Option<Verdict> {
        let sin_theta = 0.5 * wavelength_angstrom * q_in_head.norm();
        if sin_theta > self.sin_half_cone {
            return None;
        }
        let by_deg = self.cone_deg - 2.0 * sin_theta.asin().to_degrees();
        (by_deg > LIMIT_DUST_DEG).then_some(Verdict::InDirectBeam { by_deg })
    }

    #[inline]
    fn judge(&self, attempt: &Attempt) -> JudgedSetting {
        match *attempt {
            Attempt::CannotMake { branch, by_deg } => JudgedSetting {
                branch,
                setting: None,
                freedom: Freedom::None,
                verdict: Verdict::CannotMake { by_deg },
                clearance_deg: f64::NEG_INFINITY,
            },
            Attempt::Setting { branch, setting, freedom } => self.judge_setting(branch, &setting, freedom),
        }
    }

    #[inline]
    fn judge_setting(&self, branch: Branch, setting: &Setting, freedom: Freedom) -> JudgedSetting {
        let mut readings = [0.0; MAX_AXES];
        let mut clearance_deg = f64::INFINITY;
        let mut worst = (0, f64::INFINITY);
        let given = setting.readings_deg();
        for (i, (travel, &reading)) in self.travel.iter().zip(given).enumerate() {
            let near = self.preferred_deg.as_ref().and_then(|wanted| wanted[i]);
            let check = near.map_or_else(|| travel.check(reading), |near| travel.check_near(reading, near));
            readings[i] = check.reading_deg;
            if check.clearance_deg < worst.1 {
                worst = (i, check.clearance_deg);
            }
            if self.counts[i] {
                clearance_deg = clearance_deg.min(check.clearance_deg);
            }
        }
        let verdict = if worst.1 < -LIMIT_DUST_DEG {
            Verdict::OverLimit { axis: worst.0 as u8, by_deg: -worst.1 }
        } else {
            Verdict::Reachable
        };
        JudgedSetting { branch, setting: Some(Setting::new(&readings[..given.len()])), freedom, verdict, clearance_deg }
    }

    /// What the preference makes of each branch, in degrees: more is better. Any allowed setting beats any that misses.
    #[inline]
    fn merits(&self, attempts: &Attempts) -> [f64; MAX_BRANCHES] {
        let mut worst = [MORE_THAN_ANY_LIMIT_DEG; MAX_BRANCHES];
        let mut roomiest = [MORE_THAN_ANY_LIMIT_DEG; MAX_BRANCHES];
        for limited in &self.limited {
            let clearance = limited.travel.clearances_deg(&attempts.readings_deg[limited.axis]);
            for branch in 0..MAX_BRANCHES {
                worst[branch] = smaller(worst[branch], clearance[branch]);
                if limited.counts {
                    roomiest[branch] = smaller(roomiest[branch], clearance[branch]);
                }
            }
        }
        let mut merits = [0.0; MAX_BRANCHES];
        for (branch, merit) in merits.iter_mut().enumerate() {
            let worst = smaller(worst[branch], -attempts.miss_deg[branch]);
            *merit = if worst < -LIMIT_DUST_DEG { BELOW_ALL_ALLOWED + worst } else { roomiest[branch] };
        }
        if let Some(wanted) = &self.preferred_deg {
            for (branch, merit) in merits.iter_mut().enumerate().take(attempts.count) {
                if let (true, Attempt::Setting { setting, .. }) =
                    (*merit > 0.5 * BELOW_ALL_ALLOWED, attempts.get(branch))
                {
                    *merit = self.nearness(&setting, wanted);
                }
            }
        }
        merits
    }

    /// Minus the largest turn in degrees from a wanted position.
    fn nearness(&self, setting: &Setting, wanted: &[Option<f64>; MAX_AXES]) -> f64 {
        let turns = setting.readings_deg().iter().zip(&self.travel).zip(wanted).map(|((&reading, travel), wanted)| {
            wanted.map_or(0.0, |near| (travel.check_near(reading, near).reading_deg - near).abs())
        });
        -turns.fold(0.0, f64::max)
    }
}

/// An axis with limits, as the scoring of many settings wants it.
#[derive(Debug, Clone)]
struct LimitedAxis {
    axis: usize,
    counts: bool,
    travel: Travel,
}

/// The smaller of two numbers that are no NaN: one instruction, where `f64::min` needs several.
#[inline]
fn smaller(a: f64, b: f64) -> f64 {
    if b < a { b } else { a }
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
