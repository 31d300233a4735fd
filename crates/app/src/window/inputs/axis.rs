use egui::collapsing_header::CollapsingState;
use egui::{Button, ComboBox, RichText, Ui, vec2};
use ringwright_core::instrument::{Approach, AxisDescription, Interval, Limits};
use ringwright_core::quantity::{Component, Degrees, Duration, Overshoot, QuantityError, Speed};

use super::super::edits::{Edits, Field, figure};
use super::super::theme::Tones;
use super::card::row_name;

/// One axis of a machine that is written out in the session: a line, and its fields once it is unfolded.
pub fn show(ui: &mut Ui, edits: &mut Edits, path: &str, stack: &str, axis: &mut AxisDescription) {
    let tones = Tones::in_ui(ui);
    let id = ui.make_persistent_id(("axis", path));
    let mut fold = CollapsingState::load_with_default_open(ui.ctx(), id, false);
    ui.horizontal(|ui| {
        let sign = if fold.is_open() { "▾" } else { "▸" };
        let title = RichText::new(format!("{sign} {}", axis.name)).color(tones.strong);
        let button = ui.add(Button::new(title).frame(false));
        let act = if fold.is_open() { "Fold" } else { "Edit" };
        ui.ctx().accesskit_node_builder(button.id, |node| node.set_label(format!("{act} axis {}", axis.name)));
        if button.clicked() {
            fold.toggle(ui);
        }
        let summary = format!("{stack}, {}", in_words(axis));
        ui.add(egui::Label::new(RichText::new(summary).color(tones.quiet).small()).truncate());
    });
    fold.store(ui.ctx());
    if fold.is_open() {
        let mut axis = Editor { edits, path, axis };
        axis.limits(ui);
        axis.motion(ui);
        axis.readings(ui);
        axis.approach(ui);
        axis.direction(ui);
        ui.checkbox(&mut axis.axis.set_by_hand, "set by hand, never moved in a list");
    }
}

/// Travel and speed of an axis in a few words.
pub fn in_words(axis: &AxisDescription) -> String {
    let limits = match &axis.limits {
        Limits::Endless => "endless".to_owned(),
        Limits::Intervals(all) => {
            let one = |i: &Interval| format!("{}…{}°", figure(i.from_deg.get()), figure(i.to_deg.get()));
            all.iter().map(one).collect::<Vec<_>>().join(", ")
        }
    };
    let how =
        if axis.set_by_hand { "by hand".to_owned() } else { format!("{}°/s", figure(axis.speed_deg_per_s.get())) };
    format!("{limits}, {how}")
}

struct Editor<'a> {
    edits: &'a mut Edits,
    path: &'a str,
    axis: &'a mut AxisDescription,
}

/// Width of a field for one number.
const WIDTH: f32 = 50.0;

