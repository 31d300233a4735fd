#![allow(clippy::unwrap_used)]
use super::*;
use crate::Colour;
use proptest::prelude::*;

const EVERYWHERE: [f32; 4] = [-1e9, -1e9, 1e9, 1e9];

fn white() -> Texture {
    Texture::new(1, 1, vec![[255; 4]]).unwrap()
}

fn vertex(x: f32, y: f32, uv: [f32; 2], colour: [u8; 4]) -> FlatVertex {
    FlatVertex { position: [x, y], uv, colour }
}

/// A rectangle as two triangles with the whole texture on it.
fn quad([left, top, right, bottom]: [f32; 4], colour: [u8; 4]) -> [FlatVertex; 4] {
    [
        vertex(left, top, [0.0, 0.0], colour),
        vertex(right, top, [1.0, 0.0], colour),
        vertex(right, bottom, [1.0, 1.0], colour),
        vertex(left, bottom, [0.0, 1.0], colour),
    ]
}

const QUAD: [u32; 6] = [0, 1, 2, 0, 2, 3];

fn canvas(width: usize, height: usize) -> Canvas {
    let mut canvas = Canvas::new(width, height).unwrap();
    canvas.clear(Colour::rgb(0, 0, 0));
    canvas
}

fn painted(vertices: &[FlatVertex], indices: &[u32], texture: &Texture, clip: [f32; 4]) -> Canvas {
    let mut canvas = canvas(20, 40);
    paint_flat(&[FlatMesh { clip, vertices, indices, texture }], &mut canvas);
    canvas
}

#[test]
fn a_shared_edge_is_painted_once_at_half_alpha() {
    let canvas = painted(&quad([0.0, 0.0, 20.0, 40.0], [128, 128, 128, 128]), &QUAD, &white(), EVERYWHERE);
    assert!(canvas.rgba().iter().all(|&pixel| pixel == [128, 128, 128, 255]), "neither a seam nor a gap");
    // The same with a colour that varies by one step, which takes the general road.
    let mut vertices = quad([0.0, 0.0, 20.0, 40.0], [128, 128, 128, 128]);
    vertices[2].uv = [0.5, 0.5];
    let canvas = painted(&vertices, &QUAD, &white(), EVERYWHERE);
    assert!(canvas.rgba().iter().all(|&pixel| pixel == [128, 128, 128, 255]));
}

#[test]
fn clip_rectangles_are_rounded_and_honoured() {
    let canvas = painted(&quad([-5.0, -5.0, 50.0, 50.0], [255; 4]), &QUAD, &white(), [3.4, 30.6, 7.5, 36.2]);
    for y in 0..40 {
        for x in 0..20 {
            let inside = (3..8).contains(&x) && (31..36).contains(&y);
            assert_eq!(canvas.colour_at(x, y).unwrap()[0], if inside { 255 } else { 0 }, "{x} {y}");
        }
    }
}

#[test]
fn alpha_of_a_clear_canvas_adds_up() {
    let mut canvas = Canvas::new(4, 4).unwrap();
    let texture = white();
    let vertices = quad([0.0, 0.0, 4.0, 4.0], [64, 0, 0, 128]);
    let mesh = FlatMesh { clip: EVERYWHERE, vertices: &vertices, indices: &QUAD, texture: &texture };
    paint_flat(&[mesh, mesh], &mut canvas);
    // 128 + 128 × 127/255 = 191.75 and 64 + 64 × 127/255 = 95.87.
    assert_eq!(canvas.colour_at(1, 1), Some([96, 0, 0, 192]));
}

#[test]
fn texels_are_multiplied_by_the_vertex_colour_in_gamma_space() {
    let texture = Texture::new(1, 1, vec![[100, 200, 50, 255]]).unwrap();
    let canvas = painted(&quad([0.0, 0.0, 20.0, 40.0], [128, 51, 255, 255]), &QUAD, &texture, EVERYWHERE);
    // 100 × 128/255 = 50.2, 200 × 51/255 = 40, 50.
    assert_eq!(canvas.colour_at(10, 10), Some([50, 40, 50, 255]));
}

#[test]
fn one_texel_a_pixel_comes_out_unchanged_with_either_filter() {
    let texels: Vec<[u8; 4]> =
        (0..800_u32).map(|i| [(i % 251) as u8, (i * 7 % 256) as u8, (i * 13 % 256) as u8, 255]).collect();
    for filter in [Filter::Nearest, Filter::Linear] {
        let mut texture = Texture::new(20, 40, texels.clone()).unwrap();
        texture.filter = filter;
        let canvas = painted(&quad([0.0, 0.0, 20.0, 40.0], [255; 4]), &QUAD, &texture, EVERYWHERE);
        assert_eq!(canvas.rgba(), &texels, "{filter:?}");
    }
}

