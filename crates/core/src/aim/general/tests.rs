//! The laws of the general road: any stack, any rules. A setting is drawn at random, rules are made that it fulfils, and it
//! must be found again; and whatever is found must fulfil the diffraction condition and every rule.

use nalgebra::{Matrix3, Vector3};
use proptest::prelude::*;
use proptest::test_runner::RngSeed;

use crate::aim::{Attempt, CrystalOnHead, Freedom, NoAzimuth, NoSetting, Road, Rule, RuleError, azimuth_rad};
use crate::frames::{Head, Vector};
use crate::instrument::{Instrument, MachineDescription, Setting, wrap_deg};
use crate::testing::{cases, unit_vector};

const WAVELENGTH: f64 = 0.9;

/// A machine of any axes, a setting drawn at random, and what it looks at.
#[derive(Debug, Clone)]
struct Drawn {
    instrument: Instrument,
    setting: Setting,
    q: Vector<Head>,
    crystal: CrystalOnHead,
}

fn machine(sample: &[Vector3<f64>], detector: &[Vector3<f64>], zeros: &[f64]) -> Option<Instrument> {
    let axis = |(i, d): (usize, &Vector3<f64>), name: &str| {
        format!(
            "(name: \"{name}{i}\", direction: ({}, {}, {}), limits: Endless, speed_deg_per_s: 1, zero_offset_deg: {})",
            d.x,
            d.y,
            d.z,
            zeros[i] + if name == "d" { 1.5 } else { 0.0 }
        )
    };
    let list = |axes: &[Vector3<f64>], name: &str| {
        axes.iter().enumerate().map(|a| axis(a, name)).collect::<Vec<_>>().join(", ")
    };
    let text = format!(
        "(version: 1, name: \"any\", sample_axes: [{}], detector_axes: [{}])",
        list(sample, "s"),
        list(detector, "d")
    );
    Instrument::new(ron::from_str::<MachineDescription>(&text).ok()?).ok()
}

fn drawn() -> impl Strategy<Value = Drawn> {
    let axes = (prop::collection::vec(unit_vector(), 1..=4), prop::collection::vec(unit_vector(), 1..=2));
    let readings = prop::array::uniform6(-170.0..170.0f64);
    (axes, readings, prop::array::uniform4(-4.0..4.0f64), unit_vector(), unit_vector()).prop_filter_map(
        "a machine that sees something",
        |((sample, detector), readings, zeros, r1, r2)| {
            if sample.len() + detector.len() < 3 {
                return None;
            }
            let instrument = machine(&sample, &detector, &zeros)?;
            let setting = Setting::new(&readings[..instrument.axis_count()]);
            let q_lab = instrument.q_in_lab(&setting, WAVELENGTH);
            let two_theta = instrument.two_theta_rad(&setting);
            if !(0.1..3.0).contains(&two_theta) || r1.cross(&r2).norm() < 0.2 {
                return None;
            }
            let q = instrument.lab_from_head(&setting).inverse() * q_lab;
            let ub = Matrix3::from_columns(&[r1, r2, r1.cross(&r2)]) * 0.1;
            let surface = Some(ron::from_str("Reciprocal(h: 1, k: 0.5, l: -0.3)").ok()?);
            Some(Drawn { instrument, setting, q, crystal: CrystalOnHead { ub, surface } })
        },
    )
}

impl Drawn {
    fn name(&self, axis: usize) -> String {
        self.instrument.axes().nth(axis).unwrap().name.to_string()
    }

    fn surface(&self) -> Vector<Head> {
        self.crystal.surface.unwrap().in_head(&self.crystal.ub).unwrap()
    }

    /// α_i and α_f in radians at a setting.
    fn grazing(&self, setting: &Setting) -> [f64; 2] {
        let n = *(self.instrument.lab_from_head(setting) * self.surface()).raw();
        [(-n.z).asin(), n.dot(self.instrument.diffracted_direction(setting).raw()).asin()]
    }

    fn psi_deg(&self, setting: &Setting) -> f64 {
        azimuth_rad(&self.instrument, setting, self.q, self.surface()).unwrap().to_degrees()
    }

