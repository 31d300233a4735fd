use egui::{Role, Sense, TextStyle, Ui, WidgetInfo};
use egui_extras::{Column, TableBuilder};
use ringwright_core::reach::JudgedSetting;

use super::super::super::Reach;
use super::super::number::fixed;
use super::super::palette::{Kind, Palette, mark_place, paint_mark};
use super::super::settings::PickedSettings;

const ROW_HEIGHT: f32 = 20.0;

/// Every setting in a row of its own, the chosen one first. A click shows it in the dials and in the lattice.
pub(super) fn settings_list(ui: &mut Ui, reach: &Reach, settings: &mut PickedSettings) {
    let names: Vec<String> = reach.instrument.axes().map(|axis| axis.name.to_string()).collect();
    let mut show = None;
    egui::ScrollArea::horizontal().id_salt("settings").show(ui, |ui| {
        ui.spacing_mut().item_spacing.x = 2.0;
        let table = TableBuilder::new(ui)
            .striped(true)
            .vscroll(false)
            .sense(Sense::click())
            .auto_shrink([false, true])
            .column(Column::exact(18.0))
            .columns(Column::exact(60.0), names.len())
            .column(Column::remainder().at_least(210.0).clip(true));
        let table = table.header(20.0, |mut row| {
            row.col(|_| {});
            for name in &names {
                row.col(|ui| right(ui, name, TextStyle::Body));
            }
            row.col(|_| {});
        });
        table.body(|body| {
            body.rows(ROW_HEIGHT, settings.all().len(), |mut row| {
                let index = row.index();
                let Some(judged) = settings.all().get(index) else { return };
                let words = in_words(judged, reach, index == 0 && settings.has_chosen());
                row.set_selected(index == settings.shown_index());
                row.col(|ui| verdict_mark(ui, judged));
                for i in 0..names.len() {
                    let reading = judged.setting.and_then(|s| s.readings_deg().get(i).copied());
                    row.col(|ui| {
                        right(ui, &reading.map_or_else(String::new, |deg| fixed(deg, 3)), TextStyle::Monospace)
                    });
                }
                row.col(|ui| left(ui, &words));
                let response = row.response();
                let spoken = format!("Setting {}: {words}", index + 1);
                let selected = index == settings.shown_index();
                response.widget_info(|| WidgetInfo::selected(Role::Row, true, selected, &spoken));
                if response.clicked() {
                    show = Some(index);
                }
            });
        });
    });
    if let Some(index) = show {
        settings.show(index);
    }
}

/// The verdict of one setting in words.
pub(super) fn in_words(judged: &JudgedSetting, reach: &Reach, chosen: bool) -> String {
    if !judged.verdict.is_reachable() {
        return judged.verdict.detail(&reach.instrument);
    }
    let room = if judged.clearance_deg.is_finite() {
        format!("{}° from the nearest limit", fixed(judged.clearance_deg, 1))
    } else {
        "no limits".to_owned()
    };
    if chosen { format!("chosen, {room}") } else { room }
}

fn verdict_mark(ui: &mut Ui, judged: &JudgedSetting) {
    let kind = Kind::of(judged.verdict);
    let place = mark_place(ui.max_rect(), 4.5);
    paint_mark(ui.painter(), place, 4.5, kind.mark(), Palette::for_ui(ui).kind(kind));
}

fn right(ui: &Ui, text: &str, style: TextStyle) {
    let (font, colour) = (style.resolve(ui.style()), ui.visuals().text_color());
    ui.painter().text(ui.max_rect().right_center(), egui::Align2::RIGHT_CENTER, text, font, colour);
}

fn left(ui: &Ui, text: &str) {
    let (font, colour) = (TextStyle::Body.resolve(ui.style()), ui.visuals().text_color());
    let painter = ui.painter_at(ui.max_rect());
    painter.text(ui.max_rect().left_center() + egui::vec2(8.0, 0.0), egui::Align2::LEFT_CENTER, text, font, colour);
}
