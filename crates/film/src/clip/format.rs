use super::ClipError;
use bedswell_painter::Size;
use std::path::Path;

/// What a film is written as.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Format {
    /// H.264 in an MP4 file, sizes rounded down to even.
    Mp4,
    /// An animated GIF of at most 640 pixels and 15 frames per second, with 255 colours or,
    /// where much moves, fewer.
    Gif,
    /// A folder of PNG pictures, `frame-0001.png` and so on.
    Frames,
}

/// Pictures as a file keeps them, which may be fewer and smaller than those it is given.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Stored {
    /// Size of the pictures.
    pub size: Size,
    /// One of this many frames is kept.
    pub every: u32,
    /// Frames per second that are given, not those kept.
    pub given_per_second: u32,
}

/// Longest side of a GIF (pixels).
const GIF_SIDE: u32 = 640;
/// Most frames per second of a GIF.
const GIF_RATE: u32 = 15;

impl Format {
    /// The format a file name stands for.
    ///
    /// # Errors
    ///
    /// A name with any other ending than `.mp4` and `.gif`, unless it is a folder's.
    pub fn of(path: &Path) -> Result<Self, ClipError> {
        let unknown = || ClipError::UnknownFormat { path: path.to_owned() };
        let written = path.file_name().ok_or_else(unknown).map(|_| path.as_os_str().as_encoded_bytes())?;
        if written.ends_with(b"/") || written.ends_with(b"\\") || path.is_dir() {
            return Ok(Self::Frames);
        }
        match path.extension().map(|ending| ending.to_string_lossy().to_lowercase()).as_deref() {
            Some("mp4") => Ok(Self::Mp4),
            Some("gif") => Ok(Self::Gif),
            None => Ok(Self::Frames),
            Some(_) => Err(unknown()),
        }
    }

    /// How it keeps frames of this size and rate.
    pub fn stored(self, size: Size, frames_per_second: u32) -> Stored {
        let (size, every) = match self {
            Self::Mp4 => (Size { width: size.width & !1, height: size.height & !1 }, 1),
            Self::Gif => (within(size, GIF_SIDE), frames_per_second.div_ceil(GIF_RATE)),
            Self::Frames => (size, 1),
        };
        Stored { size, every, given_per_second: frames_per_second }
    }

    /// Fewest and most pixels across and down.
    pub(super) fn sides(self) -> (u32, u32) {
        match self {
            Self::Mp4 => (16, 3840),
            Self::Gif | Self::Frames => (1, 16384),
        }
    }
}

impl Stored {
    /// Frames per second in the file.
    pub fn frames_per_second(&self) -> f64 {
        f64::from(self.given_per_second) / f64::from(self.every)
    }

    /// What is less than it was given, in words; `None` if nothing is.
    pub fn reduced_from(&self, given: Size) -> Option<String> {
        let smaller = (self.size != given).then(|| {
            format!(
                "{}x{} instead of {}x{} pixels",
                self.size.width, self.size.height, given.width, given.height
            )
        });
        let fewer = (self.every > 1).then(|| {
            format!("{} instead of {} frames per second", self.frames_per_second(), self.given_per_second)
        });
        smaller.into_iter().chain(fewer).reduce(|size, rate| format!("{size}, {rate}"))
    }
}

/// The size with its longest side no longer than `side`, its shape kept.
fn within(size: Size, side: u32) -> Size {
    let longest = size.width.max(size.height);
    if longest <= side {
        return size;
    }
    let shrunk = |length: u32| {
        let rounded = (u64::from(length) * u64::from(side) + u64::from(longest) / 2) / u64::from(longest);
        (rounded as u32).max(1)
    };
    Size { width: shrunk(size.width), height: shrunk(size.height) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_tell_the_format() {
        for (name, format) in [
            ("a/film.mp4", Format::Mp4),
            ("Film.MP4", Format::Mp4),
            ("film.gif", Format::Gif),
            ("frames", Format::Frames),
            ("no.such.folder.4711/", Format::Frames),
        ] {
            assert_eq!(Format::of(Path::new(name)).unwrap(), format, "{name}");
        }
        for name in ["film.avi", "film.webm", "film.", "..", ""] {
            let refused = Format::of(Path::new(name)).unwrap_err().to_string();
            assert!([".mp4", ".gif", "PNG"].iter().all(|known| refused.contains(known)), "{name}: {refused}");
        }
    }

    #[test]
    fn reductions_are_told() {
        let size = |width, height| Size { width, height };
        let gif = Format::Gif.stored(size(1280, 720), 30);
        assert_eq!((gif.size, gif.frames_per_second()), (size(640, 360), 15.0));
        assert_eq!(
            gif.reduced_from(size(1280, 720)).unwrap(),
            "640x360 instead of 1280x720 pixels, 15 instead of 30 frames per second"
        );
        assert_eq!(Format::Gif.stored(size(500, 1000), 25).size, size(320, 640));
        assert_eq!(Format::Gif.stored(size(500, 1000), 25).frames_per_second(), 12.5);
        assert_eq!(Format::Gif.stored(size(320, 200), 12).reduced_from(size(320, 200)), None);
        let mp4 = Format::Mp4.stored(size(1281, 721), 30);
        assert_eq!(mp4.reduced_from(size(1281, 721)).unwrap(), "1280x720 instead of 1281x721 pixels");
        assert_eq!(Format::Frames.stored(size(1281, 721), 60).reduced_from(size(1281, 721)), None);
    }
}
