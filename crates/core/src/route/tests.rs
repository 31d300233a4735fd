use nalgebra::{Matrix3, Rotation3, Vector3};
use proptest::prelude::*;

use super::clock::{MachineClock, Place, Places};
use super::order::nearest_neighbour;
use super::*;
use crate::aim::{Preference, Rule};
use crate::crystal::UnitCell;
use crate::frames::{Hkl, Vector};
use crate::instrument::{BUILT_IN_MACHINES, Instrument, MAX_AXES, MachineDescription, Setting, built_in_machine};
use crate::pace::{Pace, Unhurried};
use crate::reach::{Judge, Stopped};
use crate::testing::cases;

const WAVELENGTH: f64 = 0.71;

fn eulerian() -> Instrument {
    built_in_machine("eulerian-four-circle").unwrap()
}

/// A machine like a built-in one, with words of its file replaced.
fn changed(machine: &str, changes: &[(&str, &str)]) -> Instrument {
    let (_, text) = BUILT_IN_MACHINES.iter().find(|(name, _)| *name == machine).unwrap();
    let mut text = (*text).to_owned();
    for (from, to) in changes {
        assert!(text.contains(from), "{from}");
        text = text.replace(from, to);
    }
    Instrument::new(ron::from_str::<MachineDescription>(&text).unwrap()).unwrap()
}

/// Built-in machines whose settings need no other rule than *bisecting*.
fn one_detector_axis() -> impl Iterator<Item = &'static str> {
    let names = BUILT_IN_MACHINES.iter().map(|(name, _)| *name);
    names.filter(|name| built_in_machine(name).unwrap().detector_axes().len() == 1)
}

fn some_ub() -> Matrix3<f64> {
    let cell = UnitCell::new(7.1, 8.3, 10.2, 90.0, 101.0, 90.0).unwrap();
    let u = Rotation3::from_axis_angle(&nalgebra::Unit::new_normalize(Vector3::new(0.3, -0.8, 0.5)), 1.2);
    u.matrix() * cell.b_matrix()
}

fn candidates(instrument: &Instrument, ub: &Matrix3<f64>, range: i32) -> Vec<Candidate> {
    let rules: &[Rule] = if instrument.axis_count() == 3 { &[] } else { &[Rule::Bisecting] };
    let judge = Judge::new(instrument, rules, &Preference::default()).unwrap();
    let mut found = Vec::new();
    for h in -range..=range {
        for k in -range..=range {
            for l in -range..=range {
                let hkl = Hkl::from([h, k, l]);
                if [h, k, l] == [0; 3] {
                    continue;
                }
                let judgement = judge.verdict(Vector::from_raw(ub * hkl.to_vector()), WAVELENGTH);
                if judgement.verdict.is_reachable() {
                    found.push(Candidate { hkl, setting: judgement.setting.unwrap().setting.unwrap() });
                }
            }
        }
    }
    found
}

fn plan(instrument: &Instrument, ub: &Matrix3<f64>, candidates: &[Candidate]) -> DriveList {
    let course = Course { instrument, ub, wavelength_angstrom: WAVELENGTH };
    DriveList::plan(candidates, &course, &Unhurried).unwrap()
}

fn as_given(list: &DriveList, fingerprint: Option<Fingerprint>) -> GivenList {
    let row = |(i, row): (usize, &DriveRow)| GivenRow {
        line: i as u64 + 2,
        hkl: row.hkl,
        setting: row.setting,
        drive_s: Some(row.drive_s),
    };
    let rows = list.rows.iter().enumerate().map(row).collect();
    GivenList { rows, fingerprint, stated_rows: None, unread_columns: Vec::new() }
}

