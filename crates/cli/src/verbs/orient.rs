use ringwright_core::orient::Orientation;
use ringwright_core::quantity::Component;
use ringwright_core::session::{Matrix, OrientationDocument, SaveOutcome};
use ringwright_core::work::{self, Oriented};

use super::night::{Night, peaks_disagree};
use crate::args::OrientArgs;
use crate::deliver::Desktop;
use crate::failure::Failure;
use crate::{DONE, NO};

pub fn orient(args: &OrientArgs, desktop: &mut Desktop<'_, '_>) -> Result<u8, Failure> {
    let mut night = Night::open(&args.session)?;
    night.tell_notes(desktop);
    let oriented = work::orient(&night.inputs).map_err(|error| night.failure(&error))?;
    let status = if peaks_disagree(&oriented) { NO } else { DONE };
    let report = report(&oriented, &night);
    desktop.deliver(None, status, |out| out.write_all(report.as_bytes()))?;
    if let Some(path) = &args.output {
        night.opened.session.orientation = Some(document(&oriented.orientation)?);
        let had_comments = night.opened.has_comments();
        let saved = night.opened.save_as(path).map_err(Failure::new)?;
        desktop.tell(&saved_text(&saved, had_comments));
    }
    Ok(status)
}

/// The report of the peaks, or what is known of an orientation that was kept.
pub fn report(oriented: &Oriented, night: &Night) -> String {
    if let Some(report) = &oriented.report {
        return report.render();
    }
    let orientation = &oriented.orientation;
    let trust = if orientation.confirmed { "CONFIRMED earlier" } else { "UNCONFIRMED" };
    let mut page = format!(
        "{trust}: this orientation was kept from earlier; no peaks in use speak for it or against it.\n\n{}\n{}, {}\n\n",
        night.inputs.radiation.describe(),
        night.inputs.instrument.name(),
        night.inputs.space_group
    );
    page.push_str("  UB in 1/Å (columns a*, b*, c* in the head frame, no 2π)\n");
    for row in orientation.ub.row_iter() {
        let elements: Vec<String> = row.iter().map(|x| format!("{:>13.8}", x + 0.0)).collect();
        page.push_str(&format!("  {}\n", elements.join(" ")));
    }
    page
}

fn document(orientation: &Orientation) -> Result<OrientationDocument, Failure> {
    let u = orientation.head_from_crystal.matrix();
    let row = |i: usize| -> Result<_, Failure> {
        let component = |j: usize| Component::new(u[(i, j)] + 0.0).map_err(Failure::new);
        Ok((component(0)?, component(1)?, component(2)?))
    };
    let u: Matrix = (row(0)?, row(1)?, row(2)?);
    Ok(OrientationDocument { u, confirmed: orientation.confirmed })
}

fn saved_text(saved: &SaveOutcome, had_comments: bool) -> String {
    let file = saved.file.display();
    let mut text = format!("Saved with U in it: {file}");
    match &saved.backup {
        Some(backup) => text.push_str(&format!("; what stood there before is kept as {}", backup.display())),
        None if had_comments => text.push_str("; the comments of the session are not in it"),
        None => {}
    }
    text
}
