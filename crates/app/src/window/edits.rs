//! Fields whose text is not taken yet. The session holds only checked values; what a person is typing, and what was
//! turned away, lives here, so that the last good session stays alive.

use std::collections::BTreeMap;

use egui::{Align2, Label, Response, RichText, Sense, Stroke, StrokeKind, TextEdit, Ui, vec2};
use ringwright_core::quantity::QuantityError;
use ringwright_core::session::FieldProblem;

use super::theme::Tones;

/// Texts of fields that are being typed in or were turned away, by the path of the field in the session.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Edits {
    pending: BTreeMap<String, Pending>,
    /// Fields whose values do not fit together, by path, with what is wrong.
    marked: Vec<(String, String)>,
}

#[derive(Debug, Clone, PartialEq)]
struct Pending {
    label: String,
    text: String,
    error: Option<String>,
}

/// What a field is and how it looks.
#[derive(Debug, Clone, Copy)]
pub struct Field<'a> {
    /// Path in the session.
    pub path: &'a str,
    /// Name with unit: what a screen reader says, and what messages begin with.
    pub label: &'a str,
    /// Width in points.
    pub width: f32,
    /// Shown while the field is empty.
    pub hint: &'static str,
}

impl Edits {
    /// Marks fields whose values were taken but do not fit together: paths, each with what is wrong.
    pub fn mark(&mut self, marked: impl Iterator<Item = (String, String)>) {
        self.marked.clear();
        self.marked.extend(marked);
    }

    /// How many fields under a path hold a text that was turned away.
    pub fn refused_under(&self, path: &str) -> usize {
        self.pending.iter().filter(|(p, pending)| is_under(p, path) && pending.error.is_some()).count()
    }

    /// The first field that holds a text that was turned away: its path, its label, why.
    pub fn first_refused(&self) -> Option<(&str, &str, &str)> {
        self.pending.iter().find_map(|(path, p)| Some((path.as_str(), p.label.as_str(), p.error.as_deref()?)))
    }

    /// Drops every text under a path: the fields show the session again.
    pub fn forget_under(&mut self, path: &str) {
        self.pending.retain(|p, _| !is_under(p, path));
    }

    /// Shows one line for each field under a path that was turned away, and for each problem of the session there.
    pub fn show_errors(&self, ui: &mut Ui, path: &str, problems: &[FieldProblem]) {
        let refused = self.pending.iter().filter(|(p, _)| is_under(p, path));
        for (label, error) in refused.filter_map(|(_, p)| Some((&p.label, p.error.as_ref()?))) {
            error_line(ui, &format!("{label}: {error}"));
        }
        for problem in problems.iter().filter(|problem| is_under(&problem.path, path)) {
            error_line(ui, &problem.message);
        }
    }

    /// What is wrong with the value of a field, or with what it is a part of.
    pub fn misfit(&self, path: &str) -> Option<&str> {
        self.marked.iter().find(|(marked, _)| is_under(path, marked)).map(|(_, what)| what.as_str())
    }

    /// Tells of a list to choose from whether one of its fields does not fit, as a field of text does.
    pub fn mark_list(&self, ui: &Ui, list: &Response, paths: &[&str]) {
        let Some(what) = paths.iter().find_map(|path| self.misfit(path)) else { return };
        let stroke = Stroke::new(1.5, Tones::in_ui(ui).bad);
        ui.painter().rect_stroke(list.rect, ui.visuals().widgets.inactive.corner_radius, stroke, StrokeKind::Inside);
        ui.ctx().accesskit_node_builder(list.id, |node| {
            node.set_invalid(egui::accesskit::Invalid::True);
            node.set_description(what);
        });
        list.clone().on_hover_text(what);
    }

    /// A field of text for a value that is shown as `shown`. Gives the value when a text that differs has been taken.
    pub fn field<T>(
        &mut self,
        ui: &mut Ui,
        field: &Field<'_>,
        shown: &str,
        take: impl FnOnce(&str) -> Result<T, String>,
    ) -> Option<T> {
        let id = ui.make_persistent_id(("field", field.path));
        let pending = self.pending.get(field.path);
        let error = pending.and_then(|p| p.error.clone());
        let told = error.clone().or_else(|| self.misfit(field.path).map(str::to_owned));
        let mut text = pending.map_or_else(|| shown.to_owned(), |p| p.text.clone());
        let tones = Tones::in_ui(ui);
        let response = ui
            .scope(|ui| {
                if told.is_some() {
                    let widgets = &mut ui.visuals_mut().widgets;
                    for state in [&mut widgets.inactive, &mut widgets.hovered] {
                        state.bg_stroke = Stroke::new(1.5, tones.bad);
                    }
                    ui.visuals_mut().selection.stroke = Stroke::new(2.0, tones.bad);
                }
                let edit = TextEdit::singleline(&mut text).id(id).hint_text(field.hint).align(Align2::LEFT_CENTER);
                ui.add_sized(vec2(field.width, ui.spacing().interact_size.y), edit)
            })
            .inner;
        describe(ui, &response, field, told.as_deref());
        if response.has_focus() && ui.input(|i| i.key_pressed(egui::Key::Escape)) {
            self.pending.remove(field.path);
            return None;
        }
        if response.changed() {
            return self.typed(field, shown, text, take);
        }
        // A text that was taken is the session's now; one that was turned away stays to be mended.
        if !response.has_focus() && error.is_none() {
            self.pending.remove(field.path);
        }
        None
    }

