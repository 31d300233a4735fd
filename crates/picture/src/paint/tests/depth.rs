use super::*;
use crate::Dash;
use proptest::prelude::*;

#[derive(Debug, Clone, Copy)]
enum Kind {
    Disc,
    Square,
    Ball,
    Line,
    Triangle,
}

/// Kind, position across and up, and which colour.
type Thing = (Kind, f64, f64, usize);

/// One thing that lies flat, or nearly, at height z; its colour and id go together.
fn put(scene: &mut Scene, kind: Kind, [x, y, z]: [f64; 3], which: usize) {
    let (colour, id) = [(RED, 0), (GREEN, 1), (BLUE, 2)][which];
    match kind {
        Kind::Disc => scene.discs.push(disc([x, y, z], 0.7, colour, id)),
        Kind::Square => scene.discs.push(Disc { mark: Mark::Square, ..disc([x, y, z], 0.7, colour, id) }),
        Kind::Ball => scene.balls.push(ball([x, y, z], 0.7, colour, id)),
        Kind::Line => scene.lines.push(line([x - 1.0, y, z], [x + 1.0, y + 0.3, z], 4.0, colour, id)),
        Kind::Triangle => scene.triangles.push(triangle([[x, y, z], [x + 1.5, y, z], [x, y + 1.5, z]], colour, id)),
    }
}

fn kind() -> impl Strategy<Value = Kind> {
    prop_oneof![Just(Kind::Disc), Just(Kind::Square), Just(Kind::Ball), Just(Kind::Line), Just(Kind::Triangle)]
}

proptest! {
    #![proptest_config(crate::testing::cases())]

    #[test]
    fn order_of_submission_does_not_matter_and_ids_are_what_is_seen(
        things in prop::collection::vec((kind(), -1.5..1.5_f64, -1.5..1.5_f64, 0..3_usize), 2..9)
            .prop_flat_map(|things| (Just(things.clone()), Just(things.into_iter().enumerate().collect::<Vec<_>>()).prop_shuffle())),
        oversampling in 1..3_usize,
    ) {
        // Heights 1.5 apart: no two surfaces touch, balls included, so there is no tie.
        let build = |list: &[(usize, Thing)]| {
            let mut scene = black();
            for &(rank, (kind, x, y, which)) in list {
                put(&mut scene, kind, [x, y, rank as f64 * 1.5 - 6.0], which);
            }
            painted(&scene, &level_eye(), 40, 40, oversampling)
        };
        let (things, shuffled) = things;
        let straight: Vec<_> = things.into_iter().enumerate().collect();
        let canvas = build(&straight);
        prop_assert!(canvas == build(&shuffled));
        for y in 0..40 {
            for x in 0..40 {
                let [r, g, b, a] = canvas.colour_at(x, y).unwrap();
                prop_assert_eq!(a, 255);
                match canvas.id_at(x, y) {
                    None => prop_assert_eq!([r, g, b], [0, 0, 0]),
                    // With one sample a pixel, exactly the owner's colour shows (and white shine).
                    Some(id) if oversampling == 1 => {
                        let most = [r, g, b][id as usize];
                        prop_assert!(most > 60 && most == r.max(g).max(b), "id {} at {:?}", id, [r, g, b]);
                    }
                    Some(id) => prop_assert!([r, g, b][id as usize] > 0),
                }
            }
        }
    }

    #[test]
    fn crossing_triangles_split_where_they_meet(tilt in -0.9..0.9_f64, perspective: bool) {
        // A wall facing the viewer at z = 0 and a wall turned about y: the right half of one is nearer.
        prop_assume!(tilt.abs() > 0.05);
        let mut scene = black();
        let big = 30.0;
        scene.triangles.push(triangle([[-big, -big, 0.0], [big, -big, 0.0], [0.0, big, 0.0]], RED, 0));
        let z = big * tilt;
        scene.triangles.push(triangle([[-big, -big, -z], [big, -big, z], [0.0, big, 0.0]], GREEN, 1));
        let mut eye = level_eye();
        if perspective {
            eye.lens = Lens::Perspective;
        }
        let canvas = painted(&scene, &eye, 40, 40, 1);
        for x in 0..40 {
            let right = x as f64 + 0.5 - 20.0;
            let expected = u32::from(right * tilt > 0.0);
            prop_assert_eq!(canvas.id_at(x, 25), Some(expected), "column {}", x);
        }
    }

    #[test]
    fn a_floor_ends_at_the_horizon(pitch in 0.05..1.2_f64, yaw in 0.0..6.2_f64) {
        // A huge triangle in the plane y = −1 with corners far behind the eye: each pixel by ray and plane.
        let mut scene = black();
        scene.triangles.push(triangle([[-4e3, -1.0, -4e3], [4e3, -1.0, -4e3], [0.0, -1.0, 8e3]], RED, 5));
        let mut eye = Eye::default();
        eye.orbit(yaw, pitch);
        let canvas = painted(&scene, &eye, 60, 40, 1);
        let view = eye.view(60, 40);
        for y in 0..40 {
            for x in 0..60 {
                let ray = view.ray(x as f64 + 0.5, y as f64 + 0.5).unwrap();
                let t = (-1.0 - ray.origin[1]) / ray.direction[1];
                let hit = [0, 2].map(|i| ray.origin[i] + t * ray.direction[i]);
                let far = hit[0].hypot(hit[1]);
                // Safely inside the triangle, or safely without floor.
                if t > 0.01 && far < 1.5e3 {
                    prop_assert_eq!(canvas.id_at(x, y), Some(5));
                    // Corners snap to 1/256 pixel, which tilts the floor by about that.
                    let depth = view.depth_from_nearness(f64::from(canvas.nearness_at(x, y).unwrap()));
                    let point = view.point_at_depth(x as f64 + 0.5, y as f64 + 0.5, depth).unwrap();
                    prop_assert!((point[1] + 1.0).abs() < 1e-3 * (1.0 + far), "{:?}", point);
                } else if t < 0.0 {
                    prop_assert_eq!(canvas.id_at(x, y), None);
                }
            }
        }
    }
}

