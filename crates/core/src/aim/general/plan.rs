//! Which road leads to every setting: a closed form, or a search along one angle with a closed form at each step.

use super::arm::Multiple;
use super::leaf::Leaf;
use super::links::{BEAM, Links, Mark};
use crate::aim::RuleError;

/// One sample axis that is a multiple of another moving axis.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Tie {
    /// The axis that follows, as a position among all axes of the machine.
    pub axis: usize,
    /// The axis that it follows.
    pub to: usize,
    /// angle[axis] = factor × angle[to] + offset.
    pub multiple: Multiple,
}

impl Tie {
    /// The same tie seen from the axis that follows.
    pub fn inverse(self) -> Self {
        Self { axis: self.to, to: self.axis, multiple: self.multiple.inverse() }
    }
}

/// How the sample axes are found.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Plan {
    /// In closed form.
    Closed(Leaf),
    /// Along one angle: at each step a closed form gives the other axes, and one condition is left to fulfil.
    Search {
        /// The angle.
        along: Along,
        /// The closed form.
        leaf: Leaf,
        /// The condition.
        condition: Condition,
    },
}

/// The angle of a search.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Along {
    /// A moving axis, by its place in the chain.
    Axis(usize),
    /// An axis, by its position in the machine, that others follow.
    Tied(usize),
    /// The place of the detector around the beam, which tied sample axes follow.
    Beam,
}

/// What a step of a search still has to fulfil.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Condition {
    /// The last axis takes Q to its place.
    Direction,
    /// *Bisecting*.
    Bisecting,
    /// The azimuth.
    Twist,
    /// A tie.
    Tie(Tie),
}

/// What is to be settled besides the direction of Q.
#[derive(Debug, Clone, Copy)]
pub struct Wishes<'a> {
    /// A rule settles the azimuth.
    pub twist: bool,
    /// *Bisecting*.
    pub bisecting: bool,
    /// Ties between sample axes that hang on one axis, and that axis.
    pub ties: &'a [Tie],
    /// Ties between other sample axes.
    pub more_ties: &'a [Tie],
    /// Ties of sample axes to detector axes, where the detector follows Q.
    pub beam_ties: &'a [Tie],
}

/// The road for a chain of moving axes.
///
/// # Errors
/// If no road covers the combination.
pub fn plan(links: &Links, wishes: &Wishes<'_>) -> Result<Plan, RuleError> {
    let moving = links.directions().len();
    if moving < 2 {
        return Err(not_covered());
    }
    if wishes.bisecting && links.carried_by_crystal(&links.spindle) && links.carried_by_crystal(&links.reference) {
        return Err(RuleError::NotCovered(
            "bisecting: with the other rules spindle and reference axis both stand still against the crystal, so turning \
             changes nothing; accepted is another reference axis, or another rule"
                .to_owned(),
        ));
    }
    let Wishes { twist, bisecting, ties, more_ties, beam_ties } = *wishes;
    let left = |taken: usize| moving.checked_sub(1 + taken).ok_or_else(not_covered);
    match (ties, beam_ties) {
        ([], []) => untied(links, twist, bisecting),
        ([first, ..], []) => tied(left(ties.len())?, Along::Tied(first.to), more_ties, twist, bisecting),
        (rest, beam_ties) if more_ties.is_empty() => tied(left(beam_ties.len())?, Along::Beam, rest, twist, bisecting),
        _ => Err(not_covered()),
    }
}

