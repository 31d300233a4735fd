use egui::{ComboBox, Ui};
use ringwright_core::aim::Reference;
use ringwright_core::crystal::{Centring, SymmetryQuery};
use ringwright_core::quantity::{CellAngle, Index, Length};
use ringwright_core::session::CellDocument;

use super::super::edits::{Edits, Field, figure};
use super::Bench;
use super::card::{card, remark, row_name};
use super::rules;

const KINDS: [&str; 4] = ["Space group", "Number", "Hall symbol", "Lattice only"];

/// Cell and space group.
pub fn show(ui: &mut Ui, bench: &mut Bench<'_>) {
    let state = bench.state("crystal", None);
    let c = bench.session.crystal.cell;
    let lengths = [c.a_angstrom, c.b_angstrom, c.c_angstrom].map(|v| figure(v.get())).join(" ");
    let angles = [c.alpha_deg, c.beta_deg, c.gamma_deg].map(|v| figure(v.get())).join(" ");
    let summary = format!("{lengths} Å, {angles}°, {}", bench.session.crystal.symmetry);
    card(ui, "Crystal", state, &summary, |ui| body(ui, bench));
}

fn body(ui: &mut Ui, bench: &mut Bench<'_>) {
    ui.horizontal(|ui| {
        row_name(ui, "Name");
        let width = ui.available_width();
        let field = Field { path: "crystal.name", label: "Name of the crystal", width, hint: "what it is called" };
        let shown = bench.session.crystal.name.clone();
        if let Some(name) = bench.edits.field(ui, &field, &shown, |text| Ok(text.to_owned())) {
            bench.session.crystal.name = name;
        }
    });
    cell(ui, bench.edits, &mut bench.session.crystal.cell);
    bench.show_errors(ui, "crystal.cell");
    symmetry(ui, bench);
    bench.show_errors(ui, "crystal.symmetry");
    if let Some(resolved) = &bench.results.resolved {
        let group = &resolved.space_group;
        let text = format!("{group}, Laue class {}, V = {:.2} Å³", group.laue_class(), resolved.cell.volume());
        remark(ui, &text);
    }
    surface(ui, bench);
    bench.show_errors(ui, "crystal.surface");
    for note in bench.notes("crystal") {
        remark(ui, &note);
    }
}

/// The outward normal of a surface, if the crystal has one.
fn surface(ui: &mut Ui, bench: &mut Bench<'_>) {
    ui.horizontal(|ui| {
        row_name(ui, "Surface");
        let mut has = bench.session.crystal.surface.is_some();
        let word = if has { "" } else { "none" };
        let tick = ui.checkbox(&mut has, word);
        // Ticked it has no words beside it, only the normal.
        ui.ctx().accesskit_node_builder(tick.id, |node| node.set_label("The crystal has a surface"));
        if tick.changed() {
            let index = |value| Index::new(value).ok();
            let normal = || Some(Reference::Reciprocal { h: index(0.0)?, k: index(0.0)?, l: index(1.0)? });
            bench.session.crystal.surface = if has { normal() } else { None };
            bench.edits.forget_under("crystal.surface");
        }
        if let Some(normal) = &mut bench.session.crystal.surface {
            rules::direction(ui, bench.edits, "crystal.surface", "Outward normal of the surface", normal);
        }
    });
}

fn cell(ui: &mut Ui, edits: &mut Edits, cell: &mut CellDocument) {
    let width = (ui.available_width() - 3.0 * 11.0 - 6.0 * 6.0 - 14.0) / 3.0;
    ui.horizontal(|ui| {
        let of = [
            ("a", "a, Å", "crystal.cell.a_angstrom", &mut cell.a_angstrom),
            ("b", "b, Å", "crystal.cell.b_angstrom", &mut cell.b_angstrom),
            ("c", "c, Å", "crystal.cell.c_angstrom", &mut cell.c_angstrom),
        ];
        for (name, label, path, value) in of {
            let field = Field { path, label, width, hint: "" };
            if let Some(new) = edits.number(ui, name, &field, (value.get(), 0.01), Length::new) {
                *value = new;
            }
        }
        ui.label("Å");
    });
    ui.horizontal(|ui| {
        let of = [
            ("α", "alpha, degrees", "crystal.cell.alpha_deg", &mut cell.alpha_deg),
            ("β", "beta, degrees", "crystal.cell.beta_deg", &mut cell.beta_deg),
            ("γ", "gamma, degrees", "crystal.cell.gamma_deg", &mut cell.gamma_deg),
        ];
        for (name, label, path, value) in of {
            let field = Field { path, label, width, hint: "" };
            if let Some(new) = edits.number(ui, name, &field, (value.get(), 0.1), CellAngle::new) {
                *value = new;
            }
        }
        ui.label("°");
    });
}

