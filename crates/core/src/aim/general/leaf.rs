//! The closed forms at the end of every road: what is left when held, tied and searched axes are folded in.

use nalgebra::{Matrix3, Vector3};

use super::goal::{Carried, Goal, NoAzimuth, Twist};
use super::links::{Links, MAX_LINKS, rotation};
use crate::aim::Freedom;
use crate::aim::pair::Pair;
use crate::frames::HalfAngle;
use crate::frames::subproblem::{Dial, opening, turn};

/// The most ways that a closed form gives: two azimuths, two places of an outer axis, two openings.
const WAYS: usize = 8;

/// The most ways at a step of a search: two places of a tied detector, up to four turns of each tie, and a closed form.
pub const MAX_WAYS: usize = 64;

/// Below this sine a direction counts as lying along an axis.
const ALONG_AXIS: f64 = 1e-9;

const RIGHT_ANGLE: HalfAngle = HalfAngle { sin: std::f64::consts::FRAC_1_SQRT_2, cos: std::f64::consts::FRAC_1_SQRT_2 };

/// What is left to solve.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Leaf {
    /// One axis takes Q as near as it can.
    Single,
    /// Two axes take Q to its place.
    Pair,
    /// Three axes, the innermost the spindle, under *bisecting*.
    Bisecting,
    /// Three axes make a given rotation.
    Turned,
    /// Four axes make a given rotation under *bisecting*, the reference carried by the outermost alone.
    TurnedBisecting,
    /// Four axes make a given rotation under *bisecting*, the third being the reference axis.
    TurnedBisectingThird,
}

/// Angles of the axes of a chain, in radians, outermost first.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Way {
    /// One for each moving axis.
    pub angles_rad: [f64; MAX_LINKS],
    /// What was free.
    pub freedom: Freedom,
}

impl Way {
    fn new(angles: &[f64], freedom: Freedom) -> Self {
        let mut angles_rad = [0.0; MAX_LINKS];
        angles_rad[..angles.len()].copy_from_slice(angles);
        Self { angles_rad, freedom }
    }

    /// With one more axis put in before position `at`.
    pub fn with(mut self, at: usize, angle_rad: f64) -> Self {
        self.angles_rad.copy_within(at..MAX_LINKS - 1, at + 1);
        self.angles_rad[at] = angle_rad;
        self
    }
}

/// Each way by its number, which stays the same from node to node: angles, or by how many radians it misses.
#[derive(Debug, Clone, Copy)]
pub struct Ways {
    ways: [Result<Way, f64>; WAYS],
    count: usize,
}

impl Default for Ways {
    fn default() -> Self {
        Self { ways: [Err(0.0); WAYS], count: 0 }
    }
}

impl Ways {
    /// All of them in order.
    pub fn as_slice(&self) -> &[Result<Way, f64>] {
        &self.ways[..self.count]
    }

    fn push(&mut self, way: Result<Way, f64>) {
        if let Some(slot) = self.ways.get_mut(self.count) {
            *slot = way;
            self.count += 1;
        }
    }

    fn push_misses(&mut self, how_many: usize, miss: f64) {
        (0..how_many).for_each(|_| self.push(Err(miss)));
    }
}

/// `three` may be given where the chain is three axes that stay the same. All ways of a closed form to bring what the crystal carries (in the head frame) to the goal.
///
/// # Errors
/// If the rule wants an azimuth and the reflection has none.
pub fn solve(
    leaf: Leaf,
    links: &Links,
    three: Option<&Three>,
    twist: Option<Twist>,
    carried: &Carried,
    goal: &Goal,
) -> Result<Ways, NoAzimuth> {
    let carried = carried.turned(&links.held);
    let mut ways = Ways::default();
    match (leaf, links.directions(), twist) {
        (Leaf::Single, &[a], _) => {
            let about = Dial::new(a, &goal.q);
            let angle = turn(about.across(&carried.q), about.across(&goal.q));
            ways.push(Ok(Way::new(&[angle], Freedom::None)));
        }
        (Leaf::Pair, &[a, b], _) => pair(a, b, &carried.q, &goal.q, &mut ways),
        (Leaf::Bisecting, &[a, b, c], _) => {
            bisecting([a, b, c], &links.reference.direction, &carried.q, goal, &mut ways)
        }
        (Leaf::Turned, &[a, b, c], Some(twist)) => {
            let three = three.copied().unwrap_or_else(|| Three::new([a, b, c]));
            each_rotation(&carried, goal, twist, 2, &mut ways, |wanted, ways| three.ways(wanted, ways))?;
        }
        (Leaf::TurnedBisecting, &[..], Some(twist)) => {
            each_rotation(&carried, goal, twist, 4, &mut ways, |wanted, ways| {
                turned_bisecting(links, wanted, goal, ways);
            })?;
        }
        (Leaf::TurnedBisectingThird, &[..], Some(twist)) => {
            each_rotation(&carried, goal, twist, 4, &mut ways, |wanted, ways| {
                turned_bisecting_third(links, wanted, goal, ways);
            })?;
        }
        // A plan puts no leaf on a chain of another length.
        _ => {}
    }
    Ok(ways)
}

