//! `schema` and `template`: what goes in and out, for machines and for people who begin.

use std::fs::File;
use std::io::{ErrorKind, Write};

use spallcast::output::{schema, template};

use super::args::{SchemaArgs, TemplateArgs};
use super::exit::{Exit, Stop};

/// Prints the schema, or one part of it.
pub fn schema(args: &SchemaArgs) -> Result<Exit, Stop> {
    let value = match &args.part {
        None => schema::document(),
        Some(part) => schema::part(part).ok_or_else(|| {
            Stop::Usage(format!("schema {part:?} is not a part; expected one of {}", schema::PARTS.join(", ")))
        })?,
    };
    let mut out = std::io::stdout().lock();
    out.write_all(schema::text(&value).as_bytes())?;
    out.flush()?;
    Ok(Exit::Done)
}

/// Prints the template, or writes its files into a folder. A file that is there already is left alone.
pub fn template(args: &TemplateArgs) -> Result<Exit, Stop> {
    let mut out = std::io::stdout().lock();
    let Some(folder) = &args.dir else {
        out.write_all(template::one_text().as_bytes())?;
        out.flush()?;
        return Ok(Exit::Done);
    };
    let failed = |path: &std::path::Path, e: std::io::Error| match e.kind() {
        ErrorKind::AlreadyExists => {
            Stop::Failed(format!("{}: this is there already and was left alone; name another folder", path.display()))
        }
        _ => Stop::Failed(format!("{}: {e}; choose a folder of your own", path.display())),
    };
    std::fs::create_dir_all(folder).map_err(|e| failed(folder, e))?;
    let files = template::files();
    // All or none: look before the first is written.
    if let Some(there) = files.iter().map(|(name, _)| folder.join(name)).find(|p| p.exists()) {
        return Err(failed(&there, ErrorKind::AlreadyExists.into()));
    }
    for (name, text) in files {
        let path = folder.join(name);
        let write = || File::create_new(&path)?.write_all(text.as_bytes());
        write().map_err(|e| failed(&path, e))?;
        writeln!(out, "{}", path.display())?;
    }
    out.flush()?;
    Ok(Exit::Done)
}
