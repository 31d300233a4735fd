//! *Freest*: the azimuth at which the axes stay farthest from every limit, and from whatever else counts.

use super::{AzimuthFamily, Judge};
use crate::aim::{CrystalOnHead, NoSetting, Rule, RuleError};
use crate::frames::{Head, Vector};
use crate::instrument::Instrument;

/// Merits that differ by less than this, in degrees, are equal: the azimuth nearer to 0 is taken.
const AS_GOOD_DEG: f64 = 1e-7;

/// So many of the best looks are followed to the top.
const FOLLOWED: usize = 4;

/// Halvings of the stretch between two looks: to about 1e-9 rad.
const NARROWINGS: usize = 44;

/// The search for the best azimuth.
#[derive(Debug, Clone)]
pub(super) struct Freest {
    family: AzimuthFamily,
}

impl Freest {
    /// Nothing if no rule is *freest*.
    ///
    /// # Errors
    /// If the rules do not fit the machine.
    pub fn new(
        instrument: &Instrument,
        rules: &[Rule],
        crystal: Option<&CrystalOnHead>,
    ) -> Result<Option<Self>, RuleError> {
        let reference = rules.iter().find_map(|rule| match rule {
            Rule::Freest { reference, .. } => Some(*reference),
            _ => None,
        });
        match (reference, crystal) {
            (Some(reference), Some(crystal)) => {
                Ok(Some(Self { family: AzimuthFamily::new(instrument, rules, crystal, &reference)? }))
            }
            (Some(_), None) => Err(RuleError::NeedsOrientation("freest")),
            (None, _) => Ok(None),
        }
    }

    /// The azimuth in radians with the greatest merit; where nothing is allowed, the one that misses least.
    ///
    /// # Errors
    /// If the reflection has no setting whatever the axes.
    pub fn azimuth_rad(
        &self,
        judge: &Judge,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
    ) -> Result<f64, NoSetting> {
        let merit = |psi: f64| -> Result<f64, NoSetting> {
            let mut best = f64::NEG_INFINITY;
            self.family
                .at(judge, q_in_head, wavelength_angstrom, psi, &mut |judged| best = best.max(judge.merit(&judged)))?;
            Ok(best)
        };
        let looks = self.family.looks(q_in_head, wavelength_angstrom);
        let merits = looks.iter().map(|&psi| merit(psi)).collect::<Result<Vec<f64>, _>>()?;
        let count = looks.len();
        let neighbours = |i: usize| [(i + count - 1) % count, (i + 1) % count];
        let mut tops: Vec<usize> =
            (0..count).filter(|&i| neighbours(i).iter().all(|&j| merits[i] >= merits[j])).collect();
        tops.sort_by(|&a, &b| merits[b].total_cmp(&merits[a]));
        let mut best = (f64::NEG_INFINITY, 0.0f64);
        for &top in tops.iter().take(FOLLOWED) {
            let turn = std::f64::consts::TAU;
            let [before, after] = neighbours(top);
            let low = if before > top { looks[before] - turn } else { looks[before] };
            let high = if after < top { looks[after] + turn } else { looks[after] };
            let found = climb(&merit, [low, looks[top], high], merits[top])?;
            let psi = found.1 - turn * (found.1 / turn).round();
            let better = found.0 > best.0 + AS_GOOD_DEG;
            let as_good_nearer = found.0 > best.0 - AS_GOOD_DEG && psi.abs() < best.1.abs();
            if better || as_good_nearer {
                best = (found.0, psi);
            }
        }
        Ok(best.1)
    }
}

/// Follows a merit from a look to the top between its neighbours, by golden sections.
fn climb(
    merit: &impl Fn(f64) -> Result<f64, NoSetting>,
    [mut low, mut best, mut high]: [f64; 3],
    mut most: f64,
) -> Result<(f64, f64), NoSetting> {
    const GOLDEN: f64 = 0.381_966_011_250_105;
    for _ in 0..NARROWINGS {
        let (left, right) = (best - low, high - best);
        let psi = if left > right { best - GOLDEN * left } else { best + GOLDEN * right };
        let value = merit(psi)?;
        match (value > most, psi < best) {
            (true, true) => (high, best, most) = (best, psi, value),
            (true, false) => (low, best, most) = (best, psi, value),
            (false, true) => low = psi,
            (false, false) => high = psi,
        }
    }
    Ok((most, best))
}
