/// The most axes a machine may have, sample and detector together.
pub const MAX_AXES: usize = 8;

/// One dial reading in degrees for every axis of a machine: sample axes from the base to the crystal, then detector
/// axes from the base to the detector. A plain value without a heap, because there are millions of them.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Setting {
    readings_deg: [f64; MAX_AXES],
    len: u8,
}

impl Setting {
    /// A setting with these readings in degrees; those beyond [`MAX_AXES`] are left out (no machine has them).
    pub fn new(readings_deg: &[f64]) -> Self {
        let len = readings_deg.len().min(MAX_AXES);
        let mut own = [0.0; MAX_AXES];
        own[..len].copy_from_slice(&readings_deg[..len]);
        Self { readings_deg: own, len: len as u8 }
    }

    /// A setting of the first `len` of these readings in degrees.
    #[inline]
    pub(crate) fn from_array(readings_deg: [f64; MAX_AXES], len: usize) -> Self {
        Self { readings_deg, len: len.min(MAX_AXES) as u8 }
    }

    /// The readings in degrees.
    #[inline]
    pub fn readings_deg(&self) -> &[f64] {
        &self.readings_deg[..usize::from(self.len)]
    }

    /// The same setting with every reading rounded to `decimals` places, and no negative zero.
    pub fn rounded(&self, decimals: i32) -> Self {
        let factor = 10f64.powi(decimals);
        let mut own = *self;
        for reading in &mut own.readings_deg {
            *reading = (*reading * factor).round() / factor + 0.0;
        }
        own
    }
}
