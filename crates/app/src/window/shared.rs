use std::sync::Arc;

use ringwright_core::aim::{Preference, Rule};
use ringwright_core::crystal::{SpaceGroup, UnitCell};
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::Instrument;
use ringwright_core::orient::Orientation;
use ringwright_core::reach::{Judge, ReachTable, Settings};
use ringwright_core::route::DriveList;
use ringwright_core::session::{FieldProblem, Resolved};
use ringwright_core::work::{AzimuthView, Oriented};

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
    /// Every reflection along its azimuth, or why this machine has none.
    pub azimuth: Result<AzimuthView, String>,
    /// One row for each wanted reflection.
    pub table: Arc<ReachTable>,
}

impl Reach {
    /// Every setting of one reflection, wanted or not.
    pub fn settings(&self, hkl: Hkl) -> Settings {
        self.judge.every_setting(self.orientation.q_in_head(hkl), self.wavelength_angstrom)
    }
}

/// A drive list with what it was made from.
#[derive(Debug)]
pub struct Plan {
    /// The inputs.
    pub resolved: Arc<Resolved>,
    /// The table it takes its rows from.
    pub reach: Arc<Reach>,
    /// The list.
    pub list: Arc<DriveList>,
}

/// Work in hand.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Busy {
    /// What is being done, in words.
    pub stage: &'static str,
    /// How far it is, 0 to 1, where that is known.
    pub fraction: Option<f32>,
}

/// The results that views show: snapshots, never changed in place. Each is the last good one.
#[derive(Debug, Clone, Default)]
pub struct Results {
    /// The inputs, the last time they fitted together.
    pub resolved: Option<Arc<Resolved>>,
    /// What does not fit together in the inputs as they are now.
    pub problems: Vec<FieldProblem>,
    /// U and what tells whether to trust it.
    pub oriented: Option<Arc<Oriented>>,
    /// Why the inputs as they are now give no orientation.
    pub orient_error: Option<String>,
    /// The last complete answer to what can be reached. A new one is a new `Arc`, so `Arc::ptr_eq` tells whether a
    /// picture has to be made again.
    pub reach: Option<Arc<Reach>>,
    /// Whether inputs have changed since, so that `reach` is the answer to an earlier question.
    pub reach_is_stale: bool,
    /// Why there is no new answer.
    pub reach_error: Option<String>,
    /// The drive list.
    pub plan: Option<Arc<Plan>>,
    /// Why there is no new one.
    pub plan_error: Option<String>,
    /// What is being worked on.
    pub busy: Option<Busy>,
    /// Whether the work was stopped by hand before it was done.
    pub stopped: bool,
}

impl Results {
    /// The drive list, if it belongs to the inputs as they are now.
    pub fn current_plan(&self) -> Option<&Arc<Plan>> {
        let settled = self.busy.is_none() && !self.reach_is_stale && self.plan_error.is_none();
        let reach = self.reach.as_ref().filter(|_| settled)?;
        self.plan.as_ref().filter(|plan| Arc::ptr_eq(&plan.reach, reach))
    }
}
