use nalgebra::Vector3;

use super::General;
use super::arm::{Arm, Multiple, Swing};
use super::goal::Twist;
use super::leaf::{Leaf, Three};
use super::links::{BEAM, Links, rotation};
use super::plan::{Plan, Tie, Wishes, plan, settled_by_bisecting};
use crate::aim::fit::reference_axis;
use crate::aim::{CrystalOnHead, Reference, Rule, RuleError};
use crate::instrument::{Instrument, MAX_AXES};

/// An arm whose axis stands nearer to the beam than this, in radians, swings nothing.
const ALONG_BEAM: f64 = 1e-6;

impl General {
    /// Prepares a machine under rules that have passed [`crate::aim::fit::check`].
    ///
    /// # Errors
    /// If a rule needs the crystal and there is none, or if no road covers the combination.
    pub fn new(instrument: &Instrument, rules: &[Rule], crystal: Option<&CrystalOnHead>) -> Result<Self, RuleError> {
        let sample_count = instrument.sample_axes().len();
        let (mut template_deg, mut zero_deg) = ([0.0; MAX_AXES], [0.0; MAX_AXES]);
        for (i, axis) in instrument.axes().enumerate() {
            zero_deg[i] = axis.zero_offset_deg;
            if axis.set_by_hand {
                template_deg[i] = axis.park_deg;
            }
        }
        let mut held: Vec<usize> = (0..sample_count).filter(|&i| instrument.sample_axes()[i].set_by_hand).collect();
        for rule in rules {
            if let Rule::Hold { axis, at_deg } = rule
                && let Some(i) = instrument.axis_index(axis.as_str())
            {
                held.push(i);
                template_deg[i] = at_deg.get();
            }
        }
        let at = |i: usize| (template_deg[i] - zero_deg[i]).to_radians();
        let (of_held, mut ties) = sort_ties(ties(instrument, rules), |axis| held.contains(&axis))?;
        // A held sample axis may hold a detector axis by a tie, in every turn that a fraction allows.
        let mut still: Vec<(usize, f64)> = held.iter().map(|&i| (i, at(i))).collect();
        for tie in of_held.iter().filter(|tie| tie.axis >= sample_count) {
            let other = still.iter().find(|(axis, _)| *axis == tie.to).map(|&(_, angle)| angle).ok_or_else(not_held)?;
            still.extend(tie.multiple.each_turn(other).map(|angle| (tie.axis, angle)));
        }
        ties.extend(of_held.into_iter().filter(|tie| tie.axis < sample_count));
        let arm = arm(instrument, rules, &still)?;
        let follows = matches!(arm, Arm::Follows(_));
        let mut links = chain(instrument, rules, follows).ok_or_else(too_long)?;
        held.retain(|&i| i < sample_count);
        for &i in &held {
            if let Some(link) = links.place_of(i) {
                links = links.hold(link, at(i));
            }
        }
        let (twist, direction) = twist(rules, crystal)?;
        let known = |axis: usize| held.contains(&axis) || (axis >= sample_count && !follows);
        let (known_ties, open_ties) = sort_ties(ties, known)?;
        let (beam_ties, sample_ties): (Vec<Tie>, Vec<Tie>) = open_ties.iter().partition(|tie| tie.to >= sample_count);
        if beam_ties.iter().enumerate().any(|(i, tie)| beam_ties[..i].iter().any(|other| other.axis == tie.axis)) {
            return Err(RuleError::NotCovered(
                "an axis tied to both detector axes is not covered; accepted is one of the two ties, and one between the \
                 detector axes"
                    .to_owned(),
            ));
        }
        let (ties, more_ties) = largest_group(&sample_ties)?;
        // What hangs on a known axis is held as soon as that is placed: for the road, any angle will do.
        let then = known_ties.iter().fold(links.clone(), |links, tie| match links.place_of(tie.axis) {
            Some(link) => links.hold(link, 0.4),
            None => links,
        });
        let bisecting = rules.iter().any(|rule| matches!(rule, Rule::Bisecting | Rule::BisectingAbout { .. }));
        let tied = |slot: usize| open_ties.iter().any(|tie| tie.axis == slot || tie.to == slot);
        let by_bisecting =
            if bisecting { settled_by_bisecting(&then, |slot| slot != BEAM && !tied(slot)) } else { None };
        let then = by_bisecting.map_or_else(|| then.clone(), |link| then.hold(link, 0.4));
        let wishes = Wishes {
            twist: rules.iter().any(Rule::settles_azimuth),
            bisecting: bisecting && by_bisecting.is_none(),
            ties: &ties,
            more_ties: &more_ties,
            beam_ties: &beam_ties,
        };
        let plan = plan(&then, &wishes)?;
        let three = match (plan, links.directions()) {
            (Plan::Closed(Leaf::Turned), &[a, b, c]) if known_ties.is_empty() => Some(Three::new([a, b, c])),
            _ => None,
        };
        let axis_count = instrument.axis_count();
        Ok(Self {
            links,
            arm,
            plan,
            twist,
            direction,
            known_ties,
            ties,
            beam_ties,
            by_bisecting,
            three,
            template_deg,
            zero_deg,
            sample_count,
            axis_count,
        })
    }
}

