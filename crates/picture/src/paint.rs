//! From a scene to pixels. The canvas is cut into bands of rows, painted independently: first everything opaque
//! with a depth test, then everything translucent from far to near, tested against depth but not changing it.
//! How the canvas is cut depends on its size alone, so the picture is the same for any number of threads.

mod bins;
mod frame;
mod shell;
mod spot;
mod strip;
mod stroke;
mod surface;

use rayon::prelude::*;

use crate::canvas::{Canvas, NO_ID};
use crate::eye::Eye;
use crate::scene::{Arrow, Scene};
use bins::{Bins, Shape};
use frame::Frame;
use shell::{Shell, Side};
use spot::Spot;
use strip::Strip;
use stroke::Stroke;
use surface::Face;

/// The finest oversampling: 4 × 4 samples a pixel.
pub const MAX_OVERSAMPLING: usize = 4;

/// Rows of samples in a band: its colour, depth and ids fit into a processor's second cache.
const BAND_SAMPLE_ROWS: usize = 32;

/// Paints the scene over the whole canvas, forgetting what was there.
///
/// With `oversampling` n (1 … [`MAX_OVERSAMPLING`], others are clamped) each pixel's colour is the mean of n × n
/// samples; its depth and id are those of the sample nearest to the eye, so that thin things can be picked. Sizes in
/// pixels mean pixels of the canvas at any oversampling.
pub fn paint(scene: &Scene, eye: &Eye, canvas: &mut Canvas, oversampling: usize) {
    let samples = oversampling.clamp(1, MAX_OVERSAMPLING);
    let (width, height) = (canvas.width(), canvas.height());
    let frame = Frame::new(scene, eye, width * samples, height * samples, samples);
    canvas.nothing = frame.nothing;
    if width == 0 || height == 0 {
        return;
    }
    let rows = (BAND_SAMPLE_ROWS / samples).max(1);
    let layers = Layers::new(scene, &frame, rows * samples);
    let band = rows * width;
    (canvas.colour.par_chunks_mut(band), canvas.nearness.par_chunks_mut(band), canvas.id.par_chunks_mut(band))
        .into_par_iter()
        .enumerate()
        .for_each_init(Scratch::default, |scratch, (index, (colour, nearness, id))| {
            let top = index * rows * samples;
            if samples == 1 {
                let mut strip = Strip::new(width, top, colour, nearness, id);
                strip.clear(&frame);
                layers.draw(index, &frame, &mut strip);
            } else {
                let mut strip = scratch.strip(width * samples, top, colour.len() * samples * samples);
                strip.clear(&frame);
                layers.draw(index, &frame, &mut strip);
                strip.reduce(samples, colour, nearness, id);
            }
        });
}

/// Buffers of samples that one thread uses again and again.
#[derive(Default)]
struct Scratch {
    colour: Vec<[u8; 4]>,
    nearness: Vec<f32>,
    id: Vec<u32>,
}

impl Scratch {
    fn strip(&mut self, width: usize, top: usize, samples: usize) -> Strip<'_> {
        self.colour.resize(samples, [0; 4]);
        self.nearness.resize(samples, 0.0);
        self.id.resize(samples, NO_ID);
        Strip::new(width, top, &mut self.colour, &mut self.nearness, &mut self.id)
    }
}

/// Everything visible, projected and sorted into bands.
struct Layers {
    spots: Bins<Spot>,
    balls: Bins<Shell>,
    strokes: Bins<Stroke>,
    faces: Bins<Face>,
    translucent: Bins<Sheer>,
}

impl Layers {
    fn new(scene: &Scene, frame: &Frame, band_rows: usize) -> Self {
        let (rods, cones) = arrow_parts(&scene.arrows, frame);
        let opaque_faces = Bins::sort(&scene.triangles, frame, band_rows, |triangle, push| {
            if triangle.colour.is_opaque() {
                Face::visible(triangle, frame, push);
            }
        });
        Self {
            spots: Bins::sort(&scene.discs, frame, band_rows, |disc, push| {
                if disc.colour.is_opaque() {
                    Spot::new(disc, frame).map(push);
                }
            }),
            balls: Bins::sort(&scene.balls, frame, band_rows, |ball, push| {
                if ball.colour.is_opaque() {
                    Shell::new(ball, Side::Lit, frame).map(push);
                }
            }),
            strokes: Bins::sort(&scene.lines, frame, band_rows, |line, push| {
                if line.colour.is_opaque() {
                    Stroke::of_line(line, frame).map(push);
                }
            })
            .and(Bins::sort(&rods, frame, band_rows, |rod, push| push(rod.clone()))),
            faces: Bins::sort(&cones, frame, band_rows, |face, push| push(face.clone())).and(opaque_faces),
            translucent: Bins::sort(&sheer_far_to_near(scene, frame), frame, band_rows, |item, push| {
                push(item.clone())
            }),
        }
    }

