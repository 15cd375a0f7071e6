pub use bedswell_sim::Place;
use std::path::PathBuf;
use thiserror::Error;

/// Why a shot list was refused.
#[derive(Debug, Error)]
pub enum ShotError {
    /// The file cannot be read.
    #[error("cannot read {path}: {cause}", path = path.display())]
    Unreadable {
        /// The file.
        path: PathBuf,
        /// What the system says.
        cause: std::io::Error,
    },
    /// The file is not TOML.
    #[error("{place}: {message}")]
    Syntax {
        /// Where.
        place: Place,
        /// What is wrong.
        message: String,
    },
    /// A key that means nothing there.
    #[error("{place}: `{key}` means nothing here; {advice}")]
    UnknownKey {
        /// Where.
        place: Place,
        /// The key as written, with its table.
        key: String,
        /// The key that was probably meant, or all that may stand there.
        advice: String,
    },
    /// A key that is needed.
    #[error("{place}: `{key}` is missing; {mend}")]
    Missing {
        /// The table, or the file, where it should stand.
        place: Place,
        /// The key.
        key: String,
        /// What to write.
        mend: String,
    },
    /// A value that cannot be used.
    #[error("{place}: {key} = {value}: {problem}")]
    Value {
        /// Where.
        place: Place,
        /// The key.
        key: String,
        /// The value as written.
        value: String,
        /// What is wrong, what is allowed and how to mend it.
        problem: String,
    },
}
