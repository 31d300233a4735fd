use super::later::weigh;
use super::mend::find_mend;
use super::others::find_others;
use super::warning::find_warnings;
use super::{
    Confirmation, LaterPeak, Mend, OrientError, Orientation, OtherAssignments, Peak, Setup, TwoPeakOrientation,
    Warning, orient_by_two,
};
use crate::frames::{Head, Vector};

/// All that the found peaks say about the orientation: what it is, how it fits, what else would fit, what to do next.
#[derive(Debug, Clone, PartialEq)]
pub struct OrientationReport {
    /// The beam in words, with the wavelength used.
    pub radiation: String,
    /// A remark on the wavelength, if it is one of the older scale.
    pub radiation_note: Option<String>,
    /// The space group in words.
    pub group: String,
    /// The machine's name.
    pub machine: String,
    /// U, UB and how the first two peaks fit.
    pub pair: TwoPeakOrientation,
    /// What a person should look at.
    pub warnings: Vec<Warning>,
    /// Which other indices would mend a misfit.
    pub mend: Mend,
    /// Which other indices fit as well.
    pub others: OtherAssignments,
    /// The third and later peaks against this orientation.
    pub later: Vec<LaterPeak>,
    /// Whether it can be trusted, and the reflection that decides.
    pub confirmation: Confirmation,
}

impl OrientationReport {
    /// Orients the crystal by the first two peaks and weighs the others. `reachable` says whether the machine can bring a
    /// node, given in the head frame in Å⁻¹, to diffraction.
    ///
    /// # Errors
    /// If there are fewer than two peaks, if the first two give no orientation, or if a later one cannot be a peak at all.
    pub fn new(setup: &Setup, peaks: &[Peak], reachable: &dyn Fn(Vector<Head>) -> bool) -> Result<Self, OrientError> {
        let [first, second, rest @ ..] = peaks else { return Err(OrientError::TooFewPeaks { given: peaks.len() }) };
        let wavelength = setup.wavelength_angstrom();
        let mut pair = orient_by_two(setup.cell, wavelength, setup.instrument, first, second)?;
        let later = rest.iter().enumerate().map(|(i, peak)| LaterPeak::of(setup, &pair, i + 2, peak));
        let later = later.collect::<Result<Vec<_>, _>>()?;
        let mend = find_mend(setup, &pair);
        let others = find_others(setup, &pair);
        let confirmation = weigh(setup, &pair, &others, &later, reachable);
        pair.orientation.confirmed = confirmation.is_confirmed();
        Ok(Self {
            radiation: setup.radiation.describe(),
            radiation_note: setup.radiation.older_scale_note(),
            group: setup.group.to_string(),
            machine: setup.instrument.name().to_owned(),
            warnings: find_warnings(setup.group, &pair, &later),
            pair,
            mend,
            others,
            later,
            confirmation,
        })
    }

    /// The orientation, marked as confirmed or not.
    pub fn orientation(&self) -> &Orientation {
        &self.pair.orientation
    }
}
