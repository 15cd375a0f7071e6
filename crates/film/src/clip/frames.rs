use super::ClipError;
use super::film::Sink;
use crate::part::partial_name;
use bedswell_painter::{Image, Size};
use std::fs::{self, File};
use std::io::{BufWriter, Write};
use std::path::{Path, PathBuf};

/// A folder of PNG pictures, gathered in `NAME.part` until the film is whole.
pub(super) struct Frames {
    path: PathBuf,
    partial: PathBuf,
    frames: u32,
    finished: bool,
}

impl Frames {
    pub(super) fn create(path: &Path) -> Result<Self, ClipError> {
        let partial = partial_name(path);
        for folder in [path, &partial] {
            refuse_strangers(folder)?;
        }
        remove(&partial).and_then(|()| fs::create_dir_all(&partial)).map_err(ClipError::write(path))?;
        Ok(Self { path: path.to_owned(), partial, frames: 0, finished: false })
    }
}

impl Sink for Frames {
    fn frame(&mut self, frame: &Image) -> Result<(), ClipError> {
        self.frames += 1;
        let name = frame_name(self.frames);
        let rgb: Vec<u8> =
            frame.pixels.as_chunks::<4>().0.iter().flat_map(|&[r, g, b, _]| [r, g, b]).collect();
        let write = || {
            let mut writer = BufWriter::new(File::create(self.partial.join(&name))?);
            write_png(&mut writer, frame.size, &rgb)?;
            writer.into_inner().map_err(std::io::IntoInnerError::into_error)?.sync_all()
        };
        write().map_err(ClipError::write(&self.path.join(&name)))
    }

    fn finish(mut self: Box<Self>) -> Result<(), ClipError> {
        if self.frames == 0 {
            return Err(ClipError::Empty { path: self.path.clone() });
        }
        // Looked at again: something may have been put there while the film was painted.
        refuse_strangers(&self.path)?;
        remove(&self.path)
            .and_then(|()| fs::rename(&self.partial, &self.path))
            .map_err(ClipError::write(&self.path))?;
        self.finished = true;
        Ok(())
    }
}

impl Drop for Frames {
    fn drop(&mut self) {
        if !self.finished {
            // The error that ended the film is the one to report.
            let _ = remove(&self.partial);
        }
    }
}

/// `frame-0001.png` is the first.
fn frame_name(number: u32) -> String {
    format!("frame-{number:04}.png")
}

fn is_frame(name: &str) -> bool {
    let number = name.strip_prefix("frame-").and_then(|rest| rest.strip_suffix(".png"));
    number.and_then(|number| number.parse().ok()).is_some_and(|number| frame_name(number) == name)
}

/// Refuses a folder in which something else than frames lies.
fn refuse_strangers(folder: &Path) -> Result<(), ClipError> {
    if !folder.exists() {
        return Ok(());
    }
    for entry in fs::read_dir(folder).map_err(ClipError::write(folder))? {
        let name = entry.map_err(ClipError::write(folder))?.file_name().to_string_lossy().into_owned();
        if !is_frame(&name) {
            return Err(ClipError::Occupied { path: folder.to_owned(), found: name });
        }
    }
    Ok(())
}

/// Removes a folder of frames, if it is there.
fn remove(folder: &Path) -> std::io::Result<()> {
    if folder.exists() { fs::remove_dir_all(folder) } else { Ok(()) }
}

/// Writes an opaque picture of three bytes per pixel.
pub(super) fn write_png(writer: impl Write, size: Size, rgb: &[u8]) -> std::io::Result<()> {
    let mut encoder = png::Encoder::new(writer, size.width, size.height);
    encoder.set_color(png::ColorType::Rgb);
    encoder.set_depth(png::BitDepth::Eight);
    encoder.set_source_srgb(png::SrgbRenderingIntent::Perceptual);
    encoder.set_compression(png::Compression::Fast);
    let mut writer = encoder.write_header().map_err(into_io)?;
    writer.write_image_data(rgb).and_then(|()| writer.finish()).map_err(into_io)
}

/// Pixels of a picture written by [`write_png`].
pub(super) fn read_png(bytes: &[u8]) -> Result<Vec<u8>, png::DecodingError> {
    let mut reader = png::Decoder::new(std::io::Cursor::new(bytes)).read_info()?;
    let mut pixels = vec![0; reader.output_buffer_size().unwrap_or_default()];
    reader.next_frame(&mut pixels)?;
    Ok(pixels)
}

fn into_io(error: png::EncodingError) -> std::io::Error {
    match error {
        png::EncodingError::IoError(cause) => cause,
        other => std::io::Error::other(other),
    }
}
