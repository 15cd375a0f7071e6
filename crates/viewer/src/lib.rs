//! The window on a run: Bevy, input, panels.

mod args;
mod card;
mod demo;
mod driver;
mod gpu;
mod keys;
mod pane;
mod settings;
mod strip;
mod theme;
mod viewer;
mod window;

pub use args::{Arguments, DrawnBy, ThemeName};
pub use driver::{Driver, NoWindow, find_driver};
pub use gpu::Recorder;

use clap::Parser;
use std::process::ExitCode;
use std::time::Instant;

/// Runs the viewer with the arguments of the process.
pub fn main() -> ExitCode {
    let start = Instant::now();
    let arguments = match Arguments::try_parse() {
        Ok(arguments) => arguments,
        Err(error) => {
            // Help and version go to standard output and are no error.
            let _ = error.print();
            return ExitCode::from(if error.use_stderr() { 2 } else { 0 });
        }
    };
    match view(&arguments, start) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            complain(&error);
            ExitCode::from(2)
        }
    }
}

/// Opens the window that the arguments ask for and stays until it is closed.
fn view(arguments: &Arguments, start: Instant) -> Result<(), NoWindow> {
    driver::find_display()?;
    let driver = find_driver()?;
    let viewer = viewer::Viewer::new(arguments, start);
    window::open(viewer, arguments.size, arguments.drawn_by, driver)?;
    Ok(())
}

#[allow(clippy::print_stderr, reason = "the one place where the viewer speaks on the terminal")]
fn complain(error: &NoWindow) {
    eprintln!("error: {error}");
}
