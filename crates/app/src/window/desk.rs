//! Long work off the UI thread: one worker derives everything from the session, stage by stage. A newer question stops the
//! one before it, an answer to an earlier question is dropped, and the last answer stays until a new one is complete.

use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};
use std::sync::mpsc::{Receiver, Sender, channel};
use std::sync::{Arc, Condvar, Mutex, PoisonError};

use ringwright_core::pace::Pace;
use ringwright_core::session::{MachineLibrary, Session};

use super::derive::{Answer, Chain};
use super::shared::{Busy, Results};

/// What the worker is asked for.
struct Question {
    revision: u64,
    session: Session,
    library: MachineLibrary,
    ticket: Arc<Ticket>,
}

/// How far a piece of work is, and whether it should go on.
#[derive(Debug, Default)]
pub struct Ticket {
    stopped: AtomicBool,
    done: AtomicUsize,
    of: AtomicUsize,
    stage: AtomicUsize,
}

/// What the worker does, in order.
pub const STAGES: [&str; 4] = ["checking the inputs", "orienting", "judging reflections", "ordering the drive list"];

impl Ticket {
    pub(super) fn begin(&self, stage: usize) {
        self.stage.store(stage, Ordering::Relaxed);
        self.done.store(0, Ordering::Relaxed);
        self.of.store(0, Ordering::Relaxed);
    }

    pub(super) fn is_stopped(&self) -> bool {
        self.stopped.load(Ordering::Relaxed)
    }

    fn busy(&self) -> Busy {
        let (done, of) = (self.done.load(Ordering::Relaxed), self.of.load(Ordering::Relaxed));
        let stage = STAGES.get(self.stage.load(Ordering::Relaxed)).copied().unwrap_or_default();
        Busy { stage, fraction: (of > 0).then(|| done.min(of) as f32 / of as f32) }
    }
}

impl Pace for Ticket {
    fn proceed(&self, done: usize, of: usize) -> bool {
        self.done.fetch_max(done, Ordering::Relaxed);
        self.of.store(of, Ordering::Relaxed);
        !self.is_stopped()
    }
}

/// Where the next question waits; only the newest does.
#[derive(Default)]
struct Mailbox {
    post: Mutex<Post>,
    arrived: Condvar,
}

impl Mailbox {
    /// The next question; nothing when the window has closed.
    fn wait(&self) -> Option<Question> {
        let mut waiting = self.post.lock().unwrap_or_else(PoisonError::into_inner);
        loop {
            match std::mem::take(&mut *waiting) {
                Post::Closed => return None,
                Post::Asked(question) => return Some(*question),
                Post::Empty => waiting = self.arrived.wait(waiting).unwrap_or_else(PoisonError::into_inner),
            }
        }
    }

    fn put(&self, post: Post) {
        *self.post.lock().unwrap_or_else(PoisonError::into_inner) = post;
        self.arrived.notify_one();
    }
}

#[derive(Default)]
enum Post {
    #[default]
    Empty,
    Asked(Box<Question>),
    Closed,
}

/// The window's side of the worker.
pub struct Desk {
    mailbox: Arc<Mailbox>,
    answers: Receiver<(u64, Answer)>,
    ticket: Arc<Ticket>,
    revision: u64,
    working: bool,
}

impl Desk {
    /// Starts the worker. `wake` is called whenever an answer waits.
    ///
    /// # Errors
    /// If the system gives no thread.
    pub fn new(wake: impl Fn() + Send + 'static) -> std::io::Result<Self> {
        let mailbox = Arc::new(Mailbox::default());
        let (sender, answers) = channel();
        let theirs = Arc::clone(&mailbox);
        std::thread::Builder::new().name("derive".to_owned()).spawn(move || work(&theirs, &sender, &wake))?;
        Ok(Self { mailbox, answers, ticket: Arc::default(), revision: 0, working: false })
    }

    /// Asks for everything that follows from a session; stops what was asked before.
    pub fn ask(&mut self, session: Session, library: MachineLibrary, results: &mut Results) {
        self.ticket.stopped.store(true, Ordering::Relaxed);
        self.ticket = Arc::default();
        self.revision += 1;
        self.working = true;
        results.stopped = false;
        results.busy = Some(self.ticket.busy());
        results.reach_is_stale = true;
        let question = Question { revision: self.revision, session, library, ticket: Arc::clone(&self.ticket) };
        self.mailbox.put(Post::Asked(Box::new(question)));
    }

    /// Stops the work in hand. What it has found so far stays.
    pub fn stop(&self) {
        self.ticket.stopped.store(true, Ordering::Relaxed);
    }

    /// Takes in what the worker has found since.
    pub fn collect(&mut self, results: &mut Results) {
        while let Ok((revision, answer)) = self.answers.try_recv() {
            if revision == self.revision {
                self.working &= !answer.ends();
                answer.put_into(results);
            }
        }
        results.busy = self.working.then(|| self.ticket.busy());
    }
}

impl Drop for Desk {
    fn drop(&mut self) {
        self.stop();
        self.mailbox.put(Post::Closed);
    }
}

/// One thread is left to the window.
fn threads() -> usize {
    std::thread::available_parallelism().map_or(1, |n| n.get().saturating_sub(1).max(1))
}

fn work(mailbox: &Mailbox, sender: &Sender<(u64, Answer)>, wake: &dyn Fn()) {
    // This thread and its helpers are the pool; without one, parallel work takes the default pool.
    let _pool = rayon::ThreadPoolBuilder::new().num_threads(threads()).use_current_thread().build();
    let mut chain = Chain::default();
    while let Some(question) = mailbox.wait() {
        chain.derive(&question.session, &question.library, &question.ticket, &mut |answer| {
            // Nobody listens any more once the window is closed.
            let _ = sender.send((question.revision, answer));
            wake();
        });
    }
}
