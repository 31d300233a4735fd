//! From hkl and rules to every setting of the machine: one road for every stack.
//!
//! 1. The detector axis fixes where Q points in the lab, once for each detector sign ([`detector`]).
//! 2. Axes that do not move are folded into the others, R = A₁(t₁) A₂(t₂) … M ([`chain`]).
//! 3. What remains is decomposed in closed form over two moving axes ([`pair`]) or, bisecting, over three
//!    ([`bisecting`]), with the rotation subproblems of [`crate::frames::subproblem`].
//!
//! Whatever depends on the stack alone is computed once, in [`Solver::new`]. Axis vectors are data: a new machine is a
//! file, never a new solver.

mod attempts;
mod bisecting;
mod chain;
mod detector;
mod fit;
mod pair;
mod rule;
mod solver;
#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests;

pub use attempts::{Attempt, Branch, Freedom};
pub(crate) use attempts::{Attempts, MAX_BRANCHES, Row};
pub use fit::RuleError;
pub use rule::{Preference, Rule};
pub(crate) use solver::Solved;
pub use solver::{OutsideSphere, Solver};
