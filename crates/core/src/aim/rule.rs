use serde::{Deserialize, Serialize};

use crate::instrument::AxisName;
use crate::quantity::Degrees;

/// A condition that settles one spare angle. A machine with n sample and m detector axes leaves n + m − 3 angles spare;
/// see [`crate::conventions`] for the frames.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub enum Rule {
    /// The spindle, where it points after the outer axes have turned, lies in the plane of Q and the reference axis, the
    /// third sample axis from inside. On a Eulerian cradle this is ω = θ or θ + 180°.
    Bisecting,
    /// An axis stays at a reading.
    Hold {
        /// The axis.
        axis: AxisName,
        /// Its reading in degrees.
        at_deg: Degrees,
    },
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
