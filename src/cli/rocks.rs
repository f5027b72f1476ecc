//! `rocks`: the catalogue.

use std::io::Write;

use spallcast::input::read_settings;
use spallcast::output::rock_table;
use spallcast::rock::Resolution;
use spallcast::rock::catalogue::{Catalogue, Rock};

use super::args::RocksArgs;
use super::exit::{Exit, Stop};

/// Prints the catalogue, or one rock of it.
pub fn run(args: &RocksArgs) -> Result<Exit, Stop> {
    let catalogue = match &args.settings {
        Some(path) => read_settings(path)?.catalogue,
        None => Catalogue::embedded(),
    };
    let only = args.rock.as_deref().map(|name| find(&catalogue, name)).transpose()?;
    let text = if args.json { rock_table::json(&catalogue, only) } else { rock_table::text(&catalogue, only) };
    let mut out = std::io::stdout().lock();
    out.write_all(text.as_bytes())?;
    if !text.ends_with('\n') {
        writeln!(out)?;
    }
    out.flush()?;
    Ok(Exit::Done)
}

/// A rock by name or alias, or a usage error with the nearest names.
pub fn find<'a>(catalogue: &'a Catalogue, name: &str) -> Result<&'a Rock, Stop> {
    match catalogue.resolve(name) {
        Resolution::Rock(key) => Ok(catalogue.rock(&key).expect("a resolved rock is in the catalogue")),
        Resolution::Unknown => Err(Stop::Usage(format!("{name:?} names no rock; run `spallcast rocks` for the names"))),
        Resolution::NotFound { nearest } => {
            let hint = if nearest.is_empty() { String::new() } else { format!("; nearest: {}", nearest.join(", ")) };
            Err(Stop::Usage(format!(
                "rock {name:?} is not in the catalogue{hint}; run `spallcast rocks` for the names"
            )))
        }
    }
}
