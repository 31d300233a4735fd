use egui::{Role, Sense, TextStyle, Ui, WidgetInfo, vec2};

use super::number::grouped;
use super::palette::{Kind, Palette, ShownKinds, mark_place, paint_mark};

const MARK_RADIUS: f32 = 4.5;

/// Mark, words and count of every kind of verdict. A click hides the kind, another shows it again. `counts` are in the
/// order of [`Kind::ALL`].
pub fn legend(ui: &mut Ui, counts: &[usize; Kind::ALL.len()], shown: &mut ShownKinds) {
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing = vec2(4.0, 2.0);
        for kind in Kind::ALL {
            entry(ui, kind, counts[kind.index()], shown);
        }
    });
}

fn entry(ui: &mut Ui, kind: Kind, count: usize, shown: &mut ShownKinds) {
    let on = shown.shows(kind);
    let font = TextStyle::Body.resolve(ui.style());
    let words = ui.painter().layout_no_wrap(kind.words().to_owned(), font.clone(), egui::Color32::PLACEHOLDER);
    let number = ui.painter().layout_no_wrap(grouped(count), font, egui::Color32::PLACEHOLDER);
    let before = MARK_RADIUS * 3.2 + 2.0;
    let size = vec2(before + words.size().x + 6.0 + number.size().x + 6.0, words.size().y + 6.0);
    let (rect, mut response) = ui.allocate_exact_size(size, Sense::click());
    if response.clicked() {
        shown.set(kind, !on);
        response.mark_changed();
    }
    let label = format!("{}, {count}", kind.words());
    response.widget_info(|| WidgetInfo::selected(Role::CheckBox, true, shown.shows(kind), &label));
    if ui.is_rect_visible(rect) {
        let palette = Palette::for_ui(ui);
        let visuals = ui.style().interact(&response);
        if response.hovered() || response.has_focus() {
            ui.painter().rect_filled(rect, 3.0, visuals.weak_bg_fill);
        }
        let faint = |c: egui::Color32| if on { c } else { c.gamma_multiply(0.35) };
        paint_mark(ui.painter(), mark_place(rect, MARK_RADIUS), MARK_RADIUS, kind.mark(), faint(palette.kind(kind)));
        let (strong, weak) = (ui.visuals().text_color(), ui.visuals().weak_text_color());
        let at = rect.left_top() + vec2(before, 3.0);
        ui.painter().galley(at, words.clone(), if on { strong } else { weak });
        ui.painter().galley(at + vec2(words.size().x + 6.0, 0.0), number, weak);
        if !on {
            let y = rect.center().y;
            ui.painter().hline(at.x..=at.x + words.size().x, y, egui::Stroke::new(1.0, weak));
        }
    }
    let act = if on { "Click to hide these." } else { "Hidden. Click to show these." };
    response.on_hover_text(format!("{}\n{act}", kind.meaning()));
}
