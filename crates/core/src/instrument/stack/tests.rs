use super::*;
use crate::instrument::{BUILT_IN_MACHINES, Inclined, built_in_machine};

fn turned(machine: &str, axis: &str, head: [f64; 3]) -> Vector3<f64> {
    let instrument = built_in_machine(machine).unwrap();
    let mut readings = vec![0.0; instrument.axis_count()];
    readings[instrument.axis_index(axis).unwrap()] = 10.0;
    let [x, y, z] = head;
    *(instrument.lab_from_head(&Setting::new(&readings)) * Vector::new(x, y, z)).raw()
}

/// Machine, axis, vector in the head frame, side, how far.
type Sign = (&'static str, &'static str, [f64; 3], [f64; 3], f64);

/// Signs pinned on basis vectors: +10° on one axis, all others at zero, moves a named vector to a named side, by at
/// least so much.
const SAMPLE_SIGNS: [Sign; 25] = [
    // Vertical axes take downstream to the left.
    ("eulerian-four-circle", "omega", DOWNSTREAM, LEFT, 0.17),
    ("eulerian-four-circle", "phi", DOWNSTREAM, LEFT, 0.17),
    ("kappa-four-circle", "omega", DOWNSTREAM, LEFT, 0.17),
    ("kappa-four-circle", "phi", DOWNSTREAM, LEFT, 0.17),
    ("fixed-chi-three-circle", "omega", DOWNSTREAM, LEFT, 0.17),
    ("six-circle", "mu", DOWNSTREAM, LEFT, 0.17),
    ("lifting-counter", "omega", DOWNSTREAM, LEFT, 0.17),
    ("spindle-with-arcs", "phi", DOWNSTREAM, LEFT, 0.17),
    // cos χ of it.
    ("fixed-chi-three-circle", "phi", DOWNSTREAM, LEFT, 0.09),
    // Axes along the beam take left to up.
    ("eulerian-four-circle", "chi", LEFT, UP, 0.17),
    ("eulerian-four-circle-vertical", "chi", LEFT, UP, 0.17),
    ("six-circle", "chi", LEFT, UP, 0.17),
    ("spindle-with-arcs", "tilt_across", LEFT, UP, 0.17),
    // sin 50° of it, and cos 50° of what the axis it leans from does.
    ("kappa-four-circle", "kappa", LEFT, UP, 0.13),
    ("kappa-four-circle", "kappa", DOWNSTREAM, LEFT, 0.11),
    ("kappa-four-circle-vertical", "kappa", LEFT, UP, 0.13),
    ("kappa-four-circle-vertical", "kappa", DOWNSTREAM, UP, 0.11),
    // Horizontal axes across the beam take downstream up.
    ("eulerian-four-circle-vertical", "omega", DOWNSTREAM, UP, 0.17),
    ("eulerian-four-circle-vertical", "phi", DOWNSTREAM, UP, 0.17),
    ("kappa-four-circle-vertical", "omega", DOWNSTREAM, UP, 0.17),
    ("kappa-four-circle-vertical", "phi", DOWNSTREAM, UP, 0.17),
    ("six-circle", "omega", DOWNSTREAM, UP, 0.17),
    ("six-circle", "phi", DOWNSTREAM, UP, 0.17),
    ("spindle-with-arcs", "tilt_along", DOWNSTREAM, UP, 0.17),
    ("spindle-with-arcs", "tilt_along", UP, UPSTREAM, 0.17),
];
const LEFT: [f64; 3] = [1.0, 0.0, 0.0];
const UP: [f64; 3] = [0.0, 1.0, 0.0];
const DOWNSTREAM: [f64; 3] = [0.0, 0.0, 1.0];
const UPSTREAM: [f64; 3] = [0.0, 0.0, -1.0];

#[test]
fn positive_angles_turn_the_crystal_the_right_handed_way() {
    for (machine, axis, vector, side, at_least) in SAMPLE_SIGNS {
        let moved = turned(machine, axis, vector).dot(&Vector3::from(side));
        assert!(moved > at_least, "{machine}: {axis} takes {vector:?} to {side:?}: {moved}");
    }
    for (machine, _) in BUILT_IN_MACHINES {
        for axis in built_in_machine(machine).unwrap().sample_axes() {
            let pinned = SAMPLE_SIGNS.iter().any(|row| (row.0, row.1) == (machine, axis.name.as_str()));
            assert!(pinned, "{machine}: no sign of {} is pinned", axis.name);
        }
    }
}

/// Machine, detector axis, side that +10° takes the detector to.
const DETECTOR_SIGNS: [(&str, &str, [f64; 3]); 11] = [
    ("eulerian-four-circle", "two_theta", LEFT),
    ("kappa-four-circle", "two_theta", LEFT),
    ("fixed-chi-three-circle", "two_theta", LEFT),
    ("eulerian-four-circle-vertical", "two_theta", UP),
    ("kappa-four-circle-vertical", "two_theta", UP),
    ("six-circle", "nu", LEFT),
    ("six-circle", "delta", UP),
    ("lifting-counter", "gamma", LEFT),
    ("lifting-counter", "lift", UP),
    ("spindle-with-arcs", "gamma", LEFT),
    ("spindle-with-arcs", "lift", UP),
];