/// How far one axis leaves Q beside its goal, signed, as the difference of the two distances from the axis in radians.
pub fn single_residual(links: &Links, carried: &Carried, goal: &Goal) -> Option<f64> {
    let a = links.directions().first()?;
    let have = HalfAngle::between(a, &(links.held * carried.q));
    Some(have.angle() - HalfAngle::between(a, &goal.q).angle())
}

fn each_rotation(
    carried: &Carried,
    goal: &Goal,
    twist: Twist,
    ways_each: usize,
    ways: &mut Ways,
    mut found: impl FnMut(&Matrix3<f64>, &mut Ways),
) -> Result<(), NoAzimuth> {
    let once = matches!(twist, Twist::Azimuth(_));
    match carried.azimuths(goal, twist)? {
        Err(miss) => ways.push_misses(if once { ways_each } else { 2 * ways_each }, miss),
        Ok(azimuths) => {
            for &psi in azimuths.iter().take(if once { 1 } else { 2 }) {
                found(&carried.rotation_at(goal, psi)?, ways);
            }
        }
    }
    Ok(())
}

fn pair(a: Vector3<f64>, b: Vector3<f64>, from: &Vector3<f64>, to: &Vector3<f64>, ways: &mut Ways) {
    match Pair::of(a, b).angles(from, to) {
        Err(miss) => ways.push_misses(2, miss),
        Ok(both) => both.iter().for_each(|way| ways.push(Ok(Way::new(&way.angles_rad, way.freedom)))),
    }
}

/// The spindle is carried into the plane of Q and the reference direction, on either side of Q at its fixed angle from it.
fn bisecting(axes: [Vector3<f64>; 3], reference: &Vector3<f64>, q: &Vector3<f64>, goal: &Goal, ways: &mut Ways) {
    let [a, b, c] = axes;
    let rho = HalfAngle::between(&c, q);
    let across = reference - goal.q * goal.q.dot(reference);
    let no_plane = across.norm() < ALONG_AXIS;
    // With the reference along Q every plane will do.
    let side = if no_plane { Dial::new(goal.q, &Vector3::z()).mark } else { across.normalize() };
    let (about_a, about_c, outer) = (Dial::new(a, &b), Dial::new(c, &b), Pair::of(a, b));
    let spindle_free = rho.full_sin() < ALONG_AXIS;
    for sign in [1.0, -1.0] {
        let spindle = goal.q * rho.full_cos() + side * (sign * rho.full_sin());
        let both = match outer.angles(&c, &spindle) {
            Err(miss) => {
                ways.push_misses(2, miss);
                continue;
            }
            Ok(both) => both,
        };
        for (i, way) in both.iter().enumerate() {
            let [mut t0, t1] = way.angles_rad;
            let sum_only = way.freedom == Freedom::OuterAxis;
            if sum_only && !no_plane {
                // The spindle has come to lie along the outer axis. It got there in the plane that the middle axis turns
                // it through, so the limit of the condition is that this plane holds Q.
                let towards = about_a.across(&(goal.q * if i == 0 { 1.0 } else { -1.0 }));
                t0 = turn(about_a.across(&b.cross(&a)), towards);
            }
            let rest = rotation(&b, -t1) * (rotation(&a, -t0) * goal.q);
            let t2 = if spindle_free { 0.0 } else { turn(about_c.across(q), about_c.across(&rest)) };
            let freedom = match (spindle_free, sum_only, no_plane) {
                (true, ..) => Freedom::InnerAxis,
                (_, true, _) => Freedom::OnlySumFixed,
                (.., true) => Freedom::OuterAxis,
                _ => Freedom::None,
            };
            ways.push(Ok(Way::new(&[t0, t1, t2], freedom)));
        }
    }
}

