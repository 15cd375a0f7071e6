use std::fmt;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use thiserror::Error;

/// Where in a file something stands.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Place {
    /// The file.
    pub file: Arc<Path>,
    /// Line, from 1.
    pub line: usize,
}

impl fmt::Display for Place {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}, line {}", self.file.display(), self.line)
    }
}

/// Why a scene or study file was refused.
#[derive(Debug, Error)]
pub enum SceneError {
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
    /// A key the format does not know.
    #[error("{place}: unknown key `{key}`{}", advice(suggestion, known))]
    UnknownKey {
        /// Where.
        place: Place,
        /// The key as written, with its table.
        key: String,
        /// The nearest known key, if one is near.
        suggestion: Option<String>,
        /// All keys that may stand there.
        known: Vec<String>,
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

fn advice(suggestion: &Option<String>, known: &[String]) -> String {
    match suggestion {
        Some(key) => format!("; did you mean `{key}`?"),
        None => format!("; the keys known here are {}", known.join(", ")),
    }
}
