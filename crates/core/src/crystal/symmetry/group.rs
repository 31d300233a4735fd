use super::absence::AbsenceTest;
use super::constraint::{Constraint, system};
use super::error::SymmetryError;
use super::generate::{self, Operations};
use super::operation::Operation;
use super::query::{Centring, SymmetryQuery};
use super::resolve::{self, Choice};
use super::symbol::Written;
use crate::crystal::{CrystalSystem, UnitCell};

/// A space group in one setting, with its operations.
#[derive(Debug, Clone, PartialEq)]
pub struct SpaceGroup {
    number: u16,
    short: String,
    full: String,
    hall: String,
    setting: String,
    centring: Centring,
    point_group: String,
    laue_class: &'static str,
    operations: Operations,
    pub(super) absences: AbsenceTest,
    notes: Vec<String>,
}

impl SpaceGroup {
    /// The group that a person asked for, in the setting that the symbol names, the cell decides or the defaults give:
    /// unique axis b, cell choice 1, origin choice 2.
    ///
    /// # Errors
    /// If no such group is known, if the symbol names several settings and none is the default, or if the cell breaks the
    /// constraints of the group.
    pub fn resolve(query: &SymmetryQuery, cell: &UnitCell) -> Result<Self, SymmetryError> {
        let choice = match query {
            SymmetryQuery::Centring(centring) => return Self::lattice_only(*centring, cell),
            SymmetryQuery::Number(number) => resolve::by_number(*number, cell),
            SymmetryQuery::Hall(symbol) => resolve::by_hall(symbol, cell),
            SymmetryQuery::SpaceGroup(symbol) => match triclinic(symbol) {
                Some((letter, inversion)) => return Self::centred_triclinic(letter, inversion),
                None => resolve::by_symbol(symbol, cell),
            },
        }?;
        Self::from_choice(choice)
    }

    fn from_choice(Choice { setting, notes }: Choice) -> Result<Self, SymmetryError> {
        let unreadable = || SymmetryError::Library(setting.hall.to_owned());
        let operations = generate::from_hall(setting.hall).ok_or_else(unreadable)?;
        Ok(Self {
            number: setting.number,
            short: setting.short.clone(),
            full: setting.full.clone(),
            hall: setting.hall.to_owned(),
            setting: setting.note(),
            centring: setting.centring,
            laue_class: laue_class(&setting.point_group).ok_or_else(unreadable)?,
            point_group: setting.point_group.clone(),
            absences: AbsenceTest::new(&operations),
            operations,
            notes,
        })
    }

    fn lattice_only(centring: Centring, cell: &UnitCell) -> Result<Self, SymmetryError> {
        let broken = Constraint::HexagonalAxes.broken_by(cell);
        if centring == Centring::R && !broken.is_empty() {
            return Err(SymmetryError::CellBreaksGroup {
                group: "of an R lattice (on rhombohedral axes it is P)".to_owned(),
                needs: Constraint::HexagonalAxes.needs().to_owned(),
                found: broken.join(", "),
                elsewhere: String::new(),
            });
        }
        let mut group = Self::centred_triclinic(centring, false)?;
        "only the lattice letter is known".clone_into(&mut group.setting);
        group.notes.push("no symmetry but the lattice's translations: point group 1, Laue class -1".to_owned());
        Ok(group)
    }

    /// P 1 or P -1 in a centred cell: no tabulated setting, but of type 1 or 2.
    fn centred_triclinic(centring: Centring, inversion: bool) -> Result<Self, SymmetryError> {
        let (hall, point_group) = match (centring.letter(), inversion) {
            (letter, false) => (format!("{letter} 1"), "1"),
            (letter, true) => (format!("-{letter} 1"), "-1"),
        };
        let symbol = format!("{} {point_group}", centring.letter());
        let operations = generate::from_hall(&hall).ok_or_else(|| SymmetryError::Library(hall.clone()))?;
        Ok(Self {
            number: if inversion { 2 } else { 1 },
            short: symbol.clone(),
            full: symbol,
            hall,
            setting: String::new(),
            centring,
            point_group: point_group.to_owned(),
            laue_class: "-1",
            absences: AbsenceTest::new(&operations),
            operations,
            notes: Vec::new(),
        })
    }