/// All sample axes, and outside them the beam where the detector follows Q.
fn chain(instrument: &Instrument, rules: &[Rule], follows: bool) -> Option<Links> {
    let mut axes: Vec<(Vector3<f64>, usize)> = Vec::new();
    if follows {
        axes.push((Vector3::z(), BEAM));
    }
    axes.extend(instrument.sample_axes().iter().enumerate().map(|(i, axis)| (axis.direction.into_inner(), i)));
    let beam = usize::from(follows);
    let reference = reference_axis(instrument, rules).unwrap_or(instrument.spindle());
    Links::new(&axes, instrument.spindle() + beam, reference + beam)
}

fn ties(instrument: &Instrument, rules: &[Rule]) -> Vec<Tie> {
    let zero = |i: usize| instrument.axes().nth(i).map_or(0.0, |axis| axis.zero_offset_deg);
    let tie = |rule: &Rule| {
        let Rule::Tie { axis, to, factor, offset_deg } = rule else { return None };
        let (axis, to, factor) =
            (instrument.axis_index(axis.as_str())?, instrument.axis_index(to.as_str())?, factor.get());
        // reading = factor × other reading + offset, and angle = reading − zero.
        let offset_rad = (factor * zero(to) + offset_deg.get() - zero(axis)).to_radians();
        Some(Tie { axis, to, multiple: Multiple { factor, offset_rad } })
    };
    rules.iter().filter_map(tie).filter(|tie| tie.axis < instrument.sample_axes().len()).collect()
}

/// Ties with one known end, seen from that end and in the order in which they can be kept, and the others.
///
/// # Errors
/// If a tie has two known ends.
fn sort_ties(mut open: Vec<Tie>, known: impl Fn(usize) -> bool) -> Result<(Vec<Tie>, Vec<Tie>), RuleError> {
    let mut settled: Vec<Tie> = Vec::new();
    let is_known = |axis: usize, settled: &[Tie]| known(axis) || settled.iter().any(|other| other.axis == axis);
    while let Some(next) = open.iter().position(|tie| is_known(tie.to, &settled) || is_known(tie.axis, &settled)) {
        let tie = open.remove(next);
        match (is_known(tie.axis, &settled), is_known(tie.to, &settled)) {
            (true, true) => {
                return Err(RuleError::SameFreedom {
                    first: "a tie".to_owned(),
                    second: "what settles both of its axes".to_owned(),
                    freedom: "the angle of an axis",
                });
            }
            (true, false) => settled.push(tie.inverse()),
            _ => settled.push(tie),
        }
    }
    Ok((settled, open))
}

/// The most ties that hang together, seen from one axis, and the others.
fn largest_group(ties: &[Tie]) -> Result<(Vec<Tie>, Vec<Tie>), RuleError> {
    let mut best = (Vec::new(), ties.to_vec());
    for root in ties.iter().map(|tie| tie.to) {
        let group = sort_ties(ties.to_vec(), |axis| axis == root)?;
        if group.0.len() > best.0.len() {
            best = group;
        }
    }
    Ok(best)
}

