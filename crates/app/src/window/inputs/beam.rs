use egui::{ComboBox, Ui};
use ringwright_core::quantity::{EnergyInKev, EnergyInMev, WavelengthInAngstrom};
use ringwright_core::radiation::{HC_KEV_ANGSTROM, NEUTRON_MEV_ANGSTROM2, Radiation, emission_lines};

use super::super::edits::Field;
use super::Bench;
use super::card::{card, doubt, remark};

const KINDS: [&str; 5] =
    ["X-ray line", "X-rays, energy", "X-rays, wavelength", "Neutrons, wavelength", "Neutrons, energy"];

/// What shines on the crystal.
pub fn show(ui: &mut Ui, bench: &mut Bench<'_>) {
    let note = bench.session.radiation.older_scale_note();
    let state = bench.state("radiation", note.as_ref().map(|_| "older scale".to_owned()));
    let summary = bench.session.radiation.describe();
    card(ui, "Beam", state, &summary, |ui| {
        ui.horizontal(|ui| {
            let mut chosen = kind(&bench.session.radiation);
            let combo = ComboBox::from_id_salt("radiation kind").width(140.0);
            let shown = combo.show_index(ui, &mut chosen, KINDS.len(), |i| KINDS[i]);
            super::super::name_combo(ui, &shown, "Kind of radiation");
            if chosen != kind(&bench.session.radiation) {
                bench.edits.forget_under("radiation");
                if let Some(radiation) = as_kind(chosen, &bench.session.radiation) {
                    bench.session.radiation = radiation;
                }
            } else {
                value(ui, bench);
            }
        });
        bench.show_errors(ui, "radiation");
        remark(ui, &bench.session.radiation.describe());
        if let Some(note) = note {
            doubt(ui, &note);
        }
    });
}

fn kind(radiation: &Radiation) -> usize {
    match radiation {
        Radiation::XrayLine { .. } => 0,
        Radiation::XrayEnergy { .. } => 1,
        Radiation::XrayWavelength { .. } => 2,
        Radiation::NeutronWavelength { .. } => 3,
        Radiation::NeutronEnergy { .. } => 4,
    }
}

/// The same wavelength said in another way; the nearest line for a line.
fn as_kind(kind: usize, radiation: &Radiation) -> Option<Radiation> {
    let wavelength = radiation.wavelength_angstrom();
    let round = |value: f64| (value * 1e6).round() / 1e6;
    Some(match kind {
        0 => {
            let off =
                |line: &&ringwright_core::radiation::EmissionLine| (line.wavelength_angstrom() - wavelength).abs();
            let nearest = emission_lines().iter().min_by(|a, b| off(a).total_cmp(&off(b)))?;
            Radiation::XrayLine { name: nearest.clone() }
        }
        1 => Radiation::XrayEnergy { kev: EnergyInKev::new(round(HC_KEV_ANGSTROM / wavelength)).ok()? },
        2 => Radiation::XrayWavelength { angstrom: WavelengthInAngstrom::new(round(wavelength)).ok()? },
        3 => Radiation::NeutronWavelength { angstrom: WavelengthInAngstrom::new(round(wavelength)).ok()? },
        _ => {
            Radiation::NeutronEnergy { mev: EnergyInMev::new(round(NEUTRON_MEV_ANGSTROM2 / wavelength.powi(2))).ok()? }
        }
    })
}

fn value(ui: &mut Ui, bench: &mut Bench<'_>) {
    let width = ui.available_width() - 34.0;
    let field = |label| Field { path: "radiation", label, width, hint: "" };
    let edits = &mut *bench.edits;
    let (new, unit) = match bench.session.radiation.clone() {
        Radiation::XrayLine { name } => {
            let lines = emission_lines();
            let mut chosen = lines.iter().position(|line| *line == name).unwrap_or(0);
            let before = chosen;
            let combo = ComboBox::from_id_salt("emission line").width(ui.available_width() - 8.0);
            let shown = combo.show_index(ui, &mut chosen, lines.len(), |i| lines.get(i).map_or("", |line| line.name()));
            super::super::name_combo(ui, &shown, "Emission line");
            let line = lines.get(chosen).filter(|_| chosen != before);
            (line.map(|line| Radiation::XrayLine { name: line.clone() }), "")
        }
        Radiation::XrayEnergy { kev } => {
            let new = edits.number(ui, "", &field("Photon energy, keV"), (kev.get(), 0.01), EnergyInKev::new);
            (new.map(|kev| Radiation::XrayEnergy { kev }), "keV")
        }
        Radiation::XrayWavelength { angstrom } => {
            let new = edits.number(ui, "", &field("Wavelength, Å"), (angstrom.get(), 0.001), WavelengthInAngstrom::new);
            (new.map(|angstrom| Radiation::XrayWavelength { angstrom }), "Å")
        }
        Radiation::NeutronWavelength { angstrom } => {
            let new = edits.number(ui, "", &field("Wavelength, Å"), (angstrom.get(), 0.001), WavelengthInAngstrom::new);
            (new.map(|angstrom| Radiation::NeutronWavelength { angstrom }), "Å")
        }
        Radiation::NeutronEnergy { mev } => {
            let new = edits.number(ui, "", &field("Neutron energy, meV"), (mev.get(), 0.1), EnergyInMev::new);
            (new.map(|mev| Radiation::NeutronEnergy { mev }), "meV")
        }
    };
    if let Some(new) = new {
        bench.session.radiation = new;
    }
    ui.label(unit);
}
