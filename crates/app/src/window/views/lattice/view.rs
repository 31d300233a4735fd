use std::sync::Arc;

use egui::{Rect, Response, Role, Sense, Tooltip, Ui, WidgetInfo, pos2};
use ringwright_core::instrument::Setting;
use ringwright_picture::{Eye, Lens};

use super::super::super::{Picked, Reach, Results};
use super::super::legend::legend;
use super::super::number::{fixed, grouped, indices};
use super::super::palette::{Kind, ShownKinds};
use super::super::settings::PickedSettings;
use super::gesture::{Gesture, steer};
use super::nodes::Nodes;
use super::overlay::{self, OnScreen};
use super::picture::Picture;
use super::scene::{Look, vectors};

/// What the lattice view can show besides the nodes.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct ViewOptions {
    /// The sphere of radius 2/λ, beyond which no node is ever reached.
    pub limiting_sphere: bool,
    /// Parallel lines of sight instead of perspective.
    pub parallel: bool,
}

/// What the picture is fitted to, whatever its size.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
enum Framing {
    /// The nodes; most of the sphere may lie outside.
    #[default]
    Nodes,
    /// The nodes and the whole Ewald sphere.
    Sphere,
    /// Nothing any more: the eye was moved by hand.
    ByHand,
}

/// The reciprocal lattice with the Ewald sphere.
#[derive(Default)]
pub struct LatticeView {
    /// What is shown besides the nodes.
    pub options: ViewOptions,
    eye: Eye,
    framing: Framing,
    nodes: Option<Nodes>,
    picture: Picture,
}

/// How far from a node a click still means it, in points.
const PICK_REACH: f32 = 5.0;

/// The part of the picture's smaller side that the ball of nodes fills.
const FILLED: f64 = 0.82;

impl LatticeView {
    /// Shows picture, legend and options in the space that is left. A click on a node selects it.
    pub fn show(
        &mut self,
        ui: &mut Ui,
        results: &Results,
        picked: &mut Picked,
        settings: &PickedSettings,
        shown: &mut ShownKinds,
    ) {
        let whole = ui.available_rect_before_wrap();
        let footer = egui::Panel::bottom("lattice footer").frame(egui::Frame::NONE.inner_margin(4.0));
        footer.resizable(false).show_separator_line(false).show(ui, |ui| {
            self.footer(ui, results.reach.as_deref(), shown);
        });
        let rect = ui.available_rect_before_wrap().intersect(whole);
        self.show_picture(ui, rect, results, picked, settings, *shown);
        ui.advance_cursor_after_rect(rect);
    }

    /// The eye, for tests that project points themselves.
    #[cfg(test)]
    pub fn eye(&self) -> &Eye {
        &self.eye
    }

    /// Whether the picture in sight was painted finely.
    #[cfg(test)]
    pub fn is_fine(&self) -> bool {
        self.picture.is_fine()
    }

    fn footer(&mut self, ui: &mut Ui, reach: Option<&Reach>, shown: &mut ShownKinds) {
        let counts = reach.map_or([0; Kind::ALL.len()], |reach| reach.table.counts());
        legend(ui, &counts, shown);
        ui.horizontal_wrapped(|ui| {
            ui.checkbox(&mut self.options.limiting_sphere, "limiting sphere 2/λ")
                .on_hover_text("A node outside the sphere of radius 2/λ about the origin never meets the Ewald sphere.");
            ui.checkbox(&mut self.options.parallel, "parallel view")
                .on_hover_text("Without perspective: rows of nodes stay parallel.");
            let help = "Drag to turn, drag with shift or the right button to move, scroll to zoom, click a node to select it. \
                        With the keyboard: arrows, + and −.";
            if ui.button("Fit nodes").on_hover_text(format!("{help}\nThis: a double click, or Home.")).clicked() {
                self.framing = Framing::Nodes;
            }
            if ui.button("Whole sphere").on_hover_text(format!("{help}\nThis: End.")).clicked() {
                self.framing = Framing::Sphere;
            }
        });
    }

    fn show_picture(
        &mut self,
        ui: &mut Ui,
        rect: Rect,
        results: &Results,
        picked: &mut Picked,
        settings: &PickedSettings,
        shown: ShownKinds,
    ) {
        let scale = ui.pixels_per_point();
        // The picture sits on whole pixels of the screen, so that its own are shown as they are.
        let snap = |v: f32| (v * scale).round() / scale;
        let rect = Rect::from_min_max(
            pos2(snap(rect.left()), snap(rect.top())),
            pos2(snap(rect.right()), snap(rect.bottom())),
        );
        let size_px = [rect.width(), rect.height()].map(|side| (side * scale).round().max(0.0) as usize);
        let response = ui.interact(rect, ui.scope_id().with("lattice"), Sense::click_and_drag());
        response.widget_info(|| WidgetInfo::labeled(Role::Image, true, spoken(results, picked)));
        let Some(reach) = &results.reach else {
            let next = "Give a cell, a wavelength and two found peaks. The lattice appears with the orientation.";
            return overlay::hint(ui, rect, "No orientation yet", next);
        };
        if size_px.contains(&0) {
            return;
        }
        self.take(reach);
        let Some(nodes) = &self.nodes else { return };
        self.eye.lens = if self.options.parallel { Lens::Orthographic } else { Lens::Perspective };
        match steer(ui, &response, &mut self.eye, size_px) {
            Gesture::Nothing => {}
            Gesture::Moved => self.framing = Framing::ByHand,
            Gesture::FitNodes => self.framing = Framing::Nodes,
            Gesture::FitSphere => self.framing = Framing::Sphere,
        }
        if self.framing != Framing::ByHand {
            self.eye = start(nodes, self.framing, self.eye.lens, size_px);
        }
        let look = look(ui, reach, picked, settings, shown, self.options);
        self.picture.update(ui.ctx(), nodes, &look, &self.eye, size_px);
        if let Some(texture) = self.picture.texture() {
            let all = Rect::from_min_max(pos2(0.0, 0.0), pos2(1.0, 1.0));
            ui.painter().image(texture.id(), rect, all, egui::Color32::WHITE);
        }
        self.point(ui, &response, reach, picked);
        let screen = OnScreen { view: self.eye.view(size_px[0], size_px[1]), rect, scale };
        overlay::draw(ui, &screen, &vectors(nodes, &look), picked.hkl, picked.hovered);
        overlay::caption(ui, rect, &caption(reach, settings, shown, &look.setting));
        if response.has_focus() {
            ui.painter().rect_stroke(rect, 0.0, ui.visuals().selection.stroke, egui::StrokeKind::Inside);
        }
    }

