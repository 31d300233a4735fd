use std::fmt;

use super::{ALLOWED_SIGMAS, Compared, LaterPeak, TwoPeakOrientation};
use crate::crystal::SpaceGroup;
use crate::frames::Hkl;

/// A turn of the crystal known no better than this many degrees is worth a word.
const POOR_TURN_DEG: f64 = 0.5;

/// Something about the peaks that a person should look at.
#[derive(Debug, Clone, PartialEq)]
pub enum Warning {
    /// The angle between the two is not the one that their indices call for.
    Angle {
        /// In degrees.
        angle_deg: Compared,
    },
    /// The d of one of the two is not the one that its indices call for.
    Spacing {
        /// The peak.
        hkl: Hkl,
        /// In Å.
        d_angstrom: Compared,
    },
    /// Both d are out by the same factor: not the indices, but cell, wavelength or the detector's zero.
    SameScale {
        /// d observed / d calculated, weighted mean of the two.
        scale: f64,
        /// Its standard uncertainty.
        sigma: f64,
    },
    /// A peak that was seen has indices that symmetry forbids.
    Absent {
        /// The peak.
        hkl: Hkl,
        /// The operation, in words.
        reason: String,
    },
    /// The two are so close to one line that the turn about it is poorly known.
    PoorlyKnown {
        /// Standard uncertainty of the turn in degrees.
        turn_sigma_deg: f64,
    },
    /// A later peak is not where the orientation puts it.
    LaterPeak {
        /// Its indices.
        hkl: Hkl,
        /// The misfit of its direction in degrees.
        direction_deg: Compared,
        /// Its d in Å.
        d_angstrom: Compared,
    },
}

pub(super) fn find_warnings(group: &SpaceGroup, pair: &TwoPeakOrientation, later: &[LaterPeak]) -> Vec<Warning> {
    let mut warnings = Vec::new();
    if !pair.angle_deg.agrees() {
        warnings.push(Warning::Angle { angle_deg: pair.angle_deg });
    }
    let observed = [&pair.first, &pair.second];
    for (peak, d) in observed.into_iter().zip(pair.d_angstrom) {
        if !d.agrees() {
            warnings.push(Warning::Spacing { hkl: peak.hkl, d_angstrom: d });
        }
    }
    warnings.extend(same_scale(pair));
    for peak in observed.into_iter().chain(later.iter().map(|peak| &peak.observation)) {
        let presence = group.absence(peak.hkl);
        if presence.is_absent() {
            warnings.push(Warning::Absent { hkl: peak.hkl, reason: group.reason(presence) });
        }
    }
    let turn_sigma_deg = pair.turn_sigma_deg();
    if turn_sigma_deg > POOR_TURN_DEG {
        warnings.push(Warning::PoorlyKnown { turn_sigma_deg });
    }
    for peak in later.iter().filter(|peak| !peak.agrees()) {
        let (direction_deg, d_angstrom) = (peak.direction_deg, peak.d_angstrom);
        warnings.push(Warning::LaterPeak { hkl: peak.observation.hkl, direction_deg, d_angstrom });
    }
    warnings
}

/// Whether one factor explains both d where 1 does not.
fn same_scale(pair: &TwoPeakOrientation) -> Option<Warning> {
    if pair.d_angstrom.iter().all(Compared::agrees) {
        return None;
    }
    let [(a, sa), (b, sb)] = pair.scale();
    let (wa, wb) = (sa.max(1e-12).powi(-2), sb.max(1e-12).powi(-2));
    let (scale, sigma) = ((a * wa + b * wb) / (wa + wb), (wa + wb).powf(-0.5));
    let together = (a - b).abs() <= ALLOWED_SIGMAS * sa.hypot(sb);
    ((scale - 1.0).abs() > ALLOWED_SIGMAS * sigma && together).then_some(Warning::SameScale { scale, sigma })
}

impl fmt::Display for Warning {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Angle { angle_deg: c } => {
                write!(f, "The angle between the two peaks is {:+.3}° off, {} the uncertainties.", c.misfit(), times(c))
            }
            Self::Spacing { hkl, d_angstrom: c } => {
                write!(f, "d of {hkl} is {:+.4} Å off, {} the uncertainties.", c.misfit(), times(c))
            }
            Self::SameScale { scale, sigma } => write!(
                f,
                "Both d are out by the same factor {scale:.4} ± {sigma:.4}: look at the cell, the wavelength and the \
                 zero of the detector before the indices."
            ),
            Self::Absent { hkl, reason } => {
                write!(f, "{hkl} was found, but symmetry forbids it ({reason}): wrong indices, group or setting?")
            }
            Self::PoorlyKnown { turn_sigma_deg } => write!(
                f,
                "The two peaks are so close to one line that the crystal's turn about it is known only to \
                 ± {turn_sigma_deg:.2}°; take a pair nearer to 90°."
            ),
            Self::LaterPeak { hkl, direction_deg, d_angstrom } => write!(
                f,
                "{hkl} was found {:.3}° from where this orientation puts it (± {:.3}°), its d {:+.4} Å off (± {:.4} Å).",
                direction_deg.misfit(),
                direction_deg.sigma,
                d_angstrom.misfit(),
                d_angstrom.sigma
            ),
        }
    }
}

/// How many standard uncertainties a misfit is, in words.
fn times(compared: &Compared) -> String {
    let ratio = compared.misfit().abs() / compared.sigma.max(1e-12);
    if ratio < 1000.0 { format!("{ratio:.1} times") } else { "more than 1000 times".to_owned() }
}
