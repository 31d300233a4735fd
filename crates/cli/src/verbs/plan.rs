use std::io::{self, Write};

use ringwright_core::exchange::drive_list;
use ringwright_core::orient::Orientation;
use ringwright_core::reach::ReachTable;
use ringwright_core::route::DriveList;
use ringwright_core::work;

use super::night::Night;
use crate::args::PlanArgs;
use crate::deliver::Desktop;
use crate::failure::Failure;
use crate::summary::{left_out_text, plan_summary};
use crate::{DONE, NO};

pub fn plan(args: &PlanArgs, desktop: &mut Desktop<'_, '_>) -> Result<u8, Failure> {
    let night = Night::open(&args.session)?;
    night.tell_notes(desktop);
    let orientation = night.orient(desktop)?.orientation;
    let (table, list) = make(&night, &orientation, desktop)?;
    for left_out in &list.left_out {
        desktop.tell(&left_out_text(left_out, &night.inputs));
    }
    desktop.tell(&plan_summary(&table, &list));
    let status = if list.rows.is_empty() { NO } else { DONE };
    desktop.deliver(args.output.as_deref(), status, |mut out| write(&mut out, &list, &night, &orientation))
}

/// The table of what can be reached, and the drive list of it.
pub fn make(
    night: &Night,
    orientation: &Orientation,
    desktop: &Desktop<'_, '_>,
) -> Result<(ReachTable, DriveList), Failure> {
    let progress = desktop.progress("judging reflections");
    let table = work::reach(&night.inputs, orientation, &progress).map_err(|error| night.failure(&error))?;
    drop(progress);
    let progress = desktop.progress("ordering the list");
    let list = work::plan(&night.inputs, orientation, &table, &progress).map_err(|error| night.failure(&error))?;
    Ok((table, list))
}

pub fn write(out: &mut impl Write, list: &DriveList, night: &Night, orientation: &Orientation) -> io::Result<()> {
    let heading = drive_list::Heading {
        title: &night.opened.session.title,
        instrument: &night.inputs.instrument,
        ub: &orientation.ub,
        wavelength_angstrom: night.inputs.wavelength_angstrom,
    };
    drive_list::write(out, list, &heading)
}
