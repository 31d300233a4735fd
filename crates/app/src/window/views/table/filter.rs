use ringwright_core::instrument::Instrument;
use ringwright_core::reach::{ReachRow, Verdict};

use super::words::{Word, split};

/// Conditions on reflections, all of which must hold. Written as plain text:
///
/// * `hkl 1 0 2` or just `1 0 2`, with `*` for any index: `0 0 *`;
/// * `d 0.8..1.5`, `2theta < 60`, `h = 0`, `omega -10..40`: a column and where it lies, ends included;
/// * `reachable`, `over_limit` and the other words of verdicts (the beginning is enough), `absent`;
/// * `not` before any of them; commas and `and` may stand between them.
#[derive(Debug, Clone, Default, PartialEq)]
pub(super) struct Filter(Vec<Condition>);

#[derive(Debug, Clone, PartialEq)]
struct Condition {
    negated: bool,
    what: What,
}

#[derive(Debug, Clone, PartialEq)]
enum What {
    Indices([Option<f64>; 3]),
    Range { of: Quantity, least: f64, most: f64 },
    Verdict(usize),
    Absent,
}

#[derive(Debug, Clone, Copy, PartialEq)]
enum Quantity {
    Index(usize),
    Spacing,
    TwoTheta,
    Axis(usize),
}

/// Indices closer than this are the same, and ends of ranges reach this far, so that what is read off can be typed.
const SAME: f64 = 5e-5;

impl Filter {
    /// Reads a text; an empty one accepts everything.
    ///
    /// # Errors
    /// What was not understood and what would be.
    pub fn read(text: &str, instrument: &Instrument) -> Result<Self, String> {
        let names: Vec<String> = instrument.axes().map(|axis| axis.name.as_str().to_lowercase()).collect();
        let words = split(text).map_err(|piece| unknown(&piece, &names))?;
        let mut rest = words.as_slice();
        let mut conditions = Vec::new();
        while let Some((word, tail)) = rest.split_first() {
            if *word == Word::Name("and".to_owned()) {
                rest = tail;
                continue;
            }
            let negated = *word == Word::Name("not".to_owned());
            let (what, left) = condition(if negated { tail } else { rest }, &names)?;
            conditions.push(Condition { negated, what });
            rest = left;
        }
        Ok(Self(conditions))
    }

    /// Whether a reflection meets every condition.
    pub fn accepts(&self, row: &ReachRow) -> bool {
        self.0.iter().all(|condition| condition.what.holds(row) != condition.negated)
    }
}

impl What {
    fn holds(&self, row: &ReachRow) -> bool {
        let own = [row.hkl.h, row.hkl.k, row.hkl.l];
        match self {
            Self::Indices(wanted) => {
                own.iter().zip(wanted).all(|(own, wanted)| wanted.is_none_or(|w| (own - w).abs() < SAME))
            }
            Self::Verdict(kind) => row.verdict.kind() == *kind,
            Self::Absent => row.absent.is_some(),
            Self::Range { of, least, most } => {
                let value = match *of {
                    Quantity::Index(i) => own.get(i).copied(),
                    Quantity::Spacing => Some(row.d_angstrom),
                    Quantity::TwoTheta => row.two_theta_deg,
                    Quantity::Axis(i) => row.setting.and_then(|s| s.readings_deg().get(i).copied()),
                };
                value.is_some_and(|v| v >= least - SAME && v <= most + SAME)
            }
        }
    }
}

fn condition<'w>(words: &'w [Word], axes: &[String]) -> Result<(What, &'w [Word]), String> {
    match words {
        [] => Err("\"not\" stands at the end; a condition should follow it".to_owned()),
        [Word::Name(name), rest @ ..] => named(name, rest, axes),
        [Word::Number(_) | Word::Any, ..] => indices(words),
        _ => Err("a sign needs a column before it: d < 1.2".to_owned()),
    }
}

fn named<'w>(name: &str, rest: &'w [Word], axes: &[String]) -> Result<(What, &'w [Word]), String> {
    if name == "hkl" {
        return indices(rest);
    }
    let quantity = match name {
        "h" => Some(Quantity::Index(0)),
        "k" => Some(Quantity::Index(1)),
        "l" => Some(Quantity::Index(2)),
        "d" => Some(Quantity::Spacing),
        "2theta" | "two_theta" => Some(Quantity::TwoTheta),
        _ => None,
    };
    let axis = axes.iter().position(|axis| axis == name).map(Quantity::Axis);
    // An axis may bear the name two_theta; its reading has a sign, which is what was asked for then.
    if let Some(of) = axis.or(quantity) {
        return range(of, name, rest);
    }
    if name == "absent" {
        return Ok((What::Absent, rest));
    }
    let known = |word: &&str| word.starts_with(name) || word.split('_').next().is_some_and(|first| first == name);
    match Verdict::WORDS.iter().position(|word| name.len() >= 3 && known(word)) {
        Some(kind) => Ok((What::Verdict(kind), skip_second_half(kind, name, rest))),
        None => Err(unknown(name, axes)),
    }
}

/// `over limit` is taken as `over_limit`.
fn skip_second_half<'w>(kind: usize, name: &str, rest: &'w [Word]) -> &'w [Word] {
    let (first, second) = Verdict::WORDS[kind].split_once('_').unwrap_or((Verdict::WORDS[kind], ""));
    match rest {
        [Word::Name(next), tail @ ..] if name == first && next == second => tail,
        _ => rest,
    }
}

fn indices(words: &[Word]) -> Result<(What, &[Word]), String> {
    let index = |word: &Word| match word {
        Word::Number(n) => Some(Some(*n)),
        Word::Any => Some(None),
        _ => None,
    };
    if let [h, k, l, rest @ ..] = words
        && let (Some(h), Some(k), Some(l)) = (index(h), index(k), index(l))
    {
        return Ok((What::Indices([h, k, l]), rest));
    }
    Err("three indices are needed, each a number or *: 1 0 2, or 0 0 *".to_owned())
}

fn range<'w>(of: Quantity, name: &str, words: &'w [Word]) -> Result<(What, &'w [Word]), String> {
    let (least, most, rest) = match words {
        [Word::Number(a), Word::To, Word::Number(b), rest @ ..] => (a.min(*b), a.max(*b), rest),
        [Word::Number(a), Word::To, rest @ ..] | [Word::AtLeast, Word::Number(a), rest @ ..] => {
            (*a, f64::INFINITY, rest)
        }
        [Word::AtMost | Word::To, Word::Number(b), rest @ ..] => (f64::NEG_INFINITY, *b, rest),
        [Word::Equal, Word::Number(a), rest @ ..] | [Word::Number(a), rest @ ..] => (*a, *a, rest),
        _ => return Err(format!("{name} needs a range: {name} 0.8..1.5, {name} < 2 or {name} = 1")),
    };
    Ok((What::Range { of, least, most }, rest))
}

fn unknown(piece: &str, axes: &[String]) -> String {
    let axis = axes.first().map_or("omega", String::as_str);
    format!(
        "\"{piece}\" is not known here. Try: 0 0 *   d 0.8..1.5   2theta < 60   {axis} > 20   reachable   not absent"
    )
}
