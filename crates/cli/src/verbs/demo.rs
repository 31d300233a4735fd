use std::io::{self, Write};

use ringwright_core::exchange::drive_list;
use ringwright_core::route::DEFAULT_TOLERANCE_DEG;
use ringwright_core::session::{DEMOS, Demo, demo as demo_named, write_whole};
use ringwright_core::work;

use super::night::Night;
use super::{orient, plan};
use crate::args::DemoArgs;
use crate::deliver::Desktop;
use crate::failure::Failure;
use crate::summary::{first_rows, plan_summary, reach_summary, verification_report};
use crate::{DONE, NO, Outcome, Start};

/// Rows of the drive list that are shown.
const ROWS_SHOWN: usize = 8;

pub fn demo(args: &DemoArgs, desktop: &mut Desktop<'_, '_>) -> Result<Outcome, Failure> {
    let demo = match &args.name {
        None => &DEMOS[0],
        Some(name) => demo_named(name).ok_or_else(|| {
            let known: Vec<&str> = DEMOS.iter().map(|demo| demo.name).collect();
            Failure::new(format_args!("{name:?} is no demo; accepted are {}", known.join(" and ")))
        })?,
    };
    if let Some(path) = &args.output {
        write_whole(path, |out| out.write_all(demo.text.as_bytes()))
            .map_err(|error| Failure::new(format_args!("{}: cannot be written: {error}", path.display())))?;
        desktop.tell(&format!("The session of this demo is in {}.", path.display()));
    }
    let status = headless(demo, desktop)?;
    if status != DONE || args.headless {
        return Ok(Outcome::Finished(status));
    }
    Ok(Outcome::OpenWindow { on: Start::Demo(demo), machines: None, without_display: DONE })
}

/// The whole job: every part is made as its verb makes it, and the list is proven from the text that was written.
fn headless(demo: &Demo, desktop: &mut Desktop<'_, '_>) -> Result<u8, Failure> {
    let night = Night::of(demo.open().map_err(Failure::new)?, None)?;
    let inputs = &night.inputs;
    let oriented = work::orient(inputs).map_err(|error| night.failure(&error))?;
    let orientation = &oriented.orientation;
    let (table, list) = plan::make(&night, orientation, desktop)?;
    let mut text = Vec::new();
    plan::write(&mut text, &list, &night, orientation).map_err(Failure::new)?;
    let read = drive_list::read(&text, "the list", &inputs.instrument).map_err(Failure::new)?;
    let verification = work::verify(inputs, orientation, &read, DEFAULT_TOLERANCE_DEG);
    let status = if verification.passed() { DONE } else { NO };
    let write = |out: &mut dyn Write| -> io::Result<()> {
        writeln!(out, "Demo {}: {}", demo.name, demo.about)?;
        writeln!(out, "{}", night.opened.session.title)?;
        heading(out, "Orientation", "orient SESSION")?;
        out.write_all(orient::report(&oriented, &night).as_bytes())?;
        heading(out, "What can be reached", "reach SESSION")?;
        writeln!(out, "{}", reach_summary(&table, inputs))?;
        heading(out, "Drive list", "plan SESSION")?;
        writeln!(out, "{}\n", plan_summary(&table, &list))?;
        out.write_all(first_rows(&list, &inputs.instrument, ROWS_SHOWN).as_bytes())?;
        heading(out, "Proof of the list as it is written", "verify SESSION LIST")?;
        out.write_all(verification_report(&verification, &read, &inputs.instrument).as_bytes())
    };
    desktop.deliver(None, status, write)
}

fn heading(out: &mut dyn Write, what: &str, verb: &str) -> io::Result<()> {
    writeln!(out, "\n== {what} (ringwright {verb})")
}