    /// A rule of a kind that the drawn setting fulfils. Kinds: 0 to 3 hold, 4 azimuth, 5 incidence, 6 exit, 7 and 8 ties
    /// between sample axes, 9 hold of a detector axis, 10 plane, 11 tie of detector axes, 12 tie to a detector axis.
    fn rule(&self, kind: usize, pick: [usize; 2], factor: f64) -> Option<Rule> {
        let (sample, all) = (self.instrument.sample_axes().len(), self.instrument.axis_count());
        let reading = |axis: usize| self.setting.readings_deg()[axis];
        let tie = |axis: usize, to: usize| {
            let offset = reading(axis) - factor * reading(to);
            (axis != to).then(|| {
                let (axis, to) = (self.name(axis), self.name(to));
                format!("Tie(axis: \"{axis}\", to: \"{to}\", factor: {factor}, offset_deg: {offset})")
            })
        };
        let hold = |axis: usize| format!("Hold(axis: \"{}\", at_deg: {})", self.name(axis), reading(axis));
        let [alpha_i, alpha_f] = self.grazing(&self.setting).map(f64::to_degrees);
        let k_f = self.instrument.diffracted_direction(&self.setting);
        let text = match kind {
            0..=3 => hold(pick[0] % sample),
            4 => format!(
                "Azimuth(reference: Reciprocal(h: 1, k: 0.5, l: -0.3), at_deg: {})",
                self.psi_deg(&self.setting)
            ),
            5 => format!("Incidence(at_deg: {alpha_i})"),
            6 => format!("Exit(at_deg: {alpha_f})"),
            7 | 8 => tie(pick[0] % sample, pick[1] % sample)?,
            9 => hold(sample + pick[0] % (all - sample)),
            10 => format!("DiffractionPlane(turned_deg: {})", k_f.raw().y.atan2(k_f.raw().x).to_degrees()),
            11 => tie(sample + pick[0] % (all - sample), sample + pick[1] % (all - sample))?,
            // With two detector axes the place of both roots may coincide with an edge of the detector's reach within a
            // step of the search: those are looked at by the outside check, not by luck.
            _ if all - sample > 1 => return None,
            _ => tie(pick[0] % sample, sample)?,
        };
        Some(ron::from_str(&text).unwrap())
    }

    /// How far a setting is from what a rule wants, in radians (about).
    fn violation(&self, rule: &Rule, setting: &Setting) -> f64 {
        let reading = |name: &str| setting.readings_deg()[self.instrument.axis_index(name).unwrap()];
        match rule {
            Rule::Hold { axis, at_deg } => wrap_deg(reading(axis.as_str()) - at_deg.get()).to_radians().abs(),
            Rule::Azimuth { at_deg, .. } => wrap_deg(self.psi_deg(setting) - at_deg.get()).to_radians().abs(),
            Rule::Incidence { at_deg } => (self.grazing(setting)[0].sin() - at_deg.get().to_radians().sin()).abs(),
            Rule::Exit { at_deg } => (self.grazing(setting)[1].sin() - at_deg.get().to_radians().sin()).abs(),
            Rule::EqualIncidenceAndExit => {
                let [i, f] = self.grazing(setting);
                (i.sin() - f.sin()).abs()
            }
            Rule::Tie { axis, to, factor, offset_deg } => {
                // Some representative of the other axis must do.
                let off = |k: i32| {
                    let other = reading(to.as_str()) + 360.0 * f64::from(k);
                    wrap_deg(reading(axis.as_str()) - factor.get() * other - offset_deg.get()).to_radians().abs()
                };
                (0..12).map(off).fold(f64::INFINITY, f64::min)
            }
            Rule::DiffractionPlane { turned_deg } => {
                let (sin, cos) = turned_deg.get().to_radians().sin_cos();
                let k_f = *self.instrument.diffracted_direction(setting).raw();
                (k_f.y * cos - k_f.x * sin).abs()
            }
            Rule::Bisecting | Rule::BisectingAbout { .. } => {
                let reference = match rule {
                    Rule::BisectingAbout { axis } => self.instrument.axis_index(axis.as_str()).unwrap(),
                    _ => self.instrument.sample_axes().len() - 3,
                };
                let q = self.instrument.q_in_lab(setting, WAVELENGTH).raw().normalize();
                self.pointing(setting, self.instrument.spindle())
                    .cross(&self.pointing(setting, reference))
                    .dot(&q)
                    .abs()
            }
            Rule::Freest { .. } => 0.0,
        }
    }

