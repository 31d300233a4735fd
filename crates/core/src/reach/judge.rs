use std::sync::Arc;

use crate::aim::{
    Attempt, Attempts, Branch, CrystalOnHead, Freedom, MAX_BRANCHES, NoSetting, Preference, Road, Rule, RuleError,
    Solver,
};
use crate::frames::{Head, Vector};
use crate::instrument::{Instrument, LIMIT_DUST_DEG, MAX_AXES, Setting, Travel};

use super::Verdict;
use super::constraint::{AboveSurface, Constraint, Scan};
use super::freest::Freest;

/// Judges every setting of a reflection against the machine's limits, and chooses among those allowed.
#[derive(Debug, Clone)]
pub struct Judge {
    road: Road,
    constraints: Vec<Arc<dyn Constraint>>,
    freest: Option<Freest>,
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
    /// There is none, whatever the axes.
    None(NoSetting),
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
    /// Prepares a machine under a set of rules and a preference, for rules that ask nothing of the crystal.
    ///
    /// # Errors
    /// If the rules do not fit the machine, or if they need a crystal.
    pub fn new(instrument: &Instrument, rules: &[Rule], preference: &Preference) -> Result<Self, RuleError> {
        Self::prepare(instrument, rules, preference, None)
    }

    /// [`Self::new`] for a crystal whose orientation is known: every rule will do, and beams from below its surface are
    /// refused.
    ///
    /// # Errors
    /// If the rules do not fit the machine.
    pub fn for_crystal(
        instrument: &Instrument,
        rules: &[Rule],
        preference: &Preference,
        crystal: &CrystalOnHead,
    ) -> Result<Self, RuleError> {
        Self::prepare(instrument, rules, preference, Some(crystal))
    }

