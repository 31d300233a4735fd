use std::time::Duration;

use egui::{Color32, ColorImage, Context, TextureHandle, TextureOptions};
use ringwright_picture::{Canvas, Eye, Scene, paint};

use super::nodes::Nodes;
use super::scene::{Look, build};

/// The scene, its canvas and its texture, each made again only when what it depends on has changed.
#[derive(Default)]
pub(super) struct Picture {
    scene: Scene,
    look: Option<Look>,
    canvas: Option<Canvas>,
    texture: Option<TextureHandle>,
    painted: Option<Painted>,
    /// When the picture last changed, in seconds of egui's clock.
    changed_s: f64,
}

#[derive(Debug, Clone, Copy, PartialEq)]
struct Painted {
    eye: Eye,
    size_px: [usize; 2],
    oversampling: usize,
}

/// Samples per pixel side once the picture stands still.
const STILL_OVERSAMPLING: usize = 2;
/// How long it must stand still before it is painted finely.
const STILL_S: f64 = 0.12;

impl Picture {
    /// Forgets the scene, because the nodes are others.
    pub fn forget(&mut self) {
        self.look = None;
    }

    /// Brings the texture up to date.
    pub fn update(&mut self, ctx: &Context, nodes: &Nodes, look: &Look, eye: &Eye, size_px: [usize; 2]) {
        let now_s = ctx.input(|input| input.time);
        if self.look.as_ref() != Some(look) {
            build(nodes, look, &mut self.scene);
            self.look = Some(*look);
            self.painted = None;
        }
        let coarse = Painted { eye: *eye, size_px, oversampling: 1 };
        let fine = Painted { oversampling: STILL_OVERSAMPLING, ..coarse };
        if self.painted != Some(coarse) && self.painted != Some(fine) {
            self.changed_s = now_s;
            self.paint(ctx, coarse);
        } else if self.painted == Some(coarse) && now_s - self.changed_s >= STILL_S {
            self.paint(ctx, fine);
        }
        if self.painted == Some(coarse) {
            ctx.request_repaint_after(Duration::from_secs_f64(STILL_S));
        }
    }

    fn paint(&mut self, ctx: &Context, wanted: Painted) {
        let [width, height] = wanted.size_px;
        if self.canvas.as_ref().is_none_or(|c| [c.width(), c.height()] != wanted.size_px) {
            self.canvas = Canvas::new(width, height).ok();
        }
        let Some(canvas) = &mut self.canvas else { return };
        paint(&self.scene, &wanted.eye, canvas, wanted.oversampling);
        let pixels = canvas.rgba().iter().map(|&[r, g, b, a]| Color32::from_rgba_premultiplied(r, g, b, a)).collect();
        let image = ColorImage::new(wanted.size_px, pixels);
        match &mut self.texture {
            Some(texture) => texture.set(image, TextureOptions::NEAREST),
            None => self.texture = Some(ctx.load_texture("reciprocal lattice", image, TextureOptions::NEAREST)),
        }
        self.painted = Some(wanted);
    }

    pub fn texture(&self) -> Option<&TextureHandle> {
        self.texture.as_ref()
    }

    /// The row of the table whose node is seen at a position in pixels of the canvas.
    pub fn row_at(&self, x: f64, y: f64, reach_px: f64) -> Option<usize> {
        self.canvas.as_ref()?.pick(x, y, reach_px).map(|id| id as usize)
    }

    /// Whether the last picture was painted finely.
    #[cfg(test)]
    pub fn is_fine(&self) -> bool {
        self.painted.is_some_and(|painted| painted.oversampling > 1)
    }
}
