//! From hkl and rules to every setting of the machine.

mod rule;

pub use rule::{Preference, Rule};
