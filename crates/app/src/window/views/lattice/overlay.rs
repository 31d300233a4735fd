//! What egui draws over the texture with the same projection: rings around nodes, labels, the line of text below.

use egui::{Pos2, Rect, Stroke, TextStyle, Ui, Vec2, pos2, vec2};
use ringwright_core::frames::Hkl;
use ringwright_core::reach::ReachRow;
use ringwright_picture::View;

use super::super::super::Reach;
use super::super::number::{fixed, indices};
use super::super::palette::{Kind, Palette, mark_place, paint_mark};
use super::label::Labels;
use super::scene::{Named, Vectors};

/// The projection in points of the window.
#[derive(Clone, Copy)]
pub(super) struct OnScreen {
    pub view: View,
    pub rect: Rect,
    pub scale: f32,
}

impl OnScreen {
    pub fn at(&self, point: [f64; 3]) -> Option<Pos2> {
        let seen = self.view.project(point)?;
        Some(self.rect.min + vec2(seen.x as f32, seen.y as f32) / self.scale)
    }

    /// Points along a vector, from tail to tip, as far as they lie in the picture: an arrow may begin outside or behind the
    /// eye.
    pub fn in_sight(&self, [from, to]: [[f64; 3]; 2]) -> Vec<Pos2> {
        const STEPS: usize = 64;
        let point = |step: usize| {
            let part = step as f64 / STEPS as f64;
            self.at(std::array::from_fn(|i| from[i] + part * (to[i] - from[i])))
        };
        (0..=STEPS).filter_map(point).filter(|at| self.rect.contains(*at)).collect()
    }
}

pub(super) fn draw(ui: &Ui, screen: &OnScreen, of: &Vectors, picked: Option<Hkl>, hovered: Option<Hkl>) {
    let palette = Palette::for_ui(ui);
    let painter = ui.painter_at(screen.rect);
    if let Some(at) = hovered.and_then(|hkl| screen.at(of.place.of(hkl))) {
        painter.circle_stroke(at, 8.0, Stroke::new(1.5, palette.hovered));
    }
    through(&painter, screen, of, palette);
    let mut labels = Labels::new(&painter, TextStyle::Body.resolve(ui.style()), palette.background);
    // The caption stands there.
    labels.reserve(Rect::from_min_max(pos2(screen.rect.left(), screen.rect.bottom() - 24.0), screen.rect.max));
    let origin = screen.at([0.0; 3]);
    if let Some(at) = origin {
        painter.circle(at, 3.5, palette.background, Stroke::new(2.0, palette.beam));
        labels.reserve(Rect::from_center_size(at, Vec2::splat(14.0)));
    }
    // Labels keep off the arrows, not only off each other.
    for (_, ends) in of.arrows() {
        if let [first, .., last] = screen.in_sight(ends).as_slice() {
            labels.keep_off([*first, *last]);
        }
    }
    if let (Some(hkl), Some(at)) = (picked, of.node.and_then(|node| screen.at(node))) {
        painter.circle_stroke(at, 10.0, Stroke::new(4.0, palette.background));
        painter.circle_stroke(at, 10.0, Stroke::new(2.0, palette.selected));
        labels.reserve(Rect::from_center_size(at, Vec2::splat(20.0)));
        let away = origin.map_or(Vec2::ZERO, |origin| at - origin);
        labels.put(at + away.normalized() * 8.0, away, &indices(hkl, 0), "", palette.selected);
    }
    vector_labels(&mut labels, screen, of, palette);
}

/// The vectors again as broken lines over everything, so that they are seen where nodes hide them.
fn through(painter: &egui::Painter, screen: &OnScreen, of: &Vectors, palette: &Palette) {
    let beam = palette.beam.gamma_multiply(0.8);
    for (name, ends) in of.arrows() {
        let tint = if name == Named::Q { palette.q.gamma_multiply(0.9) } else { beam };
        if let [first, .., last] = screen.in_sight(ends).as_slice() {
            painter.extend(egui::Shape::dashed_line(&[*first, *last], Stroke::new(1.5, tint), 5.0, 4.0));
        }
    }
}

fn vector_labels(labels: &mut Labels<'_>, screen: &OnScreen, of: &Vectors, palette: &Palette) {
    for (name, ends) in of.arrows() {
        let (letter, subscript, colour) = match name {
            Named::Ki => ("k", "i", palette.beam),
            Named::Kf => ("k", "f", palette.beam),
            Named::Q => ("Q", "", palette.q),
        };
        labels.put_along(&screen.in_sight(ends), letter, subscript, colour);
    }
    let Some(origin) = screen.at([0.0; 3]) else { return };
    for (end, name) in of.axis_ends.into_iter().zip(["a*", "b*", "c*"]) {
        if let Some(at) = screen.at(end) {
            labels.put(at, at - origin, name, "", palette.axis);
        }
    }
    labels.put(origin, vec2(0.3, 1.0), "0 0 0", "", palette.axis);
}

/// Where the beam goes, the caption of the picture.
pub(super) fn caption(ui: &Ui, rect: Rect, text: &str) {
    let palette = Palette::for_ui(ui);
    let font = TextStyle::Small.resolve(ui.style());
    let galley = ui.painter().layout(text.to_owned(), font, palette.axis, rect.width() - 16.0);
    let at = pos2(rect.left() + 8.0, rect.bottom() - galley.size().y - 6.0);
    let ground = Rect::from_min_size(at, galley.size()).expand2(vec2(4.0, 2.0));
    ui.painter().rect_filled(ground, 3.0, palette.background.gamma_multiply(0.78));
    ui.painter().galley(at, galley, palette.axis);
}

/// Text in the middle of an empty picture: what is missing, and what to do next.
pub(super) fn hint(ui: &mut Ui, rect: Rect, title: &str, next: &str) {
    let palette = Palette::for_ui(ui);
    ui.painter().rect_filled(rect, 0.0, palette.background);
    let inside = Rect::from_center_size(rect.center(), vec2((rect.width() - 40.0).min(420.0), 80.0));
    ui.scope_builder(egui::UiBuilder::new().max_rect(inside), |ui| {
        ui.vertical_centered(|ui| {
            ui.label(egui::RichText::new(title).color(palette.ink).strong());
            ui.label(egui::RichText::new(next).color(palette.axis));
        });
    });
}

/// The figures of one node, for the tooltip.
pub(super) fn node_card(ui: &mut Ui, reach: &Reach, row: &ReachRow) {
    let kind = Kind::of(row.verdict);
    ui.horizontal(|ui| {
        let (place, _) = ui.allocate_exact_size(vec2(12.0, 14.0), egui::Sense::hover());
        paint_mark(ui.painter(), mark_place(place, 4.0), 4.0, kind.mark(), Palette::for_ui(ui).kind(kind));
        ui.strong(indices(row.hkl, 0));
        ui.label(kind.words());
    });
    let two_theta = row.two_theta_deg.map_or_else(|| "no 2θ".to_owned(), |deg| format!("2θ {}°", fixed(deg, 3)));
    ui.label(format!("d {} Å, {two_theta}", fixed(row.d_angstrom, 4)));
    let detail = row.verdict.detail(&reach.instrument);
    if !detail.is_empty() {
        ui.label(detail);
    }
    if row.absent.is_some() {
        ui.label("absent by symmetry");
    }
}
