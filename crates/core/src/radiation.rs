//! The beam alone: wavelength and energy of X-rays and neutrons, and the characteristic lines by name.

mod lines;

use serde::{Deserialize, Serialize};

pub use lines::{EmissionLine, LineError, emission_lines};

use crate::quantity::{EnergyInKev, EnergyInMev, WavelengthInAngstrom};

/// h·c in keV Å, exact in the 2019 SI (rounded to the last digit of a double).
pub const HC_KEV_ANGSTROM: f64 = 12.398_419_843_320_026;

/// E·λ² of a free neutron in meV Å², h²/(2 mₙ), with mₙ of CODATA 2022; relative standard uncertainty 5e-10.
pub const NEUTRON_MEV_ANGSTROM2: f64 = 81.804_210_235_2;

/// What shines on the crystal, as a person states it.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub enum Radiation {
    /// A characteristic X-ray line: `Mo Ka1`, `Mo Ka2`, `Mo Ka` (weighted mean), `Cu Kb1,3`, …
    XrayLine {
        /// Element and line.
        name: EmissionLine,
    },
    /// X-rays of a given photon energy.
    XrayEnergy {
        /// Photon energy in keV.
        kev: EnergyInKev,
    },
    /// X-rays of a given wavelength.
    XrayWavelength {
        /// Wavelength in Å.
        angstrom: WavelengthInAngstrom,
    },
    /// Neutrons of a given wavelength.
    NeutronWavelength {
        /// Wavelength in Å.
        angstrom: WavelengthInAngstrom,
    },
    /// Neutrons of a given kinetic energy.
    NeutronEnergy {
        /// Energy in meV.
        mev: EnergyInMev,
    },
}

/// Wavelengths that are customary but stem from the older ångström-star scale, 15 to 24 parts per million shorter than
/// today's values of the same lines: value in Å, and the line it stands for.
const OLDER_SCALE: [(f64, &str); 4] =
    [(0.71073, "Mo Ka"), (1.54184, "Cu Ka"), (0.70930, "Mo Ka1"), (1.54056, "Cu Ka1")];

impl Radiation {
    /// The wavelength in Å.
    pub fn wavelength_angstrom(&self) -> f64 {
        match self {
            Self::XrayLine { name } => name.wavelength_angstrom(),
            Self::XrayEnergy { kev } => HC_KEV_ANGSTROM / kev.get(),
            Self::XrayWavelength { angstrom } | Self::NeutronWavelength { angstrom } => angstrom.get(),
            Self::NeutronEnergy { mev } => (NEUTRON_MEV_ANGSTROM2 / mev.get()).sqrt(),
        }
    }

    /// Whether these are neutrons.
    pub fn is_neutron(&self) -> bool {
        matches!(self, Self::NeutronWavelength { .. } | Self::NeutronEnergy { .. })
    }

    /// One line that names the radiation with the values used, for reports.
    pub fn describe(&self) -> String {
        let wavelength = self.wavelength_angstrom();
        if self.is_neutron() {
            let energy = NEUTRON_MEV_ANGSTROM2 / (wavelength * wavelength);
            return format!("neutrons, wavelength {wavelength:.7} Å, energy {energy:.5} meV");
        }
        let energy = HC_KEV_ANGSTROM / wavelength;
        match self {
            Self::XrayLine { name } => format!("X-rays, {name}, wavelength {wavelength:.7} Å, energy {energy:.5} keV"),
            _ => format!("X-rays, wavelength {wavelength:.7} Å, energy {energy:.5} keV"),
        }
    }

    /// A remark when the stated wavelength is a customary one of the older ångström-star scale.
    pub fn older_scale_note(&self) -> Option<String> {
        let Self::XrayWavelength { angstrom } = self else { return None };
        let (stated, line) = OLDER_SCALE.iter().find(|(value, _)| (value - angstrom.get()).abs() < 4e-6)?;
        let today = EmissionLine::parse(line).ok()?.wavelength_angstrom();
        let ppm = (today - stated) / stated * 1e6;
        Some(format!(
            "{stated:.5} Å is the customary value of {line} on the older ångström-star scale; today's value is \
             {today:.7} Å, {ppm:.0} parts per million longer. The stated value is used; XrayLine(name: \"{line}\") takes today's"
        ))
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn the_older_values_are_noticed_and_today_s_are_not() {
        let x = |v| Radiation::XrayWavelength { angstrom: WavelengthInAngstrom::new(v).unwrap() };
        assert!(x(0.71073).older_scale_note().unwrap().contains("0.7107473"));
        assert!(x(1.54184).older_scale_note().unwrap().contains("Cu Ka "));
        assert_eq!(x(0.7107473).older_scale_note(), None);
        assert_eq!(x(0.6199).older_scale_note(), None);
    }

    #[test]
    fn energy_and_wavelength_are_one_quantity() {
        let by_energy = Radiation::XrayEnergy { kev: EnergyInKev::new(20.0).unwrap() };
        assert!((by_energy.wavelength_angstrom() * 20.0 - HC_KEV_ANGSTROM).abs() < 1e-14);
        let neutrons = Radiation::NeutronEnergy { mev: EnergyInMev::new(81.804_210_235_2).unwrap() };
        assert!((neutrons.wavelength_angstrom() - 1.0).abs() < 1e-14);
    }
}
