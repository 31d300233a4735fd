use egui::{ComboBox, Ui};
use ringwright_core::frames::Hkl;
use ringwright_core::quantity::{Degrees, Index, Length};
use ringwright_core::session::{TargetNode, Targets};

use super::super::edits::{Edits, Field, figure, number};
use super::Bench;
use super::card::{State, card, doubt, remark, row_name};

const KINDS: [&str; 3] = ["Range of d", "Range of 2θ", "List of reflections"];

/// Which reflections are wanted.
pub fn show(ui: &mut Ui, bench: &mut Bench<'_>) {
    let notes = bench.notes("targets");
    let mut state = bench.state("targets", (!notes.is_empty()).then(|| "see the note".to_owned()));
    let empty = matches!(&bench.session.targets, Targets::List(nodes) if nodes.is_empty());
    if empty && state.0 != State::Missing {
        state = (State::Missing, "none wanted".to_owned());
    }
    let summary = KINDS[kind(&bench.session.targets)];
    card(ui, "Reflections wanted", state, summary, |ui| {
        let mut chosen = kind(&bench.session.targets);
        let combo = ComboBox::from_id_salt("targets kind").width(ui.available_width() - 8.0);
        let shown = combo.show_index(ui, &mut chosen, KINDS.len(), |i| KINDS[i]);
        super::super::name_combo(ui, &shown, "Kind of targets");
        if chosen != kind(&bench.session.targets) {
            bench.edits.forget_under("targets");
            if let Some(targets) = as_kind(chosen, bench) {
                bench.session.targets = targets;
            }
            return;
        }
        match &mut bench.session.targets {
            Targets::SpacingRange { min_angstrom, max_angstrom, with_absent } => {
                spacing(ui, bench.edits, min_angstrom, max_angstrom);
                absent(ui, with_absent);
            }
            Targets::TwoThetaRange { min_deg, max_deg, with_absent } => {
                two_theta(ui, bench.edits, min_deg, max_deg);
                absent(ui, with_absent);
            }
            Targets::List(nodes) => list(ui, nodes),
        }
        bench.show_errors(ui, "targets");
        for note in notes {
            doubt(ui, &note);
        }
    });
}

fn kind(targets: &Targets) -> usize {
    match targets {
        Targets::SpacingRange { .. } => 0,
        Targets::TwoThetaRange { .. } => 1,
        Targets::List(_) => 2,
    }
}

/// About the same range said in another way.
fn as_kind(kind: usize, bench: &Bench<'_>) -> Option<Targets> {
    let wavelength = bench.session.radiation.wavelength_angstrom();
    let with_absent = match bench.session.targets {
        Targets::SpacingRange { with_absent, .. } | Targets::TwoThetaRange { with_absent, .. } => with_absent,
        Targets::List(_) => false,
    };
    match (kind, &bench.session.targets) {
        (0, Targets::TwoThetaRange { max_deg, .. }) => {
            let d = wavelength / (2.0 * (max_deg.get() / 2.0).to_radians().sin());
            let min_angstrom = Length::new((d * 1e4).round() / 1e4).ok()?;
            Some(Targets::SpacingRange { min_angstrom, max_angstrom: None, with_absent })
        }
        (0, _) => Some(Targets::SpacingRange { min_angstrom: Length::new(1.0).ok()?, max_angstrom: None, with_absent }),
        (1, Targets::SpacingRange { min_angstrom, .. }) => {
            let sine = (wavelength / (2.0 * min_angstrom.get())).min(1.0);
            let max_deg = Degrees::new((2.0 * sine.asin().to_degrees() * 1e3).round() / 1e3).ok()?;
            Some(Targets::TwoThetaRange { min_deg: None, max_deg, with_absent })
        }
        (1, _) => Some(Targets::TwoThetaRange { min_deg: None, max_deg: Degrees::new(40.0).ok()?, with_absent }),
        _ => Some(Targets::List(Vec::new())),
    }
}

fn optional<T>(
    ui: &mut Ui,
    edits: &mut Edits,
    field: &Field<'_>,
    value: Option<f64>,
    take: impl Fn(f64) -> Result<T, ringwright_core::quantity::QuantityError>,
) -> Option<Option<T>> {
    let shown = value.map_or_else(String::new, figure);
    edits.field(ui, field, &shown, |text| {
        if text.trim().is_empty() {
            return Ok(None);
        }
        take(number(text)?).map(Some).map_err(|e| e.to_string())
    })
}

