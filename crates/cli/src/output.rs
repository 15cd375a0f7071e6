use crate::exit::Exit;
use serde::Serialize;
use std::io::{ErrorKind, Write};

/// Writes text and a line end to standard output. A reader that left early, such as
/// `head`, is no error.
pub(crate) fn say(text: &str) -> std::io::Result<()> {
    match writeln!(std::io::stdout().lock(), "{text}") {
        Err(error) if error.kind() == ErrorKind::BrokenPipe => Ok(()),
        result => result,
    }
}

/// Writes a value as indented JSON to standard output.
pub(crate) fn say_json(value: &impl Serialize) -> anyhow::Result<()> {
    say(&serde_json::to_string_pretty(value)?)?;
    Ok(())
}

/// Writes a line to the error stream, which carries progress and complaints.
pub(crate) fn note(text: &str) {
    // Nobody is left to tell when the error stream itself is closed.
    let _ = writeln!(std::io::stderr().lock(), "{text}");
}

/// Reports why a command ended early.
pub(crate) fn complain(error: &anyhow::Error, exit: Exit, json: bool) {
    if json {
        note(&serde_json::json!({ "error": format!("{error:#}"), "exit_code": exit as u8 }).to_string());
    } else {
        note(&format!("bedswell: {error:#}"));
    }
}
