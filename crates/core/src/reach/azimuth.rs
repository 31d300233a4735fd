//! The family of settings of one reflection along the azimuth ψ, and the windows in which a setting is allowed.
//!
//! A window ends where an axis comes to a limit, where a branch ends, or where another constraint refuses. The first kind
//! is found exactly: with that axis held at that limit the machine has settings of its own, and their azimuths are the
//! ends. The others are found between looks at [`GRID_DEG`] by halving.

use std::f64::consts::PI;

use super::{Judge, JudgedSetting, Verdict};
use crate::aim::{Attempt, CrystalOnHead, NoSetting, Reference, Road, Rule, RuleError, azimuth_rad};
use crate::frames::{Head, Vector};
use crate::instrument::Instrument;
use crate::quantity::Degrees;

/// Distance in degrees between looks where the exact ends are known.
const GRID_DEG: f64 = 3.0;

/// Distance in degrees between looks where ends can only be found by looking.
const FINE_GRID_DEG: f64 = 0.5;

/// Looks this far to either side of an exact end, in radians, tell what is allowed there.
const BESIDE: f64 = 1e-6;

/// Ends are known to this, in radians.
const END_RAD: f64 = 1e-7;

/// Every azimuth of a machine under rules that settle all but one angle.
#[derive(Debug, Clone)]
pub struct AzimuthFamily {
    road: Road,
    /// The same machine with an axis at one of its limits, or a beam along the surface.
    at_limits: Vec<Road>,
    instrument: Instrument,
    reference: Vector<Head>,
    /// The rules with the azimuth open.
    rules: Vec<Rule>,
    grid_deg: f64,
}

/// A stretch of ψ in which a branch is allowed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Window {
    /// Which branch, by a number that stays the same along ψ; nothing where branches cannot be told apart.
    pub branch: Option<usize>,
    /// Where it begins, in degrees. A window across ±180° ends above 180°.
    pub from_deg: f64,
    /// Where it ends, in degrees.
    pub to_deg: f64,
    /// Why not before it; nothing for a full turn.
    pub before: Option<Verdict>,
    /// Why not after it; nothing for a full turn.
    pub after: Option<Verdict>,
}

/// The windows of a reflection.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct AzimuthWindows {
    /// Of each branch, in the order of branches and then of ψ.
    pub windows: Vec<Window>,
    /// Of any branch: from and to in degrees, apart from each other.
    pub any_deg: Vec<(f64, f64)>,
}

impl AzimuthFamily {
    /// The rules with the one that settles the azimuth taken out: a rule that says so by itself, else *bisecting*, else a
    /// tie, else the last hold of a sample axis. `reference` is what ψ counts from.
    ///
    /// # Errors
    /// If no rule can be taken out, or if the rules do not fit the machine.
    pub fn new(
        instrument: &Instrument,
        rules: &[Rule],
        crystal: &CrystalOnHead,
        reference: &Reference,
    ) -> Result<Self, RuleError> {
        let mut open = rules.to_vec();
        let freest = Rule::Freest { reference: *reference };
        let which = open_rule(instrument, rules).ok_or_else(no_family)?;
        open[which] = freest;
        let road = Road::new(instrument, &open, Some(crystal))?;
        let direction = reference.in_head(&crystal.ub).ok_or_else(no_family)?;
        let rules_open = open.clone();
        let mut at_limits = Vec::new();
        let mut complete = road.has_steady_branches();
        for axis in instrument.axes().filter(|axis| !axis.set_by_hand) {
            let settled = |rule: &Rule| matches!(rule, Rule::Hold { axis: held, .. } if *held == axis.name);
            let only_detector =
                instrument.detector_axes().len() == 1 && instrument.detector_axes()[0].name == axis.name;
            if only_detector || open.iter().any(settled) {
                continue;
            }
            for limit in axis.travel.intervals_deg().flat_map(|(low, high)| [low, high]) {
                let Ok(at_deg) = Degrees::new(limit) else { continue };
                open[which] = Rule::Hold { axis: axis.name.clone(), at_deg };
                match Road::new(instrument, &open, Some(crystal)) {
                    Ok(road) if road.has_steady_branches() => at_limits.push(road),
                    _ => complete = false,
                }
            }
        }
        if crystal.surface.is_some() {
            let Ok(at_deg) = Degrees::new(0.0) else { return Err(no_family()) };
            for grazing in [Rule::Incidence { at_deg }, Rule::Exit { at_deg }] {
                open[which] = grazing;
                match Road::new(instrument, &open, Some(crystal)) {
                    Ok(road) if road.has_steady_branches() => at_limits.push(road),
                    _ => complete = false,
                }
            }
        }
        let grid_deg = if complete { GRID_DEG } else { FINE_GRID_DEG };
        Ok(Self { road, at_limits, instrument: instrument.clone(), reference: direction, rules: rules_open, grid_deg })
    }

