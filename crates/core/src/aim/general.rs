//! The road for every stack and every set of rules. Where the stack is simple, [`super::bisecting`] and [`super::pair`]
//! are the same in fewer steps.
//!
//! Held axes are folded into the others ([`links`]). The detector axes give the places of Q ([`arm`]); two that no rule
//! settles follow Q around the beam, which is the same as one more sample axis along the beam. A rule that settles the
//! azimuth then makes the whole rotation known ([`goal`]), *bisecting* the place of the spindle ([`leaf`]). Where a tie or
//! an unusual spindle leaves no closed form, one angle is searched ([`scan`]) with a closed form at each step.

pub(super) mod arm;
pub(super) mod goal;
pub(super) mod leaf;
pub(super) mod links;
pub(super) mod plan;
mod scan;
mod settle;
#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests;

use nalgebra::Vector3;

pub use goal::NoAzimuth;

use self::arm::{Arm, Place};
use self::goal::{Carried, Goal, Twist};
use self::leaf::{Leaf, MAX_WAYS, Three, Way, Ways};
use self::links::{BEAM, Links, rotation};
use self::plan::{Along, Condition, Plan, Tie};
use super::attempts::{Attempt, Branch, Freedom};
use crate::frames::{HalfAngle, Head, Vector};
use crate::instrument::{Instrument, MAX_AXES, Setting};

/// Two places of the detector that point alike are told apart by more than this, in radians.
const SAME_PLACE_RAD: f64 = 1e-7;

/// Any stack under any rules.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct General {
    links: Links,
    arm: Arm,
    plan: Plan,
    /// The rule that settles the azimuth; nothing if none does, or if it is given each time.
    twist: Option<Twist>,
    /// The reference of the azimuth, or the surface's normal, as a unit vector in the head frame.
    direction: Option<Vector<Head>>,
    /// Ties of sample axes to axes whose place is known: held ones, the settled detector's, and what hangs on those.
    known_ties: Vec<Tie>,
    /// Ties between sample axes that hang on the axis of a search.
    ties: Vec<Tie>,
    /// Ties of sample axes to detector axes that follow Q.
    beam_ties: Vec<Tie>,
    /// The axis that *bisecting* settles by itself, as a place in the chain after the known ties.
    by_bisecting: Option<usize>,
    /// The three axes that make the whole rotation, where they stay the same for every reflection.
    three: Option<Three>,
    /// Readings of held axes; the others are filled in.
    template_deg: [f64; MAX_AXES],
    zero_deg: [f64; MAX_AXES],
    sample_count: usize,
    axis_count: usize,
}

/// A link and the angle in radians at which it is held.
type HeldLink = (usize, f64);

/// Takes a way, the chain it is for, and the readings that are known besides.
type FoundWay<'a, 'q> = dyn FnMut(&Links, Result<Way, f64>, [f64; MAX_AXES], &mut Query<'q>) + 'a;

/// Goes on with a chain in which known ties are held, and the readings known by then.
type ThenSolve<'a> = dyn FnMut(&Links, [f64; MAX_AXES]) -> Result<(), NoAzimuth> + 'a;

/// A question: one reflection, and the azimuth if that is given each time.
struct Query<'a> {
    carried: Carried,
    theta: HalfAngle,
    twist: Option<Twist>,
    found: &'a mut dyn FnMut(Attempt),
    branch: u8,
}

impl Query<'_> {
    fn emit(&mut self, result: Result<(Setting, Freedom), f64>) {
        let branch = Branch(self.branch);
        self.branch = self.branch.saturating_add(1);
        (self.found)(match result {
            Ok((setting, freedom)) => Attempt::Setting { branch, setting, freedom },
            Err(miss) => Attempt::CannotMake { branch, by_deg: miss.to_degrees() },
        });
    }
}

