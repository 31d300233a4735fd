//! The window driven through its accessible labels, without a screen.

mod azimuth;
mod editing;
mod files;
mod layout;
mod machine;
mod pictures;
mod states;

use egui::{Theme, vec2};
use egui_kittest::kittest::Queryable;
use egui_kittest::{Harness, HarnessBuilder};

use ringwright_core::session::DEMOS;

use super::views::test_renderer::SoftwareRenderer;
use super::{App, Command, Options, Start};

/// The window of a usual laptop.
const LAPTOP: [f32; 2] = [1280.0, 800.0];

/// A system without a dialogue that works.
const NO_DIALOGUE: Options = Options { dialogue: |_, _| None, machines: None };

fn window(start: &Start, size: [f32; 2], theme: Theme) -> Harness<'static, App> {
    window_with(start, size, theme, NO_DIALOGUE)
}

fn window_with(start: &Start, [width, height]: [f32; 2], theme: Theme, options: Options) -> Harness<'static, App> {
    let mut harness: Harness<'static, App> = HarnessBuilder::default()
        .with_size(vec2(width, height))
        .with_theme(theme)
        .with_max_steps(64)
        .with_step_dt(1.0 / 60.0)
        .renderer(SoftwareRenderer::default())
        .build_eframe(|cc| App::new(&cc.egui_ctx, start, options).unwrap());
    settle(&mut harness);
    harness
}

fn demo(i: usize) -> Harness<'static, App> {
    window(&Start::Demo(DEMOS[i].name), LAPTOP, Theme::Light)
}

/// Steps until every worker rests and what they found is shown.
fn settle(harness: &mut Harness<'_, App>) {
    for _ in 0..6000 {
        harness.step();
        if harness.state().is_settled() {
            harness.run_steps(3);
            return;
        }
        std::thread::sleep(std::time::Duration::from_millis(10));
    }
    panic!("the work did not end: {:?}", harness.state().results().busy);
}

/// Replaces the text of a field, as a person would: click into it, select all, type.
fn enter(harness: &mut Harness<'_, App>, label: &str, text: &str) {
    harness.get_by_label(label).scroll_to_me();
    harness.run_steps(2);
    harness.get_by_label(label).focus();
    harness.run_steps(2);
    harness.key_press_modifiers(egui::Modifiers::COMMAND, egui::Key::A);
    harness.step();
    if text.is_empty() {
        harness.key_press(egui::Key::Backspace);
    } else {
        harness.get_by_label(label).type_text(text);
    }
    harness.step();
    settle(harness);
}

fn press(harness: &mut Harness<'_, App>, label: &str) {
    harness.get_by_label(label).click_accesskit();
    harness.run_steps(2);
    settle(harness);
}

fn perform(harness: &mut Harness<'_, App>, command: Command) {
    let ctx = harness.ctx.clone();
    harness.state_mut().perform(&ctx, command);
    harness.run_steps(2);
    settle(harness);
}
