use crate::colour::Colour;
use crate::eye::{Eye, Lens};
use crate::scene::{Fade, Scene, Size};
use crate::view::View;

/// Light comes from the upper left behind the viewer: right, up, toward the eye; and the direction of the brightest
/// reflection, halfway between the light and the eye. Unit vectors.
const LIGHT: [f32; 3] = [-0.408_671, 0.572_139, 0.711_087];
const HALFWAY: [f32; 3] = [-0.220_914, 0.309_279, 0.924_956];
/// Brightness of a surface turned away from the light, and what full light adds.
const AMBIENT: f32 = 0.46;
const DIFFUSE: f32 = 0.60;
/// Strength of the reflection, in steps of colour.
const SHINE: f32 = 70.0;

/// What all shapes of one picture share. Positions and sizes are in samples.
pub(crate) struct Frame {
    pub view: View,
    pub width: usize,
    pub height: usize,
    pub perspective: bool,
    /// Nearness of a sample that shows nothing.
    pub nothing: f32,
    /// Nearness that is too near to be drawn.
    pub too_near: f32,
    /// Samples along a pixel's side.
    pub samples: f64,
    pub background: Colour,
    fade: Option<Fade>,
}

impl Frame {
    pub fn new(scene: &Scene, eye: &Eye, width: usize, height: usize, samples: usize) -> Self {
        let view = eye.view(width, height);
        let perspective = view.lens == Lens::Perspective;
        let usable = |fade: &Fade| fade.radius.is_finite() && fade.radius > 0.0 && fade.most.is_finite();
        Self {
            width,
            height,
            perspective,
            nothing: if perspective { 0.0 } else { f32::NEG_INFINITY },
            too_near: if perspective { (1.0 / view.near) as f32 } else { f32::INFINITY },
            samples: samples as f64,
            background: scene.background,
            fade: scene.fade.filter(usable),
            view,
        }
    }

    /// A size at some scale, in samples.
    pub fn size(&self, size: Size, samples_per_unit: f64) -> f64 {
        match size {
            Size::World(units) => units * samples_per_unit,
            Size::Pixels(pixels) => pixels * self.samples,
        }
    }

    /// How much of the background is in a colour at this depth.
    pub fn fade_at(&self, depth: f64) -> f32 {
        self.fade.map_or(0.0, |fade| {
            let part = (depth - self.view.target_depth() + fade.radius) / (2.0 * fade.radius);
            (part.clamp(0.0, 1.0) * fade.most.clamp(0.0, 1.0)) as f32
        })
    }

    #[inline]
    pub fn nearness(&self, depth: f32) -> f32 {
        if self.perspective { 1.0 / depth } else { -depth }
    }
}

/// A colour on a surface with this unit normal (right, up, toward the eye).
#[inline]
pub(crate) fn lit([r, g, b]: [u8; 3], normal: [f32; 3]) -> [u8; 3] {
    let along =
        |direction: [f32; 3]| (normal[0] * direction[0] + normal[1] * direction[1] + normal[2] * direction[2]).max(0.0);
    let brightness = AMBIENT + DIFFUSE * along(LIGHT);
    let mirror = along(HALFWAY);
    let mirror = mirror * mirror;
    let mirror = mirror * mirror;
    let mirror = mirror * mirror;
    let mirror = mirror * mirror;
    shaded([r, g, b], brightness, SHINE * mirror * mirror)
}

/// A colour made darker or brighter by a factor, and whiter by steps of colour.
#[inline]
pub(crate) fn shaded(rgb: [u8; 3], brightness: f32, shine: f32) -> [u8; 3] {
    // Far out, where single precision has no digits left, a ball's normal may be anything.
    let factor = (brightness.min(2.0) * 256.0) as u32;
    let shine = shine.min(255.0) as u32;
    rgb.map(|c| ((u32::from(c) * factor) / 256 + shine).min(255) as u8)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn light_directions_are_unit_vectors_and_halfway_is_between() {
        let length = |v: [f32; 3]| v.iter().map(|x| x * x).sum::<f32>().sqrt();
        assert!((length(LIGHT) - 1.0).abs() < 1e-5);
        assert!((length(HALFWAY) - 1.0).abs() < 1e-5);
        let sum = [LIGHT[0], LIGHT[1], LIGHT[2] + 1.0];
        for i in 0..3 {
            assert!((sum[i] / length(sum) - HALFWAY[i]).abs() < 1e-5);
        }
    }

    #[test]
    fn facing_the_light_is_brighter_than_turned_away() {
        let grey = [120; 3];
        let toward_light = lit(grey, LIGHT);
        let away = lit(grey, LIGHT.map(|v| -v));
        assert!(toward_light[0] > 120 && away[0] < 60);
    }
}
