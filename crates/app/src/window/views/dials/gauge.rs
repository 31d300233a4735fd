use std::f32::consts::PI;

use egui::{
    Align2, Color32, Painter, Pos2, Rect, Response, Role, Sense, Shape, Stroke, TextStyle, Ui, WidgetInfo, pos2, vec2,
};
use ringwright_core::instrument::Axis;

use super::super::number::fixed;
use super::super::palette::{Kind, Palette};

/// Size of one gauge in points.
const SIZE: egui::Vec2 = vec2(124.0, 148.0);
const RADIUS: f32 = 40.0;
const TRACK: f32 = 7.0;
/// A travel of more than a turn is drawn as a spiral that widens by this much each turn.
const SPIRAL_STEP: f32 = 9.0;

/// How an axis stands to its limits.
pub(super) struct Reading<'a> {
    pub axis: &'a Axis,
    /// Nothing where the axes cannot make the setting.
    pub reading_deg: Option<f64>,
    /// Held by a rule, or set by hand: why it does not move.
    pub fixed_because: Option<&'static str>,
}

impl Reading<'_> {
    /// Degrees to the nearest limit as the dial reads, negative outside.
    fn clearance_deg(&self) -> Option<f64> {
        self.reading_deg.map(|deg| self.axis.travel.clearance_as_read_deg(deg))
    }

    /// The clearance in words.
    fn clearance_words(&self) -> String {
        match self.clearance_deg() {
            None => "cannot be made".to_owned(),
            Some(deg) if deg.is_infinite() => "turns for ever".to_owned(),
            Some(deg) if deg < 0.0 => format!("over by {}°", fixed(-deg, 2)),
            Some(deg) => format!("{}° to limit", fixed(deg, 1)),
        }
    }

    fn is_over(&self) -> bool {
        self.clearance_deg().is_some_and(|deg| deg < -1e-9)
    }
}

/// Draws one axis as a dial: zero at the top, readings grow clockwise.
pub(super) fn gauge(ui: &mut Ui, reading: &Reading<'_>) -> Response {
    let (rect, response) = ui.allocate_exact_size(SIZE, Sense::hover());
    let value = reading.reading_deg.map_or_else(|| "none".to_owned(), |deg| format!("{}°", fixed(deg, 3)));
    let words = reading.clearance_words();
    let spoken = format!("{} {value}, {words}", reading.axis.name);
    response.widget_info(|| WidgetInfo::labeled(Role::Meter, true, &spoken));
    if ui.is_rect_visible(rect) {
        let dial = Dial::new(ui, rect, reading);
        dial.track();
        dial.over();
        dial.park();
        dial.needle();
        captions(ui, rect, reading, &value, &words);
    }
    response.on_hover_text(limits_in_words(reading))
}

fn captions(ui: &Ui, rect: Rect, reading: &Reading<'_>, value: &str, words: &str) {
    let font = |style: TextStyle| style.resolve(ui.style());
    let (strong, weak) = (ui.visuals().strong_text_color(), ui.visuals().weak_text_color());
    let x = rect.center().x;
    let name = reading.axis.name.as_str();
    ui.painter().text(pos2(x, rect.top() + 2.0), Align2::CENTER_TOP, name, font(TextStyle::Body), strong);
    let below = rect.top() + 2.0 + 16.0 + 2.0 * (RADIUS + 8.0);
    ui.painter().text(pos2(x, below), Align2::CENTER_TOP, value, font(TextStyle::Monospace), strong);
    let colour = if reading.is_over() { ui.visuals().text_color() } else { weak };
    let note = reading.fixed_because.filter(|_| !reading.is_over()).unwrap_or(words);
    ui.painter().text(pos2(x, below + 17.0), Align2::CENTER_TOP, note, font(TextStyle::Small), colour);
}

fn limits_in_words(reading: &Reading<'_>) -> String {
    let travel = &reading.axis.travel;
    let limits: Vec<String> =
        travel.intervals_deg().map(|(a, b)| format!("{}° to {}°", fixed(a, 1), fixed(b, 1))).collect();
    let limits =
        if limits.is_empty() { "turns for ever".to_owned() } else { format!("limits {}", limits.join(" and ")) };
    let held = reading.fixed_because.map_or_else(String::new, |why| format!("\n{why}"));
    format!("{}: {limits}\npark {}°{held}", reading.axis.name, fixed(reading.axis.park_deg, 1))
}

struct Dial<'a> {
    painter: &'a Painter,
    palette: &'static Palette,
    text: Color32,
    groove: Color32,
    centre: Pos2,
    reading: &'a Reading<'a>,
    /// The reading at which the track has its nominal radius, and by how much it widens for each degree.
    middle_deg: f64,
    widening: f32,
}