    /// The rules with *freest* in the place of the one that settled the azimuth.
    pub fn rules(&self) -> &[Rule] {
        &self.rules
    }

    /// What ψ counts from, a unit vector in the head frame.
    pub fn reference(&self) -> Vector<Head> {
        self.reference
    }

    /// Azimuths in radians at which to look, in order: evenly spread, and to both sides of each exact end.
    pub(super) fn looks(&self, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> Vec<f64> {
        let steps = (360.0 / self.grid_deg).round();
        let mut looks: Vec<f64> = (0..steps as usize).map(|i| -PI + 2.0 * PI * (i as f64 + 0.5) / steps).collect();
        for road in &self.at_limits {
            let _ = road.each_attempt(q_in_head, wavelength_angstrom, &mut |attempt| {
                if let Attempt::Setting { setting, .. } = attempt
                    && let Ok(psi) = azimuth_rad(&self.instrument, &setting, q_in_head, self.reference)
                {
                    looks.extend([psi - BESIDE, psi + BESIDE].map(|psi| psi - 2.0 * PI * (psi / (2.0 * PI)).round()));
                }
            });
        }
        looks.sort_unstable_by(f64::total_cmp);
        looks
    }

    /// Every setting at an azimuth in radians, judged; in the order of branches.
    ///
    /// # Errors
    /// If the reflection has none.
    pub fn at(
        &self,
        judge: &Judge,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
        psi_rad: f64,
        found: &mut dyn FnMut(JudgedSetting),
    ) -> Result<(), NoSetting> {
        let cone = judge.cone_verdict(q_in_head, wavelength_angstrom);
        self.road.each_attempt_at(q_in_head, wavelength_angstrom, psi_rad, &mut |attempt| {
            let judged = judge.judge(&attempt);
            found(JudgedSetting { verdict: cone.unwrap_or(judged.verdict), ..judged });
        })
    }

    /// Allowed, or why not, for the best setting at an azimuth in radians.
    ///
    /// # Errors
    /// If the reflection has no setting whatever the axes.
    pub fn verdict_at(
        &self,
        judge: &Judge,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
        psi_rad: f64,
    ) -> Result<Option<JudgedSetting>, NoSetting> {
        if judge.cone_verdict(q_in_head, wavelength_angstrom).is_some() {
            let mut first = None;
            self.at(judge, q_in_head, wavelength_angstrom, psi_rad, &mut |judged| {
                first.get_or_insert(judged);
            })?;
            return Ok(first);
        }
        let mut best: Option<(f64, JudgedSetting)> = None;
        self.at(judge, q_in_head, wavelength_angstrom, psi_rad, &mut |judged| {
            let merit = judge.merit(&judged);
            if best.is_none_or(|(other, _)| merit > other) {
                best = Some((merit, judged));
            }
        })?;
        Ok(best.map(|(_, judged)| judged))
    }

    /// The windows of a reflection at `q_in_head` = U B h in Å⁻¹.
    ///
    /// # Errors
    /// If it lies outside the sphere or has no azimuth.
    pub fn windows(
        &self,
        judge: &Judge,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
    ) -> Result<AzimuthWindows, NoSetting> {
        let question = Question { family: self, judge, q: q_in_head, wavelength: wavelength_angstrom };
        let looks = self.looks(q_in_head, wavelength_angstrom);
        let states = looks.iter().map(|&psi| question.states(psi)).collect::<Result<Vec<_>, _>>()?;
        let branches = states.iter().map(Vec::len).max().unwrap_or(0);
        let mut all = AzimuthWindows::default();
        for branch in 0..branches {
            question.of_branch(branch, &looks, &states, &mut all.windows);
        }
        all.any_deg = united(&all.windows);
        Ok(all)
    }
}

struct Question<'a> {
    family: &'a AzimuthFamily,
    judge: &'a Judge,
    q: Vector<Head>,
    wavelength: f64,
}

