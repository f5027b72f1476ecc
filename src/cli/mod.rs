//! The command line: flags, plan, runs, exit codes, messages. The only part that prints, exits and owns threads.

pub mod args;
pub mod assess;
pub mod check;
pub mod demo;
pub mod exit;
pub mod interrupt;
pub mod manual;
pub mod messages;
pub mod plan;
pub mod probe;
pub mod probe_picture;
pub mod rocks;
pub mod schema;
pub mod stream;
pub mod summary;
