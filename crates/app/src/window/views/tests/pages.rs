//! The views side by side at both themes, for looking at: `RINGWRIGHT_PICTURES=folder cargo test -p ringwright pages`.

use std::sync::Arc;

use egui::{Theme, Ui};
use ringwright_core::crystal::UnitCell;

use super::super::*;
use super::fixture::{Workplace, first_of, harness, keep_picture, orthorhombic, reach, small};
use crate::window::Reach;

fn everything(ui: &mut Ui, place: &mut Workplace) {
    place.begin();
    let Workplace { results, picked, settings, shown, lattice, table, azimuth } = place;
    azimuth.update(ui.ctx(), results, picked);
    egui::Panel::bottom("table")
        .resizable(false)
        .exact_size(250.0)
        .show(ui, |ui| table.show(ui, results, picked, shown));
    egui::Panel::right("dials")
        .resizable(false)
        .exact_size(560.0)
        .show(ui, |ui| axis_dials(ui, results, picked, azimuth, settings));
    egui::CentralPanel::default().show(ui, |ui| lattice.show(ui, results, picked, settings, shown));
}

fn monoclinic() -> Arc<Reach> {
    let cell = UnitCell::new(8.4, 11.2, 9.6, 90.0, 104.0, 90.0).unwrap();
    reach("kappa-four-circle", cell, "P 1 21/n 1", 0.75, 0.62)
}

/// The corner of a picture as a crowd of colours: an empty page has few.
fn colours(image: &image::RgbaImage) -> usize {
    image.pixels().map(|pixel| pixel.0).collect::<std::collections::HashSet<_>>().len()
}

#[test]
fn pages_in_both_themes() {
    for (theme, name) in [(Theme::Dark, "dark"), (Theme::Light, "light")] {
        for (reach, kind, machine) in [
            (small(), Kind::Reachable, "eulerian"),
            (small(), Kind::OverLimit, "eulerian-over"),
            (monoclinic(), Kind::Reachable, "kappa"),
            (orthorhombic("fixed-chi-three-circle", [7.2, 9.8, 12.4], 0.8, 0.71), Kind::Reachable, "fixed-chi"),
        ] {
            let mut place = Workplace::of(Some(Arc::clone(&reach)));
            let rows: Vec<_> = reach.table.rows().filter(|row| Kind::of(row.verdict) == kind).collect();
            place.picked.hkl = rows.get(rows.len() / 2).map(|row| row.hkl);
            assert!(place.picked.hkl.is_some() || first_of(&reach, kind).is_finite());
            let mut harness = harness([1280.0, 800.0], theme, place, everything);
            harness.run_steps(8);
            let image = harness.render().unwrap();
            assert!(colours(&image) > 500, "{name} {machine}: {}", colours(&image));
            keep_picture(&mut harness, &format!("{machine}-{name}"));
        }
    }
}

#[test]
fn an_empty_page() {
    for (theme, name) in [(Theme::Dark, "dark"), (Theme::Light, "light")] {
        let mut harness = harness([1280.0, 800.0], theme, Workplace::of(None), everything);
        keep_picture(&mut harness, &format!("empty-{name}"));
        assert!(harness.render().is_ok());
    }
}
