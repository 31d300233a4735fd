//! Writes a picture of everything the renderer can draw: a reciprocal lattice cut by a sphere, and a small machine.
//! `cargo run --release -p ringwright-picture --example showcase -- OUT.png [WIDTH HEIGHT]`
#![allow(clippy::print_stderr)]

use std::error::Error;
use std::f64::consts::TAU;
use std::fs::File;
use std::io::BufWriter;

use ringwright_picture::{
    Arrow, Ball, Canvas, Circle, Colour, Dash, Disc, Eye, Fade, Line, Mark, Mesh, NO_ID, Placement, Scene, Size, paint,
};

const NIGHT: Colour = Colour::rgb(17, 21, 29);
const INK: Colour = Colour::rgb(226, 232, 240);

fn main() -> Result<(), Box<dyn Error>> {
    let mut arguments = std::env::args().skip(1);
    let Some(path) = arguments.next() else {
        eprintln!("showcase OUT.png [WIDTH HEIGHT]");
        std::process::exit(2);
    };
    let width: usize = arguments.next().map_or(Ok(1400), |text| text.parse())?;
    let height: usize = arguments.next().map_or(Ok(800), |text| text.parse())?;

    let mut scene = Scene { background: NIGHT, fade: Some(Fade { radius: 1.6, most: 0.72 }), ..Scene::default() };
    lattice(&mut scene);
    sphere(&mut scene);
    machine(&mut scene, [1.55, -0.2, -1.75])?;

    let mut eye = Eye::default();
    eye.orbit(1.02, 0.3);
    eye.fit([0.62, 0.08, -0.25], 1.4, width, height)?;
    let mut canvas = Canvas::new(width, height)?;
    paint(&scene, &eye, &mut canvas, 3);

    let mut encoder = png::Encoder::new(BufWriter::new(File::create(path)?), width as u32, height as u32);
    encoder.set_color(png::ColorType::Rgba);
    encoder.set_depth(png::BitDepth::Eight);
    encoder.write_header()?.write_image_data(&canvas.straight_rgba_bytes())?;
    Ok(())
}

/// Nodes with a mark for each of five kinds, here by distance and side.
fn lattice(scene: &mut Scene) {
    let step = 0.21;
    for h in -6..=6_i32 {
        for k in -5..=5_i32 {
            for l in -6..=6_i32 {
                let centre = [f64::from(h) * step, f64::from(k) * step * 1.25, f64::from(l) * step];
                let radius = centre.iter().map(|v| v * v).sum::<f64>().sqrt();
                if !(0.01..1.15).contains(&radius) {
                    continue;
                }
                let (colour, mark) = match (h + 2 * k + 3 * l).rem_euclid(9) {
                    0 => (Colour::rgb(240, 180, 70), Mark::Diamond),
                    1 => (Colour::rgb(150, 160, 175), Mark::Ring),
                    2 => (Colour::rgb(228, 110, 90), Mark::Triangle),
                    3 => (Colour::rgb(190, 150, 230), Mark::Square),
                    _ => (Colour::rgb(86, 180, 233), Mark::Disc),
                };
                let id = scene.discs.len() as u32;
                scene.discs.push(Disc { centre, radius: Size::World(0.027), colour, id, mark });
            }
        }
    }
}

