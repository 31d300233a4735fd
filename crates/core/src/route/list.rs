use nalgebra::Matrix3;

use super::clock::{MachineClock, Place, Places};
use super::order::nearest_neighbour;
use super::proof::{DEFAULT_TOLERANCE_DEG, Fault, Prover};
use super::rounding::place_rounded;
use crate::frames::Hkl;
use crate::instrument::{Instrument, MAX_AXES, Setting};
use crate::pace::Pace;
use crate::reach::Stopped;

/// What a list is made for.
#[derive(Debug, Clone, Copy)]
pub struct Course<'a> {
    /// The machine.
    pub instrument: &'a Instrument,
    /// Columns a*, b*, c* in the head frame, Å⁻¹.
    pub ub: &'a Matrix3<f64>,
    /// Wavelength in Å.
    pub wavelength_angstrom: f64,
}

/// A reflection to be measured, and the setting chosen for it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Candidate {
    /// Indices.
    pub hkl: Hkl,
    /// Readings in degrees, each up to full turns.
    pub setting: Setting,
}

/// One row of a drive list.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct DriveRow {
    /// Indices.
    pub hkl: Hkl,
    /// Readings in degrees, rounded to [`super::DECIMALS`] decimals; exactly these were proven.
    pub setting: Setting,
    /// Seconds to drive here from the row before, or from park.
    pub drive_s: f64,
    /// Seconds of driving from the beginning to the arrival here.
    pub elapsed_s: f64,
}

/// A drive list: reflections in the order to measure them.
#[derive(Debug, Clone, PartialEq)]
pub struct DriveList {
    /// The rows in their order; the first drive starts at park.
    pub rows: Vec<DriveRow>,
    /// Reachable reflections that the list does not hold.
    pub left_out: Vec<LeftOut>,
    /// Seconds of driving in all.
    pub total_s: f64,
}

/// A reachable reflection that did not get into the list.
#[derive(Debug, Clone, PartialEq)]
pub struct LeftOut {
    /// Indices.
    pub hkl: Hkl,
    /// Why.
    pub reason: LeftOutReason,
}

/// Why a reachable reflection did not get into the list.
#[derive(Debug, Clone, PartialEq)]
pub enum LeftOutReason {
    /// An axis would have to leave the interval of its limits in which it is parked.
    NoDrive {
        /// Which, as a position among all axes.
        axis: usize,
        /// Where it should go, in degrees, up to full turns.
        to_deg: f64,
        /// Where it is parked, in degrees.
        park_deg: f64,
    },
    /// The setting rounded to the decimals of a list is not allowed any more.
    Rounded(Vec<Fault>),
}

/// Why there is no list.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum RouteError {
    /// Whoever waited said no.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// More rows than a list may have.
    #[error(
        "{reachable} reflections are reachable, more than the {MOST_ROWS} that one list may have; accepted are narrower targets"
    )]
    TooMany {
        /// How many there are.
        reachable: usize,
    },
    /// A setting that came from the solver fails the forward equation: a defect of this program, and no list is made.
    #[error("{hkl} fails its own check ({faults}): this is a defect of the program, and no list is written")]
    FailsProof {
        /// Indices.
        hkl: Hkl,
        /// The figures.
        faults: String,
    },
}

/// The most rows of one list: weeks of measuring.
pub const MOST_ROWS: usize = 200_000;

/// Seconds in a list are rounded to hundredths, so that the column adds up to the digit.
fn hundredths(seconds: f64) -> f64 {
    (seconds * 100.0).round() / 100.0
}

impl LeftOutReason {
    /// The reason in words with figures.
    pub fn text(&self, instrument: &Instrument) -> String {
        match self {
            Self::NoDrive { axis, to_deg, park_deg } => {
                let name = instrument.axes().nth(*axis).map_or("?", |axis| axis.name.as_str());
                format!("{name} cannot go from park at {park_deg:.4}° to {to_deg:.4}° without leaving its limits")
            }
            Self::Rounded(faults) => {
                format!("rounded to {} decimals: {}", super::DECIMALS, texts(faults, instrument))
            }
        }
    }
}

fn texts(faults: &[Fault], instrument: &Instrument) -> String {
    faults.iter().map(|fault| fault.text(instrument)).collect::<Vec<_>>().join("; ")
}