impl<'a> Dial<'a> {
    fn new(ui: &'a Ui, rect: Rect, reading: &'a Reading<'a>) -> Self {
        let ends = reading.axis.travel.intervals_deg().chain(reading.reading_deg.map(|deg| (deg, deg)));
        let (least, most) = ends.fold((f64::INFINITY, f64::NEG_INFINITY), |(a, b), (c, d)| (a.min(c), b.max(d)));
        let spiral = !reading.axis.travel.is_endless() && most - least > 350.0;
        Self {
            painter: ui.painter(),
            palette: Palette::for_ui(ui),
            text: ui.visuals().strong_text_color(),
            groove: ui.visuals().widgets.noninteractive.bg_stroke.color,
            centre: pos2(rect.center().x, rect.top() + 18.0 + RADIUS + 6.0),
            reading,
            middle_deg: if spiral { 0.5 * (least + most) } else { 0.0 },
            widening: if spiral { SPIRAL_STEP / 360.0 } else { 0.0 },
        }
    }

    fn radius(&self, deg: f64) -> f32 {
        RADIUS + (deg - self.middle_deg) as f32 * self.widening
    }

    /// A point of the dial at a reading, `out` points outside the track's middle.
    fn at(&self, deg: f64, out: f32) -> Pos2 {
        let angle = deg.to_radians() as f32;
        self.centre + (self.radius(deg) + out) * vec2(angle.sin(), -angle.cos())
    }

    fn arc(&self, from_deg: f64, to_deg: f64, out: f32, stroke: Stroke) {
        let pieces = (((to_deg - from_deg).abs() / 4.0).ceil() as usize).clamp(2, 720);
        let points =
            (0..=pieces).map(|i| self.at(from_deg + (to_deg - from_deg) * i as f64 / pieces as f64, out)).collect();
        self.painter.add(Shape::line(points, stroke));
    }

    fn track(&self) {
        let allowed = self.palette.kind(Kind::Reachable).gamma_multiply(0.75);
        if self.widening == 0.0 {
            self.arc(0.0, 360.0, 0.0, Stroke::new(1.0, self.groove));
        }
        if self.reading.axis.travel.is_endless() {
            self.arc(0.0, 360.0, 0.0, Stroke::new(TRACK, allowed));
        }
        for (from, to) in self.reading.axis.travel.intervals_deg() {
            self.arc(from, to, 0.0, Stroke::new(TRACK, allowed));
            for end in [from, to] {
                let stop = [self.at(end, -0.5 * TRACK - 2.0), self.at(end, 0.5 * TRACK + 2.0)];
                self.painter.line_segment(stop, Stroke::new(2.0, self.text));
            }
        }
    }

    /// From the limit that is passed to the reading: hatched, so that it is no matter of colour alone.
    fn over(&self) {
        let (Some(reading), true) = (self.reading.reading_deg, self.reading.is_over()) else { return };
        let ends = self.reading.axis.travel.intervals_deg().flat_map(|(a, b)| [a, b]);
        let Some(limit) = ends.min_by(|a, b| (a - reading).abs().total_cmp(&(b - reading).abs())) else { return };
        let colour = self.palette.kind(Kind::OverLimit);
        for out in [-0.5 * TRACK, 0.5 * TRACK] {
            self.arc(limit, reading, out, Stroke::new(1.0, colour));
        }
        let step = 5.0 * (reading - limit).signum();
        let strokes = ((reading - limit) / step).floor().clamp(0.0, 200.0) as usize;
        for i in 0..=strokes {
            let deg = limit + step * i as f64;
            let hatch = [self.at(deg, -0.5 * TRACK), self.at(deg + 0.7 * step, 0.5 * TRACK)];
            self.painter.line_segment(hatch, Stroke::new(1.5, colour));
        }
    }

    fn park(&self) {
        let park = self.reading.axis.park_deg;
        // Inside the ring, pointing outward, where neither the name nor the value stands.
        let out = -0.5 * TRACK - 1.0;
        let side = 5.0 / (self.radius(park) - 6.0).max(1.0);
        let turn = f64::from(side * 180.0 / PI);
        let points = vec![self.at(park, out), self.at(park - turn, out - 6.0), self.at(park + turn, out - 6.0)];
        self.painter.add(Shape::closed_line(points, Stroke::new(1.2, self.text.gamma_multiply(0.7))));
    }

    fn needle(&self) {
        let Some(reading) = self.reading.reading_deg else { return };
        let colour = if self.reading.is_over() { self.palette.kind(Kind::OverLimit) } else { self.text };
        let tip = self.at(reading, 0.5 * TRACK + 1.0);
        self.painter.line_segment([self.centre, tip], Stroke::new(2.5, colour));
        self.painter.circle_filled(self.centre, 3.5, colour);
    }
}
