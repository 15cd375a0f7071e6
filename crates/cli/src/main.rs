//! The `bedswell` command.

fn main() -> std::process::ExitCode {
    bedswell_cli::main()
}
