use serde::{Deserialize, Serialize};

use super::AxisName;
use crate::quantity::{Component, ConeAngle, Degrees, Duration, Inclination, Overshoot, Speed};

/// A machine as its file describes it. Every number has passed its own check; how they fit together is checked when an
/// [`super::Instrument`] is made of it.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct MachineDescription {
    /// Version of this format; 1.
    pub version: FormatVersion,
    /// What people call the machine.
    pub name: String,
    /// Anything worth knowing about it.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub note: String,
    /// Axes that carry the crystal, from the base to the crystal.
    pub sample_axes: Vec<AxisDescription>,
    /// Axes that carry the detector, from the base to the detector.
    pub detector_axes: Vec<AxisDescription>,
    /// The sample axis called spindle; the innermost unless named.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub spindle: Option<AxisName>,
    /// Half angle of the cone about the direct beam that the detector must not enter.
    #[serde(default = "default_cone")]
    pub direct_beam_half_angle_deg: ConeAngle,
}

/// One axis as the file describes it.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct AxisDescription {
    /// Its name; it heads a column of every list.
    pub name: AxisName,
    /// Direction in the lab frame with every axis at angle zero; any length but zero. Positive angles are right-handed.
    pub direction: (Component, Component, Component),
    /// Where the axis leans away from that direction by a known angle, as a kappa axis does from omega: the direction is
    /// then only where the axis would point without leaning.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub inclined: Option<Inclined>,
    /// The readings it may take.
    pub limits: Limits,
    /// Speed.
    pub speed_deg_per_s: Speed,
    /// Time to start and stop, once a move.
    #[serde(default = "no_time")]
    pub overhead_s: Duration,
    /// angle = reading − zero offset.
    #[serde(default = "zero_degrees")]
    pub zero_offset_deg: Degrees,
    /// Reading where it rests.
    #[serde(default = "zero_degrees")]
    pub park_deg: Degrees,
    /// From which side every position is approached, where there is play.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub approach: Option<Approach>,
    /// Set by hand before the night, never moved in a list.
    #[serde(default, skip_serializing_if = "std::ops::Not::not")]
    pub set_by_hand: bool,
}

/// How an axis leans: it lies in the plane of its `direction` and `towards`, on the side of `towards`.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Inclined {
    /// The side to lean to, in the lab frame; any vector that is not parallel to the direction.
    pub towards: (Component, Component, Component),
    /// Angle from the direction to the axis.
    pub by_deg: Inclination,
}

/// The readings an axis may take.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub enum Limits {
    /// It turns for ever, as with slip rings.
    Endless,
    /// One or more closed intervals.
    Intervals(Vec<Interval>),
}

/// A closed interval of readings.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Interval {
    /// Smallest reading.
    pub from_deg: Degrees,
    /// Largest reading.
    pub to_deg: Degrees,
}

/// The side from which an axis with play comes to every position, and how far beyond it goes first when it comes from
/// the other side.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub enum Approach {
    /// Arrives with growing readings.
    Upward {
        /// Distance to go beyond.
        overshoot_deg: Overshoot,
    },
    /// Arrives with falling readings.
    Downward {
        /// Distance to go beyond.
        overshoot_deg: Overshoot,
    },
}

/// The version of the machine format that this program reads: 1.
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
            Err(format!("{number} is no version of the machine format; accepted is 1"))
        }
    }
}

impl From<FormatVersion> for u32 {
    fn from(version: FormatVersion) -> u32 {
        version.0
    }
}

/// Numbers that are right one by one but not together: the place as a path of field names, and what is wrong.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{path}: {message}")]
pub struct MachineProblem {
    /// Path of field names below the machine, for example `sample_axes[1].limits`.
    pub path: String,
    /// What is wrong and what would be accepted.
    pub message: String,
}

impl MachineProblem {
    pub(crate) fn new(path: impl Into<String>, message: impl Into<String>) -> Self {
        Self { path: path.into(), message: message.into() }
    }
}

/// A default that its own type must accept: checked by a test, so that no door needs to be left open.
fn checked<T, E: std::fmt::Debug>(quantity: Result<T, E>) -> T {
    match quantity {
        Ok(value) => value,
        Err(refused) => unreachable!("a built-in default was refused: {refused:?}"),
    }
}

fn default_cone() -> ConeAngle {
    checked(ConeAngle::new(3.0))
}

fn zero_degrees() -> Degrees {
    checked(Degrees::new(0.0))
}

fn no_time() -> Duration {
    checked(Duration::new(0.0))
}

#[cfg(test)]
mod tests {
    #[test]
    fn the_defaults_pass_their_own_checks() {
        assert_eq!(super::default_cone().get(), 3.0);
        assert_eq!((super::zero_degrees().get(), super::no_time().get()), (0.0, 0.0));
    }
}
