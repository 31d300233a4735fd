//! What is wanted: ranges of spacing or 2θ, or a list of nodes, as the columns that [`crate::reach`] judges.
//!
//! A range skips nodes that symmetry makes absent unless told otherwise; a list never skips any.

use crate::crystal::{AbsentNodes, DRange, NodesError, NodesOutcome, Presence, SpaceGroup, UnitCell, nodes};
use crate::frames::Hkl;
use crate::pace::Pace;
use crate::quantity::{Length, QuantityError};
use crate::reach::{Stopped, Wanted};

/// Why the wanted reflections could not be listed.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum TargetsError {
    /// Whoever waited said no.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// The range holds no spacings, or too many nodes.
    #[error(transparent)]
    Nodes(#[from] NodesError),
    /// The end of a 2θ range stands for no spacing that this program takes.
    #[error("2θ up to {max_deg}° at {wavelength_angstrom:.5} Å reaches down to d = {d_angstrom:.5} Å: {reason}")]
    TwoTheta {
        /// Largest 2θ in degrees.
        max_deg: f64,
        /// Wavelength in Å.
        wavelength_angstrom: f64,
        /// The spacing that this stands for, in Å.
        d_angstrom: f64,
        /// What would be accepted.
        reason: QuantityError,
    },
}

/// Every node with a spacing in the range, from the largest spacing down.
///
/// # Errors
/// If there are too many, or if `pace` says no.
pub fn by_spacing(
    cell: &UnitCell,
    group: &SpaceGroup,
    range: DRange,
    with_absent: bool,
    pace: &impl Pace,
) -> Result<Wanted, TargetsError> {
    let absent = if with_absent { AbsentNodes::Keep } else { AbsentNodes::Skip };
    let NodesOutcome::Complete(found) = nodes(cell, group, range, absent, pace)? else { return Err(Stopped.into()) };
    Ok(Wanted {
        hkl: found.hkl.into_iter().map(Hkl::from).collect(),
        absent: found.presence.into_iter().map(operation).collect(),
    })
}

/// Every node that diffracts with 2θ in a range of degrees (0 to 180, the smaller first), from the smallest 2θ up.
///
/// # Errors
/// If there are too many, or if `pace` says no.
pub fn by_two_theta(
    cell: &UnitCell,
    group: &SpaceGroup,
    wavelength_angstrom: f64,
    [min_deg, max_deg]: [f64; 2],
    with_absent: bool,
    pace: &impl Pace,
) -> Result<Wanted, TargetsError> {
    let spacing = |two_theta_deg: f64| 0.5 * wavelength_angstrom / (0.5 * two_theta_deg).to_radians().sin();
    let d_min = spacing(max_deg);
    if let Err(reason) = Length::new(d_min) {
        return Err(TargetsError::TwoTheta { max_deg, wavelength_angstrom, d_angstrom: d_min, reason });
    }
    let d_max = if min_deg > 0.0 { spacing(min_deg) } else { f64::INFINITY };
    // A spacing above the largest that a cell may have is no end at all.
    let range = if Length::new(d_max).is_ok() { DRange::new(d_min, d_max)? } else { DRange::down_to(d_min)? };
    by_spacing(cell, group, range, with_absent, pace)
}

/// These nodes, in this order, whatever symmetry says of them.
pub fn listed(group: &SpaceGroup, nodes: impl IntoIterator<Item = Hkl>) -> Wanted {
    let hkl: Vec<Hkl> = nodes.into_iter().collect();
    let absent = hkl.iter().map(|hkl| operation(group.absence(*hkl))).collect();
    Wanted { hkl, absent }
}

fn operation(presence: Presence) -> Option<u16> {
    match presence {
        Presence::Absent { operation } => Some(operation),
        Presence::Allowed | Presence::NotANode => None,
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::crystal::SymmetryQuery;
    use crate::pace::Unhurried;

    fn crystal() -> (UnitCell, SpaceGroup) {
        let cell = UnitCell::new(6.0, 7.0, 8.0, 90.0, 90.0, 90.0).unwrap();
        let group = SpaceGroup::resolve(&SymmetryQuery::SpaceGroup("P 21 21 21".to_owned()), &cell).unwrap();
        (cell, group)
    }

    #[test]
    fn a_two_theta_range_is_the_spacing_range_of_braggs_law() {
        let (cell, group) = crystal();
        let wavelength = 0.71;
        let found = by_two_theta(&cell, &group, wavelength, [10.0, 30.0], true, &Unhurried).unwrap();
        let mut expected = 0;
        for h in -12..=12 {
            for k in -12..=12 {
                for l in -12..=12 {
                    let hkl = Hkl::from([h, k, l]);
                    let sin_theta = 0.5 * wavelength / cell.d_spacing(hkl);
                    let two_theta = 2.0 * sin_theta.min(1.0).asin().to_degrees();
                    expected += usize::from([h, k, l] != [0; 3] && (10.0..=30.0).contains(&two_theta));
                }
            }
        }
        assert_eq!(found.hkl.len(), expected);
        let all = by_two_theta(&cell, &group, wavelength, [0.0, 30.0], true, &Unhurried).unwrap();
        assert_eq!(
            all.hkl.len(),
            by_spacing(
                &cell,
                &group,
                DRange::down_to(0.5 * wavelength / 15f64.to_radians().sin()).unwrap(),
                true,
                &Unhurried
            )
            .unwrap()
            .hkl
            .len()
        );
        let refused = by_two_theta(&cell, &group, 0.01, [0.0, 180.0], true, &Unhurried).unwrap_err();
        assert!(refused.to_string().contains("reaches down to d = 0.00500 Å: 0.005 is not a length"), "{refused}");
    }

    /// P 21 21 21: h 0 0, 0 k 0 and 0 0 l with odd indices are absent (International Tables A, group 19).
    #[test]
    fn ranges_skip_absent_nodes_and_lists_do_not() {
        let (cell, group) = crystal();
        let range = DRange::down_to(1.0).unwrap();
        let present = by_spacing(&cell, &group, range, false, &Unhurried).unwrap();
        let all = by_spacing(&cell, &group, range, true, &Unhurried).unwrap();
        assert!(present.absent.iter().all(Option::is_none));
        let odd_on_an_axis = |hkl: &Hkl| {
            let [h, k, l] = hkl.as_integers().unwrap();
            [h, k, l].iter().filter(|i| **i == 0).count() == 2 && (h + k + l) % 2 != 0
        };
        assert_eq!(all.hkl.len() - present.hkl.len(), all.hkl.iter().filter(|hkl| odd_on_an_axis(hkl)).count());
        let chosen = [Hkl::new(1.0, 0.0, 0.0), Hkl::new(0.5, 0.0, 0.0), Hkl::new(1.0, 2.0, 3.0)];
        let list = listed(&group, chosen);
        assert_eq!(list.hkl, chosen);
        assert_eq!(list.absent.iter().map(Option::is_some).collect::<Vec<_>>(), [true, false, false]);
    }
}
