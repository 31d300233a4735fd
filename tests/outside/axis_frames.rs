//! Axes of the imgCIF dictionary and of NeXus, converted into our laboratory frame.
//!
//! Sources: axis vectors *published* (imgCIF dictionary 1.8.9, AXIS and DIFFRN_SCAN examples; NeXus definitions v2026.01,
//! manual, `euler-cif.txt`), `reference/s2_axis_examples.csv`; rotation matrices *computed* from them by an independent
//! script, `reference/s2_chain_rotations.csv`; matrices between the frames *computed*, the imgCIF ones also by the
//! construction printed in that dictionary, `reference/s2_frames_to_mcstas.csv`.
//!
//! imgCIF has x along the main goniometer axis and z towards the source; NeXus has our frame.

use nalgebra::{Matrix3, Vector3};
use ringwright_acceptance::{reference_rows, sample_stack};
use ringwright_core::instrument::{Instrument, Setting};

fn frame(start: &str) -> Matrix3<f64> {
    let rows = reference_rows("s2_frames_to_mcstas.csv");
    rows.iter().find(|row| row.text("frame").starts_with(start)).map(|row| row.matrix("m")).unwrap()
}

/// The published axes from the outermost inwards, each turned into our frame.
fn machine(set: &str, lab_from_theirs: &Matrix3<f64>) -> Instrument {
    let rows: Vec<_> =
        reference_rows("s2_axis_examples.csv").into_iter().filter(|row| row.text("set") == set).collect();
    let mut sample = Vec::new();
    let mut carrier = ".";
    while let Some(row) = rows.iter().find(|row| row.text("depends_on") == carrier) {
        carrier = row.text("axis_id");
        sample.push((carrier, lab_from_theirs * row.vector(["v1", "v2", "v3"])));
    }
    assert_eq!(sample.len(), 3, "{set}");
    sample_stack(&sample, &Vector3::y())
}

#[test]
fn published_axis_chains_turn_as_computed() {
    for row in reference_rows("s2_chain_rotations.csv") {
        let set = row.text("axis_set");
        // Either sense of "up" is allowed in imgCIF: both matrices are proper, so both must give the same.
        let frames = if set == "NeXus_euler" {
            vec!["McStas"]
        } else {
            vec!["imgCIF lab, beam = -Z, gravity = -Y", "imgCIF lab, beam = -Z, gravity = +Y"]
        };
        for name in frames {
            let lab_from_theirs = frame(name);
            let instrument = machine(set, &lab_from_theirs);
            let [outer, middle, inner] = row.numbers(["outer", "middle", "inner"]);
            let ours = instrument.lab_from_head(&Setting::new(&[outer, middle, inner, 0.0]));
            let theirs = lab_from_theirs.transpose() * ours.matrix() * lab_from_theirs;
            let off = (theirs - row.matrix("r")).abs().max();
            assert!(off < 0.51e-8, "{off:e}: {row:?}");
        }
    }
}

#[test]
fn frames_are_right_handed_and_share_the_beam() {
    for row in reference_rows("s2_frames_to_mcstas.csv") {
        assert_eq!(row.matrix("m").determinant(), 1.0, "{row:?}");
    }
    // Towards the source is against our z.
    assert_eq!(frame("imgCIF lab, beam = -Z, gravity = -Y") * Vector3::z(), -Vector3::z());
}

/// The NeXus cradle is our Eulerian machine, name by name.
#[test]
fn our_eulerian_machine_has_the_axes_of_nexus() {
    let theirs = machine("NeXus_euler", &frame("McStas"));
    let ours = ringwright_core::instrument::built_in_machine("eulerian-four-circle").unwrap();
    for (a, b) in theirs.sample_axes().iter().zip(ours.sample_axes()) {
        assert!((a.direction.into_inner() - b.direction.into_inner()).norm() < 1e-15, "{} and {}", a.name, b.name);
    }
    assert_eq!(ours.sample_axes().len(), 3);
}
