//! A good session text in which every value is marked with its path: ⟦path|value⟧. Wrong files are made of it by putting
//! something else in the place of one value, so that the line and column to expect come from the text itself.

/// A machine file that uses every field.
pub const MACHINE: &str = r#"(
    version: ⟦version|1⟧,
    name: ⟦name|"bench of the invented laboratory"⟧,
    note: ⟦note|"a machine (with brackets, and // no comment)"⟧,
    sample_axes: ⟦sample_axes|[
        ⟦sample_axes[0]|(name: ⟦sample_axes[0].name|"omega"⟧, direction: ⟦sample_axes[0].direction|(⟦sample_axes[0].direction[0]|0⟧, ⟦sample_axes[0].direction[1]|1⟧, ⟦sample_axes[0].direction[2]|0⟧)⟧,
            limits: ⟦sample_axes[0].limits|Intervals(⟦sample_axes[0].limits.Intervals|[⟦sample_axes[0].limits.Intervals[0]|(from_deg: ⟦sample_axes[0].limits.Intervals[0].from_deg|-60⟧, to_deg: ⟦sample_axes[0].limits.Intervals[0].to_deg|90⟧)⟧, (from_deg: 100, to_deg: 110)]⟧)⟧,
            speed_deg_per_s: ⟦sample_axes[0].speed_deg_per_s|4⟧, overhead_s: ⟦sample_axes[0].overhead_s|0.5⟧,
            zero_offset_deg: ⟦sample_axes[0].zero_offset_deg|0.02⟧, park_deg: ⟦sample_axes[0].park_deg|5⟧)⟧,
        (
            name: "chi", /* tilts ( the crystal */ direction: (0, 1, 0),
            inclined: ⟦sample_axes[1].inclined|(towards: ⟦sample_axes[1].inclined.towards|(⟦sample_axes[1].inclined.towards[0]|0⟧, ⟦sample_axes[1].inclined.towards[1]|0⟧, ⟦sample_axes[1].inclined.towards[2]|1⟧)⟧, by_deg: ⟦sample_axes[1].inclined.by_deg|90⟧)⟧,
            limits: Endless, speed_deg_per_s: 3,
            approach: ⟦sample_axes[1].approach|Upward(overshoot_deg: ⟦sample_axes[1].approach.Upward.overshoot_deg|0.5⟧)⟧,
        ),
        (name: "tilt", direction: (1, 0, 0), limits: Intervals([(from_deg: -20, to_deg: 20)]), speed_deg_per_s: 1, set_by_hand: ⟦sample_axes[2].set_by_hand|true⟧),
        (name: "phi", direction: (0, 1, 0), limits: Endless, speed_deg_per_s: 8),
    ]⟧,
    detector_axes: ⟦detector_axes|[(name: ⟦detector_axes[0].name|"two_theta"⟧, direction: (0, 1, 0), limits: Endless, speed_deg_per_s: 4)]⟧,
    spindle: ⟦spindle|"phi"⟧,
    direct_beam_half_angle_deg: ⟦direct_beam_half_angle_deg|3⟧,
)"#;

