//! The only place that connects rooms: from the inputs that fit together to everything that follows from them.
//!
//! Each function is pure and says by its arguments what it reads. [`Desk`] keeps the answers, so that only what depends on a
//! changed input is made again.

mod azimuth;
mod desk;
#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests;

pub use azimuth::{AzimuthView, NEAR_SPHERE, NearNode, RibbonStep, SIMULTANEOUS_D_ANGSTROM};
pub use desk::Desk;

use nalgebra::Matrix3;

use crate::aim::{CrystalOnHead, RuleError};
use crate::crystal::{DRange, NodesError};
use crate::frames::{Hkl, Vector};
use crate::orient::{OrientError, Orientation, OrientationReport, Peak, PeakError, Setup};
use crate::pace::Pace;
use crate::quantity::AngleUncertainty;
use crate::reach::{Judge, ReachTable, Settings, Stopped, Wanted};
use crate::route::{Candidate, Course, DriveList, Fingerprint, GivenList, Prover, RouteError, Verification};
use crate::session::{Resolved, Targets};
use crate::targets::{self, TargetsError};

/// Why there is no answer.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum WorkError {
    /// Whoever waited said no.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// Neither peaks nor a kept orientation say how the crystal sits.
    #[error(
        "{in_use} peak(s) in use and no kept orientation: accepted are two peaks or more that are not parallel, or an orientation kept from earlier"
    )]
    NoOrientation {
        /// Peaks that are not ignored.
        in_use: usize,
    },
    /// A peak that is none.
    #[error(transparent)]
    Peak(#[from] PeakError),
    /// The peaks give no orientation.
    #[error(transparent)]
    Orient(#[from] OrientError),
    /// The rules do not fit the machine.
    #[error("rules: {0}")]
    Rules(#[from] RuleError),
    /// The wanted reflections cannot be listed.
    #[error("targets: {0}")]
    Targets(TargetsError),
    /// There is no list.
    #[error(transparent)]
    Route(RouteError),
}

impl From<TargetsError> for WorkError {
    fn from(error: TargetsError) -> Self {
        match error {
            TargetsError::Stopped(stopped) => stopped.into(),
            other => Self::Targets(other),
        }
    }
}

impl From<NodesError> for WorkError {
    fn from(error: NodesError) -> Self {
        Self::Targets(error.into())
    }
}

impl From<RouteError> for WorkError {
    fn from(error: RouteError) -> Self {
        match error {
            RouteError::Stopped(stopped) => stopped.into(),
            other => Self::Route(other),
        }
    }
}

/// How the crystal sits, and what the peaks say about it.
#[derive(Debug, Clone, PartialEq)]
pub struct Oriented {
    /// U and UB.
    pub orientation: Orientation,
    /// Everything the peaks say; nothing if the orientation is one kept from earlier.
    pub report: Option<OrientationReport>,
}

/// The orientation: from the peaks in use if there are two or more, else the one that was kept.
///
/// # Errors
/// If there is neither, or if the peaks give none.
pub fn orient(inputs: &Resolved) -> Result<Oriented, WorkError> {
    let in_use: Vec<_> = inputs.peaks.iter().filter(|peak| !peak.ignored).collect();
    if in_use.len() < 2 {
        let kept = inputs.kept_orientation.clone();
        let orientation = kept.ok_or(WorkError::NoOrientation { in_use: in_use.len() })?;
        return Ok(Oriented { orientation, report: None });
    }
    let peak = |peak: &&crate::session::Peak| {
        let uncertainty = peak.uncertainty_deg.and_then(|deg| AngleUncertainty::new(deg).ok());
        Peak::new(peak.hkl, peak.setting, uncertainty)
    };
    let peaks = in_use.iter().map(peak).collect::<Result<Vec<_>, _>>()?;
    let setup = Setup {
        cell: &inputs.cell,
        group: &inputs.space_group,
        radiation: &inputs.radiation,
        instrument: &inputs.instrument,
    };
    // U depends on no rule: with rules that do not fit the machine, every node counts as reachable here.
    // Rules that speak of an azimuth or a surface wait for it.
    let judge = Judge::new(&inputs.instrument, &inputs.rules, &inputs.preference).ok();
    let reachable = |node: Vector<crate::frames::Head>| {
        judge.as_ref().is_none_or(|judge| judge.verdict(node, inputs.wavelength_angstrom).verdict.is_reachable())
    };
    let report = OrientationReport::new(&setup, &peaks, &reachable)?;
    Ok(Oriented { orientation: report.orientation().clone(), report: Some(report) })
}

/// The wanted reflections.
///
/// # Errors
/// If there are too many, or if `pace` says no.
pub fn wanted(inputs: &Resolved, pace: &impl Pace) -> Result<Wanted, WorkError> {
    let (cell, group) = (&inputs.cell, &inputs.space_group);
    Ok(match &inputs.targets {
        Targets::SpacingRange { min_angstrom, max_angstrom, with_absent } => {
            let range = match max_angstrom {
                Some(max) => DRange::new(min_angstrom.get(), max.get())?,
                None => DRange::down_to(min_angstrom.get())?,
            };
            targets::by_spacing(cell, group, range, *with_absent, pace)?
        }
        Targets::TwoThetaRange { min_deg, max_deg, with_absent } => {
            let range = [min_deg.map_or(0.0, |min| min.get()), max_deg.get()];
            targets::by_two_theta(cell, group, inputs.wavelength_angstrom, range, *with_absent, pace)?
        }
        Targets::List(nodes) => {
            targets::listed(group, nodes.iter().map(|node| Hkl::new(node.h.get(), node.k.get(), node.l.get())))
        }
    })
}

/// The judge of this machine and crystal under these rules and this preference. `ub` is in Å⁻¹.
///
/// # Errors
/// If the rules do not fit the machine.
pub fn judge(inputs: &Resolved, ub: &Matrix3<f64>) -> Result<Judge, WorkError> {
    let crystal = CrystalOnHead { ub: *ub, surface: inputs.surface };
    Ok(Judge::for_crystal(&inputs.instrument, &inputs.rules, &inputs.preference, &crystal)?)
}

/// The verdict on every wanted reflection.
///
/// # Errors
/// If the rules do not fit the machine, if the wanted reflections cannot be listed, or if `pace` says no.
pub fn reach(inputs: &Resolved, orientation: &Orientation, pace: &impl Pace) -> Result<ReachTable, WorkError> {
    let judge = judge(inputs, &orientation.ub)?;
    reach_of(inputs, orientation, wanted(inputs, pace)?, &judge, pace)
}

fn reach_of(
    inputs: &Resolved,
    orientation: &Orientation,
    wanted: Wanted,
    judge: &Judge,
    pace: &impl Pace,
) -> Result<ReachTable, WorkError> {
    let axis_count = inputs.instrument.axis_count();
    Ok(ReachTable::judge(wanted, &orientation.ub, inputs.wavelength_angstrom, judge, axis_count, pace)?)
}

/// Every setting of one reflection, wanted or not. For many, ask [`judge`] once.
///
/// # Errors
/// If the rules do not fit the machine.
pub fn settings(inputs: &Resolved, orientation: &Orientation, hkl: Hkl) -> Result<Settings, WorkError> {
    Ok(judge(inputs, &orientation.ub)?.every_setting(orientation.q_in_head(hkl), inputs.wavelength_angstrom))
}

/// The drive list of every reachable reflection of a table.
///
/// # Errors
/// If there are too many, if `pace` says no, or if a row fails its own check.
pub fn plan(
    inputs: &Resolved,
    orientation: &Orientation,
    table: &ReachTable,
    pace: &impl Pace,
) -> Result<DriveList, WorkError> {
    let candidate = |row: crate::reach::ReachRow| Some(Candidate { hkl: row.hkl, setting: row.setting? });
    let candidates: Vec<Candidate> = table.rows().filter_map(candidate).collect();
    let course =
        Course { instrument: &inputs.instrument, ub: &orientation.ub, wavelength_angstrom: inputs.wavelength_angstrom };
    Ok(DriveList::plan(&candidates, &course, pace)?)
}

/// What a list made for this orientation carries.
pub fn fingerprint(inputs: &Resolved, orientation: &Orientation) -> Fingerprint {
    Fingerprint::of(&orientation.ub, inputs.wavelength_angstrom, &inputs.instrument)
}

/// Proves or rejects each row of a list, whoever made it.
pub fn verify(inputs: &Resolved, orientation: &Orientation, list: &GivenList, tolerance_deg: f64) -> Verification {
    let prover = Prover {
        instrument: &inputs.instrument,
        ub: &orientation.ub,
        wavelength_angstrom: inputs.wavelength_angstrom,
        tolerance_deg,
    };
    Verification::of(list, &prover)
}
