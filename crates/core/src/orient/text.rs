//! The report as a page for the terminal: first whether to trust it and what to do next, then the figures.

use std::fmt::Write;

use nalgebra::Matrix3;

use super::{
    ASSUMED_UNCERTAINTY_DEG, ChangeKind, Compared, Confirmation, DecidingReflection, Doubt, IndexChange, Mend, Miss,
    Observation, OrientationReport, OtherAssignment, Search, Third,
};
use crate::frames::Hkl;

/// At most this many assignments of each sort are listed.
const MOST_LISTED: usize = 6;

/// Width of the column of names.
const NAMES: usize = 26;

/// Width of the column of one peak.
const PEAK: usize = 24;

impl OrientationReport {
    /// The page, lines of at most about 100 characters, ending with a line break.
    pub fn render(&self) -> String {
        let mut page = String::new();
        // Writing into a text cannot fail.
        let _ = self.write(&mut page);
        page
    }

    fn write(&self, page: &mut String) -> std::fmt::Result {
        self.write_verdict(page)?;
        for warning in &self.warnings {
            writeln!(page, "! {warning}")?;
        }
        self.write_mend(page)?;
        writeln!(page, "\n{}\n{}, {}", self.radiation, self.machine, self.group)?;
        if let Some(note) = &self.radiation_note {
            writeln!(page, "Note: {note}.")?;
        }
        self.write_peaks(page)?;
        self.write_later(page)?;
        self.write_matrix(page)?;
        self.write_others(page)
    }

    fn write_verdict(&self, page: &mut String) -> std::fmt::Result {
        match &self.confirmation {
            Confirmation::Confirmed { by, too_alike } => {
                let peaks = listed(by.iter().filter_map(|&i| self.hkl_of(i)));
                writeln!(page, "CONFIRMED: {peaks} agrees out of the plane of the first two peaks.")?;
                if *too_alike > 0 {
                    writeln!(
                        page,
                        "{} so alike that no reachable reflection tells {} apart with readings like these.",
                        counted(*too_alike, "other assignment is", "other assignments are"),
                        if *too_alike == 1 { "it" } else { "them" }
                    )?;
                }
                Ok(())
            }
            Confirmation::Unconfirmed { because, next } => {
                writeln!(page, "UNCONFIRMED: {}", self.doubt(because))?;
                // Wrong indices come first: a prediction from them would only send someone to the wrong place.
                if *because == Doubt::PairDisagrees { Ok(()) } else { self.write_next(page, next) }
            }
        }
    }

    fn doubt(&self, because: &Doubt) -> String {
        let others = self.others.by_position.len();
        match because {
            Doubt::PairDisagrees => "the two peaks do not fit their own indices.".to_owned(),
            Doubt::NoThirdPeak if others == 0 => "two peaks cannot prove themselves; a third must agree.".to_owned(),
            Doubt::NoThirdPeak => format!(
                "two peaks cannot prove themselves; {}{} as well.",
                if self.others.search == Search::Cut { "at least " } else { "" },
                counted(others, "other assignment fits", "other assignments fit")
            ),
            Doubt::AllInPlane => "no later peak is far enough out of the plane of the first two.".to_owned(),
            Doubt::Contradicted(peaks) => {
                let names = listed(peaks.iter().filter_map(|&i| self.hkl_of(i)));
                format!("{names} is not where this orientation puts it.")
            }
            Doubt::NotAllCompared => {
                "later peaks agree, but so many other indices fit the first two that not all were compared.".to_owned()
            }
            Doubt::OthersLeft { assignments } => format!(
                "later peaks agree, but {} them too.",
                counted(assignments.len(), "other assignment explains", "other assignments explain")
            ),
        }
    }

    fn write_next(&self, page: &mut String, next: &Third) -> std::fmt::Result {
        match next {
            Third::Measure(third) => write_third(page, third),
            Third::NoneFound { down_to_d_angstrom, tried, needed_deg } => writeln!(
                page,
                "No reachable reflection decides: {tried} out of the plane were tried, down to d = {down_to_d_angstrom:.3} Å, and \
                 none keeps {needed_deg:.2}° away from every node of another assignment."
            ),
        }
    }

    fn write_mend(&self, page: &mut String) -> std::fmt::Result {
        match &self.mend {
            Mend::NotNeeded => Ok(()),
            Mend::NoIndexChange => writeln!(
                page,
                "  No change of indices makes angle and both d agree. Look at cell, wavelength and zero offsets, whether both\n  \
                 peaks are of one crystal, and whether the readings are as certain as stated."
            ),
            Mend::Changes { listed, more } => {
                writeln!(page, "  What would mend it, the simplest first:")?;
                for change in listed {
                    writeln!(page, "    {}", change_text(change))?;
                }
                if *more > 0 { writeln!(page, "    and {more} more") } else { Ok(()) }
            }
        }
    }

