use crate::exit::Exit;
use crate::output::{say, say_json};
use anyhow::Context;
use std::io::Write;
use std::path::Path;

/// The scene that every user starts from, with a comment on every key.
const STARTER: &str = include_str!("../../../../scenes/tree-pit.toml");

/// Writes the starter scene; a file that exists is left alone.
pub(super) fn new(path: &Path, json: bool) -> anyhow::Result<Exit> {
    let mut file = std::fs::File::create_new(path)
        .with_context(|| format!("cannot write {}; choose a name that is free", path.display()))?;
    file.write_all(STARTER.as_bytes()).with_context(|| format!("cannot write {}", path.display()))?;
    if json {
        say_json(&serde_json::json!({ "written": path }))?;
    } else {
        say(&format!(
            "{path} is ready to edit; see what it comes to with: bedswell describe {path}",
            path = path.display()
        ))?;
    }
    Ok(Exit::Done)
}
