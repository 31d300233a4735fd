//! Every root of a function that has several branches, along one angle, by bracketing.
//!
//! The function is looked at in steps of [`STEP_RAD`]; no change of sign between two looks is missed, and where a branch
//! begins or ends between two looks its edge is found first. Between looks the turning points that come near zero are
//! followed too, so that roots that lie closer together than a step are found unless the function turns more than once
//! within a step.

/// Distance between two looks, in radians.
pub const STEP_RAD: f64 = 0.5 * std::f64::consts::PI / 180.0;

/// A value this small at a turning point or an edge is a double root: half the digits of a double go into its place.
const DOUBLE_ROOT: f64 = 1e-13;

/// A branch that ends this near to zero ends in a double root: near its edge it runs like a square root, and half the
/// digits go into the place of the edge.
const AT_EDGE: f64 = 2e-8;

/// A bracket that closes on a larger value than this closed on a jump.
const JUMP: f64 = 1e-6;

/// Roots of one branch that lie closer together than this, in radians, are one.
const SAME_ROOT: f64 = 1e-11;

/// How often a bracket is halved: from a step to rounding.
const HALVINGS: usize = 56;

/// What is seen of a branch: its value, or by how much it fails to exist.
pub type Look = Result<f64, f64>;

/// One look at each branch; nothing for a branch that there never is.
pub type Looks<const B: usize> = [Option<Look>; B];

/// The smallest value seen, where nothing was found: by how much the function misses zero.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Nearest(pub f64);

/// Looks between the last step of a branch and its edge, closer together towards the edge.
const LOOKS_TO_EDGE: usize = 8;

/// Looks within a step that has a jump in it.
const LOOKS_AT_JUMP: usize = 16;

/// Calls `found` with place and branch of each root from `from` to `to` (radians).
pub fn roots<const B: usize>(
    (from, to): (f64, f64),
    look: &mut impl FnMut(f64) -> Looks<B>,
    found: &mut impl FnMut(f64, usize),
) -> Nearest {
    let steps = ((to - from) / STEP_RAD).ceil().max(1.0);
    let at = |i: f64| from + (to - from) * i / steps;
    let mut nearest = f64::INFINITY;
    // Two ways of looking may come upon one root.
    let mut latest = [f64::NAN; B];
    let (mut before, mut here) = (look(at(-1.0)), look(at(0.0)));
    let mut i = 0.0;
    while i < steps {
        let places = [at(i - 1.0), at(i), at(i + 1.0)];
        let next = look(places[2]);
        for branch in 0..B {
            let (Some(a), Some(b), Some(c)) = (before[branch], here[branch], next[branch]) else { continue };
            let mut one = |u: f64| look(u)[branch].unwrap_or(Err(f64::INFINITY));
            nearest = nearest.min(b.map_or(f64::INFINITY, f64::abs));
            step(&mut one, places, [a, b, c], &mut |u| {
                if (u - latest[branch]).abs().partial_cmp(&SAME_ROOT).is_none_or(std::cmp::Ordering::is_gt) {
                    latest[branch] = u;
                    found(u, branch);
                }
            });
        }
        (before, here) = (here, next);
        i += 1.0;
    }
    Nearest(nearest)
}

fn positive(value: f64) -> bool {
    value >= 0.0
}

/// Roots between the second and the third of three looks, and those about a turning point at the second.
fn step(one: &mut impl FnMut(f64) -> Look, u: [f64; 3], looks: [Look; 3], found: &mut impl FnMut(f64)) {
    match (looks[1], looks[2]) {
        (Ok(a), Ok(b)) if jumps(looks[0], a, b) => closer(one, (u[1], a), (u[2], b), found),
        (Ok(a), Ok(b)) => bracket(one, (u[1], a), (u[2], b), 1, found),
        (Ok(a), Err(_)) => to_edge(one, (u[1], a), u[2], found),
        (Err(_), Ok(b)) => to_edge(one, (u[2], b), u[1], found),
        (Err(_), Err(_)) => {}
    }
    match looks {
        [Ok(a), Ok(b), Ok(c)] if turns_towards_zero(a, b, c) => turning_point(one, (u[0], u[1], u[2]), b, found),
        [Err(a), Err(b), Err(c)] if b <= a && b < c => island(one, (u[0], u[1], u[2]), b, found),
        _ => {}
    }
}

/// Whether the middle value is the nearest to zero of three with one sign.
fn turns_towards_zero(a: f64, b: f64, c: f64) -> bool {
    positive(a) == positive(b) && positive(b) == positive(c) && b.abs() <= a.abs() && b.abs() < c.abs()
}

