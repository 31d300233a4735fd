use std::sync::Arc;

use ringwright_core::session::{FieldProblem, MachineLibrary, Resolved, Session};
use ringwright_core::work::{self, AzimuthView, Oriented, WorkError};

use super::desk::Ticket;
use super::shared::{Plan, Reach, Results};

/// One stage's answer.
pub enum Answer {
    /// The inputs fit together, or do not.
    Resolved(Result<Arc<Resolved>, Vec<FieldProblem>>),
    /// U, or why there is none.
    Oriented(Result<Arc<Oriented>, String>),
    /// What can be reached, or why that is not known.
    Reached(Result<Arc<Reach>, String>),
    /// The drive list, or why there is none; with it the work is done.
    Planned(Result<Arc<Plan>, String>),
    /// Someone said stop.
    Stopped,
}

impl Answer {
    /// Whether the worker rests after it.
    pub fn ends(&self) -> bool {
        match self {
            Self::Resolved(of) => of.is_err(),
            Self::Oriented(of) => of.is_err(),
            Self::Reached(of) => of.is_err(),
            Self::Planned(_) | Self::Stopped => true,
        }
    }

    /// Puts the answer where the views look. What failed leaves the last good value in place.
    pub fn put_into(self, results: &mut Results) {
        match self {
            Self::Resolved(Ok(resolved)) => {
                results.problems.clear();
                results.resolved = Some(resolved);
            }
            Self::Resolved(Err(problems)) => results.problems = problems,
            Self::Oriented(answer) => keep(&mut results.oriented, &mut results.orient_error, answer),
            Self::Reached(answer) => {
                results.reach_is_stale = answer.is_err();
                keep(&mut results.reach, &mut results.reach_error, answer);
            }
            Self::Planned(answer) => keep(&mut results.plan, &mut results.plan_error, answer),
            Self::Stopped => results.stopped = true,
        }
    }
}

fn keep<T>(value: &mut Option<T>, error: &mut Option<String>, answer: Result<T, String>) {
    match answer {
        Ok(new) => {
            *error = None;
            *value = Some(new);
        }
        Err(message) => *error = Some(message),
    }
}

/// Derives stage by stage. What depends on nothing that changed is not made again.
#[derive(Default)]
pub struct Chain {
    desk: work::Desk,
    reach: Option<Arc<Reach>>,
    plan: Option<Arc<Plan>>,
}

impl Chain {
    /// Tells each answer, until a stage fails or the ticket is stopped.
    pub fn derive(
        &mut self,
        session: &Session,
        library: &MachineLibrary,
        ticket: &Ticket,
        tell: &mut dyn FnMut(Answer),
    ) {
        if let Err(last) = self.stages(session, library, ticket, tell) {
            tell(if ticket.is_stopped() { Answer::Stopped } else { last });
        }
    }

    fn stages(
        &mut self,
        session: &Session,
        library: &MachineLibrary,
        ticket: &Ticket,
        tell: &mut dyn FnMut(Answer),
    ) -> Result<(), Answer> {
        ticket.begin(0);
        let resolved = Arc::new(session.resolve(library).map_err(|problems| Answer::Resolved(Err(problems)))?);
        tell(Answer::Resolved(Ok(Arc::clone(&resolved))));
        ticket.begin(1);
        let oriented = self.desk.oriented(&resolved).map_err(|e| Answer::Oriented(Err(e.to_string())))?;
        tell(Answer::Oriented(Ok(Arc::clone(&oriented))));
        ticket.begin(2);
        let reach = self.reach(&resolved, &oriented, ticket).map_err(|e| Answer::Reached(Err(e.to_string())))?;
        tell(Answer::Reached(Ok(Arc::clone(&reach))));
        ticket.begin(3);
        let plan = self.plan(&resolved, &reach, ticket).map_err(|e| Answer::Planned(Err(e.to_string())))?;
        tell(Answer::Planned(Ok(plan)));
        Ok(())
    }

    fn reach(&mut self, resolved: &Resolved, oriented: &Oriented, ticket: &Ticket) -> Result<Arc<Reach>, WorkError> {
        let table = self.desk.reach(resolved, ticket)?;
        if let Some(reach) = self.reach.as_ref().filter(|reach| Arc::ptr_eq(&reach.table, &table)) {
            return Ok(Arc::clone(reach));
        }
        let azimuth = match AzimuthView::new(resolved, &oriented.orientation, None, ticket) {
            Err(stopped @ WorkError::Stopped(_)) => return Err(stopped),
            made => made.map_err(|error| error.to_string()),
        };
        let reach = Arc::new(Reach {
            cell: resolved.cell.clone(),
            space_group: resolved.space_group.clone(),
            wavelength_angstrom: resolved.wavelength_angstrom,
            instrument: resolved.instrument.clone(),
            orientation: oriented.orientation.clone(),
            rules: resolved.rules.clone(),
            preference: resolved.preference.clone(),
            judge: work::judge(resolved, &oriented.orientation.ub)?,
            azimuth,
            table,
        });
        self.reach = Some(Arc::clone(&reach));
        Ok(reach)
    }

    fn plan(&mut self, resolved: &Arc<Resolved>, reach: &Arc<Reach>, ticket: &Ticket) -> Result<Arc<Plan>, WorkError> {
        let list = self.desk.plan(resolved, ticket)?;
        let same = |plan: &&Arc<Plan>| Arc::ptr_eq(&plan.list, &list) && Arc::ptr_eq(&plan.reach, reach);
        if let Some(plan) = self.plan.as_ref().filter(same) {
            return Ok(Arc::clone(plan));
        }
        let plan = Arc::new(Plan { resolved: Arc::clone(resolved), reach: Arc::clone(reach), list });
        self.plan = Some(Arc::clone(&plan));
        Ok(plan)
    }
}
