use ringwright_core::exchange::reach_table::ReachWriter;
use ringwright_core::work;

use super::night::Night;
use crate::args::ReachArgs;
use crate::deliver::Desktop;
use crate::failure::Failure;
use crate::summary::reach_summary;
use crate::{DONE, NO};

pub fn reach(args: &ReachArgs, desktop: &mut Desktop<'_, '_>) -> Result<u8, Failure> {
    let night = Night::open(&args.session)?;
    night.tell_notes(desktop);
    let orientation = night.orient(desktop)?.orientation;
    let inputs = &night.inputs;
    let progress = desktop.progress("judging reflections");
    let table = work::reach(inputs, &orientation, &progress).map_err(|error| night.failure(&error))?;
    drop(progress);
    desktop.tell(&reach_summary(&table, inputs));
    let judge = work::judge(inputs, &orientation.ub).map_err(|error| night.failure(&error))?;
    let status = if table.verdicts().iter().any(|verdict| verdict.is_reachable()) { DONE } else { NO };
    desktop.deliver(args.output.as_deref(), status, |out| {
        let mut writer = ReachWriter::new(out, &inputs.instrument, &inputs.space_group)?;
        for row in table.rows() {
            if args.every_setting {
                let settings = judge.every_setting(orientation.q_in_head(row.hkl), inputs.wavelength_angstrom);
                writer.every_setting(&row, &settings)?;
            } else {
                writer.reflection(&row)?;
            }
        }
        writer.finish()
    })
}
