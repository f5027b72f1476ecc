//! Exit codes, and the errors that end a command.

use crate::cli::messages::Messages;

/// How a command ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Exit {
    /// All assessed; a closed pipe too.
    Done = 0,
    /// Failed; nothing was written.
    Failed = 1,
    /// The command line does not make sense.
    Usage = 2,
    /// Finished, some not assessed.
    Partly = 3,
}

/// Why a command ended early.
#[derive(Debug)]
pub enum Stop {
    /// The command line does not make sense.
    Usage(String),
    /// An input cannot be used.
    Input(Box<spallcast::input::InputError>),
    /// Anything else that leaves nothing written: where, what, what to do.
    Failed(String),
    /// The reader of our output went away.
    ClosedPipe,
    /// Asked to end (Ctrl-C, a job's time limit); what is left behind.
    Interrupted(&'static str),
}

impl From<spallcast::input::InputError> for Stop {
    fn from(error: spallcast::input::InputError) -> Stop {
        Stop::Input(Box::new(error))
    }
}

/// A result on its way to standard output or a file.
impl From<std::io::Error> for Stop {
    fn from(error: std::io::Error) -> Stop {
        if error.kind() == std::io::ErrorKind::BrokenPipe {
            Stop::ClosedPipe
        } else {
            Stop::Failed(format!("cannot write: {error}; check that the disk has room and the folder may be written"))
        }
    }
}

impl Stop {
    /// Tells the user and gives the exit code.
    pub fn end(self, messages: &Messages) -> Exit {
        match self {
            Stop::ClosedPipe => Exit::Done,
            Stop::Usage(text) => {
                messages.error(&text);
                Exit::Usage
            }
            Stop::Interrupted(left) => {
                messages.error(&format!("interrupted; {left}"));
                Exit::Failed
            }
            Stop::Failed(text) => {
                messages.error(&text);
                Exit::Failed
            }
            Stop::Input(error) => {
                messages.input_error(*error);
                Exit::Failed
            }
        }
    }
}
