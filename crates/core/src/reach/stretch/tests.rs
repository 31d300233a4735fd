//! A table agrees with the judgement of each reflection alone, whatever the machine and however wide the numbers are.

use nalgebra::{Rotation3, Vector3};
use proptest::prelude::*;

use super::*;
use crate::aim::{Preference, Rule};
use crate::frames::{Head, Vector};
use crate::instrument::{BUILT_IN_MACHINES, Instrument, Interval, Limits, MachineDescription, Setting};
use crate::lanes::every_width;
use crate::quantity::{Component, Degrees};
use crate::testing::{cases, unit_vector};

/// How well R U B h = Q must hold, relative to |Q|.
const FORWARD_TOLERANCE: f64 = 1e-10;

const WAVELENGTH: f64 = 0.71;

/// The columns that a stretch fills.
#[derive(Debug, Clone, PartialEq)]
struct Columns {
    d_angstrom: Vec<f64>,
    verdict: Vec<Verdict>,
    readings_deg: Vec<f64>,
}

struct Whole<'a> {
    judge: &'a Judge,
    ub: &'a Matrix3<f64>,
    axis_count: usize,
    hkl: &'a [Hkl],
}

impl Wide for Whole<'_> {
    type Output = Columns;

    #[inline(always)]
    fn work<T: Real>(self, zero: T) -> Columns {
        let Self { judge, ub, axis_count, hkl } = self;
        let mut columns = Columns {
            d_angstrom: vec![0.0; hkl.len()],
            verdict: vec![Verdict::Reachable; hkl.len()],
            readings_deg: vec![0.0; hkl.len() * axis_count],
        };
        let Columns { d_angstrom, verdict, readings_deg } = &mut columns;
        let wavelength_angstrom = WAVELENGTH;
        Stretch { judge, ub, wavelength_angstrom, axis_count, hkl, d_angstrom, verdict, readings_deg }.work(zero);
        columns
    }
}

/// What is drawn to make a machine of a built-in one.
#[derive(Debug, Clone)]
struct Change {
    machine: usize,
    /// The whole machine is turned by this axis and angle, and every axis of its own after that.
    turned: (Vector3<f64>, f64),
    tilts: [Vector3<f64>; 4],
    tilted_by: f64,
    zeros_deg: [f64; 4],
    /// Centre and half width of the interval of each axis, and the kind: kept as it is, one, two, or endless.
    limits: [(f64, f64, u8); 4],
}

fn change() -> impl Strategy<Value = Change> {
    let tilted_by = prop_oneof![Just(0.0), Just(1e-13), Just(0.02), Just(1.0)];
    (
        0..BUILT_IN_MACHINES.len(),
        (unit_vector(), prop_oneof![Just(0.0), -3.0..3.0f64]),
        prop::array::uniform4(unit_vector()),
        tilted_by,
        prop::array::uniform4(prop_oneof![Just(0.0), -20.0..20.0f64]),
        prop::array::uniform4((-90.0..90.0f64, 10.0..250.0f64, 0..4u8)),
    )
        .prop_map(|(machine, turned, tilts, tilted_by, zeros_deg, limits)| Change {
            machine,
            turned,
            tilts,
            tilted_by,
            zeros_deg,
            limits,
        })
}

fn degrees(value: f64) -> Degrees {
    Degrees::new(value).unwrap()
}

fn intervals(centre: f64, half: f64, kind: u8) -> Limits {
    let interval = |from: f64, to: f64| Interval { from_deg: degrees(from), to_deg: degrees(to) };
    match kind {
        1 => Limits::Intervals(vec![interval(centre - half, centre + half)]),
        2 => Limits::Intervals(vec![interval(centre - half, centre - 0.2 * half), interval(centre, centre + half)]),
        _ => Limits::Endless,
    }
}

fn machine(change: &Change) -> Option<Instrument> {
    let mut description: MachineDescription = ron::from_str(BUILT_IN_MACHINES[change.machine].1).unwrap();
    let turn = Rotation3::new(change.turned.0 * change.turned.1);
    let axes = description.sample_axes.iter_mut().chain(&mut description.detector_axes);
    for (i, axis) in axes.enumerate() {
        let (x, y, z) = axis.direction;
        let direction = turn * Vector3::new(x.get(), y.get(), z.get()) + change.tilts[i] * change.tilted_by;
        let component = |value: f64| Component::new(value).unwrap();
        axis.direction = (component(direction.x), component(direction.y), component(direction.z));
        axis.zero_offset_deg = degrees(change.zeros_deg[i]);
        let (centre, half, kind) = change.limits[i];
        if kind > 0 {
            (axis.limits, axis.park_deg) = (intervals(centre, half, kind), degrees(centre + 0.5 * half));
        }
    }
    Instrument::new(description).ok()
}

