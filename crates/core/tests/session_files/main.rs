//! Session and machine files as a person meets them: what is refused and where, what is made of a good one, how it is saved.
#![allow(clippy::unwrap_used, clippy::expect_used)]

mod any;
mod damage;
mod resolved;
mod saving;
mod template;
mod wrong_values;

use proptest::test_runner::Config;

/// Random tests take their count from the environment variable `RINGWRIGHT_CASES`: 64 unless it says otherwise.
fn cases() -> Config {
    let count = std::env::var("RINGWRIGHT_CASES").ok().and_then(|text| text.parse().ok()).unwrap_or(64);
    // Generators turn away what a quantity does not take; over many cases that adds up.
    Config { cases: count, max_local_rejects: u32::MAX, failure_persistence: None, ..Config::default() }
}

/// The good session of the template.
fn good() -> String {
    template::plain(&template::session())
}
