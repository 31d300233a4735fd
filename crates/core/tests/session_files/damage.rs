//! Session files that are wrong in their form: unknown, doubled and missing fields at every level, broken brackets, texts
//! that are none. And at random: nothing panics, every refusal has a place inside the text.

use proptest::prelude::*;
use ringwright_core::session::{FileProblem, Session, SessionError, read_machine};

use super::{cases, good, template};

/// The one problem of a text or of bytes.
fn problem(bytes: &[u8]) -> FileProblem {
    match Session::from_bytes(bytes, "night.ron") {
        Err(SessionError::Problems(mut problems)) if problems.len() == 1 => problems.remove(0),
        other => panic!("one problem expected, not {other:?}"),
    }
}

fn expect(text: &str, byte: usize, piece: &str) -> FileProblem {
    let found = problem(text.as_bytes());
    assert_eq!((found.line, found.column), template::place(text, byte), "{found} where {piece:?} was expected");
    assert!(found.message.contains(piece), "{found} where {piece:?} was expected");
    found
}

/// The bytes just inside every bracket that holds named fields.
fn inside_brackets(text: &str) -> Vec<usize> {
    let named = |rest: &str| {
        let word: String = rest.trim_start().chars().take_while(|c| c.is_ascii_lowercase() || *c == '_').collect();
        !word.is_empty() && rest.trim_start()[word.len()..].starts_with(": ")
    };
    text.match_indices('(').map(|(i, _)| i + 1).filter(|&i| named(&text[i..])).collect()
}

#[test]
fn an_unknown_field_is_refused_at_every_level() {
    let text = good();
    let places = inside_brackets(&text);
    assert!(places.len() >= 19, "session, crystal, cell, line, machine, axes, limits, approach, peaks, …");
    for byte in places {
        let (before, after) = text.split_at(byte);
        let found = expect(&format!("{before}zzz: 1, {after}"), byte, "there is no field zzz here; accepted");
        assert!(found.field.ends_with("zzz"), "{found}");
    }
}

#[test]
fn a_field_that_stands_twice_is_refused_at_every_level() {
    let text = good();
    for byte in inside_brackets(&text) {
        let (before, after) = text.split_at(byte);
        let field = after.trim_start().split(':').next().unwrap();
        let value = whole_value(&after[after.find(": ").unwrap() + 2..]);
        let second = byte + format!("{field}: {value}, ").len() + after.len() - after.trim_start().len();
        let found = expect(&format!("{before}{field}: {value}, {after}"), second, "stands here twice; accepted is one");
        assert!(found.field.ends_with(field), "{found}");
    }
}

/// Up to the comma or bracket that ends it.
fn whole_value(rest: &str) -> &str {
    let (mut depth, mut quoted) = (0, false);
    for (i, c) in rest.char_indices() {
        match c {
            '"' => quoted = !quoted,
            _ if quoted => {}
            '(' | '[' | '{' => depth += 1,
            ')' | ']' | '}' | ',' if depth == 0 => return &rest[..i],
            ')' | ']' | '}' => depth -= 1,
            _ => {}
        }
    }
    rest
}

#[test]
fn a_missing_field_is_named() {
    let template = template::session();
    for path in [
        "version",
        "crystal",
        "crystal.cell",
        "crystal.cell.gamma_deg",
        "crystal.symmetry",
        "radiation",
        "radiation.XrayLine.name",
        "machine",
        "machine.Inline.name",
        "machine.Inline.sample_axes",
        "machine.Inline.sample_axes[0].name",
        "machine.Inline.sample_axes[0].limits",
        "machine.Inline.sample_axes[0].limits.Intervals[0].to_deg",
        "machine.Inline.sample_axes[1].approach.Upward.overshoot_deg",
        "machine.Inline.detector_axes",
        "peaks[0].l",
        "peaks[0].readings_deg",
        "rules[0].Hold.at_deg",
        "preference.NearestTo.readings_deg",
        "targets",
        "targets.SpacingRange.min_angstrom",
        "orientation.u",
    ] {
        let field = path.rsplit('.').next().unwrap();
        let (text, _) = template::with(&template, path, "▸GONE");
        let start = text.find(&format!("{field}: GONE")).unwrap();
        let rest = text[start..].trim_start_matches(|c| c != ',' && c != ')').trim_start_matches(',');
        let text = format!("{}{rest}", &text[..start]);
        let found = problem(text.as_bytes());
        assert!(found.message.contains(&format!("the field {field} is missing")), "{path}: {found}");
        assert_eq!(found.field, path);
    }
}

#[test]
fn broken_forms_are_placed_where_they_break() {
    let text = good();
    let at = |piece: &str| text.find(piece).unwrap();
    let no_comma = text.replacen("7.31,", "7.31", 1);
    expect(&no_comma, at("7.31,") + 5, "met b_angstrom; accepted is a comma");
    let no_colon = text.replacen("a_angstrom:", "a_angstrom", 1);
    expect(&no_colon, at("7.31,") - 1, "met 7.31; accepted is a colon");
    let degree = text.replacen("102.5,", "102.5°,", 1);
    expect(&degree, at("102.5,") + 5, "met °; accepted is a comma");
    let quote = text.replacen("title: \"first night\"", "title: \"first", 1);
    assert!(problem(quote.as_bytes()).line >= 4);
    let comment = text.replacen("/* tilts", "/* /* tilts", 1);
    assert!(problem(comment.as_bytes()).message.contains("closing */"));
    let end = text.trim_end().trim_end_matches(')');
    expect(end, end.len(), "accepted is");
    let more = format!("{text}(version: 1)");
    expect(&more, text.len(), "stands after the end");
    let quoted_field = text.replacen("title:", "\"title\":", 1);
    expect(&quoted_field, at("title:"), "\"title\" is no field name");
}