/// *Bisecting* and *hold* of each axis where an angle is spare, no rule where none is.
fn rule_sets(instrument: &Instrument) -> Vec<Vec<Rule>> {
    if instrument.sample_axes().len() < 3 {
        return vec![Vec::new()];
    }
    let hold = |i: usize| {
        let axis = &instrument.sample_axes()[i];
        vec![Rule::Hold { axis: axis.name.clone(), at_deg: degrees(axis.park_deg) }]
    };
    vec![vec![Rule::Bisecting], hold(0), hold(1), hold(2)]
}

/// Nodes in the head frame: anywhere, along every axis of the machine, on the sphere, outside it, in the beam.
fn nodes(instrument: &Instrument, drawn: &[(Vector3<f64>, f64)]) -> Vec<Vector3<f64>> {
    let mut nodes: Vec<Vector3<f64>> = drawn.iter().map(|(direction, length)| direction * *length).collect();
    let edge = 2.0 / WAVELENGTH;
    for axis in instrument.axes() {
        for length in [0.7, edge, edge * (1.0 - 1e-15), 1.1 * edge, 0.02] {
            nodes.push(axis.direction.into_inner() * length);
            nodes.push(-axis.direction.into_inner() * length);
        }
    }
    nodes
}

fn check(instrument: &Instrument, judge: &Judge, ub: &Matrix3<f64>, hkl: &[Hkl]) -> Result<usize, TestCaseError> {
    let axis_count = instrument.axis_count();
    let all = every_width(|| Whole { judge, ub, axis_count, hkl });
    for other in &all[1..] {
        prop_assert_eq!(&all[0], other);
    }
    let columns = &all[0];
    let mut reachable = 0;
    for (i, hkl) in hkl.iter().enumerate() {
        let node: Vector<Head> = Vector::from_raw(ub * hkl.to_vector());
        let alone = judge.verdict(node, WAVELENGTH);
        prop_assert_eq!(columns.verdict[i], alone.verdict);
        prop_assert!((columns.d_angstrom[i] * node.norm() - 1.0).abs() < 1e-14);
        let readings = &columns.readings_deg[i * axis_count..(i + 1) * axis_count];
        if !alone.verdict.is_reachable() {
            prop_assert!(readings.iter().all(|&reading| reading == 0.0));
            continue;
        }
        reachable += 1;
        let chosen = alone.setting.and_then(|judged| judged.setting).unwrap();
        prop_assert_eq!(readings, chosen.readings_deg());
        let setting = Setting::new(readings);
        let reached = instrument.lab_from_head(&setting) * node;
        let error = (reached - instrument.q_in_lab(&setting, WAVELENGTH)).norm() / node.norm();
        prop_assert!(error < FORWARD_TOLERANCE, "{setting:?} misses by {error:e}");
    }
    Ok(reachable)
}

proptest! {
    #![proptest_config(cases())]

    #[test]
    fn a_table_agrees_with_each_reflection_alone(
        change in change(), columns in prop::array::uniform3(unit_vector()), scale in 0.01..0.3f64,
        drawn in prop::collection::vec((unit_vector(), 0.05..3.1f64), 0..150),
        near in prop::option::of(prop::array::uniform3(-170.0..170.0f64)),
    ) {
        let ub = Matrix3::from_columns(&columns) * scale;
        prop_assume!(ub.determinant().abs() > 0.1 * scale.powi(3));
        let Some(instrument) = machine(&change) else { return Ok(()) };
        let to_hkl = ub.try_inverse().unwrap();
        let hkl: Vec<Hkl> = nodes(&instrument, &drawn).iter().map(|node| Hkl::from_vector(&(to_hkl * node))).collect();
        let preference = near.map_or(Preference::FarthestFromLimits, |near| Preference::NearestTo {
            readings_deg: instrument.sample_axes().iter().zip(near).map(|(a, deg)| (a.name.clone(), degrees(deg))).collect(),
        });
        for rules in rule_sets(&instrument) {
            if let Ok(judge) = Judge::new(&instrument, &rules, &preference) {
                check(&instrument, &judge, &ub, &hkl)?;
            }
        }
    }
}

#[test]
fn every_length_of_a_table_is_judged_to_its_end() {
    for (name, _) in BUILT_IN_MACHINES {
        let instrument = crate::instrument::built_in_machine(name).unwrap();
        let rules = if instrument.sample_axes().len() < 3 { Vec::new() } else { vec![Rule::Bisecting] };
        let judge = Judge::new(&instrument, &rules, &Preference::default()).unwrap();
        let ub = Matrix3::identity() * 0.1;
        let all: Vec<Hkl> = (0..130).map(|i| Hkl::new(f64::from(i % 7) - 2.5, f64::from(i % 11) - 4.5, 3.5)).collect();
        for count in 0..all.len() {
            let reachable = check(&instrument, &judge, &ub, &all[..count]).unwrap();
            assert!(count < 20 || reachable > 0, "{name}: a test that reaches nothing says nothing");
        }
    }
}
