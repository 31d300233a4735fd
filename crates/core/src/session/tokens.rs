//! The words and marks of a RON text, with their places. It looks at the shape alone, never refuses a text and never
//! recurses, so that it can point into files that are broken or deeply nested.

/// What a token is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Kind {
    /// `(`, `[` or `{`.
    Open,
    /// `)`, `]` or `}`.
    Close,
    Comma,
    Colon,
    /// A name, a number, or anything else without a mark in it.
    Word,
    /// A text or a character in quotes, also a raw one.
    Text,
    /// `// …` or `/* … */`.
    Comment,
    /// `#![…]` at the head of a file.
    Attribute,
}

/// A piece of the text and the byte where it starts.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Token<'a> {
    pub(super) kind: Kind,
    pub(super) start: usize,
    pub(super) text: &'a str,
}

impl Token<'_> {
    pub(super) fn end(&self) -> usize {
        self.start + self.text.len()
    }
}

/// All tokens of a text in their order.
#[derive(Debug, Clone)]
pub(super) struct Tokens<'a> {
    text: &'a str,
    at: usize,
}

impl<'a> Tokens<'a> {
    pub(super) fn new(text: &'a str) -> Self {
        Self { text, at: 0 }
    }
}

impl<'a> Iterator for Tokens<'a> {
    type Item = Token<'a>;

    fn next(&mut self) -> Option<Token<'a>> {
        let rest = self.text.get(self.at..)?;
        let start = self.at + rest.len() - rest.trim_start_matches(is_space).len();
        let rest = self.text.get(start..)?;
        let first = rest.chars().next()?;
        let (kind, len) = match first {
            '(' | '[' | '{' => (Kind::Open, 1),
            ')' | ']' | '}' => (Kind::Close, 1),
            ',' => (Kind::Comma, 1),
            ':' => (Kind::Colon, 1),
            '/' if rest.starts_with("//") => (Kind::Comment, rest.find('\n').unwrap_or(rest.len())),
            '/' if rest.starts_with("/*") => (Kind::Comment, block_comment(rest)),
            '#' if rest.starts_with("#!") => (Kind::Attribute, attribute(rest)),
            _ => match quoted(rest) {
                Some(len) => (Kind::Text, len),
                None => (Kind::Word, first.len_utf8() + word_rest(rest.get(first.len_utf8()..).unwrap_or(""))),
            },
        };
        self.at = start + len;
        Some(Token { kind, start, text: rest.get(..len)? })
    }
}

/// Whether a text has comments that a rewritten file would lose; marks inside quotes are no comments.
pub fn has_comments(text: &str) -> bool {
    Tokens::new(text).any(|token| token.kind == Kind::Comment)
}

fn is_space(c: char) -> bool {
    c.is_whitespace() || matches!(c, '\u{200E}' | '\u{200F}' | '\u{FEFF}')
}

fn word_rest(rest: &str) -> usize {
    rest.find(|c| is_space(c) || "()[]{},:\"'/".contains(c)).unwrap_or(rest.len())
}

/// Block comments nest.
fn block_comment(rest: &str) -> usize {
    let bytes = rest.as_bytes();
    let (mut depth, mut i) = (0_usize, 0);
    while i + 1 < bytes.len() {
        match &bytes[i..i + 2] {
            b"/*" => depth += 1,
            b"*/" => depth -= 1,
            _ => {
                i += 1;
                continue;
            }
        }
        i += 2;
        if depth == 0 {
            return i;
        }
    }
    rest.len()
}

/// `#![enable(…)]`: up to the bracket that closes it.
fn attribute(rest: &str) -> usize {
    let mut depth = 0_usize;
    for (i, c) in rest.char_indices() {
        match c {
            '[' => depth += 1,
            ']' if depth <= 1 => return i + 1,
            ']' => depth -= 1,
            _ => {}
        }
    }
    rest.len()
}

/// The length of a quoted piece at the start, if there is one: "…", r#"…"#, the same after `b`, or a character 'x'.
fn quoted(rest: &str) -> Option<usize> {
    let after_b = rest.strip_prefix('b').unwrap_or(rest);
    let prefix = rest.len() - after_b.len();
    if let Some(inside) = after_b.strip_prefix('"') {
        return Some(prefix + 1 + escaped_until(inside, '"').unwrap_or(inside.len()));
    }
    if let Some(inside) = after_b.strip_prefix('\'') {
        // A lone quote is no character; it must not swallow the rest of the file.
        let len = escaped_until(inside, '\'')?;
        return (len <= 12).then_some(prefix + 1 + len);
    }
    let after_r = after_b.strip_prefix('r')?;
    let inside = after_r.trim_start_matches('#');
    let hashes = after_r.len() - inside.len();
    let inside = inside.strip_prefix('"')?;
    let close = format!("\"{}", "#".repeat(hashes));
    let len = inside.find(&close).map_or(inside.len(), |i| i + close.len());
    Some(prefix + 1 + hashes + 1 + len)
}

/// The length up to and with the closing quote; a backslash takes the next character along.
fn escaped_until(inside: &str, close: char) -> Option<usize> {
    let mut chars = inside.char_indices();
    while let Some((i, c)) = chars.next() {
        if c == '\\' {
            chars.next();
        } else if c == close {
            return Some(i + 1);
        }
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;

    fn pieces(text: &str) -> Vec<(Kind, &str)> {
        Tokens::new(text).map(|t| (t.kind, t.text)).collect()
    }

    #[test]
    fn comments_are_comments_only_outside_quotes() {
        for with in ["(a: 1) // note", "/* x */ (a: 1)", "(a: 'x', /* /* nested */ */ b: 2)", "(a: \"\\\"\", // c\n)"] {
            assert!(has_comments(with), "{with}");
        }
        for without in [
            "(a: \"http://lab\")",
            "(a: \"/* no */\")",
            "(a: r#\"say \"//\" twice\"#)",
            "(a: \"\\\"//\")",
            "(a: '/', b: '/')",
            "(a: '\\'', b: \"//\")",
            "",
        ] {
            assert!(!has_comments(without), "{without}");
        }
    }

    #[test]
    fn marks_words_and_texts_are_told_apart() {
        use Kind::{Close, Colon, Comma, Open, Text, Word};
        assert_eq!(
            pieces("#![enable(implicit_some)] (r#a: -1.5e3, b:\"x, y\")"),
            [
                (Kind::Attribute, "#![enable(implicit_some)]"),
                (Open, "("),
                (Word, "r#a"),
                (Colon, ":"),
                (Word, "-1.5e3"),
                (Comma, ","),
                (Word, "b"),
                (Colon, ":"),
                (Text, "\"x, y\""),
                (Close, ")"),
            ]
        );
    }

    #[test]
    fn unclosed_pieces_reach_to_the_end_and_no_farther() {
        for text in ["\"open", "/* open", "r##\"open\"#", "#![open", "'", "b", "/", "(((", "ä'ö"] {
            let last = Tokens::new(text).last();
            assert_eq!(last.map(|t| t.end()), Some(text.len()), "{text}");
        }
    }
}
