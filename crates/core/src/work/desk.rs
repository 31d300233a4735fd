use std::sync::{Arc, Mutex, MutexGuard, PoisonError};

use nalgebra::Matrix3;

use super::{Oriented, WorkError};
use crate::aim::{Preference, Reference, Rule};
use crate::crystal::{SpaceGroup, UnitCell};
use crate::instrument::Instrument;
use crate::orient::Orientation;
use crate::pace::Pace;
use crate::radiation::Radiation;
use crate::reach::{ReachTable, Wanted};
use crate::route::DriveList;
use crate::session::{Peak, Resolved, Targets};

/// Keeps the answers of this room, each under exactly the inputs that it was made from. Asked again with the same inputs
/// it gives the same `Arc`; with others it makes the answer anew and keeps the last one until then. It starts no threads:
/// whoever asks waits, and may ask from any thread. While one thread makes an answer the others are not held up.
#[derive(Debug, Default)]
pub struct Desk {
    oriented: Drawer<OrientInputs, Oriented>,
    wanted: Drawer<WantedInputs, Wanted>,
    reach: Drawer<ReachInputs, ReachTable>,
    plan: Drawer<SameArc<ReachTable>, DriveList>,
}

#[derive(Debug, PartialEq)]
struct OrientInputs {
    cell: UnitCell,
    space_group: SpaceGroup,
    radiation: Radiation,
    instrument: Instrument,
    peaks: Vec<Peak>,
    kept: Option<Orientation>,
    // The reflection that decides must be reachable.
    rules: Vec<Rule>,
    preference: Preference,
}

#[derive(Debug, PartialEq)]
struct WantedInputs {
    cell: UnitCell,
    space_group: SpaceGroup,
    /// Only a range of 2θ depends on it.
    wavelength_angstrom: Option<f64>,
    targets: Targets,
}

#[derive(Debug, PartialEq)]
struct ReachInputs {
    wanted: SameArc<Wanted>,
    ub: Matrix3<f64>,
    surface: Option<Reference>,
    wavelength_angstrom: f64,
    instrument: Instrument,
    rules: Vec<Rule>,
    preference: Preference,
}

/// Equal only to itself: an answer that was not made anew is the same input to what follows from it.
#[derive(Debug)]
struct SameArc<T>(Arc<T>);

impl<T> PartialEq for SameArc<T> {
    fn eq(&self, other: &Self) -> bool {
        Arc::ptr_eq(&self.0, &other.0)
    }
}

impl Desk {
    /// An empty desk.
    pub fn new() -> Self {
        Self::default()
    }

    /// As [`super::orient`].
    ///
    /// # Errors
    /// As there.
    pub fn oriented(&self, inputs: &Resolved) -> Result<Arc<Oriented>, WorkError> {
        let key = OrientInputs {
            cell: inputs.cell.clone(),
            space_group: inputs.space_group.clone(),
            radiation: inputs.radiation.clone(),
            instrument: inputs.instrument.clone(),
            peaks: inputs.peaks.clone(),
            kept: inputs.kept_orientation.clone(),
            rules: inputs.rules.clone(),
            preference: inputs.preference.clone(),
        };
        self.oriented.take_or_make(key, || super::orient(inputs))
    }

    /// As [`super::wanted`].
    ///
    /// # Errors
    /// As there.
    pub fn wanted(&self, inputs: &Resolved, pace: &impl Pace) -> Result<Arc<Wanted>, WorkError> {
        let by_two_theta = matches!(inputs.targets, Targets::TwoThetaRange { .. });
        let key = WantedInputs {
            cell: inputs.cell.clone(),
            space_group: inputs.space_group.clone(),
            wavelength_angstrom: by_two_theta.then_some(inputs.wavelength_angstrom),
            targets: inputs.targets.clone(),
        };
        self.wanted.take_or_make(key, || super::wanted(inputs, pace))
    }

