use std::fmt::Display;

/// Why a verb gives up: input that cannot be used, in words for the person who gave it.
#[derive(Debug)]
pub struct Failure {
    pub message: String,
}

impl Failure {
    pub fn new(message: impl Display) -> Self {
        Self { message: message.to_string() }
    }
}
