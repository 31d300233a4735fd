//! From what a person wrote, and the cell, to one setting.

use super::constraint::Constraint;
use super::error::{SymmetryError, UnknownSymbol};
use super::generate;
use super::settings::{self, Setting};
use super::symbol::{Spelling, Written, edit_distance};
use crate::crystal::UnitCell;

/// The setting that was chosen, and what was decided on the way.
pub(super) struct Choice {
    pub(super) setting: &'static Setting,
    pub(super) notes: Vec<String>,
}

/// The default setting of a type, or the one that the cell asks for.
pub(super) fn by_number(number: u16, cell: &UnitCell) -> Result<Choice, SymmetryError> {
    let candidates = settings::all().iter().filter(|s| s.number == number).collect::<Vec<_>>();
    if candidates.is_empty() {
        return Err(SymmetryError::UnknownNumber(number));
    }
    choose(&number.to_string(), &candidates, cell)
}

/// The setting of a Hall symbol, in any spelling that generates a tabulated group.
pub(super) fn by_hall(symbol: &str, cell: &UnitCell) -> Result<Choice, SymmetryError> {
    let candidates = hall_candidates(symbol);
    if candidates.is_empty() {
        return Err(SymmetryError::UnknownHall { symbol: symbol.to_owned(), nearest: nearest_hall(symbol) });
    }
    choose(symbol, &candidates, cell)
}

fn hall_candidates(symbol: &str) -> Vec<&'static Setting> {
    let Some(canonical) = generate::checked(symbol) else { return Vec::new() };
    let same = settings::all().iter().filter(|s| s.hall == canonical).collect::<Vec<_>>();
    if !same.is_empty() {
        return same;
    }
    let Some(group) = generate::from_hall(&canonical) else { return Vec::new() };
    let sorted = group.sorted();
    let generates = |s: &&Setting| generate::from_hall(s.hall).is_some_and(|g| g.sorted() == sorted);
    settings::all().iter().filter(generates).collect()
}

/// The setting of a Hermann–Mauguin symbol; a number or a Hall symbol in its place is understood as well.
pub(super) fn by_symbol(symbol: &str, cell: &UnitCell) -> Result<Choice, SymmetryError> {
    let written = Written::new(symbol);
    let named: Vec<&Setting> = match written.compact().parse::<u16>() {
        Ok(number) if !(1..=230).contains(&number) => return Err(SymmetryError::UnknownNumber(number)),
        Ok(number) => settings::all().iter().filter(|s| s.number == number).collect(),
        Err(_) => {
            settings::all().iter().filter(|s| s.spellings.iter().any(|spelling| written.reads_as(spelling))).collect()
        }
    };
    if named.is_empty() {
        return match hall_candidates(symbol) {
            none if none.is_empty() => Err(SymmetryError::UnknownSymbol(Box::new(UnknownSymbol {
                symbol: symbol.to_owned(),
                nearest: nearest_symbols(&written),
            }))),
            candidates => {
                let mut choice = choose(symbol, &candidates, cell)?;
                choice.notes.insert(0, format!("{symbol} was read as a Hall symbol"));
                Ok(choice)
            }
        };
    }
    let Some(suffix) = &written.suffix else { return choose(symbol, &named, cell) };
    let meant: Vec<&Setting> = named.iter().copied().filter(|s| s.answers_to(suffix)).collect();
    if meant.is_empty() {
        return Err(SymmetryError::UnknownSetting {
            symbol: symbol.to_owned(),
            suffix: suffix.clone(),
            settings: titles(&named),
        });
    }
    choose(symbol, &meant, cell)
}

