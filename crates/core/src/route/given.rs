use super::{Fingerprint, Prover, RowProof};
use crate::frames::Hkl;
use crate::instrument::Setting;

/// A drive list as it was read, whoever made it.
#[derive(Debug, Clone, PartialEq)]
pub struct GivenList {
    /// The rows in their order.
    pub rows: Vec<GivenRow>,
    /// The fingerprint it carries, if it carries one.
    pub fingerprint: Option<Fingerprint>,
    /// The number of rows it says it has, if it says so.
    pub stated_rows: Option<usize>,
    /// Columns that were read over, because no check speaks of them.
    pub unread_columns: Vec<String>,
}

/// One row of a list as it was read.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct GivenRow {
    /// The line of the file.
    pub line: u64,
    /// Indices.
    pub hkl: Hkl,
    /// A reading in degrees for every axis, as written.
    pub setting: Setting,
    /// Seconds of the drive here, if the list states them.
    pub drive_s: Option<f64>,
}

/// The check of one row.
#[derive(Debug, Clone, PartialEq)]
pub struct RowCheck {
    /// Its place in the list, from 1.
    pub order: usize,
    /// The line of the file.
    pub line: u64,
    /// Indices.
    pub hkl: Hkl,
    /// The figures, and what is wrong with the row or with the drive to it.
    pub proof: RowProof,
}

/// How the list stands to the session.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum SessionMatch {
    /// It carries the session's fingerprint.
    Same,
    /// It was made for another UB, wavelength or machine: the session has changed since, or was another.
    Changed {
        /// What the list carries.
        listed: Fingerprint,
        /// What the session has.
        now: Fingerprint,
    },
    /// It carries none.
    Unstated {
        /// What the session has.
        now: Fingerprint,
    },
}

/// The proof of a list, row by row.
#[derive(Debug, Clone, PartialEq)]
pub struct Verification {
    /// One for each row.
    pub rows: Vec<RowCheck>,
    /// How far direction and 2θ were allowed to be off, in degrees.
    pub tolerance_deg: f64,
    /// How the list stands to the session.
    pub session: SessionMatch,
    /// The number of rows that the list says it has, if that is not the number it has.
    pub wrong_row_count: Option<usize>,
    /// Rows whose stated drive time is not that of this machine.
    pub wrong_times: usize,
    /// Seconds of driving in all by the machine's clock, from park.
    pub total_s: f64,
}

/// A stated drive time that is off by no more than this, in s, is right: half a tenth, for lists with one decimal.
const TIME_TOLERANCE_S: f64 = 0.051;

impl Verification {
    /// Proves or rejects each row, and each drive to it from the row before (to the first from park).
    pub fn of(list: &GivenList, prover: &Prover<'_>) -> Self {
        let mut here = prover.instrument.park();
        let (mut rows, mut wrong_times, mut total_s) = (Vec::with_capacity(list.rows.len()), 0, 0.0);
        for (i, row) in list.rows.iter().enumerate() {
            let mut proof = prover.row(row.hkl, &row.setting);
            proof.faults.extend(prover.drive(&here, &row.setting));
            let seconds = prover.drive_s(&here, &row.setting);
            total_s += seconds;
            wrong_times += usize::from(row.drive_s.is_some_and(|stated| (stated - seconds).abs() > TIME_TOLERANCE_S));
            rows.push(RowCheck { order: i + 1, line: row.line, hkl: row.hkl, proof });
            here = row.setting;
        }
        let now = Fingerprint::of(prover.ub, prover.wavelength_angstrom, prover.instrument);
        let session = match list.fingerprint {
            Some(listed) if listed == now => SessionMatch::Same,
            Some(listed) => SessionMatch::Changed { listed, now },
            None => SessionMatch::Unstated { now },
        };
        let wrong_row_count = list.stated_rows.filter(|stated| *stated != list.rows.len());
        Self { rows, tolerance_deg: prover.tolerance_deg, session, wrong_row_count, wrong_times, total_s }
    }

    /// How many rows are proven.
    pub fn proven(&self) -> usize {
        self.rows.iter().filter(|row| row.proof.faults.is_empty()).count()
    }

    /// The rows that are rejected.
    pub fn rejected(&self) -> impl Iterator<Item = &RowCheck> {
        self.rows.iter().filter(|row| !row.proof.faults.is_empty())
    }

    /// Whether the list may be trusted: it has rows, every one is proven, none is missing, and it was not made for another
    /// session. A list without a fingerprint is judged by its rows alone.
    pub fn passed(&self) -> bool {
        !self.rows.is_empty()
            && self.proven() == self.rows.len()
            && self.wrong_row_count.is_none()
            && !matches!(self.session, SessionMatch::Changed { .. })
    }

    /// The largest angle between R U B h and Q, and the largest miss of 2θ, in degrees, over all rows that have them.
    pub fn worst_misses_deg(&self) -> (f64, f64) {
        let direction = self.rows.iter().filter_map(|row| row.proof.direction_miss_deg);
        let two_theta = self.rows.iter().filter_map(|row| row.proof.two_theta_miss_deg);
        (direction.fold(0.0, f64::max), two_theta.map(f64::abs).fold(0.0, f64::max))
    }
}