#[test]
fn texts_that_are_no_session_are_refused_politely() {
    for empty in ["", "  \n\n ", "// nothing but a comment", "/* */\n"] {
        let found = problem(empty.as_bytes());
        assert!(found.message.contains("the file is empty; a session file begins with (version: 1"), "{found}");
    }
    let found = problem(b"(\n  version: 1, title: \"\xFF\")");
    assert_eq!((found.line, found.column), (2, 23));
    assert!(found.message.contains("0xFF is no UTF-8"), "{found}");
    for nested in ["(", "[", "{", "((a:", "Some(", "Inline(", "(version:1,peaks:[", "(crystal:("] {
        let found = problem(nested.repeat(100_000).as_bytes());
        assert_eq!(found.line, 1, "{found}");
    }
    let deep = format!("(version: 1, title: {}5{})", "(".repeat(100_000), ")".repeat(100_000));
    assert!(problem(deep.as_bytes()).message.contains("accepted is a text in quotes"));
    let deep = good().replacen("7.31", &format!("{}5{}", "[".repeat(100_000), "]".repeat(100_000)), 1);
    assert!(problem(deep.as_bytes()).field == "crystal.cell.a_angstrom");
    let large = vec![b' '; 20_000_001];
    assert!(problem(&large).message.contains("at most 20 MB"));
    assert!(read_machine(std::str::from_utf8(&large).unwrap(), "m.ron").unwrap_err().message.contains("at most 20 MB"));
}

#[test]
fn a_mark_of_byte_order_and_windows_line_ends_do_no_harm() {
    let text = good();
    assert_eq!(Session::from_text(&format!("\u{FEFF}{text}"), "").unwrap(), Session::from_text(&text, "").unwrap());
    let windows = text.replace('\n', "\r\n");
    assert_eq!(Session::from_text(&windows, "").unwrap(), Session::from_text(&text, "").unwrap());
    let wrong = windows.replacen("7.31", "-7.31", 1);
    expect(&wrong, wrong.find("-7.31").unwrap(), "-7.31 is not a length");
}

#[test]
fn some_may_be_written_or_left_out() {
    let text = good();
    let written = text.replacen("uncertainty_deg: 0.02", "uncertainty_deg: Some(0.02)", 1);
    assert_ne!(written, text);
    assert_eq!(Session::from_text(&written, "").unwrap(), Session::from_text(&text, "").unwrap());
}

/// The place lies in the text, or just behind its end.
fn placed(bytes: &[u8]) -> Result<(), TestCaseError> {
    let Err(error) = Session::from_bytes(bytes, "night.ron") else { return Ok(()) };
    let SessionError::Problems(problems) = error else { return Err(TestCaseError::fail("no place")) };
    let text = String::from_utf8_lossy(bytes);
    let text = text.strip_prefix('\u{FEFF}').unwrap_or(&text);
    for p in problems {
        let line = text.split('\n').nth(p.line - 1);
        prop_assert!(line.is_some_and(|line| p.column >= 1 && p.column <= line.chars().count() + 1), "{p}");
        prop_assert!(!p.message.is_empty() && p.file == "night.ron");
    }
    Ok(())
}

/// Cuts, doubles, swaps and foreign pieces.
fn mutated(text: &str, edits: &[(usize, usize, u8, String)]) -> Vec<u8> {
    let mut bytes = text.as_bytes().to_vec();
    for (at, length, kind, piece) in edits {
        let start = at % bytes.len().max(1);
        let end = (start + length % 40).min(bytes.len());
        let cut: Vec<u8> = bytes[start..end].to_vec();
        match kind % 4 {
            0 => drop(bytes.drain(start..end)),
            1 => drop(bytes.splice(start..start, cut)),
            2 => drop(bytes.splice(start..end, piece.bytes())),
            _ => bytes[start..end].reverse(),
        }
    }
    bytes
}

proptest! {
    #![proptest_config(cases())]

    #[test]
    fn arbitrary_bytes_never_panic(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        placed(&bytes)?;
    }

    #[test]
    fn arbitrary_marks_never_panic(text in "[(){}\\[\\]\"'/*:,#!rb\\\\ \na1._-]{0,200}") {
        placed(text.as_bytes())?;
    }

    #[test]
    fn a_damaged_session_never_panics(
        edits in prop::collection::vec((any::<usize>(), any::<usize>(), any::<u8>(), "[(){}\\[\\]\"'/*:,#!r\\\\ \n1.e-]{0,4}|NaN|inf|Some\\(|\u{0}|µ"), 1..6)
    ) {
        placed(&mutated(&good(), &edits))?;
    }
}
