use crate::aim::{Crossing, NoAzimuth, NoSetting, Reference, Rule, Turning, azimuth_rad};
use crate::crystal::{AbsentNodes, DRange, NodesOutcome, SpaceGroup, nodes};
use crate::frames::{Head, Hkl, Vector};
use crate::instrument::{Instrument, Setting};
use crate::orient::Orientation;
use crate::pace::Pace;
use crate::quantity::Index;
use crate::reach::{AzimuthFamily, AzimuthWindows, Judge, Settings, Verdict};
use crate::session::Resolved;

use super::WorkError;

/// Simultaneous reflections matter if G and H − G both have a spacing above this, in Å.
pub const SIMULTANEOUS_D_ANGSTROM: f64 = 2.0;

/// A node this near to the sphere at a setting, in Å⁻¹, counts as on it.
pub const NEAR_SPHERE: f64 = 0.002;

/// Everything about one reflection along its azimuth ψ.
#[derive(Debug)]
pub struct AzimuthView {
    reference: Reference,
    direction: Vector<Head>,
    family: AzimuthFamily,
    judge: Judge,
    instrument: Instrument,
    orientation: Orientation,
    space_group: SpaceGroup,
    wavelength_angstrom: f64,
    /// Nodes that may be on the sphere together with another.
    partners: Vec<Hkl>,
}

/// What is allowed at an azimuth, or why nothing is.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RibbonStep {
    /// ψ in degrees.
    pub psi_deg: f64,
    /// Of the best setting there.
    pub verdict: Verdict,
}

/// A node near the sphere at a setting.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct NearNode {
    /// The node.
    pub node: Hkl,
    /// Its distance from the sphere in Å⁻¹.
    pub distance: f64,
}

impl AzimuthView {
    /// With ψ counted from `reference`; else from that of the rules, from the crystal's surface, or from c*.
    ///
    /// # Errors
    /// If no spare angle is left for ψ, if the rules do not fit the machine, or if `pace` says no.
    pub fn new(
        inputs: &Resolved,
        orientation: &Orientation,
        reference: Option<Reference>,
        pace: &dyn Pace,
    ) -> Result<Self, WorkError> {
        let crystal = crate::aim::CrystalOnHead { ub: orientation.ub, surface: inputs.surface };
        let reference = reference.or_else(|| of_rules(&inputs.rules)).or(inputs.surface).unwrap_or_else(along_c_star);
        let family = AzimuthFamily::new(&inputs.instrument, &inputs.rules, &crystal, &reference)?;
        let judge = Judge::for_crystal(&inputs.instrument, family.rules(), &inputs.preference, &crystal)?;
        let range = DRange::down_to(SIMULTANEOUS_D_ANGSTROM)?;
        let partners = match nodes(&inputs.cell, &inputs.space_group, range, AbsentNodes::Skip, pace)? {
            NodesOutcome::Complete(columns) => columns.hkl.iter().map(|&hkl| Hkl::from(hkl)).collect(),
            NodesOutcome::Stopped => return Err(crate::reach::Stopped.into()),
        };
        Ok(Self {
            reference,
            direction: family.reference(),
            family,
            judge,
            instrument: inputs.instrument.clone(),
            orientation: orientation.clone(),
            space_group: inputs.space_group.clone(),
            wavelength_angstrom: inputs.wavelength_angstrom,
            partners,
        })
    }

    /// What ψ counts from.
    pub fn reference(&self) -> Reference {
        self.reference
    }

    /// The stretches of ψ in which a setting is allowed.
    ///
    /// # Errors
    /// If the reflection has no setting whatever the axes.
    pub fn windows(&self, hkl: Hkl) -> Result<AzimuthWindows, NoSetting> {
        self.family.windows(&self.judge, self.orientation.q_in_head(hkl), self.wavelength_angstrom)
    }