impl DriveList {
    /// Puts reflections in an order and proves every row before it is taken in.
    ///
    /// **Method.** Angles are rounded to the decimals of a list first; a reading at a limit with more decimals than that is
    /// rounded towards the inside. What is checked (forward equation, limits, direct beam) is the rounded setting. Then
    /// nearest neighbour from park: see the order's own description in this room. Each axis goes to the full turn
    /// that it reaches soonest without leaving the interval of its limits in which it is parked.
    ///
    /// **Limitation.** The setting of each reflection is taken as it was chosen; alternatives are not weighed against
    /// drive time. The order is greedy.
    ///
    /// # Errors
    /// If `pace` says no, if there are too many rows, or if a row fails the forward equation.
    pub fn plan(candidates: &[Candidate], course: &Course<'_>, pace: &impl Pace) -> Result<Self, RouteError> {
        if candidates.len() > MOST_ROWS {
            return Err(RouteError::TooMany { reachable: candidates.len() });
        }
        let clock = MachineClock::new(course.instrument);
        let prover = Prover {
            instrument: course.instrument,
            ub: course.ub,
            wavelength_angstrom: course.wavelength_angstrom,
            tolerance_deg: DEFAULT_TOLERANCE_DEG,
        };
        let (mut hkl, mut places, mut left_out) = (Vec::new(), Vec::new(), Vec::new());
        for candidate in candidates {
            match admit(candidate, &clock, &prover)? {
                Ok(found) => {
                    hkl.push(candidate.hkl);
                    places.push(found);
                }
                Err(reason) => left_out.push(LeftOut { hkl: candidate.hkl, reason }),
            }
        }
        let park = course.instrument.park();
        let order = nearest_neighbour(&clock, park.readings_deg(), &places, pace)?;
        let visits = order.into_iter().map(|i| (hkl[i], &places[i]));
        let rows = drive_along(visits, &clock, &prover)?;
        let total_s = rows.last().map_or(0.0, |row| row.elapsed_s);
        Ok(Self { rows, left_out, total_s })
    }
}

/// The places of a reflection on all axes, rounded and proven, or why it must be left out.
fn admit(
    candidate: &Candidate,
    clock: &MachineClock,
    prover: &Prover<'_>,
) -> Result<Result<Places, LeftOutReason>, RouteError> {
    let mut places = [Place::default(); MAX_AXES];
    let axes = clock.axes.iter().zip(prover.instrument.axes()).zip(candidate.setting.readings_deg());
    for (i, ((axis, described), &reading)) in axes.enumerate() {
        match place_rounded(axis, reading) {
            Some(place) => places[i] = place,
            None => {
                let reason = LeftOutReason::NoDrive { axis: i, to_deg: reading, park_deg: described.park_deg };
                return Ok(Err(reason));
            }
        }
    }
    let faults = prover.row(candidate.hkl, &lowest(&places, clock.axes.len())).faults;
    if faults.is_empty() {
        return Ok(Ok(places));
    }
    // At the very edge of the cone a rounded setting may fall in; nothing else may happen.
    if faults.iter().all(|fault| matches!(fault, Fault::InDirectBeam { .. })) {
        return Ok(Err(LeftOutReason::Rounded(faults)));
    }
    Err(RouteError::FailsProof { hkl: candidate.hkl, faults: texts(&faults, prover.instrument) })
}

fn lowest(places: &Places, axis_count: usize) -> Setting {
    let readings = places.map(|place| place.lowest_deg);
    Setting::new(&readings[..axis_count])
}

/// Drives from park through all visits, and proves each row and each drive as it will be written.
fn drive_along<'a>(
    visits: impl Iterator<Item = (Hkl, &'a Places)>,
    clock: &MachineClock,
    prover: &Prover<'_>,
) -> Result<Vec<DriveRow>, RouteError> {
    let mut rows = Vec::new();
    let (mut here, mut elapsed_s) = (prover.instrument.park(), 0.0);
    for (hkl, places) in visits {
        let mut readings = [0.0; MAX_AXES];
        for (i, (axis, from)) in clock.axes.iter().zip(here.readings_deg()).enumerate() {
            readings[i] = axis.arrival_deg(*from, &places[i]);
        }
        let setting = Setting::new(&readings[..clock.axes.len()]);
        let mut faults = prover.row(hkl, &setting).faults;
        faults.extend(prover.drive(&here, &setting));
        if !faults.is_empty() {
            return Err(RouteError::FailsProof { hkl, faults: texts(&faults, prover.instrument) });
        }
        let drive_s = hundredths(prover.drive_s(&here, &setting));
        elapsed_s = hundredths(elapsed_s + drive_s);
        rows.push(DriveRow { hkl, setting, drive_s, elapsed_s });
        here = setting;
    }
    Ok(rows)
}
