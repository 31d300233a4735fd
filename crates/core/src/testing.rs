//! Help for tests: how many random cases, and generators of geometry.

use nalgebra::Vector3;
use proptest::prelude::*;
use proptest::test_runner::Config;

/// Random tests take their count from the environment variable `RINGWRIGHT_CASES`: 64 unless it says otherwise.
pub fn cases() -> Config {
    let count = std::env::var("RINGWRIGHT_CASES").ok().and_then(|text| text.parse().ok()).unwrap_or(64);
    Config { cases: count, failure_persistence: None, ..Config::default() }
}

/// A direction, evenly spread.
pub fn unit_vector() -> impl Strategy<Value = Vector3<f64>> {
    (-1.0..1.0f64, -std::f64::consts::PI..std::f64::consts::PI).prop_map(|(z, azimuth): (f64, f64)| {
        let r = (1.0 - z * z).sqrt();
        Vector3::new(r * azimuth.cos(), r * azimuth.sin(), z)
    })
}
