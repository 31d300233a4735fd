//! The words of a filter: names, numbers and signs.

/// A word of a filter.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Word {
    /// A name, in lower case.
    Name(String),
    /// A number.
    Number(f64),
    /// `*`, any index.
    Any,
    /// `<` or `<=`.
    AtMost,
    /// `>` or `>=`.
    AtLeast,
    /// `=`.
    Equal,
    /// `..`.
    To,
}

/// Splits a text into words. Spaces and commas only separate.
///
/// # Errors
/// The first piece that is no word.
pub(super) fn split(text: &str) -> Result<Vec<Word>, String> {
    let text = text.to_lowercase().replace('−', "-").replace('θ', "theta");
    let mut words = Vec::new();
    let mut rest = text.as_str();
    loop {
        rest = rest.trim_start_matches(|c: char| c.is_whitespace() || c == ',');
        if rest.is_empty() {
            return Ok(words);
        }
        let (word, length) = first(rest).ok_or_else(|| piece(rest).to_owned())?;
        words.push(word);
        rest = &rest[length..];
    }
}

fn first(rest: &str) -> Option<(Word, usize)> {
    const SIGNS: [(&str, Word); 8] = [
        ("<=", Word::AtMost),
        ("≤", Word::AtMost),
        ("<", Word::AtMost),
        (">=", Word::AtLeast),
        ("≥", Word::AtLeast),
        (">", Word::AtLeast),
        ("=", Word::Equal),
        ("..", Word::To),
    ];
    if let Some((sign, word)) = SIGNS.into_iter().find(|(sign, _)| rest.starts_with(sign)) {
        return Some((word, sign.len()));
    }
    if rest.starts_with('*') {
        return Some((Word::Any, 1));
    }
    if rest.starts_with("2theta") {
        return Some((Word::Name("2theta".to_owned()), 6));
    }
    if rest.starts_with(|c: char| c.is_alphabetic()) {
        let end = rest.find(|c: char| !(c.is_alphanumeric() || c == '_')).unwrap_or(rest.len());
        return Some((Word::Name(rest[..end].to_owned()), end));
    }
    let end = number_end(rest);
    rest[..end].parse().ok().filter(|n: &f64| n.is_finite()).map(|n| (Word::Number(n), end))
}

/// A number ends before `..`, so that `0.8..1.5` is a range.
fn number_end(rest: &str) -> usize {
    let bytes = rest.as_bytes();
    let mut end = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    let mut dotted = false;
    while let Some(&byte) = bytes.get(end) {
        match byte {
            b'0'..=b'9' => {}
            b'.' if !dotted && bytes.get(end + 1) != Some(&b'.') => dotted = true,
            _ => break,
        }
        end += 1;
    }
    end
}

fn piece(rest: &str) -> &str {
    let end = rest.find(|c: char| c.is_whitespace() || c == ',').unwrap_or(rest.len());
    &rest[..end]
}
