use std::io::{self, Write};
use std::path::Path;

use ringwright_core::session::write_whole;

use crate::Streams;
use crate::failure::Failure;
use crate::progress::Progress;

/// The streams with what every verb does with them.
pub struct Desktop<'a, 'b> {
    streams: &'a mut Streams<'b>,
}

impl<'a, 'b> Desktop<'a, 'b> {
    pub fn new(streams: &'a mut Streams<'b>) -> Self {
        Self { streams }
    }

    /// Says something beside the results. Nobody may be listening, and that is no reason to stop.
    pub fn tell(&mut self, text: &str) {
        let _ = self.streams.err.write_all(text.trim_end().as_bytes());
        let _ = self.streams.err.write_all(b"\n");
    }

    pub fn flush(&mut self) -> io::Result<()> {
        let _ = self.streams.err.flush();
        self.streams.out.flush()
    }

    /// A bar for work that may take long, drawn only where a person watches.
    pub fn progress(&self, what: &'static str) -> Progress {
        Progress::new(what, self.streams.err_is_terminal)
    }

    /// Writes results to a file, or to the output if there is none, and gives the status that the answer deserves. A reader
    /// that closes the pipe has seen enough: that ends quietly with the same status.
    pub fn deliver(
        &mut self,
        file: Option<&Path>,
        status: u8,
        write: impl FnOnce(&mut dyn Write) -> io::Result<()>,
    ) -> Result<u8, Failure> {
        match file {
            Some(path) => write_whole(path, write)
                .map(|()| status)
                .map_err(|error| Failure::new(format_args!("{}: cannot be written: {error}", path.display()))),
            None => match write(self.streams.out) {
                Ok(()) => Ok(status),
                Err(error) if error.kind() == io::ErrorKind::BrokenPipe => Ok(status),
                Err(error) => Err(Failure::new(format_args!("the results cannot be written: {error}"))),
            },
        }
    }
}
