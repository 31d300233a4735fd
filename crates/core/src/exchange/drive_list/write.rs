use std::io::{self, Write};

use nalgebra::Matrix3;

use super::super::device_error;
use super::{FINGERPRINT, ROWS};
use crate::frames::Hkl;
use crate::instrument::Instrument;
use crate::route::{DECIMALS, DriveList, Fingerprint};

/// What a list says about itself before its rows.
#[derive(Debug, Clone, Copy)]
pub struct Heading<'a> {
    /// The title of the session; may be empty.
    pub title: &'a str,
    /// The machine.
    pub instrument: &'a Instrument,
    /// Columns a*, b*, c* in the head frame, Å⁻¹.
    pub ub: &'a Matrix3<f64>,
    /// Wavelength in Å.
    pub wavelength_angstrom: f64,
}

/// Writes a list. What is written are the rounded readings that were proven.
///
/// # Errors
/// If `out` cannot be written to.
pub fn write(out: &mut impl Write, list: &DriveList, heading: &Heading<'_>) -> io::Result<()> {
    write_heading(out, list, heading)?;
    let mut csv = csv::Writer::from_writer(out);
    write_rows(&mut csv, list, heading.instrument).map_err(device_error)?;
    csv.flush()
}

fn write_rows(csv: &mut csv::Writer<impl Write>, list: &DriveList, instrument: &Instrument) -> csv::Result<()> {
    let axes = instrument.axes().map(|axis| axis.name.as_str());
    csv.write_record(["order", "h", "k", "l"].into_iter().chain(axes).chain(["drive_s", "elapsed_s"]))?;
    for (i, row) in list.rows.iter().enumerate() {
        let Hkl { h, k, l } = row.hkl;
        csv.write_field((i + 1).to_string())?;
        for index in [h, k, l] {
            csv.write_field(index_text(index))?;
        }
        for reading in row.setting.readings_deg() {
            csv.write_field(angle_text(*reading))?;
        }
        for seconds in [row.drive_s, row.elapsed_s] {
            csv.write_field(format!("{seconds:.2}"))?;
        }
        csv.write_record(None::<&[u8]>)?;
    }
    Ok(())
}

fn write_heading(out: &mut impl Write, list: &DriveList, heading: &Heading<'_>) -> io::Result<()> {
    writeln!(
        out,
        "# Drive list: reflections in the order to measure them. It is a proposal and drives nothing by itself."
    )?;
    writeln!(
        out,
        "# Interlocks, the machine's own limits, the facility's rules and the responsible scientist decide."
    )?;
    writeln!(out, "# Make the first run with the shutter closed.")?;
    if !heading.title.is_empty() {
        writeln!(out, "# session: {}", one_line(heading.title))?;
    }
    writeln!(out, "# machine: {}", one_line(heading.instrument.name()))?;
    writeln!(out, "# wavelength_angstrom: {:.8}", heading.wavelength_angstrom)?;
    writeln!(out, "# UB in 1/angstrom without 2 pi, row by row; columns a*, b*, c* in the frame of the head:")?;
    for row in heading.ub.row_iter() {
        let elements: Vec<String> = row.iter().map(|element| format!("{:.10}", element + 0.0)).collect();
        writeln!(out, "#   {}", elements.join(" "))?;
    }
    let fingerprint = Fingerprint::of(heading.ub, heading.wavelength_angstrom, heading.instrument);
    writeln!(out, "# {FINGERPRINT} {fingerprint}")?;
    writeln!(out, "# {ROWS} {}", list.rows.len())?;
    writeln!(
        out,
        "# Axis columns: dial readings in degrees. drive_s: seconds from the row before, the first from park, all"
    )?;
    writeln!(
        out,
        "# axes starting together; elapsed_s: seconds of driving since the beginning. Counting is not in them."
    )
}

/// Text of a person in a comment: no line of it may end the comment.
fn one_line(text: &str) -> String {
    text.chars().map(|c| if c.is_control() { ' ' } else { c }).collect()
}

/// An index with as many decimals as it needs.
pub(in crate::exchange) fn index_text(index: f64) -> String {
    (index + 0.0).to_string()
}

/// An angle with the decimals of lists, without a negative zero.
pub(in crate::exchange) fn angle_text(deg: f64) -> String {
    let text = format!("{deg:.*}", DECIMALS as usize);
    match text.strip_prefix('-') {
        Some(rest) if rest.chars().all(|c| c == '0' || c == '.') => rest.to_owned(),
        _ => text,
    }
}
