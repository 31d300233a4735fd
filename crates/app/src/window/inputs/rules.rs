use egui::{Button, ComboBox, CornerRadius, Response, RichText, Sense, Stroke, StrokeKind, Ui, vec2};
use ringwright_core::aim::{Reference, Rule};
use ringwright_core::instrument::{AxisName, Instrument};
use ringwright_core::quantity::{Component, Degrees, Index};

use super::super::edits::{Edits, Field, figure};
use super::super::theme::Tones;
use super::Bench;
use super::card::row_name;

/// The rules, one below the other, and which spare angles they fill.
pub fn show(ui: &mut Ui, bench: &mut Bench<'_>) {
    if let Some(machine) = bench.instrument {
        slots(ui, machine, &bench.session.rules);
    }
    let mut remove = None;
    let surface = bench.session.crystal.surface.is_some();
    for (i, rule) in bench.session.rules.iter_mut().enumerate() {
        let before = std::mem::discriminant(rule);
        ui.horizontal(|ui| {
            row_name(ui, if i == 0 { "Rule" } else { "and" });
            let list = kind(ui, rule, bench.instrument, surface, i);
            // The axis of these two stands in the list itself.
            let own = ["", ".Hold.axis", ".BisectingAbout.axis"].map(|field| format!("rules[{i}]{field}"));
            bench.edits.mark_list(ui, &list, &own.each_ref().map(String::as_str));
            let button = ui.add(Button::new("✕").min_size(vec2(22.0, 22.0)));
            ui.ctx().accesskit_node_builder(button.id, |node| node.set_label(format!("Remove rule {}", i + 1)));
            if button.clicked() {
                remove = Some(i);
            }
        });
        if before != std::mem::discriminant(rule) {
            bench.edits.forget_under(&format!("rules[{i}]"));
        }
        let mut editor =
            Editor { edits: bench.edits, machine: bench.instrument, path: format!("rules[{i}]"), number: i + 1 };
        editor.fields(ui, rule);
        bench.edits.show_errors(ui, &format!("rules[{i}]"), &bench.results.problems);
    }
    if let Some(i) = remove {
        bench.edits.forget_under("rules");
        bench.session.rules.remove(i);
    }
    if ui.button("Add a rule").clicked() {
        bench.session.rules.push(Rule::Bisecting);
    }
}

/// "4 + 2 − 3 = 3 spare", and a slot for each: filled, empty, or one too many.
fn slots(ui: &mut Ui, machine: &Instrument, rules: &[Rule]) {
    let tones = Tones::in_ui(ui);
    let sample = machine.sample_axes().iter().filter(|axis| !axis.set_by_hand).count();
    let detector = machine.detector_axes().len();
    let spare = (sample + detector).saturating_sub(3);
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing.x = 4.0;
        let sum = format!("{sample} + {detector} \u{2212} 3 = {spare} spare");
        let counted =
            "Sample axes that move, and detector axes, less the three angles that bring a node onto the detector.";
        ui.label(RichText::new(sum).color(tones.quiet).small()).on_hover_text(counted);
        for i in 0..spare.max(rules.len()) {
            let (rect, response) = ui.allocate_exact_size(vec2(14.0, 14.0), Sense::hover());
            let rect = rect.shrink(1.0);
            let (word, fill, edge) = match (rules.get(i), i < spare) {
                (Some(rule), true) => (format!("filled by {}", words(rule)), tones.good, tones.good),
                (Some(rule), false) => (format!("{} is one too many", words(rule)), tones.bad, tones.bad),
                (None, _) => ("empty: one more rule is wanted".to_owned(), egui::Color32::TRANSPARENT, tones.doubt),
            };
            ui.painter().rect(rect, CornerRadius::same(3), fill, Stroke::new(1.5, edge), StrokeKind::Inside);
            // One too many is crossed out: not told from a filled one by colour alone.
            if i >= spare {
                let cross = rect.shrink(3.0);
                let stroke = Stroke::new(1.5, tones.card);
                ui.painter().line_segment([cross.left_top(), cross.right_bottom()], stroke);
                ui.painter().line_segment([cross.right_top(), cross.left_bottom()], stroke);
            }
            ui.ctx()
                .accesskit_node_builder(response.id, |node| node.set_label(format!("Spare angle {}: {word}", i + 1)));
            response.on_hover_text(word);
        }
        let (empty, many) = (spare.saturating_sub(rules.len()), rules.len().saturating_sub(spare));
        if many > 0 {
            ui.label(RichText::new(format!("{many} too many")).color(tones.bad).small());
        } else if empty > 0 {
            ui.label(RichText::new(format!("{empty} empty")).color(tones.doubt).small());
        }
    });
}

