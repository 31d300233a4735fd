use egui::Pos2;
use ringwright_core::frames::Hkl;
use ringwright_core::reach::{JudgedSetting, Settings, Verdict};
use ringwright_core::work::{AzimuthView, SIMULTANEOUS_D_ANGSTROM};

use super::super::super::Reach;
use super::super::number::{fixed, indices};
use super::super::palette::Kind;
use super::content::{Content, met, range};
use super::paint::Place;

/// How far from the pointer an end or a crossing is still meant, in points.
const NEAR: f32 = 3.0;
/// The most crossings that are told at once.
const TOLD: usize = 8;

/// What lies under the pointer: crossings above the band, in it an end of a window or else what an azimuth comes to.
pub(super) fn told(place: &Place, at: Pos2, content: &Content, reach: &Reach, view: &AzimuthView, hkl: Hkl) -> String {
    if at.y < place.band.top() - 1.0 {
        return crossings(place, at.x, content);
    }
    let near = |deg: f64| (place.x(deg) - at.x).abs();
    let end = content.ends.iter().min_by(|a, b| near(a.psi_deg).total_cmp(&near(b.psi_deg)));
    if let Some(end) = end.filter(|end| near(end.psi_deg) <= NEAR) {
        let met = met(end.beyond, &reach.instrument);
        return format!("A window ends at ψ {}°: {met}.", fixed(end.psi_deg, 3));
    }
    let psi_deg = place.psi_deg(at.x);
    let all = match view.settings_at(hkl, psi_deg) {
        Settings::Judged(all) => all,
        Settings::None(none) => return Verdict::from(none).detail(&reach.instrument),
    };
    format!("ψ {}°: {}", fixed(psi_deg, 1), of_azimuth(&all, content.allowed_at(psi_deg), reach))
}

fn of_azimuth(all: &[JudgedSetting], window: Option<(f64, f64)>, reach: &Reach) -> String {
    let allowed = all.iter().filter(|judged| judged.verdict.is_reachable()).count();
    if allowed > 0 {
        let window = window.map_or_else(String::new, |(from, to)| format!("\nwindow {}", range(from, to)));
        return format!("{allowed} of {} settings allowed{window}", all.len());
    }
    let miss = |judged: &&JudgedSetting| judged.verdict.miss_deg().unwrap_or(f64::INFINITY);
    match all.iter().min_by(|a, b| miss(a).total_cmp(&miss(b))) {
        Some(best) => format!("{}\n{}", Kind::of(best.verdict).words(), best.verdict.detail(&reach.instrument)),
        None => Kind::CannotMake.meaning().to_owned(),
    }
}

fn crossings(place: &Place, x: f32, content: &Content) -> String {
    let spacing = fixed(SIMULTANEOUS_D_ANGSTROM, 1);
    let near: Vec<String> = content
        .crossings
        .iter()
        .filter(|crossing| (place.x(crossing.psi_deg) - x).abs() <= NEAR)
        .map(|crossing| format!("{}  at ψ {}°", indices(crossing.node, 0), fixed(crossing.psi_deg, 2)))
        .collect();
    if near.is_empty() {
        return format!("No simultaneous reflection here (spacings above {spacing} Å).");
    }
    let more = match near.len().saturating_sub(TOLD) {
        0 => String::new(),
        more => format!("\nand {more} more"),
    };
    let shown = near.iter().take(TOLD).cloned().collect::<Vec<_>>().join("\n");
    format!("Simultaneous reflections (spacings above {spacing} Å):\n{shown}{more}")
}
