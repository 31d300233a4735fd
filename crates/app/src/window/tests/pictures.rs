use std::path::Path;

use ringwright_core::frames::Hkl;

use super::*;

/// Every picture: both demos, a laptop's window, a desk's and the least one, light and dark.
///
/// `RINGWRIGHT_SHOTS=folder cargo test --release -p ringwright pictures` writes them as PNG; without the variable only the
/// first is drawn.
#[test]
fn pictures_of_both_demos_are_drawn() {
    let folder = std::env::var_os("RINGWRIGHT_SHOTS");
    let mut wanted = Vec::new();
    for demo in 0..DEMOS.len() {
        for (size, name) in [(LAPTOP, "laptop"), ([1920.0, 1080.0], "desk"), ([1000.0, 640.0], "least")] {
            for theme in [Theme::Light, Theme::Dark] {
                wanted.push((demo, size, name, theme));
            }
        }
    }
    if folder.is_none() {
        wanted.truncate(1);
    }
    for (demo, size, name, theme) in wanted {
        let start = Start::Demo(DEMOS[demo].name);
        let mut harness = window(&start, size, theme);
        let ctx = harness.ctx.clone();
        let hkl = harness.state().results().current_plan().unwrap().list.rows[2].hkl;
        harness.state_mut().perform(&ctx, Command::Select(hkl));
        harness.run_steps(4);
        harness.check_accessibility();
        let image = harness.render().unwrap();
        assert_eq!((image.width(), image.height()), (size[0] as u32, size[1] as u32));
        let colours: std::collections::HashSet<[u8; 4]> = image.pixels().map(|p| p.0).collect();
        assert!(colours.len() > 100, "the picture shows something: {} colours", colours.len());
        if let Some(folder) = &folder {
            let file = format!("{}-{name}-{}.png", DEMOS[demo].name, word(theme));
            std::fs::create_dir_all(folder).unwrap();
            image.save(Path::new(folder).join(file)).unwrap();
        }
    }
}

/// The pictures that the README shows; with `RINGWRIGHT_SHOTS=folder` they are written there under the names that they have in
/// `assets/pictures`, ready to be copied.
#[test]
fn pictures_for_the_readme_are_small_files() {
    let folder = std::env::var_os("RINGWRIGHT_SHOTS");
    let both = [(0, Theme::Light), (1, Theme::Dark)];
    for (i, theme) in both.into_iter().take(if folder.is_some() { 2 } else { 1 }) {
        let mut harness = window(&Start::Demo(DEMOS[i].name), LAPTOP, theme);
        let hkl = harness.state().results().current_plan().unwrap().list.rows[2].hkl;
        perform(&mut harness, Command::Select(hkl));
        // Long enough to be painted finely.
        harness.run_steps(20);
        let image = image::DynamicImage::from(harness.render().unwrap()).into_rgb8();
        let (width, height) = image.dimensions();
        let mut bytes = Vec::new();
        let mut encoder = png::Encoder::new(&mut bytes, width, height);
        encoder.set_color(png::ColorType::Rgb);
        encoder.set_depth(png::BitDepth::Eight);
        encoder.set_compression(png::Compression::Balanced);
        encoder.set_filter(png::Filter::Adaptive);
        encoder.write_header().unwrap().write_image_data(image.as_raw()).unwrap();
        assert!(bytes.len() < 400_000, "{} bytes", bytes.len());
        if let Some(folder) = &folder {
            std::fs::create_dir_all(folder).unwrap();
            std::fs::write(Path::new(folder).join(format!("window-{}.png", word(theme))), bytes).unwrap();
        }
    }
}

