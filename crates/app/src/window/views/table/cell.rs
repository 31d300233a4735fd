use egui::{Align2, Color32, FontId, TextStyle, Ui};
use ringwright_core::reach::ReachRow;

use super::super::super::Reach;
use super::super::number::{fixed, indices};
use super::super::palette::{Kind, Palette, mark_place, paint_mark};
use super::column::Column;

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
            let weak = ui.visuals().weak_text_color();
            let text = row.verdict.detail(&reach.instrument);
            let font = TextStyle::Body.resolve(ui.style());
            ui.painter_at(rect).text(left, Align2::LEFT_CENTER, text, font, weak);
        }
        Column::Absent => {
            let text = if row.absent.is_some() { "absent" } else { "" };
            ui.painter().text(
                rect.left_center(),
                Align2::LEFT_CENTER,
                text,
                TextStyle::Body.resolve(ui.style()),
                colour,
            );
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

/// Right-aligned in a face whose digits have one width.
fn number(ui: &Ui, text: &str, colour: Color32) {
    let font: FontId = TextStyle::Monospace.resolve(ui.style());
    ui.painter().text(ui.max_rect().right_center(), Align2::RIGHT_CENTER, text, font, colour);
}

/// A row in words, for those who hear it.
pub(super) fn spoken(row: &ReachRow, reach: &Reach) -> String {
    let detail = row.verdict.detail(&reach.instrument);
    let absent = if row.absent.is_some() { ", absent" } else { "" };
    let comma = if detail.is_empty() { "" } else { ": " };
    let d = fixed(row.d_angstrom, 4);
    format!("{}, d {d} Å, {}{comma}{detail}{absent}", indices(row.hkl, 0), Kind::of(row.verdict).words())
}
