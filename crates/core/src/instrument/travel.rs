use super::{Approach, Interval, Limits, MachineProblem};
use crate::lanes::Real;

/// The readings an axis may take as *targets*: the limits, less the room that an overshoot needs at one end.
#[derive(Debug, Clone, PartialEq)]
pub struct Travel {
    /// Centre and half width of each interval of targets, in degrees; none for an endless axis.
    spans: Vec<Span>,
}

#[derive(Debug, Clone, Copy, PartialEq)]
struct Span {
    centre: f64,
    half: f64,
}

/// How a reading stands to the limits.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TravelCheck<T = f64> {
    /// The representative (reading + 360°k) deepest inside the limits, or nearest to them, in degrees.
    pub reading_deg: T,
    /// Degrees to the nearest limit: negative outside, infinite on an endless axis.
    pub clearance_deg: T,
}

/// Adding and taking away this number rounds a double below 2⁵¹ to an integer: one instruction each, where `round` is a
/// call on processors without that instruction.
const ROUNDING: f64 = 6_755_399_441_055_744.0;

/// The angle in degrees that differs from `deg` by full turns and lies in −180° to 180°.
#[inline(always)]
pub(crate) fn wrap_deg<T: Real>(deg: T) -> T {
    deg - ((deg * (1.0 / 360.0) + ROUNDING) - ROUNDING) * 360.0
}

impl Travel {
    /// # Errors
    /// If an interval is the wrong way round, meets another, or leaves no room for the overshoot.
    pub(crate) fn new(limits: &Limits, approach: Option<Approach>, path: &str) -> Result<Self, MachineProblem> {
        let Limits::Intervals(intervals) = limits else { return Ok(Self { spans: Vec::new() }) };
        if intervals.is_empty() {
            return Err(MachineProblem::new(
                path,
                "no interval is given; accepted are one or more intervals, or Endless",
            ));
        }
        let mut spans = Vec::new();
        for (i, interval) in intervals.iter().enumerate() {
            spans.push(Span::of(interval, approach, &format!("{path}.Intervals[{i}]"))?);
        }
        let mut order: Vec<usize> = (0..intervals.len()).collect();
        order.sort_by(|&i, &j| intervals[i].from_deg.get().total_cmp(&intervals[j].from_deg.get()));
        for pair in order.windows(2) {
            let (low, high) = (intervals[pair[0]], intervals[pair[1]]);
            if low.to_deg.get() >= high.from_deg.get() {
                let message = format!(
                    "the interval from {}° to {}° meets the one from {}° to {}°; accepted are intervals apart from each other",
                    high.from_deg.get(),
                    high.to_deg.get(),
                    low.from_deg.get(),
                    low.to_deg.get()
                );
                return Err(MachineProblem::new(format!("{path}.Intervals[{}]", pair[1]), message));
            }
        }
        Ok(Self { spans })
    }

    /// Whether the axis turns for ever.
    pub fn is_endless(&self) -> bool {
        self.spans.is_empty()
    }

