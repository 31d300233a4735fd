use std::sync::Arc;
use std::sync::mpsc::{Receiver, TryRecvError, channel};

use egui::accesskit::{Action, ActionData};
use egui::{
    Align, Event, EventFilter, Key, Layout, PointerButton, Popup, Response, RichText, Sense, StrokeKind, Ui,
    WidgetInfo, vec2,
};
use ringwright_core::aim::{NoAzimuth, NoSetting};
use ringwright_core::frames::Hkl;
use ringwright_core::reach::Verdict;
use ringwright_core::work::AzimuthView;

use super::super::super::{Picked, Reach, Results};
use super::super::number::fixed;
use super::super::settings::PickedSettings;
use super::content::{Content, from_words};
use super::hover;
use super::paint::{self, Place};

/// A reflection under one set of results.
type Subject = (Arc<Reach>, Hkl);

/// The ribbon of the selected reflection. What it shows is worked out on a thread of its own, once for each selection.
#[derive(Default)]
pub struct AzimuthRibbon {
    made: Option<Made>,
    job: Option<Job>,
}

struct Made {
    of: Subject,
    /// Nothing if the thread gave up.
    content: Option<Result<Content, NoSetting>>,
}

struct Job {
    of: Subject,
    answer: Receiver<Result<Content, NoSetting>>,
}

impl AzimuthRibbon {
    /// Whether it is being worked out.
    pub fn is_waiting(&self) -> bool {
        self.job.is_some()
    }

    /// Takes in what was worked out, and begins anew where the selection or the results have changed; to be called once a
    /// frame. There is one thread at most.
    pub fn update(&mut self, ctx: &egui::Context, results: &Results, picked: &Picked) {
        if let Some(job) = self.job.take() {
            match job.answer.try_recv() {
                Ok(content) => self.made = Some(Made { of: job.of, content: Some(content) }),
                Err(TryRecvError::Disconnected) => self.made = Some(Made { of: job.of, content: None }),
                Err(TryRecvError::Empty) => self.job = Some(job),
            }
        }
        let (Some(reach), Some(hkl)) = (&results.reach, picked.hkl) else {
            self.made = None;
            return;
        };
        let wanted = (Arc::clone(reach), hkl);
        if self.job.is_some()
            || reach.azimuth.is_err()
            || self.made.as_ref().is_some_and(|made| same(&made.of, &wanted))
        {
            return;
        }
        let (sender, answer) = channel();
        let (subject, waker) = (wanted.clone(), ctx.clone());
        let begun = std::thread::Builder::new().name("azimuth".to_owned()).spawn(move || {
            if let Ok(view) = &subject.0.azimuth {
                // Nobody listens any more once the window is closed.
                let _ = sender.send(Content::of(view, subject.1));
            }
            // Also if the answer was lost, so that it is seen to be.
            drop(sender);
            waker.request_repaint();
        });
        match begun {
            Ok(_) => self.job = Some(Job { of: wanted, answer }),
            Err(_) => self.made = Some(Made { of: wanted, content: None }),
        }
    }

    fn content(&self, subject: &Subject) -> Option<&Made> {
        self.made.as_ref().filter(|made| same(&made.of, subject))
    }

    /// Shows the ribbon; dragging along it turns the setting that is shown about Q.
    pub fn show(&self, ui: &mut Ui, reach: &Arc<Reach>, hkl: Hkl, settings: &mut PickedSettings) {
        let made = self.content(&(Arc::clone(reach), hkl));
        let view = match (&reach.azimuth, made) {
            (Err(why), _) => return instead(ui, why),
            (Ok(view), Some(Made { content: Some(Err(none)), .. })) => {
                return instead(ui, &why_none(*none, view, reach));
            }
            (_, Some(Made { content: None, .. })) => {
                return instead(ui, "the azimuths of this reflection could not be worked out");
            }
            (Ok(view), _) => view,
        };
        let content = made.and_then(|made| made.content.as_ref()?.as_ref().ok());
        let own = settings.shown_setting().and_then(|setting| view.psi_deg(hkl, &setting).ok());
        let psi_deg = settings.by_hand_deg().or(own);
        head(ui, view, psi_deg, settings);
        let (rect, response) =
            ui.allocate_exact_size(vec2(ui.available_width(), paint::HEIGHT), Sense::click_and_drag());
        let place = Place::in_rect(rect);
        match steer(ui, &response, &place, psi_deg) {
            Some(Turn::To(deg)) => settings.turn_to(deg),
            Some(Turn::Back) => settings.turn_back(),
            None => {}
        }
        let psi_deg = settings.by_hand_deg().or(psi_deg);
        speak(ui, &response, psi_deg, content);
        if ui.is_rect_visible(rect) {
            paint::ribbon(ui, &place, content, psi_deg);
            if response.has_focus() {
                ui.painter().rect_stroke(rect, 2.0, ui.visuals().selection.stroke, StrokeKind::Inside);
            }
        }
        if let (Some(content), Some(at)) = (content, response.hover_pos())
            && !response.dragged()
        {
            let told = hover::told(&place, at, content, reach, view, hkl);
            response.on_hover_text_at_pointer(told);
        }
    }
}

fn same(a: &Subject, b: &Subject) -> bool {
    Arc::ptr_eq(&a.0, &b.0) && a.1 == b.1
}

/// Why a reflection has no azimuth, with the reference if it is that.
fn why_none(none: NoSetting, view: &AzimuthView, reach: &Reach) -> String {
    match none {
        NoSetting::NoAzimuth(NoAzimuth::ReferenceAlongQ) => {
            let from = from_words(view.reference());
            format!("ψ counts from {from}, and that is parallel to Q; an azimuth rule can name another reference")
        }
        other => Verdict::from(other).detail(&reach.instrument),
    }
}

