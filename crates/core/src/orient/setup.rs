use crate::crystal::{SpaceGroup, UnitCell};
use crate::instrument::Instrument;
use crate::radiation::Radiation;

/// What the peaks were measured on, with what and by what.
#[derive(Debug, Clone, Copy)]
pub struct Setup<'a> {
    /// The crystal's cell.
    pub cell: &'a UnitCell,
    /// Its space group.
    pub group: &'a SpaceGroup,
    /// The beam.
    pub radiation: &'a Radiation,
    /// The machine.
    pub instrument: &'a Instrument,
}

impl Setup<'_> {
    /// The wavelength in Å.
    pub fn wavelength_angstrom(&self) -> f64 {
        self.radiation.wavelength_angstrom()
    }
}