    /// Where an axis points with those outside it at their readings.
    fn pointing(&self, setting: &Setting, axis: usize) -> Vector3<f64> {
        let zeros = self
            .instrument
            .axes()
            .enumerate()
            .map(|(i, a)| if i < axis { setting.readings_deg()[i] } else { a.zero_offset_deg });
        let outer = Setting::new(&zeros.collect::<Vec<_>>());
        let own = Vector::from_raw(self.instrument.sample_axes()[axis].direction.into_inner());
        *(self.instrument.lab_from_head(&outer) * own).raw()
    }

    /// Every setting; nothing if the rules do not go together, or if a setting is one of a continuum.
    fn settings(&self, rules: &[Rule]) -> Option<Vec<Setting>> {
        let road = Road::new(&self.instrument, rules, Some(&self.crystal)).ok()?;
        let (mut all, mut isolated) = (Vec::new(), true);
        let solved = road.each_attempt(self.q, WAVELENGTH, &mut |attempt| {
            if let Attempt::Setting { setting, freedom, .. } = attempt {
                isolated &= freedom == Freedom::None;
                all.push(setting);
            }
        });
        assert_eq!(solved, Ok(()));
        isolated.then_some(all)
    }

    /// Checks the forward equation and the rules of every setting; the distance to the drawn one, in degrees.
    fn check(&self, rules: &[Rule], found: &[Setting]) -> Result<f64, TestCaseError> {
        let mut nearest = f64::INFINITY;
        for setting in found {
            let reached = self.instrument.lab_from_head(setting) * self.q;
            let error = (reached - self.instrument.q_in_lab(setting, WAVELENGTH)).norm() / self.q.norm();
            prop_assert!(error < 1e-10, "forward error {error:e} at {setting:?}");
            for rule in rules {
                let violation = self.violation(rule, setting);
                prop_assert!(violation < 2e-8, "{rule:?} violated by {violation:e} at {setting:?}");
            }
            let pairs = setting.readings_deg().iter().zip(self.setting.readings_deg());
            nearest = nearest.min(pairs.map(|(a, b)| wrap_deg(a - b).abs()).fold(0.0, f64::max));
        }
        Ok(nearest)
    }
}

proptest! {
    #![proptest_config(ProptestConfig { max_shrink_iters: 0, rng_seed: RngSeed::Fixed(20_261_201), ..cases() })]

    /// Completeness: the drawn setting is among those found.
    #[test]
    fn a_drawn_setting_is_found_again(
        drawn in drawn(), kinds in prop::collection::vec((0..13usize, prop::array::uniform2(0..4usize)), 3),
        factor in prop::sample::select(vec![0.5, 1.0, -1.0, 2.0]),
    ) {
        let spare = drawn.instrument.axis_count() - 3;
        let rules: Option<Vec<Rule>> = kinds[..spare].iter().map(|&(kind, pick)| drawn.rule(kind, pick, factor)).collect();
        let Some(rules) = rules else { return Ok(()) };
        let Some(found) = drawn.settings(&rules) else { return Ok(()) };
        let nearest = drawn.check(&rules, &found)?;
        // An isolated setting is met to rounding; near a double root half the digits are left.
        prop_assert!(nearest < 1e-5, "{rules:?} missed the setting by {nearest}° among {}", found.len());
    }

    /// *Bisecting* about any reference, whatever else settles the rest.
    #[test]
    fn bisecting_settings_are_found_again(
        drawn in drawn(), turned in 0..4usize, kinds in prop::collection::vec((0..13usize, prop::array::uniform2(0..4usize)), 2),
        about in 0..4usize,
    ) {
        let sample = drawn.instrument.sample_axes().len();
        if sample < 2 || drawn.instrument.axis_count() < 4 { return Ok(()) }
        let about = drawn.name(about % sample);
        let Ok(bisecting) = ron::from_str::<Rule>(&format!("BisectingAbout(axis: \"{about}\")")) else { return Ok(()) };
        if about == drawn.name(sample - 1) { return Ok(()) }
        let Some(drawn) = made_bisecting(&drawn, &bisecting, turned % drawn.instrument.axis_count()) else { return Ok(()) };
        let spare = drawn.instrument.axis_count() - 4;
        let rest: Option<Vec<Rule>> = kinds[..spare].iter().map(|&(kind, pick)| drawn.rule(kind, pick, 0.5)).collect();
        let Some(mut rules) = rest else { return Ok(()) };
        rules.insert(0, bisecting);
        let Some(found) = drawn.settings(&rules) else { return Ok(()) };
        let nearest = drawn.check(&rules, &found)?;
        prop_assert!(nearest < 1e-5, "{rules:?} missed the setting by {nearest}° among {}", found.len());
    }
}

