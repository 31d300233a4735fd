use crate::aim::{Attempts, MAX_BRANCHES, Preference, Row};
use crate::instrument::{Instrument, LIMIT_DUST_DEG, MAX_AXES, Travel};
use crate::lanes::{Real, one_by_one};

/// A setting must be better by more than this, in degrees, to displace an earlier one: rounding decides no choice.
const BETTER_BY_DEG: f64 = 1e-9;

/// Where merits of settings that miss begin, far below that of any allowed one.
const BELOW_ALL_ALLOWED: f64 = -1e6;

/// Stands for the clearance of a machine without limits, so that comparisons stay defined.
const MORE_THAN_ANY_LIMIT_DEG: f64 = 1e5;

/// Limits and preference of a machine, as the choice among the settings of a reflection wants them: for one reflection or
/// several side by side.
#[derive(Debug, Clone)]
pub(super) struct Score {
    travel: Vec<Travel>,
    /// Whether an axis counts in the measure *farthest from every limit*: moving sample axes do.
    counts: [bool; MAX_AXES],
    preferred_deg: Option<[Option<f64>; MAX_AXES]>,
}

/// The setting chosen among those of a reflection, before its limits are looked at.
#[derive(Debug, Clone, Copy)]
pub(super) struct Best<T> {
    /// The number of its branch.
    pub branch: T,
    /// Dial readings in degrees up to full turns.
    pub readings_deg: [T; MAX_AXES],
    /// By how many degrees the axes miss; 0 if they make it.
    pub miss_deg: T,
}

/// A setting against the limits.
#[derive(Debug, Clone, Copy)]
pub(super) struct Check<T> {
    /// Of each axis the representative that the preference takes, in degrees.
    pub readings_deg: [T; MAX_AXES],
    /// The axis that is nearest to its limit, or farthest beyond, and its clearance in degrees.
    pub worst_axis: T,
    pub worst_deg: T,
    /// Degrees from the nearest limit of any moving sample axis; negative outside, infinite if none is limited.
    pub clearance_deg: T,
}

impl Score {
    pub fn new(instrument: &Instrument, moving: &[usize], preference: &Preference) -> Self {
        let mut counts = [false; MAX_AXES];
        for &axis in moving {
            counts[axis] = true;
        }
        let preferred_deg = match preference {
            Preference::FarthestFromLimits => None,
            Preference::NearestTo { readings_deg } => {
                let mut wanted = [None; MAX_AXES];
                for (slot, axis) in wanted.iter_mut().zip(instrument.axes()) {
                    *slot = readings_deg.get(&axis.name).map(|deg| deg.get());
                }
                Some(wanted)
            }
        };
        Self { travel: instrument.axes().map(|axis| axis.travel.clone()).collect(), counts, preferred_deg }
    }

    /// Chooses among the settings of a reflection: the one that the preference puts first or, if none is allowed, the one
    /// that misses least.
    #[inline(always)]
    pub fn best<T: Real>(&self, attempts: &Attempts<T>) -> Best<T> {
        let merits = self.merits(attempts);
        let zero = merits[0].like(0.0);
        let mut merit = merits[0];
        let (mut branch, mut miss_deg) = (zero, attempts.miss_deg[0]);
        let mut better = [zero.below(zero); MAX_BRANCHES];
        for other in 1..MAX_BRANCHES {
            better[other] = (merit + BETTER_BY_DEG).below(merits[other]);
            merit = T::choose(better[other], merits[other], merit);
            branch = T::choose(better[other], zero.like(other as f64), branch);
            miss_deg = T::choose(better[other], attempts.miss_deg[other], miss_deg);
        }
        let mut readings_deg = [zero; MAX_AXES];
        for (reading, row) in readings_deg.iter_mut().zip(&attempts.readings_deg).take(self.travel.len()) {
            *reading = row[0];
            for other in 1..MAX_BRANCHES {
                *reading = T::choose(better[other], row[other], *reading);
            }
        }
        Best { branch, readings_deg, miss_deg }
    }

    /// What the preference makes of each branch, in degrees: more is better. Any allowed setting beats any that misses.
    #[inline(always)]
    fn merits<T: Real>(&self, attempts: &Attempts<T>) -> Row<T> {
        let far = attempts.miss_deg[0].like(MORE_THAN_ANY_LIMIT_DEG);
        let (mut worst, mut roomiest) = ([far; MAX_BRANCHES], [far; MAX_BRANCHES]);
        for ((travel, &counts), row) in self.travel.iter().zip(&self.counts).zip(&attempts.readings_deg) {
            if travel.is_endless() {
                continue;
            }
            let clearances = travel.clearances_deg(row);
            for branch in 0..MAX_BRANCHES {
                worst[branch] = worst[branch].smaller(clearances[branch]);
                if counts {
                    roomiest[branch] = roomiest[branch].smaller(clearances[branch]);
                }
            }
        }
        let mut merits = [far.like(f64::NEG_INFINITY); MAX_BRANCHES];
        for branch in 0..attempts.count {
            let worst = worst[branch].smaller(-attempts.miss_deg[branch]);
            let allowed = match &self.preferred_deg {
                None => roomiest[branch],
                Some(wanted) => self.nearness(attempts, branch, wanted),
            };
            let misses = worst.below(far.like(-LIMIT_DUST_DEG));
            merits[branch] = T::choose(misses, worst + BELOW_ALL_ALLOWED, allowed);
        }
        merits
    }

    /// Minus the largest turn in degrees from a wanted position.
    fn nearness<T: Real>(&self, attempts: &Attempts<T>, branch: usize, wanted: &[Option<f64>; MAX_AXES]) -> T {
        let [nearness] = one_by_one(&attempts.readings_deg.map(|row| row[branch]), |readings_deg| {
            let turns = readings_deg.iter().zip(&self.travel).zip(wanted).map(|((&reading, travel), wanted)| {
                wanted.map_or(0.0, |near| (travel.check_near(reading, near).reading_deg - near).abs())
            });
            [-turns.fold(0.0, f64::max)]
        });
        nearness
    }

    /// Takes of each axis the representative that the preference wants, and measures it against the limits.
    #[inline(always)]
    pub fn check<T: Real>(&self, readings_deg: &[T; MAX_AXES]) -> Check<T> {
        let zero = readings_deg[0].like(0.0);
        let infinite = zero.like(f64::INFINITY);
        let mut check =
            Check { readings_deg: [zero; MAX_AXES], worst_axis: zero, worst_deg: infinite, clearance_deg: infinite };
        for (i, travel) in self.travel.iter().enumerate() {
            let (reading, clearance) = match self.preferred_deg.as_ref().and_then(|wanted| wanted[i]) {
                None => {
                    let one = travel.checks(readings_deg[i]);
                    (one.reading_deg, one.clearance_deg)
                }
                Some(near) => {
                    let [reading, clearance] = one_by_one(&[readings_deg[i]], |&[reading]| {
                        let one = travel.check_near(reading, near);
                        [one.reading_deg, one.clearance_deg]
                    });
                    (reading, clearance)
                }
            };
            check.readings_deg[i] = reading;
            let worse = clearance.below(check.worst_deg);
            check.worst_axis = T::choose(worse, zero.like(i as f64), check.worst_axis);
            check.worst_deg = T::choose(worse, clearance, check.worst_deg);
            if self.counts[i] {
                check.clearance_deg = check.clearance_deg.smaller(clearance);
            }
        }
        check
    }
}
