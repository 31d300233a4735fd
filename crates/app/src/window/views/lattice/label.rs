use std::sync::Arc;

use egui::{Color32, FontId, Galley, Painter, Pos2, Rect, Stroke, Vec2, text::LayoutJob, text::TextFormat, vec2};

/// Labels of a picture, the most important first, placed so that none covers another.
pub(super) struct Labels<'a> {
    painter: &'a Painter,
    background: Color32,
    font: FontId,
    taken: Vec<Rect>,
    arrows: Vec<[Pos2; 2]>,
}

/// Distance from the point that a label names to its nearest edge.
const GAP: f32 = 7.0;

impl<'a> Labels<'a> {
    pub fn new(painter: &'a Painter, font: FontId, background: Color32) -> Self {
        Self { painter, background, font, taken: Vec::new(), arrows: Vec::new() }
    }

    /// Keeps a place free of labels.
    pub fn reserve(&mut self, rect: Rect) {
        self.taken.push(rect);
    }

    /// Keeps a straight piece free of labels.
    pub fn keep_off(&mut self, arrow: [Pos2; 2]) {
        self.arrows.push(arrow);
    }

    /// Puts a label beside a point, preferably on the side that `away` points to. One that finds no free place near it is
    /// left out.
    pub fn put(&mut self, at: Pos2, away: Vec2, text: &str, subscript: &str, colour: Color32) {
        self.put_at_first(&[(at, away)], text, subscript, colour);
    }

    /// Puts a label beside an arrow that is seen at these points: near its middle, on the upper side if there is room.
    pub fn put_along(&mut self, points: &[Pos2], text: &str, subscript: &str, colour: Color32) {
        let [first, .., last] = points else { return };
        let along = *last - *first;
        let up = if along.x > 0.0 { vec2(along.y, -along.x) } else { vec2(-along.y, along.x) };
        let mut places = Vec::new();
        for part in [0.55, 0.4, 0.7, 0.25, 0.85, 0.12] {
            if let Some(at) = points.get((part * points.len() as f32) as usize) {
                places.extend([(*at, up), (*at, -up)]);
            }
        }
        self.put_at_first(&places, text, subscript, colour);
    }

    fn put_at_first(&mut self, places: &[(Pos2, Vec2)], text: &str, subscript: &str, colour: Color32) {
        let galley = self.galley(text, subscript, colour);
        let Some(rect) = places.iter().find_map(|(at, away)| self.free_place(*at, *away, galley.size())) else {
            return;
        };
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
            let small = FontId::new(self.font.size * 0.78, self.font.family.clone());
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
            let free = bounds.contains_rect(rect)
                && !self.taken.iter().any(|taken| taken.intersects(rect))
                && !self.arrows.iter().any(|arrow| crosses(rect.expand(1.5), *arrow));
            free.then_some(rect)
        })
    }
}

/// Whether a straight piece touches a rectangle: what is left of it between the rectangle's sides, one pair after the other.
fn crosses(rect: Rect, [from, to]: [Pos2; 2]) -> bool {
    let along = to - from;
    let (mut enter, mut leave) = (0.0f32, 1.0f32);
    for (start, step, least, most) in
        [(from.x, along.x, rect.left(), rect.right()), (from.y, along.y, rect.top(), rect.bottom())]
    {
        if step.abs() < 1e-6 {
            if start < least || start > most {
                return false;
            }
            continue;
        }
        let (a, b) = ((least - start) / step, (most - start) / step);
        enter = enter.max(a.min(b));
        leave = leave.min(a.max(b));
    }
    enter <= leave
}

#[cfg(test)]
mod tests {
    use egui::pos2;

    use super::*;

    #[test]
    fn a_piece_touches_a_rectangle_or_passes_it() {
        let rect = Rect::from_min_max(pos2(10.0, 10.0), pos2(20.0, 15.0));
        assert!(crosses(rect, [pos2(0.0, 12.0), pos2(30.0, 12.0)]));
        assert!(crosses(rect, [pos2(12.0, 12.0), pos2(13.0, 13.0)]), "one that lies inside");
        assert!(crosses(rect, [pos2(5.0, 5.0), pos2(25.0, 20.0)]));
        assert!(!crosses(rect, [pos2(0.0, 12.0), pos2(9.0, 12.0)]), "one that ends before");
        assert!(!crosses(rect, [pos2(0.0, 9.0), pos2(30.0, 9.0)]));
        assert!(!crosses(rect, [pos2(5.0, 14.0), pos2(12.0, 20.0)]), "one that cuts the corner's outside");
    }
}