/// Turns one axis of the drawn setting until it bisects, by halving; nothing if it never does.
fn made_bisecting(drawn: &Drawn, rule: &Rule, axis: usize) -> Option<Drawn> {
    let at = |reading: f64| {
        let mut readings = drawn.setting.readings_deg().to_vec();
        readings[axis] = reading;
        Setting::new(&readings)
    };
    let signed = |reading: f64| {
        let setting = at(reading);
        let Rule::BisectingAbout { axis } = rule else { return 0.0 };
        let reference = drawn.instrument.axis_index(axis.as_str()).unwrap();
        let q = drawn.instrument.q_in_lab(&setting, WAVELENGTH).raw().normalize();
        drawn.pointing(&setting, drawn.instrument.spindle()).cross(&drawn.pointing(&setting, reference)).dot(&q)
    };
    let (mut low, mut high) = (0..72)
        .map(|i| (-180.0 + 5.0 * f64::from(i), -175.0 + 5.0 * f64::from(i)))
        .find(|&(a, b)| signed(a) * signed(b) < 0.0)?;
    for _ in 0..60 {
        let middle = 0.5 * (low + high);
        if signed(low) * signed(middle) <= 0.0 { high = middle } else { low = middle }
    }
    let setting = at(low);
    let two_theta = drawn.instrument.two_theta_rad(&setting);
    let q = drawn.instrument.lab_from_head(&setting).inverse() * drawn.instrument.q_in_lab(&setting, WAVELENGTH);
    (0.1..3.0).contains(&two_theta).then(|| Drawn { setting, q, ..drawn.clone() })
}

#[test]
fn a_reflection_without_azimuth_says_why() {
    let instrument = machine(&[Vector3::y(), Vector3::z(), Vector3::y()], &[Vector3::y()], &[0.0; 4]).unwrap();
    let crystal = CrystalOnHead { ub: Matrix3::identity() * 0.5, surface: None };
    let rule = |text: &str| vec![ron::from_str::<Rule>(text).unwrap()];
    let road =
        Road::new(&instrument, &rule("Azimuth(reference: Direct(u: 0, v: 0, w: 1), at_deg: 10)"), Some(&crystal))
            .unwrap();
    let ask = |q: [f64; 3], wavelength: f64| road.each_attempt(Vector::new(q[0], q[1], q[2]), wavelength, &mut |_| ());
    assert_eq!(ask([0.5, 0.0, 0.0], 1.0), Ok(()));
    assert_eq!(ask([0.0, 0.0, 0.5], 1.0), Err(NoSetting::NoAzimuth(NoAzimuth::ReferenceAlongQ)));
    assert_eq!(ask([0.5, 0.0, 0.0], 4.0), Err(NoSetting::NoAzimuth(NoAzimuth::StraightBack)));
    assert!(matches!(ask([0.5, 0.0, 0.0], 4.1), Err(NoSetting::Outside(_))));
    assert!(matches!(Road::new(&instrument, &rule("EqualIncidenceAndExit"), Some(&crystal)), Err(RuleError::Rule(_))));
    let without = Road::new(&instrument, &rule("Azimuth(reference: Direct(u: 0, v: 0, w: 1), at_deg: 10)"), None);
    assert_eq!(without, Err(RuleError::NeedsOrientation("azimuth")));
}