/// Where nothing but the axis at one end of the chain counts for *bisecting*: the two angles in radians at which spindle,
/// reference axis and Q lie in one plane, whatever the others do.
///
/// # Errors
/// By how many radians the axis misses.
pub fn settled_angles(links: &Links, link: usize, carried: &Carried, goal: &Goal) -> Result<[f64; 2], f64> {
    let Some(&own) = links.directions().get(link) else { return Err(0.0) };
    // The axis turns one direction until it is perpendicular to another that stands still.
    let (turned, still) = if link == 0 {
        (links.spindle.direction, goal.q.cross(&links.reference.direction))
    } else {
        (links.spindle.direction.cross(&(links.held * carried.q)), links.reference.direction)
    };
    if turned.norm() < ALONG_AXIS || still.norm() < ALONG_AXIS {
        return Ok([0.0; 2]);
    }
    let (turned, still) = (turned.normalize(), still.normalize());
    let about = Dial::new(own, &still);
    let open = opening(HalfAngle::between(&own, &still), HalfAngle::between(&own, &turned), RIGHT_ANGLE);
    let centre = turn(about.across(&turned), about.across(&still));
    open.map(|open| [centre + open.angle(), centre - open.angle()]).map_err(|miss| miss.by_rad)
}

/// Three axes that are to make a given rotation: all that depends on them alone.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Three {
    outer: Dial,
    middle: Dial,
    inner: Dial,
    first: HalfAngle,
    second: HalfAngle,
    /// The middle angle in radians at which the inner axis comes nearest to the outer one; its cosine and sine.
    centre: (f64, f64, f64),
}

impl Three {
    /// Outer, middle and inner axis, unit vectors.
    pub fn new(axes: [Vector3<f64>; 3]) -> Self {
        let [a, b, c] = axes;
        let (outer, middle, inner) = (Dial::new(a, &b), Dial::new(b, &a), Dial::new(c, &b));
        let centre = turn(middle.across(&c), [1.0, 0.0]);
        let (first, second) = (HalfAngle::between(&a, &b), HalfAngle::between(&b, &c));
        Self { outer, middle, inner, first, second, centre: (centre, centre.cos(), centre.sin()) }
    }

    /// Both ways to make a rotation. Sines and cosines are carried from step to step; only what is told needs an angle.
    fn ways(&self, wanted: &Matrix3<f64>, ways: &mut Ways) {
        let c_there = wanted * self.inner.axis;
        let apart = HalfAngle::between(&self.outer.axis, &c_there);
        let open = match opening(self.first, self.second, apart) {
            Err(miss) => return ways.push_misses(2, miss.by_rad),
            Ok(open) => open,
        };
        let sum_only = apart.full_sin() < ALONG_AXIS;
        let freedom = if sum_only { Freedom::OnlySumFixed } else { Freedom::None };
        let (centre, cos_centre, sin_centre) = self.centre;
        let (cos_open, sin_open, open_rad) = (open.full_cos(), open.full_sin(), open.angle());
        let to = self.outer.across(&c_there);
        let mark_there = wanted * self.inner.mark;
        for side in [1.0, -1.0] {
            let (cos1, sin1) = (
                cos_centre * cos_open - side * sin_centre * sin_open,
                sin_centre * cos_open + side * cos_centre * sin_open,
            );
            let from = self.outer.across(&self.middle.turned(&self.inner.axis, cos1, sin1));
            let (cos0, sin0) = if sum_only { (1.0, 0.0) } else { cosine_and_sine(from, to) };
            // What is left is a turn about the inner axis: seen on a direction across it, no digits are lost.
            let mark = self.middle.turned(&self.outer.turned(&mark_there, cos0, -sin0), cos1, -sin1);
            let [x, y] = self.inner.across(&mark);
            ways.push(Ok(Way::new(&[sin0.atan2(cos0), centre + side * open_rad, y.atan2(x)], freedom)));
        }
    }
}

