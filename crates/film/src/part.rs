use std::fs::{self, File};
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};

/// A file in the making, `NAME.part` beside its final name; it disappears unless it is
/// committed.
pub(crate) struct Part {
    path: PathBuf,
    partial: PathBuf,
    writer: Option<BufWriter<File>>,
}

impl Part {
    pub(crate) fn create(path: &Path) -> io::Result<Self> {
        if path.is_dir() {
            return Err(io::ErrorKind::IsADirectory.into());
        }
        let partial = partial_name(path);
        let writer = Some(BufWriter::new(File::create(&partial)?));
        Ok(Self { path: path.to_owned(), partial, writer })
    }

    pub(crate) fn path(&self) -> &Path {
        &self.path
    }

    /// Flushes to the disk and gives the file its name.
    pub(crate) fn commit(mut self) -> io::Result<()> {
        let writer = self.writer.as_mut().expect("a part is committed once");
        writer.flush()?;
        writer.get_ref().sync_all()?;
        fs::rename(&self.partial, &self.path)?;
        self.writer = None;
        Ok(())
    }
}

impl Write for Part {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        self.writer.as_mut().expect("a part is written before it is committed").write(bytes)
    }

    fn flush(&mut self) -> io::Result<()> {
        self.writer.as_mut().expect("a part is written before it is committed").flush()
    }
}

impl Drop for Part {
    fn drop(&mut self) {
        if let Some(writer) = self.writer.take() {
            // Taken apart so that what is still buffered is not written; nobody is left to tell of an error.
            drop(writer.into_parts());
            let _ = fs::remove_file(&self.partial);
        }
    }
}

/// `NAME.part`, beside `NAME`.
pub(crate) fn partial_name(path: &Path) -> PathBuf {
    let mut name = path.file_name().unwrap_or_default().to_owned();
    name.push(".part");
    path.with_file_name(name)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_name_stands_for_a_whole_file_or_the_earlier_one() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("film.mp4");
        fs::write(&path, "earlier").unwrap();
        let mut part = Part::create(&path).unwrap();
        part.write_all(b"half").unwrap();
        drop(part);
        assert_eq!(fs::read(&path).unwrap(), b"earlier");
        let mut part = Part::create(&path).unwrap();
        part.write_all(b"whole").unwrap();
        part.commit().unwrap();
        assert_eq!(fs::read(&path).unwrap(), b"whole");
        assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 1, "a partial file is left");
    }

    #[test]
    fn a_folder_is_refused_before_anything_is_written() {
        let folder = tempfile::tempdir().unwrap();
        let refused = Part::create(folder.path()).err().unwrap();
        assert_eq!(refused.kind(), io::ErrorKind::IsADirectory);
    }
}
