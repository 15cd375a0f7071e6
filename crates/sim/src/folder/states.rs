use super::{FolderError, ReadError, checksum, write_atomically};
use crate::State;
use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};

/// Folder of the states within a run's folder.
pub(super) const STATES_FOLDER: &str = "states";
/// First bytes of every state.
const MAGIC: &[u8; 8] = b"bedswell";
/// The form of what follows; a reader refuses what it does not know.
const FORMAT: u32 = 3;
/// Forms 1 (in which nothing touches a wall) and 2 lack the last two fields, which say that
/// there is a pot and that it is open: neither, in the wire format.
const NO_POT: [u8; 2] = [0, 0];
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
    let state: State = match format {
        FORMAT => postcard::from_bytes(body),
        _ => postcard::from_bytes(&[body, &NO_POT].concat()),
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
        for format in [1, 2] {
            write_form(&path, format, &body[..body.len() - NO_POT.len()]);
            assert_eq!(read_state(&path).unwrap(), state(None), "form {format}");
        }
        write_form(&path, FORMAT + 1, &body);
        assert!(matches!(read_state(&path), Err(ReadError::Newer { format: 4, known: 3, .. })));
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