#[test]
fn every_plan_passes_and_adds_up() {
    for name in one_detector_axis() {
        let (machine, ub) = (built_in_machine(name).unwrap(), some_ub());
        let wanted = candidates(&machine, &ub, 3);
        assert!(wanted.len() > 50, "{name}");
        let list = plan(&machine, &ub, &wanted);
        assert_eq!((list.rows.len(), list.left_out.len()), (wanted.len(), 0), "{name}");
        let prover = Prover { instrument: &machine, ub: &ub, wavelength_angstrom: WAVELENGTH, tolerance_deg: 2e-4 };
        let now = Fingerprint::of(&ub, WAVELENGTH, &machine);
        let verification = Verification::of(&as_given(&list, Some(now)), &prover);
        assert!(verification.passed(), "{name}: {:?}", verification.rejected().next());
        assert_eq!(verification.wrong_times, 0, "{name}");
        let mut sum = 0.0;
        for row in &list.rows {
            sum += row.drive_s;
            assert!((row.elapsed_s - sum).abs() < 1e-6);
            for reading in row.setting.readings_deg() {
                assert!((reading * 1e4 - (reading * 1e4).round()).abs() < 1e-6, "{reading} has more than 4 decimals");
            }
        }
        assert!((list.total_s - sum).abs() < 1e-6);
        let in_given_order: f64 =
            wanted.windows(2).map(|pair| machine.drive(&pair[0].setting, &pair[1].setting).unwrap().1).sum();
        assert!(list.total_s < 0.8 * in_given_order, "{name}: {} against {in_given_order}", list.total_s);
    }
}

/// The order by looking at every row left, under [`Instrument::drive`].
fn by_hand(machine: &Instrument, settings: &[Setting]) -> Vec<(usize, f64)> {
    let mut left: Vec<usize> = (0..settings.len()).collect();
    let (mut here, mut order) = (machine.park(), Vec::new());
    while !left.is_empty() {
        let drives = left.iter().map(|&i| machine.drive(&here, &settings[i]).unwrap());
        let (position, (to, seconds)) =
            drives.enumerate().reduce(|best, next| if next.1.1 < best.1.1 - 1e-9 { next } else { best }).unwrap();
        order.push((left.remove(position), seconds));
        here = to.rounded(4);
    }
    order
}

fn places(machine: &Instrument, settings: &[Setting]) -> Vec<Places> {
    let clock = MachineClock::new(machine);
    let of = |setting: &Setting| {
        let mut places = [Place::default(); MAX_AXES];
        for (i, (axis, reading)) in clock.axes.iter().zip(setting.readings_deg()).enumerate() {
            places[i] = axis.place(*reading).unwrap();
        }
        places
    };
    settings.iter().map(of).collect()
}

proptest! {
    #![proptest_config(cases())]

    /// Also where rows share readings, lie at full turns from each other and tie: readings are multiples of 30°.
    #[test]
    fn the_search_finds_what_a_look_at_every_row_finds(
        name in 0usize..3,
        coarse in any::<bool>(),
        raw in prop::collection::vec(prop::array::uniform4(-1.0..1.0f64), 1..60),
    ) {
        let machine = built_in_machine(BUILT_IN_MACHINES[name].0).unwrap();
        let settings: Vec<Setting> = raw
            .iter()
            .map(|row| {
                let fit = |(axis, part): (&crate::instrument::Axis, &f64)| {
                    let (low, high) = axis.travel.intervals_deg().next().unwrap_or((-720.0, 720.0));
                    let reading = 0.5 * (low + high) + 0.5 * part * (high - low);
                    let step = if coarse { 30.0 } else { 1e-4 };
                    let stepped = (reading / step).trunc() * step;
                    if stepped >= low && stepped <= high { stepped } else { 0.0 }
                };
                let readings: Vec<f64> = machine.axes().zip(row).map(fit).collect();
                Setting::new(&readings).rounded(4)
            })
            .collect();
        let clock = MachineClock::new(&machine);
        let order =
            nearest_neighbour(&clock, machine.park().readings_deg(), &places(&machine, &settings), &Unhurried).unwrap();
        let expected = by_hand(&machine, &settings);
        // Times are compared: where two ways tie to rounding, either row is right, and all that follows may differ.
        let mut here = machine.park();
        for (step, (&row, (due, due_s))) in order.iter().zip(&expected).enumerate() {
            let (to, seconds) = machine.drive(&here, &settings[row]).unwrap();
            prop_assert!((seconds - due_s).abs() < 1e-9, "step {step}: {seconds} s to {row}, due {due_s} s to {due}");
            if row != *due {
                break;
            }
            here = to.rounded(4);
        }
        let mut once = order.clone();
        once.sort_unstable();
        prop_assert_eq!(once, (0..settings.len()).collect::<Vec<_>>());
    }
}

