use std::sync::Arc;

use ringwright_core::aim::NoSetting;
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::Setting;
use ringwright_core::reach::{JudgedSetting, Settings, Verdict};

use super::super::{Picked, Reach};

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

    /// Every setting: the chosen one first, then those allowed by clearance, then those that miss, the nearest first.
    pub fn all(&self) -> &[JudgedSetting] {
        &self.all
    }

    /// Whether the first setting is the one chosen for measuring; otherwise it is the nearest miss.
    pub fn has_chosen(&self) -> bool {
        self.chosen
    }

    /// Set if there is no setting at all, whatever the axes.
    pub fn none(&self) -> Option<NoSetting> {
        self.none
    }

    /// The place in [`Self::all`] of the one that is shown.
    pub fn shown_index(&self) -> usize {
        self.shown
    }

    /// Shows another; a place that does not exist changes nothing.
    pub fn show(&mut self, index: usize) {
        if index < self.all.len() {
            self.shown = index;
        }
    }

    /// The one that is shown.
    pub fn shown(&self) -> Option<&JudgedSetting> {
        self.all.get(self.shown)
    }

    /// Readings of the one that is shown, if the axes can make it.
    pub fn shown_setting(&self) -> Option<Setting> {
        self.shown().and_then(|judged| judged.setting)
    }
}

fn ordered(mut all: Vec<JudgedSetting>, reach: &Reach, hkl: Hkl) -> Vec<JudgedSetting> {
    let q = reach.orientation.q_in_head(hkl);
    let told = reach.judge.verdict(q, reach.wavelength_angstrom).setting.map(|s| s.branch);
    let rank = |s: &JudgedSetting| match s.verdict {
        _ if Some(s.branch) == told => (0, 0.0),
        Verdict::Reachable => (1, -s.clearance_deg),
        verdict => (2, verdict.miss_deg().unwrap_or(f64::INFINITY)),
    };
    all.sort_by(|a, b| {
        let ((a, x), (b, y)) = (rank(a), rank(b));
        a.cmp(&b).then(x.total_cmp(&y))
    });
    all
}
