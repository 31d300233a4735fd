use std::f64::consts::{FRAC_PI_2, FRAC_PI_4, PI};

use super::Real;

/// tan(π/8): beyond it a direction is turned back by π/4 first.
const TAN_PI_8: f64 = 0.414_213_562_373_095_05;

/// P of atan t = t + t³ P(t²) for |t| ≤ tan(π/8), lowest power first: the polynomial of smallest relative error, 5e-18,
/// made by `tests/scripts/arctangent.py`.
const P: [f64; 11] = [
    -0.333_333_333_333_332,
    0.199_999_999_999_532_47,
    -0.142_857_142_801_665_95,
    0.111_111_107_821_565_33,
    -0.090_908_977_252_928_8,
    0.076_920_597_181_245_53,
    -0.066_630_992_113_166_68,
    0.058_478_593_261_222_296,
    -0.050_391_906_557_496_66,
    0.038_062_145_557_474_84,
    -0.017_905_045_530_186_58,
];

/// [`Real::atan2`] without a branch: one division and one polynomial for the whole circle.
#[inline(always)]
pub(super) fn atan2<T: Real>(y: T, x: T) -> T {
    let zero = y.like(0.0);
    let (up, along) = (y.abs(), x.abs());
    let small = up.smaller(along);
    // No direction at all is 0 over the smallest number.
    let large = up.larger(along).larger(y.like(f64::MIN_POSITIVE));
    let turned = (large * TAN_PI_8).below(small);
    let t = T::choose(turned, small - large, small) / T::choose(turned, small + large, large);
    let first = T::choose(turned, y.like(FRAC_PI_4), zero) + (t + t * (t * t) * polynomial(t * t));
    let acute = T::choose(along.below(up), y.like(FRAC_PI_2) - first, first);
    T::choose(x.below(zero), y.like(PI) - acute, acute).with_sign_of(y)
}

#[inline(always)]
fn polynomial<T: Real>(z: T) -> T {
    // Two chains of half the length, so that a processor can work on both.
    let w = z * z;
    let [p0, p1, p2, p3, p4, p5, p6, p7, p8, p9, p10] = P;
    let even = ((((w * p10 + p8) * w + p6) * w + p4) * w + p2) * w + p0;
    let odd = (((w * p9 + p7) * w + p5) * w + p3) * w + p1;
    even + odd * z
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;
    use crate::testing::cases;

    /// Units in the last place of the true value between two numbers.
    fn ulps(found: f64, truth: f64) -> f64 {
        (found - truth).abs() / (truth.abs().next_up() - truth.abs())
    }

    #[test]
    fn the_circle_is_met_to_two_units_in_the_last_place() {
        let mut worst: f64 = 0.0;
        for i in 0..400_000 {
            let angle = f64::from(i) * 1.570_816e-5 - PI;
            let (y, x) = (angle.sin() * 3.7, angle.cos() * 3.7);
            worst = worst.max(ulps(atan2(y, x), y.atan2(x)));
        }
        assert!(worst <= 2.0, "{worst}");
    }

    #[test]
    fn the_ends_and_the_middle_are_exact() {
        assert_eq!(atan2(0.0, 0.0), 0.0);
        assert_eq!(atan2(0.0, 2.0), 0.0);
        assert_eq!(atan2(0.0, -2.0), PI);
        assert_eq!(atan2(-3.0, 0.0), -FRAC_PI_2);
        assert_eq!(atan2(1.0, 1.0), FRAC_PI_4);
        assert_eq!(atan2(1e-300, 1e300), 0.0);
    }

    proptest! {
        #![proptest_config(cases())]

        #[test]
        fn any_direction_of_any_length(y in -1.0..1.0f64, x in -1.0..1.0f64, scale in -60..60i32, tilt in -60..60i32) {
            let (y, x) = (y * 10f64.powi(scale), x * 10f64.powi(scale + tilt));
            prop_assert!(ulps(atan2(y, x), y.atan2(x)) <= 2.0, "{y:e} {x:e}");
        }
    }
}
