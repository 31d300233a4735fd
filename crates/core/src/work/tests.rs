use std::sync::Arc;
use std::sync::atomic::{AtomicUsize, Ordering};

use super::*;
use crate::pace::Unhurried;
use crate::session::{MachineLibrary, Session};

const SESSION: &str = r#"(
    version: 1,
    crystal: (
        cell: (a_angstrom: 6.2, b_angstrom: 7.3, c_angstrom: 8.9, alpha_deg: 90, beta_deg: 90, gamma_deg: 90),
        symmetry: SpaceGroup("P 21 21 21"),
    ),
    radiation: XrayLine(name: "Mo Ka"),
    machine: Named("eulerian-four-circle"),
    rules: [Bisecting],
    targets: TwoThetaRange(max_deg: 30),
    orientation: Some((u: ((1, 0, 0), (0, 1, 0), (0, 0, 1)))),
)"#;

fn session() -> Session {
    Session::from_text(SESSION, "test.ron").unwrap()
}

fn resolved(session: &Session) -> Resolved {
    session.resolve(&MachineLibrary::default()).unwrap()
}

#[derive(Default)]
struct Counting(AtomicUsize);
impl Pace for Counting {
    fn proceed(&self, _: usize, _: usize) -> bool {
        self.0.fetch_add(1, Ordering::Relaxed);
        true
    }
}

#[test]
fn waiting_and_the_desk_give_the_same_list() {
    let inputs = resolved(&session());
    let oriented = orient(&inputs).unwrap();
    let table = reach(&inputs, &oriented.orientation, &Unhurried).unwrap();
    let list = plan(&inputs, &oriented.orientation, &table, &Unhurried).unwrap();
    assert!(list.rows.len() > 100);
    let desk = Arc::new(Desk::new());
    let worker = {
        let (desk, inputs) = (desk.clone(), inputs.clone());
        std::thread::spawn(move || desk.plan(&inputs, &Unhurried))
    };
    assert_eq!(*worker.join().unwrap().unwrap(), list);
    assert_eq!(*desk.last_reach().unwrap(), table);
    assert_eq!(*desk.last_oriented().unwrap(), oriented);
}

#[test]
fn only_what_reads_a_changed_input_is_made_again() {
    let desk = Desk::new();
    let mut session = session();
    let list = desk.plan(&resolved(&session), &Unhurried).unwrap();
    let table = desk.last_reach().unwrap();
    session.title = "another night".to_owned();
    let pace = Counting::default();
    assert!(Arc::ptr_eq(&desk.plan(&resolved(&session), &pace).unwrap(), &list));
    assert_eq!(pace.0.load(Ordering::Relaxed), 0, "a title is read by nothing");
    session.targets = ron::from_str("SpacingRange(min_angstrom: 1.5)").unwrap();
    let oriented = desk.last_oriented().unwrap();
    let other = desk.reach(&resolved(&session), &pace).unwrap();
    assert!(!Arc::ptr_eq(&other, &table));
    assert!(Arc::ptr_eq(&desk.last_oriented().unwrap(), &oriented), "targets do not turn the crystal");
    assert!(Arc::ptr_eq(&desk.last_plan().unwrap(), &list), "the last answer stays until there is a new one");
    // A range of spacings does not read the wavelength, but the table does.
    let wanted = desk.wanted(&resolved(&session), &Unhurried).unwrap();
    session.radiation = ron::from_str("XrayEnergy(kev: 20)").unwrap();
    assert!(Arc::ptr_eq(&desk.wanted(&resolved(&session), &Unhurried).unwrap(), &wanted));
    assert!(!Arc::ptr_eq(&desk.reach(&resolved(&session), &Unhurried).unwrap(), &other));
}

#[test]
fn errors_say_what_is_missing() {
    let mut session = session();
    session.orientation = None;
    assert_eq!(orient(&resolved(&session)), Err(WorkError::NoOrientation { in_use: 0 }));
    session = self::session();
    session.rules.clear();
    let inputs = resolved(&session);
    let oriented = orient(&inputs).unwrap();
    assert!(matches!(
        reach(&inputs, &oriented.orientation, &Unhurried),
        Err(WorkError::Rules(RuleError::Count { .. }))
    ));
    struct Never;
    impl Pace for Never {
        fn proceed(&self, _: usize, _: usize) -> bool {
            false
        }
    }
    let inputs = resolved(&self::session());
    assert_eq!(reach(&inputs, &oriented.orientation, &Never), Err(WorkError::Stopped(Stopped)));
    let table = reach(&inputs, &oriented.orientation, &Unhurried).unwrap();
    assert_eq!(plan(&inputs, &oriented.orientation, &table, &Never), Err(WorkError::Stopped(Stopped)));
}
