use bedswell_painter::{Image, encode_png};
use std::io;
use std::path::{Path, PathBuf};

/// Writes a picture under the first number that is free, such as `bed-3.png`.
///
/// # Errors
/// What the system says when the folder cannot be written; no half file is left.
pub(crate) fn keep(folder: &Path, stem: &str, image: &Image) -> io::Result<PathBuf> {
    std::fs::create_dir_all(folder)?;
    for number in 1.. {
        let path = folder.join(format!("{stem}-{number}.png"));
        match std::fs::File::create_new(&path) {
            Ok(mut file) => {
                let written = io::Write::write_all(&mut file, &encode_png(image));
                if written.is_err() {
                    let _ = std::fs::remove_file(&path);
                }
                return written.map(|()| path);
            }
            Err(error) if error.kind() == io::ErrorKind::AlreadyExists => {}
            Err(error) => return Err(error),
        }
    }
    Err(io::ErrorKind::AlreadyExists.into())
}

#[cfg(test)]
mod tests {
    use super::*;
    use bedswell_painter::{Colour, Size};

    #[test]
    fn pictures_are_numbered_and_never_overwritten() {
        let folder = tempfile::tempdir().unwrap();
        let image = Image::new(Size { width: 3, height: 2 }, Colour::new(1, 2, 3));
        let first = keep(&folder.path().join("new"), "bed", &image).unwrap();
        let second = keep(&folder.path().join("new"), "bed", &image).unwrap();
        assert!(first.ends_with("bed-1.png") && second.ends_with("bed-2.png"));
        assert_eq!(std::fs::read(first).unwrap(), encode_png(&image));
    }
}
