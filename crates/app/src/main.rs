//! The one binary: a headless verb, or the window.

mod stage;

use std::io::{self, BufWriter, IsTerminal};
use std::process::ExitCode;

use ringwright_cli::{Outcome, Streams};

fn main() -> ExitCode {
    let outcome = {
        let mut out = BufWriter::new(io::stdout().lock());
        let mut err = io::stderr();
        let err_is_terminal = err.is_terminal();
        ringwright_cli::run(std::env::args_os(), &mut Streams { out: &mut out, err: &mut err, err_is_terminal })
    };
    match outcome {
        Outcome::Finished(status) => ExitCode::from(status),
        Outcome::OpenWindow { on, machines, without_display } => stage::open(on, machines, without_display),
    }
}
