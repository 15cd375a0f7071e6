//! The window on a run: Bevy, input, panels. What a run's picture shows comes from
//! `bedswell-picture`; without a graphics card `bedswell-painter` draws it.

mod args;
mod bed;
mod card;
mod driver;
mod error;
mod gpu;
mod keys;
mod live;
mod pane;
mod picture_file;
mod settings;
mod strip;
mod study;
mod subject;
mod theme;
mod viewer;
mod window;

pub use args::{Arguments, DrawnBy};
pub use driver::{Driver, NoWindow, find_driver};
pub use error::ViewError;
pub use gpu::Recorder;
pub use study::StudyReadError;

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
    match perform(&arguments, start) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            complain(&error);
            ExitCode::from(error.code())
        }
    }
}

/// Opens the window and stays until it is closed, or draws for another program.
fn perform(arguments: &Arguments, start: Instant) -> Result<(), ViewError> {
    let Some(path) = arguments.path.as_deref().filter(|_| !arguments.draw) else {
        let mut recorder = Recorder::new()?;
        let (mut input, mut output) = (std::io::stdin().lock(), std::io::stdout().lock());
        return Ok(bedswell_film::serve(&mut recorder, &mut input, &mut output)?);
    };
    let subject = subject::open(path, arguments)?;
    driver::find_display()?;
    let driver = find_driver()?;
    let viewer = viewer::Viewer::new(arguments, subject, start);
    window::open(viewer, arguments.size, arguments.drawn_by, driver)?;
    Ok(())
}

#[allow(clippy::print_stderr, reason = "the one place where the viewer complains")]
fn complain(error: &ViewError) {
    eprintln!("error: {error}");
}
