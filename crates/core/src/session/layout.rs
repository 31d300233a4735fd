//! RON laid out for people: what fits on a line stays on it, numbers are as short as they can be without losing a digit.

use super::tokens::{Kind, Token, Tokens};

/// Wide enough for a peak of a four-circle machine with uncertainty and time.
const WIDTH: usize = 160;
const INDENT: usize = 4;

/// Lays out a compact RON text of one value. The outermost bracket is always broken into lines.
pub(super) fn laid_out(compact: &str) -> String {
    let tokens: Vec<Token<'_>> = Tokens::new(compact).collect();
    let mut layout = Layout { closes: closes(&tokens), tokens, text: String::new() };
    let end = layout.tokens.len();
    layout.piece(0, end, 0, true);
    layout.text.push('\n');
    layout.text
}

/// For each opening bracket the token that closes it.
fn closes(tokens: &[Token<'_>]) -> Vec<usize> {
    let mut closes = vec![tokens.len().saturating_sub(1); tokens.len()];
    let mut open = Vec::new();
    for (i, token) in tokens.iter().enumerate() {
        match token.kind {
            Kind::Open => open.push(i),
            Kind::Close => {
                if let Some(start) = open.pop() {
                    closes[start] = i;
                }
            }
            _ => {}
        }
    }
    closes
}

struct Layout<'a> {
    tokens: Vec<Token<'a>>,
    closes: Vec<usize>,
    text: String,
}

impl Layout<'_> {
    /// Writes the tokens `from..to`, one element with its name, at a depth.
    fn piece(&mut self, from: usize, to: usize, depth: usize, outermost: bool) {
        let column = self.text.len() - self.text.rfind('\n').map_or(0, |i| i + 1);
        let flat = self.flat(from, to);
        // One more for the comma.
        if !outermost && column + flat.chars().count() < WIDTH {
            self.text.push_str(&flat);
            return;
        }
        let Some(mut open) = (from..to).find(|&i| self.tokens[i].kind == Kind::Open) else {
            self.text.push_str(&flat);
            return;
        };
        // `Inline((` … `))`: a bracket around a single bracket takes no line of its own.
        while self.tokens[open + 1].kind == Kind::Open && self.closes[open + 1] + 1 == self.closes[open] {
            open += 1;
        }
        let close = self.closes[open];
        let head = self.flat(from, open + 1);
        self.text.push_str(&head);
        for (start, end) in self.elements(open, close) {
            self.new_line(depth + 1);
            self.piece(start, end, depth + 1, false);
            self.text.push(',');
        }
        self.new_line(depth);
        let tail = self.flat(close, to);
        self.text.push_str(&tail);
    }

    fn new_line(&mut self, depth: usize) {
        self.text.push('\n');
        self.text.push_str(&" ".repeat(INDENT * depth));
    }

    /// The ranges of tokens between the commas of a bracket.
    fn elements(&self, open: usize, close: usize) -> Vec<(usize, usize)> {
        let mut elements = Vec::new();
        let (mut start, mut i) = (open + 1, open + 1);
        while i < close {
            match self.tokens[i].kind {
                Kind::Open => i = self.closes[i],
                Kind::Comma => {
                    elements.push((start, i));
                    start = i + 1;
                }
                _ => {}
            }
            i += 1;
        }
        if start < close {
            elements.push((start, close));
        }
        elements
    }

    fn flat(&self, from: usize, to: usize) -> String {
        let mut text = String::new();
        for token in &self.tokens[from..to] {
            match token.kind {
                Kind::Comma => text.push_str(", "),
                Kind::Colon => text.push_str(": "),
                Kind::Word => text.push_str(&short_number(token.text)),
                _ => text.push_str(token.text),
            }
        }
        text
    }
}

/// `5` for `5.0`, `5e-324` for three hundred zeros; every other word as it is.
fn short_number(word: &str) -> String {
    const LONGEST: usize = 24;
    match word.parse::<f64>() {
        Ok(number) if word.len() > LONGEST => format!("{number:e}"),
        Ok(number) if number != 0.0 => word.strip_suffix(".0").unwrap_or(word).to_owned(),
        Ok(number) if number.is_sign_positive() => "0".to_owned(),
        _ => word.to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn short_things_stay_on_a_line_and_long_ones_break() {
        let item = format!("(name:\"{}\",at:(1.0,-0.0,2.5))", "x".repeat(80));
        let text = laid_out(&format!("(version:1,list:[{item},{item}],choice:Inline((a:[{item},{item}])),empty:[])"));
        let expected = format!(
            "(\n    version: 1,\n    list: [\n        {0},\n        {0},\n    ],\n    choice: Inline((\n        a: [\n            \
             {0},\n            {0},\n        ],\n    )),\n    empty: [],\n)\n",
            item.replace(":\"", ": \"").replace(",at:(1.0,-0.0,2.5)", ", at: (1, -0.0, 2.5)")
        );
        assert_eq!(text, expected);
    }

    #[test]
    fn numbers_lose_zeros_and_no_digit() {
        let tiny = format!("{:?}", f64::from_bits(1)).len();
        assert!(tiny < 10, "Debug is short, Display is not");
        for number in [5.0, 0.1, -0.25, 1e-300, f64::from_bits(1), 0.1 + 0.2, 1e6, 123_456.789] {
            let plain = format!("{number}");
            let plain = if plain.contains('.') { plain } else { plain + ".0" };
            let short = short_number(&plain);
            assert_eq!(short.parse::<f64>(), Ok(number));
            assert!(short.len() <= 24, "{short}");
        }
        assert_eq!(
            (short_number("5.0"), short_number("0.0"), short_number("Ka1")),
            ("5".into(), "0".into(), "Ka1".into())
        );
    }
}