/// Cosine and sine of the turn from one planar direction to another.
fn cosine_and_sine(from: [f64; 2], to: [f64; 2]) -> (f64, f64) {
    let (sin, cos) = (from[0] * to[1] - from[1] * to[0], from[0] * to[0] + from[1] * to[1]);
    let length = sin.hypot(cos);
    if length > 0.0 { (cos / length, sin / length) } else { (1.0, 0.0) }
}

/// The rotation is given, so the spindle's place is: the outermost axis brings the reference axis into the plane of
/// spindle and Q, and the other three make the rest.
fn turned_bisecting(links: &Links, wanted: &Matrix3<f64>, goal: &Goal, ways: &mut Ways) {
    let &[a, ..] = links.directions() else { return };
    let normal = (wanted * links.spindle.direction).cross(&goal.q);
    let carried = &links.reference.direction;
    // With the spindle along Q every plane will do; the outermost axis is then free.
    let free = normal.norm() < ALONG_AXIS;
    let about = Dial::new(a, carried);
    let outer = if free {
        Ok([0.0, 0.0])
    } else {
        let normal = normal.normalize();
        opening(HalfAngle::between(&a, &normal), HalfAngle::between(&a, carried), RIGHT_ANGLE).map(|open| {
            let centre = turn(about.across(carried), about.across(&normal));
            [centre + open.angle(), centre - open.angle()]
        })
    };
    match outer {
        Err(miss) => ways.push_misses(4, miss.by_rad),
        Ok(both) => {
            for t0 in both {
                let rest = links.hold(0, t0);
                let &[b, c, d] = rest.directions() else { return };
                let first = ways.count;
                Three::new([b, c, d]).ways(&(wanted * rotation(&a, -t0).matrix()), ways);
                for way in ways.ways[first..ways.count].iter_mut().flatten() {
                    *way = way.with(0, t0);
                    if free {
                        way.freedom = Freedom::OuterAxis;
                    }
                }
            }
        }
    }
}

/// The third axis stands in the plane of spindle and Q, and at its own angle from the innermost, whose place is given: that
/// leaves two places. The outer two axes bring it to each, two ways.
fn turned_bisecting_third(links: &Links, wanted: &Matrix3<f64>, goal: &Goal, ways: &mut Ways) {
    let &[a, b, c, d] = links.directions() else { return };
    let d_there = wanted * d;
    let normal = (wanted * links.spindle.direction).cross(&goal.q);
    if normal.norm() < ALONG_AXIS {
        return ways.push_misses(4, 0.0);
    }
    let normal = normal.normalize();
    // In the plane: its direction nearest to the innermost axis, turned to either side of it.
    let about = Dial::new(normal, &d_there);
    match opening(HalfAngle::between(&d_there, &normal), RIGHT_ANGLE, HalfAngle::between(&d, &c)) {
        Err(miss) => ways.push_misses(4, miss.by_rad),
        Ok(open) => {
            for side in [1.0, -1.0] {
                let c_there = rotation(&normal, side * open.angle()) * about.mark;
                match Pair::of(a, b).angles(&c, &c_there) {
                    Err(miss) => ways.push_misses(2, miss),
                    Ok(both) => {
                        both.iter().for_each(|way| ways.push(Ok(inner_two(links, wanted, way.angles_rad, way.freedom))))
                    }
                }
            }
        }
    }
}

/// The outer two of four axes are set and have brought the third to its place: the inner two make the rest.
fn inner_two(links: &Links, wanted: &Matrix3<f64>, [t0, t1]: [f64; 2], freedom: Freedom) -> Way {
    let &[a, b, c, d] = links.directions() else { return Way::new(&[t0, t1], freedom) };
    let rest = rotation(&b, -t1) * (rotation(&a, -t0) * *wanted);
    let about_c = Dial::new(c, &d);
    let t2 = turn(about_c.across(&d), about_c.across(&(rest * d)));
    let about_d = Dial::new(d, &c);
    let mark = rotation(&c, -t2) * (rest * about_d.mark);
    Way::new(&[t0, t1, t2, turn([1.0, 0.0], about_d.across(&mark))], freedom)
}
