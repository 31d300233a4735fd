use std::sync::Arc;

use ringwright_core::aim::{Preference, Rule};
use ringwright_core::crystal::{SpaceGroup, UnitCell};
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::Instrument;
use ringwright_core::orient::Orientation;
use ringwright_core::reach::{Judge, ReachTable, Settings};

/// The reflection that every view shows: one selection for table, picture and dials.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Picked {
    /// The reflection that was chosen.
    pub hkl: Option<Hkl>,
    /// The one under the pointer, in whatever view the pointer is; set anew in each frame.
    pub hovered: Option<Hkl>,
}

/// What can be reached, with everything it was made from, so that no view ever mixes two answers: while a new one is
/// being made, this is the last one, whole.
#[derive(Debug)]
pub struct Reach {
    /// The cell.
    pub cell: UnitCell,
    /// The space group; its operations are what the table's column of absences counts.
    pub space_group: SpaceGroup,
    /// Wavelength in Å.
    pub wavelength_angstrom: f64,
    /// The machine.
    pub instrument: Instrument,
    /// U and UB.
    pub orientation: Orientation,
    /// The rules it was judged under.
    pub rules: Vec<Rule>,
    /// The choice among settings.
    pub preference: Preference,
    /// The judge, for every setting of one reflection.
    pub judge: Judge,
    /// One row for each wanted reflection.
    pub table: ReachTable,
}

impl Reach {
    /// Every setting of one reflection, wanted or not.
    pub fn settings(&self, hkl: Hkl) -> Settings {
        self.judge.every_setting(self.orientation.q_in_head(hkl), self.wavelength_angstrom)
    }
}

/// The results that views show: snapshots, never changed in place.
#[derive(Debug, Clone, Default)]
pub struct Results {
    /// The last complete answer to what can be reached. A new one is a new `Arc`, so `Arc::ptr_eq` tells whether a
    /// picture has to be made again.
    pub reach: Option<Arc<Reach>>,
    /// Whether inputs have changed since, so that `reach` is the answer to an earlier question.
    pub reach_is_stale: bool,
}