/// A rule in a few words.
pub fn words(rule: &Rule) -> String {
    match rule {
        Rule::Hold { axis, at_deg } => format!("hold {axis} at {}°", figure(at_deg.get())),
        Rule::Tie { axis, to, .. } => format!("{axis} tied to {to}"),
        Rule::Azimuth { at_deg, .. } => format!("azimuth {}°", figure(at_deg.get())),
        Rule::Incidence { at_deg } => format!("incidence {}°", figure(at_deg.get())),
        Rule::Exit { at_deg } => format!("exit {}°", figure(at_deg.get())),
        Rule::BisectingAbout { axis } => format!("bisecting about {axis}"),
        Rule::DiffractionPlane { turned_deg } => format!("plane turned {}°", figure(turned_deg.get())),
        other => other.word().to_owned(),
    }
}

/// What a kind of rule begins with. `Err` says why it cannot be on this machine.
type Offer = (String, Result<Rule, &'static str>);

fn offers(machine: &Instrument, surface: bool) -> Option<Vec<Offer>> {
    let zero = Degrees::new(0.0).ok()?;
    let sample: Vec<_> = machine.sample_axes().iter().filter(|axis| !axis.set_by_hand).collect();
    let two = machine.detector_axes().len() > 1;
    let spindle = &machine.sample_axes().get(machine.spindle())?.name;
    let c_star = default_reference()?;
    let mut all: Vec<Offer> = vec![(
        "bisecting".to_owned(),
        if sample.len() < 3 { Err("needs three sample axes") } else { Ok(Rule::Bisecting) },
    )];
    for axis in sample.iter().filter(|axis| axis.name != *spindle) {
        all.push((format!("bisecting about {}", axis.name), Ok(Rule::BisectingAbout { axis: axis.name.clone() })));
    }
    let detector = machine.detector_axes().iter().filter(|_| two);
    for axis in sample.iter().copied().chain(detector) {
        let at_deg = Degrees::new(axis.park_deg).ok()?;
        all.push((format!("hold {}", axis.name), Ok(Rule::Hold { axis: axis.name.clone(), at_deg })));
    }
    all.push(("azimuth".to_owned(), Ok(Rule::Azimuth { reference: c_star, at_deg: zero })));
    all.push(("freest azimuth".to_owned(), Ok(Rule::Freest { reference: c_star })));
    let with_surface = |rule| if surface { Ok(rule) } else { Err("needs a surface: see Crystal") };
    all.push(("incidence".to_owned(), with_surface(Rule::Incidence { at_deg: zero })));
    all.push(("exit".to_owned(), with_surface(Rule::Exit { at_deg: zero })));
    all.push(("equal incidence and exit".to_owned(), with_surface(Rule::EqualIncidenceAndExit)));
    if let (Some(axis), Some(to)) = (sample.first(), machine.detector_axes().last()) {
        let factor = Component::new(0.5).ok()?;
        let tie = Rule::Tie { axis: axis.name.clone(), to: to.name.clone(), factor, offset_deg: zero };
        all.push(("tie".to_owned(), Ok(tie)));
    }
    let plane = Rule::DiffractionPlane { turned_deg: zero };
    all.push(("diffraction plane".to_owned(), if two { Ok(plane) } else { Err("needs two detector axes") }));
    Some(all)
}

fn default_reference() -> Option<Reference> {
    let index = |value| Index::new(value).ok();
    Some(Reference::Reciprocal { h: index(0.0)?, k: index(0.0)?, l: index(1.0)? })
}

fn kind(ui: &mut Ui, rule: &mut Rule, machine: Option<&Instrument>, surface: bool, i: usize) -> Response {
    let named = |rule: &Rule| match rule {
        Rule::Hold { axis, .. } => format!("hold {axis}"),
        Rule::BisectingAbout { axis } => format!("bisecting about {axis}"),
        Rule::Freest { .. } => "freest azimuth".to_owned(),
        other => other.word().to_owned(),
    };
    let own = named(rule);
    let combo = ComboBox::from_id_salt(("rule", i)).width(170.0).height(420.0).selected_text(own.clone());
    let shown = combo.show_ui(ui, |ui| {
        for (name, offer) in machine.and_then(|machine| offers(machine, surface)).into_iter().flatten() {
            match offer {
                Ok(offered) => {
                    if ui.selectable_label(name == own, &name).clicked() && name != own {
                        *rule = offered;
                    }
                }
                Err(why) => drop(ui.add_enabled(false, Button::selectable(false, &name)).on_disabled_hover_text(why)),
            }
        }
    });
    super::super::name_combo(ui, &shown.response, &format!("Rule {}", i + 1));
    shown.response
}

struct Editor<'a> {
    edits: &'a mut Edits,
    machine: Option<&'a Instrument>,
    path: String,
    number: usize,
}