#[test]
fn filters_differ_between_texels() {
    let mut texture = Texture::new(2, 1, vec![[0, 0, 0, 255], [200, 200, 200, 255]]).unwrap();
    let grey = |texture: &Texture, u: f32| texture.sample([u, 0.5]).tinted([255.0; 4])[0];
    assert_eq!([0.1, 0.25, 0.5, 0.75, 0.9].map(|u| grey(&texture, u)), [0, 0, 100, 200, 200]);
    texture.filter = Filter::Nearest;
    assert_eq!([0.1, 0.49, 0.51, 0.9].map(|u| grey(&texture, u)), [0, 0, 200, 200]);
}

#[test]
fn wrapping_goes_on_beyond_the_edges() {
    let texels = [10, 20, 30].map(|grey| [grey, grey, grey, 255]).to_vec();
    let mut texture = Texture::new(3, 1, texels).unwrap();
    texture.filter = Filter::Nearest;
    let mut read = |wrap: Wrap| {
        texture.wrap = wrap;
        [-2, -1, 0, 2, 3, 4, 6].map(|i| texture.sample([(i as f32 + 0.5) / 3.0, 0.5]).tinted([255.0; 4])[0])
    };
    assert_eq!(read(Wrap::Edge), [10, 10, 10, 30, 30, 30, 30]);
    assert_eq!(read(Wrap::Repeat), [20, 30, 10, 30, 10, 20, 10]);
    assert_eq!(read(Wrap::Mirror), [20, 10, 10, 30, 30, 20, 10]);
}

#[test]
fn vertex_colours_run_from_corner_to_corner() {
    let mut vertices = quad([0.0, 0.0, 20.0, 40.0], [0, 0, 0, 255]);
    for i in [1, 2] {
        vertices[i].colour = [200, 200, 200, 255];
    }
    let canvas = painted(&vertices, &QUAD, &white(), EVERYWHERE);
    for x in 0..20 {
        // 200 × (x + ½)/20
        let expected = 10.0 * (x as f64 + 0.5);
        let found = f64::from(canvas.colour_at(x, 17).unwrap()[0]);
        assert!((found - expected).abs() <= 0.51, "{x}: {found}");
    }
}

#[test]
fn patches_replace_texels_and_must_fit() {
    let mut texture = Texture::new(3, 3, vec![[0; 4]; 9]).unwrap();
    let patch = Texture::new(2, 1, vec![[1; 4], [2; 4]]).unwrap();
    texture.patch(1, 2, &patch).unwrap();
    let expected = [0, 0, 0, 0, 0, 0, 0, 1, 2].map(|v| [v; 4]).to_vec();
    assert_eq!(texture, Texture::new(3, 3, expected).unwrap());
    assert!(matches!(texture.patch(2, 0, &patch), Err(TextureError::Patch { x: 2, .. })));
    assert!(texture.patch(usize::MAX, 0, &patch).is_err());
    assert!(matches!(Texture::new(2, 2, vec![[0; 4]; 3]), Err(TextureError::Size { texels: 3, .. })));
    assert!(Texture::new(0, 0, Vec::new()).is_err());
}

#[test]
fn a_missing_corner_leaves_its_triangle_out() {
    let canvas = painted(&quad([0.0, 0.0, 20.0, 40.0], [255; 4]), &[0, 1, 2, 0, 2, 9, 1], &white(), EVERYWHERE);
    assert_eq!(canvas.colour_at(19, 0).unwrap()[0], 255);
    assert_eq!(canvas.colour_at(0, 39).unwrap()[0], 0);
}

fn any_number() -> impl Strategy<Value = f32> {
    prop_oneof![prop::num::f32::ANY, -5.0..45.0_f32]
}

proptest! {
    #![proptest_config(crate::testing::cases())]

    #[test]
    fn nothing_panics_and_threads_do_not_matter(
        corners in prop::collection::vec((any_number(), any_number(), [any_number(), any_number()], any::<[u8; 4]>()), 3..12),
        indices in prop::collection::vec(0..13_u32, 0..30),
        clip in prop::array::uniform4(any_number()),
        nearest: bool,
        size in (0..30_usize, 0..80_usize),
    ) {
        let vertices: Vec<FlatVertex> = corners.iter().map(|&(x, y, uv, colour)| vertex(x, y, uv, colour)).collect();
        let mut texture = Texture::new(2, 2, vec![[255; 4], [9; 4], [80, 20, 0, 90], [0; 4]]).unwrap();
        for wrap in [Wrap::Edge, Wrap::Repeat, Wrap::Mirror] {
            texture.wrap = wrap;
            texture.filter = if nearest { Filter::Nearest } else { Filter::Linear };
            let on = |threads: usize| {
                let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
                let mut canvas = canvas(size.0, size.1);
                let mesh = FlatMesh { clip, vertices: &vertices, indices: &indices, texture: &texture };
                pool.install(|| paint_flat(&[mesh], &mut canvas));
                canvas
            };
            prop_assert!(on(1) == on(2));
        }
    }
}