    fn write_peaks(&self, page: &mut String) -> std::fmt::Result {
        let pair = &self.pair;
        let both = [&pair.first, &pair.second];
        writeln!(page)?;
        let mut row = |name: &str, of: [String; 2]| {
            let [a, b] = of;
            writeln!(page, "{}", format!("  {name:<NAMES$}{a:<PEAK$}{b}").trim_end())
        };
        row("Peaks", ["first".to_owned(), "second".to_owned()])?;
        row("h k l", both.map(|peak| peak.hkl.to_string()))?;
        row("met by U", ["exactly".to_owned(), format!("in its plane, {}° off", signed(pair.angle_deg.misfit(), 3))])?;
        row("2θ observed", both.map(|peak| format!("{:.4}°", peak.two_theta_deg)))?;
        row("d observed", pair.d_angstrom.map(|d| format!("{:.5} ± {:.5} Å", d.observed, d.sigma)))?;
        row("d calculated", pair.d_angstrom.map(|d| format!("{:.5} Å", d.calculated)))?;
        row("difference", pair.d_angstrom.map(|d| misfit_text(&d, 5, "Å")))?;
        row("d observed / calculated", pair.scale().map(|(scale, sigma)| format!("{scale:.5} ± {sigma:.5}")))?;
        row("direction known to", both.map(across_text))?;
        row("each reading known to", both.map(reading_text))?;
        let angle = &pair.angle_deg;
        writeln!(page, "\n  Angle between them")?;
        writeln!(page, "  {:<NAMES$}{:.4} ± {:.4}°", "observed", angle.observed, angle.sigma)?;
        writeln!(page, "  {:<NAMES$}{:.4}°", "calculated", angle.calculated)?;
        writeln!(page, "  {:<NAMES$}{}", "difference", misfit_text(angle, 4, "°"))
    }

    fn write_later(&self, page: &mut String) -> std::fmt::Result {
        if self.later.is_empty() {
            return Ok(());
        }
        writeln!(
            page,
            "\n  Later peaks               direction off           d off                   out of the plane"
        )?;
        for peak in &self.later {
            let direction = format!("{:.3} ± {:.3}°", peak.direction_deg.misfit(), peak.direction_deg.sigma);
            let d = format!("{} ± {:.4} Å", signed(peak.d_angstrom.misfit(), 4), peak.d_angstrom.sigma);
            let verdict = if peak.agrees() { "agrees" } else { "DISAGREES" };
            let name = peak.observation.hkl.to_string();
            let out = format!("{:.1}°", peak.out_of_plane_deg);
            writeln!(page, "  {name:<NAMES$}{direction:<PEAK$}{d:<PEAK$}{out:<10}{verdict}")?;
        }
        Ok(())
    }

    fn write_matrix(&self, page: &mut String) -> std::fmt::Result {
        let pair = &self.pair;
        writeln!(page, "\n  UB in 1/Å (columns a*, b*, c* in the head frame, no 2π)")?;
        write_rows(page, &pair.ub_written, pair.ub_decimals)?;
        writeln!(page, "  U (takes x ∥ a*, z ∥ c into the head frame), det U = {:.9}", pair.det_u)?;
        write_rows(page, pair.orientation.head_from_crystal.matrix(), 8)?;
        match &pair.cell_of_ub {
            Ok(cell) => {
                let ([a, b, c], [al, be, ga]) = (cell.lengths(), cell.angles_deg());
                writeln!(page, "  cell of this UB as written  {a:.4} {b:.4} {c:.4} Å, {al:.3} {be:.3} {ga:.3}°")?;
            }
            Err(error) => writeln!(page, "  cell of this UB as written: {error}")?,
        }
        writeln!(page, "  crystal's turn known to     ± {:.3}° about the axis known worst", pair.turn_sigma_deg())
    }

    fn write_others(&self, page: &mut String) -> std::fmt::Result {
        let others = &self.others;
        writeln!(page, "\n  Other indices for the two peaks")?;
        if others.laue_rotations > 1 {
            let n = others.laue_rotations;
            writeln!(page, "  Equal by the {n} rotations of the Laue class: the same thing, not listed.")?;
        }
        if !others.only_intensities.is_empty() {
            writeln!(
                page,
                "  Only intensities can rule out (turned by a rotation of the lattice that the crystal lacks):"
            )?;
            write_assignments(page, &others.only_intensities)?;
        }
        match others.by_position.len() {
            0 => writeln!(page, "  A third reflection can rule out: none found.")?,
            _ => {
                writeln!(page, "  A third reflection can rule out:")?;
                write_assignments(page, &others.by_position)?;
            }
        }
        if others.search == Search::Cut {
            writeln!(
                page,
                "  So many nodes fit these readings that not all were compared; smaller uncertainties or larger d help."
            )?;
        }
        Ok(())
    }

