use crate::instrument::{MAX_AXES, Setting};
use crate::lanes::Real;

/// The most closed-form solutions of one reflection: 2 detector signs × 2 sides of Q × 2 openings.
pub(crate) const MAX_BRANCHES: usize = 8;

/// One number for each branch.
pub(crate) type Row<T> = [T; MAX_BRANCHES];

/// Which of the closed-form solutions a setting is: a number that stays the same from node to node. The first half has
/// the detector at positive angles.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub struct Branch(pub u8);

/// What is free at a singular place, where one value of many was taken.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Freedom {
    /// Nothing: the setting is isolated.
    None,
    /// Q lies along the innermost moving axis, whose angle is free; 0 was taken.
    InnerAxis,
    /// Q lies along the outermost moving axis, whose angle is free; 0 was taken.
    OuterAxis,
    /// Innermost and outermost moving axis lie along one line: only the sum (or difference) of their angles counts.
    OnlySumFixed,
}

impl Freedom {
    /// This as a number, for formulas that go through several reflections at once.
    pub(super) const fn code(self) -> f64 {
        match self {
            Self::None => 0.0,
            Self::InnerAxis => 1.0,
            Self::OuterAxis => 2.0,
            Self::OnlySumFixed => 3.0,
        }
    }

    fn of_code(code: f64) -> Self {
        let all = [Self::InnerAxis, Self::OuterAxis, Self::OnlySumFixed];
        all.into_iter().find(|freedom| freedom.code() == code).unwrap_or(Self::None)
    }
}

/// One closed-form solution before limits: the readings modulo 360°, or by how much it fails.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Attempt {
    /// The axes make it.
    Setting {
        /// Which solution.
        branch: Branch,
        /// Dial readings in degrees, each up to full turns.
        setting: Setting,
        /// What was free.
        freedom: Freedom,
    },
    /// The stack cannot turn the crystal or the detector that far.
    CannotMake {
        /// Which solution.
        branch: Branch,
        /// By how many degrees it misses.
        by_deg: f64,
    },
}

/// All closed-form solutions of one reflection, or of several side by side, axis by axis. Made once by
/// [`super::Solver::attempts`] and filled again for each.
#[derive(Debug, Clone)]
pub(crate) struct Attempts<T> {
    /// How many branches there are.
    pub count: usize,
    /// Dial readings in degrees up to full turns, a row for each axis.
    pub readings_deg: [Row<T>; MAX_AXES],
    /// By how many degrees each branch misses; 0 where the axes make it.
    pub miss_deg: Row<T>,
    /// What is free, as [`Freedom::code`].
    pub(super) freedom: Row<T>,
    pub(super) axis_count: usize,
}

impl<T: Real> Attempts<T> {
    /// A detector that misses spoils every branch.
    #[inline(always)]
    pub(super) fn miss_at_least(&mut self, by_deg: T) {
        for miss in &mut self.miss_deg {
            *miss = T::choose(by_deg.like(0.0).below(by_deg), by_deg, *miss);
        }
    }
}

impl Attempts<f64> {
    /// One solution by the number of its branch.
    pub fn get(&self, branch: usize) -> Attempt {
        let number = Branch(branch as u8);
        if self.miss_deg[branch] > 0.0 {
            return Attempt::CannotMake { branch: number, by_deg: self.miss_deg[branch] };
        }
        let setting = Setting::from_array(self.readings_deg.map(|row| row[branch]), self.axis_count);
        Attempt::Setting { branch: number, setting, freedom: Freedom::of_code(self.freedom[branch]) }
    }

    /// All of them in the order of branches.
    pub fn iter(&self) -> impl Iterator<Item = Attempt> + '_ {
        (0..self.count).map(|branch| self.get(branch))
    }
}