    /// The intervals of targets in degrees, smallest and largest reading of each; none for an endless axis.
    pub fn intervals_deg(&self) -> impl Iterator<Item = (f64, f64)> + '_ {
        self.spans.iter().map(|s| (s.centre - s.half, s.centre + s.half))
    }

    /// Chooses among reading + 360°k the one deepest inside the limits. On an endless axis, −180° to 180°.
    pub fn check(&self, reading_deg: f64) -> TravelCheck {
        self.checks(reading_deg)
    }

    /// [`Self::check`] for one reading or several side by side.
    #[inline(always)]
    pub(crate) fn checks<T: Real>(&self, reading_deg: T) -> TravelCheck<T> {
        let Some((first, rest)) = self.spans.split_first() else {
            let clearance_deg = reading_deg.like(f64::INFINITY);
            return TravelCheck { reading_deg: wrap_deg(reading_deg), clearance_deg };
        };
        let mut best = first.checks(reading_deg);
        for span in rest {
            let other = span.checks(reading_deg);
            let better = best.clearance_deg.below(other.clearance_deg);
            best.reading_deg = T::choose(better, other.reading_deg, best.reading_deg);
            best.clearance_deg = T::choose(better, other.clearance_deg, best.clearance_deg);
        }
        best
    }

    /// Degrees to the nearest limit of the representative that [`Self::check`] chooses, for a row of readings.
    #[inline(always)]
    pub(crate) fn clearances_deg<T: Real, const N: usize>(&self, readings_deg: &[T; N]) -> [T; N] {
        let mut clearances = *readings_deg;
        let Some((first, rest)) = self.spans.split_first() else {
            for clearance in &mut clearances {
                *clearance = clearance.like(f64::INFINITY);
            }
            return clearances;
        };
        for clearance in &mut clearances {
            *clearance = first.checks(*clearance).clearance_deg;
        }
        for span in rest {
            for (clearance, &reading) in clearances.iter_mut().zip(readings_deg) {
                *clearance = clearance.larger(span.checks(reading).clearance_deg);
            }
        }
        clearances
    }

    /// Chooses among the reading + 360°k that lie inside the limits the one nearest to a position; the one that
    /// [`Self::check`] gives where none does.
    pub fn check_near(&self, reading_deg: f64, near_deg: f64) -> TravelCheck {
        let deepest = self.check(reading_deg);
        if self.is_endless() {
            return TravelCheck { reading_deg: near_deg + wrap_deg(reading_deg - near_deg), ..deepest };
        }
        let nearest = self
            .spans
            .iter()
            .flat_map(|span| span.inside(reading_deg))
            .min_by(|a, b| (a - near_deg).abs().total_cmp(&(b - near_deg).abs()));
        nearest.map_or(deepest, |reading_deg| TravelCheck {
            reading_deg,
            clearance_deg: self.clearance_as_read_deg(reading_deg),
        })
    }

    /// Degrees to the limits of the interval that holds exactly this reading, not a full turn away from it: negative
    /// outside all of them.
    pub fn clearance_as_read_deg(&self, reading_deg: f64) -> f64 {
        let inside = |s: &Span| s.half - (reading_deg - s.centre).abs();
        if self.is_endless() { f64::INFINITY } else { self.spans.iter().map(inside).fold(f64::NEG_INFINITY, f64::max) }
    }

    /// Every reading + 360°k inside the limits that an axis at `from_deg` can go to without leaving them: those in the
    /// same interval. On an endless axis, the nearest.
    pub fn reachable_from(&self, from_deg: f64, reading_deg: f64) -> Vec<f64> {
        if self.is_endless() {
            return vec![from_deg + wrap_deg(reading_deg - from_deg)];
        }
        let here = self.spans.iter().find(|s| (from_deg - s.centre).abs() <= s.half + LIMIT_DUST_DEG);
        here.map_or_else(Vec::new, |span| span.inside(reading_deg).collect())
    }
}

/// Rounding dust at a limit, in degrees: a reading this far beyond is at the limit, not over it. Far below the fourth
/// decimal that lists are written with.
pub(crate) const LIMIT_DUST_DEG: f64 = 1e-9;

impl Span {
    fn of(interval: &Interval, approach: Option<Approach>, path: &str) -> Result<Self, MachineProblem> {
        let (mut low, mut high) = (interval.from_deg.get(), interval.to_deg.get());
        if low >= high {
            let message =
                format!("the limits {low}° to {high}° are the wrong way round; accepted is from_deg below to_deg");
            return Err(MachineProblem::new(path, message));
        }
        let overshoot = match approach {
            None => 0.0,
            Some(Approach::Upward { overshoot_deg }) => {
                low += overshoot_deg.get();
                overshoot_deg.get()
            }
            Some(Approach::Downward { overshoot_deg }) => {
                high -= overshoot_deg.get();
                overshoot_deg.get()
            }
        };
        if low >= high {
            let message = format!(
                "the limits leave no room for an overshoot of {overshoot}°; accepted is a wider interval or a smaller overshoot"
            );
            return Err(MachineProblem::new(path, message));
        }
        Ok(Self { centre: 0.5 * (low + high), half: 0.5 * (high - low) })
    }

    /// Every reading + 360°k inside, smallest first.
    fn inside(&self, reading_deg: f64) -> impl Iterator<Item = f64> + use<> {
        let (low, high) = (self.centre - self.half - LIMIT_DUST_DEG, self.centre + self.half + LIMIT_DUST_DEG);
        let first = reading_deg + 360.0 * ((low - reading_deg) / 360.0).ceil();
        std::iter::successors(Some(first), |r| Some(r + 360.0)).take_while(move |r| *r <= high)
    }

