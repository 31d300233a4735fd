use ringwright_core::session::{FieldProblem, MOST_NODES, MachineLibrary, Resolved, Session, place_problems};

use super::good;
use super::template::{self, paths};

fn resolve(text: &str) -> Result<Resolved, Vec<FieldProblem>> {
    Session::from_text(text, "night.ron").unwrap().resolve(&MachineLibrary::default())
}

fn with(path: &str, value: &str) -> String {
    template::with(&template::session(), path, value).0
}

#[test]
fn a_good_session_becomes_what_the_other_rooms_use() {
    let resolved = resolve(&good()).unwrap();
    assert_eq!(resolved.cell.lengths(), [7.31, 9.2, 11.05]);
    assert_eq!(resolved.space_group.number(), 14);
    // hc/E of the NIST energies as published, rounded to 1e-7 Å.
    assert!((resolved.wavelength_angstrom - 0.709_317_2).abs() < 0.51e-7);
    assert_eq!(resolved.instrument.name(), "bench of the invented laboratory");
    // In the order of the machine's axes, not of the file.
    assert_eq!(resolved.peaks[1].setting.readings_deg(), [6.0, -70.0, 0.0, 100.0, 12.0]);
    assert!(resolved.peaks[0].ignored && resolved.peaks[0].uncertainty_deg == Some(0.02));
    let kept = resolved.kept_orientation.unwrap();
    assert!(kept.confirmed && (kept.head_from_crystal.matrix()[(0, 1)] + 0.8).abs() < 1e-15);
    assert_eq!(resolved.notes, []);
}

#[test]
fn a_kept_u_with_few_digits_is_brought_to_the_nearest_rotation() {
    let text = with("orientation.u", "((0.86603, -0.5, 0), (0.5, 0.86603, 0), (0, 0, 1))");
    let u = *resolve(&text).unwrap().kept_orientation.unwrap().head_from_crystal.matrix();
    assert!((u.transpose() * u - nalgebra::Matrix3::identity()).abs().max() < 1e-14);
    assert!((u.determinant() - 1.0).abs() < 1e-14);
}

#[test]
fn notes_tell_what_was_chosen_and_what_looks_odd() {
    let said = |path: &str, value: &str, about: &str, piece: &str| {
        let notes = resolve(&with(path, value)).unwrap().notes;
        assert!(notes.iter().any(|note| note.path == about && note.message.contains(piece)), "{notes:?}");
    };
    said("radiation", "XrayWavelength(angstrom: 0.71073)", "radiation", "older");
    said("crystal.symmetry", "Centring(P)", "crystal.symmetry", "no symmetry but the lattice's");
    said("peaks[0].readings_deg.omega", "95", "peaks[0].readings_deg.omega", "5.0000° outside its limits");
    said("targets.SpacingRange.min_angstrom", "0.3", "targets.SpacingRange.min_angstrom", "λ/2");
    said("targets", "List([])", "targets.List", "empty");
}

#[test]
fn every_misfit_is_told_at_once() {
    let mut text = good();
    for (from, to) in [
        ("gamma_deg: 90", "gamma_deg: 91"),
        ("\"omega\": 6, ", ""),
        ("axis: \"chi\"", "axis: \"xi\""),
        ("max_angstrom: 5", "max_angstrom: 0.5"),
        ("{\"omega\": 0}", "{\"mu\": 0}"),
    ] {
        assert!(text.contains(from));
        text = text.replacen(from, to, 1);
    }
    let found: Vec<String> = resolve(&text).unwrap_err().into_iter().map(|problem| problem.path).collect();
    assert_eq!(
        found,
        [
            "crystal.cell",
            "peaks[1].readings_deg",
            "rules[0].Hold.axis",
            "preference.NearestTo.readings_deg.mu",
            "targets.SpacingRange.max_angstrom"
        ]
    );
}

#[test]
fn a_range_with_more_nodes_than_memory_is_refused() {
    // 4/3 π / d³ V with V = 100³ Å³: 4.19e6 nodes at 1 Å, 3.4e7 at 0.5 Å.
    let cubic = "(a_angstrom: 100, b_angstrom: 100, c_angstrom: 100, alpha_deg: 90, beta_deg: 90, gamma_deg: 90)";
    let at = |d: &str| {
        let text = with("crystal.cell", cubic).replacen(
            "min_angstrom: 0.8, max_angstrom: 5",
            &format!("min_angstrom: {d}"),
            1,
        );
        resolve(&text).map(|_| ())
    };
    assert_eq!(at("1.0"), Ok(()));
    let refused = at("0.5").unwrap_err();
    assert_eq!(refused[0].path, "targets.SpacingRange.min_angstrom");
    assert!(refused[0].message.contains("about 3.4e7 nodes") && MOST_NODES == 2e7, "{}", refused[0].message);
}

/// For each field of a session: the place found by reading the text again is where its value starts.
#[test]
fn the_place_of_every_field_is_found() {
    let template = template::session();
    let text = good();
    for path in paths(&template) {
        let byte = template::with(&template, &path, "").1.unwrap();
        let problem = FieldProblem { path: path.clone(), message: String::new() };
        let found = &place_problems(&text, "night.ron", &[problem])[0];
        assert_eq!((found.line, found.column), template::place(&text, byte), "{path}");
    }
}
