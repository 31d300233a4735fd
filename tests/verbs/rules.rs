//! Every rule through the verbs: a session on the six-circle machine, whatever settles its three spare angles.

use crate::{Folder, ringwright};

const SESSION: &str = r#"(
    version: 1,
    title: "Tern Quay Crystallography: rules of the six-circle",
    crystal: (
        cell: (a_angstrom: 6.1, b_angstrom: 7.2, c_angstrom: 8.3, alpha_deg: 90, beta_deg: 98, gamma_deg: 90),
        symmetry: SpaceGroup("P 1 21 1"),
        surface: Some(Reciprocal(h: 0, k: 0, l: 1)),
    ),
    radiation: XrayEnergy(kev: 17),
    machine: Named("six-circle"),
    rules: [RULES],
    targets: SpacingRange(min_angstrom: 1.6),
    orientation: Some((u: ((0.8, -0.6, 0), (0.6, 0.8, 0), (0, 0, 1)), confirmed: true)),
)"#;

const RULES: [&str; 9] = [
    r#"Bisecting, Hold(axis: "mu", at_deg: 0), Hold(axis: "nu", at_deg: 0)"#,
    r#"Azimuth(reference: Reciprocal(h: 1, k: 0, l: 0), at_deg: 100), Hold(axis: "mu", at_deg: 2), Hold(axis: "nu", at_deg: 0)"#,
    r#"Azimuth(reference: Direct(u: 0, v: 1, w: 0), at_deg: 20), Bisecting, DiffractionPlane(turned_deg: 90)"#,
    r#"Incidence(at_deg: 8), Hold(axis: "mu", at_deg: 0), Hold(axis: "phi", at_deg: 10)"#,
    r#"Exit(at_deg: 8), Bisecting, Hold(axis: "nu", at_deg: 0)"#,
    r#"EqualIncidenceAndExit, Hold(axis: "mu", at_deg: 0), Hold(axis: "nu", at_deg: 0)"#,
    r#"Tie(axis: "omega", to: "delta", factor: 0.5, offset_deg: 0), Hold(axis: "mu", at_deg: 0), Hold(axis: "nu", at_deg: 0)"#,
    r#"Freest(reference: Reciprocal(h: 0, k: 1, l: 0)), Hold(axis: "mu", at_deg: 0), Hold(axis: "nu", at_deg: 0)"#,
    r#"BisectingAbout(axis: "chi"), Hold(axis: "mu", at_deg: 1), Tie(axis: "delta", to: "nu", factor: 1, offset_deg: 4)"#,
];

#[test]
fn every_list_made_under_any_rule_is_proven() {
    let folder = Folder::new();
    for rules in RULES {
        let session = folder.write("rules.ron", &SESSION.replace("RULES", rules));
        let list = folder.path("rules.csv");
        let plan = ringwright(&["plan".as_ref(), session.as_os_str(), "--output".as_ref(), list.as_os_str()]);
        assert!(plan.err.contains("reflections in"), "{rules}: {}", plan.err);
        assert_eq!(plan.status(), 0, "{rules}: {}", plan.err);
        let verify = ringwright(&["verify".as_ref(), session.as_os_str(), list.as_os_str()]);
        assert!(verify.out.contains("PROVEN"), "{rules}: {}", verify.out);
        assert_eq!(verify.status(), 0);
    }
}

#[test]
fn reach_tells_of_beams_below_the_surface_and_of_references_along_q() {
    let folder = Folder::new();
    let session = folder.write("surface.ron", &SESSION.replace("RULES", RULES[0]));
    let run = ringwright(&["reach".as_ref(), session.as_os_str()]);
    assert!(run.out.contains("below_surface,incident beam below the surface by"), "{}", run.out);
    let rules = RULES[1].replace("Reciprocal(h: 1, k: 0, l: 0)", "Reciprocal(h: 0, k: 1, l: 0)");
    let session = folder.write("azimuth.ron", &SESSION.replace("RULES", &rules));
    let run = ringwright(&["reach".as_ref(), session.as_os_str()]);
    let line = run.out.lines().find(|line| line.starts_with("0,2,0,")).unwrap();
    assert!(line.contains("no_azimuth,no azimuth: the reference direction is parallel to Q"), "{line}");
}

#[test]
fn rules_that_settle_one_freedom_twice_are_refused_by_name() {
    let folder = Folder::new();
    for (rules, words) in [
        ("Incidence(at_deg: 5), Exit(at_deg: 5), Bisecting", "incidence and exit settle the same freedom: the azimuth"),
        (
            r#"Hold(axis: "nu", at_deg: 0), DiffractionPlane(turned_deg: 90), Bisecting"#,
            "hold and diffraction plane settle",
        ),
        ("Bisecting", "4 + 2 − 3 = 3, so 3 angles are spare, but 1 rule is given"),
    ] {
        let session = folder.write("refused.ron", &SESSION.replace("RULES", rules));
        let run = ringwright(&["plan".as_ref(), session.as_os_str()]);
        assert_eq!(run.status(), 2, "{}", run.err);
        assert!(run.err.contains(words), "{}", run.err);
    }
}

#[test]
fn azimuth_prints_windows_and_crossings() {
    let folder = Folder::new();
    let session = folder.write(
        "azimuth.ron",
        &SESSION.replace("RULES", RULES[0]).replace("        surface: Some(Reciprocal(h: 0, k: 0, l: 1)),\n", ""),
    );
    let run = ringwright(&[
        "azimuth".as_ref(),
        session.as_os_str(),
        "--hkl".as_ref(),
        "1,2,3".as_ref(),
        "--at".as_ref(),
        "30".as_ref(),
    ]);
    assert_eq!(run.status(), 0, "{}", run.err);
    for words in [
        "ψ counts from the reciprocal direction 0 0 1",
        "Windows of each branch",
        "at its limit",
        "crossings",
        "Settings at ψ = 30°",
    ] {
        assert!(run.out.contains(words), "{words}: {}", run.out);
    }
    let along = ringwright(&["azimuth".as_ref(), session.as_os_str(), "--hkl".as_ref(), "0,0,2".as_ref()]);
    assert_eq!(along.status(), 1);
    assert!(along.out.contains("parallel to Q"));
    let wrong = ringwright(&["azimuth".as_ref(), session.as_os_str(), "--hkl".as_ref(), "1,2".as_ref()]);
    assert_eq!(wrong.status(), 2);
}
