use egui::{Event, EventFilter, Key, Modifiers, PointerButton, Response, Ui, Vec2};
use ringwright_picture::Eye;

/// What the hands did to the eye in one frame.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Gesture {
    Nothing,
    /// The eye moved.
    Moved,
    /// The view shall be fitted to the nodes.
    FitNodes,
    /// The view shall be fitted to the whole sphere.
    FitSphere,
}

/// Radians of orbit for a drag of one point.
const ORBIT_PER_POINT: f64 = 0.0075;
/// Radians of orbit for one press of an arrow key.
const ORBIT_PER_KEY: f64 = 0.087;
/// Natural logarithm of the zoom for one point of scrolling.
const ZOOM_PER_POINT: f64 = 0.0022;

/// Drag orbits; with shift, or with the right or middle button, it moves the picture; the wheel and a pinch zoom to the
/// pointer; a double click fits the nodes. With the keyboard: arrows orbit, + and − zoom, Home fits the nodes, End the sphere.
pub(super) fn steer(ui: &Ui, response: &Response, eye: &mut Eye, size_px: [usize; 2]) -> Gesture {
    if response.double_clicked() {
        return Gesture::FitNodes;
    }
    let before = *eye;
    let scale = f64::from(ui.pixels_per_point());
    let shift = ui.input(|input| input.modifiers.shift);
    let by = response.drag_delta();
    if by != Vec2::ZERO {
        let [x, y] = [f64::from(by.x), f64::from(by.y)];
        let moves = response.dragged_by(PointerButton::Secondary) || response.dragged_by(PointerButton::Middle);
        if moves || shift {
            eye.pan(x * scale, y * scale, size_px[1]);
        } else if response.dragged_by(PointerButton::Primary) {
            eye.orbit(-x * ORBIT_PER_POINT, y * ORBIT_PER_POINT);
        }
    }
    if let Some(at) = response.hover_pos() {
        let at = (at - response.rect.min) * ui.pixels_per_point();
        let (scroll, pinch) = ui.input(|input| (input.smooth_scroll_delta().y, input.zoom_delta()));
        let factor = (-f64::from(scroll) * ZOOM_PER_POINT).exp() / f64::from(pinch).max(1e-3);
        if factor != 1.0 {
            eye.zoom_at(factor, f64::from(at.x), f64::from(at.y), size_px[0], size_px[1]);
        }
    }
    if response.has_focus()
        && let Some(fit) = keys(ui, response, eye)
    {
        return fit;
    }
    if *eye == before { Gesture::Nothing } else { Gesture::Moved }
}

/// Answers what the view shall be fitted to, if a key asks for it.
fn keys(ui: &Ui, response: &Response, eye: &mut Eye) -> Option<Gesture> {
    let filter = EventFilter { horizontal_arrows: true, vertical_arrows: true, ..EventFilter::default() };
    ui.memory_mut(|memory| memory.set_focus_lock_filter(response.id, filter));
    let events = ui.input(|input| input.filtered_events(&filter));
    for event in events {
        let Event::Key { key, pressed: true, modifiers: Modifiers { ctrl: false, alt: false, .. }, .. } = event else {
            continue;
        };
        match key {
            Key::ArrowLeft => eye.orbit(ORBIT_PER_KEY, 0.0),
            Key::ArrowRight => eye.orbit(-ORBIT_PER_KEY, 0.0),
            Key::ArrowUp => eye.orbit(0.0, -ORBIT_PER_KEY),
            Key::ArrowDown => eye.orbit(0.0, ORBIT_PER_KEY),
            Key::Plus | Key::Equals => eye.zoom(1.0 / 1.2),
            Key::Minus => eye.zoom(1.2),
            Key::Home => return Some(Gesture::FitNodes),
            Key::End => return Some(Gesture::FitSphere),
            _ => {}
        }
    }
    None
}
