use super::*;
use crate::Ray;
use crate::colour::over;
use proptest::prelude::*;

/// Where a ray enters and leaves a ball, along the ray.
fn cut(ray: &Ray, centre: [f64; 3], radius: f64) -> Option<[f64; 2]> {
    let to: [f64; 3] = std::array::from_fn(|i| centre[i] - ray.origin[i]);
    let along: f64 = (0..3).map(|i| to[i] * ray.direction[i]).sum();
    let square: f64 = to.iter().map(|v| v * v).sum::<f64>() - along * along;
    let half = radius * radius - square;
    (half > 0.0).then(|| [along - half.sqrt(), along + half.sqrt()])
}

const SHELL: Colour = Colour::rgb(0, 90, 255).with_alpha(70);

proptest! {
    #![proptest_config(crate::testing::cases())]

    /// A translucent ball around the origin and an opaque one that it may cut, pixel by pixel against a ray caster.
    #[test]
    fn a_translucent_wall_tints_exactly_what_is_behind_it(
        centre in prop::array::uniform3(-1.2..1.2_f64),
        radius in 0.1..0.6_f64,
        yaw in 0.0..6.2_f64, pitch in -1.4..1.4_f64, distance in 3.0..9.0_f64,
        orthographic: bool,
    ) {
        let mut eye = Eye::new([0.0; 3], distance).unwrap();
        eye.orbit(yaw, pitch);
        eye.lens = if orthographic { Lens::Orthographic } else { Lens::Perspective };
        let mut bare = black();
        bare.balls.push(ball(centre, radius, RED, 4));
        let mut both = bare.clone();
        both.balls.insert(0, Ball { rim_alpha: 0, ..ball([0.0; 3], 1.0, SHELL, 5) });
        let (bare, both) = (painted(&bare, &eye, 64, 48, 1), painted(&both, &eye, 64, 48, 1));
        let view = eye.view(64, 48);
        let tint = SHELL.premultiplied();
        for y in 0..48 {
            for x in 0..64 {
                let ray = view.ray(x as f64 + 0.5, y as f64 + 0.5).unwrap();
                let (solid, shell) = (cut(&ray, centre, radius), cut(&ray, [0.0; 3], 1.0));
                // Within this of a rim or of each other, single precision may decide either way.
                let grazing = |c: Option<[f64; 2]>| c.is_some_and(|[near, far]| far - near < 1e-2);
                let meets = matches!((solid, shell), (Some(s), Some(w)) if w.iter().any(|t| (s[0] - t).abs() < 1e-3));
                if grazing(solid) || grazing(shell) || meets {
                    continue;
                }
                let below = bare.colour_at(x, y).unwrap();
                prop_assert_eq!(bare.id_at(x, y), solid.map(|_| 4), "outline at {} {}", x, y);
                prop_assert_eq!(both.id_at(x, y), solid.map(|_| 4), "translucent things own no pixel");
                let walls = shell.map_or(0, |w| {
                    w.iter().filter(|&&t| solid.is_none_or(|s| t < s[0])).count()
                });
                let expected = (0..walls).fold(below, |colour, _| over(tint, colour));
                prop_assert_eq!(both.colour_at(x, y).unwrap(), expected, "{} walls at {} {}", walls, x, y);
            }
        }
    }
}

#[test]
fn from_inside_only_the_far_wall_shows() {
    let mut scene = black();
    scene.balls.push(Ball { rim_alpha: 0, ..ball([0.0; 3], 20.0, SHELL, NO_ID) });
    let canvas = painted(&scene, &Eye::default(), 30, 20, 1);
    let once = over(SHELL.premultiplied(), BLACK.premultiplied());
    assert!(canvas.rgba().iter().all(|&pixel| pixel == once));
}

#[test]
fn the_rim_is_denser_than_the_middle() {
    let mut scene = black();
    scene.balls.push(Ball { rim_alpha: 120, ..ball([0.0; 3], 1.5, SHELL, NO_ID) });
    let canvas = painted(&scene, &level_eye(), 40, 40, 1);
    let blue = |x: usize| canvas.colour_at(x, 20).unwrap()[2];
    assert!(blue(5) > blue(20) + 40, "{} at the rim, {} in the middle", blue(5), blue(20));
}

#[test]
fn translucent_layers_are_laid_from_far_to_near() {
    let red = Disc { mark: Mark::Square, ..disc([0.0, 0.0, 1.0], 1.0, RED.with_alpha(128), 1) };
    let green = Disc { mark: Mark::Square, ..disc([0.0, 0.0, -1.0], 1.0, GREEN.with_alpha(128), 2) };
    let mut one = black();
    one.discs = vec![red, green];
    let mut other = black();
    other.discs = vec![green, red];
    let canvas = painted(&one, &level_eye(), 40, 40, 1);
    assert_eq!(canvas, painted(&other, &level_eye(), 40, 40, 1));
    let [r, g, _, _] = canvas.colour_at(20, 20).unwrap();
    // Nearer red keeps about a half, farther green about a quarter.
    assert!(r > 100 && (40..80).contains(&g), "{r} {g}");
    assert_eq!(canvas.id_at(20, 20), None);
}

#[test]
fn something_between_two_walls_is_tinted_by_the_near_one_only() {
    let mut scene = black();
    scene.balls.push(Ball { rim_alpha: 0, ..ball([0.0; 3], 1.0, SHELL, NO_ID) });
    let sheer_green = GREEN.with_alpha(200);
    scene.lines.push(line([-1.5, 0.0, 0.0], [1.5, 0.0, 0.0], 4.0, sheer_green, 1));
    let canvas = painted(&scene, &level_eye(), 40, 40, 1);
    let tint = SHELL.premultiplied();
    let far = over(tint, BLACK.premultiplied());
    let with_line = over(sheer_green.premultiplied(), far);
    assert_eq!(canvas.colour_at(20, 20).unwrap(), over(tint, with_line));
    assert_eq!(canvas.colour_at(20, 14).unwrap(), over(tint, far));
}
