use crate::aim::OutsideSphere;
use crate::instrument::Instrument;

/// Whether a reflection or a setting can be measured, and if not why: the reason is a value, not a text.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Verdict {
    /// It can.
    Reachable,
    /// The node lies outside the sphere of radius 2/λ.
    OutsideSphere {
        /// The longest wavelength that would reach it, 2d, in Å.
        longest_wavelength_angstrom: f64,
    },
    /// 2θ is so small that the detector would stand in the cone about the direct beam.
    InDirectBeam {
        /// By how many degrees.
        by_deg: f64,
    },
    /// The axes cannot turn the crystal or the detector that far.
    CannotMake {
        /// By how many degrees they miss.
        by_deg: f64,
    },
    /// An axis would pass its limit.
    OverLimit {
        /// Which, as a position among all axes.
        axis: u8,
        /// By how many degrees.
        by_deg: f64,
    },
}

impl Verdict {
    /// Every kind of verdict by the word that tables carry.
    pub const WORDS: [&str; 5] = ["reachable", "outside_sphere", "direct_beam", "cannot_make", "over_limit"];

    /// Whether it can be measured.
    pub fn is_reachable(self) -> bool {
        matches!(self, Self::Reachable)
    }

    /// The position of its kind in [`Self::WORDS`].
    pub fn kind(self) -> usize {
        match self {
            Self::Reachable => 0,
            Self::OutsideSphere { .. } => 1,
            Self::InDirectBeam { .. } => 2,
            Self::CannotMake { .. } => 3,
            Self::OverLimit { .. } => 4,
        }
    }

    /// The word that tables carry.
    pub fn word(self) -> &'static str {
        Self::WORDS[self.kind()]
    }

    /// The reason in a few words with its figure; empty if it can be measured.
    pub fn detail(self, instrument: &Instrument) -> String {
        match self {
            Self::Reachable => String::new(),
            Self::OutsideSphere { longest_wavelength_angstrom } => {
                format!("needs a wavelength of at most {longest_wavelength_angstrom:.4} Å")
            }
            Self::InDirectBeam { by_deg } => format!("detector inside the direct-beam cone by {by_deg:.3}°"),
            Self::CannotMake { by_deg } => format!("the axes cannot make the angle; they miss by {by_deg:.3}°"),
            Self::OverLimit { axis, by_deg } => {
                let name = instrument.axes().nth(usize::from(axis)).map_or("?", |axis| axis.name.as_str());
                format!("{name} over its limit by {by_deg:.3}°")
            }
        }
    }

    /// Degrees by which a setting misses; nothing where degrees are not the measure.
    pub fn miss_deg(self) -> Option<f64> {
        match self {
            Self::Reachable | Self::OutsideSphere { .. } => None,
            Self::InDirectBeam { by_deg } | Self::CannotMake { by_deg } | Self::OverLimit { by_deg, .. } => {
                Some(by_deg)
            }
        }
    }
}

impl From<OutsideSphere> for Verdict {
    fn from(outside: OutsideSphere) -> Self {
        Self::OutsideSphere { longest_wavelength_angstrom: outside.longest_wavelength_angstrom }
    }
}
