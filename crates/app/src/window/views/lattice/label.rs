use std::sync::Arc;

use egui::{Color32, FontId, Galley, Painter, Pos2, Rect, Stroke, Vec2, text::LayoutJob, text::TextFormat, vec2};

/// Labels of a picture, the most important first, placed so that none covers another.
pub(super) struct Labels<'a> {
    painter: &'a Painter,
    background: Color32,
    font: FontId,
    taken: Vec<Rect>,
}

/// Distance from the point that a label names to its nearest edge.
const GAP: f32 = 7.0;

impl<'a> Labels<'a> {
    pub fn new(painter: &'a Painter, font: FontId, background: Color32) -> Self {
        Self { painter, background, font, taken: Vec::new() }
    }

    /// Keeps a place free of labels.
    pub fn reserve(&mut self, rect: Rect) {
        self.taken.push(rect);
    }

    /// Puts a label beside a point, preferably on the side that `away` points to. One that finds no free place near it is
    /// left out.
    pub fn put(&mut self, at: Pos2, away: Vec2, text: &str, subscript: &str, colour: Color32) {
        let galley = self.galley(text, subscript, colour);
        let Some(rect) = self.free_place(at, away, galley.size()) else { return };
        self.taken.push(rect);
        // A soft edge in the colour of the ground keeps the text readable on top of nodes.
        self.painter.rect(
            rect.expand2(vec2(2.0, 0.0)),
            3.0,
            self.background.gamma_multiply(0.78),
            Stroke::NONE,
            egui::StrokeKind::Inside,
        );
        self.painter.galley(rect.min, galley, colour);
    }

    fn galley(&self, text: &str, subscript: &str, colour: Color32) -> Arc<Galley> {
        let mut job = LayoutJob::default();
        job.append(text, 0.0, TextFormat::simple(self.font.clone(), colour));
        if !subscript.is_empty() {
            let small = FontId::new(self.font.size * 0.75, self.font.family.clone());
            let format = TextFormat { valign: egui::Align::BOTTOM, ..TextFormat::simple(small, colour) };
            job.append(subscript, 0.0, format);
        }
        self.painter.layout_job(job)
    }

    fn free_place(&self, at: Pos2, away: Vec2, size: Vec2) -> Option<Rect> {
        let bounds = self.painter.clip_rect().shrink(2.0);
        if !bounds.contains(at) {
            return None;
        }
        let toward = if away.length() > 1e-3 { away.normalized() } else { vec2(0.7, -0.7) };
        let turns = [0.0f32, 0.6, -0.6, 1.2, -1.2, 1.9, -1.9, 2.5, -2.5, std::f32::consts::PI];
        turns.into_iter().find_map(|turn| {
            let (sin, cos) = turn.sin_cos();
            let side = vec2(toward.x * cos - toward.y * sin, toward.x * sin + toward.y * cos);
            // The centre lies as far out as the label reaches on that side.
            let reach = 0.5 * (size.x * side.x.abs() + size.y * side.y.abs()) + GAP;
            let rect = Rect::from_center_size(at + side * reach, size);
            let free = bounds.contains_rect(rect) && !self.taken.iter().any(|taken| taken.intersects(rect));
            free.then_some(rect)
        })
    }
}
