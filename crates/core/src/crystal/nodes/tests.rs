#![allow(clippy::unwrap_used)]

use std::collections::HashSet;

use proptest::prelude::*;

use super::*;
use crate::crystal::{Centring, SymmetryQuery};
use crate::frames::Hkl;
use crate::pace::Unhurried;
use crate::testing::cases;

fn cell(numbers: [f64; 6]) -> UnitCell {
    let [a, b, c, alpha, beta, gamma] = numbers;
    UnitCell::new(a, b, c, alpha, beta, gamma).unwrap()
}

fn group(symbol: &str, cell: &UnitCell) -> SpaceGroup {
    SpaceGroup::resolve(&SymmetryQuery::SpaceGroup(symbol.to_owned()), cell).unwrap()
}

fn all(cell: &UnitCell, symbol: &str, range: DRange, absent: AbsentNodes) -> NodeColumns {
    match nodes(cell, &group(symbol, cell), range, absent, &Unhurried).unwrap() {
        NodesOutcome::Complete(columns) => columns,
        NodesOutcome::Stopped => panic!("nobody said stop"),
    }
}

/// Every node of a box that holds the sphere, tested by the general formula.
fn brute_force(cell: &UnitCell, range: DRange) -> HashSet<[i32; 3]> {
    // |h| = |a·G| ≤ a / d_min.
    let [h_max, k_max, l_max] = cell.lengths().map(|edge| (edge / range.d_min()).floor() as i32 + 1);
    let mut found = HashSet::new();
    for h in -h_max..=h_max {
        for k in -k_max..=k_max {
            for l in -l_max..=l_max {
                if [h, k, l] != [0; 3] && range.contains(cell.d_spacing(Hkl::from([h, k, l]))) {
                    found.insert([h, k, l]);
                }
            }
        }
    }
    found
}

fn any_cell() -> impl Strategy<Value = UnitCell> {
    let edge = || 2.0..14.0f64;
    let angle = || 60.0..118.0f64;
    prop_oneof![
        (edge(), edge(), edge(), angle(), angle(), angle()).prop_map(|(a, b, c, al, be, ga)| [a, b, c, al, be, ga]),
        (edge(), edge(), edge(), angle()).prop_map(|(a, b, c, be)| [a, b, c, 90.0, be, 90.0]),
        (edge(), edge(), edge()).prop_map(|(a, b, c)| [a, b, c, 90.0, 90.0, 90.0]),
        (edge(), edge()).prop_map(|(a, c)| [a, a, c, 90.0, 90.0, 90.0]),
        (edge(), 35.0..115.0f64).prop_map(|(a, al)| [a, a, a, al, al, al]),
        (edge(), edge()).prop_map(|(a, c)| [a, a, c, 90.0, 90.0, 120.0]),
        edge().prop_map(|a| [a, a, a, 90.0, 90.0, 90.0]),
    ]
    .prop_filter_map("closes no cell", |[a, b, c, al, be, ga]| UnitCell::new(a, b, c, al, be, ga).ok())
}

proptest! {
    #![proptest_config(cases())]

    #[test]
    fn no_node_is_missing_and_none_comes_twice(cell in any_cell(), d_min in 0.9..2.5f64, shell in 1.0..3.0f64) {
        for range in [DRange::down_to(d_min).unwrap(), DRange::new(d_min, d_min * shell).unwrap()] {
            let columns = all(&cell, "P1", range, AbsentNodes::Keep);
            let distinct: HashSet<[i32; 3]> = columns.hkl.iter().copied().collect();
            prop_assert_eq!(distinct.len(), columns.len());
            prop_assert_eq!(distinct, brute_force(&cell, range));
            for (hkl, d) in columns.hkl.iter().zip(&columns.d_angstrom) {
                prop_assert!((cell.d_spacing(Hkl::from(*hkl)) / d - 1.0).abs() < 1e-11);
            }
            let rows: Vec<_> = columns.d_angstrom.iter().zip(&columns.hkl).collect();
            prop_assert!(rows.windows(2).all(|pair| pair[0] > pair[1]), "rows are out of order");
        }
    }

    #[test]
    fn a_limit_at_a_node_keeps_the_node(cell in any_cell(), h in -3..=3i32, k in -3..=3i32, l in 1..=3i32) {
        let d = cell.d_spacing(Hkl::from([h, k, l]));
        prop_assume!(d > 0.5);
        let columns = all(&cell, "P1", DRange::new(d, d).unwrap(), AbsentNodes::Keep);
        prop_assert!(columns.hkl.contains(&[h, k, l]) && columns.hkl.contains(&[-h, -k, -l]));
    }
}