    /// The number of the type in International Tables A, 1 to 230.
    pub fn number(&self) -> u16 {
        self.number
    }

    /// The short Hermann–Mauguin symbol of this setting, `P 21/n`. Monoclinic settings whose unique axis is not b keep the
    /// full symbol, because the short one would mean another.
    pub fn short_symbol(&self) -> &str {
        &self.short
    }

    /// The full Hermann–Mauguin symbol of this setting, `P 1 21/n 1`.
    pub fn full_symbol(&self) -> &str {
        &self.full
    }

    /// The Hall symbol: the one that fixes every operation.
    pub fn hall_symbol(&self) -> &str {
        &self.hall
    }

    /// The setting in words, `unique axis b, cell choice 2`; empty where the type has one tabulated setting.
    pub fn setting(&self) -> &str {
        &self.setting
    }

    /// The crystal system.
    pub fn system(&self) -> CrystalSystem {
        system(self.number)
    }

    /// The lattice letter; P for a rhombohedral group on rhombohedral axes.
    pub fn centring(&self) -> Centring {
        self.centring
    }

    /// The point group of the type, `-42m`; for whichever way its axes lie.
    pub fn point_group(&self) -> &str {
        &self.point_group
    }

    /// The Laue class of the type, one of eleven.
    pub fn laue_class(&self) -> &'static str {
        self.laue_class
    }

    /// The number of operations in one cell, centring included.
    pub fn order(&self) -> usize {
        self.operations.all.len()
    }

    /// Every operation of one cell: the identity, the centring translations, then the others.
    pub fn operations(&self) -> &[Operation] {
        &self.operations.all
    }

    /// One operation for each element of the point group; the identity first.
    pub(super) fn representatives(&self) -> impl Iterator<Item = &Operation> {
        self.operations.all.iter().step_by(self.operations.translations.max(1))
    }

    /// The translations of the lattice within one cell, the identity included.
    pub fn lattice_translations(&self) -> &[Operation] {
        self.operations.all.get(..self.operations.translations).unwrap_or_default()
    }

    /// What was decided by default or by the cell, in words.
    pub fn notes(&self) -> &[String] {
        &self.notes
    }
}

/// `P 21/n (14), unique axis b, cell choice 2`.
impl std::fmt::Display for SpaceGroup {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{} ({})", self.short, self.number)?;
        if self.setting.is_empty() { Ok(()) } else { write!(f, ", {}", self.setting) }
    }
}

/// `I -1`, `F 1` and their like: triclinic groups in centred cells, which the tables leave out but the trade uses.
fn triclinic(symbol: &str) -> Option<(Centring, bool)> {
    let compact = Written::new(symbol).compact().to_uppercase();
    let mut chars = compact.chars();
    let letter = chars.next()?;
    let centring =
        Centring::ALL.into_iter().find(|c| c.letter() == letter && !matches!(c, Centring::P | Centring::R))?;
    match chars.as_str() {
        "1" => Some((centring, false)),
        "-1" => Some((centring, true)),
        _ => None,
    }
}

/// The Laue class of a point group (International Tables A, table 3.2.1.2).
fn laue_class(point_group: &str) -> Option<&'static str> {
    Some(match point_group {
        "1" | "-1" => "-1",
        "2" | "m" | "2/m" => "2/m",
        "222" | "mm2" | "mmm" => "mmm",
        "4" | "-4" | "4/m" => "4/m",
        "422" | "4mm" | "-42m" | "4/mmm" => "4/mmm",
        "3" | "-3" => "-3",
        "32" | "3m" | "-3m" => "-3m",
        "6" | "-6" | "6/m" => "6/m",
        "622" | "6mm" | "-6m2" | "6/mmm" => "6/mmm",
        "23" | "m-3" => "m-3",
        "432" | "-43m" | "m-3m" => "m-3m",
        _ => return None,
    })
}