/// A translucent sphere of radius 1 through the origin, its great circles, and three arrows that close a triangle.
fn sphere(scene: &mut Scene) {
    let centre = [0.0, 0.0, -1.0];
    let glass = Colour::rgb(110, 190, 255);
    scene.balls.push(Ball { centre, radius: 1.0, colour: glass.with_alpha(26), rim_alpha: 110, id: NO_ID });
    let pattern =
        Line { from: [0.0; 3], to: [0.0; 3], width_px: 1.2, colour: glass.with_alpha(150), dash: None, id: NO_ID };
    for normal in [[0.0, 1.0, 0.0], [1.0, 0.0, 0.0]] {
        scene.add_circle(Circle { centre, normal, radius: 1.0 }, pattern);
    }
    let (azimuth, polar) = (2.3_f64, 1.0_f64);
    let scattered = [polar.sin() * azimuth.cos(), polar.sin() * azimuth.sin(), polar.cos() - 1.0];
    let arrow = |from: [f64; 3], to: [f64; 3], colour: Colour| Arrow {
        from,
        to,
        width_px: 4.0,
        head_px: 20.0,
        colour,
        id: NO_ID,
    };
    scene.arrows.push(arrow(centre, [0.0; 3], INK));
    scene.arrows.push(arrow(centre, scattered, Colour::rgb(255, 214, 90)));
    scene.arrows.push(arrow([0.0; 3], scattered, Colour::rgb(120, 220, 150)));
    scene.lines.push(Line {
        from: [0.0, 0.0, -2.6],
        to: [0.0, 0.0, 1.6],
        width_px: 1.5,
        colour: INK.with_alpha(170),
        dash: Some(Dash { on_px: 7.0, off_px: 5.0 }),
        id: NO_ID,
    });
}

/// A ring, a post and a small ball in it.
fn machine(scene: &mut Scene, at: [f64; 3]) -> Result<(), Box<dyn Error>> {
    let shifted = |x: f64, y: f64, z: f64| [at[0] + x, at[1] + y, at[2] + z];
    let steel = Colour::rgb(168, 178, 192);
    let tilted = Placement {
        rotation_rows: [[0.8, 0.0, 0.6], [0.0, 1.0, 0.0], [-0.6, 0.0, 0.8]],
        shift: shifted(0.0, 0.2, 0.0),
    };
    scene.add_mesh(&torus(0.52, 0.07)?, &tilted, steel, 100_000);
    let (corners, faces) = block([0.38, 0.05, 0.3]);
    let base = Placement { shift: shifted(0.0, -0.42, 0.0), ..tilted };
    scene.add_mesh(&Mesh::faceted(&corners, &faces)?, &base, Colour::rgb(96, 108, 128), 100_001);
    let (corners, faces) = block([0.03, 0.3, 0.03]);
    let post = Placement { shift: shifted(0.0, -0.08, 0.0), ..tilted };
    scene.add_mesh(&Mesh::faceted(&corners, &faces)?, &post, Colour::rgb(214, 140, 90), 100_002);
    let amber = Colour::rgb(240, 190, 90);
    scene.balls.push(Ball { centre: shifted(0.0, 0.27, 0.0), radius: 0.07, colour: amber, rim_alpha: 0, id: 100_003 });
    Ok(())
}

type Surface = (Vec<[f64; 3]>, Vec<[u32; 3]>);

fn block([x, y, z]: [f64; 3]) -> Surface {
    let corners = (0..8).map(|i| {
        let side = |bit: i32, half: f64| if i >> bit & 1 == 1 { half } else { -half };
        [side(0, x), side(1, y), side(2, z)]
    });
    let quads = [[0, 1, 3, 2], [4, 6, 7, 5], [0, 4, 5, 1], [2, 3, 7, 6], [0, 2, 6, 4], [1, 5, 7, 3]];
    let faces = quads.iter().flat_map(|&[a, b, c, d]| [[a, b, c], [a, c, d]]);
    (corners.collect(), faces.collect())
}

fn torus(large: f64, small: f64) -> Result<Mesh, Box<dyn Error>> {
    let (around, across) = (96_u32, 24_u32);
    let mut corners = Vec::new();
    let mut faces = Vec::new();
    for i in 0..around {
        let (sin, cos) = (TAU * f64::from(i) / f64::from(around)).sin_cos();
        for j in 0..across {
            let (high, out) = (TAU * f64::from(j) / f64::from(across)).sin_cos();
            let radius = large + small * out;
            corners.push([radius * cos, radius * sin, small * high]);
            let at = |i: u32, j: u32| (i % around) * across + j % across;
            faces.push([at(i, j), at(i + 1, j), at(i + 1, j + 1)]);
            faces.push([at(i, j), at(i + 1, j + 1), at(i, j + 1)]);
        }
    }
    Ok(Mesh::smooth(&corners, &faces)?)
}
