//! Results in words: the verdict first, then aligned figures with their units.

use std::fmt::Write;

use ringwright_core::instrument::Instrument;
use ringwright_core::reach::{ReachTable, Verdict};
use ringwright_core::route::{DriveList, GivenList, LeftOut, RowCheck, SessionMatch, Verification};
use ringwright_core::session::Resolved;

/// What became of the wanted reflections, one line for each kind of verdict that occurs.
pub fn reach_summary(table: &ReachTable, inputs: &Resolved) -> String {
    let total = table.len();
    let counts = table.counts();
    let share = |count: usize| if total == 0 { 0.0 } else { 100.0 * count as f64 / total as f64 };
    let mut text = format!("{} of {total} wanted reflections are reachable ({:.1} %)", counts[0], share(counts[0]));
    for (kind, (word, count)) in Verdict::WORDS.iter().zip(counts).enumerate() {
        if kind > 0 && count > 0 {
            let _ = write!(text, "\n  {count:>8}  {word:<15} {}", meaning(kind));
        }
    }
    let absent = table.rows().filter(|row| row.absent.is_some()).count();
    if absent > 0 {
        let _ = write!(text, "\n  {absent:>8}  absent          by symmetry, counted above whatever their verdict");
    }
    let _ = write!(text, "\n{}\n{}", inputs.radiation.describe(), inputs.instrument.name());
    text
}

fn meaning(kind: usize) -> &'static str {
    match kind {
        1 => "the wavelength is too long for their spacing",
        2 => "2θ so small that the detector would stand in the direct beam",
        3 => "the axes cannot make the angle",
        _ => "an axis would pass its limit",
    }
}

/// `2 h 05 min 09 s`.
pub fn duration_text(seconds: f64) -> String {
    let whole = seconds.round().max(0.0) as u64;
    match (whole / 3600, whole / 60 % 60, whole % 60) {
        (0, 0, s) => format!("{s} s"),
        (0, m, s) => format!("{m} min {s:02} s"),
        (h, m, s) => format!("{h} h {m:02} min {s:02} s"),
    }
}

/// How long the list is, and what it does not hold.
pub fn plan_summary(table: &ReachTable, list: &DriveList) -> String {
    let mut text = format!(
        "{} reflections in {} of driving (counting not included); every row proven as written",
        list.rows.len(),
        duration_text(list.total_s)
    );
    let out_of_reach = table.len() - table.counts()[0];
    if out_of_reach > 0 {
        let _ = write!(text, "\n  {out_of_reach:>8}  wanted reflections out of reach: `ringwright reach` says why");
    }
    if !list.left_out.is_empty() {
        let _ = write!(text, "\n  {:>8}  reachable, but left out", list.left_out.len());
    }
    text
}

pub fn left_out_text(left_out: &LeftOut, inputs: &Resolved) -> String {
    format!("Left out: {}: {}", left_out.hkl, left_out.reason.text(&inputs.instrument))
}

/// The beginning of a list, aligned for people.
pub fn first_rows(list: &DriveList, instrument: &Instrument, count: usize) -> String {
    let mut text = format!("{:>6} {:>5} {:>5} {:>5}", "order", "h", "k", "l");
    for axis in instrument.axes() {
        let _ = write!(text, " {:>11}", axis.name.as_str());
    }
    let _ = writeln!(text, " {:>9} {:>9}", "drive_s", "elapsed_s");
    for (i, row) in list.rows.iter().take(count).enumerate() {
        let _ = write!(text, "{:>6} {:>5} {:>5} {:>5}", i + 1, row.hkl.h + 0.0, row.hkl.k + 0.0, row.hkl.l + 0.0);
        for reading in row.setting.readings_deg() {
            let _ = write!(text, " {reading:>11.4}");
        }
        let _ = writeln!(text, " {:>9.2} {:>9.2}", row.drive_s, row.elapsed_s);
    }
    if list.rows.len() > count {
        let _ = writeln!(text, "{:>6} {} more", "…", list.rows.len() - count);
    }
    text
}

