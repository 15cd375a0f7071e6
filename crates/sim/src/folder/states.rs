use super::{FolderError, ReadError, checksum, write_atomically};
use crate::State;
use serde::Serialize;
use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};

/// Folder of the states within a run's folder.
pub(super) const STATES_FOLDER: &str = "states";
/// First bytes of every state.
const MAGIC: &[u8; 8] = b"bedswell";
/// The form of what follows; a reader refuses what it does not know.
const FORMAT: u32 = 5;
/// Forms 1 (in which nothing touches a wall) and 2 lack the last four fields, which say
/// that there is a pot, that it is open, the time, and what has ruptured; form 3 lacks the last
/// two, form 4 the last. None of them, in the wire format.
const NOTHING: [u8; 4] = [0; 4];
/// Bytes before the body: magic, format (u32), checksum (u64), both little-endian.
const HEAD: usize = 20;

/// Name of the state of an increment.
pub(super) fn state_path(folder: &Path, increment: usize) -> PathBuf {
    folder.join(STATES_FOLDER).join(format!("{increment:04}.state"))
}

/// Writes one state of a run. Behind magic, format and a checksum of the body, the body
/// is the [`State`] in the Postcard wire format (version 1).
pub(super) fn write_state(folder: &Path, state: &State) -> Result<(), FolderError> {
    write_sealed(&state_path(folder, state.step.increment), (MAGIC, FORMAT), state)
}

/// Writes a value in the Postcard wire format behind magic, format and checksum.
pub(super) fn write_sealed(
    path: &Path,
    (magic, format): (&[u8; 8], u32),
    value: &impl Serialize,
) -> Result<(), FolderError> {
    let body =
        postcard::to_stdvec(value).map_err(|error| FolderError::write(path)(std::io::Error::other(error)))?;
    write_atomically(path, |writer| {
        writer.write_all(magic)?;
        writer.write_all(&format.to_le_bytes())?;
        writer.write_all(&checksum(&body).to_le_bytes())?;
        writer.write_all(&body)
    })
}

/// The format and the body of a file behind its magic; `None` where it was cut short or
/// altered.
pub(super) fn unseal<'a>(bytes: &'a [u8], magic: &[u8; 8]) -> Option<(u32, &'a [u8])> {
    let (head, body) = bytes.split_at_checked(HEAD)?;
    let format = u32::from_le_bytes([head[8], head[9], head[10], head[11]]);
    (head.starts_with(magic) && head[12..] == checksum(body).to_le_bytes()).then_some((format, body))
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
    let state: State = match format {
        FORMAT => postcard::from_bytes(body),
        4 => postcard::from_bytes(&[body, &NOTHING[..1]].concat()),
        3 => postcard::from_bytes(&[body, &NOTHING[..2]].concat()),
        _ => postcard::from_bytes(&[body, &NOTHING].concat()),
    }
    .map_err(|_| damaged())?;
    if state.is_sound() { Ok(state) } else { Err(damaged()) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::Step;

    fn state(wall: Option<f32>) -> State {
        State {
            fingerprint: "f".into(),
            pack: 1,
            increments: 2,
            step: Step::default(),
            cell: [1.0; 3],
            periodic: [false; 3],
            centres: vec![[0.5; 3]],
            radii: vec![0.1],
            contacts: Vec::new(),
            beads: Vec::new(),
            wall,
            open: wall.is_some(),
            time_s: wall.map(f64::from),
            ruptured: Vec::new(),
        }
    }

    /// Puts a body of an older form into a file.
    fn write_form(path: &Path, format: u32, body: &[u8]) {
        let head = [MAGIC.as_slice(), &format.to_le_bytes(), &checksum(body).to_le_bytes()].concat();
        fs::write(path, [&head, body].concat()).unwrap();
    }

    #[test]
    fn states_of_older_forms_read_as_beds_without_a_pot() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("old.state");
        let body = postcard::to_stdvec(&state(None)).unwrap();
        for (format, missing) in [(1, 4), (2, 4), (3, 2), (4, 1)] {
            write_form(&path, format, &body[..body.len() - missing]);
            assert_eq!(read_state(&path).unwrap(), state(None), "form {format}");
        }
        write_form(&path, FORMAT + 1, &body);
        assert!(matches!(read_state(&path), Err(ReadError::Newer { format: 6, known: 5, .. })));
    }

    #[test]
    fn a_state_keeps_its_pot() {
        let folder = tempfile::tempdir().unwrap();
        fs::create_dir(folder.path().join(STATES_FOLDER)).unwrap();
        let state = state(Some(0.5));
        write_state(folder.path(), &state).unwrap();
        assert_eq!(read_state(&state_path(folder.path(), 0)).unwrap(), state);
    }
}
