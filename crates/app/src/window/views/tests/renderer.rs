use egui::{Color32, ColorImage, Pos2, Rect, TextureHandle, TextureOptions, pos2, vec2};
use egui_kittest::Harness;

use super::super::test_renderer::SoftwareRenderer;

fn draw(scale: f32, show: impl FnMut(&mut egui::Ui)) -> image::RgbaImage {
    let builder = Harness::builder().with_size([200.0, 100.0]).with_pixels_per_point(scale);
    let mut harness = builder.renderer(SoftwareRenderer::default()).build_ui(show);
    harness.run();
    harness.render().unwrap()
}

fn area(x: f32, y: f32, width: f32, height: f32) -> Rect {
    Rect::from_min_size(pos2(x, y), vec2(width, height))
}

#[test]
fn a_filled_rectangle_is_where_and_what_it_should_be() {
    let red = Color32::from_rgb(200, 10, 20);
    for scale in [1.0, 2.0] {
        let image = draw(scale, |ui| {
            ui.ctx().debug_painter().rect_filled(area(20.0, 30.0, 40.0, 10.0), 0.0, red);
        });
        let at = |x: f32, y: f32| image.get_pixel((x * scale) as u32, (y * scale) as u32).0;
        assert_eq!((image.width(), image.height()), ((200.0 * scale) as u32, (100.0 * scale) as u32));
        assert_eq!(at(25.0, 35.0), [200, 10, 20, 255]);
        for (x, y) in [(18.0, 35.0), (62.0, 35.0), (25.0, 28.0), (25.0, 42.0)] {
            assert_ne!(at(x, y), [200, 10, 20, 255], "({x}, {y}) lies outside");
        }
    }
}

#[test]
fn a_texture_shows_its_texels_and_a_patch_changes_some() {
    let (a, b, c) = (Color32::from_rgb(10, 200, 30), Color32::from_rgb(240, 220, 0), Color32::from_rgb(5, 6, 250));
    let mut texture: Option<TextureHandle> = None;
    let image = draw(1.0, move |ui| {
        let texture = texture.get_or_insert_with(|| {
            let whole = ColorImage::new([2, 1], vec![a, b]);
            let mut handle = ui.ctx().load_texture("two", whole, TextureOptions::NEAREST);
            handle.set_partial([1, 0], ColorImage::new([1, 1], vec![c]), TextureOptions::NEAREST);
            handle
        });
        let uv = Rect::from_min_max(Pos2::ZERO, pos2(1.0, 1.0));
        ui.ctx().debug_painter().image(texture.id(), area(50.0, 20.0, 40.0, 40.0), uv, Color32::WHITE);
    });
    assert_eq!(image.get_pixel(55, 40).0, [10, 200, 30, 255]);
    assert_eq!(image.get_pixel(85, 40).0, [5, 6, 250, 255]);
    assert_ne!(image.get_pixel(95, 40).0, [5, 6, 250, 255]);
}

#[test]
fn text_has_ink_in_its_place_and_clipping_takes_it_away() {
    let draw_text = |clip: Rect| {
        draw(1.0, move |ui| {
            let painter = ui.ctx().debug_painter().with_clip_rect(clip);
            painter.rect_filled(area(0.0, 0.0, 200.0, 100.0), 0.0, Color32::BLACK);
            let font = egui::FontId::proportional(30.0);
            painter.text(pos2(40.0, 30.0), egui::Align2::LEFT_TOP, "HHHH", font, Color32::WHITE);
        })
    };
    let ink = |image: &image::RgbaImage, from: u32, to: u32| {
        let columns = from..to;
        columns.flat_map(|x| (0..100).map(move |y| (x, y))).filter(|(x, y)| image.get_pixel(*x, *y).0[0] > 200).count()
    };
    let all = draw_text(area(0.0, 0.0, 200.0, 100.0));
    // Four capitals of 30 points: uprights of a few points, about 20 high.
    assert!(ink(&all, 40, 60) > 40 && ink(&all, 0, 38) == 0, "{} {}", ink(&all, 40, 60), ink(&all, 0, 38));
    let half = draw_text(area(0.0, 0.0, 60.0, 100.0));
    assert_eq!(ink(&half, 40, 60), ink(&all, 40, 60));
    let behind = half.get_pixel(70, 45).0;
    assert!((60..200).all(|x| half.get_pixel(x, 45).0 == behind), "nothing is drawn outside the clip rectangle");
}
