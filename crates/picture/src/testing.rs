//! What the tests of several modules share.

use proptest::test_runner::Config;

/// Cases per property: `RINGWRIGHT_CASES`, or few enough to be quick.
pub(crate) fn cases() -> Config {
    let cases = std::env::var("RINGWRIGHT_CASES").ok().and_then(|text| text.parse().ok()).unwrap_or(64);
    Config { failure_persistence: None, ..Config::with_cases(cases) }
}
