use super::FolderError;
use std::fs::{self, File};
use std::io::{BufWriter, Write};
use std::path::Path;

/// Writes a file so that its name only ever stands for a complete one: into a
/// temporary file beside it, flushed to the disk, then renamed.
pub(crate) fn write_atomically(
    path: &Path,
    write: impl FnOnce(&mut BufWriter<File>) -> std::io::Result<()>,
) -> Result<(), FolderError> {
    let mut name = path.file_name().unwrap_or_default().to_owned();
    name.push(".part");
    let temporary = path.with_file_name(name);
    let written = (|| {
        let mut writer = BufWriter::new(File::create(&temporary)?);
        write(&mut writer)?;
        writer.into_inner().map_err(std::io::IntoInnerError::into_error)?.sync_all()?;
        fs::rename(&temporary, path)
    })();
    if written.is_err() {
        // The error of the write is the one to report.
        let _ = fs::remove_file(&temporary);
    }
    written.map_err(FolderError::write(path))
}

/// Writes text so that its name only ever stands for a complete file.
pub(super) fn write_text(path: &Path, text: &str) -> Result<(), FolderError> {
    write_atomically(path, |writer| writer.write_all(text.as_bytes()))
}
