//! Help for the checks of Ringwright against the world outside: reference tables, machines written in a few words, and
//! angles counted modulo full turns.
//!
//! Everything here serves tests, so a table or machine that cannot be read stops the test with its name.
#![allow(clippy::unwrap_used, clippy::expect_used)]

mod gauss;
mod machine;
mod table;

pub use gauss::Gauss;
pub use machine::{all_settings, bisecting, four_circle, hold, sample_stack, settings_contain};
pub use table::{Row, reference_rows};

/// How many random cases a property test draws: the environment variable `RINGWRIGHT_CASES`, 64 unless it says otherwise.
pub fn random_cases() -> u32 {
    std::env::var("RINGWRIGHT_CASES").ok().and_then(|text| text.parse().ok()).unwrap_or(64)
}

/// The difference of two angles in degrees, modulo full turns: −180 to 180.
pub fn turn_between_deg(a: f64, b: f64) -> f64 {
    let difference = (a - b).rem_euclid(360.0);
    if difference > 180.0 { difference - 360.0 } else { difference }
}

/// The reference "1.54059292(45)" as value and uncertainty: the digits in brackets count in units of the last place.
pub fn with_uncertainty(text: &str) -> (f64, f64) {
    let (value, digits) = text.trim_end_matches(')').split_once('(').expect("a value with its uncertainty in brackets");
    let places = value.split_once('.').map_or(0, |(_, decimals)| decimals.len());
    let unit = 10f64.powi(-(places as i32));
    (value.parse().unwrap(), digits.parse::<f64>().unwrap() * unit)
}