/// Of the settings that a symbol names: those whose constraint the cell meets, and among them the default.
fn choose(asked: &str, candidates: &[&'static Setting], cell: &UnitCell) -> Result<Choice, SymmetryError> {
    let (mut fitting, others): (Vec<_>, Vec<_>) =
        candidates.iter().copied().partition(|s| s.constraint.is_met_by(cell));
    // Stable: equal ranks stay in the order of the tables.
    fitting.sort_by_key(|s| s.rank());
    let Some((&setting, rest)) = fitting.split_first() else { return Err(misfit(asked, candidates, cell)) };
    let no_default = setting.unique_axis().is_some_and(|axis| axis != 'b')
        && rest.iter().any(|other| other.unique_axis() != setting.unique_axis());
    if no_default || rest.iter().any(|other| other.number != setting.number) {
        return Err(SymmetryError::Ambiguous { symbol: asked.to_owned(), candidates: titles(&fitting) });
    }
    let mut notes = Vec::new();
    let what = setting.note();
    if !others.is_empty() {
        notes.push(format!("{what}: decided by the cell"));
    }
    if !rest.is_empty() {
        let origin_only = rest.iter().all(|s| s.full == setting.full);
        let same = if origin_only { ", which differ in the origin only" } else { "" };
        let what = if what.is_empty() { "the standard axes" } else { &what };
        notes.push(format!("{what}: taken by default; also possible: {}{same}", titles(rest)));
    }
    Ok(Choice { setting, notes })
}

/// Why no candidate fits the cell.
fn misfit(asked: &str, candidates: &[&'static Setting], cell: &UnitCell) -> SymmetryError {
    let mut ranked = candidates.to_vec();
    ranked.sort_by_key(|s| s.rank());
    let Some(first) = ranked.first() else {
        return SymmetryError::UnknownHall { symbol: asked.to_owned(), nearest: String::new() };
    };
    let group = format!("{} ({})", first.short, first.number);
    let [a, b, c] = cell.lengths();
    let [alpha, beta, gamma] = cell.angles_deg();
    if ranked.iter().any(|s| s.constraint != first.constraint) && ranked.iter().all(|s| s.unique_axis().is_none()) {
        return SymmetryError::NeitherAxes {
            group,
            hexagonal: Constraint::HexagonalAxes.needs(),
            rhombohedral: Constraint::RhombohedralAxes.needs(),
            cell: format!("{a} {b} {c} Å, {alpha} {beta} {gamma}°"),
        };
    }
    let mut needs: Vec<&str> = ranked.iter().map(|s| s.constraint.needs()).collect();
    needs.dedup();
    let elsewhere: Vec<&Setting> =
        settings::all().iter().filter(|s| s.number == first.number && s.constraint.is_met_by(cell)).collect();
    SymmetryError::CellBreaksGroup {
        group,
        needs: needs.join(", or "),
        found: first.constraint.broken_by(cell).join(", "),
        elsewhere: if elsewhere.is_empty() {
            String::new()
        } else {
            format!("; settings of this type that fit the cell: {}", titles(&elsewhere))
        },
    }
}

/// At most this many candidates are spelled out in a message.
const MOST_LISTED: usize = 6;

fn titles(settings: &[&Setting]) -> String {
    let mut all: Vec<String> = settings.iter().map(|s| s.title()).collect();
    let more = all.len().saturating_sub(MOST_LISTED);
    all.truncate(MOST_LISTED);
    let tail = if more > 0 { format!(" and {more} more") } else { String::new() };
    all.join("; ") + &tail
}

/// Spellings farther than this from what was written are no help.
const FARTHEST: usize = 3;

fn nearest_symbols(written: &Written) -> String {
    let spellings: Vec<&Spelling> = settings::all().iter().flat_map(|s| &s.spellings).collect();
    nearest(written.compact(), spellings.iter().map(|s| (s.compact().to_owned(), s.pretty())))
}

fn nearest_hall(symbol: &str) -> String {
    let compact = |text: &str| text.split_whitespace().collect::<String>().to_lowercase();
    nearest(&compact(symbol), settings::all().iter().map(|s| (compact(s.hall), s.hall.to_owned())))
}

/// The best few of `(compared, shown)`, in words.
fn nearest(written: &str, known: impl Iterator<Item = (String, String)>) -> String {
    let mut near: Vec<(usize, String)> = known
        .map(|(compared, shown)| (edit_distance(written, &compared), shown))
        .filter(|(distance, _)| *distance <= FARTHEST.min(written.chars().count() / 2))
        .collect();
    near.sort_by_key(|(distance, _)| *distance);
    let mut shown: Vec<String> = Vec::new();
    for (_, name) in near {
        if !shown.contains(&name) && shown.len() < MOST_LISTED {
            shown.push(name);
        }
    }
    if shown.is_empty() { String::new() } else { format!("; the nearest known: {}", shown.join(", ")) }
}
