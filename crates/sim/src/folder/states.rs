use super::{FolderError, ReadError, checksum, write_atomically};
use crate::State;
use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};

/// Folder of the states within a run's folder.
pub(super) const STATES_FOLDER: &str = "states";
/// First bytes of every state.
const MAGIC: &[u8; 8] = b"bedswell";
/// The form of what follows; a reader refuses what it does not know. (Form 1 is this one
/// without walls.)
const FORMAT: u32 = 2;
/// Bytes before the body: magic, format (u32), checksum (u64), both little-endian.
const HEAD: usize = 20;

/// Name of the state of an increment.
pub(super) fn state_path(folder: &Path, increment: usize) -> PathBuf {
    folder.join(STATES_FOLDER).join(format!("{increment:04}.state"))
}

/// Writes one state of a run. Behind magic, format and a checksum of the body, the body
/// is the [`State`] in the Postcard wire format (version 1).
pub(super) fn write_state(folder: &Path, state: &State) -> Result<(), FolderError> {
    let path = state_path(folder, state.step.increment);
    let body = postcard::to_stdvec(state)
        .map_err(|error| FolderError::write(&path)(std::io::Error::other(error)))?;
    write_atomically(&path, |writer| {
        writer.write_all(MAGIC)?;
        writer.write_all(&FORMAT.to_le_bytes())?;
        writer.write_all(&checksum(&body).to_le_bytes())?;
        writer.write_all(&body)
    })
}

/// Reads one state.
pub(super) fn read_state(path: &Path) -> Result<State, ReadError> {
    let bytes = fs::read(path).map_err(|cause| ReadError::Read { path: path.to_owned(), cause })?;
    let damaged = || ReadError::Damaged { path: path.to_owned() };
    if bytes.len() < HEAD || &bytes[..MAGIC.len()] != MAGIC {
        return Err(damaged());
    }
    let (head, body) = bytes.split_at(HEAD);
    let format = u32::from_le_bytes([head[8], head[9], head[10], head[11]]);
    if !(1..=FORMAT).contains(&format) {
        return Err(ReadError::Newer { path: path.to_owned(), format, known: FORMAT });
    }
    if head[12..] != checksum(body).to_le_bytes() {
        return Err(damaged());
    }
    let state: State = postcard::from_bytes(body).map_err(|_| damaged())?;
    if state.is_sound() { Ok(state) } else { Err(damaged()) }
}
