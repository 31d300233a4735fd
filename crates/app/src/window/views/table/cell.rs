use egui::{Align2, Color32, FontId, TextStyle, Ui};
use ringwright_core::crystal::Presence;
use ringwright_core::reach::ReachRow;

use super::super::super::Reach;
use super::super::number::{fixed, indices};
use super::super::palette::{Kind, Palette, mark_place, paint_mark};
use super::column::{Column, detail};

const MARK_RADIUS: f32 = 4.0;
/// Text on the left begins this far from the numbers that end in the column before.
pub(super) const LEFT_PAD: f32 = 8.0;

/// Writes one cell. Text is painted where it belongs without a widget for each cell: a row is one thing to click and to
/// read out, and a table in sight has hundreds of cells.
pub(super) fn write(ui: &mut Ui, column: Column, row: &ReachRow, reach: &Reach) {
    let colour = ui.visuals().text_color();
    let rect = ui.max_rect();
    let left = rect.left_center() + egui::vec2(LEFT_PAD, 0.0);
    match column {
        Column::Verdict => {
            let kind = Kind::of(row.verdict);
            let tint = Palette::for_ui(ui).kind(kind);
            paint_mark(
                ui.painter(),
                mark_place(rect, MARK_RADIUS) + egui::vec2(LEFT_PAD - 3.0, 0.0),
                MARK_RADIUS,
                kind.mark(),
                tint,
            );
            let at = left + egui::vec2(MARK_RADIUS * 3.2, 0.0);
            ui.painter().text(at, Align2::LEFT_CENTER, kind.words(), TextStyle::Body.resolve(ui.style()), colour);
        }
        Column::Detail => {
            let text = detail(row, reach);
            let room = rect.width() - LEFT_PAD;
            let galley = one_line(ui, text, room);
            ui.painter().galley(left - egui::vec2(0.0, 0.5 * galley.size().y), galley, colour);
        }
        Column::Absent => {
            let text = if row.absent.is_some() { "absent" } else { "" };
            let font = TextStyle::Small.resolve(ui.style());
            ui.painter().text(left, Align2::LEFT_CENTER, text, font, colour);
        }
        Column::Hkl => number(ui, &indices(row.hkl, 3), colour),
        Column::Spacing => number(ui, &fixed(row.d_angstrom, 4), colour),
        Column::TwoTheta => number(ui, &row.two_theta_deg.map_or_else(String::new, |deg| fixed(deg, 3)), colour),
        Column::Axis(i) => {
            let reading = row.setting.and_then(|setting| setting.readings_deg().get(i).copied());
            number(ui, &reading.map_or_else(String::new, |deg| fixed(deg, 3)), colour);
        }
    }
}

/// A small line that ends with dots where it has no room.
fn one_line(ui: &Ui, text: String, width: f32) -> std::sync::Arc<egui::Galley> {
    let (font, colour) = (TextStyle::Small.resolve(ui.style()), ui.visuals().text_color());
    let mut job = egui::text::LayoutJob::simple_singleline(text, font, colour);
    job.wrap = egui::text::TextWrapping::truncate_at_width(width);
    ui.painter().layout_job(job)
}

/// Right-aligned in a face whose digits have one width.
fn number(ui: &Ui, text: &str, colour: Color32) {
    let font: FontId = TextStyle::Monospace.resolve(ui.style());
    ui.painter().text(ui.max_rect().right_center(), Align2::RIGHT_CENTER, text, font, colour);
}

/// What the cells of a row leave out: a detail that has no room, and the operation that makes it absent.
pub(super) fn not_in_sight(ctx: &egui::Context, row: &ReachRow, reach: &Reach, width: f32) -> Option<String> {
    let mut lines = Vec::new();
    let (text, font) = (detail(row, reach), TextStyle::Small.resolve(&ctx.global_style()));
    let needed = ctx.fonts_mut(|fonts| fonts.layout_no_wrap(text.clone(), font, Color32::PLACEHOLDER).size().x);
    if needed > width - LEFT_PAD {
        lines.push(text);
    }
    if let Some(operation) = row.absent {
        lines.push(format!("absent by symmetry: {}", reach.space_group.reason(Presence::Absent { operation })));
    }
    (!lines.is_empty()).then(|| lines.join("\n"))
}

/// A row in words, for those who hear it.
pub(super) fn spoken(row: &ReachRow, reach: &Reach) -> String {
    let detail = detail(row, reach);
    let absent = if row.absent.is_some() { ", absent" } else { "" };
    let d = fixed(row.d_angstrom, 4);
    format!("{}, d {d} Å, {}: {detail}{absent}", indices(row.hkl, 0), Kind::of(row.verdict).words())
}
