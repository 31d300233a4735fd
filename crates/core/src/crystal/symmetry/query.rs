use std::fmt;

use serde::{Deserialize, Serialize};

/// What a person wrote for the symmetry of the crystal. It becomes a [`super::SpaceGroup`] together with the cell.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub enum SymmetryQuery {
    /// A Hermann–Mauguin symbol, short or full, old or new, with or without spaces: `P21/n`, `P 1 21/n 1`, `Fd-3m:1`.
    SpaceGroup(String),
    /// The number of the space-group type in International Tables A, 1 to 230, in its default setting.
    Number(u16),
    /// A Hall symbol: `-P 2yn`.
    Hall(String),
    /// Only the lattice letter. The group holds the translations and nothing else (point group 1, Laue class -1), so
    /// absences are those of the lattice and the only equivalent of a node is its Friedel mate.
    Centring(Centring),
}

impl fmt::Display for SymmetryQuery {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::SpaceGroup(symbol) => write!(f, "{symbol}"),
            Self::Number(number) => write!(f, "no. {number}"),
            Self::Hall(symbol) => write!(f, "Hall {symbol}"),
            Self::Centring(centring) => write!(f, "{} lattice", centring.letter()),
        }
    }
}

/// The lattice letter of a cell.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Serialize, Deserialize)]
pub enum Centring {
    /// Primitive.
    P,
    /// Centred on the face across a.
    A,
    /// Centred on the face across b.
    B,
    /// Centred on the face across c.
    C,
    /// Centred in the body.
    I,
    /// Centred on all faces.
    F,
    /// Rhombohedral lattice on hexagonal axes, obverse: −h + k + l = 3n. On rhombohedral axes the cell is primitive.
    R,
}

impl Centring {
    /// Every lattice letter.
    pub const ALL: [Self; 7] = [Self::P, Self::A, Self::B, Self::C, Self::I, Self::F, Self::R];

    /// The letter.
    pub fn letter(self) -> char {
        match self {
            Self::P => 'P',
            Self::A => 'A',
            Self::B => 'B',
            Self::C => 'C',
            Self::I => 'I',
            Self::F => 'F',
            Self::R => 'R',
        }
    }

    /// How many lattice points one cell holds.
    pub fn points(self) -> usize {
        match self {
            Self::P => 1,
            Self::A | Self::B | Self::C | Self::I => 2,
            Self::R => 3,
            Self::F => 4,
        }
    }

    pub(super) fn from_library(letter: moyo::data::Centering) -> Self {
        use moyo::data::Centering as Library;
        match letter {
            Library::P => Self::P,
            Library::A => Self::A,
            Library::B => Self::B,
            Library::C => Self::C,
            Library::I => Self::I,
            Library::F => Self::F,
            Library::R => Self::R,
        }
    }
}