/// Whether a branch goes elsewhere than the last two looks said: it may have jumped.
fn jumps(before: Look, a: f64, b: f64) -> bool {
    let slope = before.map_or(0.0, |before| a - before);
    (b - a - slope).abs() > 0.05 + 2.0 * slope.abs()
}

/// A step with a jump in it: a root between two looks may be hidden by the jump, so there are more of them.
fn closer(one: &mut impl FnMut(f64) -> Look, start: (f64, f64), end: (f64, f64), found: &mut impl FnMut(f64)) {
    let mut last = start;
    for i in 1..=LOOKS_AT_JUMP {
        let u = start.0 + (end.0 - start.0) * i as f64 / LOOKS_AT_JUMP as f64;
        let next = if i == LOOKS_AT_JUMP { Ok(end.1) } else { one(u) };
        match next {
            Ok(value) => {
                bracket(one, last, (u, value), 1, found);
                last = (u, value);
            }
            Err(_) => to_edge(one, last, u, found),
        }
    }
}

/// A branch that exists at one end only: to where it ends. Near its edge it runs like a square root, so the looks come
/// closer together as squares do.
fn to_edge(one: &mut impl FnMut(f64) -> Look, (u_in, v_in): (f64, f64), u_out: f64, found: &mut impl FnMut(f64)) {
    let (mut inside, mut outside, mut value) = (u_in, u_out, v_in);
    for _ in 0..HALVINGS {
        let middle = 0.5 * (inside + outside);
        match one(middle) {
            Ok(v) => (inside, value) = (middle, v),
            Err(_) => outside = middle,
        }
    }
    if value.abs() < AT_EDGE {
        found(inside);
        return;
    }
    let mut seen = [(u_in, v_in); LOOKS_TO_EDGE + 1];
    seen[LOOKS_TO_EDGE] = (inside, value);
    for (i, place) in seen.iter_mut().enumerate().take(LOOKS_TO_EDGE).skip(1) {
        let left = 1.0 - i as f64 / LOOKS_TO_EDGE as f64;
        let u = inside + (u_in - inside) * left * left;
        let Ok(v) = one(u) else { return bracket(one, (u_in, v_in), (inside, value), 1, found) };
        *place = (u, v);
    }
    for pair in seen.windows(2) {
        bracket(one, pair[0], pair[1], 1, found);
    }
    for three in seen.windows(3) {
        let [a, b, c] = [three[0], three[1], three[2]];
        if turns_towards_zero(a.1, b.1, c.1) {
            let (low, high) = if a.0 < c.0 { (a.0, c.0) } else { (c.0, a.0) };
            turning_point(one, (low, b.0, high), b.1, found);
        }
    }
}

/// A branch that exists at none of three looks but comes nearest to it at the middle one: perhaps it exists in between.
fn island(one: &mut impl FnMut(f64) -> Look, (u0, u1, u2): (f64, f64, f64), middle: f64, found: &mut impl FnMut(f64)) {
    let (mut low, mut high, mut best, mut least) = (u0, u2, u1, middle);
    for _ in 0..60 {
        let (left, right) = (best - low, high - best);
        let u = if left > right { best - GOLDEN * left } else { best + GOLDEN * right };
        match one(u) {
            Ok(value) => {
                to_edge(one, (u, value), u0, found);
                to_edge(one, (u, value), u2, found);
                return;
            }
            Err(miss) => narrow(&mut low, &mut high, &mut best, &mut least, u, miss),
        }
    }
}

/// The larger part of a stretch is cut at this fraction.
const GOLDEN: f64 = 0.381_966_011_250_105;

/// One step of a golden-section search for the least value.
fn narrow(low: &mut f64, high: &mut f64, best: &mut f64, least: &mut f64, u: f64, value: f64) {
    match (value < *least, u < *best) {
        (true, true) => (*high, *best, *least) = (*best, u, value),
        (true, false) => (*low, *best, *least) = (*best, u, value),
        (false, true) => *low = u,
        (false, false) => *high = u,
    }
}

