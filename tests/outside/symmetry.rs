//! Space groups against independent packages.
//!
//! Sources: gemmi 0.7.5 (operators, absences, multiplicities, its table of settings) and spglib 2.8.0 (its database agreed
//! with gemmi's operators in all 55 settings); the tables are `reference/s7_*.csv` and `reference/gemmi_settings.csv`, the
//! latter made by `reference/scripts/gemmi_settings.py`.

use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;

use ringwright_core::crystal::{SpaceGroup, SymmetryQuery, UnitCell};
use ringwright_core::frames::Hkl;

/// The rows of a reference file as columns by name; lines with # are its source.
fn rows(file: &str) -> Vec<BTreeMap<String, String>> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("reference").join(file);
    let mut reader = csv::ReaderBuilder::new().comment(Some(b'#')).from_path(path).unwrap();
    reader.deserialize().collect::<Result<_, _>>().unwrap()
}

fn number<T: std::str::FromStr<Err: std::fmt::Debug>>(row: &BTreeMap<String, String>, column: &str) -> T {
    row[column].parse().unwrap()
}

/// A cube meets every constraint but those of hexagonal axes.
fn resolve(query: &SymmetryQuery) -> Option<SpaceGroup> {
    let cube = UnitCell::new(5.0, 5.0, 5.0, 90.0, 90.0, 90.0).unwrap();
    let hexagonal = UnitCell::new(5.0, 5.0, 7.0, 90.0, 90.0, 120.0).unwrap();
    SpaceGroup::resolve(query, &cube).or_else(|_| SpaceGroup::resolve(query, &hexagonal)).ok()
}

fn by_symbol(symbol: &str) -> Option<SpaceGroup> {
    resolve(&SymmetryQuery::SpaceGroup(symbol.to_owned()))
}

fn triplets(group: &SpaceGroup) -> BTreeSet<String> {
    group.operations().iter().map(ToString::to_string).collect()
}

#[test]
fn groups_are_described_as_gemmi_describes_them() {
    let table = rows("s7_spacegroups.csv");
    assert_eq!(table.len(), 55);
    for row in table {
        let group = by_symbol(&row["xhm"]).unwrap();
        let centring = if row["xhm"].ends_with(":R") { "P" } else { &row["centring_letter"] };
        assert_eq!(group.number(), number::<u16>(&row, "number"));
        // One point group: gemmi turns the symbol with the axes, ours names the type.
        let point_group = row["point_group"].replace("-62m", "-6m2");
        assert_eq!(group.point_group(), point_group, "{}", row["xhm"]);
        assert_eq!(group.laue_class(), row["laue_class"], "{}", row["xhm"]);
        assert_eq!(format!("{:?}", group.system()).to_lowercase(), row["crystal_system"]);
        assert_eq!(group.centring().letter().to_string(), centring);
        assert_eq!(group.order(), number::<usize>(&row, "lattice_points") * number::<usize>(&row, "point_group_order"));
        assert_eq!(group.proper_laue_rotations().len() * 2, number::<usize>(&row, "laue_order"));
    }
}

#[test]
fn operators_are_the_same_set() {
    let mut expected: BTreeMap<String, BTreeSet<String>> = BTreeMap::new();
    for row in rows("s7_operators.csv") {
        expected.entry(row["xhm"].clone()).or_default().insert(row["xyz"].clone());
    }
    assert_eq!(expected.len(), 55);
    for (symbol, operators) in expected {
        assert_eq!(triplets(&by_symbol(&symbol).unwrap()), operators, "{symbol}");
    }
}

#[test]
fn absences_and_multiplicities_agree_for_every_node() {
    let table = rows("s7_hkl_table.csv");
    assert_eq!(table.len(), 55 * 342);
    let mut groups: BTreeMap<String, SpaceGroup> = BTreeMap::new();
    for row in table {
        let group = groups.entry(row["xhm"].clone()).or_insert_with(|| by_symbol(&row["xhm"]).unwrap());
        let hkl = Hkl::from([number(&row, "h"), number(&row, "k"), number(&row, "l")]);
        assert_eq!(group.absence(hkl).is_absent(), row["absent"] == "1", "{} {hkl}", row["xhm"]);
        assert_eq!(group.point_group_equivalents(hkl).len(), number(&row, "mult_point_group"), "{} {hkl}", row["xhm"]);
        assert_eq!(group.laue_equivalents(hkl).len(), number(&row, "mult_laue"), "{} {hkl}", row["xhm"]);
    }
}

/// Settings in gemmi's list beyond the 530 of International Tables A: enlarged cells, shifted origins and one more old name.
const BEYOND_THE_TABLES: [&str; 24] = [
    "I 1 21 1",
    "C 1 21 1",
    "P 21212(a)",
    "C 2 2 21a)",
    "C 2 2 2a",
    "F 2 2 2a",
    "I 2 2 2a",
    "P 42 21 2a",
    "I 2 3a",
    "B 1 2 1",
    "C 1 1 2",
    "B 1 21 1",
    "C 1 1 21",
    "F 1 2 1",
    "F 1 m 1",
    "F 1 d 1",
    "F 1 2/m 1",
    "A b a m",
    "C 4 2 2",
    "C 4 2 21",
    "F 4 2 2",
    "C -4 2 m",
    "C -4 2 b",
    "F 4/m m m",
];

#[test]
fn every_setting_of_the_tables_is_found_by_gemmis_names() {
    let table = rows("gemmi_settings.csv");
    let mut unknown = BTreeSet::new();
    let mut found = 0;
    for row in &table {
        let Some(group) = by_symbol(&row["xhm"]) else {
            unknown.insert(row["xhm"].as_str());
            continue;
        };
        found += 1;
        assert_eq!(group.number(), number::<u16>(row, "number"), "{}", row["xhm"]);
        assert_eq!(group.laue_class(), row["laue_class"], "{}", row["xhm"]);
        assert_eq!(group.order(), number::<usize>(row, "operators"), "{}", row["xhm"]);
        // Triclinic groups in centred cells are no tabulated settings, so their Hall symbol is not looked up.
        if group.number() > 2 {
            let by_hall = resolve(&SymmetryQuery::Hall(row["hall"].clone())).unwrap();
            assert_eq!(triplets(&group), triplets(&by_hall), "{} and {}", row["xhm"], row["hall"]);
        }
    }
    assert_eq!(unknown, BTreeSet::from(BEYOND_THE_TABLES));
    assert_eq!(found, 530 + 10);
}
