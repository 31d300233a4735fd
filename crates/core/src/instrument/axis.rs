use std::fmt;

use nalgebra::{Unit, Vector3};
use serde::{Deserialize, Serialize};

use super::{Approach, Travel};

/// Names that an axis may not bear, because tables of results have columns with them.
pub const RESERVED_COLUMNS: [&str; 15] = [
    "h",
    "k",
    "l",
    "d_angstrom",
    "two_theta_deg",
    "absent",
    "verdict",
    "detail",
    "order",
    "kind",
    "setting",
    "drive_s",
    "elapsed_s",
    "count_s",
    "note",
];

/// The name of an axis: it heads a column of every list.
#[derive(Debug, Clone, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(try_from = "String", into = "String")]
pub struct AxisName(String);

/// A text that cannot name an axis.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum AxisNameError {
    /// Characters or length.
    #[error(
        "\"{0}\" cannot name an axis: accepted are 1 to 24 letters, digits and underscores, starting with a letter"
    )]
    Shape(String),
    /// A column of a table has this name.
    #[error("\"{0}\" cannot name an axis, because lists have a column of that name; not accepted are {list}", list = RESERVED_COLUMNS.join(", "))]
    Reserved(String),
}

impl AxisName {
    /// Checks a name and takes it.
    ///
    /// # Errors
    /// If it is not a plain identifier, or if a column of a table bears it.
    pub fn new(text: impl Into<String>) -> Result<Self, AxisNameError> {
        let text = text.into();
        let plain = text.chars().all(|c| c.is_ascii_alphanumeric() || c == '_');
        if !plain || text.len() > 24 || !text.starts_with(|c: char| c.is_ascii_alphabetic()) {
            return Err(AxisNameError::Shape(text));
        }
        if RESERVED_COLUMNS.iter().any(|column| column.eq_ignore_ascii_case(&text)) {
            return Err(AxisNameError::Reserved(text));
        }
        Ok(Self(text))
    }

    /// The name.
    pub fn as_str(&self) -> &str {
        &self.0
    }
}

impl fmt::Display for AxisName {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(&self.0)
    }
}

impl TryFrom<String> for AxisName {
    type Error = AxisNameError;
    fn try_from(text: String) -> Result<Self, AxisNameError> {
        Self::new(text)
    }
}

impl From<AxisName> for String {
    fn from(name: AxisName) -> String {
        name.0
    }
}

/// One rotation axis of a machine, checked.
#[derive(Debug, Clone, PartialEq)]
pub struct Axis {
    /// What it is called.
    pub name: AxisName,
    /// Unit vector in the lab frame with every axis at angle zero; a positive angle is right-handed about it.
    pub direction: Unit<Vector3<f64>>,
    /// The readings it may take.
    pub travel: Travel,
    /// Speed in °/s.
    pub speed_deg_per_s: f64,
    /// Time to start and stop, in s, paid once a move.
    pub overhead_s: f64,
    /// angle = reading − this, in degrees.
    pub zero_offset_deg: f64,
    /// Where it rests, as a reading in degrees.
    pub park_deg: f64,
    /// From which side every position is approached, if the axis has play.
    pub approach: Option<Approach>,
    /// Set by hand before the night, never moved in a list.
    pub set_by_hand: bool,
}

impl Axis {
    /// The angle in radians that a dial reading in degrees stands for.
    pub fn angle_rad(&self, reading_deg: f64) -> f64 {
        (reading_deg - self.zero_offset_deg).to_radians()
    }

    /// The dial reading in degrees of an angle in radians.
    pub fn reading_deg(&self, angle_rad: f64) -> f64 {
        angle_rad.to_degrees() + self.zero_offset_deg
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn names_head_columns_and_must_not_collide() {
        assert!(AxisName::new("two_theta").is_ok());
        assert!(matches!(AxisName::new("H"), Err(AxisNameError::Reserved(_))));
        for bad in ["", "2theta", "two theta", "ω", "a,b", "a_name_that_is_far_too_long"] {
            assert!(matches!(AxisName::new(bad), Err(AxisNameError::Shape(_))), "{bad}");
        }
    }
}
