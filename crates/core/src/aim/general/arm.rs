use nalgebra::Vector3;

use super::links::rotation;
use super::scan;
use crate::aim::pair::Pair;
use crate::frames::HalfAngle;
use crate::frames::subproblem::{Dial, opening, turn};

/// How the detector axes come to stand: where Q points follows.
#[derive(Debug, Clone, PartialEq)]
pub enum Arm {
    /// One axis swings what it carries to the angle 2θ from the beam; another may stand still.
    /// Several entries if the other may stand in several places.
    Swing(Vec<Swing>),
    /// Two axes; k_f lies in a plane through the beam that is turned by this many radians about it.
    Plane {
        /// Both axes.
        axes: [Vector3<f64>; 2],
        /// Radians from the x z plane, about +z.
        turned_rad: f64,
    },
    /// Two axes, one a multiple of the other.
    Tied {
        /// Both axes.
        axes: [Vector3<f64>; 2],
        /// angle[tied] = factor × angle[1 − tied] + offset, in radians.
        tied: usize,
        /// See there.
        tie: Multiple,
    },
    /// Two axes that no rule settles follow Q around the beam.
    Follows([Vector3<f64>; 2]),
}

/// One axis that moves, perhaps one that stands still.
#[derive(Debug, Clone, PartialEq)]
pub struct Swing {
    /// The axis that moves.
    pub axis: Vector3<f64>,
    /// What it carries: where k_f points at its angle zero, before an outer axis has turned.
    pub carried: Vector3<f64>,
    /// The beam as seen from it.
    pub beam: Vector3<f64>,
    /// Its position among the detector axes.
    pub position: usize,
    /// The angle in radians of the other one, and the outer axis if that is the one that stands still.
    pub still: Option<(f64, Option<Vector3<f64>>)>,
}

/// angle = factor × other + offset, in radians.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Multiple {
    /// The factor.
    pub factor: f64,
    /// The offset.
    pub offset_rad: f64,
}

/// Denominators that count as rational.
const LARGEST_DENOMINATOR: u32 = 12;

impl Multiple {
    /// The value of the tied angle.
    pub fn of(self, other_rad: f64) -> f64 {
        self.factor * other_rad + self.offset_rad
    }

    /// The same seen from the other axis.
    pub fn inverse(self) -> Self {
        Self { factor: 1.0 / self.factor, offset_rad: -self.offset_rad / self.factor }
    }

    /// Every place of the tied axis for an angle of the other that is known up to full turns.
    pub fn each_turn(self, other_rad: f64) -> impl Iterator<Item = f64> {
        let turns = self.turns() as u32;
        (0..turns).map(move |k| self.of(other_rad + std::f64::consts::TAU * f64::from(k)))
    }

    /// Full turns of the other axis after which both stand as before: the denominator of the factor. 1 for a factor that
    /// is no fraction of small numbers; the other axis is then looked for between −180° and 180° only.
    pub fn turns(self) -> f64 {
        let whole = |q: &u32| (self.factor * f64::from(*q) - (self.factor * f64::from(*q)).round()).abs() < 1e-9;
        f64::from((1..=LARGEST_DENOMINATOR).find(whole).unwrap_or(1))
    }

    /// By how many radians two angles, each up to full turns, violate this.
    pub fn residual(self, angle_rad: f64, other_rad: f64) -> f64 {
        let period = std::f64::consts::TAU / self.turns();
        let off = angle_rad - self.of(other_rad);
        off - period * (off / period).round()
    }

    /// Where to look for the other angle.
    pub fn range(self) -> (f64, f64) {
        let half = std::f64::consts::PI * self.turns();
        (-half - 0.37 * scan::STEP_RAD, half + 0.37 * scan::STEP_RAD)
    }
}

/// A place of the detector.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Place {
    /// Angles of the detector axes in radians.
    pub angles_rad: [f64; 2],
    /// Unit vector to the detector.
    pub k_f: Vector3<f64>,
}

impl Arm {
    /// Every place at 2θ (not for an arm that follows), or by how many radians one misses.
    pub fn each_place(&self, theta: HalfAngle, found: &mut impl FnMut(Result<Place, f64>)) {
        let two_theta = HalfAngle { sin: theta.full_sin(), cos: theta.full_cos() };
        match self {
            Self::Swing(all) => all.iter().for_each(|swing| swing.each_place(two_theta, found)),
            Self::Plane { axes, turned_rad } => {
                let sine = two_theta.full_sin();
                for sign in [1.0, -1.0] {
                    let across = sign * sine;
                    let k_f = Vector3::new(across * turned_rad.cos(), across * turned_rad.sin(), two_theta.full_cos());
                    to_direction(axes, &k_f, found);
                }
            }
            Self::Tied { axes, tied, tie } => {
                let both = |u: f64| if *tied == 0 { [tie.of(u), u] } else { [u, tie.of(u)] };
                let mut any = false;
                let mut look = |u: f64| {
                    let k_f = pointing(axes, both(u));
                    [Some(Ok(HalfAngle::between(&k_f, &Vector3::z()).angle() - two_theta.angle()))]
                };
                let nearest = scan::roots(tie.range(), &mut look, &mut |u, _| {
                    any = true;
                    found(Ok(Place { angles_rad: both(u), k_f: pointing(axes, both(u)) }));
                });
                if !any {
                    found(Err(nearest.0));
                }
            }
            Self::Follows(_) => {}
        }
    }
}

