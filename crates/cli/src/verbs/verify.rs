use std::fs::File;
use std::io::{self, Read};
use std::path::Path;

use ringwright_core::exchange::drive_list;
use ringwright_core::work;

use super::night::Night;
use crate::args::VerifyArgs;
use crate::deliver::Desktop;
use crate::failure::Failure;
use crate::summary::verification_report;
use crate::{DONE, NO};

pub fn verify(args: &VerifyArgs, desktop: &mut Desktop<'_, '_>) -> Result<u8, Failure> {
    let night = Night::open(&args.session)?;
    night.tell_notes(desktop);
    let orientation = night.orient(desktop)?.orientation;
    let file = args.list.display().to_string();
    let bytes = read(&args.list).map_err(|error| Failure::new(format_args!("{file}: cannot be read: {error}")))?;
    let list = drive_list::read(&bytes, &file, &night.inputs.instrument).map_err(Failure::new)?;
    let verification = work::verify(&night.inputs, &orientation, &list, args.tolerance);
    let status = if verification.passed() { DONE } else { NO };
    let report = verification_report(&verification, &list, &night.inputs.instrument);
    desktop.deliver(args.output.as_deref(), status, |out| out.write_all(report.as_bytes()))
}

/// Larger than any list; a device may never end.
const LARGEST_BYTES: u64 = 256 << 20;

fn read(path: &Path) -> io::Result<Vec<u8>> {
    let mut bytes = Vec::new();
    File::open(path)?.take(LARGEST_BYTES + 1).read_to_end(&mut bytes)?;
    if bytes.len() as u64 > LARGEST_BYTES {
        return Err(io::Error::other(format!("it is larger than the {} MB of any drive list", LARGEST_BYTES >> 20)));
    }
    Ok(bytes)
}