/// Why there is no ribbon, in its place.
fn instead(ui: &mut Ui, why: &str) {
    ui.label(RichText::new(format!("No azimuth ribbon: {why}.")).small().color(ui.visuals().weak_text_color()));
}

/// ψ and what it counts from. As high with the way back as without: the ribbon must not move under the pointer.
fn head(ui: &mut Ui, view: &AzimuthView, psi_deg: Option<f64>, settings: &mut PickedSettings) {
    let height = ui.spacing().interact_size.y;
    ui.allocate_ui_with_layout(vec2(ui.available_width(), height), Layout::left_to_right(Align::Center), |ui| {
        ui.set_min_height(height);
        let value = psi_deg.map_or_else(|| "none".to_owned(), |deg| format!("{}°", fixed(deg, 2)));
        ui.label(format!("ψ {value}"));
        let from = format!("from {}", from_words(view.reference()));
        ui.label(RichText::new(from).small().color(ui.visuals().weak_text_color()));
        if settings.by_hand_deg().is_some() {
            ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
                let back = ui
                    .small_button("Chosen ψ")
                    .on_hover_text("Back to the chosen setting: also Esc or a double click.");
                ui.ctx().accesskit_node_builder(back.id, |node| node.set_label("Back to the chosen setting"));
                if back.clicked() {
                    settings.turn_back();
                }
            });
        }
    });
}

enum Turn {
    To(f64),
    Back,
}

/// What the hands want: a press or a drag turns to the pointer, arrow keys by 1° (with shift 0.1°), Esc or a double click
/// goes back.
fn steer(ui: &Ui, response: &Response, place: &Place, psi_deg: Option<f64>) -> Option<Turn> {
    if response.double_clicked() {
        return Some(Turn::Back);
    }
    let pressed =
        response.is_pointer_button_down_on() && ui.input(|input| input.pointer.button_down(PointerButton::Primary));
    if pressed || response.dragged_by(PointerButton::Primary) || response.clicked() {
        response.request_focus();
        // Held still it turns nothing, so that the keys can.
        let moved = ui.input(|input| input.pointer.delta().x != 0.0 || input.pointer.any_pressed());
        return response.interact_pointer_pos().filter(|_| moved).map(|at| Turn::To(place.psi_deg(at.x)));
    }
    let asked = ui.input(|input| {
        let by = |action| input.num_accesskit_action_requests(response.id, action) as f64;
        let to =
            input.accesskit_action_requests(response.id, Action::SetValue).last().and_then(|wish| match wish.data {
                Some(ActionData::NumericValue(value)) => Some(value),
                _ => None,
            });
        let by = by(Action::Increment) - by(Action::Decrement);
        to.or(psi_deg.filter(|_| by != 0.0).map(|deg| deg + by))
    });
    asked.map(|deg| Turn::To(wrapped(deg))).or_else(|| keys(ui, response, psi_deg))
}

fn keys(ui: &Ui, response: &Response, psi_deg: Option<f64>) -> Option<Turn> {
    if !response.has_focus() {
        // Where nothing else listens, the way back is open as well.
        let nobody = ui.memory(|memory| memory.focused().is_none() && memory.top_modal_layer().is_none());
        let escape = nobody && !Popup::is_any_open(ui.ctx()) && ui.input(|input| input.key_pressed(Key::Escape));
        return escape.then_some(Turn::Back);
    }
    let filter = EventFilter { horizontal_arrows: true, escape: true, ..EventFilter::default() };
    ui.memory_mut(|memory| memory.set_focus_lock_filter(response.id, filter));
    let mut turn = None;
    let mut deg = psi_deg;
    for event in ui.input(|input| input.filtered_events(&filter)) {
        let Event::Key { key, pressed: true, modifiers, .. } = event else { continue };
        let step = if modifiers.shift { 0.1 } else { 1.0 };
        let by = match key {
            Key::ArrowLeft => -step,
            Key::ArrowRight => step,
            Key::Escape => {
                turn = Some(Turn::Back);
                continue;
            }
            _ => continue,
        };
        deg = deg.map(|deg| wrapped(deg + by));
        turn = deg.map(Turn::To);
    }
    turn
}

/// The same azimuth from −180 to 180°.
fn wrapped(deg: f64) -> f64 {
    deg - 360.0 * (deg / 360.0).round()
}

fn speak(ui: &Ui, response: &Response, psi_deg: Option<f64>, content: Option<&Content>) {
    response.widget_info(|| WidgetInfo::slider(true, psi_deg.unwrap_or(0.0), "Azimuth ribbon"));
    ui.ctx().accesskit_node_builder(response.id, |node| {
        node.set_min_numeric_value(-180.0);
        node.set_max_numeric_value(180.0);
        node.set_numeric_value_step(1.0);
        for action in [Action::SetValue, Action::Increment, Action::Decrement] {
            node.add_action(action);
        }
        node.set_description(content.map_or_else(|| "being worked out".to_owned(), Content::spoken));
    });
}

#[cfg(test)]
mod tests {
    use super::wrapped;

    #[test]
    fn beyond_half_a_turn_the_azimuth_comes_back_from_the_other_side() {
        assert_eq!(wrapped(181.0), -179.0);
        assert_eq!(wrapped(-180.5), 179.5);
        assert_eq!(wrapped(12.0), 12.0);
    }
}