impl Editor<'_> {
    fn fields(&mut self, ui: &mut Ui, rule: &mut Rule) {
        match rule {
            Rule::Bisecting | Rule::BisectingAbout { .. } | Rule::EqualIncidenceAndExit => {}
            Rule::Hold { axis, at_deg } => {
                let label = format!("Hold {axis} at, degrees");
                self.row(ui, |editor, ui| editor.angle(ui, "at", "Hold.at_deg", &label, at_deg));
            }
            Rule::Incidence { at_deg } => {
                self.row(ui, |editor, ui| {
                    editor.angle(ui, "α incident", "Incidence.at_deg", "Incidence, degrees", at_deg)
                });
            }
            Rule::Exit { at_deg } => {
                self.row(ui, |editor, ui| editor.angle(ui, "α exit", "Exit.at_deg", "Exit, degrees", at_deg));
            }
            Rule::DiffractionPlane { turned_deg } => {
                let label = "Turn of the plane from horizontal, degrees";
                self.row(ui, |editor, ui| editor.angle(ui, "turned", "DiffractionPlane.turned_deg", label, turned_deg));
            }
            Rule::Azimuth { reference, at_deg } => {
                self.row(ui, |editor, ui| editor.angle(ui, "ψ", "Azimuth.at_deg", "Azimuth, degrees", at_deg));
                self.reference(ui, "Azimuth.reference", reference);
            }
            Rule::Freest { reference } => self.reference(ui, "Freest.reference", reference),
            Rule::Tie { axis, to, factor, offset_deg } => {
                self.row(ui, |editor, ui| {
                    editor.axis(ui, "tied axis", "Tie.axis", axis);
                    ui.label("=");
                    let path = format!("{}.Tie.factor", editor.path);
                    let field = Field { path: &path, label: "Factor of the tie", width: 44.0, hint: "" };
                    if let Some(new) = editor.edits.number(ui, "", &field, (factor.get(), 0.1), Component::new) {
                        *factor = new;
                    }
                    ui.label("×");
                });
                self.row(ui, |editor, ui| {
                    editor.axis(ui, "axis it follows", "Tie.to", to);
                    editor.angle(ui, "+", "Tie.offset_deg", "Offset of the tie, degrees", offset_deg)
                });
            }
        }
    }

    fn row(&mut self, ui: &mut Ui, content: impl FnOnce(&mut Self, &mut Ui)) {
        ui.horizontal(|ui| {
            row_name(ui, "");
            content(self, ui);
        });
    }

    fn angle(&mut self, ui: &mut Ui, name: &str, field: &str, label: &str, value: &mut Degrees) {
        let path = format!("{}.{field}", self.path);
        let field = Field { path: &path, label, width: 58.0, hint: "" };
        if let Some(new) = self.edits.number(ui, name, &field, (value.get(), 0.5), Degrees::new) {
            *value = new;
        }
        ui.label("°");
    }

    fn axis(&mut self, ui: &mut Ui, what: &str, field: &str, name: &mut AxisName) {
        let id = (self.path.clone(), what.to_owned());
        let shown = ComboBox::from_id_salt(id).width(64.0).selected_text(name.as_str()).show_ui(ui, |ui| {
            let axes = self.machine.into_iter().flat_map(|machine| machine.axes());
            for axis in axes.filter(|axis| !axis.set_by_hand) {
                ui.selectable_value(name, axis.name.clone(), axis.name.as_str());
            }
        });
        super::super::name_combo(ui, &shown.response, &format!("Rule {}, {what}", self.number));
        self.edits.mark_list(ui, &shown.response, &[&format!("{}.{field}", self.path)]);
    }

    fn reference(&mut self, ui: &mut Ui, field: &str, reference: &mut Reference) {
        let path = format!("{}.{field}", self.path);
        self.row(ui, |editor, ui| {
            direction(ui, editor.edits, &path, &format!("Rule {} reference", editor.number), reference)
        });
    }
}

/// Three numbers of a direction in the crystal, and whether they are reciprocal or direct.
pub fn direction(ui: &mut Ui, edits: &mut Edits, path: &str, label: &str, reference: &mut Reference) {
    const KINDS: [&str; 2] = ["h k l", "u v w"];
    let before = usize::from(matches!(reference, Reference::Direct { .. }));
    let mut chosen = before;
    let combo = ComboBox::from_id_salt(path).width(56.0).show_index(ui, &mut chosen, 2, |i| KINDS[i]);
    super::super::name_combo(ui, &combo, &format!("{label}, kind"));
    let shown = reference.components().map(figure).join(" ");
    let field = Field { path, label, width: 104.0, hint: "three numbers" };
    let typed = edits.field(ui, &field, &shown, |text| {
        let hkl = super::read_hkl(text)?;
        let index = |value| Index::new(value).map_err(|error| error.to_string());
        Ok([index(hkl.h)?, index(hkl.k)?, index(hkl.l)?])
    });
    let own = match *reference {
        Reference::Reciprocal { h, k, l } => [h, k, l],
        Reference::Direct { u, v, w } => [u, v, w],
    };
    if typed.is_some() || chosen != before {
        let [x, y, z] = typed.unwrap_or(own);
        *reference = match chosen {
            0 => Reference::Reciprocal { h: x, k: y, l: z },
            _ => Reference::Direct { u: x, v: y, w: z },
        };
    }
}