#[test]
fn the_clock_of_the_search_is_that_of_the_machine() {
    let machine = changed("kappa-four-circle", &[("from_deg: -190, to_deg: 190", "from_deg: -400, to_deg: 500")]);
    let clock = MachineClock::new(&machine);
    let ends = [-170.0, -0.0001, 0.0, 33.3333, 90.0, 174.0];
    for from in ends {
        for to in ends {
            for (axis, fast) in machine.axes().zip(&clock.axes) {
                if axis.travel.clearance_as_read_deg(from).min(axis.travel.clearance_as_read_deg(to)) < 0.0 {
                    continue;
                }
                let (reading, seconds) = axis.soonest(from, to).unwrap();
                let place = fast.place(to).unwrap();
                assert!((fast.seconds(from, &place) - seconds).abs() < 1e-9, "{} {from} {to}", axis.name);
                assert!((fast.arrival_deg(from, &place) - reading).abs() < 1e-4);
            }
        }
    }
}

#[test]
fn readings_at_a_limit_are_rounded_to_the_inside() {
    let ub = some_ub();
    let machine = eulerian();
    let wanted = candidates(&machine, &ub, 3);
    // The largest chi of all becomes the limit, with all its decimals; rounded up it would be over.
    let chi = |c: &Candidate| c.setting.readings_deg()[1];
    let rounds_up = |c: &&Candidate| (chi(c) * 1e4).round() / 1e4 > chi(c) && chi(c) > 10.0;
    let edge = wanted.iter().filter(rounds_up).max_by(|a, b| chi(a).total_cmp(&chi(b))).unwrap();
    let limit = format!("from_deg: -100, to_deg: {}", chi(edge));
    let narrow = changed("eulerian-four-circle", &[("from_deg: -100, to_deg: 100", &limit)]);
    let list = plan(&narrow, &ub, &[*edge]);
    let written = list.rows[0].setting.readings_deg()[1];
    assert!(written < chi(edge) && chi(edge) - written < 1e-4, "{written} against {}", chi(edge));
}

#[test]
fn a_gap_that_cannot_be_crossed_leaves_rows_out_with_the_reason() {
    let two = "from_deg: -100, to_deg: -20), (from_deg: -10, to_deg: 100";
    let machine = changed("eulerian-four-circle", &[("from_deg: -100, to_deg: 100", two)]);
    let ub = some_ub();
    let wanted = candidates(&machine, &ub, 3);
    let beyond = wanted.iter().filter(|c| c.setting.readings_deg()[1] < -20.0).count();
    assert!(beyond > 0);
    let list = plan(&machine, &ub, &wanted);
    assert_eq!(list.left_out.len(), beyond);
    assert_eq!(list.rows.len() + beyond, wanted.len());
    let text = list.left_out[0].reason.text(&machine);
    assert!(text.starts_with("chi cannot go from park at 0.0000°"), "{text}");
    // Someone else's list that crosses the gap is rejected.
    let prover = Prover { instrument: &machine, ub: &ub, wavelength_angstrom: WAVELENGTH, tolerance_deg: 0.01 };
    let across = wanted.iter().find(|c| c.setting.readings_deg()[1] < -20.0).unwrap().setting.rounded(4);
    let faults = prover.drive(&list.rows[0].setting, &across);
    assert!(matches!(faults[..], [Fault::NoDrive { axis: 1, .. }]), "{faults:?}");
}

#[test]
fn an_endless_axis_takes_the_short_way_and_is_checked_as_read() {
    let machine = eulerian();
    let row = |phi| Setting::new(&[10.0, 20.0, phi, 20.0]);
    let settings = [row(170.0), row(-170.0), row(-150.0)];
    let clock = MachineClock::new(&machine);
    let order = nearest_neighbour(&clock, &[0.0, 0.0, 100.0, 0.0], &places(&machine, &settings), &Unhurried).unwrap();
    assert_eq!(order, [0, 1, 2]);
    let arrival = clock.axes[2].arrival_deg(170.0, &clock.axes[2].place(-170.0).unwrap());
    assert_eq!(arrival, 190.0);
}

