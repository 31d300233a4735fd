//! Reading of Hermann–Mauguin symbols: a person's spelling against the tokens of a tabulated one.

/// A tabulated spelling: its tokens in lower case, `["p", "1", "21/n", "1"]`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Spelling {
    tokens: Vec<String>,
    compact: String,
}

impl Spelling {
    /// From a symbol with spaces between its tokens.
    pub(super) fn new(symbol: &str) -> Self {
        let tokens: Vec<String> = symbol.to_lowercase().split_whitespace().map(str::to_owned).collect();
        let compact = tokens.concat();
        Self { tokens, compact }
    }

    /// Without spaces, in lower case.
    pub(super) fn compact(&self) -> &str {
        &self.compact
    }

    /// With spaces and a capital lattice letter.
    pub(super) fn pretty(&self) -> String {
        let text = self.tokens.join(" ");
        let mut chars = text.chars();
        chars.next().map(|c| c.to_ascii_uppercase().to_string() + chars.as_str()).unwrap_or_default()
    }
}

/// What a person wrote: tokens in lower case, and what follows a colon.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Written {
    spelling: Spelling,
    pub(super) suffix: Option<String>,
}

impl Written {
    /// Brings the ways to write one symbol together: subscripts, underscores and braces, bars over a digit, every kind
    /// of minus sign, capitals, spaces around a slash.
    pub(super) fn new(text: &str) -> Self {
        let plain = plain(text);
        let (symbol, suffix) = match plain.split_once(':') {
            Some((symbol, suffix)) => (symbol.to_owned(), Some(suffix.trim().to_owned())),
            None => (plain, None),
        };
        let joined = symbol.split('/').map(str::trim).collect::<Vec<_>>().join("/");
        Self { spelling: Spelling::new(&joined), suffix }
    }

    pub(super) fn compact(&self) -> &str {
        self.spelling.compact()
    }

    /// Whether this can be read as the tabulated spelling: the same characters, and a space only where the tabulated
    /// symbol has one too. `P 1 21` is no short way to write `P 1 2 1`: where tokens `1` are about, two digits that
    /// stand together as a screw axis must be one.
    pub(super) fn reads_as(&self, tabulated: &Spelling) -> bool {
        if self.spelling.compact != tabulated.compact {
            return false;
        }
        let theirs = starts(tabulated);
        let place_holders = tabulated.tokens.iter().any(|t| t == "1");
        let mut start = 0;
        self.spelling.tokens.iter().all(|token| {
            let at = start;
            start += token.len();
            let splits_a_screw = place_holders && is_screw(token) && theirs.contains(&(at + 1));
            theirs.contains(&at) && !splits_a_screw
        })
    }
}

/// Where the tokens begin in the compact form.
fn starts(spelling: &Spelling) -> Vec<usize> {
    let mut at = 0;
    let mut all = Vec::with_capacity(spelling.tokens.len());
    for token in &spelling.tokens {
        all.push(at);
        at += token.len();
    }
    all
}

/// `21`, `63`: a fold and a smaller digit above zero.
fn is_screw(token: &str) -> bool {
    match token.as_bytes() {
        [fold @ (b'2' | b'3' | b'4' | b'6'), part] => (b'1'..*fold).contains(part),
        _ => false,
    }
}

fn plain(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.trim().chars() {
        match c {
            '_' | '{' | '}' => {}
            '\u{2080}'..='\u{2089}' => out.extend(char::from_digit(c as u32 - 0x2080, 10)),
            '\u{2010}'..='\u{2015}' | '\u{2212}' | '\u{00af}' => out.push('-'),
            // A combining bar follows the digit that it stands on.
            '\u{0304}' | '\u{0305}' => {
                let digit = out.pop();
                out.push('-');
                out.extend(digit);
            }
            _ => out.extend(c.to_lowercase()),
        }
    }
    out
}

/// The number of characters to insert, delete or replace between two words (Levenshtein 1966).
pub(super) fn edit_distance(a: &str, b: &str) -> usize {
    let b: Vec<char> = b.chars().collect();
    let mut row: Vec<usize> = (0..=b.len()).collect();
    for (i, ca) in a.chars().enumerate() {
        let mut diagonal = i;
        let mut left = i + 1;
        for (above, cb) in row.iter_mut().skip(1).zip(&b) {
            let replaced = diagonal + usize::from(ca != *cb);
            diagonal = *above;
            left = replaced.min(left + 1).min(diagonal + 1);
            *above = left;
        }
        if let Some(first) = row.first_mut() {
            *first = i + 1;
        }
    }
    row.last().copied().unwrap_or(0)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn reads(written: &str, tabulated: &str) -> bool {
        Written::new(written).reads_as(&Spelling::new(tabulated))
    }

    #[test]
    fn one_symbol_is_read_in_many_spellings() {
        for written in ["P21/n", "p 21/n", "P 2_1/n", "P2₁/n", "P 2_{1} / n", "P21/N"] {
            assert!(reads(written, "P 21/n"), "{written}");
        }
        for written in ["Fm-3m", "F m -3 m", "Fm3\u{0304}m", "F m \u{2212}3 m", "fm\u{00af}3m"] {
            assert!(reads(written, "F m -3 m"), "{written}");
        }
        assert_eq!(Written::new("Fd-3m :1").suffix.as_deref(), Some("1"));
    }

    #[test]
    fn a_space_in_the_wrong_place_is_no_other_symbol() {
        assert!(reads("P 1 2 1", "P 1 2 1") && reads("P121", "P 1 2 1"));
        assert!(!reads("P 1 21", "P 1 2 1"));
        assert!(!reads("P 21 1", "P 2 1 1"));
        assert!(!reads("P 3 21 2", "P 32 1 2"));
        assert!(reads("R 32", "R 3 2") && reads("F 41 32", "F 41 3 2"));
    }

    #[test]
    fn distances_of_words() {
        assert_eq!(edit_distance("kitten", "sitting"), 3);
        assert_eq!(edit_distance("", "abc"), 3);
        assert_eq!(edit_distance("pnma", "pnma"), 0);
    }
}