impl Editor<'_> {
    /// A number of the axis: `field` is its name in the file, `words` what it is called, with the unit.
    fn number<T>(
        &mut self,
        ui: &mut Ui,
        (name, field, words): (&str, &str, &str),
        (value, step): (f64, f64),
        take: impl Fn(f64) -> Result<T, QuantityError>,
    ) -> Option<T> {
        let path = format!("{}.{field}", self.path);
        let label = format!("{} {words}", self.axis.name);
        let field = Field { path: &path, label: &label, width: WIDTH, hint: "" };
        self.edits.number(ui, name, &field, (value, step), take)
    }

    fn limits(&mut self, ui: &mut Ui) {
        const KINDS: [&str; 2] = ["between limits", "turns for ever"];
        ui.horizontal(|ui| {
            row_name(ui, "Travel");
            let before = usize::from(self.axis.limits == Limits::Endless);
            let mut chosen = before;
            let combo = ComboBox::from_id_salt(("travel", self.path)).width(120.0);
            let shown = combo.show_index(ui, &mut chosen, KINDS.len(), |i| KINDS[i]);
            super::super::name_combo(ui, &shown, &format!("{} travel", self.axis.name));
            if chosen != before {
                self.edits.forget_under(&format!("{}.limits", self.path));
                self.axis.limits = match (chosen, interval(-180.0, 180.0)) {
                    (0, Some(whole)) => Limits::Intervals(vec![whole]),
                    _ => Limits::Endless,
                };
            }
        });
        let Limits::Intervals(mut intervals) = self.axis.limits.clone() else { return };
        let mut remove = None;
        for (i, at) in intervals.iter_mut().enumerate() {
            ui.horizontal(|ui| {
                row_name(ui, "");
                let place = format!("limits.Intervals[{i}]");
                let of = |end: &str| (format!("{place}.{end}_deg"), format!("limit {} {end}, degrees", i + 1));
                let (field, words) = of("from");
                if let Some(new) = self.number(ui, ("from", &field, &words), (at.from_deg.get(), 1.0), Degrees::new) {
                    at.from_deg = new;
                }
                let (field, words) = of("to");
                if let Some(new) = self.number(ui, ("to", &field, &words), (at.to_deg.get(), 1.0), Degrees::new) {
                    at.to_deg = new;
                }
                let words = format!("Remove {} limit {}", self.axis.name, i + 1);
                if self.small_button(ui, "✕", &words) {
                    remove = Some(i);
                }
            });
        }
        ui.horizontal(|ui| {
            row_name(ui, "");
            let last = intervals.last().map_or(-180.0, |last| last.to_deg.get());
            let words = format!("Add an interval to {}", self.axis.name);
            if self.small_button(ui, "Add an interval", &words) {
                intervals.extend(interval(last + 10.0, last + 20.0));
            }
        });
        if let Some(i) = remove {
            self.edits.forget_under(&format!("{}.limits", self.path));
            intervals.remove(i);
        }
        self.axis.limits = Limits::Intervals(intervals);
    }

    fn small_button(&self, ui: &mut Ui, text: &str, words: &str) -> bool {
        let button = ui.add(Button::new(text).min_size(vec2(22.0, 22.0)));
        ui.ctx().accesskit_node_builder(button.id, |node| node.set_label(words));
        button.on_hover_text(words).clicked()
    }

    fn motion(&mut self, ui: &mut Ui) {
        ui.horizontal(|ui| {
            row_name(ui, "Speed");
            let speed = self.axis.speed_deg_per_s.get();
            let named = ("", "speed_deg_per_s", "speed, degrees per second");
            if let Some(new) = self.number(ui, named, (speed, 0.1), Speed::new) {
                self.axis.speed_deg_per_s = new;
            }
            ui.label("°/s");
        });
        ui.horizontal(|ui| {
            row_name(ui, "Start, stop").on_hover_text("Time to start and to stop, paid once a move.");
            let pause = self.axis.overhead_s.get();
            let named = ("", "overhead_s", "time to start and stop, s");
            if let Some(new) = self.number(ui, named, (pause, 0.1), Duration::new) {
                self.axis.overhead_s = new;
            }
            ui.label("s");
        });
    }

    fn readings(&mut self, ui: &mut Ui) {
        ui.horizontal(|ui| {
            row_name(ui, "Zero offset");
            let (zero, park) = (self.axis.zero_offset_deg.get(), self.axis.park_deg.get());
            let named = ("", "zero_offset_deg", "zero offset, degrees");
            if let Some(new) = self.number(ui, named, (zero, 0.01), Degrees::new) {
                self.axis.zero_offset_deg = new;
            }
            ui.label("°");
            let named = ("park at", "park_deg", "park reading, degrees");
            if let Some(new) = self.number(ui, named, (park, 1.0), Degrees::new) {
                self.axis.park_deg = new;
            }
            ui.label("°");
        });
    }

    fn approach(&mut self, ui: &mut Ui) {
        const KINDS: [&str; 3] = ["either side", "from below", "from above"];
        ui.horizontal(|ui| {
            row_name(ui, "Approach");
            let (before, overshoot) = match self.axis.approach {
                None => (0, None),
                Some(Approach::Upward { overshoot_deg }) => (1, Some(overshoot_deg)),
                Some(Approach::Downward { overshoot_deg }) => (2, Some(overshoot_deg)),
            };
            let mut chosen = before;
            let combo = ComboBox::from_id_salt(("approach", self.path)).width(88.0);
            let shown = combo.show_index(ui, &mut chosen, KINDS.len(), |i| KINDS[i]);
            super::super::name_combo(ui, &shown, &format!("{} approach", self.axis.name));
            let kind = if before == 2 { "Downward" } else { "Upward" };
            let mut overshoot = overshoot.or(Overshoot::new(0.5).ok());
            if let Some(deg) = overshoot.filter(|_| before != 0) {
                let field = format!("approach.{kind}.overshoot_deg");
                let named = ("by", field.as_str(), "overshoot, degrees");
                overshoot = self.number(ui, named, (deg.get(), 0.1), Overshoot::new).or(Some(deg));
                ui.label("°");
            }
            if chosen != before {
                self.edits.forget_under(&format!("{}.approach", self.path));
            }
            self.axis.approach = match (chosen, overshoot) {
                (1, Some(overshoot_deg)) => Some(Approach::Upward { overshoot_deg }),
                (2, Some(overshoot_deg)) => Some(Approach::Downward { overshoot_deg }),
                _ => None,
            };
        });
    }

    fn direction(&mut self, ui: &mut Ui) {
        ui.horizontal(|ui| {
            let help = "In the laboratory with every axis at angle 0: z along the beam, y up, x to the left of someone looking \
                        downstream. Any length; positive angles are right-handed about it.";
            row_name(ui, "Direction").on_hover_text(help);
            let (mut x, mut y, mut z) = self.axis.direction;
            for (name, place, value) in [("x", 0, &mut x), ("y", 1, &mut y), ("z", 2, &mut z)] {
                let path = format!("{}.direction.{place}", self.path);
                let label = format!("{} direction {name}", self.axis.name);
                let field = Field { path: &path, label: &label, width: 46.0, hint: "" };
                if let Some(new) = self.edits.number(ui, name, &field, (value.get(), 0.01), Component::new) {
                    *value = new;
                }
            }
            self.axis.direction = (x, y, z);
        });
    }
}

fn interval(from_deg: f64, to_deg: f64) -> Option<Interval> {
    Some(Interval { from_deg: Degrees::new(from_deg).ok()?, to_deg: Degrees::new(to_deg).ok()? })
}