    fn prepare(
        instrument: &Instrument,
        rules: &[Rule],
        preference: &Preference,
        crystal: Option<&CrystalOnHead>,
    ) -> Result<Self, RuleError> {
        let road = Road::new(instrument, rules, crystal)?;
        let surface = crystal.and_then(|crystal| AboveSurface::new(instrument, crystal.surface.as_ref()?, &crystal.ub));
        let constraints = surface.map(|surface| Arc::new(surface) as Arc<dyn Constraint>).into_iter().collect();
        let freest = Freest::new(instrument, rules, crystal)?;
        let mut counts = [false; MAX_AXES];
        for &axis in road.moving_sample_axes() {
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
        Ok(Self { road, constraints, freest, travel, counts, limited, preferred_deg, cone_deg, sin_half_cone })
    }

    /// From a node to every setting.
    pub fn road(&self) -> &Road {
        &self.road
    }

    /// Whether the short road serves, whose settings are scored a row at a time.
    fn short(&self) -> Option<&Solver> {
        self.road.solver().filter(|_| self.constraints.is_empty())
    }

    /// Room for [`Self::verdict_in`].
    pub fn room(&self) -> Room {
        Room(self.short().map(Solver::attempts))
    }

    /// Every setting of the reflection at `q_in_head` = U B h in Å⁻¹, for a wavelength in Å. Under *freest* those at the
    /// azimuth chosen.
    pub fn every_setting(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> Settings {
        let cone = self.cone_verdict(q_in_head, wavelength_angstrom);
        let mut all: Vec<JudgedSetting> = Vec::with_capacity(8);
        let solved = self.each_attempt(q_in_head, wavelength_angstrom, &mut |attempt| {
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
            Err(none) => Settings::None(none),
        }
    }

    fn each_attempt(
        &self,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
        found: &mut dyn FnMut(Attempt),
    ) -> Result<(), NoSetting> {
        match &self.freest {
            Some(freest) => {
                let psi_rad = freest.azimuth_rad(self, q_in_head, wavelength_angstrom)?;
                self.road.each_attempt_at(q_in_head, wavelength_angstrom, psi_rad, found)
            }
            None => self.road.each_attempt(q_in_head, wavelength_angstrom, found),
        }
    }

    /// The verdict where the settings are not kept in rows: one after another, the best so far.
    fn verdict_one_by_one(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> Judgement {
        let mut best: Option<(f64, JudgedSetting)> = None;
        let solved = self.each_attempt(q_in_head, wavelength_angstrom, &mut |attempt| {
            let judged = self.judge(&attempt);
            let merit = self.merit(&judged);
            if best.is_none_or(|(other, _)| merit > other + BETTER_BY_DEG) {
                best = Some((merit, judged));
            }
        });
        match (solved, best) {
            (Ok(()), Some((_, mut judged))) => {
                if let Some(verdict) = self.cone_verdict(q_in_head, wavelength_angstrom) {
                    judged.verdict = verdict;
                }
                Judgement { verdict: judged.verdict, setting: Some(judged) }
            }
            (Ok(()), None) => Judgement { verdict: Verdict::CannotMake { by_deg: 180.0 }, setting: None },
            (Err(none), _) => Judgement { verdict: none.into(), setting: None },
        }
    }

    /// What the preference makes of a setting, in degrees: more is better. Any allowed setting beats any that misses.
    pub(super) fn merit(&self, judged: &JudgedSetting) -> f64 {
        match (judged.verdict, &judged.setting, &self.preferred_deg) {
            (Verdict::Reachable, Some(setting), Some(wanted)) => self.nearness(setting, wanted),
            (Verdict::Reachable, ..) => judged.clearance_deg.min(MORE_THAN_ANY_LIMIT_DEG),
            (verdict, ..) => BELOW_ALL_ALLOWED - verdict.miss_deg().unwrap_or(360.0),
        }
    }

    /// The verdict on one reflection and the setting chosen, in room made by [`Self::room`].
    #[inline]
    pub fn verdict_in(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64, room: &mut Room) -> Judgement {
        let (Some(solver), Some(attempts)) = (self.short(), &mut room.0) else {
            return self.verdict_one_by_one(q_in_head, wavelength_angstrom);
        };
        if let Err(outside) = solver.solve(q_in_head, wavelength_angstrom, attempts) {
            return Judgement { verdict: NoSetting::Outside(outside).into(), setting: None };
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
        self.verdict_in(q_in_head, wavelength_angstrom, &mut self.room())
    }

    /// The cone holds for every setting of a reflection, because it depends on 2θ alone.
    #[inline]
    pub(super) fn cone_verdict(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> Option<Verdict> {
        let sin_theta = 0.5 * wavelength_angstrom * q_in_head.norm();
        if sin_theta > self.sin_half_cone {
            return None;
        }
        let by_deg = self.cone_deg - 2.0 * sin_theta.asin().to_degrees();
        (by_deg > LIMIT_DUST_DEG).then_some(Verdict::InDirectBeam { by_deg })
    }

    #[inline]
    pub(super) fn judge(&self, attempt: &Attempt) -> JudgedSetting {
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
        let setting = Setting::new(&readings[..given.len()]);
        let refusal = if verdict.is_reachable() { self.refusal(setting) } else { None };
        JudgedSetting { branch, setting: Some(setting), freedom, verdict: refusal.unwrap_or(verdict), clearance_deg }
    }

    fn refusal(&self, setting: Setting) -> Option<Verdict> {
        self.constraints.iter().find_map(|constraint| constraint.refusal(&Scan::at(setting)))
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

/// Room for the settings of one reflection, used again for the next.
#[derive(Debug, Clone)]
pub struct Room(Option<Attempts>);

impl From<NoSetting> for Verdict {
    fn from(none: NoSetting) -> Self {
        match none {
            NoSetting::Outside(outside) => {
                Self::OutsideSphere { longest_wavelength_angstrom: outside.longest_wavelength_angstrom }
            }
            NoSetting::NoAzimuth(why) => Self::NoAzimuth { why },
        }
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