#[test]
fn every_fault_is_found() {
    let (machine, ub) = (eulerian(), some_ub());
    let prover = Prover { instrument: &machine, ub: &ub, wavelength_angstrom: WAVELENGTH, tolerance_deg: 0.01 };
    let list = plan(&machine, &ub, &candidates(&machine, &ub, 2));
    let row = list.rows[3];
    let with = |axis: usize, change: &dyn Fn(f64) -> f64| {
        let mut readings = row.setting.readings_deg().to_vec();
        readings[axis] = change(readings[axis]);
        prover.row(row.hkl, &Setting::new(&readings)).faults
    };
    assert_eq!(with(0, &|x| x), vec![]);
    assert!(matches!(with(0, &|x| x + 0.02)[..], [Fault::Direction { by_deg }] if (by_deg - 0.02).abs() < 2e-3));
    let moved = with(3, &|x| x + 0.02);
    assert!(
        matches!(moved[0], Fault::TwoTheta { stands_at_deg, due_deg } if (stands_at_deg - due_deg - 0.02).abs() < 2e-4)
    );
    assert!(
        with(1, &|_| 150.0).iter().any(|f| matches!(f, Fault::OverLimit { axis: 1, by_deg, .. } if *by_deg == 50.0))
    );
    assert!(with(3, &|_| 0.0).iter().any(|f| matches!(f, Fault::InDirectBeam { by_deg } if *by_deg == 3.0)));
    assert_eq!(prover.row(Hkl::new(0.0, 0.0, 0.0), &row.setting).faults, [Fault::Origin]);
    let far = prover.row(Hkl::new(90.0, 0.0, 0.0), &row.setting).faults;
    assert!(matches!(far[..], [Fault::OutsideSphere { .. }]));
    assert!(matches!(prover.row(-row.hkl, &row.setting).faults[..], [Fault::Direction { by_deg }] if by_deg > 179.9));
}

#[test]
fn an_axis_set_by_hand_must_stay() {
    let by_hand = ("speed_deg_per_s: 3,", "speed_deg_per_s: 3, set_by_hand: true, park_deg: 20,");
    let machine = changed("eulerian-four-circle", &[by_hand]);
    let ub = some_ub();
    let prover = Prover { instrument: &machine, ub: &ub, wavelength_angstrom: WAVELENGTH, tolerance_deg: 0.01 };
    let faults = prover.row(Hkl::new(1.0, 0.0, 0.0), &Setting::new(&[0.0, 21.0, 0.0, 20.0])).faults;
    assert!(faults.iter().any(|f| matches!(f, Fault::SetByHand { axis: 1, set_to_deg, .. } if *set_to_deg == 20.0)));
    let faults = prover.row(Hkl::new(1.0, 0.0, 0.0), &Setting::new(&[0.0, 20.0, 0.0, 20.0])).faults;
    assert!(!faults.iter().any(|f| matches!(f, Fault::SetByHand { .. })));
}

#[test]
fn another_session_and_missing_rows_are_noticed() {
    let (machine, ub) = (eulerian(), some_ub());
    let list = plan(&machine, &ub, &candidates(&machine, &ub, 1));
    let prover = Prover { instrument: &machine, ub: &ub, wavelength_angstrom: WAVELENGTH, tolerance_deg: 0.01 };
    let other = Fingerprint::of(&ub, 0.72, &machine);
    let changed = Verification::of(&as_given(&list, Some(other)), &prover);
    assert!(matches!(changed.session, SessionMatch::Changed { listed, .. } if listed == other));
    assert!(!changed.passed() && changed.proven() == list.rows.len());
    let unstated = Verification::of(&as_given(&list, None), &prover);
    assert!(unstated.passed() && matches!(unstated.session, SessionMatch::Unstated { .. }));
    let short = GivenList { stated_rows: Some(list.rows.len() + 1), ..as_given(&list, None) };
    assert!(!Verification::of(&short, &prover).passed());
    let empty = GivenList { rows: Vec::new(), ..as_given(&list, None) };
    assert!(!Verification::of(&empty, &prover).passed(), "an empty list proves nothing");
}

struct Never;
impl Pace for Never {
    fn proceed(&self, _: usize, _: usize) -> bool {
        false
    }
}

#[test]
fn a_no_stops_and_too_many_are_refused() {
    let (machine, ub) = (eulerian(), some_ub());
    let wanted = candidates(&machine, &ub, 1);
    let course = Course { instrument: &machine, ub: &ub, wavelength_angstrom: WAVELENGTH };
    assert_eq!(DriveList::plan(&wanted, &course, &Never), Err(RouteError::Stopped(Stopped)));
    let many = vec![wanted[0]; MOST_ROWS + 1];
    assert!(matches!(DriveList::plan(&many, &course, &Unhurried), Err(RouteError::TooMany { .. })));
    assert_eq!(plan(&machine, &ub, &[]).rows, vec![]);
}
