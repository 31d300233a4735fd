use nalgebra::{Matrix3, Rotation3, Vector3};

use crate::instrument::Instrument;

/// The moving sample axes after every other one is folded in: R = A₁(t₁) … Aₖ(tₖ) M.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Chain {
    /// Position of each moving axis among all axes of the machine.
    pub indices: Vec<usize>,
    /// Its zero offset in degrees.
    pub zero_deg: Vec<f64>,
    /// Its direction with the held axes outside it at their readings, in the lab frame.
    pub directions: Vec<Vector3<f64>>,
    /// M: takes the head frame to where the moving axes see it.
    pub held: Matrix3<f64>,
}

impl Chain {
    /// `held_deg` gives the reading of each sample axis that does not move.
    pub fn new(instrument: &Instrument, held_deg: &[Option<f64>]) -> Self {
        let mut outer = Rotation3::identity();
        let (mut indices, mut zero_deg, mut directions) = (Vec::new(), Vec::new(), Vec::new());
        for (i, axis) in instrument.sample_axes().iter().enumerate() {
            match held_deg.get(i).copied().flatten() {
                Some(reading) => outer *= Rotation3::from_axis_angle(&axis.direction, axis.angle_rad(reading)),
                None => {
                    indices.push(i);
                    zero_deg.push(axis.zero_offset_deg);
                    directions.push(outer * axis.direction.into_inner());
                }
            }
        }
        Self { indices, zero_deg, directions, held: outer.into_inner() }
    }
}
