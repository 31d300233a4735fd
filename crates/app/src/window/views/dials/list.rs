use egui::{Role, Sense, TextStyle, Ui, WidgetInfo};
use egui_extras::{Column, TableBuilder};
use ringwright_core::reach::{JudgedSetting, Verdict};

use super::super::super::Reach;
use super::super::number::fixed;
use super::super::palette::{Kind, Palette, mark_place, paint_mark};
use super::super::settings::PickedSettings;

/// Readings above, what they come to below.
const ROW_HEIGHT: f32 = 29.0;
/// Width of the verdict's mark.
const MARK_WIDTH: f32 = 18.0;
/// Least width of a reading.
const READING_WIDTH: f32 = 52.0;

/// Every setting in a row of its own, the chosen one first. A click shows it in the dials and in the lattice.
pub(super) fn settings_list(ui: &mut Ui, reach: &Reach, settings: &mut PickedSettings) {
    let names: Vec<String> = reach.instrument.axes().map(|axis| axis.name.to_string()).collect();
    let mut show = None;
    egui::ScrollArea::horizontal().id_salt("settings").show(ui, |ui| {
        ui.spacing_mut().item_spacing.x = 2.0;
        let room = (ui.available_width() - MARK_WIDTH - 4.0) / names.len().max(1) as f32 - 2.0;
        let table = TableBuilder::new(ui)
            .striped(true)
            .vscroll(false)
            .sense(Sense::click())
            .auto_shrink([false, true])
            .column(Column::exact(MARK_WIDTH))
            .columns(Column::exact(room.clamp(READING_WIDTH, 90.0)), names.len());
        let table = table.header(18.0, |mut row| {
            row.col(|_| {});
            for name in &names {
                row.col(|ui| right(ui, name, TextStyle::Small, 0.5));
            }
        });
        table.body(|body| {
            body.rows(ROW_HEIGHT, settings.all().len(), |mut row| {
                let index = row.index();
                let Some(judged) = settings.all().get(index) else { return };
                let words = in_words(judged, reach, index == 0 && settings.has_chosen());
                row.set_selected(index == settings.shown_index());
                let mut words_left = 0.0;
                row.col(|ui| {
                    verdict_mark(ui, judged);
                    words_left = ui.max_rect().right() + 8.0;
                });
                for i in 0..names.len() {
                    let reading = judged.setting.and_then(|s| s.readings_deg().get(i).copied());
                    let text = reading.map_or_else(String::new, |deg| fixed(deg, 3));
                    row.col(|ui| {
                        right(ui, &text, TextStyle::Monospace, 0.27);
                        // The last cell writes across the row: the grounds of all others are painted by then.
                        if i + 1 == names.len() {
                            below(ui, words_left, &words, judged.setting.is_some());
                        }
                    });
                }
                let response = row.response();
                let spoken = format!("Setting {}: {words}", index + 1);
                let selected = index == settings.shown_index();
                response.widget_info(|| WidgetInfo::selected(Role::Row, true, selected, &spoken));
                if response.clicked() {
                    show = Some(index);
                }
                response.on_hover_text(words);
            });
        });
    });
    if let Some(index) = show {
        settings.show(index);
    }
}

/// The verdict of one setting in words.
pub(super) fn in_words(judged: &JudgedSetting, reach: &Reach, chosen: bool) -> String {
    match judged.verdict {
        Verdict::Reachable => {}
        Verdict::CannotMake { by_deg } => return format!("the axes miss the angle by {}°", fixed(by_deg, 3)),
        other => return other.detail(&reach.instrument),
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

/// Right-aligned, at a part of the row's height.
fn right(ui: &Ui, text: &str, style: TextStyle, part: f32) {
    let (font, colour) = (style.resolve(ui.style()), ui.visuals().text_color());
    let rect = ui.max_rect();
    let at = egui::pos2(rect.right(), rect.top() + part * rect.height());
    ui.painter().text(at, egui::Align2::RIGHT_CENTER, text, font, colour);
}

/// What a setting comes to, across the row from `left`: under its readings, or alone where there are none.
fn below(ui: &Ui, left: f32, text: &str, under_readings: bool) {
    let (font, colour) = (TextStyle::Small.resolve(ui.style()), ui.visuals().text_color());
    let rect = ui.max_rect();
    let part = if under_readings { 0.74 } else { 0.5 };
    let mut job = egui::text::LayoutJob::simple_singleline(text.to_owned(), font, colour);
    job.wrap = egui::text::TextWrapping::truncate_at_width(rect.right() - left);
    let galley = ui.painter().layout_job(job);
    let at = egui::pos2(left, rect.top() + part * rect.height() - 0.5 * galley.size().y);
    let mut painter = ui.painter().clone();
    painter.set_clip_rect(ui.clip_rect().with_min_x(left));
    painter.galley(at, galley, colour);
}