    fn take(&mut self, reach: &Arc<Reach>) {
        if !self.nodes.as_ref().is_some_and(|nodes| nodes.is_of(reach)) {
            self.nodes = Some(Nodes::of(reach));
            self.picture.forget();
        }
    }

    /// The pointer: what lies under it is told in a tooltip, a click selects it.
    fn point(&self, ui: &Ui, response: &Response, reach: &Reach, picked: &mut Picked) {
        if response.clicked() {
            response.request_focus();
        }
        if response.dragged() {
            return;
        }
        let Some(at) = response.hover_pos() else { return };
        let scale = ui.pixels_per_point();
        let px = (at - response.rect.min) * scale;
        let row = self.picture.row_at(f64::from(px.x), f64::from(px.y), f64::from(PICK_REACH * scale));
        let Some(row) = row.and_then(|row| reach.table.row(row)) else { return };
        picked.hovered = Some(row.hkl);
        if response.clicked() {
            picked.hkl = Some(row.hkl);
        }
        let tooltip = Tooltip::for_widget(response).at_pointer().gap(14.0);
        tooltip.show(|ui| overlay::node_card(ui, reach, &row));
    }
}

/// The eye to begin with: a little from above, with the beam going to the right and into the picture.
fn start(nodes: &Nodes, framing: Framing, lens: Lens, size_px: [usize; 2]) -> Eye {
    let mut eye = Eye::default();
    eye.lens = lens;
    let (centre, radius) = match framing {
        Framing::Nodes => ([0.0; 3], nodes.extent() / FILLED),
        Framing::Sphere | Framing::ByHand => nodes.bounds(),
    };
    // Both are fixed directions and a positive radius: neither can be refused.
    let _ = eye.look_along([0.80, -0.38, 0.46], [0.0, 1.0, 0.0]);
    let _ = eye.fit(centre, radius, size_px[0], size_px[1]);
    eye
}

fn look(
    ui: &Ui,
    reach: &Reach,
    picked: &Picked,
    settings: &PickedSettings,
    shown: ShownKinds,
    options: ViewOptions,
) -> Look {
    let setting = settings.shown_setting();
    Look {
        setting: setting.unwrap_or_else(|| reach.instrument.park()),
        at_reflection: setting.is_some(),
        picked: picked.hkl,
        shown,
        options: ViewOptions { parallel: false, ..options },
        dark: ui.visuals().dark_mode,
        scale: ui.pixels_per_point(),
    }
}

fn spoken(results: &Results, picked: &Picked) -> String {
    let Some(reach) = &results.reach else { return "Reciprocal lattice, empty".to_owned() };
    let selected = picked.hkl.map_or_else(|| "none".to_owned(), |hkl| indices(hkl, 0));
    format!("Reciprocal lattice, {} nodes, selected {selected}", reach.table.len())
}

fn caption(reach: &Reach, settings: &PickedSettings, shown: ShownKinds, setting: &Setting) -> String {
    let counts = reach.table.counts();
    if reach.table.is_empty() {
        return "No node lies in the targets: widen the range of d or 2θ.".to_owned();
    }
    let visible: usize = Kind::ALL.into_iter().filter(|kind| shown.shows(*kind)).map(|kind| counts[kind.index()]).sum();
    if visible == 0 {
        return format!(
            "All {} nodes are hidden: click a verdict in the legend to show it.",
            grouped(reach.table.len())
        );
    }
    let names = reach.instrument.axes().map(|axis| axis.name.as_str());
    let readings: Vec<String> =
        names.zip(setting.readings_deg()).map(|(name, deg)| format!("{name} {}°", fixed(*deg, 2))).collect();
    match settings.shown_setting() {
        Some(_) if settings.by_hand_deg().is_some() => {
            let psi_deg = settings.by_hand_deg().unwrap_or_default();
            format!("Lab frame turned by hand to ψ {}°: {}", fixed(psi_deg, 2), readings.join(", "))
        }
        Some(_) => {
            let (i, all) = (settings.shown_index() + 1, settings.all().len());
            format!("Lab frame at setting {i} of {all}: {}", readings.join(", "))
        }
        None => format!("Lab frame at park: {}", readings.join(", ")),
    }
}
