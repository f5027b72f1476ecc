//! Interruption (Ctrl-C, a job's time limit): the run ends between two steps, never within a line or a commit.
//!
//! A thread waits for the signal. Whoever writes holds the gate, and the thread passes through it before it ends the
//! process: a stream's lines are whole, and a folder's owner, who holds the gate as long as there is something to clean up,
//! looks at [`check`] between its steps and ends the run itself.

use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Mutex, MutexGuard, PoisonError};

use super::exit::{Exit, Stop};
use super::messages::Messages;

static ASKED: AtomicBool = AtomicBool::new(false);
/// The run itself saw that it was asked, and ends.
static NOTICED: AtomicBool = AtomicBool::new(false);
static GATE: Mutex<()> = Mutex::new(());

/// Watches for an interruption from here on. `left` says what an ended run leaves behind.
pub fn watch(messages: Messages, left: &'static str) {
    // A second run in one process finds the watch in place.
    let _ = ctrlc::set_handler(move || {
        ASKED.store(true, Ordering::SeqCst);
        let _gate = hold();
        if NOTICED.load(Ordering::SeqCst) {
            return;
        }
        Stop::Interrupted(left).end(&messages);
        std::process::exit(Exit::Failed as i32);
    });
}

/// Keeps the process from being ended until the guard goes.
pub fn hold() -> MutexGuard<'static, ()> {
    GATE.lock().unwrap_or_else(PoisonError::into_inner)
}

/// An error once the run was asked to end.
///
/// Whoever asks must hold the gate: the error promises that the run ends on its own.
pub fn check(left: &'static str) -> Result<(), Stop> {
    if !ASKED.load(Ordering::Relaxed) {
        return Ok(());
    }
    NOTICED.store(true, Ordering::SeqCst);
    Err(Stop::Interrupted(left))
}
