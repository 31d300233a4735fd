#![allow(clippy::unwrap_used)]

use proptest::prelude::*;

use super::constraint::Constraint;
use super::settings::{self, Setting};
use super::{Centring, Presence, SpaceGroup, SymmetryError, SymmetryQuery};
use crate::crystal::UnitCell;
use crate::frames::Hkl;
use crate::testing::cases;

fn by_symbol(symbol: &str, cell: &UnitCell) -> Result<SpaceGroup, SymmetryError> {
    SpaceGroup::resolve(&SymmetryQuery::SpaceGroup(symbol.to_owned()), cell)
}

fn cell(numbers: [f64; 6]) -> UnitCell {
    let [a, b, c, alpha, beta, gamma] = numbers;
    UnitCell::new(a, b, c, alpha, beta, gamma).unwrap()
}

/// The Hall symbol that a Hermann–Mauguin symbol leads to.
fn hall_of(symbol: &str, constraint: Constraint) -> String {
    by_symbol(symbol, &constraint.example()).unwrap().hall_symbol().to_owned()
}

fn exactly(setting: &Setting) -> SpaceGroup {
    let query = SymmetryQuery::Hall(setting.hall.to_owned());
    SpaceGroup::resolve(&query, &setting.constraint.example()).unwrap()
}

#[test]
fn every_setting_is_found_by_its_own_symbols() {
    for setting in settings::all() {
        let cell = setting.constraint.example();
        for spelling in &setting.spellings {
            for text in [spelling.pretty(), spelling.compact().to_owned()] {
                let found = by_symbol(&text, &cell).unwrap();
                assert_eq!(found.number(), setting.number, "{text}");
                assert_eq!(found.centring(), setting.centring, "{text}");
                if !setting.mark.is_empty() {
                    let marked = by_symbol(&format!("{text}:{}", setting.mark), &cell).unwrap();
                    assert_eq!(marked.hall_symbol(), setting.hall, "{text}:{}", setting.mark);
                }
            }
        }
        let found = by_symbol(&setting.full, &cell).unwrap();
        assert_eq!(found.full_symbol(), setting.full);
        let same_origin = found.hall_symbol() == setting.hall;
        assert!(same_origin || !found.notes().is_empty(), "{} was replaced in silence", setting.title());
        assert_eq!(exactly(setting).hall_symbol(), setting.hall);
    }
}

#[test]
fn every_number_has_its_default() {
    for (number, hall_number) in (1..=230).map(|n| (n, moyo::data::Setting::Standard.hall_number(n).unwrap())) {
        let entry = moyo::data::hall_symbol_entry(hall_number).unwrap();
        let number = u16::try_from(number).unwrap();
        let constraint = Constraint::of(number, entry.setting);
        let found = SpaceGroup::resolve(&SymmetryQuery::Number(number), &constraint.example()).unwrap();
        assert_eq!(found.hall_symbol(), entry.hall_symbol, "no. {number}");
    }
    let refused = SpaceGroup::resolve(&SymmetryQuery::Number(231), &Constraint::Triclinic.example());
    assert_eq!(refused, Err(SymmetryError::UnknownNumber(231)));
}

#[test]
fn every_group_is_closed_and_keeps_its_metric() {
    for setting in settings::all() {
        let group = exactly(setting);
        let metric = setting.constraint.example().metric();
        let in_one_cell = |op: &super::Operation| (op.rotation(), op.translation());
        let all: std::collections::HashSet<_> = group.operations().iter().map(in_one_cell).collect();
        assert_eq!(all.len(), group.order());
        let generators: Vec<_> = group.operations().iter().step_by(3).collect();
        for a in group.operations() {
            assert!(generators.iter().all(|b| all.contains(&in_one_cell(&a.after(b)))), "{}", setting.title());
            let r = a.rotation();
            let r = nalgebra::Matrix3::from_fn(|i, j| f64::from(r[i][j]));
            assert!((r.transpose() * metric * r - metric).abs().max() < 1e-9, "{}: {a}", setting.title());
        }
    }
}

#[test]
fn absences_and_spacings_are_the_same_along_an_orbit() {
    for setting in settings::all() {
        let (group, cell) = (exactly(setting), setting.constraint.example());
        for hkl in [[0, 0, 1], [0, 0, 2], [0, 3, 0], [1, 1, 0], [2, 1, 0], [3, 0, 1], [0, 2, 3], [1, 1, 2], [3, -1, 2]]
        {
            let hkl = Hkl::from(hkl);
            let orbit = group.laue_equivalents(hkl);
            for other in &orbit {
                assert_eq!(group.absence(*other).is_absent(), group.absence(hkl).is_absent(), "{}", setting.title());
                assert!((cell.d_spacing(*other) / cell.d_spacing(hkl) - 1.0).abs() < 1e-12);
            }
            assert_eq!(
                group.order() / group.lattice_translations().len() % group.point_group_equivalents(hkl).len(),
                0
            );
            assert!(orbit.len() % 2 == 0 && orbit.contains(&-hkl));
        }
    }
}

