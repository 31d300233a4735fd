//! From a Hall symbol to every operation of one cell. The symmetry library reads the symbol (Hall 1981, Acta Cryst. A37,
//! 517); the group is closed here in exact numbers.

use moyo::data::HallSymbol;
use nalgebra::{Matrix3, Vector3};

use super::operation::{Operation, TRANSLATION_STEPS};

/// The operations of one cell: the pure translations first, the identity foremost; then each other rotation with every
/// translation.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Operations {
    pub(super) all: Vec<Operation>,
    /// How many pure translations stand first, the identity included.
    pub(super) translations: usize,
}

/// No crystallographic point group has more.
const LARGEST_POINT_GROUP: usize = 48;

/// The group of a Hall symbol in the library's spelling, or nothing if it is no Hall symbol of a space group.
pub(super) fn from_hall(symbol: &str) -> Option<Operations> {
    let hall = HallSymbol::new(&checked(symbol)?)?;
    let generators = hall.generators.iter().map(|g| exact(&g.rotation, &g.translation)).collect::<Option<Vec<_>>>()?;
    let centring =
        hall.centering_translations.iter().map(|t| exact(&Matrix3::identity(), t)).collect::<Option<Vec<_>>>()?;
    close(&generators, &centring)
}

fn close(generators: &[Operation], centring: &[Operation]) -> Option<Operations> {
    let mut found = vec![Operation::identity()];
    let mut next = 0;
    while let Some(op) = found.get(next).copied() {
        next += 1;
        for generator in generators {
            let new = op.after(generator);
            if !found.iter().any(|known| known.rotation() == new.rotation()) {
                found.push(new);
            }
        }
        if found.len() > LARGEST_POINT_GROUP {
            return None;
        }
    }
    let mut translations = vec![Operation::identity()];
    translations.extend(centring.iter().filter(|t| **t != Operation::identity()));
    let all = found.iter().flat_map(|op| translations.iter().map(|t| t.after(op))).collect();
    Some(Operations { all, translations: translations.len() })
}

/// Nothing if the translation is no whole number of steps.
fn exact(rotation: &Matrix3<i32>, translation: &Vector3<f64>) -> Option<Operation> {
    let steps = translation * f64::from(TRANSLATION_STEPS);
    let whole = steps.map(f64::round);
    let rows = [0, 1, 2].map(|i| [0, 1, 2].map(|j| rotation[(i, j)]));
    let off = (steps - whole).abs().max();
    (off < 1e-6).then(|| Operation::new(rows, [0, 1, 2].map(|i| whole[i] as i32)))
}

/// The symbol in one spelling, if it has the form of a Hall symbol: only then may the library see it, for it does not
/// stand anything else. `'` and `"` are `^` and `=` there.
pub(super) fn checked(symbol: &str) -> Option<String> {
    let lower = symbol.trim().to_lowercase().replace('\'', "^").replace('"', "=").replace('_', "");
    let (operations, shift) = match lower.split_once('(') {
        Some((operations, shift)) => (operations.to_owned(), Some(shift.trim().strip_suffix(')')?.to_owned())),
        None => (lower, None),
    };
    let mut tokens = operations.split_whitespace();
    let lattice = tokens.next()?.to_uppercase();
    if !matches!(lattice.trim_start_matches('-'), "P" | "A" | "B" | "C" | "I" | "R" | "F") || lattice.len() > 2 {
        return None;
    }
    let mut parts = vec![lattice];
    for token in tokens {
        parts.push(is_operation(token).then(|| token.to_owned())?);
    }
    if parts.len() < 2 {
        return None;
    }
    if let Some(shift) = shift {
        let numbers = shift.split_whitespace().map(|n| n.parse::<i8>().ok()).collect::<Option<Vec<_>>>()?;
        let [x, y, z] = numbers.try_into().ok()?;
        parts.push(format!("({x} {y} {z})"));
    }
    Some(parts.join(" "))
}

/// `-`? fold (`^`|`=`)? (`x`|`y`|`z`|`*`)? then letters and digits of translations.
fn is_operation(token: &str) -> bool {
    let rest = token.strip_prefix('-').unwrap_or(token);
    let Some(rest) = rest.strip_prefix(['1', '2', '3', '4', '6']) else { return false };
    let rest = rest.strip_prefix(['^', '=']).unwrap_or(rest);
    let rest = rest.strip_prefix(['x', 'y', 'z', '*']).unwrap_or(rest);
    rest.chars().all(|c| "abcnuvwd123456".contains(c))
}

impl Operations {
    /// The same operations in a fixed order, to compare two groups.
    pub(super) fn sorted(&self) -> Vec<([[i32; 3]; 3], [i32; 3])> {
        let mut all: Vec<_> = self.all.iter().map(|op| (op.rotation(), op.translation())).collect();
        all.sort_unstable();
        all
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_is_no_hall_symbol_is_turned_away() {
        let wrong = [
            "",
            "-",
            "P",
            "-P",
            "Q 2",
            "P 5",
            "P 2q",
            "P 2 2 2 2 (",
            "P 2 (1 2)",
            "P 2 (0 0 400)",
            "P -",
            "--P 1",
            "(0 0 1)",
        ];
        for symbol in wrong {
            assert!(from_hall(symbol).is_none(), "{symbol}");
        }
        // Formed well, but the rotations would go on for ever or name no axis.
        for symbol in ["P 4 3x", "P 6 4x", "P 3 6y 4", "P 1 3", "P -1xy"] {
            let _ = from_hall(symbol);
        }
    }

    #[test]
    fn a_group_holds_its_products() {
        let group = from_hall("-C 2yc").map(|g| g.all).unwrap_or_default();
        assert_eq!(group.len(), 8);
        for a in &group {
            for b in &group {
                assert!(group.contains(&a.after(b)));
            }
        }
    }
}
