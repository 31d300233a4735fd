use std::path::Path;

use ringwright_core::exchange::drive_list::{self, Heading};
use ringwright_core::session::write_whole;

use super::shared::Plan;

/// Writes a drive list to a file: the old file or the new one is there at any moment.
///
/// # Errors
/// If the file cannot be written; the message names it.
pub fn write(path: &Path, plan: &Plan, title: &str) -> Result<(), String> {
    let heading = Heading {
        title,
        instrument: &plan.reach.instrument,
        ub: &plan.reach.orientation.ub,
        wavelength_angstrom: plan.reach.wavelength_angstrom,
    };
    let written = write_whole(path, |mut out| drive_list::write(&mut out, &plan.list, &heading));
    written.map_err(|error| format!("{}: not exported: {error}", path.display()))
}