/// What leads to a state.
type Act = fn(&mut Harness<'static, App>);

/// States that a person meets on the way: written with the others.
#[test]
fn pictures_of_other_states_are_drawn() {
    let folder = std::env::var_os("RINGWRIGHT_SHOTS");
    let states: [(&str, Act); 18] = [
        ("refused", |harness| {
            enter(harness, "a, Å", "-3");
            enter(harness, "Peak 1 chi, degrees", "1,5");
        }),
        ("no-orientation", |harness| {
            for peak in ["Peak 1 in use", "Peak 2 in use", "Peak 3 in use"] {
                press(harness, peak);
            }
        }),
        ("no-peaks", |harness| {
            for peak in ["Remove peak 3", "Remove peak 2", "Remove peak 1"] {
                press(harness, peak);
            }
        }),
        ("machine", |harness| {
            press(harness, "Fold Crystal");
            press(harness, "Unfold Machine");
            press(harness, "Edit axis chi");
        }),
        ("cell-misfit", |harness| enter(harness, "beta, degrees", "97.2")),
        ("wrong-peak", |harness| enter(harness, "Peak 3 chi, degrees", "60")),
        ("outside-sphere", |harness| {
            harness.state_mut().opened.session.targets = list(&[[30.0, 0.0, 0.0], [0.0, 25.0, 0.0]]);
            settle(harness);
        }),
        ("none-reachable", |harness| {
            harness.state_mut().opened.session.targets = list(&[[2.0, 3.0, 2.0], [2.0, 3.0, -2.0]]);
            settle(harness);
        }),
        ("two-peaks", |harness| press(harness, "Peak 3 in use")),
        ("does-not-fit", |harness| {
            enter(harness, "b, Å", "6.9");
            perform(harness, Command::SaveAsByPath);
        }),
        ("azimuth-light", |harness| turn_planned(harness, 0.62)),
        ("azimuth-dark", |harness| turn_planned(harness, 0.3)),
        ("azimuth-surface-light", grazing),
        ("azimuth-surface-dark", grazing),
        ("rules-light", rules),
        ("rules-dark", rules),
        ("export", |harness| perform(harness, Command::Export)),
        ("unsaved", |harness| {
            enter(harness, "b, Å", "6.3");
            perform(harness, Command::Quit);
        }),
    ];
    for (i, (name, reach_state)) in states.into_iter().enumerate() {
        if folder.is_none() && i > 0 {
            continue;
        }
        let dark = name.ends_with("dark") || (i % 2 == 1 && !name.ends_with("light"));
        let theme = if dark { Theme::Dark } else { Theme::Light };
        let mut harness = window(&Start::Demo(DEMOS[0].name), LAPTOP, theme);
        let before = harness.render().unwrap();
        reach_state(&mut harness);
        harness.run_steps(4);
        harness.check_accessibility();
        let image = harness.render().unwrap();
        assert!(image != before, "{name} looks different");
        if let Some(folder) = &folder {
            std::fs::create_dir_all(folder).unwrap();
            image.save(Path::new(folder).join(format!("state-{name}.png"))).unwrap();
        }
    }
}

/// Turns a reflection by hand to a part of the ribbon's width.
fn turn(harness: &mut Harness<'static, App>, hkl: Hkl, part: f32) {
    perform(harness, Command::Select(hkl));
    let rect = harness.get_by_label("Azimuth ribbon").rect();
    let at = rect.lerp_inside(vec2(part, 0.4));
    harness.drag_at(at);
    harness.step();
    harness.drop_at(at);
    harness.run_steps(60);
}

fn turn_planned(harness: &mut Harness<'static, App>, part: f32) {
    let hkl = harness.state().results().current_plan().unwrap().list.rows[2].hkl;
    turn(harness, hkl, part);
}

/// The card of rules: one that fits, one that does not, and one too many.
fn rules(harness: &mut Harness<'static, App>) {
    for card in ["Fold Crystal", "Fold Beam", "Fold Peaks found", "Fold Orientation"] {
        press(harness, card);
    }
    harness.state_mut().opened.session.rules = [
        "Azimuth(reference: Direct(u: 1, v: -1, w: 0), at_deg: 20)",
        "Tie(axis: \"omega\", to: \"omega\", factor: 0.5, offset_deg: 0)",
    ]
    .map(|rule| ron::from_str(rule).unwrap())
    .to_vec();
    settle(harness);
    harness.get_by_label("Add a rule").scroll_to_me();
    harness.run_steps(10);
}

/// A crystal with a surface, so that there are several reasons why not.
fn grazing(harness: &mut Harness<'static, App>) {
    harness.state_mut().opened.session.crystal.surface = Some(ron::from_str("Reciprocal(h: 1, k: 0, l: 1)").unwrap());
    settle(harness);
    let reach = harness.state().results().reach.clone().unwrap();
    let view = reach.azimuth.as_ref().unwrap();
    let below = |hkl: Hkl| {
        let steps = view.ribbon(hkl, 36).unwrap_or_default();
        steps.iter().filter(|step| step.verdict.word() == "below_surface").count()
    };
    let hkl = reach.table.rows().map(|row| row.hkl).max_by_key(|hkl| below(*hkl)).unwrap();
    turn(harness, hkl, 0.62);
}

fn list(nodes: &[[f64; 3]]) -> ringwright_core::session::Targets {
    let index = |v: f64| ringwright_core::quantity::Index::new(v).unwrap();
    let node = |[h, k, l]: &[f64; 3]| ringwright_core::session::TargetNode { h: index(*h), k: index(*k), l: index(*l) };
    ringwright_core::session::Targets::List(nodes.iter().map(node).collect())
}

/// Whatever the sources of window and core can say has a glyph; only comments are left out.
#[test]
fn the_font_has_every_character_of_the_sources() {
    let mut characters = std::collections::BTreeSet::from_iter(' '..='~');
    for root in ["src", "../core/src", "../../assets", "../../demo-sessions"] {
        collect(&Path::new(env!("CARGO_MANIFEST_DIR")).join(root), &mut characters);
    }
    assert!(characters.contains(&'Å') && characters.contains(&'θ'), "the sources were read");
    let harness = demo(0);
    let font = egui::TextStyle::Body.resolve(&harness.ctx.global_style());
    let missing: Vec<char> = harness.ctx.fonts_mut(|fonts| {
        characters.iter().copied().filter(|c| !c.is_control() && !fonts.has_glyph(&font, *c)).collect()
    });
    assert_eq!(missing, Vec::<char>::new());
}

fn collect(path: &Path, characters: &mut std::collections::BTreeSet<char>) {
    if path.is_dir() {
        for entry in std::fs::read_dir(path).unwrap() {
            collect(&entry.unwrap().path(), characters);
        }
    } else if path.extension().is_some_and(|ending| ["rs", "ron", "csv"].iter().any(|known| ending == *known)) {
        let text = std::fs::read_to_string(path).unwrap();
        let spoken = text.lines().filter(|line| !line.trim_start().starts_with("//"));
        characters.extend(spoken.flat_map(str::chars));
    }
}

/// Figures in a column stand below each other only if they are of one width.
#[test]
fn figures_are_tabular() {
    let harness = demo(0);
    let font = egui::TextStyle::Body.resolve(&harness.ctx.global_style());
    let widths: Vec<f32> =
        harness.ctx.fonts_mut(|fonts| ('0'..='9').map(|figure| fonts.glyph_width(&font, figure)).collect());
    assert!(widths[0] > 3.0 && widths.iter().all(|width| *width == widths[0]), "{widths:?}");
}

fn word(theme: Theme) -> &'static str {
    if theme == Theme::Dark { "dark" } else { "light" }
}