    /// The verdict in the middle of each of `steps` equal stretches from −180° to 180°.
    ///
    /// # Errors
    /// If the reflection has no setting whatever the axes.
    pub fn ribbon(&self, hkl: Hkl, steps: usize) -> Result<Vec<RibbonStep>, NoSetting> {
        let q = self.orientation.q_in_head(hkl);
        let step = |i: usize| {
            let psi_deg = -180.0 + 360.0 * (i as f64 + 0.5) / steps as f64;
            let best = self.family.verdict_at(&self.judge, q, self.wavelength_angstrom, psi_deg.to_radians())?;
            let verdict = best.map_or(Verdict::CannotMake { by_deg: 180.0 }, |judged| judged.verdict);
            Ok(RibbonStep { psi_deg, verdict })
        };
        (0..steps).map(step).collect()
    }

    /// Where simultaneous reflections cross, in order of ψ. Only those that can matter: G and H − G both present and with a
    /// spacing above [`SIMULTANEOUS_D_ANGSTROM`].
    pub fn crossings(&self, hkl: Hkl) -> Vec<Crossing> {
        let q = self.orientation.q_in_head(hkl);
        let Some(turning) = Turning::new(q, self.direction, self.wavelength_angstrom) else { return Vec::new() };
        let mut all: Vec<Crossing> = Vec::new();
        for &node in self.partners.iter().filter(|node| self.matters(hkl, **node)) {
            let azimuths = turning.azimuths_rad(self.orientation.q_in_head(node));
            all.extend(azimuths.map(|psi| Crossing { psi_deg: psi.to_degrees(), node }));
        }
        all.sort_by(|a, b| a.psi_deg.total_cmp(&b.psi_deg));
        all
    }

    /// Nodes within [`NEAR_SPHERE`] of the sphere at an azimuth in degrees, the nearest first.
    pub fn near_sphere(&self, hkl: Hkl, psi_deg: f64) -> Vec<NearNode> {
        let q = self.orientation.q_in_head(hkl);
        let Some(turning) = Turning::new(q, self.direction, self.wavelength_angstrom) else { return Vec::new() };
        let near = |node: &Hkl| {
            let distance = turning.distance(self.orientation.q_in_head(*node), psi_deg.to_radians());
            (distance <= NEAR_SPHERE && self.matters(hkl, *node)).then_some(NearNode { node: *node, distance })
        };
        let mut all: Vec<NearNode> = self.partners.iter().filter_map(near).collect();
        all.sort_by(|a, b| a.distance.total_cmp(&b.distance));
        all
    }

    /// Every setting at an azimuth in degrees, judged.
    pub fn settings_at(&self, hkl: Hkl, psi_deg: f64) -> Settings {
        let mut all = Vec::new();
        let q = self.orientation.q_in_head(hkl);
        let found = self.family.at(&self.judge, q, self.wavelength_angstrom, psi_deg.to_radians(), &mut |judged| {
            all.push(judged);
        });
        match found {
            Ok(()) => Settings::Judged(all),
            Err(none) => Settings::None(none),
        }
    }

    /// The azimuth in degrees of a setting.
    ///
    /// # Errors
    /// If it has none.
    pub fn psi_deg(&self, hkl: Hkl, setting: &Setting) -> Result<f64, NoAzimuth> {
        let q = self.orientation.q_in_head(hkl);
        azimuth_rad(&self.instrument, setting, q, self.direction).map(f64::to_degrees)
    }

    /// Whether a node on the sphere can disturb: the way round by it and by the rest must both be open.
    fn matters(&self, hkl: Hkl, node: Hkl) -> bool {
        let rest = Hkl::new(hkl.h - node.h, hkl.k - node.k, hkl.l - node.l);
        let length = self.orientation.q_in_head(rest).norm();
        length > 1e-9 && length * SIMULTANEOUS_D_ANGSTROM <= 1.0 && !self.space_group.absence(rest).is_absent()
    }
}

/// The reference that a rule names.
fn of_rules(rules: &[Rule]) -> Option<Reference> {
    rules.iter().find_map(|rule| match rule {
        Rule::Azimuth { reference, .. } | Rule::Freest { reference, .. } => Some(*reference),
        _ => None,
    })
}

fn along_c_star() -> Reference {
    let index =
        |value| Index::new(value).unwrap_or_else(|refused| unreachable!("a built-in index was refused: {refused}"));
    Reference::Reciprocal { h: index(0.0), k: index(0.0), l: index(1.0) }
}
