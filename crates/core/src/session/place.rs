//! From a path of field names to a line and a column, by reading the text again.

use super::tokens::{Kind, Token, Tokens};

/// One step of a path.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) enum Step {
    /// A field, a key of a map, or the variant of an enum.
    Name(String),
    /// An element of a list, counted from 0.
    Index(usize),
}

/// `machine.Inline.sample_axes[1].limits` as steps.
pub(super) fn steps(path: &str) -> Vec<Step> {
    let mut steps = Vec::new();
    for part in path.split('.').filter(|part| !part.is_empty()) {
        let mut pieces = part.split('[');
        if let Some(name) = pieces.next().filter(|name| !name.is_empty()) {
            steps.push(Step::Name(name.to_owned()));
        }
        steps.extend(pieces.filter_map(|piece| piece.trim_end_matches(']').parse().ok().map(Step::Index)));
    }
    steps
}

/// How steps are written in messages.
pub(super) fn written(steps: &[Step]) -> String {
    let mut path = String::new();
    for step in steps {
        match step {
            Step::Name(name) if path.is_empty() => path.push_str(name),
            Step::Name(name) => path.extend([".", name]),
            Step::Index(i) => path.push_str(&format!("[{i}]")),
        }
    }
    path
}

/// Where a path leads in a text.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Found {
    /// The byte where the value starts.
    pub(super) value: usize,
    /// The byte where its field name or key starts, if it has one.
    pub(super) key: Option<usize>,
    /// How many steps of the path were found; the rest is not in the text.
    pub(super) reached: usize,
}

/// Follows a path as far as the text has it. Steps that name the variant of an enum may be left out of the path.
pub(super) fn find(text: &str, path: &[Step]) -> Found {
    let mut walk = Walk { tokens: Tokens::new(text), end: text.len() };
    let mut found = Found { value: walk.start(), key: None, reached: 0 };
    let mut named = false;
    for step in path {
        match walk.descend(step, named) {
            None => break,
            Some(Reached::Variant) => named = true,
            Some(Reached::Value { key }) => {
                named = false;
                found.key = key;
                found.value = walk.start();
            }
        }
        found.reached += 1;
    }
    // A path that ends with the name of a variant means what the variant holds.
    if named && walk.peek().is_some_and(|token| token.text == "(") {
        walk.next();
        if walk.holds_one_value() {
            found.value = walk.start();
        }
    }
    found
}

/// What a step led to.
enum Reached {
    /// The name of the value's own variant: the place stays.
    Variant,
    /// A value inside.
    Value { key: Option<usize> },
}

/// Reads forward only; always at the start of a value between steps.
#[derive(Clone)]
struct Walk<'a> {
    tokens: Tokens<'a>,
    end: usize,
}

impl<'a> Walk<'a> {
    fn next(&mut self) -> Option<Token<'a>> {
        self.tokens.find(|token| !matches!(token.kind, Kind::Comment | Kind::Attribute))
    }

    fn peek(&self) -> Option<Token<'a>> {
        self.clone().next()
    }

    fn start(&self) -> usize {
        self.peek().map_or(self.end, |token| token.start)
    }

    /// `named`: whether a bracket ahead belongs to the name of a variant that was already read.
    fn descend(&mut self, step: &Step, mut named: bool) -> Option<Reached> {
        loop {
            let head = self.next()?;
            match head.kind {
                // The name of a variant, of a struct, or `Some`.
                Kind::Word if !named => {
                    if *step == Step::Name(plain(head.text).to_owned()) {
                        return Some(Reached::Variant);
                    }
                    named = true;
                }
                Kind::Open => {
                    let wraps = head.text == "(" && self.holds_one_value();
                    match step {
                        Step::Name(_) if wraps => named = false,
                        Step::Index(_) if wraps && named => named = false,
                        Step::Name(name) => return self.enter_field(name),
                        Step::Index(i) => return self.enter_element(*i),
                    }
                }
                _ => return None,
            }
        }
    }

    /// Whether what follows the bracket is a value and not `name: value`.
    fn holds_one_value(&self) -> bool {
        let mut ahead = self.clone();
        let first = ahead.next();
        first.is_some_and(|t| t.kind != Kind::Close) && ahead.next().is_none_or(|t| t.kind != Kind::Colon)
    }

    fn enter_field(&mut self, name: &str) -> Option<Reached> {
        loop {
            let key = self.peek().filter(|token| token.kind != Kind::Close)?;
            if matches!(key.kind, Kind::Word | Kind::Text) {
                self.next();
                if self.peek()?.kind == Kind::Colon {
                    self.next();
                    if plain(key.text) == name {
                        return Some(Reached::Value { key: Some(key.start) });
                    }
                }
            }
            self.skip_to_next()?;
        }
    }

    fn enter_element(&mut self, index: usize) -> Option<Reached> {
        for _ in 0..index {
            self.skip_to_next()?;
        }
        self.peek().filter(|token| token.kind != Kind::Close)?;
        Some(Reached::Value { key: None })
    }

    /// Goes past the next comma at this depth; nothing if the bracket closes first.
    fn skip_to_next(&mut self) -> Option<()> {
        let mut depth = 0_usize;
        loop {
            match self.next()?.kind {
                Kind::Open => depth += 1,
                Kind::Close => depth = depth.checked_sub(1)?,
                Kind::Comma if depth == 0 => return Some(()),
                _ => {}
            }
        }
    }
}

