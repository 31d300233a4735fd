use egui::{DragValue, Ui, vec2};

/// An optional limit of d: the end of the table's own range means none.
pub(super) fn bound(ui: &mut Ui, words: &str, value: &mut Option<f64>, end: f64, range: [f64; 2]) {
    let name = ui.label(words);
    let mut number = value.unwrap_or(end);
    let field = DragValue::new(&mut number).range(range[0]..=range[1]).speed(0.005).max_decimals(3).suffix(" Å");
    if ui.add(field).labelled_by(name.id).changed() {
        *value = ((number - end).abs() > 5e-4).then_some(number);
    }
}

pub(super) fn arrow(ui: &Ui, at: egui::Pos2, down: bool, colour: egui::Color32) {
    let (tip, base) = if down { (3.0, -2.5) } else { (-3.0, 2.5) };
    let points = vec![at + vec2(0.0, tip), at + vec2(-4.0, base), at + vec2(4.0, base)];
    ui.painter().add(egui::Shape::convex_polygon(points, colour, egui::Stroke::NONE));
}

pub(super) fn empty(ui: &mut Ui, title: &str, next: &str) {
    ui.vertical_centered(|ui| {
        ui.add_space(28.0);
        ui.strong(title);
        ui.weak(next);
        ui.add_space(28.0);
    });
}
