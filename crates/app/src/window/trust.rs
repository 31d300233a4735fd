//! Whether the orientation can be trusted, and what to do next, in words.

use ringwright_core::frames::Hkl;
use ringwright_core::orient::{
    ChangeKind, Confirmation, DecidingReflection, Doubt, IndexChange, LaterPeak, Mend, OrientationReport, Third,
};
use ringwright_core::session::Session;

/// Why the orientation is not confirmed, as one sentence; nothing if it is.
pub fn doubt(report: &OrientationReport) -> Option<String> {
    let Confirmation::Unconfirmed { because, .. } = &report.confirmation else { return None };
    let named = |indices: &[usize]| {
        let of = |i: &usize| report.later.iter().find(|peak| peak.index == *i).map(|peak| peak.observation.hkl);
        indices.iter().filter_map(of).map(|hkl| hkl.to_string()).collect::<Vec<_>>().join("; ")
    };
    let others = report.others.by_position.len();
    Some(match because {
        Doubt::PairDisagrees => "The two peaks do not fit their own indices.".to_owned(),
        Doubt::NoThirdPeak if others == 0 => "Two peaks cannot prove themselves; a third must agree.".to_owned(),
        Doubt::NoThirdPeak => match others {
            1 => "Two peaks cannot prove themselves: another way to index them fits as well.".to_owned(),
            n => format!("Two peaks cannot prove themselves: {n} other ways to index them fit as well."),
        },
        Doubt::NotAllCompared => {
            "Later peaks agree, but so many ways to index the first two fit that not all were compared.".to_owned()
        }
        Doubt::AllInPlane => "No later peak is far enough out of the plane of the first two.".to_owned(),
        Doubt::Contradicted(peaks) => format!("Not where this orientation puts it: {}.", named(peaks)),
        Doubt::OthersLeft { assignments } => {
            let others = match assignments.len() {
                1 => "another way to index the first two explains".to_owned(),
                n => format!("{n} other ways to index the first two explain"),
            };
            format!("Later peaks agree, but {others} them too.")
        }
    })
}

/// The reflection to measure next, if one decides.
pub fn next(report: &OrientationReport) -> Option<&DecidingReflection> {
    match &report.confirmation {
        Confirmation::Unconfirmed { because: Doubt::PairDisagrees | Doubt::Contradicted(_), .. } => None,
        Confirmation::Unconfirmed { next: Third::Measure(third), .. } => Some(third),
        _ => None,
    }
}

/// What the next reflection does, as one sentence.
pub fn why(third: &DecidingReflection) -> String {
    let DecidingReflection { hkl, d_angstrom, two_theta_deg, decides, of, .. } = third;
    let what = match (decides, of) {
        (_, 0) => "a third peak out of the plane".to_owned(),
        (1, 1) => "it rules out the other way".to_owned(),
        (d, n) if d == n => format!("it rules out all {n} other ways"),
        (d, n) => format!("it rules out {d} of {n} other ways"),
    };
    format!("Measure {hkl} next: {what} (2θ {two_theta_deg:.2}°, d {d_angstrom:.4} Å).")
}

/// That no reflection decides, as one sentence; nothing where one does or none is needed.
pub fn none_decides(report: &OrientationReport) -> Option<String> {
    match &report.confirmation {
        Confirmation::Unconfirmed { next: Third::NoneFound { down_to_d_angstrom, tried, .. }, .. } => {
            Some(format!("No reachable reflection decides: {tried} were tried, down to d = {down_to_d_angstrom:.3} Å."))
        }
        _ => None,
    }
}

/// What to do about a doubt that no further reflection settles, as one sentence.
pub fn advice(report: &OrientationReport) -> String {
    let Confirmation::Unconfirmed { because, .. } = &report.confirmation else { return String::new() };
    match because {
        Doubt::PairDisagrees => match &report.mend {
            Mend::Changes { listed, .. } if !listed.is_empty() => {
                format!("These would fit: {}.", listed.first().map(change).unwrap_or_default())
            }
            _ => "Look at the cell, the wavelength, zero offsets and the readings.".to_owned(),
        },
        Doubt::Contradicted(_) => "Look at its indices and readings, or take it out of use.".to_owned(),
        Doubt::AllInPlane => "Measure one outside that plane.".to_owned(),
        Doubt::NoThirdPeak | Doubt::NotAllCompared | Doubt::OthersLeft { .. } => none_decides(report)
            .unwrap_or_else(|| "Measure one more reflection outside the plane of the two.".to_owned()),
    }
}

/// A change of indices that would mend a misfit.
pub fn change(change: &IndexChange) -> String {
    let names = ["first peak", "second peak"];
    let pairs = names.iter().zip(change.kind).zip(change.from.iter().zip(change.to));
    let parts: Vec<String> = pairs
        .filter(|((_, kind), _)| *kind != ChangeKind::Kept)
        .map(|((name, _), (from, to)): (_, (&Hkl, Hkl))| format!("{name} {from} → {to}"))
        .collect();
    format!("{}: then the angle is {:+.3}° off", parts.join(", "), change.fit.angle_deg)
}

/// The misfits of the first two peaks, and of later ones, each with a sign whether the readings allow it. Of many later
/// peaks the worst stands for all.
pub fn misfits(report: &OrientationReport) -> String {
    const MOST: usize = 4;
    let sign = |agrees: bool| if agrees { "✓" } else { "!" };
    let angle = &report.pair.angle_deg;
    let mut items = vec![format!("angle {:+.3}° {}", angle.misfit(), sign(angle.agrees()))];
    for (peak, d) in [&report.pair.first, &report.pair.second].into_iter().zip(&report.pair.d_angstrom) {
        items.push(format!("d({}) {:+.4} Å {}", peak.hkl, d.misfit(), sign(d.agrees())));
    }
    let off = |peak: &LaterPeak| {
        format!("{} off {:.3}° {}", peak.observation.hkl, peak.direction_deg.observed, sign(peak.agrees()))
    };
    let worst = report.later.iter().max_by(|a, b| a.direction_deg.observed.total_cmp(&b.direction_deg.observed));
    match worst.filter(|_| report.later.len() > MOST) {
        None => items.extend(report.later.iter().map(off)),
        Some(worst) => items.push(format!("{} later peaks, worst {}", report.later.len(), off(worst))),
    }
    // A line ends between two misfits, never inside one.
    let items: Vec<String> = items.into_iter().map(|item| item.replace(' ', "\u{a0}")).collect();
    signs(&format!("Misfits: {}", items.join("; ")))
}

/// The same text with minus signs that can be seen.
pub fn signs(text: &str) -> String {
    text.replace('-', "\u{2212}")
}

/// What peaks are wanted where too few are in use.
pub fn peaks_wanted(session: &Session) -> Option<&'static str> {
    let in_use = session.peaks.iter().filter(|peak| !peak.ignored).count();
    let waiting = session.peaks.len() > in_use;
    Some(match (in_use, waiting) {
        (0, false) => "Put in two found peaks: their indices, and the reading of every axis.",
        (1, false) => "Put in a second found peak that is not parallel to the first.",
        (0, true) => "Two peaks give the orientation: tick those that were found, or add others.",
        (1, true) => "A second peak gives the orientation: tick one that was found, or add another.",
        _ => return None,
    })
}