// The figure is the number of whole h with 0 < |h|² ≤ (30/0.48)², a sum over squares that needs no cell.
#[test]
fn a_million_nodes_of_a_cube() {
    let cube = cell([30.0, 30.0, 30.0, 90.0, 90.0, 90.0]);
    let columns = all(&cube, "P1", DRange::down_to(0.48).unwrap(), AbsentNodes::Keep);
    assert_eq!(columns.len(), 1_023_348);
    assert_eq!(columns.hkl[..6], [[1, 0, 0], [0, 1, 0], [0, 0, 1], [0, 0, -1], [0, -1, 0], [-1, 0, 0]]);
}

#[test]
fn absent_nodes_are_kept_or_left_out() {
    let cube = cell([5.43, 5.43, 5.43, 90.0, 90.0, 90.0]);
    let range = DRange::down_to(0.7).unwrap();
    let kept = all(&cube, "Fd-3m", range, AbsentNodes::Keep);
    let skipped = all(&cube, "Fd-3m", range, AbsentNodes::Skip);
    let present: Vec<_> =
        kept.hkl.iter().zip(&kept.presence).filter(|(_, p)| !p.is_absent()).map(|(h, _)| *h).collect();
    assert_eq!(present, skipped.hkl);
    assert!(skipped.hkl.iter().all(|[h, k, l]| (h - k) % 2 == 0 && (k - l) % 2 == 0), "F: all odd or all even");
    assert_eq!(skipped.hkl[..8].iter().map(|h| h.map(i32::abs)).collect::<HashSet<_>>(), HashSet::from([[1, 1, 1]]));
}

#[test]
fn too_many_nodes_and_limits_turned_round_are_refused() {
    let large = cell([300.0, 300.0, 300.0, 90.0, 90.0, 90.0]);
    let refused = nodes(&large, &group("P1", &large), DRange::down_to(0.5).unwrap(), AbsentNodes::Keep, &Unhurried);
    let Err(NodesError::TooMany { within, .. }) = refused else { panic!("nine hundred million nodes") };
    assert!((within - 1.781).abs() < 0.001, "(4/3 π · 2.7e7 / 2e7)^(1/3) = 1.781, not {within}");
    assert!(matches!(DRange::new(2.0, 1.0), Err(NodesError::WrongWayRound { .. })));
    for bad in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        assert!(DRange::down_to(bad).is_err());
    }
}

#[test]
fn work_ends_when_the_pace_says_so() {
    struct Impatient(usize);
    impl Pace for Impatient {
        fn proceed(&self, done: usize, of: usize) -> bool {
            assert!(done <= of);
            done < self.0
        }
    }
    let cube = cell([10.0, 10.0, 10.0, 90.0, 90.0, 90.0]);
    let one = SpaceGroup::resolve(&SymmetryQuery::Centring(Centring::P), &cube).unwrap();
    // d ≥ 1 Å: |l| ≤ 10, so 21 planes and the end.
    for (patience, stopped) in [(0, true), (7, true), (21, true), (22, false)] {
        let range = DRange::down_to(1.0).unwrap();
        let outcome = nodes(&cube, &one, range, AbsentNodes::Keep, &Impatient(patience)).unwrap();
        assert_eq!(outcome == NodesOutcome::Stopped, stopped, "{patience}");
    }
}
