use egui::{Align2, Color32, Painter, Pos2, Rect, Shape, Stroke, TextStyle, Ui, pos2, vec2};

use super::super::palette::{Kind, Palette, paint_mark};
use super::content::Content;

/// Height of the whole: marks of crossings, the band, and its scale.
pub(super) const HEIGHT: f32 = 54.0;
/// Room at either side, for half of the handle and of the outermost number.
const SIDE: f32 = 8.0;
const CROSSINGS: f32 = 11.0;
const BAND: f32 = 18.0;
/// Distance between the strokes of a hatch, and between the marks on a stretch.
const HATCH: f32 = 6.0;
const MARKS: f32 = 46.0;
const MARK_RADIUS: f32 = 4.0;

/// Where everything lies.
#[derive(Clone, Copy)]
pub(super) struct Place {
    /// Of the stretches.
    pub band: Rect,
    whole: Rect,
}

impl Place {
    pub fn in_rect(whole: Rect) -> Self {
        let top = whole.top() + CROSSINGS + 2.0;
        let left_top = pos2(whole.left() + SIDE, top);
        Self { band: Rect::from_min_size(left_top, vec2((whole.width() - 2.0 * SIDE).max(1.0), BAND)), whole }
    }

    pub fn x(&self, psi_deg: f64) -> f32 {
        self.band.left() + self.band.width() * ((psi_deg + 180.0) / 360.0) as f32
    }

    /// ψ in degrees at a place across, at most ±180.
    pub fn psi_deg(&self, x: f32) -> f64 {
        let part = f64::from((x - self.band.left()) / self.band.width());
        (360.0 * part - 180.0).clamp(-180.0, 180.0)
    }

    fn stretch(&self, from_deg: f64, to_deg: f64) -> Rect {
        Rect::from_x_y_ranges(self.x(from_deg)..=self.x(to_deg), self.band.y_range())
    }
}

/// Draws the ribbon; `psi_deg` is where the handle stands.
pub(super) fn ribbon(ui: &Ui, place: &Place, content: Option<&Content>, psi_deg: Option<f64>) {
    let palette = Palette::for_ui(ui);
    let (text, line) = (ui.visuals().text_color(), ui.visuals().widgets.noninteractive.bg_stroke.color);
    let painter = ui.painter();
    painter.rect_filled(place.band, 2.0, line.gamma_multiply(0.5));
    scale(ui, place);
    if let Some(content) = content {
        for stretch in &content.refused {
            let kind = Kind::of(stretch.verdict);
            refused(painter, place.stretch(stretch.from_deg, stretch.to_deg), kind, palette.kind(kind));
        }
        for pair in content.refused.windows(2).filter(|pair| pair[0].to_deg == pair[1].from_deg) {
            painter.vline(place.x(pair[1].from_deg), place.band.y_range(), Stroke::new(1.0, ui.visuals().panel_fill));
        }
        for &(from, to) in &content.allowed_deg {
            // A window narrower than a point is still seen.
            let mut rect = place.stretch(from, to).expand2(vec2(0.0, 1.5));
            rect.max.x = rect.max.x.max(rect.min.x + 2.0);
            painter.rect_filled(rect, 1.0, palette.kind(Kind::Reachable));
        }
        for end in &content.ends {
            let (x, y) = (place.x(end.psi_deg), place.band.y_range());
            painter.vline(x, y.min - 3.0..=y.max + 5.0, Stroke::new(1.5, text));
        }
        crossings(painter, place, content, text);
    }
    if content.is_none() {
        let font = TextStyle::Small.resolve(ui.style());
        let words = "working out what is allowed…";
        painter.text(place.band.center(), Align2::CENTER_CENTER, words, font, ui.visuals().weak_text_color());
    }
    if let Some(psi_deg) = psi_deg {
        handle(painter, place, psi_deg, palette, ui.visuals().panel_fill);
    }
}