fn arm(instrument: &Instrument, rules: &[Rule], held: &[(usize, f64)]) -> Result<Arm, RuleError> {
    let sample_count = instrument.sample_axes().len();
    let detector = instrument.detector_axes();
    let direction = |i: usize| detector[i].direction.into_inner();
    let along_beam = || {
        RuleError::NotCovered(
            "the detector axis that moves lies along what it carries and swings nothing; accepted is one across it"
                .to_owned(),
        )
    };
    if detector.len() == 1 {
        let swing = Swing { axis: direction(0), carried: Vector3::z(), beam: Vector3::z(), position: 0, still: None };
        return if swings(&swing) { Ok(Arm::Swing(vec![swing])) } else { Err(along_beam()) };
    }
    let axes = [direction(0), direction(1)];
    let still: Vec<(usize, f64)> =
        held.iter().filter_map(|&(axis, angle)| Some((axis.checked_sub(sample_count)?, angle))).collect();
    if !still.is_empty() {
        let all: Vec<Swing> = still.iter().map(|&(other, angle)| beside(&axes, other, angle)).collect();
        return if all.iter().all(swings) { Ok(Arm::Swing(all)) } else { Err(along_beam()) };
    }
    for rule in rules {
        match rule {
            Rule::DiffractionPlane { turned_deg } => {
                return Ok(Arm::Plane { axes, turned_rad: turned_deg.get().to_radians() });
            }
            Rule::Tie { axis, to, factor, offset_deg } => {
                let place = |name: &str| instrument.axis_index(name).and_then(|i| i.checked_sub(sample_count));
                if let (Some(tied), Some(other)) = (place(axis.as_str()), place(to.as_str())) {
                    let zero = |i: usize| detector[i].zero_offset_deg;
                    let offset = factor.get() * zero(other) + offset_deg.get() - zero(tied);
                    let tie = Multiple { factor: factor.get(), offset_rad: offset.to_radians() };
                    return Ok(Arm::Tied { axes, tied, tie });
                }
            }
            _ => {}
        }
    }
    Ok(Arm::Follows(axes))
}

/// One of two detector axes stands still at an angle.
fn beside(axes: &[Vector3<f64>; 2], other: usize, still: f64) -> Swing {
    let turn = rotation(&axes[other], still);
    let position = 1 - other;
    let (carried, beam, outer) = match other {
        0 => (Vector3::z(), turn.inverse() * Vector3::z(), Some(axes[0])),
        _ => (turn * Vector3::z(), Vector3::z(), None),
    };
    Swing { axis: axes[position], carried, beam, position, still: Some((still, outer)) }
}

fn swings(swing: &Swing) -> bool {
    swing.axis.cross(&swing.carried).norm() > ALONG_BEAM
}

/// The rule that settles the azimuth, and the direction that it speaks of.
fn twist(
    rules: &[Rule],
    crystal: Option<&CrystalOnHead>,
) -> Result<(Option<Twist>, Option<crate::frames::Vector<crate::frames::Head>>), RuleError> {
    let Some(rule) = rules.iter().find(|rule| rule.settles_azimuth()) else { return Ok((None, None)) };
    let crystal = crystal.ok_or(RuleError::NeedsOrientation(rule.word()))?;
    let rad = |deg: &crate::quantity::Degrees| deg.get().to_radians();
    let surface = crystal.surface.as_ref();
    let (twist, reference): (Option<Twist>, Option<&Reference>) = match rule {
        Rule::Azimuth { reference, at_deg } => (Some(Twist::Azimuth(rad(at_deg))), Some(reference)),
        Rule::Incidence { at_deg } => (Some(Twist::Incidence(rad(at_deg))), surface),
        Rule::Exit { at_deg } => (Some(Twist::Exit(rad(at_deg))), surface),
        Rule::EqualIncidenceAndExit => (Some(Twist::Equal), surface),
        Rule::Freest { reference, .. } => (None, Some(reference)),
        _ => (None, None),
    };
    let direction = reference.and_then(|reference| reference.in_head(&crystal.ub));
    match direction {
        Some(direction) => Ok((twist, Some(direction))),
        None => Err(RuleError::NeedsOrientation(rule.word())),
    }
}

fn not_held() -> RuleError {
    RuleError::NotCovered(
        "a detector axis tied to an axis that is itself tied is not covered; accepted is a tie to a held axis"
            .to_owned(),
    )
}

fn too_long() -> RuleError {
    RuleError::NotCovered("more than four sample axes are not covered; accepted are one to four".to_owned())
}
