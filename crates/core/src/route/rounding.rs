use super::clock::{AxisClock, Place};

/// Decimals of the angles in a list, in degrees: 0.0001° is finer than any goniometer's encoder (common practice, no
/// source).
pub const DECIMALS: i32 = 4;

/// A reading rounded to the decimals of a list, without a negative zero.
pub(super) fn rounded(deg: f64) -> f64 {
    let factor = 10f64.powi(DECIMALS);
    (deg * factor).round() / factor + 0.0
}

/// Where the axis can stand for a reading, rounded. A reading that lies at a limit of more decimals than the list has is
/// rounded towards the inside, never over the limit; it moves by less than one unit of the last decimal.
pub(super) fn place_rounded(axis: &AxisClock, reading_deg: f64) -> Option<Place> {
    let nearest = rounded(reading_deg);
    let unit = 10f64.powi(-DECIMALS);
    let other = rounded(if nearest > reading_deg { nearest - unit } else { nearest + unit });
    axis.place(nearest).or_else(|| axis.place(other))
}
