use std::sync::Arc;

use ringwright_core::aim::NoSetting;
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::Setting;
use ringwright_core::reach::{JudgedSetting, Settings, Verdict};

use super::super::{Picked, Reach};

/// Settings whose misses differ by less, in degrees, miss by the same: they are mirror images of each other.
const SAME_MISS_DEG: f64 = 1e-6;

/// Every setting of the selected reflection, the chosen one first, and which of them is shown in the dials and in the
/// lattice. Made again only when the selection or the results change.
#[derive(Debug, Default)]
pub struct PickedSettings {
    made_for: Option<(Arc<Reach>, Hkl)>,
    all: Vec<JudgedSetting>,
    /// Whether the first of them is reachable, so that it was chosen and not merely missed least.
    chosen: bool,
    none: Option<NoSetting>,
    shown: usize,
    turned: Option<Turned>,
}

/// The settings at an azimuth to which the reflection was turned by hand.
#[derive(Debug)]
struct Turned {
    psi_deg: f64,
    /// Those allowed by clearance, then those that miss, the nearest first.
    all: Vec<JudgedSetting>,
    shown: usize,
}

impl PickedSettings {
    /// Brings the list up to date; to be called once a frame, before the views that show it.
    pub fn update(&mut self, reach: Option<&Arc<Reach>>, picked: &Picked) {
        let (Some(reach), Some(hkl)) = (reach, picked.hkl) else {
            *self = Self::default();
            return;
        };
        if self.made_for.as_ref().is_some_and(|(r, h)| Arc::ptr_eq(r, reach) && *h == hkl) {
            return;
        }
        *self = Self { made_for: Some((Arc::clone(reach), hkl)), ..Self::default() };
        match reach.settings(hkl) {
            Settings::None(none) => self.none = Some(none),
            Settings::Judged(all) => {
                self.all = ordered(all, reach, hkl);
                self.chosen = self.all.first().is_some_and(|s| s.verdict.is_reachable());
            }
        }
    }

    /// Every setting: the chosen one first, then those allowed by clearance, then those that miss, the nearest first. Turned
    /// by hand, those at that azimuth in the same order, none of them chosen.
    pub fn all(&self) -> &[JudgedSetting] {
        self.turned.as_ref().map_or(&self.all, |turned| &turned.all)
    }

    /// The azimuth in degrees to which the reflection was turned by hand.
    pub fn by_hand_deg(&self) -> Option<f64> {
        self.turned.as_ref().map(|turned| turned.psi_deg)
    }

    /// Shows the settings at another azimuth, in degrees, until [`Self::turn_back`] or another selection. Of those allowed
    /// there, or else of those that miss least, the one nearest to what was shown before.
    pub fn turn_to(&mut self, psi_deg: f64) {
        let Some((reach, hkl)) = &self.made_for else { return };
        let Ok(view) = &reach.azimuth else { return };
        let Settings::Judged(mut all) = view.settings_at(*hkl, psi_deg) else { return };
        sort_by_rank(&mut all, |_| false);
        let before = self.shown_setting();
        let as_good = all.first().map_or(0, |best| all.iter().filter(|s| is_as_good(s, best)).count());
        let apart = |i: &usize| match (all[*i].setting, before) {
            (Some(a), Some(b)) => turned_by_deg(&a, &b),
            _ => f64::INFINITY,
        };
        let shown = (0..as_good).min_by(|a, b| apart(a).total_cmp(&apart(b))).unwrap_or(0);
        self.turned = Some(Turned { psi_deg, all, shown });
    }

    /// Goes back to the settings under the rules, and to the one that was shown of them.
    pub fn turn_back(&mut self) {
        self.turned = None;
    }

    /// Whether the first setting is the one chosen for measuring; otherwise it is the nearest miss.
    pub fn has_chosen(&self) -> bool {
        self.chosen && self.turned.is_none()
    }

    /// Set if there is no setting at all, whatever the axes.
    pub fn none(&self) -> Option<NoSetting> {
        self.none
    }

    /// The place in [`Self::all`] of the one that is shown.
    pub fn shown_index(&self) -> usize {
        self.turned.as_ref().map_or(self.shown, |turned| turned.shown)
    }

    /// Shows another; a place that does not exist changes nothing.
    pub fn show(&mut self, index: usize) {
        if index >= self.all().len() {
            return;
        }
        match &mut self.turned {
            Some(turned) => turned.shown = index,
            None => self.shown = index,
        }
    }

    /// The one that is shown.
    pub fn shown(&self) -> Option<&JudgedSetting> {
        self.all().get(self.shown_index())
    }

    /// Readings of the one that is shown, if the axes can make it.
    pub fn shown_setting(&self) -> Option<Setting> {
        self.shown().and_then(|judged| judged.setting)
    }
}

fn ordered(mut all: Vec<JudgedSetting>, reach: &Reach, hkl: Hkl) -> Vec<JudgedSetting> {
    let q = reach.orientation.q_in_head(hkl);
    let told = reach.judge.verdict(q, reach.wavelength_angstrom).setting.map(|s| s.branch);
    sort_by_rank(&mut all, |s| Some(s.branch) == told);
    all
}

/// `chosen` first, then those allowed by clearance, then those that miss, the nearest first.
fn sort_by_rank(all: &mut [JudgedSetting], chosen: impl Fn(&JudgedSetting) -> bool) {
    let rank = |s: &JudgedSetting| match s.verdict {
        _ if chosen(s) => (0, 0.0),
        Verdict::Reachable => (1, -s.clearance_deg),
        verdict => (2, verdict.miss_deg().unwrap_or(f64::INFINITY)),
    };
    all.sort_by(|a, b| {
        let ((a, x), (b, y)) = (rank(a), rank(b));
        a.cmp(&b).then(x.total_cmp(&y))
    });
}

/// Whether a setting may stand for the best: both are allowed, or it misses by as much.
fn is_as_good(setting: &JudgedSetting, best: &JudgedSetting) -> bool {
    match (setting.verdict.miss_deg(), best.verdict.miss_deg()) {
        (Some(own), Some(least)) => own <= least + SAME_MISS_DEG,
        _ => setting.verdict.kind() == best.verdict.kind(),
    }
}

/// The most that an axis would turn between two settings, in degrees.
fn turned_by_deg(a: &Setting, b: &Setting) -> f64 {
    let turns = a.readings_deg().iter().zip(b.readings_deg()).map(|(a, b)| {
        let by = a - b;
        (by - 360.0 * (by / 360.0).round()).abs()
    });
    turns.fold(0.0, f64::max)
}
