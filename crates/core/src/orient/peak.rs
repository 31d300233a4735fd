use crate::frames::Hkl;
use crate::instrument::Setting;
use crate::quantity::AngleUncertainty;

/// Standard uncertainty in degrees that is assumed for every reading of a peak that states none: what centring on a good
/// day gives (common practice, no source). Reports call it "assumed".
pub const ASSUMED_UNCERTAINTY_DEG: f64 = 0.05;

/// A peak that was found: its indices and where every axis stood.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Peak {
    hkl: Hkl,
    setting: Setting,
    uncertainty: Option<AngleUncertainty>,
}

/// Numbers that are no peak.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum PeakError {
    /// 0 0 0 is the direct beam, NaN is nothing.
    #[error("{0} are no indices of a peak; accepted are finite numbers that are not all zero")]
    Indices(Hkl),
    /// A reading that is no number.
    #[error("reading {position} of peak {hkl} is {value}; accepted is a finite number of degrees")]
    Reading {
        /// The peak.
        hkl: Hkl,
        /// Which axis, counted from 1 in the order of the machine.
        position: usize,
        /// The reading.
        value: f64,
    },
}

impl Peak {
    /// The peak with these indices, these dial readings, and one standard uncertainty for each of the readings.
    ///
    /// # Errors
    /// If the indices are all zero or if a number is not finite.
    pub fn new(hkl: Hkl, setting: Setting, uncertainty: Option<AngleUncertainty>) -> Result<Self, PeakError> {
        if !hkl.is_finite() || hkl.to_vector().abs().max() < 1e-9 {
            return Err(PeakError::Indices(hkl));
        }
        match setting.readings_deg().iter().position(|reading| !reading.is_finite()) {
            Some(i) => Err(PeakError::Reading { hkl, position: i + 1, value: setting.readings_deg()[i] }),
            None => Ok(Self { hkl, setting, uncertainty }),
        }
    }

    /// Its indices.
    pub fn hkl(&self) -> Hkl {
        self.hkl
    }

    /// Where every axis stood.
    pub fn setting(&self) -> &Setting {
        &self.setting
    }

    /// The standard uncertainty of each reading.
    pub fn reading_uncertainty(&self) -> ReadingUncertainty {
        match self.uncertainty {
            Some(stated) => ReadingUncertainty { deg: stated.get(), assumed: false },
            None => ReadingUncertainty { deg: ASSUMED_UNCERTAINTY_DEG, assumed: true },
        }
    }
}

/// The standard uncertainty of each reading of a peak, and where it comes from.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ReadingUncertainty {
    /// In degrees.
    pub deg: f64,
    /// Whether the peak stated none, so that [`ASSUMED_UNCERTAINTY_DEG`] stands in.
    pub assumed: bool,
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn what_is_no_peak_is_refused() {
        let setting = Setting::new(&[1.0, 2.0]);
        assert!(matches!(Peak::new(Hkl::new(0.0, 0.0, 0.0), setting, None), Err(PeakError::Indices(_))));
        assert!(matches!(Peak::new(Hkl::new(f64::NAN, 0.0, 1.0), setting, None), Err(PeakError::Indices(_))));
        let broken = Setting::new(&[1.0, f64::INFINITY]);
        let refused = Peak::new(Hkl::new(1.0, 0.0, 0.0), broken, None);
        assert!(matches!(refused, Err(PeakError::Reading { position: 2, .. })));
    }

    #[test]
    fn a_peak_without_uncertainty_says_that_one_is_assumed() {
        let peak = Peak::new(Hkl::new(0.5, 0.0, 1.0), Setting::new(&[1.0]), None).unwrap();
        assert_eq!(peak.reading_uncertainty(), ReadingUncertainty { deg: ASSUMED_UNCERTAINTY_DEG, assumed: true });
        let stated = AngleUncertainty::new(0.01).unwrap();
        let peak = Peak::new(Hkl::new(0.5, 0.0, 1.0), Setting::new(&[1.0]), Some(stated)).unwrap();
        assert_eq!(peak.reading_uncertainty(), ReadingUncertainty { deg: 0.01, assumed: false });
    }
}