#[test]
fn a_disc_has_the_depth_of_a_ball() {
    let mut scene = black();
    scene.discs.push(disc([0.0; 3], 1.0, RED, 1));
    let canvas = painted(&scene, &level_eye(), 40, 40, 1);
    for x in 10..30 {
        let right = (x as f64 + 0.5 - 20.0) / 10.0;
        let down: f64 = 0.05;
        let expected = (1.0 - right * right - down * down).sqrt() - 10.0;
        let found = f64::from(canvas.nearness_at(x, 20).unwrap());
        assert!((found - expected).abs() < 1e-5, "column {x}: {found} for {expected}");
    }
    assert_eq!(canvas.nearness_at(9, 20), None);
}

#[test]
fn rings_are_hollow_and_marks_differ() {
    let shape = |mark| {
        let mut scene = black();
        scene.discs.push(Disc { mark, ..disc([0.0; 3], 1.0, RED, 1) });
        let canvas = painted(&scene, &level_eye(), 40, 40, 1);
        (0..1600).map(|i| canvas.id_at(i % 40, i / 40).is_some()).collect::<Vec<_>>()
    };
    let marks =
        [Mark::Disc, Mark::Ring, Mark::Square, Mark::Diamond, Mark::Triangle, Mark::Wedge, Mark::Bar].map(shape);
    assert!(marks[0][20 * 40 + 20] && !marks[1][20 * 40 + 20] && marks[1][20 * 40 + 11]);
    for i in 0..5 {
        for j in 0..i {
            let different = marks[i].iter().zip(&marks[j]).filter(|(a, b)| a != b).count();
            assert!(different >= 20, "marks {i} and {j} differ in {different} pixels");
        }
    }
}

