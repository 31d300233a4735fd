//! Type, spacing and colours of the window, light and dark. Colour never stands alone: every state has a shape and a word.

use std::sync::Arc;

use egui::{
    Color32, CornerRadius, FontData, FontDefinitions, FontFamily, FontId, Margin, Stroke, TextStyle, Theme, vec2,
};

/// The one font of the program; its licence stands beside it. Its figures are tabular.
const FONT: &[u8] = include_bytes!("../../../../assets/fonts/DejaVuSansCondensed.ttf");

/// Gap between things that belong together, in points.
pub const GAP: f32 = 4.0;

/// Gap between groups, in points.
pub const GROUP_GAP: f32 = 8.0;

/// Colours with a meaning of their own. All reach a contrast of 4.5:1 on the card's ground; a test holds it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Tones {
    /// Complete, trusted.
    pub good: Color32,
    /// Wants a look.
    pub doubt: Color32,
    /// Wrong or missing.
    pub bad: Color32,
    /// Words of lesser weight.
    pub quiet: Color32,
    /// Running text.
    pub text: Color32,
    /// Headings and figures that count.
    pub strong: Color32,
    /// What can be pressed next.
    pub accent: Color32,
    /// Text on a ground of the accent's colour.
    pub on_accent: Color32,
    /// Ground of a card.
    pub card: Color32,
    /// Ground between cards.
    pub ground: Color32,
    /// Ground of a field.
    pub field: Color32,
    /// Lines between things.
    pub line: Color32,
}

const LIGHT: Tones = Tones {
    good: Color32::from_rgb(0, 104, 82),
    doubt: Color32::from_rgb(140, 80, 0),
    bad: Color32::from_rgb(176, 32, 56),
    quiet: Color32::from_rgb(88, 96, 104),
    text: Color32::from_rgb(38, 44, 52),
    strong: Color32::from_rgb(12, 18, 26),
    accent: Color32::from_rgb(24, 88, 158),
    on_accent: Color32::from_rgb(255, 255, 255),
    card: Color32::from_rgb(252, 252, 250),
    ground: Color32::from_rgb(236, 237, 236),
    field: Color32::from_rgb(255, 255, 255),
    line: Color32::from_rgb(204, 208, 210),
};

const DARK: Tones = Tones {
    good: Color32::from_rgb(86, 196, 160),
    doubt: Color32::from_rgb(240, 180, 72),
    bad: Color32::from_rgb(255, 128, 128),
    quiet: Color32::from_rgb(156, 166, 176),
    text: Color32::from_rgb(208, 214, 220),
    strong: Color32::from_rgb(244, 247, 250),
    accent: Color32::from_rgb(124, 180, 240),
    on_accent: Color32::from_rgb(8, 20, 34),
    card: Color32::from_rgb(31, 36, 42),
    ground: Color32::from_rgb(21, 25, 30),
    field: Color32::from_rgb(17, 20, 24),
    line: Color32::from_rgb(62, 70, 78),
};

impl Tones {
    /// Those of a light or a dark window.
    pub fn of(dark: bool) -> &'static Self {
        if dark { &DARK } else { &LIGHT }
    }

    /// Those of the window that a ui belongs to.
    pub fn in_ui(ui: &egui::Ui) -> &'static Self {
        Self::of(ui.visuals().dark_mode)
    }
}

/// Dresses a context: font, type scale, spacing, both themes.
pub fn apply(ctx: &egui::Context) {
    let mut fonts = FontDefinitions::empty();
    let name = "DejaVu Sans Condensed".to_owned();
    fonts.font_data.insert(name.clone(), Arc::new(FontData::from_static(FONT)));
    for family in [FontFamily::Proportional, FontFamily::Monospace] {
        fonts.families.insert(family, vec![name.clone()]);
    }
    ctx.set_fonts(fonts);
    for theme in [Theme::Light, Theme::Dark] {
        ctx.style_mut_of(theme, |style| dress(style, Tones::of(theme == Theme::Dark)));
    }
}

