use std::sync::Arc;

use egui::{TextStyle, Theme, Ui};
use egui_kittest::Harness;
use ringwright_core::aim::{Preference, Rule};
use ringwright_core::crystal::{
    AbsentNodes, DRange, NodesOutcome, Presence, SpaceGroup, SymmetryQuery, UnitCell, nodes,
};
use ringwright_core::frames::{Hkl, Rotation};
use ringwright_core::instrument::{Setting, built_in_machine};
use ringwright_core::orient::Orientation;
use ringwright_core::pace::Unhurried;
use ringwright_core::quantity::WavelengthInAngstrom;
use ringwright_core::radiation::Radiation;
use ringwright_core::reach::{Judge, ReachTable, Wanted};
use ringwright_core::session::{Resolved, Targets};
use ringwright_core::work::AzimuthView;

use super::super::test_renderer::SoftwareRenderer;
use super::super::*;
use crate::window::{Picked, Reach, Results};

/// What the shell holds for the views.
pub struct Workplace {
    pub results: Results,
    pub picked: Picked,
    pub settings: PickedSettings,
    pub azimuth: AzimuthRibbon,
    pub shown: ShownKinds,
    pub lattice: LatticeView,
    pub table: ReflectionTable,
}

impl Workplace {
    pub fn of(reach: Option<Arc<Reach>>) -> Self {
        Self {
            results: Results { reach, ..Results::default() },
            picked: Picked::default(),
            settings: PickedSettings::default(),
            azimuth: AzimuthRibbon::default(),
            shown: ShownKinds::default(),
            lattice: LatticeView::default(),
            table: ReflectionTable::default(),
        }
    }

    /// What comes before the views in each frame.
    pub fn begin(&mut self) {
        self.picked.hovered = None;
        self.settings.update(self.results.reach.as_ref(), &self.picked);
    }

    pub fn lattice_ui(&mut self, ui: &mut Ui) {
        self.begin();
        self.lattice.show(ui, &self.results, &mut self.picked, &self.settings, &mut self.shown);
    }

    pub fn table_ui(&mut self, ui: &mut Ui) {
        self.begin();
        self.table.show(ui, &self.results, &mut self.picked, &mut self.shown);
    }

    pub fn dials_ui(&mut self, ui: &mut Ui) {
        self.begin();
        self.azimuth.update(ui.ctx(), &self.results, &self.picked);
        axis_dials(ui, &self.results, &self.picked, &self.azimuth, &mut self.settings);
    }

    pub fn reach(&self) -> Arc<Reach> {
        Arc::clone(self.results.reach.as_ref().unwrap())
    }
}

/// A harness that draws with the software renderer.
pub fn harness<'a>(
    size: [f32; 2],
    theme: Theme,
    place: Workplace,
    show: impl FnMut(&mut Ui, &mut Workplace) + 'a,
) -> Harness<'a, Workplace> {
    let builder = Harness::builder().with_size(size).with_theme(theme).renderer(SoftwareRenderer::default());
    let builder = builder.with_step_dt(0.05).with_context_setup(|ctx| {
        ctx.all_styles_mut(|style| {
            for (name, size) in [(TextStyle::Small, 11.0), (TextStyle::Body, 13.0), (TextStyle::Monospace, 13.0)] {
                if let Some(font) = style.text_styles.get_mut(&name) {
                    font.size = size;
                }
            }
        });
    });
    let mut harness = builder.build_ui_state(show, place);
    harness.run();
    harness
}

/// Every node down to a spacing, of an invented orthorhombic crystal in an odd orientation.
pub fn orthorhombic(machine: &str, edges: [f64; 3], d_min: f64, wavelength_angstrom: f64) -> Arc<Reach> {
    let cell = UnitCell::new(edges[0], edges[1], edges[2], 90.0, 90.0, 90.0).unwrap();
    reach(machine, cell, "P 21 21 21", d_min, wavelength_angstrom)
}

pub fn reach(machine: &str, cell: UnitCell, symbol: &str, d_min: f64, wavelength_angstrom: f64) -> Arc<Reach> {
    let space_group = SpaceGroup::resolve(&SymmetryQuery::SpaceGroup(symbol.to_owned()), &cell).unwrap();
    let instrument = built_in_machine(machine).unwrap();
    // Any rotation will do for U; one that a machine makes is at hand.
    let eulerian = built_in_machine("eulerian-four-circle").unwrap();
    let turned = eulerian.lab_from_head(&Setting::new(&[31.0, 17.0, -52.0, 0.0]));
    let head_from_crystal = Rotation::from_matrix(turned.matrix(), 1e-9).unwrap();
    let orientation = Orientation::new(head_from_crystal, &cell, false);
    let rules = if instrument.sample_axes().len() == 3 { vec![Rule::Bisecting] } else { Vec::new() };
    let preference = Preference::default();
    let judge = Judge::new(&instrument, &rules, &preference).unwrap();
    let range = DRange::down_to(d_min).unwrap();
    let NodesOutcome::Complete(columns) = nodes(&cell, &space_group, range, AbsentNodes::Keep, &Unhurried).unwrap()
    else {
        panic!("stopped")
    };
    let operation = |presence: Presence| match presence {
        Presence::Absent { operation } => Some(operation),
        Presence::Allowed | Presence::NotANode => None,
    };
    let absent = columns.presence.into_iter().map(operation);
    let wanted = Wanted { absent: absent.collect(), hkl: columns.hkl.into_iter().map(Hkl::from).collect() };
    let axes = instrument.axis_count();
    let table = ReachTable::judge(wanted, &orientation.ub, wavelength_angstrom, &judge, axes, &Unhurried).unwrap();
    let inputs = Resolved {
        cell: cell.clone(),
        space_group: space_group.clone(),
        radiation: Radiation::XrayWavelength { angstrom: WavelengthInAngstrom::new(wavelength_angstrom).unwrap() },
        wavelength_angstrom,
        instrument: instrument.clone(),
        peaks: Vec::new(),
        surface: None,
        rules: rules.clone(),
        preference: preference.clone(),
        targets: Targets::List(Vec::new()),
        kept_orientation: None,
        notes: Vec::new(),
    };
    let azimuth = AzimuthView::new(&inputs, &orientation, None, &Unhurried).map_err(|error| error.to_string());
    Arc::new(Reach {
        cell,
        space_group,
        wavelength_angstrom,
        instrument,
        orientation,
        rules,
        preference,
        judge,
        azimuth,
        table: table.into(),
    })
}

/// A small table with every kind of verdict that a Eulerian machine gives.
pub fn small() -> Arc<Reach> {
    orthorhombic("eulerian-four-circle", [5.1, 6.3, 7.4], 0.56, 1.2)
}

/// The first reflection of a kind.
pub fn first_of(reach: &Reach, kind: Kind) -> Hkl {
    reach.table.rows().find(|row| Kind::of(row.verdict) == kind && row.absent.is_none()).unwrap().hkl
}

/// Writes a picture to the folder that `RINGWRIGHT_PICTURES` names, if it names one.
pub fn keep_picture(harness: &mut Harness<'_, Workplace>, name: &str) {
    let Ok(folder) = std::env::var("RINGWRIGHT_PICTURES") else { return };
    std::fs::create_dir_all(&folder).unwrap();
    harness.render().unwrap().save(std::path::Path::new(&folder).join(format!("{name}.png"))).unwrap();
}
