use super::*;
use crate::{Circle, Dash, Fade, Mesh, Placement};
use proptest::prelude::*;

fn any_float() -> impl Strategy<Value = f64> {
    prop_oneof![
        prop::num::f64::ANY,
        -2.0..2.0_f64,
        prop::sample::select(vec![
            0.0,
            -0.0,
            1e-300,
            1e30,
            -1e30,
            1e200,
            f64::MAX,
            f64::INFINITY,
            f64::NEG_INFINITY,
            f64::NAN
        ]),
    ]
}

fn any_place() -> impl Strategy<Value = [f64; 3]> {
    prop::array::uniform3(any_float())
}

fn any_colour() -> impl Strategy<Value = Colour> {
    prop_oneof![Just(RED), any::<[u8; 4]>().prop_map(|[r, g, b, a]| Colour { r, g, b, a })]
}

fn any_scene() -> impl Strategy<Value = Scene> {
    let thing = (prop::array::uniform3(any_place()), any_float(), any_float(), any_colour(), 0..12_u32);
    (prop::collection::vec(thing, 0..12), any_float(), any_float(), any_colour()).prop_map(
        |(things, fade_radius, most, background)| {
            let mut scene = Scene { background, fade: Some(Fade { radius: fade_radius, most }), ..Scene::default() };
            for (corners @ [from, to, third], size, other, colour, id) in things {
                let marks =
                    [Mark::Disc, Mark::Ring, Mark::Square, Mark::Diamond, Mark::Triangle, Mark::Wedge, Mark::Bar];
                let mark = marks[id as usize % 5];
                let radius = if id % 2 == 0 { Size::World(size) } else { Size::Pixels(size) };
                let dash = Some(Dash { on_px: size, off_px: other });
                let broken = Line { dash, ..line(from, to, other, colour, id) };
                match id {
                    0..=4 => scene.discs.push(Disc { centre: from, radius, colour, id, mark }),
                    5 => scene.balls.push(ball(from, size, colour, id)),
                    6 => scene.lines.push(broken),
                    7 => scene.arrows.push(Arrow { from, to, width_px: size, head_px: other, colour, id }),
                    8 => scene.add_circle(Circle { centre: from, normal: to, radius: size }, broken),
                    9 => {
                        let placement = Placement { rotation_rows: corners, shift: third };
                        scene.add_mesh(&Mesh::smooth(&corners, &[[0, 1, 2]]).unwrap(), &placement, colour, id);
                    }
                    _ => scene.triangles.push(Triangle { corners, normals: [third, from, to], colour, id }),
                }
            }
            scene
        },
    )
}

fn any_eye() -> impl Strategy<Value = Eye> {
    (any_place(), any_float(), [any_float(), any_float()], any_float(), any_place(), any_place(), any::<bool>())
        .prop_map(|(target, distance, turn, field, along, up, orthographic)| {
            let mut eye = Eye::new(target, distance).unwrap_or_default();
            if orthographic {
                eye.lens = Lens::Orthographic;
            }
            eye.set_field_deg(field);
            // Refused or followed, both are fine here.
            let _ = eye.look_along(along, up);
            eye.orbit(turn[0], turn[1]);
            eye.pan(turn[1], field, 100);
            eye.zoom_at(distance, turn[0], field, 100, 100);
            eye
        })
}

proptest! {
    #![proptest_config(crate::testing::cases())]

    #[test]
    fn nothing_panics_and_ids_are_from_the_scene(
        scene in any_scene(), eye in any_eye(), width in 0..40_usize, height in 0..70_usize, oversampling in 0..6_usize,
    ) {
        let canvas = painted(&scene, &eye, width, height, oversampling);
        prop_assert!(canvas.id.iter().all(|&id| id == NO_ID || id < 12));
        prop_assert!(canvas.nearness.iter().all(|n| !n.is_nan()));
        // Premultiplied colours never exceed their alpha.
        prop_assert!(canvas.rgba().iter().all(|&[r, g, b, a]| r <= a && g <= a && b <= a));
        let view = eye.view(width, height);
        for disc in &scene.discs {
            let seen = view.project(disc.centre);
            prop_assert!(seen.is_none_or(|s| s.depth.is_finite()));
        }
    }

    #[test]
    fn the_picture_does_not_depend_on_threads(scene in any_scene(), eye in any_eye(), oversampling in 1..3_usize) {
        let on = |threads: usize| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
            pool.install(|| painted(&scene, &eye, 50, 150, oversampling))
        };
        prop_assert!(on(1) == on(3));
    }
}

#[test]
fn thousands_of_nodes_are_the_same_on_one_and_many_threads() {
    // More than one chunk, many at the same depth, so that ties would show.
    let mut scene = black();
    for i in 0..12_000_u32 {
        let [x, y, z] = [i % 40, (i / 40) % 30, i / 1200].map(f64::from);
        let colour = [RED, GREEN, BLUE.with_alpha(90)][i as usize % 3];
        scene.discs.push(disc([x * 0.1 - 2.0, y * 0.1 - 1.5, z * 0.1], 0.09, colour, i));
    }
    let on = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
        pool.install(|| painted(&scene, &level_eye(), 90, 140, 1))
    };
    let one = on(1);
    assert!(one == on(2) && one == on(5));
    assert!((0..140).any(|y| one.id_at(45, y).is_some()));
}

#[test]
fn a_second_picture_forgets_the_first_also_with_another_lens() {
    let mut scene = black();
    scene.discs.push(disc([0.0; 3], 1.0, RED, 1));
    let eyes = [level_eye(), Eye::default()];
    let mut reused = Canvas::new(40, 40).unwrap();
    for eye in [eyes[0], eyes[1], eyes[0]] {
        paint(&scene, &eye, &mut reused, 1);
        assert_eq!(reused, painted(&scene, &eye, 40, 40, 1));
    }
    paint(&black(), &eyes[1], &mut reused, 1);
    assert_eq!(reused.nearness_at(20, 20), None);
}

#[test]
fn oversampling_smooths_colours_and_keeps_thin_things_pickable() {
    let mut scene = black();
    // A flat wall whose edge runs through the middle of column 20.
    let right = [[0.05, -9.0, 0.0], [9.0, -9.0, 0.0], [0.05, 9.0, 0.0]];
    scene.triangles.push(triangle(right, RED, 1));
    let canvas = painted(&scene, &level_eye(), 40, 40, 2);
    let [edge, inside] = [20, 22].map(|x| u32::from(canvas.colour_at(x, 20).unwrap()[0]));
    assert_eq!(edge, inside.div_ceil(2), "half of the samples");
    assert_eq!(canvas.id_at(20, 20), Some(1));
    assert_eq!(canvas.colour_at(19, 20).unwrap(), [0, 0, 0, 255]);
    // Positions and sizes in pixels do not depend on the samples.
    let mut mark = black();
    mark.discs.push(Disc { radius: Size::Pixels(8.0), ..disc([0.0; 3], 1.0, RED, 2) });
    for oversampling in [1, 2, 3, 4] {
        let canvas = painted(&mark, &level_eye(), 40, 40, oversampling);
        let across = (0..40).filter(|&x| canvas.id_at(x, 20).is_some()).count();
        assert_eq!(across, 16, "{oversampling} x");
    }
}