    /// The representative nearest to the centre is deepest inside if any is inside, and nearest if none is.
    #[inline(always)]
    fn checks<T: Real>(&self, reading_deg: T) -> TravelCheck<T> {
        let off = wrap_deg(reading_deg - self.centre);
        TravelCheck { reading_deg: off + self.centre, clearance_deg: off.like(self.half) - off.abs() }
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::quantity::{Degrees, Overshoot};

    fn interval(from: f64, to: f64) -> Interval {
        Interval { from_deg: Degrees::new(from).unwrap(), to_deg: Degrees::new(to).unwrap() }
    }

    fn travel(intervals: &[(f64, f64)]) -> Travel {
        let intervals = intervals.iter().map(|&(a, b)| interval(a, b)).collect();
        Travel::new(&Limits::Intervals(intervals), None, "limits").unwrap()
    }

    #[test]
    fn the_deepest_representative_is_chosen() {
        let t = travel(&[(-100.0, 300.0)]);
        assert_eq!(t.check(-90.0), TravelCheck { reading_deg: 270.0, clearance_deg: 30.0 });
        assert_eq!(t.check(100.0 + 720.0), TravelCheck { reading_deg: 100.0, clearance_deg: 200.0 });
    }

    #[test]
    fn over_by_counts_from_the_nearest_representative() {
        let t = travel(&[(-30.0, 120.0)]);
        let check = t.check(-160.0);
        assert!((check.clearance_deg + 80.0).abs() < 1e-12, "200° is 80° over, -160° is 130° under");
        assert!((check.reading_deg - 200.0).abs() < 1e-12);
    }

    #[test]
    fn of_several_intervals_the_roomiest_counts() {
        let t = travel(&[(-170.0, -100.0), (100.0, 170.0)]);
        assert!((t.check(120.0).clearance_deg - 20.0).abs() < 1e-12);
        assert!((t.check(0.0).clearance_deg + 100.0).abs() < 1e-12);
        assert_eq!(t.reachable_from(120.0, -120.0), Vec::<f64>::new(), "the gap may not be crossed");
    }

    #[test]
    fn a_drive_has_every_representative_of_its_interval() {
        let t = travel(&[(-200.0, 400.0)]);
        assert_eq!(t.reachable_from(0.0, 170.0), vec![-190.0, 170.0]);
        let endless = Travel::new(&Limits::Endless, None, "").unwrap();
        assert_eq!(endless.reachable_from(350.0, 10.0), vec![370.0]);
    }

    #[test]
    fn an_overshoot_takes_room_at_the_side_it_goes_to() {
        let up = Some(Approach::Upward { overshoot_deg: Overshoot::new(2.0).unwrap() });
        let t = Travel::new(&Limits::Intervals(vec![interval(0.0, 90.0)]), up, "limits").unwrap();
        assert_eq!(t.intervals_deg().collect::<Vec<_>>(), vec![(2.0, 90.0)]);
        assert!(t.check(1.0).clearance_deg < 0.0 && t.check(89.0).clearance_deg > 0.0);
    }

    #[test]
    fn limits_the_wrong_way_round_or_overlapping_are_refused() {
        let refuse = |v: Vec<Interval>| Travel::new(&Limits::Intervals(v), None, "limits").unwrap_err();
        assert_eq!(refuse(vec![interval(90.0, -90.0)]).path, "limits.Intervals[0]");
        assert_eq!(refuse(vec![interval(0.0, 90.0), interval(-20.0, 10.0)]).path, "limits.Intervals[0]");
        assert!(refuse(vec![]).message.contains("Endless"));
    }

    #[test]
    fn wrapping_keeps_the_angle() {
        for deg in [-1e4, -540.0, -180.0, -0.1, 0.0, 179.9, 360.0, 725.0] {
            let wrapped = wrap_deg(deg);
            assert!(wrapped.abs() <= 180.0);
            let turns = (deg - wrapped) / 360.0;
            assert!((turns - turns.round()).abs() < 1e-12);
        }
    }
}
