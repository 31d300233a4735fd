//! The parser's refusals in the words of a person.

use ron::Error as Code;

use super::place::Step;

/// Whether a refusal is about the value of the field that the path leads to, and not about commas and brackets.
pub(super) fn is_about_a_value(code: &Code) -> bool {
    matches!(
        code,
        Code::Message(_)
            | Code::InvalidValueForType { .. }
            | Code::ExpectedDifferentLength { .. }
            | Code::ExpectedArray
            | Code::ExpectedBoolean
            | Code::ExpectedFloat
            | Code::ExpectedInteger
            | Code::ExpectedIdentifier
            | Code::SuggestRawIdentifier(_)
            | Code::InvalidIdentifier(_)
            | Code::ExpectedMap
            | Code::ExpectedString
            | Code::ExpectedStructLike
            | Code::ExpectedNamedStructLike(_)
            | Code::ExpectedDifferentStructName { .. }
            | Code::IntegerOutOfBounds
            | Code::InvalidIntegerDigit { .. }
    )
}

/// Whether a name without quotes was wanted.
pub(super) fn is_no_name(code: &Code) -> bool {
    matches!(code, Code::ExpectedIdentifier | Code::SuggestRawIdentifier(_) | Code::InvalidIdentifier(_))
}

/// `met` is what stands at the place, `accepted` the names of an enum where they are known.
pub(super) fn refusal(code: &Code, met: &str, field: &[Step], accepted: &[&str]) -> String {
    match code {
        Code::Message(message) => message.clone(),
        Code::InvalidValueForType { expected, .. } => format!("{met} is not {expected}"),
        Code::ExpectedDifferentLength { expected, found } => {
            format!("{met} has {found} elements; accepted is {expected}")
        }
        Code::NoSuchEnumVariant { expected, found, .. } => {
            format!("there is no {found} here; accepted {}", list(expected))
        }
        Code::NoSuchStructField { expected, found, .. } => {
            format!("there is no field {found} here; accepted {}", list(expected))
        }
        Code::MissingStructField { field, .. } => {
            format!("the field {field} is missing; accepted is {field}: and a value")
        }
        Code::DuplicateStructField { field, .. } => format!("the field {field} stands here twice; accepted is one"),
        code if is_no_name(code) && !accepted.is_empty() => {
            format!("{met} is not accepted here; accepted {}", list(accepted))
        }
        code if is_no_name(code) => format!("{met} is no field name; accepted is a name, without quotes, and a colon"),
        Code::ExpectedInteger | Code::IntegerOutOfBounds | Code::InvalidIntegerDigit { .. } => {
            format!("{met} is not {}", whole_number(field))
        }
        Code::ExceededRecursionLimit => "brackets are nested more than 100 deep; no field of this file is".to_owned(),
        Code::Eof => "the text ends too early; accepted is a closing bracket for each that was opened".to_owned(),
        Code::TrailingCharacters => {
            format!("{met} stands after the end; accepted are comments after the closing bracket")
        }
        Code::ExpectedStringEnd => "a text in quotes does not end; accepted is a closing \"".to_owned(),
        Code::UnclosedBlockComment => "a comment /* does not end; accepted is a closing */".to_owned(),
        Code::InvalidEscape(what) => format!("{what}; accepted after a backslash are n, r, t, \\, \" and u{{…}}"),
        _ => format!("met {met}; accepted is {}", form(code)),
    }
}

/// What the form of the file asks for.
fn form(code: &Code) -> String {
    match code {
        Code::ExpectedArray => "a list in square brackets: [ … ]",
        Code::ExpectedArrayEnd => "a comma or the closing ] of the list",
        Code::ExpectedBoolean => "true or false",
        Code::ExpectedComma => "a comma or the closing bracket",
        Code::ExpectedFloat => "a number",
        Code::ExpectedMap => "names and values in curly brackets: { \"name\": 1.5, … }",
        Code::ExpectedMapColon => "a colon between name and value",
        Code::ExpectedMapEnd => "a comma or the closing }",
        Code::ExpectedOption => "a value, or None",
        Code::ExpectedString => "a text in quotes: \"…\"",
        Code::ExpectedStructLike | Code::ExpectedNamedStructLike(_) | Code::ExpectedDifferentStructName { .. } => {
            "( … ), with the fields between the brackets"
        }
        Code::ExpectedStructLikeEnd | Code::ExpectedOptionEnd => "a comma or the closing )",
        Code::ExpectedAttribute | Code::ExpectedAttributeEnd | Code::NoSuchExtension(_) => {
            "a file that begins with (, without attributes"
        }
        other => return format!("a well-formed text ({other})"),
    }
    .to_owned()
}

/// Whole numbers stand in few places only.
fn whole_number(field: &[Step]) -> &'static str {
    match field.last() {
        Some(Step::Name(name)) if name == "Number" => "the number of a space group, a whole number from 1 to 230",
        Some(Step::Name(name)) if name == "version" => "the version of the format, the whole number 1",
        _ => "a whole number that fits here",
    }
}

/// `are a, b and c` or `is a`.
fn list(names: &[&str]) -> String {
    match names {
        [] => "is nothing".to_owned(),
        [only] => format!("is {only}"),
        [most @ .., last] => format!("are {} and {last}", most.join(", ")),
    }
}
