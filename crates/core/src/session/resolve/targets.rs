use std::f64::consts::PI;

use super::super::problem::FieldProblem;
use super::super::{Session, Targets};
use super::Note;
use crate::crystal::UnitCell;

/// A range that holds more nodes than this is turned away: their table would not fit into the memory of a small computer.
pub const MOST_NODES: f64 = 2.0e7;

impl Session {
    /// Ranges the wrong way round, ranges that hold too many nodes of this cell, and listed nodes that are none.
    pub fn check_targets(&self, cell: Option<&UnitCell>) -> Vec<FieldProblem> {
        let mut problems = Vec::new();
        match &self.targets {
            Targets::SpacingRange { min_angstrom, max_angstrom, .. } => {
                if let Some(max) = max_angstrom
                    && max < min_angstrom
                {
                    let (min, max) = (min_angstrom.get(), max.get());
                    let message =
                        format!("the range {min} Å to {max} Å is the wrong way round; accepted is at least {min}");
                    problems.push(FieldProblem::new("targets.SpacingRange.max_angstrom", message));
                }
            }
            Targets::TwoThetaRange { min_deg, max_deg, .. } => {
                let min = min_deg.map_or(0.0, |min| min.get());
                let max = max_deg.get();
                if !(0.0..180.0).contains(&min) {
                    let message = format!("{min}° is no 2θ to begin with; accepted is 0 and above, below 180");
                    problems.push(FieldProblem::new("targets.TwoThetaRange.min_deg", message));
                }
                if !(max > 0.0 && max <= 180.0) {
                    let message = format!("{max}° is no 2θ to end with; accepted is above 0, at most 180");
                    problems.push(FieldProblem::new("targets.TwoThetaRange.max_deg", message));
                } else if max < min {
                    let message =
                        format!("the range {min}° to {max}° is the wrong way round; accepted is at least {min}");
                    problems.push(FieldProblem::new("targets.TwoThetaRange.max_deg", message));
                }
            }
            Targets::List(nodes) => {
                let origin = |(_, node): &(usize, &super::super::TargetNode)| {
                    [node.h, node.k, node.l].iter().all(|index| index.get() == 0.0)
                };
                problems.extend(nodes.iter().enumerate().filter(origin).map(|(i, _)| {
                    let message = "0 0 0 is the direct beam; accepted are indices that are not all 0";
                    FieldProblem::new(format!("targets.List[{i}]"), message)
                }));
            }
        }
        if problems.is_empty()
            && let Some(cell) = cell
        {
            problems.extend(self.too_many(cell));
        }
        problems
    }

    /// There is one node in each 1/V of reciprocal space.
    fn too_many(&self, cell: &UnitCell) -> Option<FieldProblem> {
        let (path, inner, outer) = self.shell()?;
        let nodes = 4.0 / 3.0 * PI * (outer.powi(3) - inner.powi(3)) * cell.volume();
        (nodes > MOST_NODES).then(|| {
            let message =
                format!("the range holds about {nodes:.1e} nodes of this cell; accepted are at most {MOST_NODES:.0e}");
            FieldProblem::new(path, message)
        })
    }

    /// The path of the end that reaches farther out, and the radii of the range, 1/d in Å⁻¹; nothing for a list.
    fn shell(&self) -> Option<(&'static str, f64, f64)> {
        let of_two_theta = |deg: f64| 2.0 * (deg / 2.0).to_radians().sin() / self.radiation.wavelength_angstrom();
        match &self.targets {
            Targets::SpacingRange { min_angstrom, max_angstrom, .. } => {
                let inner = max_angstrom.map_or(0.0, |max| 1.0 / max.get());
                Some(("targets.SpacingRange.min_angstrom", inner, 1.0 / min_angstrom.get()))
            }
            Targets::TwoThetaRange { min_deg, max_deg, .. } => {
                let inner = min_deg.map_or(0.0, |min| of_two_theta(min.get()));
                Some(("targets.TwoThetaRange.max_deg", inner, of_two_theta(max_deg.get())))
            }
            Targets::List(_) => None,
        }
    }

    pub(super) fn target_notes(&self) -> Vec<Note> {
        let half = self.radiation.wavelength_angstrom() / 2.0;
        match &self.targets {
            Targets::SpacingRange { min_angstrom, .. } if min_angstrom.get() < half => vec![Note::new(
                "targets.SpacingRange.min_angstrom",
                format!("at this wavelength no node with d below λ/2 = {half:.5} Å diffracts"),
            )],
            Targets::List(nodes) if nodes.is_empty() => {
                vec![Note::new("targets.List", "the list is empty: no reflection is wanted")]
            }
            _ => Vec::new(),
        }
    }
}
