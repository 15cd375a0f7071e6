//! The `bedswell` command.

/// Runs the command.
pub fn main() -> std::process::ExitCode {
    std::process::ExitCode::SUCCESS
}