impl General {
    /// Every setting for a unit vector along Q in the head frame at sin θ. `psi_rad` gives the azimuth where a rule leaves
    /// it open.
    ///
    /// # Errors
    /// If the rules want an azimuth and the reflection has none.
    pub fn each_attempt(
        &self,
        q: &Vector3<f64>,
        sin_theta: f64,
        psi_rad: Option<f64>,
        found: &mut dyn FnMut(Attempt),
    ) -> Result<(), NoAzimuth> {
        let cos_theta = ((1.0 - sin_theta) * (1.0 + sin_theta)).sqrt();
        let half = 0.5 * sin_theta.atan2(cos_theta);
        let theta = HalfAngle { sin: half.sin(), cos: half.cos() };
        let carried = Carried { q: *q, n: self.direction.map(|n| *n.raw()) };
        let twist = self.twist.or(psi_rad.map(Twist::Azimuth));
        let mut query = Query { carried, theta, twist, found, branch: 0 };
        if let Arm::Follows(axes) = &self.arm {
            return self.following(axes, &mut query);
        }
        let mut outcome = Ok(());
        self.arm.each_place(theta, &mut |place| match place {
            Err(miss) => query.emit(Err(miss)),
            Ok(place) => {
                if outcome.is_ok() {
                    outcome = self.at_place(&place, &mut query);
                }
            }
        });
        outcome
    }

    /// The azimuth in radians of a reference at a setting.
    ///
    /// # Errors
    /// If there is none.
    pub fn azimuth_rad(
        instrument: &Instrument,
        setting: &Setting,
        q_in_head: Vector<Head>,
        reference: Vector<Head>,
    ) -> Result<f64, NoAzimuth> {
        let n = reference.direction().map(|unit| unit.into_inner());
        let q = q_in_head.direction().ok_or(NoAzimuth::ReferenceAlongQ)?.into_inner();
        let k_f = *instrument.diffracted_direction(setting).raw();
        let goal = Goal::new(&k_f, HalfAngle { sin: 0.0, cos: 1.0 });
        Carried { q, n }.azimuth_of(&goal, instrument.lab_from_head(setting).matrix())
    }

    /// Whether no search is needed.
    pub fn is_closed(&self) -> bool {
        matches!(self.plan, Plan::Closed(_)) && !matches!(self.arm, Arm::Tied { .. })
    }

    fn at_place(&self, place: &Place, query: &mut Query<'_>) -> Result<(), NoAzimuth> {
        let goal = Goal::new(&place.k_f, query.theta);
        let mut template = self.template_deg;
        self.set_detector(place, &mut template);
        let mut then = |links: &Links, template| {
            self.each_way_settled(links, &goal, template, query, &mut |links, way, template, query| {
                query.emit(way.map(|way| (self.setting(links, &way, template), way.freedom)));
            })
        };
        if self.known_ties.is_empty() {
            return then(&self.links, template);
        }
        self.with_ties(&self.known_ties, self.links.clone(), template, &mut then)
    }

