//! The real command, built here so that the tests can start it.

fn main() -> std::process::ExitCode {
    bedswell_cli::main()
}