    /// As [`super::reach`], with the orientation that [`Self::oriented`] gives.
    ///
    /// # Errors
    /// As there, and if there is no orientation.
    pub fn reach(&self, inputs: &Resolved, pace: &impl Pace) -> Result<Arc<ReachTable>, WorkError> {
        let oriented = self.oriented(inputs)?;
        let judge = super::judge(inputs, &oriented.orientation.ub)?;
        let wanted = self.wanted(inputs, pace)?;
        let key = ReachInputs {
            wanted: SameArc(wanted.clone()),
            ub: oriented.orientation.ub,
            surface: inputs.surface,
            wavelength_angstrom: inputs.wavelength_angstrom,
            instrument: inputs.instrument.clone(),
            rules: inputs.rules.clone(),
            preference: inputs.preference.clone(),
        };
        let make = || super::reach_of(inputs, &oriented.orientation, Wanted::clone(&wanted), &judge, pace);
        self.reach.take_or_make(key, make)
    }

    /// As [`super::plan`], of the table that [`Self::reach`] gives.
    ///
    /// # Errors
    /// As there, and if there is no such table.
    pub fn plan(&self, inputs: &Resolved, pace: &impl Pace) -> Result<Arc<DriveList>, WorkError> {
        let oriented = self.oriented(inputs)?;
        let table = self.reach(inputs, pace)?;
        // The table was made from everything else that the list reads, so it stands for all of it.
        let make = || super::plan(inputs, &oriented.orientation, &table, pace);
        self.plan.take_or_make(SameArc(table.clone()), make)
    }

    /// The last orientation, also if inputs have changed since.
    pub fn last_oriented(&self) -> Option<Arc<Oriented>> {
        self.oriented.last()
    }

    /// The last table, also if inputs have changed since.
    pub fn last_reach(&self) -> Option<Arc<ReachTable>> {
        self.reach.last()
    }

    /// The last list, also if inputs have changed since.
    pub fn last_plan(&self) -> Option<Arc<DriveList>> {
        self.plan.last()
    }
}

/// One answer and the inputs it was made from.
#[derive(Debug)]
struct Drawer<K, V>(Mutex<Contents<K, V>>);

#[derive(Debug)]
struct Contents<K, V> {
    questions: u64,
    kept: Option<Kept<K, V>>,
}

#[derive(Debug)]
struct Kept<K, V> {
    /// The number of the question that it answers.
    question: u64,
    key: K,
    value: Arc<V>,
}

impl<K, V> Default for Drawer<K, V> {
    fn default() -> Self {
        Self(Mutex::new(Contents { questions: 0, kept: None }))
    }
}

impl<K: PartialEq, V> Drawer<K, V> {
    fn take_or_make(&self, key: K, make: impl FnOnce() -> Result<V, WorkError>) -> Result<Arc<V>, WorkError> {
        let question = {
            let mut contents = self.open();
            contents.questions += 1;
            let question = contents.questions;
            if let Some(kept) = contents.kept.as_mut().filter(|kept| kept.key == key) {
                kept.question = question;
                return Ok(kept.value.clone());
            }
            question
        };
        let value = Arc::new(make()?);
        let mut contents = self.open();
        // An answer that took long must not displace one to a later question.
        if contents.kept.as_ref().is_none_or(|kept| kept.question < question) {
            contents.kept = Some(Kept { question, key, value: value.clone() });
        }
        Ok(value)
    }

    fn last(&self) -> Option<Arc<V>> {
        self.open().kept.as_ref().map(|kept| kept.value.clone())
    }

    /// The contents are whole between any two statements here, so a panic elsewhere leaves them fit for use.
    fn open(&self) -> MutexGuard<'_, Contents<K, V>> {
        self.0.lock().unwrap_or_else(PoisonError::into_inner)
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::reach::Stopped;

    #[test]
    fn a_slow_answer_does_not_displace_a_later_one() {
        let drawer: Drawer<u8, u8> = Drawer::default();
        let slow = drawer.take_or_make(1, || {
            drawer.take_or_make(2, || Ok(20)).unwrap();
            Ok(10)
        });
        assert_eq!(*slow.unwrap(), 10, "whoever asked gets the answer");
        assert_eq!(*drawer.last().unwrap(), 20);
    }

    #[test]
    fn a_failure_keeps_the_last_answer() {
        let drawer: Drawer<u8, u8> = Drawer::default();
        let first = drawer.take_or_make(1, || Ok(10)).unwrap();
        assert_eq!(drawer.take_or_make(2, || Err(Stopped.into())), Err(WorkError::Stopped(Stopped)));
        assert!(Arc::ptr_eq(&drawer.last().unwrap(), &first));
        assert!(Arc::ptr_eq(&drawer.take_or_make(1, || Ok(99)).unwrap(), &first));
    }
}
