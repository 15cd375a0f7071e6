use crate::args::Arguments;
use crate::exit::Exit;
use crate::output::{say, say_json};
use clap::CommandFactory;
use clap_complete::{Shell, generate};

/// Prints the completion script of a shell.
pub(super) fn completions(shell: Shell, json: bool) -> anyhow::Result<Exit> {
    let mut script = Vec::new();
    generate(shell, &mut Arguments::command(), "bedswell", &mut script);
    let script = String::from_utf8(script)?;
    if json {
        say_json(&serde_json::json!({ "shell": shell.to_string(), "script": script }))?;
    } else {
        say(script.trim_end())?;
    }
    Ok(Exit::Done)
}
