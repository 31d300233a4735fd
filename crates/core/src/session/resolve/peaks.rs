use super::super::problem::FieldProblem;
use super::super::{PeakDocument, Session};
use super::{Note, in_words};
use crate::frames::Hkl;
use crate::instrument::{Instrument, LIMIT_DUST_DEG, Setting};

/// A found peak on the machine.
#[derive(Debug, Clone, PartialEq)]
pub struct Peak {
    /// Its indices.
    pub hkl: Hkl,
    /// Where every axis stood.
    pub setting: Setting,
    /// Standard uncertainty of each reading in degrees, if it was given.
    pub uncertainty_deg: Option<f64>,
    /// When it was measured, in seconds since the session began, if it was given.
    pub time_s: Option<f64>,
    /// Whether it is left out for now.
    pub ignored: bool,
}

impl Session {
    /// The peaks on this machine, in the order of the document.
    ///
    /// # Errors
    /// Every peak that has no reading for an axis, a reading for no axis, or the indices 0 0 0.
    pub fn resolve_peaks(&self, instrument: &Instrument) -> Result<Vec<Peak>, Vec<FieldProblem>> {
        let mut problems = Vec::new();
        let mut peaks = Vec::new();
        for (i, document) in self.peaks.iter().enumerate() {
            problems.extend(check(document, instrument, &format!("peaks[{i}]")));
            peaks.extend(on_machine(document, instrument));
        }
        if problems.is_empty() { Ok(peaks) } else { Err(problems) }
    }
}

fn check(peak: &PeakDocument, instrument: &Instrument, path: &str) -> Vec<FieldProblem> {
    let mut problems = Vec::new();
    if [peak.h, peak.k, peak.l].iter().all(|index| index.get() == 0.0) {
        problems.push(FieldProblem::new(
            path,
            "0 0 0 is the direct beam, no peak; accepted are indices that are not all 0",
        ));
    }
    let names = || instrument.axes().map(|axis| axis.name.as_str());
    for name in peak.readings_deg.keys() {
        if instrument.axis_index(name.as_str()).is_none() {
            let message = format!("{} has no axis {name}; accepted are {}", instrument.name(), in_words(names()));
            problems.push(FieldProblem::new(format!("{path}.readings_deg.{name}"), message));
        }
    }
    let missing: Vec<&str> = names().filter(|name| !peak.readings_deg.keys().any(|k| k.as_str() == *name)).collect();
    if !missing.is_empty() {
        let message = format!("no reading of {}; accepted is one for each of {}", in_words(missing), in_words(names()));
        problems.push(FieldProblem::new(format!("{path}.readings_deg"), message));
    }
    problems
}

/// Nothing if a reading is missing.
fn on_machine(peak: &PeakDocument, instrument: &Instrument) -> Option<Peak> {
    let reading = |name: &_| Some(peak.readings_deg.get(name)?.get());
    let readings = instrument.axes().map(|axis| reading(&axis.name)).collect::<Option<Vec<f64>>>()?;
    Some(Peak {
        hkl: Hkl::new(peak.h.get(), peak.k.get(), peak.l.get()),
        setting: Setting::new(&readings),
        uncertainty_deg: peak.uncertainty_deg.map(|u| u.get()),
        time_s: peak.time_s.map(|t| t.get()),
        ignored: peak.ignored,
    })
}

/// Readings that the machine as described cannot show: the peak is real, so the description may be wrong.
pub(super) fn notes(instrument: &Instrument, peaks: &[Peak]) -> Vec<Note> {
    let mut notes = Vec::new();
    for (i, peak) in peaks.iter().enumerate() {
        for (axis, &reading) in instrument.axes().zip(peak.setting.readings_deg()) {
            let over = -axis.travel.clearance_as_read_deg(reading);
            if over > LIMIT_DUST_DEG {
                let intervals: Vec<String> =
                    axis.travel.intervals_deg().map(|(a, b)| format!("{a}° to {b}°")).collect();
                let message = format!(
                    "{reading}° of {} lies {over:.4}° outside its limits {} (overshoot taken off); the reading is used",
                    axis.name,
                    intervals.join(" or ")
                );
                notes.push(Note::new(format!("peaks[{i}].readings_deg.{}", axis.name), message));
            }
        }
    }
    notes
}
