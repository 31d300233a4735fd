use nalgebra::{Matrix3, Vector3};

use crate::frames::HalfAngle;
use crate::frames::subproblem::CLOSING_TOLERANCE_RAD;

/// Below this sine a reference counts as parallel to Q, and a beam as reflected straight back.
const NO_AZIMUTH: f64 = 1e-9;

/// Where Q has to go, and how the beams stand there.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Goal {
    /// Unit vector along Q in the lab.
    pub q: Vector3<f64>,
    /// Unit vector along k_i + k_f, perpendicular to Q; nothing at 2θ = 180°.
    pub t: Option<Vector3<f64>>,
    /// θ.
    pub theta: HalfAngle,
}

impl Goal {
    /// For a unit vector along k_f in the lab, and θ.
    pub fn new(k_f: &Vector3<f64>, theta: HalfAngle) -> Self {
        // Both are exact also where the other is short, because the sum is taken before the division.
        let (difference, sum) = (k_f - Vector3::z(), k_f + Vector3::z());
        let t = (sum.norm() > 2.0 * NO_AZIMUTH).then(|| sum.normalize());
        Self { q: difference.normalize(), t, theta }
    }
}

/// Why a reflection has no azimuth.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum NoAzimuth {
    /// The reference direction is parallel to Q.
    ReferenceAlongQ,
    /// 2θ is 180°: the beams lie along one line.
    StraightBack,
}

/// A condition that settles the azimuth ψ.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Twist {
    /// ψ itself, in radians.
    Azimuth(f64),
    /// The angle α_i of the incident beam to the surface, in radians.
    Incidence(f64),
    /// The angle α_f of the diffracted beam to the surface, in radians.
    Exit(f64),
    /// α_i = α_f.
    Equal,
}

/// Up to two azimuths in radians.
pub type Azimuths = Result<[f64; 2], f64>;

/// A reflection's direction and a reference, both unit vectors carried by the crystal.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Carried {
    /// Along Q.
    pub q: Vector3<f64>,
    /// The reference direction.
    pub n: Option<Vector3<f64>>,
}

impl Carried {
    /// The same seen after a rotation.
    pub fn turned(&self, by: &Matrix3<f64>) -> Self {
        Self { q: by * self.q, n: self.n.map(|n| by * n) }
    }

    /// The rotation that brings Q to the goal and the reference to azimuth ψ.
    ///
    /// # Errors
    /// If the reflection has no azimuth.
    pub fn rotation_at(&self, goal: &Goal, psi_rad: f64) -> Result<Matrix3<f64>, NoAzimuth> {
        let t = goal.t.ok_or(NoAzimuth::StraightBack)?;
        let n = self.n.ok_or(NoAzimuth::ReferenceAlongQ)?;
        let across = n - self.q * self.q.dot(&n);
        if across.norm() < NO_AZIMUTH {
            return Err(NoAzimuth::ReferenceAlongQ);
        }
        // Once more against Q: near a parallel reference the first difference has lost digits.
        let p = across.normalize();
        let p = (p - self.q * self.q.dot(&p)).normalize();
        let (sin, cos) = psi_rad.sin_cos();
        let p_lab = t * cos + goal.q.cross(&t) * sin;
        let from = Matrix3::from_columns(&[self.q, p, self.q.cross(&p)]);
        let to = Matrix3::from_columns(&[goal.q, p_lab, goal.q.cross(&p_lab)]);
        Ok(to * from.transpose())
    }

    /// The azimuth in radians of the reference when a rotation has brought Q to the goal.
    ///
    /// # Errors
    /// If the reflection has no azimuth.
    pub fn azimuth_of(&self, goal: &Goal, lab_from_here: &Matrix3<f64>) -> Result<f64, NoAzimuth> {
        let t = goal.t.ok_or(NoAzimuth::StraightBack)?;
        let n = lab_from_here * self.n.ok_or(NoAzimuth::ReferenceAlongQ)?;
        let (along, across) = (t.dot(&n), goal.q.cross(&t).dot(&n));
        if along.hypot(across) < NO_AZIMUTH {
            return Err(NoAzimuth::ReferenceAlongQ);
        }
        Ok(across.atan2(along))
    }

    /// The azimuths that a condition wants, in radians; twice the same where they meet.
    ///
    /// # Errors
    /// If the reflection has no azimuth, or (inside) by how many radians the condition is out of reach.
    pub fn azimuths(&self, goal: &Goal, twist: Twist) -> Result<Azimuths, NoAzimuth> {
        if goal.t.is_none() {
            return Err(NoAzimuth::StraightBack);
        }
        let n = self.n.ok_or(NoAzimuth::ReferenceAlongQ)?;
        let tau = HalfAngle::between(&n, &self.q);
        if tau.full_sin() < NO_AZIMUTH {
            return Err(NoAzimuth::ReferenceAlongQ);
        }
        let quarter = std::f64::consts::FRAC_PI_2;
        Ok(match twist {
            Twist::Azimuth(psi) => Ok([psi, psi]),
            Twist::Equal => Ok([quarter, -quarter]),
            Twist::Incidence(alpha) => half_azimuth(goal.theta.angle(), tau.angle(), alpha).map(|psi| [psi, -psi]),
            // sin α_f = cos τ sin θ + sin τ cos θ cos ψ: the same a half turn on.
            Twist::Exit(alpha) => half_azimuth(goal.theta.angle(), tau.angle(), alpha)
                .map(|psi| [std::f64::consts::PI - psi, psi - std::f64::consts::PI]),
        })
    }
}

/// ψ from 0 to π with sin α = cos τ sin θ − sin τ cos θ cos ψ (You 1999, J. Appl. Cryst. 32, 614), by half angles so that
/// double roots keep their digits.
///
/// # Errors
/// By how many radians α lies beyond what any azimuth gives.
fn half_azimuth(theta: f64, tau: f64, alpha: f64) -> Result<f64, f64> {
    // α runs from θ − τ at ψ = 0 to θ + τ at ψ = π, each folded at ±90°.
    let near = ((0.5 * (alpha + theta - tau)).cos()) * (0.5 * (alpha - theta + tau)).sin();
    let far = ((0.5 * (alpha + theta + tau)).cos()) * (0.5 * (theta + tau - alpha)).sin();
    if near < 0.0 || far < 0.0 {
        let fold = |angle: f64| angle.sin().asin();
        let (least, most) = (fold(theta - tau), fold(theta + tau));
        let miss = (least - alpha).max(alpha - most).max(0.0);
        if miss > CLOSING_TOLERANCE_RAD {
            return Err(miss);
        }
    }
    Ok(2.0 * near.max(0.0).sqrt().atan2(far.max(0.0).sqrt()))
}
