//! Pictures of the interface for tests, painted without a driver, so that they are the same on every machine.

use std::collections::HashMap;

use egui::epaint::{Primitive, TextureId, textures::TexturesDelta};
use egui::{Context, FullOutput, ImageData, TextureOptions, TextureWrapMode};
use egui_kittest::TestRenderer;
use image::RgbaImage;
use ringwright_picture::flat::{Filter, FlatMesh, FlatVertex, Texture, Wrap, paint_flat};
use ringwright_picture::{Canvas, Colour};

/// Renders what egui shows with the project's own software renderer.
#[derive(Debug, Default)]
pub struct SoftwareRenderer {
    textures: HashMap<TextureId, Texture>,
}

impl TestRenderer for SoftwareRenderer {
    fn handle_delta(&mut self, delta: &mut TexturesDelta) {
        // A texture that is freed in the frame is not drawn again, and one that is made in it comes before.
        for (id, images) in delta.set.drain() {
            for image in images {
                let ImageData::Color(pixels) = &image.image;
                let texels = pixels.pixels.iter().map(|c| c.to_array()).collect();
                let Ok(mut texture) = Texture::new(pixels.size[0], pixels.size[1], texels) else { continue };
                (texture.filter, texture.wrap) = look(image.options);
                match (image.pos, self.textures.get_mut(&id)) {
                    (Some([x, y]), Some(whole)) => whole.patch(x, y, &texture).unwrap(),
                    (Some(_), None) => panic!("a patch for a texture that was never set: {id:?}"),
                    (None, _) => {
                        self.textures.insert(id, texture);
                    }
                }
            }
        }
        for id in delta.free.drain() {
            self.textures.remove(&id);
        }
    }

    fn render(&mut self, ctx: &Context, output: &FullOutput) -> Result<RgbaImage, String> {
        let scale = output.pixels_per_point;
        let size = ctx.content_rect().size() * scale;
        let (width, height) = (size.x.round() as usize, size.y.round() as usize);
        let mut canvas = Canvas::new(width, height).map_err(|e| e.to_string())?;
        canvas.clear(Colour::rgb(0, 0, 0));
        for primitive in ctx.tessellate(output.shapes.clone(), scale) {
            let Primitive::Mesh(mesh) = &primitive.primitive else { continue };
            let texture = self.textures.get(&mesh.texture_id).ok_or_else(|| format!("no {:?}", mesh.texture_id))?;
            let vertices: Vec<FlatVertex> = mesh
                .vertices
                .iter()
                .map(|v| FlatVertex {
                    position: [v.pos.x * scale, v.pos.y * scale],
                    uv: [v.uv.x, v.uv.y],
                    colour: v.color.to_array(),
                })
                .collect();
            let clip = primitive.clip_rect;
            let clip = [clip.left(), clip.top(), clip.right(), clip.bottom()].map(|edge| edge * scale);
            paint_flat(&[FlatMesh { clip, vertices: &vertices, indices: &mesh.indices, texture }], &mut canvas);
        }
        RgbaImage::from_raw(width as u32, height as u32, canvas.straight_rgba_bytes())
            .ok_or_else(|| "the picture has the wrong size".to_owned())
    }
}

fn look(options: TextureOptions) -> (Filter, Wrap) {
    let filter = match options.magnification {
        egui::TextureFilter::Nearest => Filter::Nearest,
        egui::TextureFilter::Linear => Filter::Linear,
    };
    let wrap = match options.wrap_mode {
        TextureWrapMode::ClampToEdge => Wrap::Edge,
        TextureWrapMode::Repeat => Wrap::Repeat,
        TextureWrapMode::MirroredRepeat => Wrap::Mirror,
    };
    (filter, wrap)
}
