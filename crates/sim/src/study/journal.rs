//! The append-only record of a study's packs: what survives when it is stopped.

use crate::folder::checksum;
use crate::{FolderError, PackOutcome};
use serde::{Deserialize, Serialize};
use std::fs::{File, OpenOptions, TryLockError};
use std::io::{Read, Write};
use std::path::{Path, PathBuf};

/// Name of the journal in a study's folder.
pub(crate) const JOURNAL_FILE: &str = "journal.txt";
/// The form of the journal's lines; a reader refuses what it does not know.
const FORMAT: u32 = 2;

/// One finished pack.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub(crate) struct Row {
    pub(crate) level: usize,
    pub(crate) pack: u64,
    /// The values of the factors that the header names.
    pub(crate) values: Vec<String>,
    pub(crate) end: PackEnd,
}

/// How a pack ended.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub(crate) enum PackEnd {
    Finished(Box<PackOutcome>),
    Failed(String),
}

#[derive(Debug, PartialEq, Serialize, Deserialize)]
struct Header {
    format: u32,
    version: String,
    fingerprint: String,
    factors: Vec<String>,
}

/// An open journal. Each line is a checksum and a JSON value, so that a line cut
/// short by a kill is recognised and dropped.
pub(crate) struct Journal {
    path: PathBuf,
    file: File,
    /// Length (bytes) up to which every line is whole.
    whole: u64,
}

impl Journal {
    /// Opens or starts the journal of the study with this fingerprint and these factors;
    /// also the packs it already holds.
    pub(crate) fn open(
        folder: &Path,
        fingerprint: &str,
        factors: Vec<String>,
    ) -> Result<(Self, Vec<Row>), FolderError> {
        let path = folder.join(JOURNAL_FILE);
        let mut file = OpenOptions::new()
            .read(true)
            .append(true)
            .create(true)
            .open(&path)
            .map_err(FolderError::write(&path))?;
        file.try_lock().map_err(|error| match error {
            TryLockError::WouldBlock => FolderError::InUse { path: folder.to_owned() },
            TryLockError::Error(cause) => FolderError::Write { path: path.clone(), cause },
        })?;
        let mut bytes = Vec::new();
        file.read_to_end(&mut bytes).map_err(FolderError::write(&path))?;

        let header = Header {
            format: FORMAT,
            version: env!("CARGO_PKG_VERSION").to_owned(),
            fingerprint: fingerprint.to_owned(),
            factors,
        };
        let mut journal = Self { path, file, whole: 0 };
        let mut rows = Vec::new();
        let lines: Vec<&[u8]> = bytes.split_inclusive(|&byte| byte == b'\n').collect();
        for (index, line) in lines.iter().enumerate() {
            let Some(text) = checked(line) else {
                if index + 1 == lines.len() {
                    break;
                }
                return Err(FolderError::Damaged { path: journal.path, line: index + 1 });
            };
            if index == 0 {
                if serde_json::from_str::<Header>(text).ok().as_ref() != Some(&header) {
                    return Err(FolderError::Occupied {
                        path: folder.to_owned(),
                        what: "another study, or this one by another version".into(),
                    });
                }
            } else {
                let damaged = |_| FolderError::Damaged { path: journal.path.clone(), line: index + 1 };
                rows.push(serde_json::from_str(text).map_err(damaged)?);
            }
            journal.whole += line.len() as u64;
        }
        journal.file.set_len(journal.whole).map_err(FolderError::write(&journal.path))?;
        if journal.whole == 0 {
            journal.append_value(&header)?;
        }
        Ok((journal, rows))
    }

    /// Adds a pack and waits until it is on the disk.
    pub(crate) fn append(&mut self, row: &Row) -> Result<(), FolderError> {
        self.append_value(row)
    }

    fn append_value(&mut self, value: &impl Serialize) -> Result<(), FolderError> {
        let line = serde_json::to_string(value)
            .map(|json| format!("{:016x} {json}\n", checksum(json.as_bytes())))
            .map_err(std::io::Error::other)
            .map_err(FolderError::write(&self.path))?;
        let written = self.file.write_all(line.as_bytes()).and_then(|()| self.file.sync_data());
        if let Err(cause) = written {
            // Leave no half line; where even that fails, the next opening drops it.
            let _ = self.file.set_len(self.whole);
            return Err(FolderError::Write { path: self.path.clone(), cause });
        }
        self.whole += line.len() as u64;
        Ok(())
    }
}

/// The JSON of a line whose checksum holds.
fn checked(line: &[u8]) -> Option<&str> {
    let line = std::str::from_utf8(line).ok()?.strip_suffix('\n')?;
    let (sum, text) = line.split_once(' ')?;
    (sum.len() == 16 && u64::from_str_radix(sum, 16).ok()? == checksum(text.as_bytes())).then_some(text)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn open(folder: &Path, fingerprint: &str) -> Result<(Journal, Vec<Row>), FolderError> {
        Journal::open(folder, fingerprint, vec!["bed.depth".into()])
    }

    fn failed(pack: u64) -> Row {
        Row { level: 0, pack, values: vec!["3 cm".into()], end: PackEnd::Failed("stuck".into()) }
    }

    #[test]
    fn a_journal_cut_at_any_byte_keeps_every_whole_line() {
        let folder = tempfile::tempdir().unwrap();
        let (mut journal, _) = open(folder.path(), "f").unwrap();
        journal.append(&failed(0)).unwrap();
        let after_first = journal.whole as usize;
        journal.append(&failed(1)).unwrap();
        drop(journal);
        let path = folder.path().join(JOURNAL_FILE);
        let bytes = std::fs::read(&path).unwrap();
        for cut in 0..=bytes.len() {
            std::fs::write(&path, &bytes[..cut]).unwrap();
            let (mut journal, rows) = open(folder.path(), "f").unwrap();
            let expected = usize::from(cut >= after_first) + usize::from(cut == bytes.len());
            assert_eq!(rows.len(), expected, "cut at byte {cut}");
            journal.append(&failed(7)).unwrap();
            drop(journal);
            let (_, rows) = open(folder.path(), "f").unwrap();
            assert_eq!(rows.last(), Some(&failed(7)), "cut at byte {cut}");
        }
    }

    #[test]
    fn an_altered_line_in_the_middle_is_refused() {
        let folder = tempfile::tempdir().unwrap();
        let (mut journal, _) = open(folder.path(), "f").unwrap();
        journal.append(&failed(0)).unwrap();
        journal.append(&failed(1)).unwrap();
        drop(journal);
        let path = folder.path().join(JOURNAL_FILE);
        let text = std::fs::read_to_string(&path).unwrap().replacen("stuck", "stack", 1);
        std::fs::write(&path, text).unwrap();
        assert!(matches!(open(folder.path(), "f"), Err(FolderError::Damaged { line: 2, .. })));
    }

    #[test]
    fn another_study_and_a_second_writer_are_refused() {
        let folder = tempfile::tempdir().unwrap();
        let (journal, _) = open(folder.path(), "f").unwrap();
        assert!(matches!(open(folder.path(), "f"), Err(FolderError::InUse { .. })));
        drop(journal);
        assert!(matches!(open(folder.path(), "g"), Err(FolderError::Occupied { .. })));
    }
}
