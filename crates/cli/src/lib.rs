//! The `bedswell` command: arguments in, words or JSON out. All work is done by
//! `bedswell-sim`.

mod args;
mod commands;
mod exit;
mod output;
mod picture_args;
mod progress;

use args::Arguments;
use clap::Parser;
use exit::Exit;
use std::process::ExitCode;

/// Runs the command with the arguments of the process.
pub fn main() -> ExitCode {
    let arguments = match Arguments::try_parse() {
        Ok(arguments) => arguments,
        Err(error) => {
            // Help and version go to standard output and are no error.
            let _ = error.print();
            return if error.use_stderr() { Exit::Input } else { Exit::Done }.into();
        }
    };
    match commands::perform(&arguments) {
        Ok(exit) => exit.into(),
        Err(error) => {
            let exit = Exit::of(&error);
            output::complain(&error, exit, arguments.json);
            exit.into()
        }
    }
}