fn kind(query: &SymmetryQuery) -> usize {
    match query {
        SymmetryQuery::SpaceGroup(_) => 0,
        SymmetryQuery::Number(_) => 1,
        SymmetryQuery::Hall(_) => 2,
        SymmetryQuery::Centring(_) => 3,
    }
}

fn symmetry(ui: &mut Ui, bench: &mut Bench<'_>) {
    let query = bench.session.crystal.symmetry.clone();
    ui.horizontal(|ui| {
        let mut chosen = kind(&query);
        let combo = ComboBox::from_id_salt("symmetry kind").width(112.0);
        let shown = combo.show_index(ui, &mut chosen, KINDS.len(), |i| KINDS[i]);
        super::super::name_combo(ui, &shown, "Kind of symmetry");
        if chosen != kind(&query) {
            bench.edits.forget_under("crystal.symmetry");
            bench.session.crystal.symmetry = as_kind(chosen, bench);
            return;
        }
        let width = ui.available_width();
        let field = |label| Field { path: "crystal.symmetry", label, width, hint: "" };
        let edits = &mut *bench.edits;
        let new = match &query {
            SymmetryQuery::SpaceGroup(symbol) => edits.field(ui, &field("Space group"), symbol, |text| {
                filled(text, "a Hermann–Mauguin symbol such as P 21/n").map(SymmetryQuery::SpaceGroup)
            }),
            SymmetryQuery::Hall(symbol) => edits.field(ui, &field("Hall symbol"), symbol, |text| {
                filled(text, "a Hall symbol such as -P 2yn").map(SymmetryQuery::Hall)
            }),
            SymmetryQuery::Number(number) => {
                edits.field(ui, &field("Number of the space group"), &number.to_string(), |text| {
                    let number = text.trim().parse::<u16>().ok().filter(|n| (1..=230).contains(n));
                    let refused = || format!("“{}” is no number of a space group; accepted are 1 to 230", text.trim());
                    number.map(SymmetryQuery::Number).ok_or_else(refused)
                })
            }
            SymmetryQuery::Centring(centring) => centring_combo(ui, *centring).map(SymmetryQuery::Centring),
        };
        if let Some(new) = new {
            bench.session.crystal.symmetry = new;
        }
    });
}

fn filled(text: &str, accepted: &str) -> Result<String, String> {
    let text = text.trim();
    if text.is_empty() { Err(format!("nothing is no symbol; accepted is {accepted}")) } else { Ok(text.to_owned()) }
}

fn centring_combo(ui: &mut Ui, centring: Centring) -> Option<Centring> {
    let mut chosen = Centring::ALL.iter().position(|c| *c == centring).unwrap_or(0);
    let combo = ComboBox::from_id_salt("centring").width(60.0);
    let shown = combo.show_index(ui, &mut chosen, Centring::ALL.len(), |i| {
        Centring::ALL.get(i).map_or('?', |c| c.letter()).to_string()
    });
    super::super::name_combo(ui, &shown, "Lattice letter");
    Centring::ALL.get(chosen).copied().filter(|new| *new != centring)
}

/// The same group said in another way, as far as it is known.
fn as_kind(kind: usize, bench: &Bench<'_>) -> SymmetryQuery {
    let group = bench.results.resolved.as_ref().map(|resolved| &resolved.space_group);
    match kind {
        0 => SymmetryQuery::SpaceGroup(group.map_or_else(|| "P 1".to_owned(), |g| g.short_symbol().to_owned())),
        1 => SymmetryQuery::Number(group.map_or(1, |g| g.number())),
        2 => SymmetryQuery::Hall(group.map_or_else(|| "P 1".to_owned(), |g| g.hall_symbol().to_owned())),
        _ => SymmetryQuery::Centring(group.map_or(Centring::P, |g| g.centring())),
    }
}
