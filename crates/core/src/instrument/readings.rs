use std::collections::BTreeMap;
use std::fmt;

use serde::Deserialize;
use serde::de::{DeserializeSeed, Deserializer, Error, MapAccess, Visitor};

use super::AxisName;
use crate::quantity::Degrees;

/// Reads `{"omega": 12.5, "chi": 40}`. A map would keep the last of two readings for one axis and say nothing.
pub(crate) fn readings_without_doubles<'de, D: Deserializer<'de>>(
    deserializer: D,
) -> Result<BTreeMap<AxisName, Degrees>, D::Error> {
    deserializer.deserialize_map(Readings)
}

struct Readings;

impl<'de> Visitor<'de> for Readings {
    type Value = BTreeMap<AxisName, Degrees>;

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a reading for each axis in curly brackets: {\"omega\": 12.5, … }")
    }

    fn visit_map<A: MapAccess<'de>>(self, mut map: A) -> Result<Self::Value, A::Error> {
        let mut readings = BTreeMap::new();
        while let Some(name) = map.next_key_seed(NewName(&readings))? {
            let reading = map.next_value()?;
            readings.insert(name, reading);
        }
        Ok(readings)
    }
}

/// Reads the name of an axis that has no reading yet.
struct NewName<'a>(&'a BTreeMap<AxisName, Degrees>);

impl<'de> DeserializeSeed<'de> for NewName<'_> {
    type Value = AxisName;

    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<AxisName, D::Error> {
        let name = AxisName::deserialize(deserializer)?;
        if self.0.contains_key(&name) {
            return Err(D::Error::custom(format!("axis {name} has two readings; accepted is one for each axis")));
        }
        Ok(name)
    }
}
