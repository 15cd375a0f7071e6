use super::frames::Frames;
use super::gif::Gif;
use super::mp4::Mp4;
use super::{ClipError, Format, Stored, opaque};
use bedswell_painter::{Image, Size};
use std::path::{Path, PathBuf};
use std::sync::mpsc::{SyncSender, sync_channel};
use std::thread::JoinHandle;

/// A film in the making.
///
/// It is encoded on a thread of its own, so that the next frames can be painted meanwhile.
/// Its final name appears when it is finished; dropped before that, it leaves nothing
/// behind. The same frames make the same bytes.
pub struct Clip {
    path: PathBuf,
    size: Size,
    stored: Stored,
    frames: Option<SyncSender<Image>>,
    writer: Option<JoinHandle<Result<Box<dyn Sink>, ClipError>>>,
}

/// Writes frames in one format.
pub(super) trait Sink: Send {
    /// Takes the next frame, which is opaque and of the size given at the start.
    fn frame(&mut self, frame: &Image) -> Result<(), ClipError>;

    /// Completes the file after at least one frame and gives it its name.
    fn finish(self: Box<Self>) -> Result<(), ClipError>;
}

/// Frames that may wait for the encoder.
const WAITING: usize = 4;

impl Clip {
    /// Starts a film of frames of `size`, in the format that the ending of `path` names.
    ///
    /// # Errors
    ///
    /// An unknown ending, a size or rate the format cannot hold, and a place that cannot be written.
    pub fn create(path: &Path, size: Size, frames_per_second: u32) -> Result<Self, ClipError> {
        let format = Format::of(path)?;
        let (least, most) = format.sides();
        if ![size.width, size.height].iter().all(|side| (least..=most).contains(side)) {
            return Err(ClipError::Size { path: path.to_owned(), size, least, most });
        }
        if !(1..=60).contains(&frames_per_second) {
            return Err(ClipError::Rate { path: path.to_owned(), rate: frames_per_second });
        }
        let stored = format.stored(size, frames_per_second);
        let mut sink: Box<dyn Sink> = match format {
            Format::Mp4 => Box::new(Mp4::create(path, stored)?),
            Format::Gif => Box::new(Gif::create(path, stored)?),
            Format::Frames => Box::new(Frames::create(path)?),
        };
        let (frames, waiting) = sync_channel::<Image>(WAITING);
        let writer = std::thread::spawn(move || {
            for mut frame in waiting {
                opaque::over_white(&mut frame);
                sink.frame(&frame)?;
            }
            Ok(sink)
        });
        Ok(Self { path: path.to_owned(), size, stored, frames: Some(frames), writer: Some(writer) })
    }

    /// Size and rate of the film as it is kept.
    pub fn stored(&self) -> Stored {
        self.stored
    }

    /// Adds the next frame; pixels that are not opaque are shown on white.
    ///
    /// # Errors
    ///
    /// A frame of another size, or whatever went wrong with this or an earlier frame.
    pub fn push(&mut self, frame: Image) -> Result<(), ClipError> {
        if frame.size != self.size {
            let path = self.path.clone();
            return Err(ClipError::Uneven { path, found: frame.size, expected: self.size });
        }
        if self.frames.as_ref().is_some_and(|frames| frames.send(frame).is_ok()) {
            return Ok(());
        }
        // The thread takes frames until one fails, so that it has an error to tell, once.
        Err(self.join().err().unwrap_or_else(|| self.given_up()))
    }

    /// Completes the file and gives it its name.
    ///
    /// # Errors
    ///
    /// A film without frames, or whatever went wrong with one of them or with the file.
    pub fn finish(mut self) -> Result<(), ClipError> {
        self.join()?.finish()
    }

    /// Waits until all frames are written.
    fn join(&mut self) -> Result<Box<dyn Sink>, ClipError> {
        self.frames = None;
        let writer = self.writer.take().ok_or_else(|| self.given_up())?;
        writer.join().unwrap_or_else(|panic| std::panic::resume_unwind(panic))
    }

    fn given_up(&self) -> ClipError {
        ClipError::GivenUp { path: self.path.clone() }
    }
}

impl Drop for Clip {
    fn drop(&mut self) {
        self.frames = None;
        if let Some(writer) = self.writer.take() {
            // The film is given up: nobody asks how its last frames went.
            let _ = writer.join();
        }
    }
}
