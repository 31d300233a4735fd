//! From hkl and rules to every setting of the machine: one road for every stack.
//!
//! 1. The detector axis fixes where Q points in the lab, once for each detector sign ([`detector`]).
//! 2. Axes that do not move are folded into the others, R = A₁(t₁) A₂(t₂) … M ([`chain`]).
//! 3. What remains is decomposed in closed form over two moving axes ([`pair`]) or, bisecting, over three
//!    ([`bisecting`]), with the rotation subproblems of [`crate::frames::subproblem`].
//!
//! That is the short road of a [`Solver`]. Every other stack and rule takes the [`general`] one; a [`Road`] is whichever
//! serves. Whatever depends on the stack alone is computed once, in [`Road::new`]. Axis vectors are data: a new machine is a
//! file, never a new solver.

mod attempts;
mod bisecting;
mod chain;
mod detector;
mod fit;
mod general;
mod pair;
mod reference;
mod road;
mod rule;
mod simultaneous;
mod solver;
#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests;

pub(crate) use attempts::MAX_BRANCHES;
pub use attempts::{Attempt, Attempts, Branch, Freedom};
pub use fit::{RuleError, RuleProblem, problems as rule_problems};
pub use general::NoAzimuth;
pub use reference::{CrystalOnHead, Reference};
pub use road::{NoSetting, Road, azimuth_rad};
pub use rule::{Preference, Rule};
pub use simultaneous::{Crossing, Turning};
pub use solver::{OutsideSphere, Solver};
