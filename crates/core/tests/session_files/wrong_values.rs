//! One wrong file per field: each is turned away at the line and column of the wrong value, with its path, with what was
//! met and what would be accepted.

use ringwright_core::session::{FileProblem, MachineLibrary, Session, SessionError, place_problems, read_machine};

use super::template::{self, paths};

/// Every problem of a session text, of reading or of fitting together.
fn problems(text: &str) -> Vec<FileProblem> {
    match Session::from_text(text, "night.ron") {
        Err(SessionError::Problems(problems)) => problems,
        Err(other) => panic!("{other}"),
        Ok(session) => {
            let found = session.resolve(&MachineLibrary::default()).err().unwrap_or_default();
            place_problems(text, "night.ron", &found)
        }
    }
}

/// Path, wrong text (▸ marks the place to expect, else its start), a piece of the message.
type Row = (&'static str, &'static str, &'static str);

const SESSION_TABLE: &[Row] = &[
    ("version", "2", "2 is no version of the session format; accepted is 1"),
    ("version", "1.5", "1.5 is no version of the session format"),
    ("version", "\"1\"", "accepted is 1"),
    ("title", "5", "accepted is a text in quotes"),
    ("crystal", "5", "accepted is ( … )"),
    ("crystal.name", "gold", "accepted is a text in quotes"),
    ("crystal.cell", "[1, 2]", "accepted is ( … )"),
    (
        "crystal.cell",
        "(a_angstrom: 5, b_angstrom: 5, c_angstrom: 5, alpha_deg: 30, beta_deg: 30, gamma_deg: 90)",
        "close no cell",
    ),
    (
        "crystal.cell",
        "(a_angstrom: 5, b_angstrom: 5, c_angstrom: 5, alpha_deg: 80, beta_deg: 90, gamma_deg: 90)",
        "needs α = γ = 90°",
    ),
    ("crystal.cell", "(a_angstrom: 5)", "the field b_angstrom is missing"),
    ("crystal.cell.a_angstrom", "-3", "-3 is not a length in Å between 0.1 and 10000"),
    ("crystal.cell.a_angstrom", "\"7.31\"", "\"7.31\" is not a length in Å"),
    ("crystal.cell.a_angstrom", "seven", "seven is not a length in Å"),
    ("crystal.cell.a_angstrom", "(7.31)", "is not a length in Å"),
    ("crystal.cell.a_angstrom", "[7.31]", "is not a length in Å"),
    ("crystal.cell.a_angstrom", "true", "true is not a length in Å"),
    ("crystal.cell.a_angstrom", "NaN", "NaN is not a length in Å"),
    ("crystal.cell.a_angstrom", "inf", "inf is not a length in Å"),
    ("crystal.cell.a_angstrom", "-inf", "-inf is not a length in Å"),
    ("crystal.cell.a_angstrom", "1e999", "inf is not a length in Å"),
    ("crystal.cell.a_angstrom", "99999999999999999999999", "is not a length in Å"),
    ("crystal.cell.b_angstrom", "0", "0 is not a length in Å"),
    ("crystal.cell.c_angstrom", "10000.1", "is not a length in Å"),
    ("crystal.cell.alpha_deg", "0", "0 is not a cell angle in degrees"),
    ("crystal.cell.beta_deg", "180", "180 is not a cell angle in degrees"),
    ("crystal.cell.gamma_deg", "-90", "-90 is not a cell angle in degrees"),
    ("crystal.symmetry", "\"P 21/n\"", "accepted are SpaceGroup, Number, Hall and Centring"),
    ("crystal.symmetry", "14", "accepted are SpaceGroup, Number, Hall and Centring"),
    (
        "crystal.symmetry",
        "Group(\"P 1\")",
        "there is no Group here; accepted are SpaceGroup, Number, Hall and Centring",
    ),
    ("crystal.symmetry", "Number(231)", "there is no space group 231"),
    ("crystal.symmetry", "Number(▸-1)", "a whole number from 1 to 230"),
    ("crystal.symmetry", "Number(▸70000)", "a whole number from 1 to 230"),
    ("crystal.symmetry", "Number(▸\"14\")", "a whole number from 1 to 230"),
    ("crystal.symmetry", "Hall(\"-P 9\")", "is no Hall symbol"),
    ("crystal.symmetry", "Centring(▸H)", "there is no H here; accepted are P, A, B, C, I, F and R"),
    ("crystal.symmetry.SpaceGroup", "14", "accepted is a text in quotes"),
    (
        "radiation",
        "\"Mo Ka1\"",
        "accepted are XrayLine, XrayEnergy, XrayWavelength, NeutronWavelength and NeutronEnergy",
    ),
    ("radiation", "Xray(kev: 20)", "there is no Xray here; accepted are XrayLine"),
    ("radiation", "XrayEnergy(kev: ▸0)", "0 is not a photon energy in keV"),
    ("radiation", "XrayEnergy(▸ev: 20000)", "there is no field ev here; accepted is kev"),
    ("radiation", "XrayWavelength(angstrom: ▸0)", "0 is not a wavelength in Å"),
    ("radiation", "NeutronWavelength(angstrom: ▸-1.8)", "-1.8 is not a wavelength in Å"),
    ("radiation", "NeutronEnergy(mev: ▸1e9)", "is not a neutron energy in meV"),
    ("radiation.XrayLine.name", "\"Mo Kz\"", "Mo Ka1"),
    ("radiation.XrayLine.name", "5", "accepted is a text in quotes"),
    ("machine", "\"kappa-four-circle\"", "accepted are Named and Inline"),
    ("machine", "Kappa", "there is no Kappa here; accepted are Named and Inline"),
    ("machine", "Named(▸5)", "accepted is a text in quotes"),
    ("machine", "Named(▸\"nowhere\")", "known are eulerian-four-circle, kappa-four-circle, fixed-chi-three-circle"),
    ("machine", "Named(▸\"../secret\")", "without folders"),
    ("machine.Inline", "[]", "accepted is ( … )"),
    ("peaks", "(h: 1)", "accepted is a list in square brackets"),
    ("peaks[0]", "5", "accepted is ( … )"),
    ("peaks[0].h", "\"2\"", "is not an index between"),
    ("peaks[0].h", "0", "0 0 0 is the direct beam"),
    ("peaks[0].k", "NaN", "NaN is not an index"),
    ("peaks[0].l", "1e5", "is not an index between"),
    ("peaks[0].readings_deg", "[1, 2, 3]", "accepted is names and values in curly brackets"),
    ("peaks[0].readings_deg", "{\"omega\": 1, \"chi\": 2, \"tilt\": 0, \"phi\": 3}", "no reading of two_theta"),
    (
        "peaks[0].readings_deg",
        "{\"omega\": 1, \"chi\": 2, \"tilt\": 0, \"phi\": 3, \"two_theta\": 4, \"kappa\": ▸5}",
        "has no axis kappa; accepted are omega, chi, tilt, phi and two_theta",
    ),
    ("peaks[0].readings_deg", "{\"omega\": 1, ▸\"omega\": 2}", "axis omega has two readings"),
    ("peaks[0].readings_deg", "{▸\"2theta\": 1}", "cannot name an axis"),
    ("peaks[0].readings_deg", "{▸\"l\": 1}", "lists have a column of that name"),
    ("peaks[0].readings_deg", "{▸omega: 1}", "accepted is a text in quotes"),
    ("peaks[0].readings_deg.omega", "3601", "3601 is not an angle in degrees"),
    ("peaks[0].uncertainty_deg", "0", "0 is not a standard uncertainty in degrees"),
    ("peaks[0].uncertainty_deg", "Some(-1)", "-1 is not a standard uncertainty in degrees"),
    ("peaks[0].time_s", "-1", "-1 is not a time in seconds"),
    ("peaks[0].ignored", "1", "accepted is true or false"),
    ("rules", "Bisecting", "accepted is a list in square brackets"),
    ("rules[0]", "Bisect", "there is no Bisect here; accepted are Bisecting"),
    ("rules[0]", "Bisecting, ▸Bisecting", "stands here twice"),
    ("rules[0]", "Hold(axis: \"chi\", at_deg: 1), Hold(axis: ▸\"chi\", at_deg: 2)", "held by two rules"),
    ("rules[0].Hold.axis", "\"kappa\"", "has no axis kappa; accepted is one of omega, chi and phi"),
    ("rules[0].Hold.axis", "\"two_theta\"", "is the only detector axis"),
    ("rules[0].Hold.axis", "\"tilt\"", "is set by hand"),
    ("rules[0].Hold.axis", "\"two theta\"", "cannot name an axis"),
    ("rules[0].Hold.at_deg", "none", "is not an angle in degrees"),
    ("rules[0]", "Hold(axis: \"omega\", at_deg: ▸95)", "outside the limits of omega"),
    ("crystal.surface", "Reciprocal(h: 0, k: 0, l: 0)", "has no direction"),
    ("crystal.surface", "Direct(u: 0, v: ▸\"up\", w: 1)", "is not an index"),
    ("crystal.surface", "Normal(h: 0, k: 0, l: 1)", "accepted are Reciprocal"),
    ("crystal.surface.Reciprocal.h", "one", "is not an index"),
    ("crystal.surface.Reciprocal.k", "-1e5", "is not an index"),
    ("crystal.surface.Reciprocal.l", "1e9", "is not an index"),
    ("rules[0]", "BisectingAbout(axis: ▸\"phi\")", "cannot be the reference axis of spindle phi"),
    ("rules[0]", "BisectingAbout(axis: ▸\"mu\")", "accepted is one of omega, chi"),
    ("rules[0]", "Azimuth(reference: ▸Reciprocal(h: 0, k: 0, l: 0), at_deg: 5)", "has no direction"),
    ("rules[0]", "Azimuth(reference: Reciprocal(h: 0, k: 0, l: 1), at_deg: ▸inf)", "is not an angle in degrees"),
    ("rules[0]", "Incidence(at_deg: ▸\"5\")", "is not an angle in degrees"),
    ("rules[0]", "Exit(at_deg: 5, ▸side: 1)", "side"),
    ("rules[0]", "Tie(axis: ▸\"two_theta\", to: \"omega\", factor: 2, offset_deg: 0)", "is the only detector axis"),
    ("rules[0]", "Tie(axis: \"omega\", to: ▸\"omega\", factor: 2, offset_deg: 0)", "cannot follow omega"),
    ("rules[0]", "Tie(axis: \"omega\", to: ▸\"mu\", factor: 2, offset_deg: 0)", "has no axis mu"),
    ("rules[0]", "Tie(axis: \"omega\", to: \"two_theta\", factor: ▸0, offset_deg: 0)", "0 ties nothing"),
    (
        "rules[0]",
        "Tie(axis: \"omega\", to: \"two_theta\", factor: 0.5, offset_deg: ▸NaN)",
        "is not an angle in degrees",
    ),
    ("rules[0]", "▸DiffractionPlane(turned_deg: 0)", "leaves no choice"),
    ("rules[0]", "Freest(reference: ▸Direct(u: 0, v: 0, w: 0))", "has no direction"),
    ("rules[0]", "Freest(reference: Direct(u: 0, v: 0, w: 1), ▸clear: 2)", "clear"),
    ("preference", "Nearest", "there is no Nearest here; accepted are FarthestFromLimits and NearestTo"),
    ("preference.NearestTo.readings_deg", "{}", "at least one axis"),
    ("preference.NearestTo.readings_deg", "{\"kappa\": ▸1}", "has no axis kappa"),
    ("preference.NearestTo.readings_deg", "{\"chi\": 1, ▸\"chi\": 1}", "axis chi has two readings"),
    ("preference.NearestTo.readings_deg.omega", "inf", "inf is not an angle"),
    ("targets", "All", "there is no All here; accepted are SpacingRange, TwoThetaRange and List"),
    ("targets", "TwoThetaRange(min_deg: ▸-1, max_deg: 20)", "-1° is no 2θ to begin with"),
    ("targets", "TwoThetaRange(max_deg: ▸181)", "181° is no 2θ to end with"),
    ("targets", "TwoThetaRange(min_deg: 30, max_deg: ▸20)", "wrong way round"),
    ("targets", "TwoThetaRange(min_deg: ▸\"a\", max_deg: 20)", "is not an angle in degrees"),
    ("targets", "TwoThetaRange(max_deg: ▸NaN)", "NaN is not an angle in degrees"),
    ("targets", "TwoThetaRange(max_deg: 20, with_absent: ▸0)", "accepted is true or false"),
    ("targets", "List([(h: 1, k: 0, l: 0), ▸(h: 0, k: 0, l: 0)])", "0 0 0 is the direct beam"),
    ("targets", "List([(h: ▸x, k: 0, l: 0)])", "is not an index"),
    ("targets", "List([(h: 1, k: ▸(), l: 0)])", "is not an index"),
    ("targets", "List([(h: 1, k: 1, l: ▸1e9)])", "is not an index"),
    ("targets.SpacingRange.min_angstrom", "0", "0 is not a length in Å"),
    ("targets.SpacingRange.max_angstrom", "0.7", "wrong way round"),
    ("targets.SpacingRange.max_angstrom", "-1", "-1 is not a length in Å"),
    ("targets.SpacingRange.with_absent", "yes", "accepted is true or false"),
    ("orientation", "Kept", "accepted is ( … )"),
    ("orientation.u", "((1, 0, 0), (0, 1, 0), (0, 0, -1))", "its determinant is -1.000000"),
    ("orientation.u", "((1, 0, 0), (0, 1, 0.001), (0, 0, 1))", "misses the unit matrix"),
    ("orientation.u", "((1, 0, 0), (0, 1, 0))", "2 elements"),
    ("orientation.u", "((1, 0, 0), (0, 1, 0), (0, 0, 1), ▸(0, 0, 1))", "closing )"),
    ("orientation.u[0]", "5", "accepted is ( … )"),
    ("orientation.u[0][0]", "1e7", "is not a number between"),
    ("orientation.confirmed", "Some(true)", "accepted is true or false"),
];

const MACHINE_TABLE: &[Row] = &[
    ("version", "2", "2 is no version of the machine format; accepted is 1"),
    ("name", "5", "accepted is a text in quotes"),
    ("note", "[]", "accepted is a text in quotes"),
    ("sample_axes", "[]", "at least one axis"),
    ("sample_axes", "5", "accepted is a list in square brackets"),
    ("sample_axes[0]", "\"omega\"", "accepted is ( … )"),
    ("sample_axes[0].name", "\"l\"", "lists have a column of that name"),
    ("sample_axes[0].name", "\"Two_Theta_deg\"", "lists have a column of that name"),
    ("sample_axes[0].name", "\"\"", "cannot name an axis"),
    ("sample_axes[0].name", "5", "accepted is a text in quotes"),
    ("sample_axes[0].direction", "(0, 0, 0)", "has no length"),
    ("sample_axes[0].direction", "(0, 1)", "2 elements"),
    ("sample_axes[0].direction", "(0, 1, 0, ▸0)", "closing )"),
    ("sample_axes[0].direction", "\"y\"", "accepted is ( … )"),
    ("sample_axes[0].direction[0]", "NaN", "NaN is not a number between"),
    ("sample_axes[0].direction[1]", "up", "up is not a number between"),
    ("sample_axes[0].direction[2]", "-1e7", "is not a number between"),
    ("sample_axes[1].inclined", "50", "accepted is ( … )"),
    ("sample_axes[1].inclined", "(towards: (0, 0, 1))", "the field by_deg is missing"),
    ("sample_axes[1].inclined", "Some((towards: ▸(0, 0, 0), by_deg: 50))", "towards a vector that has no length"),
    ("sample_axes[1].inclined", "(▸away: (0, 0, 1), by_deg: 50)", "there is no field away here; accepted are towards"),
    ("sample_axes[1].inclined.towards", "(0, -2, 0)", "is parallel to its direction"),
    ("sample_axes[1].inclined.towards", "(0, 1)", "2 elements"),
    ("sample_axes[1].inclined.towards", "\"z\"", "accepted is ( … )"),
    ("sample_axes[1].inclined.towards[0]", "NaN", "NaN is not a number between"),
    ("sample_axes[1].inclined.towards[1]", "2e6", "2000000 is not a number between"),
    ("sample_axes[1].inclined.towards[2]", "down", "down is not a number between"),
    ("sample_axes[1].inclined.by_deg", "0", "0 is not an inclination in degrees, above 0 and below 180"),
    ("sample_axes[1].inclined.by_deg", "180", "180 is not an inclination in degrees"),
    ("sample_axes[0].limits", "(-60, 90)", "accepted are Endless and Intervals"),
    ("sample_axes[0].limits", "Free", "there is no Free here; accepted are Endless and Intervals"),
    ("sample_axes[0].limits", "Intervals([])", "one or more intervals, or Endless"),
    ("sample_axes[0].limits.Intervals", "(from_deg: 0, to_deg: 1)", "accepted is a list in square brackets"),
    ("sample_axes[0].limits.Intervals[0]", "(from_deg: 90, to_deg: -60)", "the wrong way round"),
    (
        "sample_axes[0].limits.Intervals",
        "[(from_deg: 0, to_deg: 50), ▸(from_deg: 40, to_deg: 90)]",
        "apart from each other",
    ),
    ("sample_axes[0].limits.Intervals[0].from_deg", "-4000", "-4000 is not an angle in degrees"),
    ("sample_axes[0].limits.Intervals[0].to_deg", "'x'", "is not an angle in degrees"),
    ("sample_axes[0].speed_deg_per_s", "0", "0 is not a speed in degrees per second"),
    ("sample_axes[0].overhead_s", "-0.1", "-0.1 is not a time in seconds"),
    ("sample_axes[0].zero_offset_deg", "inf", "inf is not an angle"),
    ("sample_axes[0].park_deg", "95", "the park reading 95° of axis omega lies outside its limits"),
    ("sample_axes[0].park_deg", "\"home\"", "is not an angle"),
    (
        "sample_axes[1].approach",
        "Sideways(overshoot_deg: 1)",
        "there is no Sideways here; accepted are Upward and Downward",
    ),
    ("sample_axes[1].approach", "Downward(overshoot_deg: ▸46)", "46 is not an overshoot in degrees"),
    ("sample_axes[1].approach.Upward.overshoot_deg", "-1", "-1 is not an overshoot in degrees"),
    ("sample_axes[2].set_by_hand", "by_hand", "accepted is true or false"),
    ("detector_axes", "[]", "at least one axis"),
    ("detector_axes[0].name", "\"Omega\"", "two axes are called Omega"),
    ("spindle", "\"kappa\"", "kappa is no sample axis; accepted are omega, chi, tilt, phi"),
    ("spindle", "\"tilt\"", "set by hand"),
    ("spindle", "3", "accepted is a text in quotes"),
    ("direct_beam_half_angle_deg", "90", "90 is not a half angle in degrees"),
];

#[test]
fn the_good_texts_are_good() {
    let text = template::plain(&template::session());
    assert_eq!(problems(&text), []);
    read_machine(&template::plain(template::MACHINE), "bench.ron").unwrap();
}

#[test]
fn every_wrong_value_is_placed_and_explained() {
    let template = template::session();
    let check = |(path, wrong, piece): &Row| check(&template, path, wrong, piece, "night.ron", problems).err();
    let failures: Vec<String> = SESSION_TABLE.iter().filter_map(check).collect();
    assert!(failures.is_empty(), "{}", failures.join("\n"));
}

#[test]
fn every_wrong_value_of_a_machine_is_placed_in_its_file_and_inside_a_session() {
    let session = template::session();
    let alone = |text: &str| read_machine(text, "bench.ron").err().into_iter().collect();
    let mut failures = Vec::new();
    for (path, wrong, piece) in MACHINE_TABLE {
        failures.extend(check(template::MACHINE, path, wrong, piece, "bench.ron", alone).err());
        failures.extend(check(&session, &format!("machine.Inline.{path}"), wrong, piece, "night.ron", problems).err());
    }
    assert!(failures.is_empty(), "{}", failures.join("\n"));
}

/// What went otherwise than expected, in words.
fn check(
    template: &str,
    path: &str,
    wrong: &str,
    piece: &str,
    file: &str,
    read: impl Fn(&str) -> Vec<FileProblem>,
) -> Result<(), String> {
    let (text, byte) = template::with(template, path, wrong);
    let mut byte = byte.unwrap_or_else(|| panic!("{path} is no path of the template"));
    let mut about = path;
    if piece.starts_with("0 0 0") && path.ends_with(".h") {
        // A peak 0 0 0 is a matter of its three indices, and told at the peak.
        about = path.trim_end_matches(".h");
        byte = template::with(template, about, "").1.unwrap();
    }
    let (line, column) = template::place(&text, byte);
    let found = read(&text);
    let context = format!("{path} = {wrong}: expected {line}:{column} {piece:?}, found {found:?}");
    let hit = found.iter().find(|p| (p.line, p.column) == (line, column) && p.message.contains(piece));
    let hit = hit.ok_or_else(|| context.clone())?;
    let list = about.trim_end_matches(|c: char| c == '[' || c == ']' || c.is_ascii_digit());
    let shown = hit.to_string().starts_with(&format!("{file}:{line}:{column}: {}: ", hit.field));
    if hit.file == file && hit.field.starts_with(list) && shown { Ok(()) } else { Err(context) }
}

#[test]
fn no_field_is_left_out_of_the_tables() {
    for path in paths(template::MACHINE) {
        assert!(MACHINE_TABLE.iter().any(|row| row.0 == path), "machine: {path}");
    }
    for path in paths(&template::session()).iter().filter(|path| !path.starts_with("machine.Inline.")) {
        assert!(SESSION_TABLE.iter().any(|row| row.0 == *path), "session: {path}");
    }
}

/// Every field and every variant that the program writes for these texts has a mark of its own, or is of a kind with one.
#[test]
fn the_template_uses_every_field() {
    let session = Session::from_text(&template::plain(&template::session()), "night.ron").unwrap();
    let written = session.to_text().unwrap();
    let marked = template::session();
    for line in written.split([' ', '\n', '(']) {
        if let Some(field) =
            line.strip_suffix(':').filter(|field| field.chars().all(|c| c.is_ascii_lowercase() || c == '_'))
        {
            assert!(marked.contains(&format!("{field}: ⟦")), "{field} is written, but not marked");
        }
    }
}