fn spacing(ui: &mut Ui, edits: &mut Edits, min: &mut Length, max: &mut Option<Length>) {
    ui.horizontal(|ui| {
        let field = Field { path: "targets.SpacingRange.min_angstrom", label: "Smallest d, Å", width: 66.0, hint: "" };
        if let Some(new) = edits.number(ui, "d from", &field, (min.get(), 0.01), Length::new) {
            *min = new;
        }
        ui.label("to");
        let field =
            Field { path: "targets.SpacingRange.max_angstrom", label: "Largest d, Å", width: 76.0, hint: "no end" };
        if let Some(new) = optional(ui, edits, &field, max.map(|m| m.get()), Length::new) {
            *max = new;
        }
        ui.label("Å");
    });
}

fn two_theta(ui: &mut Ui, edits: &mut Edits, min: &mut Option<Degrees>, max: &mut Degrees) {
    ui.horizontal(|ui| {
        ui.label("2θ from");
        let field =
            Field { path: "targets.TwoThetaRange.min_deg", label: "Smallest 2θ, degrees", width: 66.0, hint: "0" };
        if let Some(new) = optional(ui, edits, &field, min.map(|m| m.get()), Degrees::new) {
            *min = new;
        }
        let field =
            Field { path: "targets.TwoThetaRange.max_deg", label: "Largest 2θ, degrees", width: 66.0, hint: "" };
        if let Some(new) = edits.number(ui, "to", &field, (max.get(), 0.5), Degrees::new) {
            *max = new;
        }
        ui.label("°");
    });
}

fn absent(ui: &mut Ui, with_absent: &mut bool) {
    ui.checkbox(with_absent, "also those absent by symmetry");
}

/// A list of indices, one reflection a row, edited as text. What is typed lives in the ui's memory until it reads as a list.
fn list(ui: &mut Ui, nodes: &mut Vec<TargetNode>) {
    let id = ui.make_persistent_id("target list");
    let written =
        nodes.iter().map(|n| [n.h, n.k, n.l].map(|index| figure(index.get())).join(" ")).collect::<Vec<_>>().join("\n");
    let mut text = ui.data(|data| data.get_temp::<String>(id)).unwrap_or_else(|| written.clone());
    let name = row_name(ui, "h k l");
    let edit = egui::TextEdit::multiline(&mut text).desired_rows(4).desired_width(f32::INFINITY);
    let edit = ui.add(edit.hint_text("one reflection a line: 2 0 0")).labelled_by(name.id);
    ui.ctx().accesskit_node_builder(edit.id, |node| node.set_label("Reflections wanted, h k l"));
    let read = read_list(&text);
    if edit.changed()
        && let Ok(read) = &read
    {
        nodes.clone_from(read);
    }
    match read {
        Err(error) => super::super::edits::error_line(ui, &error),
        Ok(read) => remark(ui, &format!("{} reflections", read.len())),
    }
    let keep = edit.has_focus() || read_list(&text).is_err();
    ui.data_mut(|data| {
        if keep {
            data.insert_temp(id, text);
        } else {
            data.remove::<String>(id);
        }
    });
}

fn read_list(text: &str) -> Result<Vec<TargetNode>, String> {
    let mut nodes = Vec::new();
    for (i, line) in text.lines().enumerate().filter(|(_, line)| !line.trim().is_empty()) {
        let [h, k, l] = read_indices(line).map_err(|what| format!("line {}: {what}", i + 1))?;
        nodes.push(TargetNode { h, k, l });
    }
    Ok(nodes)
}

fn read_indices(text: &str) -> Result<[Index; 3], String> {
    let parts: Vec<&str> = text.split([' ', '\t', ',', ';']).filter(|part| !part.is_empty()).collect();
    let [h, k, l] = parts.as_slice() else {
        return Err(format!("{} numbers; accepted are three: h k l", parts.len()));
    };
    let index = |text: &str| Index::new(number(text)?).map_err(|e| e.to_string());
    Ok([index(h)?, index(k)?, index(l)?])
}

/// Reads the indices of one reflection.
///
/// # Errors
/// If they are not three numbers, or all 0.
pub fn read_hkl(text: &str) -> Result<Hkl, String> {
    let [h, k, l] = read_indices(text)?.map(Index::get);
    if [h, k, l] == [0.0; 3] {
        return Err("0 0 0 is the direct beam; accepted are indices that are not all 0".to_owned());
    }
    Ok(Hkl::new(h, k, l))
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn a_list_is_read_from_spaces_tabs_and_commas() {
        let nodes = read_list("2 0 0\n\n0\t\u{2212}1\t3\n0.5, 0, 1").unwrap();
        let plain: Vec<[f64; 3]> = nodes.iter().map(|n| [n.h.get(), n.k.get(), n.l.get()]).collect();
        assert_eq!(plain, [[2.0, 0.0, 0.0], [0.0, -1.0, 3.0], [0.5, 0.0, 1.0]]);
        assert!(read_list("1 2").unwrap_err().starts_with("line 1: 2 numbers"));
        assert!(read_list("1 2 3\n1 2 x").unwrap_err().starts_with("line 2: “x” is no number"));
    }
}
