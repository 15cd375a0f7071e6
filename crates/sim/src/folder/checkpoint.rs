//! Where a pack with a history in time goes on when its run was stopped.

use super::FolderError;
use super::states::{unseal, write_sealed};
use crate::Checkpoint;
use std::fs;
use std::path::Path;

/// Name of the file; it is there only while a run is unfinished.
pub(super) const CHECKPOINT_FILE: &str = "unfinished.state";
/// First bytes of the file.
const MAGIC: &[u8; 8] = b"bedsgoon";
/// The form of what follows. What a version does not know it does not go on from: the run
/// starts anew.
const FORMAT: u32 = 4;

pub(super) fn write_checkpoint(folder: &Path, checkpoint: &Checkpoint) -> Result<(), FolderError> {
    write_sealed(&folder.join(CHECKPOINT_FILE), (MAGIC, FORMAT), checkpoint)
}

/// The checkpoint of a folder, if there is one that is whole and of this version.
pub(super) fn read_checkpoint(folder: &Path) -> Option<Checkpoint> {
    let bytes = fs::read(folder.join(CHECKPOINT_FILE)).ok()?;
    let (format, body) = unseal(&bytes, MAGIC)?;
    if format != FORMAT {
        return None;
    }
    postcard::from_bytes(body).ok()
}