/// Both ways to point two axes in a direction.
pub fn to_direction(axes: &[Vector3<f64>; 2], k_f: &Vector3<f64>, found: &mut impl FnMut(Result<Place, f64>)) {
    match Pair::of(axes[0], axes[1]).angles(&Vector3::z(), k_f) {
        Err(miss) => (0..2).for_each(|_| found(Err(miss))),
        Ok(both) => both.iter().for_each(|way| {
            let angles_rad = way.angles_rad;
            found(Ok(Place { angles_rad, k_f: pointing(axes, angles_rad) }));
        }),
    }
}

fn pointing(axes: &[Vector3<f64>; 2], angles_rad: [f64; 2]) -> Vector3<f64> {
    rotation(&axes[0], angles_rad[0]) * (rotation(&axes[1], angles_rad[1]) * Vector3::z())
}

impl Swing {
    fn each_place(&self, two_theta: HalfAngle, found: &mut impl FnMut(Result<Place, f64>)) {
        let about = Dial::new(self.axis, &self.beam);
        let (from, arm) = (HalfAngle::between(&self.beam, &self.axis), HalfAngle::between(&self.axis, &self.carried));
        match opening(from, arm, two_theta) {
            Err(miss) => (0..2).for_each(|_| found(Err(miss.by_rad))),
            Ok(open) => {
                let centre = turn(about.across(&self.carried), about.across(&self.beam));
                for side in [1.0, -1.0] {
                    let angle = centre + side * open.angle();
                    let own = rotation(&self.axis, angle) * self.carried;
                    let (mut angles_rad, mut k_f) = ([0.0; 2], own);
                    angles_rad[self.position] = angle;
                    if let Some((still, outer)) = self.still {
                        angles_rad[1 - self.position] = still;
                        if let Some(outer) = outer {
                            k_f = rotation(&outer, still) * own;
                        }
                    }
                    found(Ok(Place { angles_rad, k_f }));
                }
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn places(arm: &Arm, two_theta_deg: f64) -> Vec<Result<Place, f64>> {
        let half = 0.25 * two_theta_deg.to_radians();
        let mut all = Vec::new();
        arm.each_place(HalfAngle { sin: half.sin(), cos: half.cos() }, &mut |place| all.push(place));
        all
    }

    #[test]
    fn every_arm_points_two_theta_from_the_beam() {
        let axes = [Vector3::y(), -Vector3::x()];
        let still = |angle: f64, outer| Some((angle, outer));
        let swing = |swing: Swing| Arm::Swing(vec![swing]);
        let arms = [
            swing(Swing { axis: axes[1], carried: Vector3::z(), beam: Vector3::z(), position: 0, still: None }),
            swing(Swing {
                axis: axes[1],
                carried: Vector3::z(),
                beam: rotation(&axes[0], -0.3) * Vector3::z(),
                position: 1,
                still: still(0.3, Some(axes[0])),
            }),
            swing(Swing {
                axis: axes[0],
                carried: rotation(&axes[1], 0.2) * Vector3::z(),
                beam: Vector3::z(),
                position: 0,
                still: still(0.2, None),
            }),
            Arm::Plane { axes, turned_rad: 0.7 },
            Arm::Tied { axes, tied: 1, tie: Multiple { factor: 0.5, offset_rad: 0.1 } },
        ];
        for arm in &arms {
            let all = places(arm, 40.0);
            assert!(all.iter().flatten().count() >= 2, "{arm:?}");
            for place in all.iter().flatten() {
                assert!((place.k_f.z.acos().to_degrees() - 40.0).abs() < 1e-11, "{arm:?} {place:?}");
                if !matches!(arm, Arm::Swing(all) if all[0].still.is_none()) {
                    assert!((pointing(&axes, place.angles_rad) - place.k_f).norm() < 1e-14);
                }
            }
        }
    }

    #[test]
    fn a_held_axis_beyond_two_theta_misses_by_the_rest() {
        let swing = Swing {
            axis: -Vector3::x(),
            carried: Vector3::z(),
            beam: rotation(&Vector3::y(), -50f64.to_radians()) * Vector3::z(),
            position: 1,
            still: Some((50f64.to_radians(), Some(Vector3::y()))),
        };
        let all = places(&Arm::Swing(vec![swing]), 40.0);
        assert!(all.iter().all(|place| place.is_err_and(|miss| (miss.to_degrees() - 10.0).abs() < 1e-9)));
    }

    #[test]
    fn fractions_have_their_turns() {
        let multiple = |factor| Multiple { factor, offset_rad: 0.0 };
        assert_eq!([2.0, 0.5, 2.0 / 3.0, std::f64::consts::PI].map(|f| multiple(f).turns()), [1.0, 2.0, 3.0, 1.0]);
        assert!(multiple(0.5).residual(std::f64::consts::PI + 0.1, 0.2).abs() < 1e-15);
    }
}
