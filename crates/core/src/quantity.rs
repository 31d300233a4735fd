//! Quantities that check themselves: the only door into each type is a check, also when it is read from a file.
//!
//! The message of a refusal says what was met and what would be accepted, so that the reader of a file can add no more
//! than where it stood.

use std::fmt;

use serde::de::{Deserializer, Error, Visitor};
use serde::{Deserialize, Serialize};

/// A number that a quantity's check turned away.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{value} is not {accepted}")]
pub struct QuantityError {
    /// What was offered.
    pub value: f64,
    /// What would have been taken, in words and with the unit.
    pub accepted: &'static str,
}

/// Takes any number; for anything else the refusal says what the quantity accepts. (Asked for an `f64`, a format would
/// answer with words of its own.)
struct AnyNumber {
    accepted: &'static str,
}

impl Visitor<'_> for AnyNumber {
    type Value = f64;

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.accepted)
    }

    fn visit_f64<E: Error>(self, number: f64) -> Result<f64, E> {
        Ok(number)
    }

    fn visit_i64<E: Error>(self, number: i64) -> Result<f64, E> {
        Ok(number as f64)
    }

    fn visit_u64<E: Error>(self, number: u64) -> Result<f64, E> {
        Ok(number as f64)
    }
}

macro_rules! quantity {
    ($(#[$doc:meta])* $name:ident, $unit:literal, $accepted:literal, |$v:ident| $check:expr) => {
        $(#[$doc])*
        #[derive(Debug, Clone, Copy, PartialEq, PartialOrd, Serialize)]
        #[serde(into = "f64")]
        pub struct $name(f64);

        impl $name {
            /// What is accepted, in words and with the unit.
            pub const ACCEPTED: &'static str = $accepted;
            /// The unit.
            pub const UNIT: &'static str = $unit;

            /// Checks a number and takes it.
            ///
            /// # Errors
            /// If it is not what [`Self::ACCEPTED`] says; NaN and infinity never are.
            pub fn new($v: f64) -> Result<Self, QuantityError> {
                if $v.is_finite() && $check {
                    Ok(Self($v))
                } else {
                    Err(QuantityError { value: $v, accepted: $accepted })
                }
            }

            /// The number, in the type's unit.
            pub const fn get(self) -> f64 {
                self.0
            }
        }

        impl<'de> Deserialize<'de> for $name {
            fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
                let number = deserializer.deserialize_any(AnyNumber { accepted: $accepted })?;
                Self::new(number).map_err(D::Error::custom)
            }
        }

        impl TryFrom<f64> for $name {
            type Error = QuantityError;
            fn try_from(value: f64) -> Result<Self, QuantityError> {
                Self::new(value)
            }
        }

        impl From<$name> for f64 {
            fn from(quantity: $name) -> f64 {
                quantity.0
            }
        }
    };
}

quantity!(
    /// A cell edge or a spacing, in Å.
    Length, "Å", "a length in Å between 0.1 and 10000", |v| (0.1..=1.0e4).contains(&v)
);
quantity!(
    /// An angle of a unit cell, in degrees.
    CellAngle, "°", "a cell angle in degrees, above 0 and below 180", |v| v > 0.0 && v < 180.0
);
quantity!(
    /// A wavelength, in Å.
    WavelengthInAngstrom, "Å", "a wavelength in Å between 0.01 and 100", |v| (0.01..=100.0).contains(&v)
);
quantity!(
    /// A photon energy, in keV.
    EnergyInKev, "keV", "a photon energy in keV between 0.1 and 1300", |v| (0.1..=1300.0).contains(&v)
);
quantity!(
    /// A neutron energy, in meV.
    EnergyInMev, "meV", "a neutron energy in meV between 0.01 and 1000000", |v| (0.01..=1.0e6).contains(&v)
);
quantity!(
    /// A dial reading, a limit or an offset, in degrees.
    Degrees, "°", "an angle in degrees between -3600 and 3600", |v| v.abs() <= 3600.0
);
quantity!(
    /// A standard uncertainty of an angle, in degrees.
    AngleUncertainty, "°", "a standard uncertainty in degrees, above 0 and at most 45", |v| v > 0.0 && v <= 45.0
);
quantity!(
    /// How far one direction leans from another, in degrees.
    Inclination, "°", "an inclination in degrees, above 0 and below 180", |v| v > 0.0 && v < 180.0
);
quantity!(
    /// Half the opening of a cone, in degrees.
    ConeAngle, "°", "a half angle in degrees, from 0 and below 90", |v| (0.0..90.0).contains(&v)
);
quantity!(
    /// A distance to overshoot by, in degrees.
    Overshoot, "°", "an overshoot in degrees, from 0 to 45", |v| (0.0..=45.0).contains(&v)
);
quantity!(
    /// How fast an axis turns, in degrees per second.
    Speed, "°/s", "a speed in degrees per second, above 0 and at most 1000", |v| v > 0.0 && v <= 1000.0
);
quantity!(
    /// A span of time, in s.
    Duration, "s", "a time in seconds, from 0 to 10000000", |v| (0.0..=1.0e7).contains(&v)
);
quantity!(
    /// An index of a node; a real number.
    Index, "", "an index between -10000 and 10000", |v| v.abs() <= 1.0e4
);
quantity!(
    /// A component of a direction; a real number.
    Component, "", "a number between -1000000 and 1000000", |v| v.abs() <= 1.0e6
);

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nan_infinity_and_nonsense_are_turned_away() {
        for bad in [f64::NAN, f64::INFINITY, f64::NEG_INFINITY, 0.0, -1.0] {
            assert!(Length::new(bad).is_err());
            assert!(WavelengthInAngstrom::new(bad).is_err());
            assert!(Speed::new(bad).is_err());
        }
        assert!(CellAngle::new(180.0).is_err());
        assert!(Degrees::new(-180.0).is_ok());
    }

    #[test]
    fn the_refusal_names_value_and_remedy() {
        let message = Length::new(-3.0).map_err(|e| e.to_string());
        assert_eq!(message, Err("-3 is not a length in Å between 0.1 and 10000".to_owned()));
    }
}
