//! `completions` and `man`: made from the same definitions as the command line itself.

use std::io::Write;

use clap::CommandFactory;

use super::args::{Cli, CompletionsArgs, ManArgs};
use super::exit::{Exit, Stop};

/// Prints the completions of a shell.
pub fn completions(args: &CompletionsArgs) -> Result<Exit, Stop> {
    // Into memory first: the generator panics on a closed pipe.
    let mut text = Vec::new();
    clap_complete::generate(args.shell, &mut Cli::command(), "spallcast", &mut text);
    let mut out = std::io::stdout().lock();
    out.write_all(&text)?;
    out.flush()?;
    Ok(Exit::Done)
}

/// Writes one page for the program and one for each command into a folder.
pub fn man(args: &ManArgs) -> Result<Exit, Stop> {
    let failed = |e: std::io::Error| Stop::Failed(format!("{}: {e}; choose a folder of your own", args.dir.display()));
    std::fs::create_dir_all(&args.dir).map_err(failed)?;
    clap_mangen::generate_to(Cli::command(), &args.dir).map_err(failed)?;
    Ok(Exit::Done)
}
