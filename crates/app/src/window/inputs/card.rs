use egui::collapsing_header::CollapsingState;
use egui::{Align, Frame, Label, Layout, Margin, Painter, Pos2, Rect, RichText, Sense, Shape, Stroke, Ui, pos2, vec2};

use super::super::theme::{GAP, GROUP_GAP, Tones};

/// How a step stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum State {
    /// Nothing is missing.
    Complete,
    /// It wants a look.
    Doubtful,
    /// Something is missing or wrong.
    Missing,
}

/// Width of the thread at the left of the cards.
const THREAD: f32 = 20.0;

/// A heading between groups of cards.
pub fn heading(ui: &mut Ui, text: &str) {
    ui.add_space(GAP);
    let quiet = Tones::in_ui(ui).quiet;
    ui.label(RichText::new(text).color(quiet).strong());
}

/// Paints the mark of a state: a filled disc with a tick, a triangle with an exclamation mark, an empty ring.
pub fn mark(painter: &Painter, centre: Pos2, state: State, tones: &Tones) {
    let line = |points: &[(f32, f32)], colour| {
        Shape::line(points.iter().map(|&(x, y)| centre + vec2(x, y)).collect(), Stroke::new(1.6, colour))
    };
    match state {
        State::Complete => {
            painter.circle_filled(centre, 6.5, tones.good);
            painter.add(line(&[(-3.0, 0.2), (-0.8, 2.6), (3.2, -2.4)], tones.ground));
        }
        State::Doubtful => {
            let corners = [(0.0, -7.0), (7.0, 5.5), (-7.0, 5.5)].map(|(x, y)| centre + vec2(x, y));
            painter.add(Shape::convex_polygon(corners.to_vec(), tones.doubt, Stroke::NONE));
            painter.add(line(&[(0.0, -2.6), (0.0, 1.4)], tones.ground));
            painter.circle_filled(centre + vec2(0.0, 3.6), 1.0, tones.ground);
        }
        State::Missing => {
            painter.circle_filled(centre, 6.5, tones.ground);
            painter.circle_stroke(centre, 5.6, Stroke::new(2.0, tones.bad));
        }
    }
}

/// A card on the thread. `words` say the state beside the mark, `summary` stands for the body while it is folded.
pub fn card(ui: &mut Ui, title: &str, state: (State, String), summary: &str, body: impl FnOnce(&mut Ui)) {
    show(ui, title, state, summary, true, body);
}

/// A card that is folded until someone wants its inside.
pub fn folded_card(ui: &mut Ui, title: &str, state: (State, String), summary: &str, body: impl FnOnce(&mut Ui)) {
    let open = state.0 != State::Complete;
    show(ui, title, state, summary, open, body);
}

fn show(
    ui: &mut Ui,
    title: &str,
    (state, words): (State, String),
    summary: &str,
    open: bool,
    body: impl FnOnce(&mut Ui),
) {
    let tones = Tones::in_ui(ui);
    let top = ui.cursor().min;
    let width = ui.available_width() - THREAD - 4.0;
    let shown = ui.horizontal_top(|ui| {
        ui.spacing_mut().item_spacing.x = 0.0;
        ui.add_space(THREAD);
        let frame = Frame::new().fill(tones.card).stroke(Stroke::new(1.0, tones.line)).corner_radius(6);
        frame.inner_margin(Margin::symmetric(8, 5)).show(ui, |ui| {
            ui.set_width(width - 16.0);
            ui.spacing_mut().item_spacing.x = 6.0;
            ui.vertical(|ui| content(ui, &Head { title, state, words: &words, summary, open }, body));
        });
    });
    let bottom = shown.response.rect.bottom();
    let x = top.x + THREAD * 0.5 - 2.0;
    let painter = ui.painter();
    painter.line_segment([pos2(x, top.y + 24.0), pos2(x, bottom + GROUP_GAP)], Stroke::new(1.5, tones.line));
    mark(painter, pos2(x, top.y + 15.0), state, tones);
}

struct Head<'a> {
    title: &'a str,
    state: State,
    words: &'a str,
    summary: &'a str,
    open: bool,
}

fn content(ui: &mut Ui, head: &Head<'_>, body: impl FnOnce(&mut Ui)) {
    let Head { title, state, words, summary, open } = *head;
    let tones = Tones::in_ui(ui);
    let id = ui.make_persistent_id(("card", title));
    let mut fold = CollapsingState::load_with_default_open(ui.ctx(), id, open);
    let header = ui
        .horizontal(|ui| {
            ui.label(RichText::new(title).color(tones.strong).heading());
            let colour = match state {
                State::Complete => tones.good,
                State::Doubtful => tones.doubt,
                State::Missing => tones.bad,
            };
            ui.label(RichText::new(words).color(colour).small());
            ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
                let (rect, response) = ui.allocate_exact_size(vec2(18.0, 18.0), Sense::click());
                paint_fold(ui.painter(), rect, fold.is_open(), tones);
                let act = if fold.is_open() { "Fold" } else { "Unfold" };
                let name = format!("{act} {title}");
                response.widget_info(|| egui::WidgetInfo::labeled(egui::Role::Button, true, &name));
                response.on_hover_text(name)
            })
            .inner
        })
        .inner;
    if header.clicked() {
        fold.toggle(ui);
    }
    fold.store(ui.ctx());
    if fold.is_open() {
        body(ui);
    } else if !summary.is_empty() {
        ui.add(Label::new(RichText::new(summary).color(tones.quiet)).truncate());
    }
}

fn paint_fold(painter: &Painter, rect: Rect, open: bool, tones: &Tones) {
    let corners = if open { [(-4.0, -2.0), (4.0, -2.0), (0.0, 3.5)] } else { [(-2.0, -4.0), (3.5, 0.0), (-2.0, 4.0)] };
    let corners = corners.map(|(x, y)| rect.center() + vec2(x, y)).to_vec();
    painter.add(Shape::convex_polygon(corners, tones.quiet, Stroke::NONE));
}

/// A line of lesser weight.
pub fn remark(ui: &mut Ui, text: &str) {
    let quiet = Tones::in_ui(ui).quiet;
    ui.add(Label::new(RichText::new(text).color(quiet).small()).wrap());
}

/// A line that wants a look.
pub fn doubt(ui: &mut Ui, text: &str) {
    let colour = Tones::in_ui(ui).doubt;
    ui.add(Label::new(RichText::new(format!("! {text}")).color(colour).small()).wrap());
}

/// The name of a row of fields, in a column of its own.
pub fn row_name(ui: &mut Ui, text: &str) -> egui::Response {
    let quiet = Tones::in_ui(ui).quiet;
    let (rect, _) = ui.allocate_exact_size(vec2(70.0, ui.spacing().interact_size.y), Sense::hover());
    let label = Label::new(RichText::new(text).color(quiet)).selectable(false);
    // A child that does not move the cursor, so that whatever follows begins after the whole column.
    let place = egui::UiBuilder::new().max_rect(rect).layout(Layout::left_to_right(Align::Center));
    ui.new_child(place).add(label)
}