const SESSION: &str = r#"// A night of the invented laboratory; µ and Å take more than one byte.
(
    version: ⟦version|1⟧,
    title: ⟦title|"first night"⟧,
    crystal: ⟦crystal|(
        name: ⟦crystal.name|"lindenite (2 µm)"⟧,
        cell: ⟦crystal.cell|(a_angstrom: ⟦crystal.cell.a_angstrom|7.31⟧, b_angstrom: ⟦crystal.cell.b_angstrom|9.2⟧, c_angstrom: ⟦crystal.cell.c_angstrom|11.05⟧,
               alpha_deg: ⟦crystal.cell.alpha_deg|90⟧, beta_deg: ⟦crystal.cell.beta_deg|102.5⟧, gamma_deg: ⟦crystal.cell.gamma_deg|90⟧)⟧,
        symmetry: ⟦crystal.symmetry|SpaceGroup(⟦crystal.symmetry.SpaceGroup|"P 1 21/n 1"⟧)⟧,
        surface: ⟦crystal.surface|Reciprocal(h: ⟦crystal.surface.Reciprocal.h|0⟧, k: ⟦crystal.surface.Reciprocal.k|0⟧, l: ⟦crystal.surface.Reciprocal.l|1⟧)⟧,
    )⟧,
    radiation: ⟦radiation|XrayLine(name: ⟦radiation.XrayLine.name|"Mo Ka1"⟧)⟧,
    machine: ⟦machine|Inline(⟦machine.Inline|MACHINE⟧)⟧,
    peaks: ⟦peaks|[
        ⟦peaks[0]|(h: ⟦peaks[0].h|2⟧, k: ⟦peaks[0].k|0⟧, l: ⟦peaks[0].l|0⟧, readings_deg: ⟦peaks[0].readings_deg|{"omega": ⟦peaks[0].readings_deg.omega|5.25⟧, "chi": 12, "tilt": 0, "phi": 33.5, "two_theta": 11.2}⟧,
            uncertainty_deg: ⟦peaks[0].uncertainty_deg|0.02⟧, time_s: ⟦peaks[0].time_s|60⟧, ignored: ⟦peaks[0].ignored|true⟧)⟧,
        (h: 0, k: 2, l: 1, readings_deg: {"omega": 6, "chi": -70, "tilt": 0, "phi": 100, "two_theta": 12}),
    ]⟧,
    rules: ⟦rules|[⟦rules[0]|Hold(axis: ⟦rules[0].Hold.axis|"chi"⟧, at_deg: ⟦rules[0].Hold.at_deg|54.7⟧)⟧]⟧,
    preference: ⟦preference|NearestTo(readings_deg: ⟦preference.NearestTo.readings_deg|{"omega": ⟦preference.NearestTo.readings_deg.omega|0⟧}⟧)⟧,
    targets: ⟦targets|SpacingRange(min_angstrom: ⟦targets.SpacingRange.min_angstrom|0.8⟧, max_angstrom: ⟦targets.SpacingRange.max_angstrom|5⟧, with_absent: ⟦targets.SpacingRange.with_absent|true⟧)⟧,
    orientation: ⟦orientation|(
        u: ⟦orientation.u|(⟦orientation.u[0]|(⟦orientation.u[0][0]|0.6⟧, -0.8, 0)⟧, (0.8, 0.6, 0), (0, 0, 1))⟧,
        confirmed: ⟦orientation.confirmed|true⟧,
    )⟧,
)
"#;

/// The session with the machine written out in it, paths and all.
pub fn session() -> String {
    let prefixed = MACHINE.replace('⟦', "⟦machine.Inline.");
    SESSION.replace("MACHINE", &prefixed)
}

/// The text without its marks.
pub fn plain(template: &str) -> String {
    with(template, "no such path", "").0
}

/// Every marked path.
pub fn paths(template: &str) -> Vec<String> {
    template.split('⟦').skip(1).filter_map(|part| Some(part.split_once('|')?.0.to_owned())).collect()
}

/// The text with `wrong` in the place of the value at `path`, and the byte to expect: where ▸ stands in `wrong`, or its
/// start. Marks are taken out.
pub fn with(template: &str, path: &str, wrong: &str) -> (String, Option<usize>) {
    let (mut text, mut expected) = (String::new(), None);
    let (mut depth, mut skip_above) = (0, None);
    let mut rest = template;
    while let Some(i) = rest.find(['⟦', '⟧']) {
        let (before, mark) = rest.split_at(i);
        if skip_above.is_none() {
            text.push_str(before);
        }
        if let Some(opened) = mark.strip_prefix('⟦') {
            let (name, inside) = opened.split_once('|').expect("a mark has a path");
            depth += 1;
            if name == path && skip_above.is_none() {
                skip_above = Some(depth);
                expected = Some(text.len() + wrong.find('▸').unwrap_or(0));
                text.push_str(&wrong.replace('▸', ""));
            }
            rest = inside;
        } else {
            if skip_above == Some(depth) {
                skip_above = None;
            }
            depth -= 1;
            rest = &mark['⟧'.len_utf8()..];
        }
    }
    text.push_str(rest);
    (text, expected)
}

/// Line and column, counted from 1, of a byte.
pub fn place(text: &str, byte: usize) -> (usize, usize) {
    let line = text[..byte].lines().count().max(1) + usize::from(text[..byte].ends_with('\n') && byte > 0);
    let column = text[..byte].chars().rev().take_while(|c| *c != '\n').count() + 1;
    (line, column)
}
