//! What a user is promised, on the real command.

mod bad_input; // every refusal names key, value, allowed range and line, and writes nothing
mod calibrations; // `calibrate`: strength from the bench
mod checks; // `check` and what it spans
mod command_line; // verbs, exit codes, JSON, completions
mod interruptions; // killed, full disk, two writers
mod pictures; // films and stills, with no graphics hardware
mod readme; // the README tells the truth
mod runs; // `run` and its folder
mod scenes; // every file in scenes/ loads, describes itself and runs a little
mod studies; // `study`: same bits, intervals, early stop
mod support;
