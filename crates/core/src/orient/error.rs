use crate::frames::Hkl;

/// Why peaks give no orientation.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum OrientError {
    /// One peak leaves the turn about it free; none leaves everything.
    #[error("{given} usable peak(s) given; accepted are at least two that are not parallel")]
    TooFewPeaks {
        /// How many there are.
        given: usize,
    },
    /// Readings of another machine.
    #[error("peak {hkl} has {given} axis readings, the machine {axes} axes; accepted is one reading for each axis")]
    Readings {
        /// The peak.
        hkl: Hkl,
        /// Its readings.
        given: usize,
        /// The machine's axes.
        axes: usize,
    },
    /// The detector stood in the direct beam, so that Q has no direction.
    #[error(
        "peak {hkl} was read at 2θ = {two_theta_deg:.4}°, in the direct beam, where Q has no direction; accepted is 2θ above {smallest_deg}°"
    )]
    DirectBeam {
        /// The peak.
        hkl: Hkl,
        /// 2θ of its reading in degrees.
        two_theta_deg: f64,
        /// The smallest that is accepted, in degrees.
        smallest_deg: f64,
    },
    /// Indices beyond the sphere of radius 2/λ.
    #[error(
        "peak {hkl} cannot diffract: its d = {d_angstrom:.5} Å is below half of the wavelength {wavelength_angstrom:.7} Å; accepted are wavelengths up to {longest_wavelength_angstrom:.5} Å, or other indices"
    )]
    CannotDiffract {
        /// The peak.
        hkl: Hkl,
        /// Its d in Å.
        d_angstrom: f64,
        /// The wavelength in Å.
        wavelength_angstrom: f64,
        /// 2d, in Å.
        longest_wavelength_angstrom: f64,
    },
    /// Indices along one line.
    #[error(
        "peaks {first} and {second} are {}: by their indices they enclose {angle_deg:.3}°, so the turn about them stays unknown; accepted are {limit_deg}° to {}°",
        line(*angle_deg), 180.0 - limit_deg
    )]
    ParallelIndices {
        /// The first peak.
        first: Hkl,
        /// The second peak.
        second: Hkl,
        /// The angle between them as calculated from cell and indices, in degrees.
        angle_deg: f64,
        /// How far from one line they must be, in degrees.
        limit_deg: f64,
    },
    /// Readings along one line.
    #[error(
        "peaks {first} and {second} were read {}: their readings enclose {angle_deg:.3}°, so the turn about them stays unknown; accepted are {limit_deg}° to {}°",
        line(*angle_deg), 180.0 - limit_deg
    )]
    ParallelReadings {
        /// The first peak.
        first: Hkl,
        /// The second peak.
        second: Hkl,
        /// The observed angle between them, in degrees.
        angle_deg: f64,
        /// How far from one line they must be, in degrees.
        limit_deg: f64,
    },
}

fn line(angle_deg: f64) -> &'static str {
    if angle_deg < 90.0 { "parallel" } else { "antiparallel" }
}
