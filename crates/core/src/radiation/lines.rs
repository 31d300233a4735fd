use std::fmt;
use std::sync::LazyLock;

use serde::{Deserialize, Serialize};

/// The table of lines: see the head of the file for its source.
const TABLE: &str = include_str!("../../../../assets/radiation/emission-lines.csv");

/// A characteristic line that the table knows. `Ka` is the weighted mean (2 Kα1 + Kα2)/3 of an unresolved doublet
/// (intensity ratio 2:1, common practice, no source), a name of its own beside `Ka1` and `Ka2`.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(try_from = "String", into = "String")]
pub struct EmissionLine {
    name: String,
    wavelength_angstrom: f64,
}

/// A name that the table of lines does not hold.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("\"{asked}\" is no known emission line; accepted are {accepted}")]
pub struct LineError {
    asked: String,
    accepted: String,
}

impl EmissionLine {
    /// Finds a line by its name, element first: `Mo Ka1`. Case and spaces are forgiven, and so is `Kα` for `Ka`.
    ///
    /// # Errors
    /// If the table has no such line; the message lists those it has.
    pub fn parse(text: &str) -> Result<Self, LineError> {
        let key = |s: &str| s.to_lowercase().replace('α', "a").replace('β', "b").split_whitespace().collect::<String>();
        let wanted = key(text);
        emission_lines().iter().find(|line| key(&line.name) == wanted).cloned().ok_or_else(|| LineError {
            asked: text.to_owned(),
            accepted: emission_lines().iter().map(|line| line.name.as_str()).collect::<Vec<_>>().join(", "),
        })
    }

    /// Element and line, as the table spells them.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// Wavelength in Å.
    pub fn wavelength_angstrom(&self) -> f64 {
        self.wavelength_angstrom
    }
}

impl fmt::Display for EmissionLine {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.name)
    }
}

impl TryFrom<String> for EmissionLine {
    type Error = LineError;
    fn try_from(text: String) -> Result<Self, LineError> {
        Self::parse(&text)
    }
}

impl From<EmissionLine> for String {
    fn from(line: EmissionLine) -> String {
        line.name
    }
}

/// Every line with a name, element by element; the weighted means included.
pub fn emission_lines() -> &'static [EmissionLine] {
    static LINES: LazyLock<Vec<EmissionLine>> = LazyLock::new(|| {
        let rows = read_table();
        let mut lines = Vec::new();
        for (element, line, wavelength) in &rows {
            if line == "Ka1"
                && let Some((_, _, other)) = rows.iter().find(|(e, l, _)| e == element && l == "Ka2")
            {
                let mean = (2.0 * wavelength + other) / 3.0;
                lines.push(EmissionLine { name: format!("{element} Ka"), wavelength_angstrom: mean });
            }
            lines.push(EmissionLine { name: format!("{element} {line}"), wavelength_angstrom: *wavelength });
        }
        lines
    });
    &LINES
}

/// Element, line, wavelength in Å from the energy (the column of wavelengths is rounded to 1e-7 Å). The table is part of the program; a test holds that every row is read.
fn read_table() -> Vec<(String, String, f64)> {
    let mut reader = csv::ReaderBuilder::new().comment(Some(b'#')).from_reader(TABLE.as_bytes());
    let row = |r: csv::StringRecord| {
        let energy_kev = r.get(3)?.parse::<f64>().ok()? * 1e-3;
        Some((r.get(0)?.to_owned(), r.get(1)?.to_owned(), super::HC_KEV_ANGSTROM / energy_kev))
    };
    reader.records().filter_map(|record| record.ok().and_then(row)).collect()
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn every_row_of_the_table_is_read() {
        let rows = TABLE.lines().filter(|l| !l.starts_with('#') && !l.starts_with("element,")).count();
        assert_eq!(read_table().len(), rows);
        assert_eq!(emission_lines().len(), rows + 7, "and one weighted mean for each of the seven elements");
    }

    #[test]
    fn three_names_three_wavelengths() {
        let of = |name: &str| EmissionLine::parse(name).unwrap().wavelength_angstrom();
        // hc/E of the NIST energies as published, rounded to 1e-7 Å.
        for (name, published) in
            [("Mo Ka1", 0.709_317_2), ("mo kα2", 0.713_607_3), ("Mo Ka", 0.710_747_3), ("Cu Kb1,3", 1.392_234_1)]
        {
            assert!((of(name) - published).abs() < 0.51e-7, "{name}: {}", of(name));
        }
    }

    #[test]
    fn an_unknown_line_is_answered_with_the_known_ones() {
        let message = EmissionLine::parse("Mo Kz").unwrap_err().to_string();
        assert!(message.contains("\"Mo Kz\"") && message.contains("Mo Ka1") && message.contains("Ag Ka"));
    }
}
