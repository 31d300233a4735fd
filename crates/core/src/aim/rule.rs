use serde::{Deserialize, Serialize};

use super::Reference;
use crate::instrument::AxisName;
use crate::quantity::{Component, Degrees};

/// A condition that settles one spare angle. A machine with n sample and m detector axes leaves n + m − 3 angles spare;
/// see [`crate::conventions`] for the frames.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub enum Rule {
    /// The spindle, where it points after the outer axes have turned, lies in the plane of Q and the reference axis, the
    /// third sample axis from inside. On a Eulerian cradle this is ω = θ or θ + 180°.
    Bisecting,
    /// The same with another reference axis.
    BisectingAbout {
        /// The reference axis.
        axis: AxisName,
    },
    /// An axis stays at a reading.
    Hold {
        /// The axis.
        axis: AxisName,
        /// Its reading in degrees.
        at_deg: Degrees,
    },
    /// The azimuth ψ of a reference direction has a given value.
    Azimuth {
        /// What ψ counts from.
        reference: Reference,
        /// ψ in degrees.
        at_deg: Degrees,
    },
    /// The incident beam makes an angle with the surface: sin α_i = −n·k̂_i, n the outward normal.
    Incidence {
        /// α_i in degrees.
        at_deg: Degrees,
    },
    /// The diffracted beam makes an angle with the surface: sin α_f = n·k̂_f.
    Exit {
        /// α_f in degrees.
        at_deg: Degrees,
    },
    /// Both beams make the same angle with the surface.
    EqualIncidenceAndExit,
    /// The reading of an axis is a multiple of another's, plus an offset.
    Tie {
        /// The axis that follows.
        axis: AxisName,
        /// The axis that it follows.
        to: AxisName,
        /// Degrees for each degree of the other.
        factor: Component,
        /// Its reading where the other reads 0.
        offset_deg: Degrees,
    },
    /// For two detector axes: the plane of diffraction, through the beam, is turned by an angle about +z from the
    /// horizontal plane x z. The detector may stand on either side of the beam.
    DiffractionPlane {
        /// The angle in degrees: 0 horizontal, 90 vertical.
        turned_deg: Degrees,
    },
    /// The azimuth at which the axes stay farthest from every limit.
    Freest {
        /// What ψ counts from: of two azimuths as good as each other the one nearer to 0 is taken.
        reference: Reference,
    },
}

impl Rule {
    /// The name by which messages call it.
    pub fn word(&self) -> &'static str {
        match self {
            Self::Bisecting | Self::BisectingAbout { .. } => "bisecting",
            Self::Hold { .. } => "hold",
            Self::Azimuth { .. } => "azimuth",
            Self::Incidence { .. } => "incidence",
            Self::Exit { .. } => "exit",
            Self::EqualIncidenceAndExit => "equal incidence and exit",
            Self::Tie { .. } => "tie",
            Self::DiffractionPlane { .. } => "diffraction plane",
            Self::Freest { .. } => "freest",
        }
    }

    /// Whether it settles the azimuth and nothing else; of such rules there can be one.
    pub fn settles_azimuth(&self) -> bool {
        matches!(
            self,
            Self::Azimuth { .. }
                | Self::Incidence { .. }
                | Self::Exit { .. }
                | Self::EqualIncidenceAndExit
                | Self::Freest { .. }
        )
    }

    /// Whether it needs the crystal's surface.
    pub fn needs_surface(&self) -> bool {
        matches!(self, Self::Incidence { .. } | Self::Exit { .. } | Self::EqualIncidenceAndExit)
    }
}

/// How to choose among the settings of one reflection.
#[derive(Debug, Clone, PartialEq, Default, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub enum Preference {
    /// The one whose moving sample axes stay farthest from every limit: the smallest of the degrees to each limit is
    /// largest.
    #[default]
    FarthestFromLimits,
    /// The one nearest to a given position: the largest of the degrees that each axis would turn is smallest.
    NearestTo {
        /// A reading in degrees for every axis that counts; axes left out do not.
        #[serde(deserialize_with = "crate::instrument::readings_without_doubles")]
        readings_deg: std::collections::BTreeMap<AxisName, Degrees>,
    },
}
