use std::sync::atomic::{AtomicUsize, Ordering};

use nalgebra::Matrix3;
use rayon::prelude::*;

use super::stretch::Stretch;
use super::{Judge, Verdict};
use crate::frames::Hkl;
use crate::instrument::Setting;
use crate::lanes::widest;
use crate::pace::Pace;

/// The reflections that are wanted, in columns of equal length.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Wanted {
    /// Indices.
    pub hkl: Vec<Hkl>,
    /// The operation that makes a node absent, as a number among the space group's; nothing if it is present.
    pub absent: Vec<Option<u16>>,
}

/// The verdict on every wanted reflection. A struct of columns, because there may be a million rows: what is kept is the
/// verdict, its reason and the setting chosen; the other settings are made again when asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct ReachTable {
    wanted: Wanted,
    d_angstrom: Vec<f64>,
    verdict: Vec<Verdict>,
    /// Of the setting chosen, `axis_count` for each row; zeros where it is not reachable.
    readings_deg: Vec<f64>,
    axis_count: usize,
    wavelength_angstrom: f64,
}

/// One row of the table.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ReachRow {
    /// Indices.
    pub hkl: Hkl,
    /// Spacing in Å.
    pub d_angstrom: f64,
    /// 2θ in degrees; nothing outside the sphere.
    pub two_theta_deg: Option<f64>,
    /// The operation that makes the node absent, if one does.
    pub absent: Option<u16>,
    /// Reachable, or why not.
    pub verdict: Verdict,
    /// The setting chosen, if it is reachable.
    pub setting: Option<Setting>,
}

/// Whoever waited for the work said no.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
#[error("stopped before it was finished")]
pub struct Stopped;

/// Rows that one thread judges at a stretch between two questions whether to go on.
const STRETCH: usize = 4096;

impl ReachTable {
    /// Judges every wanted reflection. `ub` has the columns a*, b*, c* in the head frame, in Å⁻¹.
    ///
    /// # Errors
    /// If `pace` says no.
    pub fn judge(
        wanted: Wanted,
        ub: &Matrix3<f64>,
        wavelength_angstrom: f64,
        judge: &Judge,
        axis_count: usize,
        pace: &impl Pace,
    ) -> Result<Self, Stopped> {
        let count = wanted.hkl.len();
        let mut d_angstrom = vec![0.0; count];
        // Filled on every thread, because the first touch of so much memory takes as long as the angles.
        let mut verdict: Vec<Verdict> = rayon::iter::repeat_n(Verdict::Reachable, count).collect();
        let mut readings_deg = vec![0.0; count * axis_count];
        let done = AtomicUsize::new(0);
        let go_on = d_angstrom
            .par_chunks_mut(STRETCH)
            .zip(verdict.par_chunks_mut(STRETCH))
            .zip(readings_deg.par_chunks_mut(STRETCH * axis_count.max(1)))
            .zip(wanted.hkl.par_chunks(STRETCH))
            .all(|(((d_angstrom, verdict), readings_deg), hkl)| {
                widest(Stretch { judge, ub, wavelength_angstrom, axis_count, hkl, d_angstrom, verdict, readings_deg });
                let finished = done.fetch_add(hkl.len(), Ordering::Relaxed) + hkl.len();
                pace.proceed(finished, count)
            });
        if !go_on {
            return Err(Stopped);
        }
        Ok(Self { wanted, d_angstrom, verdict, readings_deg, axis_count, wavelength_angstrom })
    }

    /// Number of rows.
    pub fn len(&self) -> usize {
        self.verdict.len()
    }

    /// Whether there is no row.
    pub fn is_empty(&self) -> bool {
        self.verdict.is_empty()
    }

    /// A row by its number.
    pub fn row(&self, i: usize) -> Option<ReachRow> {
        let verdict = *self.verdict.get(i)?;
        let d_angstrom = *self.d_angstrom.get(i)?;
        let sin_theta = 0.5 * self.wavelength_angstrom / d_angstrom;
        let outside = matches!(verdict, Verdict::OutsideSphere { .. });
        let readings = self.readings_deg.get(i * self.axis_count..(i + 1) * self.axis_count)?;
        Some(ReachRow {
            hkl: *self.wanted.hkl.get(i)?,
            d_angstrom,
            two_theta_deg: (!outside).then(|| 2.0 * sin_theta.min(1.0).asin().to_degrees()),
            absent: self.wanted.absent.get(i).copied().flatten(),
            verdict,
            setting: verdict.is_reachable().then(|| Setting::new(readings)),
        })
    }

    /// All rows in order.
    pub fn rows(&self) -> impl Iterator<Item = ReachRow> + '_ {
        (0..self.len()).filter_map(|i| self.row(i))
    }

    /// The verdicts alone, in order.
    pub fn verdicts(&self) -> &[Verdict] {
        &self.verdict
    }

    /// How many rows there are of each kind of verdict, in the order of [`Verdict::WORDS`].
    pub fn counts(&self) -> [usize; Verdict::WORDS.len()] {
        let mut counts = [0; Verdict::WORDS.len()];
        for verdict in &self.verdict {
            counts[verdict.kind()] += 1;
        }
        counts
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::aim::{Preference, Rule};
    use crate::crystal::UnitCell;
    use crate::frames::Vector;
    use crate::instrument::built_in_machine;
    use crate::pace::Unhurried;

    struct Never;
    impl Pace for Never {
        fn proceed(&self, _: usize, _: usize) -> bool {
            false
        }
    }

    #[test]
    fn rows_agree_with_the_judge_and_a_no_stops() {
        let instrument = built_in_machine("kappa-four-circle").unwrap();
        let judge = Judge::new(&instrument, &[Rule::Bisecting], &Preference::default()).unwrap();
        let cell = UnitCell::new(7.0, 8.0, 9.0, 90.0, 100.0, 90.0).unwrap();
        let hkl: Vec<Hkl> = (-5..=5).flat_map(|h| (-5..5).map(move |k| Hkl::from([h, k, 3]))).collect();
        let wanted = Wanted { absent: vec![None; hkl.len()], hkl };
        let table =
            ReachTable::judge(wanted.clone(), cell.b_matrix(), 0.7, &judge, instrument.axis_count(), &Unhurried)
                .unwrap();
        assert_eq!(table.len(), 110);
        for row in table.rows() {
            let node = Vector::from_raw(cell.b_matrix() * row.hkl.to_vector());
            let one = judge.verdict(node, 0.7);
            assert_eq!(row.verdict, one.verdict);
            assert_eq!(row.setting.is_some(), one.verdict.is_reachable());
            assert!((row.d_angstrom - cell.d_spacing(row.hkl)).abs() < 1e-12);
        }
        assert_eq!(table.counts().iter().sum::<usize>(), 110);
        let stopped = ReachTable::judge(wanted, cell.b_matrix(), 0.7, &judge, instrument.axis_count(), &Never);
        assert_eq!(stopped, Err(Stopped));
    }
}
