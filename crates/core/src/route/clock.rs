use crate::instrument::{Approach, Axis, Instrument, LIMIT_DUST_DEG, MAX_AXES, wrap_deg};

use super::rounding::rounded;

/// The clock of one axis with everything that does not change during a list taken out. An axis cannot leave its interval
/// without passing a limit, so it stays for the whole list in the one where it is parked.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct AxisClock {
    /// Smallest and largest reading of the interval; nothing for an endless axis.
    span: Option<(f64, f64)>,
    pub speed_deg_per_s: f64,
    pub overhead_s: f64,
    /// How far a move with growing, and one with falling readings goes beyond its target, if it does.
    beyond_deg: [Option<f64>; 2],
}

/// The readings that stand for one angle within the interval of an axis: the lowest, and how many more full turns fit.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub(super) struct Place {
    pub lowest_deg: f64,
    pub more_turns: u8,
}

impl AxisClock {
    pub fn new(axis: &Axis) -> Self {
        let holds_park =
            |(low, high): &(f64, f64)| axis.park_deg >= low - LIMIT_DUST_DEG && axis.park_deg <= high + LIMIT_DUST_DEG;
        let beyond_deg = match axis.approach {
            None => [None, None],
            Some(Approach::Upward { overshoot_deg }) => [None, Some(overshoot_deg.get())],
            Some(Approach::Downward { overshoot_deg }) => [Some(overshoot_deg.get()), None],
        };
        // That the park reading lies in an interval was checked when the machine was read.
        let span = axis.travel.intervals_deg().find(holds_park);
        Self { span, speed_deg_per_s: axis.speed_deg_per_s, overhead_s: axis.overhead_s, beyond_deg }
    }

    /// The readings for an angle that this axis can be driven to from where it is parked; nothing if there is none.
    pub fn place(&self, reading_deg: f64) -> Option<Place> {
        let Some((low, high)) = self.span else {
            return Some(Place { lowest_deg: reading_deg, more_turns: 0 });
        };
        let turns_up = ((low - LIMIT_DUST_DEG - reading_deg) / 360.0).ceil();
        // A sum of full turns and a rounded reading is rounded again, so that no dust appears in its last digits.
        let lowest_deg = rounded(reading_deg + 360.0 * turns_up);
        if lowest_deg > high + LIMIT_DUST_DEG {
            return None;
        }
        let more = ((high + LIMIT_DUST_DEG - lowest_deg) / 360.0).floor();
        Some(Place { lowest_deg, more_turns: more as u8 })
    }

    /// Seconds to go to the reading of a place that is reached soonest.
    #[inline]
    pub fn seconds(&self, from_deg: f64, place: &Place) -> f64 {
        if self.span.is_none() {
            return self.path_s(wrap_deg(place.lowest_deg - from_deg));
        }
        let mut best = self.path_s(place.lowest_deg - from_deg);
        for turn in 1..=place.more_turns {
            best = best.min(self.path_s(place.lowest_deg + 360.0 * f64::from(turn) - from_deg));
        }
        best
    }

    /// The reading of a place that is reached soonest; of two reached equally soon the lower.
    pub fn arrival_deg(&self, from_deg: f64, place: &Place) -> f64 {
        if self.span.is_none() {
            return rounded(from_deg + wrap_deg(place.lowest_deg - from_deg));
        }
        let readings = (0..=place.more_turns).map(|turn| rounded(place.lowest_deg + 360.0 * f64::from(turn)));
        let soonest = readings.min_by(|a, b| self.path_s(a - from_deg).total_cmp(&self.path_s(b - from_deg)));
        soonest.unwrap_or(place.lowest_deg)
    }

    /// The same rule as [`Axis::drive_s`], to which a test holds it.
    #[inline]
    fn path_s(&self, path_deg: f64) -> f64 {
        if path_deg.abs() <= LIMIT_DUST_DEG {
            return 0.0;
        }
        match self.beyond_deg[usize::from(path_deg < 0.0)] {
            None => path_deg.abs() / self.speed_deg_per_s + self.overhead_s,
            Some(beyond) => (path_deg.abs() + 2.0 * beyond) / self.speed_deg_per_s + 2.0 * self.overhead_s,
        }
    }
}

/// The clocks of all axes.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct MachineClock {
    pub axes: Vec<AxisClock>,
}

/// The places of all axes for one row.
pub(super) type Places = [Place; MAX_AXES];

impl MachineClock {
    pub fn new(instrument: &Instrument) -> Self {
        Self { axes: instrument.axes().map(AxisClock::new).collect() }
    }

    /// Seconds of the slowest axis, or any number above `enough` once it is clear that it takes longer than that.
    #[inline]
    pub fn seconds(&self, from_deg: &[f64], places: &Places, enough: f64) -> f64 {
        let mut slowest: f64 = 0.0;
        for ((axis, from), place) in self.axes.iter().zip(from_deg).zip(places) {
            slowest = slowest.max(axis.seconds(*from, place));
            if slowest > enough {
                return slowest;
            }
        }
        slowest
    }
}
