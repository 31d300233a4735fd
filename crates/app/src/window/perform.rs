//! The one place where commands are carried out.

use std::collections::BTreeMap;

use ringwright_core::frames::Hkl;
use ringwright_core::quantity::{Component, Degrees, Index};
use ringwright_core::session::{OrientationDocument, PeakDocument};

use super::App;
use super::ask::Ask;
use super::command::Command;
use super::files::Purpose;

impl App {
    /// Carries out a command; one that would lose unsaved changes asks first.
    pub fn perform(&mut self, ctx: &egui::Context, command: Command) {
        let loses = matches!(command, Command::Open | Command::OpenByPath | Command::OpenDemo(_) | Command::Quit);
        if loses && self.opened.is_edited() {
            self.ask = Some(Ask::Unsaved(command));
        } else {
            self.perform_at_once(ctx, command);
        }
    }

    /// Carries out a command, whatever is unsaved.
    pub(super) fn perform_at_once(&mut self, ctx: &egui::Context, command: Command) {
        match command {
            Command::Open => self.ask_file(Purpose::Open, false),
            Command::OpenByPath => self.ask_file(Purpose::Open, true),
            Command::OpenDemo(i) => self.open_demo(i),
            Command::Save => self.save(false),
            Command::SaveAs => self.ask_file(Purpose::SaveAs, false),
            Command::SaveAsByPath => self.ask_file(Purpose::SaveAs, true),
            Command::Export => self.ask = Some(Ask::Export),
            Command::ExportChoose => self.ask_file(Purpose::Export, false),
            Command::ExportByPath => self.ask_file(Purpose::Export, true),
            Command::Stop => self.desk.stop(),
            Command::Resume => self.ask_desk(),
            Command::AddPeak => self.add_peak(None),
            Command::AddPredictedPeak(hkl) => self.add_peak(Some(hkl)),
            Command::RemovePeak(i) => self.remove_peak(i),
            Command::Select(hkl) => self.picked.hkl = Some(hkl),
            Command::KeepOrientation => self.keep_orientation(),
            Command::DropOrientation => self.opened.session.orientation = None,
            Command::Theme(theme) => ctx.set_theme(theme),
            Command::Larger => ctx.set_zoom_factor((ctx.zoom_factor() + 0.1).min(3.0)),
            Command::Smaller => ctx.set_zoom_factor((ctx.zoom_factor() - 0.1).max(0.5)),
            Command::Quit => self.quit(ctx),
        }
    }

    /// A predicted peak is not in use until someone has put in what was found: a prediction proves nothing.
    fn add_peak(&mut self, predicted: Option<Hkl>) {
        let Some(instrument) = &self.instrument else {
            return self.fail("choose a machine first: a peak has a reading for each of its axes".to_owned());
        };
        let hkl = predicted.unwrap_or(Hkl::new(1.0, 0.0, 0.0));
        let setting = predicted.and_then(|_| self.views.settings.shown_setting()).unwrap_or_else(|| instrument.park());
        let mut readings_deg = BTreeMap::new();
        for (axis, &reading) in instrument.axes().zip(setting.readings_deg()) {
            if let Ok(deg) = Degrees::new((reading * 1e4).round() / 1e4) {
                readings_deg.insert(axis.name.clone(), deg);
            }
        }
        let [Ok(h), Ok(k), Ok(l)] = [hkl.h, hkl.k, hkl.l].map(Index::new) else { return };
        let peaks = &mut self.opened.session.peaks;
        peaks.push(PeakDocument { h, k, l, readings_deg, uncertainty_deg: None, time_s: None, ignored: true });
        let text = format!("Added peak {}: put in its indices and readings, then tick it", peaks.len());
        self.message = Some(super::strip::Message { text, failed: false });
    }

    fn remove_peak(&mut self, i: usize) {
        if i < self.opened.session.peaks.len() {
            self.opened.session.peaks.remove(i);
            self.edits.forget_under("peaks");
        }
    }

    fn keep_orientation(&mut self) {
        let Some(oriented) = &self.results.oriented else { return };
        let u = oriented.orientation.head_from_crystal.matrix();
        let of = |row: usize| {
            let [Ok(x), Ok(y), Ok(z)] = [0, 1, 2].map(|column| Component::new(u[(row, column)])) else { return None };
            Some((x, y, z))
        };
        if let (Some(x), Some(y), Some(z)) = (of(0), of(1), of(2)) {
            let confirmed = oriented.orientation.confirmed;
            self.opened.session.orientation = Some(OrientationDocument { u: (x, y, z), confirmed });
        }
    }
}