#[test]
fn positive_detector_angles_swing_the_detector_to_the_left_or_up() {
    for (machine, axis, side) in DETECTOR_SIGNS {
        let instrument = built_in_machine(machine).unwrap();
        let mut readings = vec![0.0; instrument.axis_count()];
        readings[instrument.axis_index(axis).unwrap()] = 10.0;
        let setting = Setting::new(&readings);
        assert!(instrument.diffracted_direction(&setting).raw().dot(&Vector3::from(side)) > 0.17, "{machine}: {axis}");
        assert!((instrument.two_theta_rad(&setting).to_degrees() - 10.0).abs() < 1e-12);
        let q = instrument.q_in_lab(&setting, 0.5);
        assert!((q.norm() - 2.0 * 5f64.to_radians().sin() / 0.5).abs() < 1e-12, "|Q| = 2 sin θ / λ");
    }
    let count: usize =
        BUILT_IN_MACHINES.iter().map(|(name, _)| built_in_machine(name).unwrap().detector_axes().len()).sum();
    assert_eq!(count, DETECTOR_SIGNS.len(), "every detector axis is pinned");
}

/// The arm that lifts rides on the one about the vertical: it moves in the vertical plane that the other has turned to.
#[test]
fn the_lifting_arm_rides_on_the_vertical_one() {
    for (machine, last) in [("six-circle", 5), ("lifting-counter", 2), ("spindle-with-arcs", 4)] {
        let instrument = built_in_machine(machine).unwrap();
        let mut readings = vec![0.0; instrument.axis_count()];
        (readings[last - 1], readings[last]) = (90.0, 30.0);
        let at = *instrument.diffracted_direction(&Setting::new(&readings)).raw();
        assert!((at - Vector3::new(30f64.to_radians().cos(), 0.5, 0.0)).norm() < 1e-15, "{machine}: {at}");
    }
}

/// From the definition alone: cos of the angle to the direction, sin along the part of `towards` across it.
#[test]
fn an_inclined_axis_leans_by_its_angle() {
    let alpha = 50f64.to_radians();
    let kappa = |machine: &str| built_in_machine(machine).unwrap().sample_axes()[1].direction.into_inner();
    let off = kappa("kappa-four-circle") - Vector3::new(0.0, alpha.cos(), alpha.sin());
    assert!(off.norm() < 1e-15, "{off}");
    let off = kappa("kappa-four-circle-vertical") - Vector3::new(-alpha.cos(), 0.0, alpha.sin());
    assert!(off.norm() < 1e-15, "{off}");
    let with = |direction, towards, by_deg: f64| {
        let mut description: MachineDescription = ron::from_str(BUILT_IN_MACHINES[1].1).unwrap();
        let vector = |[x, y, z]: [f64; 3]| [x, y, z].map(|c| Component::new(c).unwrap()).into();
        description.sample_axes[1].direction = vector(direction);
        let by_deg = crate::quantity::Inclination::new(by_deg).unwrap();
        description.sample_axes[1].inclined = Some(Inclined { towards: vector(towards), by_deg });
        Instrument::new(description).map(|instrument| instrument.sample_axes()[1].direction.into_inner())
    };
    // Neither length nor the part along the direction matters; beyond 90° the axis points backwards.
    let off = with([0.0, -3.0, 0.0], [0.0, 4.0, 2.0], 130.0).unwrap() - kappa("kappa-four-circle");
    assert!(off.norm() < 1e-15, "{off}");
    for (towards, piece) in [([0.0, 2.0, 0.0], "parallel"), ([0.0, -1.0, 1e-7], "parallel"), ([0.0; 3], "no length")] {
        let problem = with([0.0, 3.0, 0.0], towards, 50.0).unwrap_err();
        assert_eq!(problem.path, "sample_axes[1].inclined.towards");
        assert!(problem.message.contains(piece), "{problem}");
    }
}

fn refused(change: impl Fn(&mut MachineDescription)) -> MachineProblem {
    let mut description: MachineDescription = ron::from_str(BUILT_IN_MACHINES[0].1).unwrap();
    change(&mut description);
    Instrument::new(description).unwrap_err()
}

#[test]
fn misfits_are_refused_with_their_place() {
    let double = refused(|d| d.detector_axes[0].name = d.sample_axes[0].name.clone());
    assert_eq!(double.path, "detector_axes[0].name");
    let zero = crate::quantity::Component::new(0.0).unwrap();
    assert_eq!(refused(|d| d.sample_axes[1].direction = (zero, zero, zero)).path, "sample_axes[1].direction");
    assert_eq!(refused(|d| d.sample_axes.clear()).path, "sample_axes");
    let far = crate::quantity::Degrees::new(999.0).unwrap();
    assert_eq!(refused(|d| d.sample_axes[0].park_deg = far).path, "sample_axes[0].park_deg");
    let name = crate::instrument::AxisName::new("two_theta").unwrap();
    assert_eq!(refused(|d| d.spindle = Some(name.clone())).path, "spindle");
    assert_eq!(refused(|d| d.sample_axes[2].set_by_hand = true).path, "spindle");
}
