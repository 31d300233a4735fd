use super::{Approach, Axis, Instrument, LIMIT_DUST_DEG, Setting};

impl Axis {
    /// Seconds to go from one reading to another (degrees, taken as they stand: no full turns are added): path over
    /// speed plus the overhead of each start and stop. With an approach direction, a move that comes from the other
    /// side goes beyond by the overshoot and returns.
    pub fn drive_s(&self, from_deg: f64, to_deg: f64) -> f64 {
        let path = to_deg - from_deg;
        // Full turns added and taken away leave dust, which is no move.
        if path.abs() <= LIMIT_DUST_DEG {
            return 0.0;
        }
        let beyond = match self.approach {
            Some(Approach::Upward { overshoot_deg }) if path < 0.0 => Some(overshoot_deg.get()),
            Some(Approach::Downward { overshoot_deg }) if path > 0.0 => Some(overshoot_deg.get()),
            _ => None,
        };
        match beyond {
            None => path.abs() / self.speed_deg_per_s + self.overhead_s,
            Some(overshoot) => (path.abs() + 2.0 * overshoot) / self.speed_deg_per_s + 2.0 * self.overhead_s,
        }
    }

    /// Among reading + 360°k, the one reached soonest from `from_deg` without leaving the limits, and the seconds it
    /// takes; nothing if the limits hold none in the interval where the axis stands. The lower reading wins a tie.
    pub fn soonest(&self, from_deg: f64, reading_deg: f64) -> Option<(f64, f64)> {
        self.travel
            .reachable_from(from_deg, reading_deg)
            .into_iter()
            .map(|to| (to, self.drive_s(from_deg, to)))
            .min_by(|a, b| a.1.total_cmp(&b.1))
    }
}

impl Instrument {
    /// Drives every axis at once from one setting to the representative of another that each reaches soonest: the
    /// setting arrived at, and the seconds of the slowest axis.
    ///
    /// # Errors
    /// The number of an axis (sample axes first) that cannot get there without leaving its limits.
    pub fn drive(&self, from: &Setting, to: &Setting) -> Result<(Setting, f64), usize> {
        let mut readings = [0.0; super::MAX_AXES];
        let mut slowest: f64 = 0.0;
        let pairs = from.readings_deg().iter().zip(to.readings_deg());
        for (i, (axis, (&from_deg, &to_deg))) in self.axes().zip(pairs).enumerate() {
            let (reading, seconds) = axis.soonest(from_deg, to_deg).ok_or(i)?;
            readings[i] = reading;
            slowest = slowest.max(seconds);
        }
        Ok((Setting::new(&readings[..self.axis_count()]), slowest))
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::built_in_machine;
    use super::*;

    #[test]
    fn the_slowest_axis_decides() {
        let instrument = built_in_machine("eulerian-four-circle").unwrap();
        let from = Setting::new(&[0.0, 0.0, 0.0, 0.0]);
        let to = Setting::new(&[10.0, 30.0, 0.0, 20.0]);
        let times: Vec<f64> =
            instrument.axes().zip([10.0, 30.0, 0.0, 20.0]).map(|(axis, to)| axis.drive_s(0.0, to)).collect();
        let (_, seconds) = instrument.drive(&from, &to).unwrap();
        assert_eq!(seconds, times.iter().copied().fold(0.0, f64::max));
        assert_eq!(times[2], 0.0, "an axis that does not move costs nothing, not even its overhead");
    }

    #[test]
    fn coming_from_the_wrong_side_costs_the_overshoot_twice() {
        let instrument = built_in_machine("kappa-four-circle").unwrap();
        let axis = instrument.axes().find(|a| matches!(a.approach, Some(Approach::Upward { .. }))).unwrap();
        let Some(Approach::Upward { overshoot_deg }) = axis.approach else { unreachable!() };
        let extra = axis.drive_s(20.0, 0.0) - axis.drive_s(0.0, 20.0);
        let expected = 2.0 * overshoot_deg.get() / axis.speed_deg_per_s + axis.overhead_s;
        assert!((extra - expected).abs() < 1e-12);
    }
}