/// Pale, hatched and marked: never only by colour. Where a stretch is too narrow for a mark, the hatch tells the kind.
fn refused(painter: &Painter, rect: Rect, kind: Kind, colour: Color32) {
    let inside = painter.with_clip_rect(rect.intersect(painter.clip_rect()));
    inside.rect_filled(rect, 0.0, colour.gamma_multiply(0.22));
    let stroke = Stroke::new(1.0, colour.gamma_multiply(0.6));
    let slant = match kind {
        Kind::OverLimit => Some(rect.height()),
        Kind::CannotMake => Some(-rect.height()),
        Kind::DirectBeam => Some(0.0),
        _ => None,
    };
    if let Some(slant) = slant {
        let mut x = ((rect.left() - rect.height()) / HATCH).floor() * HATCH;
        while x < rect.right() + rect.height() {
            inside.line_segment([pos2(x, rect.bottom()), pos2(x + slant, rect.top())], stroke);
            x += HATCH;
        }
    } else {
        let mut y = rect.top() + 0.5 * HATCH;
        while y < rect.bottom() {
            inside.hline(rect.x_range(), y, stroke);
            y += HATCH;
        }
    }
    let radius = (0.5 * rect.width()).min(MARK_RADIUS);
    if radius < 1.5 {
        return;
    }
    let count = (rect.width() / MARKS).floor().max(1.0);
    for i in 0..count as usize {
        let centre = pos2(rect.left() + rect.width() * (i as f32 + 0.5) / count, rect.center().y);
        paint_mark(&inside, centre, radius, kind.mark(), colour);
    }
}

/// A stroke for each, taller where several stand at one point across.
fn crossings(painter: &Painter, place: &Place, content: &Content, colour: Color32) {
    let foot = place.band.top() - 4.0;
    let mut at: Option<(f32, f32)> = None;
    let draw = |(x, count): (f32, f32)| {
        let tall = (1.5 + 1.5 * count).min(CROSSINGS - 3.0);
        painter.vline(x, foot - tall..=foot, Stroke::new(1.0, colour.gamma_multiply(0.7)));
    };
    for crossing in &content.crossings {
        let x = place.x(crossing.psi_deg).round();
        match &mut at {
            Some((last, count)) if *last == x => *count += 1.0,
            _ => {
                at.map(draw);
                at = Some((x, 1.0));
            }
        }
    }
    at.map(draw);
}

fn scale(ui: &Ui, place: &Place) {
    let quiet = ui.visuals().weak_text_color();
    let font = TextStyle::Small.resolve(ui.style());
    for i in -6..=6 {
        let (x, y) = (place.x(f64::from(30 * i)), place.band.bottom() + 2.0);
        let named = i % 3 == 0;
        ui.painter().vline(x, y..=y + if named { 4.0 } else { 2.5 }, Stroke::new(1.0, quiet));
        if named {
            let words = format!("{}°", 30 * i).replace('-', "\u{2212}");
            // The outermost stay inside.
            let align = match i {
                -6 => Align2::LEFT_BOTTOM,
                6 => Align2::RIGHT_BOTTOM,
                _ => Align2::CENTER_BOTTOM,
            };
            let at = match i {
                -6 => place.whole.left() + 3.0,
                6 => place.whole.right() - 3.0,
                _ => x,
            };
            ui.painter().text(pos2(at, place.whole.bottom() - 1.0), align, words, font.clone(), quiet);
        }
    }
}

fn handle(painter: &Painter, place: &Place, psi_deg: f64, palette: &Palette, ground: Color32) {
    let (x, y) = (place.x(psi_deg), place.band.y_range());
    let ends = [pos2(x, y.min - 4.0), pos2(x, y.max + 2.0)];
    painter.line_segment(ends, Stroke::new(5.0, ground));
    painter.line_segment(ends, Stroke::new(2.0, palette.selected));
    let tip = Pos2::new(x, y.max);
    let corners = vec![tip, tip + vec2(5.5, 9.0), tip + vec2(-5.5, 9.0)];
    painter.add(Shape::convex_polygon(corners, palette.selected, Stroke::new(1.5, ground)));
}