    /// [`Self::each_way`] for both angles of the axis that *bisecting* settles by itself, if there is one.
    fn each_way_settled<'q>(
        &self,
        links: &Links,
        goal: &Goal,
        template: [f64; MAX_AXES],
        query: &mut Query<'q>,
        found: &mut FoundWay<'_, 'q>,
    ) -> Result<(), NoAzimuth> {
        let Some(link) = self.by_bisecting else {
            return self.each_way(links, goal, query, &mut |way, query| found(links, way, template, query));
        };
        let Some(&slot) = links.slots().get(link) else { return Ok(()) };
        let angles = match leaf::settled_angles(links, link, &query.carried, goal) {
            Ok(angles) => angles,
            Err(miss) => {
                (0..2).for_each(|_| found(links, Err(miss), template, query));
                return Ok(());
            }
        };
        for angle in angles {
            let inside = links.hold(link, angle);
            let mut template = template;
            template[slot] = angle.to_degrees() + self.zero_deg[slot];
            self.each_way(&inside, goal, query, &mut |way, query| found(&inside, way, template, query))?;
        }
        Ok(())
    }

    /// Holds what hangs on a known axis, in every turn that a fraction allows.
    fn with_ties(
        &self,
        ties: &[Tie],
        links: Links,
        template: [f64; MAX_AXES],
        then: &mut ThenSolve<'_>,
    ) -> Result<(), NoAzimuth> {
        let Some((tie, rest)) = ties.split_first() else { return then(&links, template) };
        let Some(link) = links.place_of(tie.axis) else { return Ok(()) };
        for angle in tie.multiple.each_turn((template[tie.to] - self.zero_deg[tie.to]).to_radians()) {
            let mut template = template;
            template[tie.axis] = angle.to_degrees() + self.zero_deg[tie.axis];
            self.with_ties(rest, links.hold(link, angle), template, then)?;
        }
        Ok(())
    }

    /// With the detector anywhere around the beam: k_f at a place of our choice, and the beam as outermost axis.
    fn following(&self, axes: &[Vector3<f64>; 2], query: &mut Query<'_>) -> Result<(), NoAzimuth> {
        let (s, c) = (query.theta.full_sin(), query.theta.full_cos());
        let k_f = Vector3::new(2.0 * s * c, 0.0, (c - s) * (c + s));
        let goal = Goal::new(&k_f, query.theta);
        self.with_ties(&self.known_ties, self.links.clone(), self.template_deg, &mut |links, template| {
            self.each_way_settled(links, &goal, template, query, &mut |links, way, template, query| {
                let way = match way {
                    Ok(way) => way,
                    Err(miss) => return query.emit(Err(miss)),
                };
                let k_f = rotation(&Vector3::z(), -way.angles_rad[0]) * k_f;
                arm::to_direction(axes, &k_f, &mut |place| {
                    if place.is_ok_and(|place| !self.keeps_beam_tie(links, &place, &way)) {
                        return;
                    }
                    query.emit(place.map(|place| {
                        let mut template = template;
                        self.set_detector(&place, &mut template);
                        (self.setting(links, &way, template), way.freedom)
                    }));
                });
            })
        })
    }

    /// Whether a sample axis that hangs on a detector axis does so in this place, one of two that point alike.
    fn keeps_beam_tie(&self, links: &Links, place: &Place, way: &Way) -> bool {
        self.beam_ties.iter().all(|tie| {
            let other = place.angles_rad[tie.to - self.sample_count];
            links
                .place_of(tie.axis)
                .is_none_or(|link| tie.multiple.residual(way.angles_rad[link], other).abs() < SAME_PLACE_RAD)
        })
    }

    fn set_detector(&self, place: &Place, template: &mut [f64; MAX_AXES]) {
        for (i, angle) in place.angles_rad.iter().enumerate() {
            let axis = self.sample_count + i;
            if axis < self.axis_count {
                template[axis] = angle.to_degrees() + self.zero_deg[axis];
            }
        }
    }

    fn setting(&self, links: &Links, way: &Way, mut template: [f64; MAX_AXES]) -> Setting {
        for (&slot, angle) in links.slots().iter().zip(way.angles_rad) {
            if slot != BEAM {
                template[slot] = angle.to_degrees() + self.zero_deg[slot];
            }
        }
        Setting::from_array(template, self.axis_count)
    }

    fn each_way<'q>(
        &self,
        links: &Links,
        goal: &Goal,
        query: &mut Query<'q>,
        found: &mut dyn FnMut(Result<Way, f64>, &mut Query<'q>),
    ) -> Result<(), NoAzimuth> {
        match self.plan {
            Plan::Closed(leaf) => {
                let ways = leaf::solve(leaf, links, self.three.as_ref(), query.twist, &query.carried, goal)?;
                ways.as_slice().iter().for_each(|way| found(*way, query));
                Ok(())
            }
            Plan::Search { along, leaf, condition } => {
                let search = Search {
                    road: self,
                    links,
                    goal,
                    carried: query.carried,
                    twist: query.twist,
                    along,
                    leaf,
                    condition,
                };
                search.check()?;
                let mut list = Vec::new();
                let nearest = search.each(&mut |way| list.push(way));
                if list.is_empty() {
                    let miss = if nearest.is_finite() { nearest } else { search.least_miss() };
                    found(Err(miss), query);
                }
                list.into_iter().for_each(|way| found(Ok(way), query));
                Ok(())
            }
        }
    }
}