fn untied(links: &Links, twist: bool, bisecting: bool) -> Result<Plan, RuleError> {
    let moving = links.directions().len();
    Ok(match (moving, twist, bisecting) {
        (2, false, false) => Plan::Closed(Leaf::Pair),
        (3, true, false) => Plan::Closed(Leaf::Turned),
        (3, false, true) if closes(links) => Plan::Closed(Leaf::Bisecting),
        (3, false, true) => {
            let along = Along::Axis(search_axis(links)?);
            Plan::Search { along, leaf: Leaf::Pair, condition: Condition::Bisecting }
        }
        (4, true, true) if fixed_spindle(links) && links.reference.position == 1 => Plan::Closed(Leaf::TurnedBisecting),
        (4, true, true) if fixed_spindle(links) && links.reference.position == 2 && moves(links, &links.reference) => {
            Plan::Closed(Leaf::TurnedBisectingThird)
        }
        (4, true, true) if fixed_spindle(links) && links.reference.position == 0 => {
            return Err(RuleError::SameFreedom {
                first: "bisecting".to_owned(),
                second: "the azimuth".to_owned(),
                freedom: "how the crystal is turned about Q, because neither spindle nor reference axis moves otherwise",
            });
        }
        (4, true, true) => {
            let along = Along::Axis(if links.slots().first() == Some(&BEAM) { 1 } else { 0 });
            Plan::Search { along, leaf: Leaf::Turned, condition: Condition::Bisecting }
        }
        _ => return Err(not_covered()),
    })
}

/// Ties take axes out of the chain; of the conditions left, one more than the closed form can keep is searched for.
fn tied(left: usize, along: Along, rest: &[Tie], twist: bool, bisecting: bool) -> Result<Plan, RuleError> {
    let (leaf, condition) = match (left, rest, twist, bisecting) {
        (1, [], false, false) => (Leaf::Single, Condition::Direction),
        (2, [], true, false) => (Leaf::Pair, Condition::Twist),
        (2, [], false, true) => (Leaf::Pair, Condition::Bisecting),
        (2, [second], false, false) => (Leaf::Pair, Condition::Tie(*second)),
        (3, [], true, true) => (Leaf::Turned, Condition::Bisecting),
        (3, [second], true, false) => (Leaf::Turned, Condition::Tie(*second)),
        _ => return Err(not_covered()),
    };
    Ok(Plan::Search { along, leaf, condition })
}

/// Whether the closed form of *bisecting* serves: the reference stands still, and the spindle is the innermost of three.
fn closes(links: &Links) -> bool {
    links.reference.position == 0
        && links.spindle.position == 2
        && links.directions().get(2) == Some(&links.spindle.direction)
}

/// Whether a mark is one of the moving axes itself.
fn moves(links: &Links, mark: &Mark) -> bool {
    links.directions().get(mark.position) == Some(&mark.direction)
}

/// Whether the place of the spindle follows from how the crystal is turned.
fn fixed_spindle(links: &Links) -> bool {
    links.carried_by_crystal(&links.spindle)
}

/// The moving axis that *bisecting* settles by itself, if there is one that is free. Whatever turns spindle, reference axis
/// and Q together changes nothing, so it is the innermost if that alone lies inside the reference axis, or the outermost if
/// that alone lies outside the spindle and the reference axis stands still.
pub fn settled_by_bisecting(links: &Links, is_free: impl Fn(usize) -> bool) -> Option<usize> {
    let (spindle, reference) = (&links.spindle, &links.reference);
    let last = links.directions().len().checked_sub(1)?;
    let free = |link: usize| links.slots().get(link).is_some_and(|&slot| is_free(slot));
    let outside = reference.position + usize::from(moves(links, reference));
    if outside == last && links.carried_by_crystal(spindle) && free(last) {
        return Some(last);
    }
    (reference.position == 0 && spindle.position == 1 && free(0)).then_some(0)
}

/// The axis whose being held leaves the two most perpendicular to each other.
fn search_axis(links: &Links) -> Result<usize, RuleError> {
    let sine = |link: usize| {
        let rest = links.hold(link, 0.4);
        match rest.directions() {
            [a, b] => a.cross(b).norm(),
            _ => 0.0,
        }
    };
    (0..3).max_by(|&i, &j| sine(i).total_cmp(&sine(j))).ok_or_else(not_covered)
}

fn not_covered() -> RuleError {
    RuleError::NotCovered(
        "this combination of rules needs a search along more than one angle, which is not covered; accepted are ties \
         that hang on one axis, and at most one beside them"
            .to_owned(),
    )
}