#[test]
fn the_cell_decides_between_axes() {
    let (hexagonal, rhombohedral) = (Constraint::HexagonalAxes.example(), Constraint::RhombohedralAxes.example());
    let query = SymmetryQuery::SpaceGroup("R-3c".to_owned());
    let on_hexagonal = SpaceGroup::resolve(&query, &hexagonal).unwrap();
    assert_eq!((on_hexagonal.order(), on_hexagonal.centring()), (36, Centring::R));
    assert_eq!(on_hexagonal.notes(), ["hexagonal axes: decided by the cell"]);
    let on_rhombohedral = SpaceGroup::resolve(&query, &rhombohedral).unwrap();
    assert_eq!((on_rhombohedral.order(), on_rhombohedral.setting()), (12, "rhombohedral axes"));
    let refused = SpaceGroup::resolve(&query, &Constraint::Cubic.example()).map(|g| g.setting().to_owned());
    assert_eq!(refused, Ok("rhombohedral axes".to_owned()), "a cube is a rhombohedron of 90°");
    let refused = SpaceGroup::resolve(&query, &Constraint::Tetragonal.example());
    assert!(matches!(refused, Err(SymmetryError::NeitherAxes { .. })));
    assert!(matches!(by_symbol("R-3c:H", &rhombohedral), Err(SymmetryError::CellBreaksGroup { .. })));
}

#[test]
fn monoclinic_symbols_take_b_unless_the_cell_says_otherwise() {
    assert_eq!(hall_of("P21/n", Constraint::MonoclinicB), "-P 2yn");
    assert_eq!(hall_of("P21/n", Constraint::MonoclinicC), "-P 2n");
    assert_eq!(hall_of("P21/n", Constraint::Orthorhombic), "-P 2yn");
    assert_eq!(hall_of("C2/c", Constraint::MonoclinicB), "-C 2yc");
    assert_eq!(hall_of("14", Constraint::MonoclinicC), "-P 2ac");
    assert_eq!(hall_of("14:b2", Constraint::MonoclinicB), "-P 2yn");
    assert_eq!(hall_of("227:1", Constraint::Cubic), "F 4d 2 3 -1d");
    assert_eq!(hall_of("P21/b", Constraint::MonoclinicC), "-P 2bc");
    assert_eq!(hall_of("P21/b", Constraint::MonoclinicA), "-P 2xab");
    let Err(SymmetryError::Ambiguous { candidates, .. }) = by_symbol("P21/b", &Constraint::Orthorhombic.example())
    else {
        panic!("P21/b with three right angles is c- or a-unique");
    };
    assert!(candidates.contains("P 1 1 21/b") && candidates.contains("P 21/b 1 1"), "{candidates}");
}

// Old and new names: International Tables A, 4th and 5th edition, from memory.
#[test]
fn older_names_mean_the_same_groups() {
    for (old, new, constraint) in [
        ("Cmca", "Cmce", Constraint::Orthorhombic),
        ("Cmma", "Cmme", Constraint::Orthorhombic),
        ("Ccca", "Ccce", Constraint::Orthorhombic),
        ("Aba2", "Aea2", Constraint::Orthorhombic),
        ("Abm2", "Aem2", Constraint::Orthorhombic),
        ("B m a b", "B m e b", Constraint::Orthorhombic),
        ("Fm3m", "F m -3 m", Constraint::Cubic),
        ("Fd3m", "Fd-3m", Constraint::Cubic),
        ("Ia3d", "Ia-3d", Constraint::Cubic),
        ("Pm3", "P m -3", Constraint::Cubic),
        ("Pa3", "P 21/a -3", Constraint::Cubic),
    ] {
        assert_eq!(hall_of(old, constraint), hall_of(new, constraint), "{old}");
    }
    assert_eq!(hall_of("Cccb:2", Constraint::Orthorhombic), "-C 2a 2c");
    assert_eq!(hall_of("Ccca:1", Constraint::Orthorhombic), "C 2 2 -1ac");
}

#[test]
fn a_cell_that_breaks_its_group_is_refused_by_name() {
    let message = by_symbol("F m -3 m", &cell([5.43, 5.5, 5.43, 90.0, 90.0, 90.0])).unwrap_err().to_string();
    for part in ["F m -3 m (225)", "a = b = c and α = β = γ = 90°", "b = 5.5 Å where a = 5.43 Å"] {
        assert!(message.contains(part), "{message}");
    }
    let message = by_symbol("P21/c", &cell([5.0, 6.0, 7.0, 90.0, 90.0, 95.0])).unwrap_err().to_string();
    assert!(message.contains("γ = 95°") && message.contains("P 1 1 21/b"), "{message}");
    // The last printed digit is no breach.
    assert!(by_symbol("Fm-3m", &cell([5.4310, 5.4311, 5.4310, 90.0, 90.005, 90.0])).is_ok());
}