fn dress(style: &mut egui::Style, tones: &Tones) {
    let font = |size| FontId::new(size, FontFamily::Proportional);
    style.text_styles = [
        (TextStyle::Small, font(11.5)),
        (TextStyle::Body, font(13.0)),
        (TextStyle::Button, font(13.0)),
        (TextStyle::Monospace, font(13.0)),
        (TextStyle::Heading, font(15.0)),
    ]
    .into();
    style.animation_time = 0.0;
    let spacing = &mut style.spacing;
    spacing.item_spacing = vec2(6.0, GAP);
    spacing.button_padding = vec2(8.0, 3.0);
    spacing.interact_size.y = 22.0;
    spacing.window_margin = Margin::same(12);
    spacing.menu_margin = Margin::same(6);
    let visuals = &mut style.visuals;
    visuals.panel_fill = tones.ground;
    visuals.window_fill = tones.card;
    visuals.window_stroke = Stroke::new(1.0, tones.line);
    visuals.window_corner_radius = CornerRadius::same(6);
    visuals.menu_corner_radius = CornerRadius::same(6);
    visuals.extreme_bg_color = tones.field;
    visuals.text_edit_bg_color = Some(tones.field);
    visuals.faint_bg_color = tones.ground;
    visuals.weak_text_color = Some(tones.quiet);
    visuals.warn_fg_color = tones.doubt;
    visuals.error_fg_color = tones.bad;
    visuals.hyperlink_color = tones.accent;
    visuals.selection.bg_fill = tones.accent.gamma_multiply(0.35);
    visuals.selection.stroke = Stroke::new(1.0, tones.strong);
    dress_widgets(&mut visuals.widgets, tones);
}

fn dress_widgets(widgets: &mut egui::style::Widgets, tones: &Tones) {
    let raised = tones.line.gamma_multiply(0.55);
    for widget in [
        &mut widgets.noninteractive,
        &mut widgets.inactive,
        &mut widgets.hovered,
        &mut widgets.active,
        &mut widgets.open,
    ] {
        widget.corner_radius = CornerRadius::same(4);
        widget.fg_stroke = Stroke::new(1.0, tones.text);
        widget.bg_stroke = Stroke::new(1.0, tones.line);
        widget.bg_fill = raised;
        widget.weak_bg_fill = raised;
        widget.expansion = 0.0;
    }
    widgets.hovered.bg_stroke = Stroke::new(1.0, tones.accent);
    widgets.hovered.fg_stroke = Stroke::new(1.0, tones.strong);
    widgets.active.bg_stroke = Stroke::new(1.5, tones.accent);
    widgets.active.fg_stroke = Stroke::new(1.0, tones.strong);
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Relative luminance and contrast as the Web Content Accessibility Guidelines 2.1 define them.
    fn contrast(a: Color32, b: Color32) -> f64 {
        let luminance = |colour: Color32| {
            let channel = |v: u8| {
                let v = f64::from(v) / 255.0;
                if v <= 0.03928 { v / 12.92 } else { ((v + 0.055) / 1.055).powf(2.4) }
            };
            0.2126 * channel(colour.r()) + 0.7152 * channel(colour.g()) + 0.0722 * channel(colour.b())
        };
        let (a, b) = (luminance(a), luminance(b));
        (a.max(b) + 0.05) / (a.min(b) + 0.05)
    }

    #[test]
    fn text_can_be_read_on_every_ground() {
        for tones in [&LIGHT, &DARK] {
            for ground in [tones.card, tones.ground, tones.field] {
                for ink in [tones.good, tones.doubt, tones.bad, tones.quiet, tones.text, tones.strong, tones.accent] {
                    assert!(contrast(ink, ground) >= 4.5, "{ink:?} on {ground:?}: {:.2}", contrast(ink, ground));
                }
            }
            assert!(contrast(tones.on_accent, tones.accent) >= 4.5);
        }
        // The measure itself: black on white is 21.
        assert!((contrast(Color32::BLACK, Color32::WHITE) - 21.0).abs() < 1e-9);
    }
}
