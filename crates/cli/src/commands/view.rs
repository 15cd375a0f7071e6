use crate::exit::{Exit, Usage};
use crate::picture_args::{DrawnBy, View};
use anyhow::Context;
use bedswell_film::{OtherProgram, Painter, Renderer};
use std::env::consts::EXE_SUFFIX;
use std::path::{Path, PathBuf};
use std::process::Command;

const NOT_BUILT: &str = "the viewer is not built yet; build it with `cargo install --locked --debug --path \
                         crates/viewer` (films and stills by the painter do not need it)";

/// Starts the viewer, which is a program of its own: who never looks never builds it.
pub(super) fn view(arguments: &View) -> anyhow::Result<Exit> {
    let program = find_viewer()?;
    let status = Command::new(&program)
        .args(&arguments.arguments)
        .status()
        .with_context(|| format!("cannot start {}", program.display()))?;
    Ok(match status.code() {
        Some(0) => Exit::Done,
        Some(2) => Exit::Input,
        Some(3) => Exit::Output,
        _ => Exit::Failed,
    })
}

/// Who draws films and stills.
pub(super) fn renderer(drawn_by: DrawnBy) -> anyhow::Result<Box<dyn Renderer + Send>> {
    Ok(match drawn_by {
        DrawnBy::Painter => Box::new(Painter),
        DrawnBy::Bevy => Box::new(OtherProgram::start(Command::new(find_viewer()?).arg("--draw"))?),
    })
}

/// The viewer beside this program, in the folder of another build of it, or on the path.
fn find_viewer() -> Result<PathBuf, Usage> {
    let name = format!("bedswell-viewer{EXE_SUFFIX}");
    let here = std::env::current_exe().unwrap_or_default();
    let folder = here.parent().unwrap_or(Path::new("."));
    let beside = [folder.to_owned(), folder.join("../debug"), folder.join("../release")];
    let path = std::env::var_os("PATH").unwrap_or_default();
    beside
        .into_iter()
        .chain(std::env::split_paths(&path))
        .map(|folder| folder.join(&name))
        .find(|program| program.is_file())
        .ok_or_else(|| Usage(NOT_BUILT.into()))
}
