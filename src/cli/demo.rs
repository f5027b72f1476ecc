//! `demo DIR`: writes the demo fire's inputs and assesses them.

use super::args::{AssessArgs, DemoArgs, InputArgs};
use super::exit::{Exit, Stop};
use super::messages::Messages;
use super::{assess, plan::Plan};

/// The inputs, carried in the program; see `fixtures/demo/README.md`.
const FILES: [(&str, &[u8]); 5] = [
    ("burns.geojson", include_bytes!("../../fixtures/demo/burns.geojson")),
    ("boulders.geojson", include_bytes!("../../fixtures/demo/boulders.geojson")),
    ("trails.geojson", include_bytes!("../../fixtures/demo/trails.geojson")),
    ("terrain.tif", include_bytes!("../../fixtures/demo/terrain.tif")),
    ("settings.toml", include_bytes!("../../fixtures/demo/settings.toml")),
];

/// Writes and runs the demo. Its refused records are part of the show: it ends well although some are not assessed.
pub fn run(args: &DemoArgs) -> Result<Exit, Stop> {
    let messages = Messages { quiet: args.quiet, json: false };
    let failed = |e: std::io::Error| {
        Stop::Failed(format!("{}: the demo's inputs cannot be written: {e}; name another folder", args.dir.display()))
    };
    std::fs::create_dir_all(&args.dir).map_err(failed)?;
    for (name, bytes) in FILES {
        std::fs::write(args.dir.join(name), bytes).map_err(failed)?;
    }
    messages.say(&format!("an invented fire in an invented place, written to {}", args.dir.display()));
    let file = |name: &str| Some(args.dir.join(name));
    let settings = args.dir.join("settings.toml");
    let plan = Plan::assess(&AssessArgs {
        inputs: InputArgs {
            burn: file("burns.geojson"),
            boulders: file("boulders.geojson"),
            trails: file("trails.geojson"),
            terrain: file("terrain.tif"),
            settings: Some(settings),
        },
        out: file("results"),
        quiet: args.quiet,
        ..AssessArgs::default()
    })?;
    assess::run_plan(plan).map(|_| Exit::Done)
}