impl Question<'_> {
    /// The verdict of each branch at ψ; only the best one where branches cannot be told apart.
    fn states(&self, psi: f64) -> Result<Vec<Verdict>, NoSetting> {
        if !self.family.road.has_steady_branches() {
            let best = self.family.verdict_at(self.judge, self.q, self.wavelength, psi)?;
            return Ok(vec![best.map_or(Verdict::CannotMake { by_deg: 180.0 }, |judged| judged.verdict)]);
        }
        let mut states = Vec::with_capacity(8);
        self.family.at(self.judge, self.q, self.wavelength, psi, &mut |judged| {
            states.push(judged.verdict);
        })?;
        Ok(states)
    }

    fn state(&self, branch: usize, psi: f64) -> Verdict {
        let state = self.states(psi).ok().and_then(|states| states.get(branch).copied());
        state.unwrap_or(Verdict::CannotMake { by_deg: 180.0 })
    }

    fn of_branch(&self, branch: usize, looks: &[f64], states: &[Vec<Verdict>], windows: &mut Vec<Window>) {
        let state =
            |i: usize| states[i % states.len()].get(branch).copied().unwrap_or(Verdict::CannotMake { by_deg: 180.0 });
        let psi = |i: usize| looks[i % looks.len()] + if i >= looks.len() { 2.0 * PI } else { 0.0 };
        let count = looks.len();
        let number = self.family.road.has_steady_branches().then_some(branch);
        let Some(closed) = (0..count).find(|&i| !state(i).is_reachable()) else {
            windows.push(Window { branch: number, from_deg: -180.0, to_deg: 180.0, before: None, after: None });
            return;
        };
        // Once around, beginning where the branch is refused.
        let mut open: Option<(f64, Verdict)> = None;
        for i in closed..closed + count {
            match (state(i).is_reachable(), state(i + 1).is_reachable()) {
                (false, true) => open = Some(self.end(branch, psi(i + 1), psi(i))),
                (true, false) => {
                    let (to, after) = self.end(branch, psi(i), psi(i + 1));
                    if let Some((from, before)) = open.take() {
                        windows.push(self.window(number, [from, to], [before, after]));
                    }
                }
                _ => {}
            }
        }
    }

    fn window(&self, branch: Option<usize>, [from, to]: [f64; 2], [before, after]: [Verdict; 2]) -> Window {
        let (from, to) = (from.to_degrees(), to.to_degrees());
        let turns = if from >= 180.0 { 360.0 } else { 0.0 };
        Window { branch, from_deg: from - turns, to_deg: to - turns, before: Some(before), after: Some(after) }
    }

    /// The end of a window between an azimuth that is allowed and one that is not, and the reason beyond it.
    fn end(&self, branch: usize, allowed: f64, refused: f64) -> (f64, Verdict) {
        let (mut inside, mut outside) = (allowed, refused);
        let mut reason = None;
        while (outside - inside).abs() > END_RAD {
            let middle = 0.5 * (inside + outside);
            let state = self.state(branch, middle);
            if state.is_reachable() {
                inside = middle;
            } else {
                (outside, reason) = (middle, Some(state));
            }
        }
        (inside, reason.unwrap_or_else(|| self.state(branch, outside)))
    }
}

/// Stretches in degrees that one window or another covers.
fn united(windows: &[Window]) -> Vec<(f64, f64)> {
    let mut parts: Vec<(f64, f64)> = Vec::new();
    for window in windows {
        if window.to_deg - window.from_deg >= 360.0 {
            return vec![(-180.0, 180.0)];
        }
        parts.push((window.from_deg, window.to_deg.min(180.0)));
        if window.to_deg > 180.0 {
            parts.push((-180.0, window.to_deg - 360.0));
        }
    }
    parts.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut merged: Vec<(f64, f64)> = Vec::new();
    for (from, to) in parts {
        match merged.last_mut() {
            Some(last) if from <= last.1 + END_RAD.to_degrees() * 2.0 => last.1 = last.1.max(to),
            _ => merged.push((from, to)),
        }
    }
    merged
}

/// The rule to take out so that the azimuth is open.
fn open_rule(instrument: &Instrument, rules: &[Rule]) -> Option<usize> {
    let last = |wanted: &dyn Fn(&Rule) -> bool| rules.iter().rposition(wanted);
    let of_sample = |rule: &Rule| match rule {
        Rule::Hold { axis, .. } | Rule::Tie { axis, .. } => {
            instrument.sample_axes().iter().any(|other| other.name == *axis)
        }
        _ => false,
    };
    last(&Rule::settles_azimuth)
        .or_else(|| last(&|rule| matches!(rule, Rule::Bisecting | Rule::BisectingAbout { .. })))
        .or_else(|| last(&|rule| matches!(rule, Rule::Tie { .. }) && of_sample(rule)))
        .or_else(|| last(&|rule| matches!(rule, Rule::Hold { .. }) && of_sample(rule)))
}

fn no_family() -> RuleError {
    RuleError::NotCovered(
        "no rule settles the azimuth on this machine, so there is none to choose; accepted is a machine with a spare angle"
            .to_owned(),
    )
}

#[cfg(test)]
#[path = "azimuth_tests.rs"]
#[allow(clippy::unwrap_used)]
mod tests;