    fn draw(&self, band: usize, frame: &Frame, strip: &mut Strip<'_>) {
        self.spots.draw_nearest_first(band, frame, strip);
        self.balls.draw(band, frame, strip);
        self.strokes.draw(band, frame, strip);
        self.faces.draw(band, frame, strip);
        self.translucent.draw(band, frame, strip);
    }
}

fn arrow_parts(arrows: &[Arrow], frame: &Frame) -> (Vec<Stroke>, Vec<Face>) {
    let mut rods = Vec::new();
    let mut cones = Vec::new();
    for arrow in arrows {
        rods.extend(Stroke::of_arrow(arrow, frame));
        for triangle in surface::arrow_head(arrow, frame) {
            Face::visible_unfaded(&triangle, frame, &mut |face| cones.push(face));
        }
    }
    (rods, cones)
}

/// Something translucent.
#[derive(Clone)]
enum Sheer {
    Spot(Spot),
    Wall(Box<Shell>),
    Stroke(Stroke),
    Face(Face),
}

impl Shape for Sheer {
    fn rows(&self) -> [f32; 2] {
        match self {
            Self::Spot(spot) => spot.rows(),
            Self::Wall(wall) => wall.rows(),
            Self::Stroke(stroke) => stroke.rows(),
            Self::Face(face) => face.rows(),
        }
    }

    fn depth(&self) -> f32 {
        match self {
            Self::Spot(spot) => spot.depth(),
            Self::Wall(wall) => wall.depth(),
            Self::Stroke(stroke) => stroke.depth(),
            Self::Face(face) => face.depth(),
        }
    }

    fn draw(&self, frame: &Frame, strip: &mut Strip<'_>) {
        match self {
            Self::Spot(spot) => spot.draw(frame, strip),
            Self::Wall(wall) => wall.draw(frame, strip),
            Self::Stroke(stroke) => stroke.draw(frame, strip),
            Self::Face(face) => face.draw(frame, strip),
        }
    }
}

/// All that is translucent, farthest first. The far and the near wall of a ball are separate, so balls within
/// balls come out right; where nothing lies between the two walls they are drawn in one go.
fn sheer_far_to_near(scene: &Scene, frame: &Frame) -> Vec<Sheer> {
    let sheer = |alpha: u8| alpha > 0 && alpha < 255;
    let mut found: Vec<Sheer> = Vec::new();
    found.extend(scene.discs.iter().filter(|d| sheer(d.colour.a)).filter_map(|d| Spot::new(d, frame)).map(Sheer::Spot));
    for ball in scene.balls.iter().filter(|b| !b.colour.is_opaque()) {
        for side in [Side::Far, Side::Near] {
            found.extend(Shell::new(ball, side, frame).map(|wall| Sheer::Wall(Box::new(wall))));
        }
    }
    found.extend(
        scene.lines.iter().filter(|l| sheer(l.colour.a)).filter_map(|l| Stroke::of_line(l, frame)).map(Sheer::Stroke),
    );
    for triangle in scene.triangles.iter().filter(|t| sheer(t.colour.a)) {
        Face::visible(triangle, frame, &mut |face| found.push(Sheer::Face(face)));
    }
    found.sort_by(|a, b| b.depth().total_cmp(&a.depth()));
    let mut joined: Vec<Sheer> = Vec::with_capacity(found.len());
    for item in found {
        if let (Some(Sheer::Wall(far)), Sheer::Wall(near)) = (joined.last_mut(), &item)
            && far.join(near)
        {
            continue;
        }
        joined.push(item);
    }
    joined
}

#[cfg(test)]
mod tests;