    fn typed<T>(
        &mut self,
        field: &Field<'_>,
        shown: &str,
        text: String,
        take: impl FnOnce(&str) -> Result<T, String>,
    ) -> Option<T> {
        let taken = take(&text);
        let error = taken.as_ref().err().cloned();
        let changed = text != shown;
        self.pending.insert(field.path.to_owned(), Pending { label: field.label.to_owned(), text, error });
        taken.ok().filter(|_| changed)
    }

    /// A number with its name before it; the name can be dragged sideways to change the number.
    pub fn number<T>(
        &mut self,
        ui: &mut Ui,
        name: &str,
        field: &Field<'_>,
        (value, step): (f64, f64),
        take: impl Fn(f64) -> Result<T, QuantityError>,
    ) -> Option<T> {
        let mut dragged = None;
        if !name.is_empty() {
            let quiet = Tones::in_ui(ui).quiet;
            // Not a stop for the keyboard: the field beside it is one.
            let handle = ui.add(Label::new(RichText::new(name).color(quiet)).selectable(false).sense(Sense::DRAG));
            let handle = handle.on_hover_cursor(egui::CursorIcon::ResizeHorizontal);
            let steps = f64::from(handle.drag_delta().x).round();
            if steps != 0.0 {
                let moved = ((value / step).round() + steps) * step;
                dragged = take((moved * 1e6).round() / 1e6).ok();
            }
        }
        if dragged.is_some() {
            self.pending.remove(field.path);
        }
        let typed = self.field(ui, field, &figure(value), |text| take(number(text)?).map_err(|e| e.to_string()));
        typed.or(dragged)
    }
}

/// A number as fields show it: as short as it can be, with a minus sign that can be seen.
pub fn figure(value: f64) -> String {
    format!("{value}").replace('-', "\u{2212}")
}

/// Reads a number as people write it; either minus sign.
///
/// # Errors
/// If it is none; the message says what would be accepted.
pub fn number(text: &str) -> Result<f64, String> {
    let plain = text.trim().replace('\u{2212}', "-");
    plain.parse::<f64>().ok().filter(|v| v.is_finite()).ok_or_else(|| {
        let told = if text.trim().is_empty() { "nothing".to_owned() } else { format!("“{}”", text.trim()) };
        let comma = if plain.contains(',') { "; decimals follow a point" } else { "" };
        format!("{told} is no number{comma}; accepted is a number such as 12.5")
    })
}

fn describe(ui: &Ui, response: &Response, field: &Field<'_>, error: Option<&str>) {
    ui.ctx().accesskit_node_builder(response.id, |node| {
        node.set_label(field.label);
        if let Some(error) = error {
            node.set_invalid(egui::accesskit::Invalid::True);
            node.set_description(error);
        }
    });
    response.clone().on_hover_text(error.unwrap_or(field.label));
}

/// A line that says what is wrong, with a mark before it.
pub fn error_line(ui: &mut Ui, text: &str) {
    let bad = Tones::in_ui(ui).bad;
    ui.add(Label::new(RichText::new(format!("✕ {text}")).color(bad).small()).wrap());
}

/// Whether a path of field names lies at or below another.
fn is_under(path: &str, above: &str) -> bool {
    path.strip_prefix(above).is_some_and(|rest| rest.is_empty() || above.is_empty() || rest.starts_with(['.', '[']))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_read_as_people_write_them() {
        assert_eq!(number(" \u{2212}12.5 "), Ok(-12.5));
        assert_eq!(number("1e-3"), Ok(0.001));
        assert!(number("1,5").is_err_and(|e| e.contains("decimals follow a point")));
        assert!(number("").is_err_and(|e| e.starts_with("nothing is no number")));
        assert!(number("inf").is_err() && number("NaN").is_err());
        assert_eq!(figure(-0.25), "\u{2212}0.25");
    }

    #[test]
    fn a_path_lies_below_whole_names_only() {
        assert!(is_under("crystal.cell.a_angstrom", "crystal.cell"));
        assert!(is_under("peaks[1].h", "peaks") && is_under("peaks[1].h", "peaks[1]"));
        assert!(!is_under("peaks[10].h", "peaks[1]") && !is_under("crystals", "crystal"));
        assert!(is_under("anything", ""));
    }
}
