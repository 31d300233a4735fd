//! The table of every wanted reflection as CSV: `h,k,l,d_angstrom,two_theta_deg,absent,verdict,detail`, then one column per
//! axis with its reading in degrees, empty where there is no setting.

use std::io::{self, Write};

use super::device_error;
use super::drive_list::{angle_text, index_text};
use crate::crystal::{Presence, SpaceGroup};
use crate::instrument::{Instrument, Setting};
use crate::reach::{ReachRow, Settings};

/// Writes the table row by row.
pub struct ReachWriter<'a, W: Write> {
    csv: csv::Writer<W>,
    instrument: &'a Instrument,
    group: &'a SpaceGroup,
}

impl<'a, W: Write> ReachWriter<'a, W> {
    /// Writes the header.
    ///
    /// # Errors
    /// If `out` cannot be written to.
    pub fn new(out: W, instrument: &'a Instrument, group: &'a SpaceGroup) -> io::Result<Self> {
        let mut csv = csv::Writer::from_writer(out);
        let columns = ["h", "k", "l", "d_angstrom", "two_theta_deg", "absent", "verdict", "detail"];
        csv.write_record(columns.into_iter().chain(instrument.axes().map(|axis| axis.name.as_str())))
            .map_err(device_error)?;
        Ok(Self { csv, instrument, group })
    }

    /// Writes one row for a reflection, with the setting chosen.
    ///
    /// # Errors
    /// If it cannot be written.
    pub fn reflection(&mut self, row: &ReachRow) -> io::Result<()> {
        let detail = row.verdict.detail(self.instrument);
        self.row(row, row.verdict.word(), &detail, row.setting.as_ref()).map_err(device_error)
    }

    /// Writes one row for every setting of a reflection, also for those that are not allowed; one row without a setting
    /// where the node is outside the sphere.
    ///
    /// # Errors
    /// If they cannot be written.
    pub fn every_setting(&mut self, row: &ReachRow, settings: &Settings) -> io::Result<()> {
        match settings {
            Settings::None(_) => self.reflection(row),
            Settings::Judged(all) => {
                for judged in all {
                    let detail = judged.verdict.detail(self.instrument);
                    let written = self.row(row, judged.verdict.word(), &detail, judged.setting.as_ref());
                    written.map_err(device_error)?;
                }
                Ok(())
            }
        }
    }

    /// Ends the table.
    ///
    /// # Errors
    /// If its end cannot be written.
    pub fn finish(mut self) -> io::Result<()> {
        self.csv.flush()
    }

    fn row(&mut self, row: &ReachRow, verdict: &str, detail: &str, setting: Option<&Setting>) -> csv::Result<()> {
        for index in [row.hkl.h, row.hkl.k, row.hkl.l] {
            self.csv.write_field(index_text(index))?;
        }
        self.csv.write_field(format!("{:.6}", row.d_angstrom))?;
        self.csv.write_field(row.two_theta_deg.map_or_else(String::new, angle_text))?;
        let presence = row.absent.map_or(Presence::Allowed, |operation| Presence::Absent { operation });
        self.csv.write_field(self.group.reason(presence))?;
        self.csv.write_field(verdict)?;
        self.csv.write_field(detail)?;
        for i in 0..self.instrument.axis_count() {
            let reading = setting.and_then(|setting| setting.readings_deg().get(i).copied());
            self.csv.write_field(reading.map_or_else(String::new, angle_text))?;
        }
        self.csv.write_record(None::<&[u8]>)
    }
}