/// A key without its quotes or the mark of a raw name.
fn plain(key: &str) -> &str {
    key.strip_prefix("r#").unwrap_or(key).trim_matches('"')
}

/// Line and column of a byte, both counted from 1; columns count characters.
pub(super) fn line_and_column(text: &str, byte: usize) -> (usize, usize) {
    let before = text.get(..byte).unwrap_or(text);
    let line_start = before.rfind('\n').map_or(0, |i| i + 1);
    let column = before.get(line_start..).unwrap_or("").chars().count();
    (before.bytes().filter(|&b| b == b'\n').count() + 1, column + 1)
}

/// The byte of a line and a column; the end of the text if it has no such place.
pub(super) fn byte_of(text: &str, line: usize, column: usize) -> usize {
    let mut start = 0;
    for _ in 1..line {
        match text.get(start..).and_then(|rest| rest.find('\n')) {
            Some(i) => start += i + 1,
            None => return text.len(),
        }
    }
    let rest = text.get(start..).unwrap_or("");
    rest.char_indices().nth(column.saturating_sub(1)).map_or(text.len(), |(i, _)| start + i)
}

/// What stands at a byte, short enough for a message.
pub(super) fn met(text: &str, byte: usize) -> String {
    const LONGEST: usize = 40;
    let rest = text.get(byte..).unwrap_or("");
    let mut tokens = Tokens::new(rest).filter(|token| token.kind != Kind::Comment);
    let Some(first) = tokens.next() else { return "the end of the text".to_owned() };
    let piece = match first.kind {
        Kind::Open => rest.get(first.start..).and_then(|r| r.lines().next()).unwrap_or("").trim_end_matches([',', ' ']),
        _ => first.text,
    };
    let piece: String = piece.chars().map(|c| if c.is_control() { '\u{FFFD}' } else { c }).collect();
    if piece.chars().count() > LONGEST { piece.chars().take(LONGEST).chain(['…']).collect() } else { piece }
}

#[cfg(test)]
mod tests {
    use super::*;

    const TEXT: &str = r#"// head
(
    version: 1, /* a: 5 */
    crystal: (name: "x: (y", cell: (a: 1.5, b: -2)),
    machine: Inline((axes: [
        (name: "one", limits: Intervals([(from: 1, to: 2), (from: 3, to: 4)])),
        (name: "two", direction: (7, 8, 9), limits: Endless, spare: Some(up: 5)),
    ])),
    readings: {"omega": 10, "chi": 20},
)"#;

    fn leads_to(path: &str) -> &'static str {
        let found = find(TEXT, &steps(path));
        assert_eq!(found.reached, steps(path).len(), "{path}");
        &TEXT[found.value..]
    }

    #[test]
    fn a_path_leads_to_the_start_of_its_value() {
        for (path, starts) in [
            ("version", "1,"),
            ("crystal.cell", "(a: 1.5"),
            ("crystal.cell.b", "-2"),
            ("machine", "Inline"),
            ("machine.Inline", "(axes"),
            ("machine.Inline.axes[0].limits.Intervals", "[(from: 1"),
            ("machine.Inline.axes", "["),
            ("machine.axes[1].name", "\"two\""),
            ("machine.Inline.axes[0].limits.Intervals[1].to", "4)"),
            ("machine.Inline.axes[0].limits[1].from", "3,"),
            ("machine.Inline.axes[1].limits.Endless", "Endless"),
            ("machine.Inline.axes[1].direction[2]", "9)"),
            ("machine.Inline.axes[1].spare.up", "5)"),
            ("readings.chi", "20}"),
        ] {
            assert!(leads_to(path).starts_with(starts), "{path} leads to {}", leads_to(path));
        }
    }

    #[test]
    fn a_path_that_is_not_there_stops_where_it_ends() {
        let found = find(TEXT, &steps("crystal.cell.gamma"));
        assert_eq!(found.reached, 2);
        assert!(TEXT[found.value..].starts_with("(a: 1.5"));
        assert_eq!(find(TEXT, &steps("machine.Inline.axes[2]")).reached, 3);
        assert_eq!(find("", &steps("a")).reached, 0);
    }

    #[test]
    fn places_and_bytes_are_each_other_s_inverse() {
        let text = "ä\n  ψ = 1\r\n\nend";
        for (byte, _) in text.char_indices() {
            let (line, column) = line_and_column(text, byte);
            assert_eq!(byte_of(text, line, column), byte);
        }
        assert_eq!(line_and_column(text, 5), (2, 3));
    }
}
