use super::constraint::{EQUAL_ANGLES_DEG, EQUAL_LENGTHS};

/// Why a symmetry could not be settled.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum SymmetryError {
    /// No spelling of any setting, nor a Hall symbol.
    #[error(transparent)]
    UnknownSymbol(Box<UnknownSymbol>),
    /// A number outside the tables.
    #[error("there is no space group {0}; the types are numbered from 1 to 230")]
    UnknownNumber(u16),
    /// A Hall symbol that generates none of the tabulated settings.
    #[error("{symbol:?} is no Hall symbol of the 530 tabulated settings, like -P 2ybc{nearest}")]
    UnknownHall {
        /// What was written.
        symbol: String,
        /// The nearest symbols, in words; may be empty.
        nearest: String,
    },
    /// What follows the colon names no setting of the symbol before it.
    #[error("{symbol:?}: `:{suffix}` names no setting of it; there is {settings}")]
    UnknownSetting {
        /// What was written.
        symbol: String,
        /// What follows the colon.
        suffix: String,
        /// The settings there are.
        settings: String,
    },
    /// Settings with different operations, none of them the default.
    #[error("{symbol:?} can mean {candidates}, and the cell fits each; write one of these full symbols")]
    Ambiguous {
        /// What was written.
        symbol: String,
        /// The settings it can mean.
        candidates: String,
    },
    /// The cell has not the shape that the group needs.
    #[error(
        "space group {group} needs {needs}; the cell has {found}{elsewhere} (lengths may differ by {EQUAL_LENGTHS:e} of \
         themselves, angles by {EQUAL_ANGLES_DEG}°)"
    )]
    CellBreaksGroup {
        /// Full symbol and number.
        group: String,
        /// The constraint.
        needs: String,
        /// What breaks it.
        found: String,
        /// Settings of the same type that would fit, in words; may be empty.
        elsewhere: String,
    },
    /// A rhombohedral group whose cell is on neither kind of axes.
    #[error(
        "space group {group} needs hexagonal axes ({hexagonal}) or rhombohedral axes ({rhombohedral}); the cell {cell} has \
         neither"
    )]
    NeitherAxes {
        /// Symbol and number.
        group: String,
        /// What hexagonal axes need.
        hexagonal: &'static str,
        /// What rhombohedral axes need.
        rhombohedral: &'static str,
        /// The cell.
        cell: String,
    },
    /// The symmetry library cannot read a symbol of its own tables.
    #[error("the symmetry library cannot read its own Hall symbol {0:?}; this is a defect of the program")]
    Library(String),
}

/// A symbol that was not found, and what comes near.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error(
    "{symbol:?} names no space group; accepted are a number from 1 to 230, a Hermann–Mauguin symbol, short or full \
     (P21/n, P 1 21/n 1), with a setting where one is needed (Fd-3m:1, R-3:H), or a Hall symbol (-P 2yn){nearest}"
)]
pub struct UnknownSymbol {
    /// What was written.
    pub symbol: String,
    /// The nearest symbols, in words; may be empty.
    pub nearest: String,
}
