//! How long work asks whether to go on, and says how far it is. The core has no clock: whoever waits decides.

/// The voice of whoever waits for a long piece of work. It may be asked from several threads.
pub trait Pace: Sync {
    /// Told that `done` of `of` equal parts are finished. Answers whether to go on; after a no the work ends without a
    /// result, as soon as it can.
    fn proceed(&self, done: usize, of: usize) -> bool;
}

/// Goes on to the end and tells nobody.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq)]
pub struct Unhurried;

impl Pace for Unhurried {
    fn proceed(&self, _done: usize, _of: usize) -> bool {
        true
    }
}