/// Halves a bracket down to rounding. If it closes on a jump, both sides of the jump are looked at once.
fn bracket(
    one: &mut impl FnMut(f64) -> Look,
    (u0, v0): (f64, f64),
    (u1, v1): (f64, f64),
    deeper: usize,
    found: &mut impl FnMut(f64),
) {
    if positive(v0) == positive(v1) {
        return;
    }
    let (mut low, mut high, mut v_low, mut v_high) = (u0, u1, v0, v1);
    for _ in 0..HALVINGS {
        let middle = 0.5 * (low + high);
        let Ok(value) = one(middle) else {
            // A hole inside the cell: each side ends at it.
            to_edge(one, (low, v_low), middle, found);
            to_edge(one, (high, v_high), middle, found);
            return;
        };
        if positive(value) == positive(v0) {
            (low, v_low) = (middle, value);
        } else {
            (high, v_high) = (middle, value);
        }
    }
    if v_low.abs().min(v_high.abs()) < JUMP {
        found(if v_low.abs() < v_high.abs() { low } else { high });
    } else if deeper > 0 {
        let aside = 1e-9 * (u1 - u0);
        for (end, near) in [((u0, v0), low - aside), ((u1, v1), high + aside)] {
            if let Ok(value) = one(near) {
                bracket(one, end, (near, value), deeper - 1, found);
            }
        }
    }
}

/// Follows the function to its turning point: through zero on the way are two roots, touching zero one double root.
fn turning_point(
    one: &mut impl FnMut(f64) -> Look,
    (u0, u1, u2): (f64, f64, f64),
    middle: f64,
    found: &mut impl FnMut(f64),
) {
    let sign = if positive(middle) { 1.0 } else { -1.0 };
    let (mut low, mut high, mut best, mut least) = (u0, u2, u1, sign * middle);
    for _ in 0..80 {
        let (left, right) = (best - low, high - best);
        let u = if left > right { best - GOLDEN * left } else { best + GOLDEN * right };
        let Ok(value) = one(u).map(|v| sign * v) else { return };
        if value < 0.0 {
            for end in [u0, u2] {
                if let Ok(v_end) = one(end) {
                    bracket(one, (end, v_end), (u, sign * value), 1, found);
                }
            }
            return;
        }
        narrow(&mut low, &mut high, &mut best, &mut least, u, value);
    }
    if least < DOUBLE_ROOT {
        found(best);
    }
}

#[cfg(test)]
mod tests {
    use std::f64::consts::PI;

    use super::*;

    fn all(mut look: impl FnMut(f64) -> Looks<1>) -> Vec<f64> {
        let mut list = Vec::new();
        roots((-PI, PI), &mut look, &mut |u, _| list.push(u));
        list.sort_by(f64::total_cmp);
        list
    }

    #[test]
    fn simple_roots_are_found_to_rounding() {
        let found = all(|u| [Some(Ok((3.0 * u).cos()))]);
        assert_eq!(found.len(), 6);
        assert!(found.iter().zip([-5.0, -3.0, -1.0, 1.0, 3.0, 5.0]).all(|(u, k)| (u - k * PI / 6.0).abs() < 1e-14));
    }

    #[test]
    fn two_roots_within_a_step_and_a_double_root() {
        let gap = 1e-4;
        let found = all(|u| [Some(Ok((u - 0.3) * (u - 0.3 - gap)))]);
        assert_eq!(found.len(), 2, "{found:?}");
        assert!((found[1] - found[0] - gap).abs() < 1e-10);
        let found = all(|u| [Some(Ok((u - 0.3).powi(2)))]);
        assert_eq!(found.len(), 1, "{found:?}");
        assert!((found[0] - 0.3).abs() < 1e-6);
        assert!(all(|u| [Some(Ok((u - 0.3).powi(2) + 1e-9))]).is_empty());
    }

    #[test]
    fn jumps_are_no_roots_and_hide_none() {
        assert!(all(|u| [Some(Ok(if u < 0.123 { -1.0 } else { 1.0 }))]).is_empty());
        // A jump and a root within one step.
        let found = all(|u| [Some(Ok(if u < 0.123 { 1.0 } else { u - 0.124 }))]);
        assert!(found.len() == 1 && (found[0] - 0.124).abs() < 1e-14, "{found:?}");
    }

    #[test]
    fn a_branch_is_followed_to_its_edge() {
        // Exists where u² ≤ 0.25; its root at 0.4999 lies within the last step before the edge.
        let edge =
            |u: f64, half: f64| if u.abs() <= half { Ok((half * half - u * u).sqrt()) } else { Err(u.abs() - half) };
        let found = all(|u| [Some(edge(u, 0.5).map(|v| v - (0.25f64 - 0.4999 * 0.4999).sqrt()))]);
        assert_eq!(found.len(), 2, "{found:?}");
        assert!((found[1] - 0.4999).abs() < 1e-12);
    }

    #[test]
    fn an_island_between_two_looks_is_found() {
        let look = |u: f64| {
            let off = u - 0.3001;
            [Some(if off.abs() <= 1e-3 { Ok(off - 2e-4) } else { Err(off.abs() - 1e-3) })]
        };
        let found = all(look);
        assert!(found.len() == 1 && (found[0] - 0.3003).abs() < 1e-14, "{found:?}");
    }
}
