//! Wavelengths, energies and the constants between them.
//!
//! Sources: NIST X-Ray Transition Energies database (SRD 128; Deslattes et al. 2003, Rev. Mod. Phys. 75, 35), energies
//! published, wavelengths computed; International Tables Vol. C (2006), Table 4.2.2.6, published; CODATA 2022 through
//! scipy.constants 1.17.1, published. `reference/s3_xray_lines.csv` and `reference/s3_constants.csv`.

use ringwright_acceptance::{Row, reference_rows, with_uncertainty};
use ringwright_core::quantity::{EnergyInKev, EnergyInMev, WavelengthInAngstrom};
use ringwright_core::radiation::{EmissionLine, HC_KEV_ANGSTROM, NEUTRON_MEV_ANGSTROM2, Radiation, emission_lines};

/// The name of a line as Ringwright writes it.
fn name(row: &Row) -> String {
    let line = match row.text("siegbahn") {
        "Kalpha weighted (2:1)" => "Ka".to_owned(),
        line => line.replace("Kalpha", "Ka").replace("Kbeta", "Kb"),
    };
    format!("{} {line}", row.text("element"))
}

#[test]
fn every_emission_line_has_its_published_wavelength() {
    let rows = reference_rows("s3_xray_lines.csv");
    assert_eq!(rows.len(), emission_lines().len(), "each line that Ringwright knows is checked");
    for row in rows {
        let line = EmissionLine::parse(&name(&row)).unwrap();
        let wavelength = line.wavelength_angstrom();
        let off = wavelength - row.number("lambda_NIST_A");
        assert!(off.abs() < row.half_a_digit("lambda_NIST_A"), "{line}: {wavelength}");
        if let Some(energy_ev) = row.number_if_any("E_NIST_eV") {
            let by_energy = Radiation::XrayEnergy { kev: EnergyInKev::new(energy_ev * 1e-3).unwrap() };
            assert!((by_energy.wavelength_angstrom() / wavelength - 1.0).abs() < 1e-14, "{line}");
        }
        if !row.text("lambda_ITC").is_empty() {
            let (tabulated, uncertainty) = with_uncertainty(row.text("lambda_ITC"));
            assert!((wavelength - tabulated).abs() < uncertainty, "{line} against International Tables");
        }
    }
}

/// W Kα1 of International Tables, 0.20901313(18) Å, published, is no line of the table.
#[test]
fn a_published_wavelength_far_from_the_table_gives_its_energy() {
    let (tabulated, uncertainty) = with_uncertainty("0.20901313(18)");
    let x = Radiation::XrayWavelength { angstrom: WavelengthInAngstrom::new(tabulated).unwrap() };
    // 59.318847(50) keV: the NIST database again, from memory.
    let energy = HC_KEV_ANGSTROM / x.wavelength_angstrom();
    assert!((energy - 59.318_847).abs() < energy * uncertainty / tabulated + 5e-5, "{energy}");
}

fn constant(name: &str) -> f64 {
    let rows = reference_rows("s3_constants.csv");
    rows.iter().find(|row| row.text("name") == name).map(|row| row.number("value")).unwrap()
}

#[test]
fn energy_and_wavelength_follow_from_the_constants_of_nature() {
    let [h, c, e, neutron_mass] = ["h", "c", "e", "m_n"].map(constant);
    // J m to keV Å, and J m² to meV Å².
    let hc = h * c / e * 1e-3 * 1e10;
    let neutron = h * h / (2.0 * neutron_mass * e) * 1e3 * 1e20;
    for (ours, computed, listed) in
        [(HC_KEV_ANGSTROM, hc, constant("hc")), (NEUTRON_MEV_ANGSTROM2, neutron, constant("E*lambda^2 (neutron)"))]
    {
        assert!((ours / computed - 1.0).abs() < 1e-12, "{ours} against {computed}");
        assert!((ours / listed - 1.0).abs() < 1e-12, "{ours} against {listed}");
    }
}

/// Thermal neutrons: 2200 m/s, 25.30 meV, 1.798 Å; from memory.
#[test]
fn thermal_neutrons_have_their_well_known_wavelength() {
    let thermal = Radiation::NeutronEnergy { mev: EnergyInMev::new(25.30).unwrap() };
    assert!((thermal.wavelength_angstrom() - 1.798).abs() < 0.0005);
    let speed = constant("h") / (constant("m_n") * thermal.wavelength_angstrom() * 1e-10);
    assert!((speed - 2200.0).abs() < 0.5, "{speed} m/s");
}

/// 0.71073 and 1.54184 Å are 24 and 20 parts per million below today's weighted means: computed from the published
/// lines. Today's values carry no remark.
#[test]
fn customary_values_of_the_older_scale_are_remarked_on() {
    for (customary, line, ppm) in [(0.710_73, "Mo Ka", "24 parts"), (1.541_84, "Cu Ka", "20 parts")] {
        let note = |angstrom| {
            let angstrom = WavelengthInAngstrom::new(angstrom).unwrap();
            Radiation::XrayWavelength { angstrom }.older_scale_note()
        };
        let text = note(customary).unwrap();
        assert!(text.contains(line) && text.contains(ppm), "{text}");
        assert_eq!(note(EmissionLine::parse(line).unwrap().wavelength_angstrom()), None);
    }
}
