use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};

use crate::aim::{Preference, Reference, Rule};
use crate::crystal::SymmetryQuery;
use crate::instrument::{AxisName, MachineDescription};
use crate::quantity::{AngleUncertainty, CellAngle, Component, Degrees, Duration, Index, Length};
use crate::radiation::Radiation;

/// Everything a user states. Each number has passed its own check; how they fit together is checked when the session is
/// opened or edited.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Session {
    /// Version of this format; 1.
    pub version: FormatVersion,
    /// What the night is about.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub title: String,
    /// The crystal.
    pub crystal: CrystalDocument,
    /// The beam.
    pub radiation: Radiation,
    /// The machine.
    pub machine: MachineChoice,
    /// Peaks found so far; the first two that are in use give the orientation.
    #[serde(default)]
    pub peaks: Vec<PeakDocument>,
    /// Conditions that settle the spare angles.
    #[serde(default)]
    pub rules: Vec<Rule>,
    /// How to choose among the settings of one reflection.
    #[serde(default)]
    pub preference: Preference,
    /// Which reflections are wanted.
    pub targets: Targets,
    /// An orientation kept from earlier; used as long as there are fewer than two peaks in use.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub orientation: Option<OrientationDocument>,
}

/// The crystal.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CrystalDocument {
    /// What it is called.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub name: String,
    /// Its cell.
    pub cell: CellDocument,
    /// Its space group, or only its centring.
    pub symmetry: SymmetryQuery,
    /// The outward normal of its surface, if it has one: a beam from below it is a verdict of its own.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub surface: Option<Reference>,
}

/// The six numbers of a cell.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
#[allow(missing_docs)]
pub struct CellDocument {
    pub a_angstrom: Length,
    pub b_angstrom: Length,
    pub c_angstrom: Length,
    pub alpha_deg: CellAngle,
    pub beta_deg: CellAngle,
    pub gamma_deg: CellAngle,
}

/// The machine: by the name of its file without the ending, or written out.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub enum MachineChoice {
    /// A file of this name: among those of the program, beside the session, or in the folder given by option.
    Named(String),
    /// Written out in the session.
    Inline(MachineDescription),
}

/// A peak that was found: where every axis stood.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct PeakDocument {
    /// First index.
    pub h: Index,
    /// Second index.
    pub k: Index,
    /// Third index.
    pub l: Index,
    /// A reading in degrees for every axis of the machine.
    #[serde(deserialize_with = "crate::instrument::readings_without_doubles")]
    pub readings_deg: BTreeMap<AxisName, Degrees>,
    /// Standard uncertainty of each reading, in degrees.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub uncertainty_deg: Option<AngleUncertainty>,
    /// When it was measured, in seconds since the session began.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub time_s: Option<Duration>,
    /// Whether it is left out for now.
    #[serde(default, skip_serializing_if = "std::ops::Not::not")]
    pub ignored: bool,
}

/// Which reflections are wanted. Ranges skip nodes that symmetry makes absent unless told otherwise; a list never does.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub enum Targets {
    /// Every node with a spacing in a range.
    SpacingRange {
        /// Smallest d.
        min_angstrom: Length,
        /// Largest d; no upper end if left out.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        max_angstrom: Option<Length>,
        /// Whether nodes absent by symmetry are wanted too.
        #[serde(default, skip_serializing_if = "std::ops::Not::not")]
        with_absent: bool,
    },
    /// Every node with a 2θ in a range.
    TwoThetaRange {
        /// Smallest 2θ; 0 if left out.
        #[serde(default, skip_serializing_if = "Option::is_none")]
        min_deg: Option<Degrees>,
        /// Largest 2θ.
        max_deg: Degrees,
        /// Whether nodes absent by symmetry are wanted too.
        #[serde(default, skip_serializing_if = "std::ops::Not::not")]
        with_absent: bool,
    },
    /// These nodes.
    List(Vec<TargetNode>),
}

/// A wanted node; its indices need not be integers.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
#[allow(missing_docs)]
pub struct TargetNode {
    pub h: Index,
    pub k: Index,
    pub l: Index,
}

/// An orientation that was kept.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct OrientationDocument {
    /// U, row by row: takes the crystal's Cartesian frame (x ∥ a*, z ∥ c) into the head frame.
    pub u: Matrix,
    /// Whether a third peak out of the plane of the first two has agreed.
    #[serde(default)]
    pub confirmed: bool,
}

/// A 3×3 matrix, row by row.
pub type Matrix =
    ((Component, Component, Component), (Component, Component, Component), (Component, Component, Component));

/// The version of the session format that this program reads: 1.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(try_from = "u32", into = "u32")]
pub struct FormatVersion(u32);

impl FormatVersion {
    /// The one this program writes.
    pub const CURRENT: Self = Self(1);
}

impl TryFrom<u32> for FormatVersion {
    type Error = String;
    fn try_from(number: u32) -> Result<Self, String> {
        if number == 1 {
            Ok(Self(1))
        } else {
            Err(format!("{number} is no version of the session format; accepted is 1"))
        }
    }
}

impl From<FormatVersion> for u32 {
    fn from(version: FormatVersion) -> u32 {
        version.0
    }
}
