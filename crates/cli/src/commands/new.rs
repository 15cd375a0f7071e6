use crate::exit::Exit;
use crate::output::{say, say_json};
use anyhow::Context;
use bedswell_film::STANDARD_SHOTS;
use std::io::Write;
use std::path::Path;

/// The scene that every user starts from, with a comment on every key.
const STARTER: &str = include_str!("../../../../scenes/tree-pit.toml");

/// Writes the starter scene or the standard shots; a file that exists is left alone.
pub(super) fn new(path: &Path, film: bool, json: bool) -> anyhow::Result<Exit> {
    let mut file = std::fs::File::create_new(path)
        .with_context(|| format!("cannot write {}; choose a name that is free", path.display()))?;
    let text = if film { STANDARD_SHOTS } else { STARTER };
    file.write_all(text.as_bytes()).with_context(|| format!("cannot write {}", path.display()))?;
    if json {
        say_json(&serde_json::json!({ "written": path }))?;
    } else {
        let path = path.display();
        say(&if film {
            format!("{path} is ready to edit; use it with: bedswell film DIR --shots {path} --out clip.mp4")
        } else {
            format!("{path} is ready to edit; see what it comes to with: bedswell describe {path}")
        })?;
    }
    Ok(Exit::Done)
}
