//! The 530 tabulated settings, with every spelling each is known by.

use std::sync::OnceLock;

use moyo::data::{arithmetic_crystal_class_entry, hall_symbol_entry};

use super::constraint::{Constraint, system};
use super::query::Centring;
use super::symbol::Spelling;
use crate::crystal::CrystalSystem;

/// One setting of one space-group type.
#[derive(Debug)]
pub(super) struct Setting {
    pub(super) number: u16,
    pub(super) hall: &'static str,
    /// The library's mark: `b1`, `-c2`, `cab`, `2`, `1cab`, `H`, `R` or nothing.
    pub(super) mark: &'static str,
    pub(super) full: String,
    pub(super) short: String,
    pub(super) centring: Centring,
    pub(super) point_group: String,
    pub(super) constraint: Constraint,
    pub(super) spellings: Vec<Spelling>,
}

/// All of them in the order of International Tables A.
pub(super) fn all() -> &'static [Setting] {
    static ALL: OnceLock<Vec<Setting>> = OnceLock::new();
    ALL.get_or_init(|| (1..=530).filter_map(from_library).collect())
}

fn from_library(hall_number: i32) -> Option<Setting> {
    let entry = hall_symbol_entry(hall_number)?;
    let number = u16::try_from(entry.number).ok()?;
    let class = arithmetic_crystal_class_entry(entry.arithmetic_number)?;
    let full = as_in_tables(number, &entry.hm_full.replace('_', ""));
    let derived = derived_short(number, &full);
    let constraint = Constraint::of(number, entry.setting);
    // `P 21/n` says unique axis b; for the other axes only the full symbol says which.
    let short = match constraint {
        Constraint::MonoclinicA | Constraint::MonoclinicC => full.clone(),
        _ => derived.clone(),
    };
    let mut spellings = vec![Spelling::new(&full), Spelling::new(&derived)];
    if let Some(letter) = letter_before_e(number, entry.setting) {
        for newer in [&full, &derived] {
            spellings.push(Spelling::new(&newer.replace('e', letter)));
        }
    }
    if matches!(number, 200..=206 | 221..=230) {
        for newer in [&full, &derived] {
            spellings.push(Spelling::new(&newer.replace("-3", "3")));
        }
    }
    spellings.dedup();
    Some(Setting {
        number,
        hall: entry.hall_symbol,
        mark: entry.setting,
        centring: Centring::from_library(entry.centering),
        point_group: class.geometric_crystal_class.to_string(),
        constraint,
        full,
        short,
        spellings,
    })
}

/// The library's full symbols are those of International Tables A but for a few, where it drops screw axes or a `2/`.
fn as_in_tables(number: u16, full: &str) -> String {
    match (number, full) {
        (73 | 74, _) => full.replace(" 2/", " 21/"),
        (127, "P 4/m 21/b m") => "P 4/m 21/b 2/m".to_owned(),
        (128, "P 4/m 21/n c") => "P 4/m 21/n 2/c".to_owned(),
        (129, "P 4/n 21/m m") => "P 4/n 21/m 2/m".to_owned(),
        (130, "P 4/n 21/c c") => "P 4/n 21/c 2/c".to_owned(),
        _ => full.to_owned(),
    }
}

/// The short symbol, by the rules of International Tables A: monoclinic symbols lose their ones; a plane hides the twofold
/// axis across it except where the symbol's first place holds the main axis of order 4 or 6 (or 2 in `2/m`).
fn derived_short(number: u16, full: &str) -> String {
    let hide_axis = |token: &str| token.split_once('/').map_or_else(|| token.to_owned(), |(_, plane)| plane.to_owned());
    let mut tokens = full.split_whitespace().map(str::to_owned).collect::<Vec<_>>();
    match system(number) {
        CrystalSystem::Triclinic => {}
        CrystalSystem::Monoclinic => tokens.retain(|t| t != "1"),
        CrystalSystem::Orthorhombic | CrystalSystem::Cubic => tokens.iter_mut().for_each(|t| *t = hide_axis(t)),
        CrystalSystem::Tetragonal | CrystalSystem::Trigonal | CrystalSystem::Hexagonal => {
            tokens.iter_mut().skip(2).for_each(|t| *t = hide_axis(t));
        }
    }
    tokens.join(" ")
}

