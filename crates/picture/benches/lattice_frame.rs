//! One frame of a reciprocal lattice: 100 000 nodes, a translucent sphere, arrows and axes at 1000 × 700.
#![allow(missing_docs, clippy::unwrap_used)]

use criterion::{Criterion, criterion_group, criterion_main};
use ringwright_picture::{Arrow, Ball, Canvas, Colour, Disc, Eye, Fade, Lens, Mark, NO_ID, Scene, Size, paint};

fn lattice() -> Scene {
    let mut scene =
        Scene { background: Colour::rgb(16, 20, 28), fade: Some(Fade { radius: 1.8, most: 0.7 }), ..Scene::default() };
    // The nodes of a cubic lattice inside a sphere of radius 1.8.
    let step = 1.8 / 28.8;
    let axis = || -29..=29_i32;
    for h in axis() {
        for k in axis() {
            for l in axis() {
                let centre = [h, k, l].map(|i| f64::from(i) * step);
                let square: f64 = centre.iter().map(|v| v * v).sum();
                if square < 1.8 * 1.8 {
                    let id = scene.discs.len() as u32;
                    let colour =
                        [Colour::rgb(70, 160, 230), Colour::rgb(240, 170, 60)][(h + k + l).rem_euclid(2) as usize];
                    let mark = if id.is_multiple_of(10) { Mark::Square } else { Mark::Disc };
                    scene.discs.push(Disc { centre, radius: Size::Pixels(3.0), colour, id, mark });
                }
            }
        }
    }
    let sphere = Colour::rgb(120, 200, 255).with_alpha(40);
    scene.balls.push(Ball { centre: [0.0, 0.0, -1.0], radius: 1.0, colour: sphere, rim_alpha: 90, id: NO_ID });
    for to in [[0.0, 0.0, 0.0], [0.6, 0.5, -0.4], [0.6, 0.5, 0.6]] {
        scene.arrows.push(Arrow {
            from: [0.0, 0.0, -1.0],
            to,
            width_px: 4.0,
            head_px: 16.0,
            colour: Colour::rgb(255, 255, 255),
            id: NO_ID,
        });
    }
    scene
}

fn frames(criterion: &mut Criterion) {
    let scene = lattice();
    let mut eye = Eye::default();
    eye.orbit(0.5, 0.3);
    eye.fit([0.0; 3], 1.9, 1000, 700).unwrap();
    let mut canvas = Canvas::new(1000, 700).unwrap();
    let mut group = criterion.benchmark_group(format!("{} nodes, 1000 x 700", scene.discs.len()));
    for (lens, name) in [(Lens::Perspective, "perspective"), (Lens::Orthographic, "orthographic")] {
        eye.lens = lens;
        for oversampling in [1, 2] {
            group.bench_function(format!("{name} {oversampling}x"), |bencher| {
                bencher.iter(|| {
                    eye.orbit(0.01, 0.0);
                    paint(&scene, &eye, &mut canvas, oversampling);
                });
            });
        }
    }
    group.finish();
}

criterion_group!(benches, frames);
criterion_main!(benches);