    fn hkl_of(&self, index: usize) -> Option<Hkl> {
        self.later.iter().find(|peak| peak.index == index).map(|peak| peak.observation.hkl)
    }
}

fn write_third(page: &mut String, third: &DecidingReflection) -> std::fmt::Result {
    writeln!(
        page,
        "Measure {} next: d {:.4} Å, 2θ {:.3}°, {:.0}° out of the plane of the two, predicted to ± {:.2}°.",
        third.hkl, third.d_angstrom, third.two_theta_deg, third.out_of_plane_deg, third.predicted_sigma_deg
    )?;
    let Some(([h, k], miss)) = &third.closest else { return Ok(()) };
    if third.decides < third.of {
        writeln!(page, "Found there, it rules out {} of {} other assignments.", third.decides, third.of)?;
    } else {
        writeln!(
            page,
            "Found there, it rules out {}.",
            if third.of == 1 { "the other assignment" } else { "all that are known" }
        )?;
    }
    match miss {
        Miss::By { hkl, deg } => writeln!(
            page,
            "The closest of them ({h} and {k} for the two peaks) has its nearest node, {hkl}, {deg:.2}° away from that place."
        ),
        Miss::MoreThan { deg } => writeln!(page, "None of them has a node within {deg:.0}° of that place."),
    }
}

fn write_rows(page: &mut String, matrix: &Matrix3<f64>, decimals: usize) -> std::fmt::Result {
    for row in matrix.row_iter() {
        let [x, y, z] = [0, 1, 2].map(|i| row[i] + 0.0);
        writeln!(page, "    {x:>w$.decimals$} {y:>w$.decimals$} {z:>w$.decimals$}", w = decimals + 4)?;
    }
    Ok(())
}

fn write_assignments(page: &mut String, assignments: &[OtherAssignment]) -> std::fmt::Result {
    for other in assignments.iter().take(MOST_LISTED) {
        let [h, k] = other.hkl.map(|hkl| hkl.to_string());
        writeln!(page, "    {h:<12} {k:<12} angle off {}°", signed(other.fit.angle_deg, 3))?;
    }
    match assignments.len().saturating_sub(MOST_LISTED) {
        0 => Ok(()),
        more => writeln!(page, "    and {more} more"),
    }
}

fn change_text(change: &IndexChange) -> String {
    let names = ["first peak", "second peak"];
    let changed = (0..2).filter(|&i| change.kind[i] != ChangeKind::Kept);
    let parts: Vec<String> = changed.map(|i| format!("{} {} → {}", names[i], change.from[i], change.to[i])).collect();
    let [d1, d2] = change.fit.d_angstrom.map(|d| signed(d, 4));
    let angle = signed(change.fit.angle_deg, 3);
    format!("{}: angle then {angle}° off, d {d1} Å and {d2} Å", parts.join(", "))
}

fn misfit_text(compared: &Compared, decimals: usize, unit: &str) -> String {
    let space = if unit == "°" { "" } else { " " };
    let ratio = compared.misfit().abs() / compared.sigma.max(1e-12);
    format!("{}{space}{unit} ({ratio:.1} σ)", signed(compared.misfit(), decimals))
}

/// A number with its sign, but a zero without.
fn signed(x: f64, decimals: usize) -> String {
    let text = format!("{x:+.decimals$}");
    if text.chars().any(|c| c.is_ascii_digit() && c != '0') { text } else { format!("{:.decimals$}", 0.0) }
}

fn across_text(peak: &Observation) -> String {
    let [worse, better] = peak.across_sigma_deg();
    format!("± {worse:.3}°, ± {better:.3}°")
}

fn reading_text(peak: &Observation) -> String {
    if peak.readings.assumed {
        format!("± {ASSUMED_UNCERTAINTY_DEG}° (assumed)")
    } else {
        format!("± {}°", peak.readings.deg)
    }
}

fn counted(n: usize, one: &str, many: &str) -> String {
    if n == 1 { format!("1 {one}") } else { format!("{n} {many}") }
}

fn listed(nodes: impl Iterator<Item = Hkl>) -> String {
    nodes.map(|hkl| hkl.to_string()).collect::<Vec<_>>().join("; ")
}