/// The letter that stood where the renamed groups have `e`, until the fourth edition of International Tables A (1995;
/// de Wolff et al. 1992, Acta Cryst. A48, 727): `Cmca` is `Cmce`. Letters of the six axis orders from memory.
fn letter_before_e(number: u16, mark: &str) -> Option<&'static str> {
    let axes = mark.trim_start_matches(['1', '2']);
    let place = ["", "ba-c", "cab", "-cba", "bca", "a-cb"].iter().position(|order| *order == axes)?;
    match number {
        39 | 41 => ["b", "a", "c", "b", "a", "c"].get(place).copied(),
        64 | 67 | 68 => ["a", "b", "b", "c", "c", "a"].get(place).copied(),
        _ => None,
    }
}

impl Setting {
    /// The unique axis of a monoclinic setting.
    pub(super) fn unique_axis(&self) -> Option<char> {
        match self.constraint {
            Constraint::MonoclinicA => Some('a'),
            Constraint::MonoclinicB => Some('b'),
            Constraint::MonoclinicC => Some('c'),
            _ => None,
        }
    }

    /// 1 or 2 where both origins are tabulated.
    pub(super) fn origin(&self) -> Option<char> {
        self.mark.chars().next().filter(|c| self.unique_axis().is_none() && matches!(c, '1' | '2'))
    }

    /// `cab` and the like, where the axes are not those of the standard setting.
    fn axis_order(&self) -> &str {
        match system(self.number) {
            CrystalSystem::Orthorhombic => self.mark.trim_start_matches(['1', '2']),
            _ => "",
        }
    }

    /// In words: `unique axis b, cell choice 1`, `origin choice 2`, `hexagonal axes`.
    pub(super) fn note(&self) -> String {
        let mut parts = Vec::new();
        if let Some(axis) = self.unique_axis() {
            parts.push(format!("unique axis {axis}"));
            parts.extend(self.mark.chars().find(char::is_ascii_digit).map(|choice| format!("cell choice {choice}")));
            if self.mark.starts_with('-') {
                parts.push("the other two axes exchanged".to_owned());
            }
        }
        if !self.axis_order().is_empty() {
            parts.push(format!("axes {}", self.axis_order()));
        }
        parts.extend(self.origin().map(|origin| format!("origin choice {origin}")));
        match self.mark {
            "H" => parts.push("hexagonal axes".to_owned()),
            "R" => parts.push("rhombohedral axes".to_owned()),
            _ => {}
        }
        parts.join(", ")
    }

    /// `P 1 21/n 1 (unique axis b, cell choice 2)`.
    pub(super) fn title(&self) -> String {
        let note = self.note();
        if note.is_empty() { self.full.clone() } else { format!("{} ({note})", self.full) }
    }

    /// Smaller comes first when nothing else decides: unique axis b, no exchange, cell choice 1, standard axes, origin 2.
    pub(super) fn rank(&self) -> impl Ord + use<> {
        (
            self.unique_axis().is_some_and(|axis| axis != 'b'),
            self.unique_axis().is_some() && self.mark.starts_with('-'),
            self.unique_axis().and_then(|_| self.mark.chars().find(char::is_ascii_digit)),
            !self.axis_order().is_empty(),
            self.origin() == Some('1'),
        )
    }

    /// Whether `suffix`, in lower case, as in `Fd-3m:1`, `R-3:H`, `P21/n:c2`, means this setting.
    pub(super) fn answers_to(&self, suffix: &str) -> bool {
        let mark = self.mark.to_lowercase();
        mark == suffix
            || self.origin().is_some_and(|origin| suffix.chars().eq([origin]))
            || self.unique_axis().is_some_and(|axis| suffix.chars().eq([axis]))
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn every_setting_is_read() {
        assert_eq!(all().len(), 530);
        let numbers: std::collections::BTreeSet<u16> = all().iter().map(|s| s.number).collect();
        assert!(numbers.into_iter().eq(1..=230));
    }

    #[test]
    fn one_spelling_belongs_to_one_type() {
        for one in all() {
            for other in all().iter().filter(|other| other.number != one.number) {
                for spelling in &one.spellings {
                    let shared = other.spellings.iter().any(|s| s.compact() == spelling.compact());
                    assert!(!shared, "{} names {} and {}", spelling.pretty(), one.number, other.number);
                }
            }
        }
    }

    /// The library's short symbols, where they are not those of the type as a whole: all but the monoclinic. One of them
    /// (no. 68, axes bca, origin 2) still has the old letter there.
    #[test]
    fn derived_short_symbols_agree_with_the_tabulated() {
        let mut odd = Vec::new();
        for (setting, i) in all().iter().zip(1..) {
            let tabulated = hall_symbol_entry(i).unwrap().hm_short.replace('_', "");
            if setting.unique_axis().is_none() && setting.short != tabulated {
                odd.push((i, tabulated));
            }
        }
        assert_eq!(odd, vec![(331, "B b c b".to_owned())]);
    }
}
