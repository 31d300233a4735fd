use ringwright_core::instrument::{AxisName, Instrument};
use ringwright_core::reach::ReachRow;

use super::super::super::Reach;
use super::super::number::fixed;

/// The moving sample axis that is nearest to a limit at the setting chosen, and the degrees that are left.
pub(super) fn room(row: &ReachRow, reach: &Reach) -> Option<(AxisName, f64)> {
    let setting = row.setting.filter(|_| row.verdict.is_reachable())?;
    let of = |&i: &usize| {
        let axis = reach.instrument.sample_axes().get(i)?;
        let deg = axis.travel.clearance_as_read_deg(*setting.readings_deg().get(i)?);
        Some((axis.name.clone(), deg))
    };
    let limited = reach.judge.road().moving_sample_axes().iter().filter_map(of).filter(|(_, deg)| deg.is_finite());
    limited.min_by(|(_, a), (_, b)| a.total_cmp(b))
}

/// What a row comes to: the room that is left, or what stands in the way.
pub(super) fn detail(row: &ReachRow, reach: &Reach) -> String {
    if !row.verdict.is_reachable() {
        return row.verdict.detail(&reach.instrument);
    }
    match room(row, reach) {
        Some((axis, deg)) => format!("{axis} {}° from its limit", fixed(deg, 1)),
        None => "no limits".to_owned(),
    }
}

/// A column of the table.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Column {
    Hkl,
    Spacing,
    TwoTheta,
    Absent,
    Verdict,
    Detail,
    /// The reading of an axis, by its position among all axes.
    Axis(usize),
}

impl Column {
    pub fn all(axis_count: usize) -> impl Iterator<Item = Self> {
        [Self::Hkl, Self::Spacing, Self::TwoTheta, Self::Absent, Self::Verdict, Self::Detail]
            .into_iter()
            .chain((0..axis_count).map(Self::Axis))
    }

    pub fn title(self, instrument: &Instrument) -> String {
        match self {
            Self::Hkl => "h k l".to_owned(),
            Self::Spacing => "d / Å".to_owned(),
            Self::TwoTheta => "2θ / °".to_owned(),
            Self::Absent => "absent".to_owned(),
            Self::Verdict => "verdict".to_owned(),
            Self::Detail => "detail".to_owned(),
            Self::Axis(i) => {
                let name = instrument.axes().nth(i).map_or("?", |axis| axis.name.as_str());
                format!("{name} / °")
            }
        }
    }

    pub fn meaning(self) -> &'static str {
        match self {
            Self::Hkl => "Indices of the reflection.",
            Self::Spacing => "Spacing of the planes, 1/|G|.",
            Self::TwoTheta => "Angle between the direct and the diffracted beam: λ = 2 d sin θ.",
            Self::Absent => "Whether an operation of the space group makes it absent.",
            Self::Verdict => "Whether it can be measured, or why not.",
            Self::Detail => {
                "The room to the nearest limit; or what stands in the way, for the setting that misses least."
            }
            Self::Axis(_) => "Reading of this axis at the setting chosen; empty where there is none.",
        }
    }

    pub fn is_number(self) -> bool {
        matches!(self, Self::Hkl | Self::Spacing | Self::TwoTheta | Self::Axis(_))
    }

    /// What rows are sorted by, first number first; NaN where the row has nothing in this column. Details are sorted by the
    /// degrees that are missing, so room counts as less than nothing.
    pub fn sort_key(self, row: &ReachRow, reach: &Reach) -> [f64; 3] {
        let one = |value: f64| [value, 0.0, 0.0];
        match self {
            Self::Hkl => [row.hkl.h, row.hkl.k, row.hkl.l],
            Self::Spacing => one(row.d_angstrom),
            Self::TwoTheta => one(row.two_theta_deg.unwrap_or(f64::NAN)),
            Self::Absent => one(row.absent.map_or(f64::NAN, f64::from)),
            Self::Verdict => one(row.verdict.kind() as f64),
            Self::Detail => match room(row, reach) {
                Some((_, deg)) => [-deg, 0.0, 0.0],
                None => [row.verdict.miss_deg().unwrap_or(f64::NAN), row.verdict.kind() as f64, 0.0],
            },
            Self::Axis(i) => one(row.setting.and_then(|s| s.readings_deg().get(i).copied()).unwrap_or(f64::NAN)),
        }
    }
}
