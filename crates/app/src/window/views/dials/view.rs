use egui::{Ui, vec2};
use ringwright_core::aim::{NoSetting, Preference, Rule};
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::Axis;
use ringwright_core::reach::JudgedSetting;

use super::super::super::{Picked, Reach, Results};
use super::super::azimuth::AzimuthRibbon;
use super::super::number::{fixed, indices};
use super::super::settings::PickedSettings;

use super::gauge::{Reading, gauge};
use super::list::{in_words, settings_list};

/// The selected reflection: what it is, its settings, and the dials of the one that is shown.
pub fn axis_dials(
    ui: &mut Ui,
    results: &Results,
    picked: &Picked,
    azimuth: &AzimuthRibbon,
    settings: &mut PickedSettings,
) {
    let (Some(reach), Some(hkl)) = (&results.reach, picked.hkl) else {
        return empty(ui, results.reach.is_some());
    };
    title(ui, reach, hkl);
    if let Some(none) = settings.none() {
        let NoSetting::Outside(outside) = none else {
            let verdict = ringwright_core::reach::Verdict::from(none);
            ui.label(format!("No setting: {}.", verdict.detail(&reach.instrument)));
            return;
        };
        let longest = fixed(outside.longest_wavelength_angstrom, 4);
        ui.label(format!(
            "Outside the sphere: no setting exists at {} Å. A wavelength of {longest} Å or less would reach it.",
            fixed(reach.wavelength_angstrom, 4)
        ));
        return;
    }
    // Above what grows and shrinks with the setting: it must not move under the pointer.
    azimuth.show(ui, reach, hkl, settings);
    let Some(shown) = settings.shown().copied() else {
        ui.label("The machine has no setting at this azimuth.");
        return;
    };
    ui.label(why(reach, settings, &shown));
    ui.add_space(4.0);
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing = vec2(2.0, 2.0);
        for (i, axis) in reach.instrument.axes().enumerate() {
            let reading_deg = shown.setting.and_then(|setting| setting.readings_deg().get(i).copied());
            gauge(ui, &Reading { axis, reading_deg, fixed_because: fixed_because(axis, &reach.rules) });
        }
    });
    ui.add_space(4.0);
    settings_list(ui, reach, settings);
}

fn empty(ui: &mut Ui, has_results: bool) {
    ui.vertical_centered(|ui| {
        ui.add_space(24.0);
        ui.strong("No reflection selected");
        ui.weak(if has_results {
            "Click a node in the lattice or a row of the table to see its settings."
        } else {
            "Its settings appear here once there is an orientation."
        });
        ui.add_space(24.0);
    });
}

fn title(ui: &mut Ui, reach: &Reach, hkl: Hkl) {
    let length = reach.orientation.q_in_head(hkl).norm();
    let sin_theta = 0.5 * reach.wavelength_angstrom * length;
    ui.horizontal_wrapped(|ui| {
        ui.heading(indices(hkl, 0));
        ui.label(format!("d {} Å", fixed(1.0 / length, 4)));
        if sin_theta <= 1.0 {
            ui.label(format!("2θ {}°", fixed(2.0 * sin_theta.asin().to_degrees(), 3)));
        }
    });
}

/// Which setting is shown, and why it is or is not the one chosen.
fn why(reach: &Reach, settings: &PickedSettings, shown: &JudgedSetting) -> String {
    let (number, all) = (settings.shown_index() + 1, settings.all().len());
    let first = settings.shown_index() == 0;
    if let Some(psi_deg) = settings.by_hand_deg() {
        let what = in_words(shown, reach, false);
        return format!("Turned by hand to ψ {}°: setting {number} of {all}, {what}.", fixed(psi_deg, 2));
    }
    if first && !settings.has_chosen() {
        return format!("None of {all} settings is allowed. Nearest miss: {}.", in_words(shown, reach, false));
    }
    if !first {
        return format!("Setting {number} of {all}, not the one chosen: {}.", in_words(shown, reach, false));
    }
    match &reach.preference {
        Preference::FarthestFromLimits => {
            let room = in_words(shown, reach, false);
            format!("Setting 1 of {all}, chosen because it is farthest from every limit: {room}.")
        }
        Preference::NearestTo { readings_deg } => {
            let wanted: Vec<String> =
                readings_deg.iter().map(|(name, deg)| format!("{name} {}°", fixed(deg.get(), 2))).collect();
            format!("Setting 1 of {all}, chosen because it is nearest to {}.", wanted.join(", "))
        }
    }
}

fn fixed_because(axis: &Axis, rules: &[Rule]) -> Option<&'static str> {
    if axis.set_by_hand {
        return Some("set by hand");
    }
    let held = rules.iter().any(|rule| matches!(rule, Rule::Hold { axis: name, .. } if *name == axis.name));
    held.then_some("held by a rule")
}
