//! The window on a run.

fn main() -> std::process::ExitCode {
    bedswell_viewer::main()
}
