#![allow(clippy::unwrap_used)]

mod depth;
mod robust;
mod walls;

use crate::{Arrow, Ball, Canvas, Colour, Disc, Eye, Lens, Line, Mark, NO_ID, Scene, Size, Triangle, paint};

const BLACK: Colour = Colour::rgb(0, 0, 0);
const RED: Colour = Colour::rgb(220, 0, 0);
const GREEN: Colour = Colour::rgb(0, 220, 0);
const BLUE: Colour = Colour::rgb(0, 0, 220);

fn painted(scene: &Scene, eye: &Eye, width: usize, height: usize, oversampling: usize) -> Canvas {
    let mut canvas = Canvas::new(width, height).unwrap();
    paint(scene, eye, &mut canvas, oversampling);
    canvas
}

fn black() -> Scene {
    Scene { background: BLACK, ..Scene::default() }
}

/// Looks from +z at the origin; one unit is 10 pixels on a canvas 40 pixels high.
fn level_eye() -> Eye {
    let mut eye = Eye::new([0.0; 3], 10.0).unwrap();
    eye.set_field_deg(2.0 * (2.0_f64 / 10.0).atan().to_degrees());
    eye.lens = Lens::Orthographic;
    eye
}

fn disc(centre: [f64; 3], radius: f64, colour: Colour, id: u32) -> Disc {
    Disc { centre, radius: Size::World(radius), colour, id, mark: Mark::Disc }
}

fn line(from: [f64; 3], to: [f64; 3], width_px: f64, colour: Colour, id: u32) -> Line {
    Line { from, to, width_px, colour, dash: None, id }
}

fn triangle(corners: [[f64; 3]; 3], colour: Colour, id: u32) -> Triangle {
    Triangle { corners, normals: [[0.0; 3]; 3], colour, id }
}

fn arrow(from: [f64; 3], to: [f64; 3], colour: Colour, id: u32) -> Arrow {
    Arrow { from, to, width_px: 3.0, head_px: 12.0, colour, id }
}

fn ball(centre: [f64; 3], radius: f64, colour: Colour, id: u32) -> Ball {
    Ball { centre, radius, colour, rim_alpha: 60, id }
}