#[test]
fn an_unknown_symbol_is_answered_with_its_neighbours() {
    let message = by_symbol("P21/q", &Constraint::MonoclinicB.example()).unwrap_err().to_string();
    assert!(message.contains("P 21/n") || message.contains("P 21/c"), "{message}");
    for nonsense in ["", " ", ":", "P", "hello world", "P 1 21", "P-", "(", "P 2 (", "\u{0304}", "0", "-3", "P21/n:x"] {
        assert!(by_symbol(nonsense, &Constraint::MonoclinicB.example()).is_err(), "{nonsense:?}");
    }
    let refused = by_symbol("P21/n:x", &Constraint::MonoclinicB.example());
    assert!(matches!(refused, Err(SymmetryError::UnknownSetting { .. })));
}

#[test]
fn only_a_lattice_letter_gives_translations_and_friedel_mates() {
    for (centring, allowed, absent) in [
        (Centring::P, [1, 0, 0], None),
        (Centring::A, [1, 1, 1], Some([0, 1, 0])),
        (Centring::B, [1, 0, 1], Some([1, 1, 0])),
        (Centring::C, [1, 1, 0], Some([1, 0, 1])),
        (Centring::I, [1, 1, 0], Some([1, 1, 1])),
        (Centring::F, [1, 1, 1], Some([1, 1, 0])),
        // Obverse: -h + k + l = 3n.
        (Centring::R, [1, 0, 1], Some([-1, 0, 1])),
    ] {
        let query = SymmetryQuery::Centring(centring);
        let group = SpaceGroup::resolve(&query, &Constraint::HexagonalAxes.example()).unwrap();
        assert_eq!(group.order(), centring.points());
        assert_eq!(group.absence(Hkl::from(allowed)), Presence::Allowed, "{centring:?}");
        assert!(absent.is_none_or(|hkl| group.absence(Hkl::from(hkl)).is_absent()), "{centring:?}");
        assert_eq!(group.laue_equivalents(Hkl::from([1, 2, 3])).len(), 2);
    }
    let skew = SpaceGroup::resolve(&SymmetryQuery::Centring(Centring::R), &Constraint::Triclinic.example());
    assert!(matches!(skew, Err(SymmetryError::CellBreaksGroup { .. })));
    assert_eq!(hall_of("C -1", Constraint::Triclinic), "-C 1");
}

#[test]
fn an_absence_names_its_operation() {
    let group = by_symbol("P21/c", &Constraint::MonoclinicB.example()).unwrap();
    let reason = |hkl: [i32; 3]| group.reason(group.absence(Hkl::from(hkl)));
    assert_eq!(reason([1, 0, 1]), "glide plane ⊥ [0 1 0] by c/2");
    assert_eq!(reason([0, 3, 0]), "2-fold screw axis ∥ [0 1 0] by b/2");
    assert_eq!(reason([1, 1, 1]), "");
    assert_eq!(group.absence(Hkl::new(0.5, 0.0, 1.0)), Presence::NotANode);
    assert_eq!(group.laue_equivalents(Hkl::new(0.5, 1.25, 0.0)).len(), 4);
    let centred = by_symbol("Ia-3d", &Constraint::Cubic.example()).unwrap();
    assert_eq!(centred.reason(centred.absence(Hkl::from([1, 0, 0]))), "centring by a/2 + b/2 + c/2");
}

#[test]
fn queries_are_written_and_read() {
    let queries = [
        SymmetryQuery::SpaceGroup("P 21/n".to_owned()),
        SymmetryQuery::Number(14),
        SymmetryQuery::Hall("-P 2yn".to_owned()),
        SymmetryQuery::Centring(Centring::R),
    ];
    for query in queries {
        let text = ron::to_string(&query).unwrap();
        assert_eq!(ron::from_str::<SymmetryQuery>(&text), Ok(query));
    }
    assert!(ron::from_str::<SymmetryQuery>("Centring(H)").is_err());
}

proptest! {
    #![proptest_config(cases())]

    /// The library's reader of Hall symbols stops the program at what it does not know, or runs on for ever; nothing that
    /// a person can type may get there.
    #[test]
    fn no_text_stops_the_program(
        lattice in prop::sample::select(vec!["", "P", "-P", "F", "r", "I ", "Q", "-"]),
        rest in prop::collection::vec(prop::sample::select("-1234560/ :()xyz*^=abcnuvwdm'\"_\u{0304}₂é".chars().collect::<Vec<_>>()), 0..14),
    ) {
        let text = format!("{lattice} {}", rest.into_iter().collect::<String>());
        let cell = Constraint::Cubic.example();
        let hall = SpaceGroup::resolve(&SymmetryQuery::Hall(text.clone()), &cell);
        let symbol = by_symbol(&text, &cell);
        for group in hall.into_iter().chain(symbol) {
            prop_assert!((1..=192).contains(&group.order()));
        }
    }
}