/// A search along one angle.
struct Search<'a> {
    road: &'a General,
    links: &'a Links,
    goal: &'a Goal,
    carried: Carried,
    twist: Option<Twist>,
    along: Along,
    leaf: Leaf,
    condition: Condition,
}

impl Search<'_> {
    /// Whether the reflection has the azimuth that the rules want.
    fn check(&self) -> Result<(), NoAzimuth> {
        match self.twist {
            Some(twist) => self.carried.azimuths(self.goal, twist).map(|_| ()),
            None => Ok(()),
        }
    }

    fn each(&self, found: &mut dyn FnMut(Way)) -> f64 {
        // A little more than a turn: a root at its very end would lie between two turns of a tie.
        let half = std::f64::consts::PI + 0.37 * scan::STEP_RAD;
        let range = (-half, half);
        let mut look = |u: f64| self.look(u);
        let nearest = scan::roots(range, &mut look, &mut |u, branch| {
            if let Some(way) = self.ways_at(u)[branch].and_then(Result::ok) {
                found(way);
            }
        });
        nearest.0
    }

    /// The least miss of the closed form where it closes nowhere.
    fn least_miss(&self) -> f64 {
        let steps = (-180..180).map(|deg| f64::from(deg).to_radians());
        let misses = steps.flat_map(|u| self.ways_at(u)).flatten().filter_map(Result::err);
        misses.fold(f64::INFINITY, f64::min).min(std::f64::consts::PI)
    }

    fn look(&self, u: f64) -> scan::Looks<MAX_WAYS> {
        self.ways_at(u).map(|way| way.map(|way| way.and_then(|way| self.residual(u, &way).ok_or(f64::INFINITY))))
    }

    /// The ways of the closed form at a step, with the angles of the search put in.
    fn ways_at(&self, u: f64) -> [Option<Result<Way, f64>>; MAX_WAYS] {
        let mut all = [None; MAX_WAYS];
        let mut next = 0;
        let mut take = |ways: &Ways, put: &dyn Fn(Way) -> Way| {
            for way in ways.as_slice() {
                if let Some(slot) = all.get_mut(next) {
                    *slot = Some(way.map(put));
                }
                next += 1;
            }
        };
        match self.along {
            Along::Axis(link) => {
                let ways = self.solve(&self.links.hold(link, u));
                take(&ways, &|way| way.with(link, u));
            }
            Along::Tied(root) => {
                self.each_tied(&self.road.ties, &mut vec![(root, u)], &mut |angles| {
                    let mut held: Vec<HeldLink> =
                        angles.iter().filter_map(|&(axis, angle)| Some((self.links.place_of(axis)?, angle))).collect();
                    held.sort_by_key(|&(link, _)| link);
                    let inside = held.iter().rev().fold(self.links.clone(), |l, &(link, angle)| l.hold(link, angle));
                    take(&self.solve(&inside), &|way| held.iter().fold(way, |w, &(link, angle)| w.with(link, angle)));
                });
            }
            Along::Beam => {
                let Arm::Follows(axes) = &self.road.arm else { return all };
                let k_f =
                    rotation(&Vector3::z(), -u) * (self.goal.q * (2.0 * self.goal.theta.full_sin()) + Vector3::z());
                let mut unreached = None;
                arm::to_direction(axes, &k_f.normalize(), &mut |place| match place {
                    Err(miss) => unreached = Some(miss),
                    Ok(place) => {
                        self.each_hold(&place, &self.road.beam_ties, &mut vec![(0, u)], &mut |held| {
                            let inside =
                                held.iter().rev().fold(self.links.clone(), |l, &(link, angle)| l.hold(link, angle));
                            take(&self.solve(&inside), &|way| {
                                held.iter().fold(way, |w, &(link, angle)| w.with(link, angle))
                            });
                        });
                    }
                });
                if let Some(miss) = unreached {
                    return [Some(Err(miss)); MAX_WAYS];
                }
            }
        }
        all
    }

    /// The axes that hang on one at an angle, and their angles, in every turn that fractions allow.
    fn each_tied(&self, ties: &[Tie], angles: &mut Vec<HeldLink>, then: &mut dyn FnMut(&[HeldLink])) {
        let Some((tie, rest)) = ties.split_first() else { return then(angles) };
        let other = angles.iter().find(|(axis, _)| *axis == tie.to).map_or(0.0, |&(_, angle)| angle);
        for angle in tie.multiple.each_turn(other) {
            angles.push((tie.axis, angle));
            self.each_tied(rest, angles, then);
            angles.pop();
        }
    }

    /// The links that hang on a place of the detector and their angles, outermost first, in every turn that fractions allow.
    fn each_hold(&self, place: &Place, ties: &[Tie], held: &mut Vec<HeldLink>, then: &mut dyn FnMut(&[HeldLink])) {
        let Some((tie, rest)) = ties.split_first() else {
            let mut sorted = held.clone();
            sorted.sort_by_key(|&(link, _)| link);
            return then(&sorted);
        };
        let Some(link) = self.links.place_of(tie.axis) else { return };
        for angle in tie.multiple.each_turn(place.angles_rad[tie.to - self.road.sample_count]) {
            held.push((link, angle));
            self.each_hold(place, rest, held, then);
            held.pop();
        }
    }

    fn solve(&self, links: &Links) -> Ways {
        leaf::solve(self.leaf, links, None, self.twist, &self.carried, self.goal).unwrap_or_default()
    }

    fn residual(&self, u: f64, way: &Way) -> Option<f64> {
        match self.condition {
            Condition::Direction => {
                let single = self.folded(u, way)?;
                leaf::single_residual(&single, &self.carried, self.goal)
            }
            Condition::Bisecting => {
                let spindle = self.links.pointing(&self.links.spindle, &way.angles_rad);
                let reference = self.links.pointing(&self.links.reference, &way.angles_rad);
                Some(spindle.cross(&reference).dot(&self.goal.q))
            }
            Condition::Twist => self.twist_residual(way),
            Condition::Tie(tie) => {
                let at = |slot| Some(way.angles_rad[self.links.place_of(slot)?]);
                Some(tie.multiple.residual(at(tie.axis)?, at(tie.to)?))
            }
        }
    }

    /// The chain with the angles of the search held.
    fn folded(&self, u: f64, way: &Way) -> Option<Links> {
        let mut held: Vec<usize> = match self.along {
            Along::Axis(link) => return Some(self.links.hold(link, u)),
            Along::Tied(root) => {
                let tied = self.road.ties.iter().map(|tie| tie.axis).chain([root]);
                tied.filter_map(|axis| self.links.place_of(axis)).collect()
            }
            Along::Beam => {
                self.road.beam_ties.iter().filter_map(|tie| self.links.place_of(tie.axis)).chain([0]).collect()
            }
        };
        held.sort_unstable();
        Some(held.iter().rev().fold(self.links.clone(), |links, &link| links.hold(link, way.angles_rad[link])))
    }

    fn twist_residual(&self, way: &Way) -> Option<f64> {
        let turned = self
            .links
            .directions()
            .iter()
            .zip(way.angles_rad)
            .rev()
            .fold(self.links.held, |matrix, (axis, angle)| rotation(axis, angle).matrix() * matrix);
        let n = turned * self.carried.n?;
        let (incident, diffracted) = (Vector3::z(), self.goal.q * (2.0 * self.goal.theta.full_sin()) + Vector3::z());
        match self.twist? {
            Twist::Azimuth(psi) => {
                let off = self.carried.azimuth_of(self.goal, &turned).ok()? - psi;
                Some(off - std::f64::consts::TAU * (off / std::f64::consts::TAU).round())
            }
            Twist::Incidence(alpha) => Some(-n.dot(&incident) - alpha.sin()),
            Twist::Exit(alpha) => Some(n.dot(&diffracted) - alpha.sin()),
            Twist::Equal => Some(n.dot(&(incident + diffracted))),
        }
    }
}