/// The proof of a list: whether it may be run, which rows not, and the figures.
pub fn verification_report(verification: &Verification, list: &GivenList, instrument: &Instrument) -> String {
    let mut page = format!("{}\n", verdict(verification));
    let rejected: Vec<&RowCheck> = verification.rejected().collect();
    if !rejected.is_empty() {
        let _ = writeln!(page, "\n{:>7} {:>7}  {:<16} rejected because", "order", "line", "h k l");
        for row in &rejected {
            for (i, fault) in row.proof.faults.iter().enumerate() {
                let (order, line, hkl) = if i == 0 {
                    (row.order.to_string(), row.line.to_string(), row.hkl.to_string())
                } else {
                    Default::default()
                };
                let _ = writeln!(page, "{order:>7} {line:>7}  {hkl:<16} {}", fault.text(instrument));
            }
        }
    }
    let (direction, two_theta) = verification.worst_misses_deg();
    let tolerance = verification.tolerance_deg;
    let _ = writeln!(page, "\n  {:<12} {} of {} proven", "rows", verification.proven(), verification.rows.len());
    let _ = writeln!(page, "  {:<12} {direction:.5}° between R U B h and Q; allowed {tolerance}°", "worst");
    let _ = writeln!(page, "  {:<12} {two_theta:.5}° in 2θ; allowed {tolerance}°", "");
    let _ = writeln!(page, "  {:<12} {}", "session", session_text(verification.session));
    let total = duration_text(verification.total_s);
    let _ = writeln!(page, "  {:<12} {total} from park by this machine's clock, counting not included", "driving");
    if verification.wrong_times > 0 {
        let wrong = verification.wrong_times;
        let _ = writeln!(page, "  {:<12} {wrong} rows state a drive_s that is not this machine's", "");
    }
    if !list.unread_columns.is_empty() {
        let _ = writeln!(page, "  {:<12} {} (no check speaks of them)", "not judged", list.unread_columns.join(", "));
    }
    page
}

fn verdict(verification: &Verification) -> String {
    let (proven, rows) = (verification.proven(), verification.rows.len());
    if rows == 0 {
        return "REJECTED: the list has no rows, so there is nothing to prove.".to_owned();
    }
    if proven < rows {
        let failed = rows - proven;
        let fail = if failed == 1 { "fails" } else { "fail" };
        return format!("REJECTED: {failed} of {rows} rows {fail}. Do not run this list.");
    }
    if let Some(stated) = verification.wrong_row_count {
        return format!("REJECTED: the list says it has {stated} rows, but {rows} are there. Do not run this list.");
    }
    match verification.session {
        SessionMatch::Changed { .. } => format!(
            "REJECTED: the session has changed since this list was made. All {rows} rows hold for the session as it is now; plan \
             again to be sure of the rest."
        ),
        SessionMatch::Unstated { .. } => {
            format!("PROVEN: all {rows} rows hold. The list does not say for which session it was made.")
        }
        SessionMatch::Same => format!("PROVEN: all {rows} rows hold, and the session has not changed since."),
    }
}

fn session_text(session: SessionMatch) -> String {
    match session {
        SessionMatch::Same => "UB, wavelength and machine are those the list was made for".to_owned(),
        SessionMatch::Changed { listed, now } => {
            format!("UB, wavelength or machine have changed since: the list carries {listed}, the session is {now}")
        }
        SessionMatch::Unstated { now } => format!("the list carries no fingerprint; the session is {now}"),
    }
}

#[cfg(test)]
mod tests {
    use super::duration_text;

    #[test]
    fn times_are_read_at_a_glance() {
        assert_eq!(duration_text(9.4), "9 s");
        assert_eq!(duration_text(69.0), "1 min 09 s");
        assert_eq!(duration_text(2.0 * 3600.0 + 5.0 * 60.0 + 9.0), "2 h 05 min 09 s");
    }
}
