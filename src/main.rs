//! The `spallcast` program: parse, plan, run, exit code.

mod cli;

use clap::Parser;
use cli::args::{Cli, Command};
use cli::messages::Messages;

fn main() {
    let cli = Cli::parse();
    let (quiet, json) = match &cli.command {
        Command::Assess(args) => (args.quiet, args.json_log),
        Command::Check(args) => (args.quiet, args.json_log),
        Command::Demo(args) => (args.quiet, false),
        _ => (false, false),
    };
    let messages = Messages { quiet, json };
    let ended = match &cli.command {
        Command::Assess(args) => cli::assess::run(args),
        Command::Check(args) => cli::check::run(args),
        Command::Probe(args) => cli::probe::run(args, &messages),
        Command::Rocks(args) => cli::rocks::run(args),
        Command::Demo(args) => cli::demo::run(args),
        Command::Schema(args) => cli::schema::schema(args),
        Command::Template(args) => cli::schema::template(args),
        Command::Completions(args) => cli::manual::completions(args),
        Command::Man(args) => cli::manual::man(args),
    };
    let exit = ended.unwrap_or_else(|stop| stop.end(&messages));
    std::process::exit(exit as i32);
}
