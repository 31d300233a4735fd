//! The strip at the bottom: the one next sensible thing to do, work in hand with a way to stop it, and what happened.

use egui::{Align, Button, Label, Layout, ProgressBar, RichText, Ui, vec2};

use ringwright_core::reach::Verdict;
use ringwright_core::session::Session;

use super::command::Command;
use super::edits::Edits;
use super::inputs::{State, mark};
use super::shared::{Reach, Results};
use super::theme::Tones;
use super::trust;
use super::views::Kind;

/// What happened last, and how it went.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Message {
    /// In words.
    pub text: String,
    /// Whether something failed.
    pub failed: bool,
}

/// The one next sensible thing.
#[derive(Debug, Clone, PartialEq)]
pub struct NextStep {
    state: State,
    text: String,
    command: Option<Command>,
}

/// Finds it: what is wrong comes first, then what is missing, then what is doubtful, then the way out.
pub fn next_step(session: &Session, edits: &Edits, results: &Results) -> NextStep {
    let step = |state, text: String, command| NextStep { state, text, command };
    if let Some((_, label, error)) = edits.first_refused() {
        return step(State::Missing, format!("Put right {label}: {error}"), None);
    }
    if let Some(problem) = results.problems.first() {
        let more = results.problems.len() - 1;
        let more = if more > 0 { format!(" (and {more} more)") } else { String::new() };
        return step(State::Missing, format!("Put right: {}{more}", problem.message), None);
    }
    if let Some(text) = results.orient_error.as_ref().and_then(|_| trust::peaks_wanted(session)) {
        return step(State::Missing, text.to_owned(), Some(Command::AddPeak));
    }
    let errors = [&results.orient_error, &results.reach_error, &results.plan_error];
    if let Some(error) = errors.into_iter().flatten().next() {
        return step(State::Missing, error.clone(), None);
    }
    if results.stopped {
        return step(
            State::Doubtful,
            "The work was stopped; what is shown may be of earlier inputs.".to_owned(),
            Some(Command::Resume),
        );
    }
    let report = results.oriented.as_ref().and_then(|oriented| oriented.report.as_ref());
    if let Some(third) = report.and_then(trust::next) {
        return step(State::Doubtful, trust::signs(&trust::why(third)), Some(Command::Select(third.hkl)));
    }
    if let Some(report) = report
        && let Some(text) = trust::doubt(report)
    {
        let state = if report.pair.agrees() { State::Doubtful } else { State::Missing };
        return step(state, trust::signs(&format!("{text} {}", trust::advice(report))), None);
    }
    match results.current_plan() {
        Some(plan) if plan.list.rows.is_empty() => step(State::Missing, none_reachable(&plan.reach), None),
        Some(plan) => {
            let (rows, time) = (plan.list.rows.len(), duration(plan.list.total_s));
            step(
                State::Complete,
                format!("The drive list is ready: {rows} rows, {time} of driving."),
                Some(Command::Export),
            )
        }
        None => step(State::Complete, "Working it out.".to_owned(), None),
    }
}

/// Why no wanted reflection can be measured, and what would change that.
fn none_reachable(reach: &Reach) -> String {
    let counts = reach.table.counts();
    let all = |kind: Kind| counts[kind.index()] == reach.table.len();
    if reach.table.is_empty() {
        return "No node lies in the targets: widen the range of d or 2θ.".to_owned();
    }
    if all(Kind::OutsideSphere) {
        let longest = reach.table.rows().filter_map(|row| match row.verdict {
            Verdict::OutsideSphere { longest_wavelength_angstrom } => Some(longest_wavelength_angstrom),
            _ => None,
        });
        let longest = longest.fold(0.0, f64::max);
        return format!(
            "Every wanted reflection lies outside the sphere: shorten the wavelength to {longest:.4} Å, or want larger d."
        );
    }
    let why = if all(Kind::DirectBeam) {
        "All lie in the direct-beam cone: want larger 2θ, or look at the cone in the card Machine."
    } else if all(Kind::OverLimit) {
        "Some axis would pass its limit; the detail names it: look at the limits in the card Machine, or at the rules."
    } else if all(Kind::CannotMake) {
        "The axes miss the angles; the detail tells by how much: try another rule, or want others."
    } else {
        "The table tells for each what stands in the way: widen the targets, or look at limits and rules."
    };
    format!("No wanted reflection can be measured. {why}")
}

/// Shows the strip.
pub fn show(ui: &mut Ui, next: &NextStep, results: &Results, message: Option<&Message>, commands: &mut Vec<Command>) {
    let tones = Tones::in_ui(ui);
    ui.horizontal(|ui| {
        let (rect, _) = ui.allocate_exact_size(vec2(18.0, 22.0), egui::Sense::hover());
        mark(ui.painter(), rect.center(), next.state, tones);
        ui.label(RichText::new("Next").color(tones.quiet));
        if let Some(command) = next.command {
            let button = Button::new(RichText::new(command.label()).color(tones.on_accent)).fill(tones.accent);
            if ui.add(button).clicked() {
                commands.push(command);
            }
        }
        let alone = results.busy.is_none() && message.is_none();
        let width = ui.available_width() * if alone { 1.0 } else { 0.6 };
        let text = Label::new(RichText::new(&next.text).color(tones.strong)).truncate();
        ui.allocate_ui_with_layout(vec2(width, 22.0), Layout::left_to_right(Align::Center), |ui| {
            ui.set_max_width(width);
            ui.add(text).on_hover_text(&next.text);
        });
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            if let Some(busy) = results.busy {
                if ui.button(Command::Stop.label()).clicked() {
                    commands.push(Command::Stop);
                }
                let bar = match busy.fraction {
                    Some(fraction) => ProgressBar::new(fraction).show_percentage(),
                    None => ProgressBar::new(0.0),
                };
                let bar = ui.add(bar.desired_width(110.0).desired_height(14.0));
                ui.ctx().accesskit_node_builder(bar.id, |node| node.set_label(busy.stage));
                ui.label(RichText::new(busy.stage).color(tones.quiet));
            } else if let Some(message) = message {
                let (sign, colour) = if message.failed { ("✕ ", tones.bad) } else { ("✓ ", tones.good) };
                let text = RichText::new(format!("{sign}{}", message.text)).color(colour);
                ui.add(Label::new(text).truncate()).on_hover_text(&message.text);
            }
        });
    });
}

/// A span of time as people say it.
pub fn duration(seconds: f64) -> String {
    let minutes = (seconds / 60.0).round().clamp(0.0, 1e9) as u64;
    match (minutes / 60, minutes % 60) {
        (0, 0) => format!("{seconds:.0} s"),
        (0, m) => format!("{m} min"),
        (h, m) => format!("{h} h {m:02} min"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn time_is_told_in_the_unit_it_fits() {
        assert_eq!(duration(12.0), "12 s");
        assert_eq!(duration(90.0), "2 min");
        assert_eq!(duration(3.0 * 3600.0 + 5.0 * 60.0 + 10.0), "3 h 05 min");
        assert_eq!(duration(3599.0), "1 h 00 min");
    }
}