#[test]
fn the_smallest_mark_still_shows() {
    for step in 0..10 {
        let mut scene = black();
        let shift = f64::from(step) * 0.0137;
        scene.discs.push(Disc { radius: Size::Pixels(1e-9), ..disc([shift, shift * 0.7, 0.0], 1.0, RED, 3) });
        let canvas = painted(&scene, &level_eye(), 40, 40, 1);
        assert!(canvas.pick(20.0 + shift * 10.0, 20.0 - shift * 7.0, 1.0) == Some(3), "step {step}");
    }
}

#[test]
fn lines_are_as_wide_and_as_broken_as_asked() {
    let mut scene = black();
    scene.lines.push(line([-1.5, 0.0, 0.0], [1.5, 0.0, 0.0], 4.0, GREEN, 7));
    let count = |scene: &Scene, x: usize| {
        let canvas = painted(scene, &level_eye(), 40, 40, 1);
        (0..40).filter(|&y| canvas.id_at(x, y) == Some(7)).count()
    };
    assert_eq!(count(&scene, 20), 4);
    scene.lines[0].dash = Some(Dash { on_px: 5.0, off_px: 5.0 });
    // The line begins at column 5: drawn in 5 … 10, gap in 10 … 15, and so on.
    assert_eq!([7, 12, 17, 22].map(|x| count(&scene, x)), [4, 0, 4, 0]);
    // The pattern is fixed to the line, also when its beginning is far outside.
    scene.lines[0].from[0] = -1000.5;
    assert_eq!([7, 12, 17, 22].map(|x| count(&scene, x)), [4, 0, 4, 0]);
}

#[test]
fn a_line_from_behind_the_eye_is_cut_at_the_eye() {
    let mut scene = black();
    scene.lines.push(line([0.3, 0.0, 50.0], [0.0, 0.0, 0.0], 2.0, GREEN, 7));
    let canvas = painted(&scene, &Eye::default(), 40, 40, 1);
    assert_eq!(canvas.id_at(20, 20), Some(7));
    assert!((30..40).any(|x| canvas.id_at(x, 20) == Some(7)), "leaves the picture at the right");
    assert!((0..18).all(|x| (0..40).all(|y| canvas.id_at(x, y).is_none())));
}

#[test]
fn an_arrow_is_widest_at_its_head_and_ends_at_its_tip() {
    let mut scene = black();
    scene.arrows.push(arrow([-1.5, 0.0, 0.0], [1.5, 0.0, 0.0], BLUE, 9));
    let canvas = painted(&scene, &level_eye(), 40, 40, 1);
    let height = |x: usize| (0..40).filter(|&y| canvas.id_at(x, y) == Some(9)).count();
    // Head of 12 px from column 23 to 35, base 2 × 0.34 × 12 px wide; rod of 3 px before it.
    assert!(height(24) >= 7 && height(30) < height(24) && height(10) <= 4 && height(10) >= 3);
    assert!(height(33) >= 1 && height(36) == 0);
}

#[test]
fn distant_things_fade() {
    let mut scene = Scene { background: Colour::rgb(255, 255, 255), ..Scene::default() };
    scene.fade = Some(crate::Fade { radius: 2.0, most: 0.8 });
    scene.lines.push(line([-1.0, 1.0, 2.0], [1.0, 1.0, 2.0], 4.0, BLACK, 1));
    scene.lines.push(line([-1.0, 0.0, 0.0], [1.0, 0.0, 0.0], 4.0, BLACK, 2));
    scene.lines.push(line([-1.0, -1.0, -2.0], [1.0, -1.0, -2.0], 4.0, BLACK, 3));
    scene.arrows.push(arrow([-1.0, -0.5, -2.0], [1.0, -0.5, -2.0], BLACK, 4));
    let canvas = painted(&scene, &level_eye(), 40, 40, 1);
    assert!(canvas.colour_at(20, 25).unwrap()[0] < 80, "an arrow keeps its colour");
    let grey = [10, 20, 30].map(|y| canvas.colour_at(20, y).unwrap()[0]);
    assert_eq!(grey, [0, 102, 204], "0, 0.4 and 0.8 of white");
}
