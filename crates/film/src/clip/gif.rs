use super::film::Sink;
use super::palette::{Histogram, Palette};
use super::shrink::shrink;
use super::{ClipError, Stored, frames};
use crate::part::Part;
use ::gif::{DisposalMethod, Encoder, EncodingError, Frame, Repeat};
use bedswell_painter::{Image, Size};
use std::borrow::Cow;
use std::io::Write;
use std::path::Path;

/// An animated GIF that repeats, with one palette for all frames and without dithering.
///
/// The palette needs all frames, so they wait in memory as PNG. Films in which nearly
/// everything moves are written with fewer colours, so that they fit a mail.
pub(super) struct Gif {
    part: Part,
    stored: Stored,
    histogram: Histogram,
    kept: Vec<Vec<u8>>,
    given: u32,
}

/// How much is kept of the pictures.
#[derive(Clone, Copy)]
struct Care {
    /// Colours of the palette beside the one that stands for "as before".
    colours: usize,
    /// Levels by which a pixel that stays may differ from what it should be.
    close: u8,
}

/// From the best downwards; the first that gives a small file is taken.
const CARES: [Care; 3] =
    [Care { colours: 255, close: 6 }, Care { colours: 127, close: 8 }, Care { colours: 63, close: 12 }];
/// Bytes that a second of film may take.
const SMALL: usize = 900_000;

impl Gif {
    pub(super) fn create(path: &Path, stored: Stored) -> Result<Self, ClipError> {
        let part = Part::create(path).map_err(ClipError::write(path))?;
        Ok(Self { part, stored, histogram: Histogram::new(), kept: Vec::new(), given: 0 })
    }

    /// Time at which the frame of this number is shown (hundredths of a second).
    fn hundredths(&self, frame: u32) -> u64 {
        let rate = u64::from(self.stored.given_per_second);
        (u64::from(frame.min(self.given)) * 100 + rate / 2) / rate
    }

    /// How long the kept frame of this number stays (hundredths of a second).
    fn delay(&self, kept: usize) -> u16 {
        let frame = kept as u32 * self.stored.every;
        let next = if kept + 1 == self.kept.len() { self.given } else { frame + self.stored.every };
        (self.hundredths(next) - self.hundredths(frame)) as u16
    }
}

impl Sink for Gif {
    fn frame(&mut self, frame: &Image) -> Result<(), ClipError> {
        if self.given.is_multiple_of(self.stored.every) {
            let pixels = shrink(frame, self.stored.size);
            self.histogram.add(&pixels);
            let mut png = Vec::new();
            frames::write_png(&mut png, self.stored.size, &pixels)
                .map_err(|error| ClipError::encoder(self.part.path(), error))?;
            self.kept.push(png);
        }
        self.given += 1;
        Ok(())
    }

    fn finish(mut self: Box<Self>) -> Result<(), ClipError> {
        let path = self.part.path().to_owned();
        if self.kept.is_empty() {
            return Err(ClipError::Empty { path });
        }
        let small = SMALL * self.given as usize / self.stored.given_per_second as usize;
        let mut file = Vec::new();
        for care in CARES {
            file = self.encode(care).map_err(|error| ClipError::encoder(&path, error))?;
            if file.len() <= small {
                break;
            }
        }
        self.part.write_all(&file).and_then(|()| self.part.commit()).map_err(ClipError::write(&path))
    }
}

impl Gif {
    fn encode(&self, care: Care) -> Result<Vec<u8>, EncodingError> {
        let size = self.stored.size;
        let palette = Palette::new(&self.histogram, care.colours);
        let delays: Vec<u16> = (0..self.kept.len()).map(|kept| self.delay(kept)).collect();
        // One entry beyond the colours, for "as before".
        let table = [palette.colours().concat(), vec![0; 3]].concat();
        let mut file = Vec::new();
        let mut encoder = Encoder::new(&mut file, size.width as u16, size.height as u16, &table)?;
        encoder.set_repeat(Repeat::Infinite)?;
        let mut shown = Vec::new();
        for (png, delay) in self.kept.iter().zip(delays) {
            let pixels = frames::read_png(png).map_err(std::io::Error::other)?;
            let mut next = palette.indices(&pixels);
            keep_close(&mut next, &shown, &pixels, palette.colours(), care.close);
            let mut frame = change(size, &shown, &next, palette.colours().len() as u8);
            frame.delay = delay;
            encoder.write_lzw_pre_encoded_frame(&frame)?;
            shown = next;
        }
        drop(encoder);
        Ok(file)
    }
}

/// Lets pixels stay as they are shown where that comes close to what they should be: much
/// of a picture that moves little is then not written again. The error does not add up,
/// as it is against the true picture each time.
fn keep_close(next: &mut [u8], shown: &[u8], pixels: &[u8], colours: &[[u8; 3]], close: u8) {
    for ((next, &shown), pixel) in next.iter_mut().zip(shown).zip(pixels.as_chunks::<3>().0) {
        let colour = colours[usize::from(shown)];
        if (0..3).all(|channel| colour[channel].abs_diff(pixel[channel]) <= close) {
            *next = shown;
        }
    }
}

/// What turns the picture shown into the next one: the rectangle that differs, packed,
/// with or without the pixels that stay, whichever is shorter.
fn change(size: Size, shown: &[u8], next: &[u8], as_before: u8) -> Frame<'static> {
    let width = size.width as usize;
    let area = Area::of_change(width, shown, next);
    let whole: Vec<u8> = area.rows(next, width).flatten().copied().collect();
    let frame = |pixels: Vec<u8>, transparent: Option<u8>| {
        let mut frame = Frame {
            left: area.left as u16,
            top: area.top as u16,
            width: area.width as u16,
            height: area.height as u16,
            buffer: Cow::Owned(pixels),
            dispose: DisposalMethod::Keep,
            transparent,
            ..Frame::default()
        };
        frame.make_lzw_pre_encoded();
        frame
    };
    if shown.is_empty() {
        return frame(whole, None);
    }
    let before = area.rows(shown, width).flatten();
    let changed =
        whole.iter().zip(before).map(|(&new, &old)| if new == old { as_before } else { new }).collect();
    let (whole, changed) = (frame(whole, None), frame(changed, Some(as_before)));
    if changed.buffer.len() < whole.buffer.len() { changed } else { whole }
}

/// Part of a picture (pixels).
struct Area {
    left: usize,
    top: usize,
    width: usize,
    height: usize,
}

impl Area {
    /// The smallest rectangle with all that differs, at least one pixel; everything where nothing is shown yet.
    fn of_change(width: usize, shown: &[u8], next: &[u8]) -> Self {
        let (mut left, mut right, mut top, mut bottom) = (width, 0, usize::MAX, 0);
        if shown.is_empty() {
            return Self { left: 0, top: 0, width, height: next.len() / width };
        }
        for (y, (old, new)) in shown.chunks_exact(width).zip(next.chunks_exact(width)).enumerate() {
            let Some(first) = old.iter().zip(new).position(|(old, new)| old != new) else { continue };
            let last = old.iter().zip(new).rposition(|(old, new)| old != new).unwrap_or(first);
            (left, right) = (left.min(first), right.max(last));
            (top, bottom) = (top.min(y), y);
        }
        if top == usize::MAX {
            return Self { left: 0, top: 0, width: 1, height: 1 };
        }
        Self { left, top, width: right - left + 1, height: bottom - top + 1 }
    }

    fn rows<'a>(&self, pixels: &'a [u8], width: usize) -> impl Iterator<Item = &'a [u8]> {
        let columns = self.left..self.left + self.width;
        pixels.chunks_exact(width).skip(self.top).take(self.height).map(move |row| &row[columns.clone()])
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn pixels_stay_only_while_they_come_close() {
        let colours = [[100, 100, 100], [106, 100, 100], [120, 100, 100]];
        let pixels: Vec<u8> = [[106, 100, 100], [107, 100, 100], [120, 100, 100]].concat();
        let (shown, mut next) = ([0, 0, 0], [1, 1, 2]);
        keep_close(&mut next, &shown, &pixels, &colours, 6);
        assert_eq!(next, [0, 1, 2]);
    }

    #[test]
    fn only_the_rectangle_that_differs_is_written() {
        let size = Size { width: 5, height: 4 };
        let shown = [0; 20];
        let mut next = shown;
        (next[6], next[13]) = (1, 2);
        let frame = change(size, &shown, &next, 3);
        assert_eq!((frame.left, frame.top, frame.width, frame.height), (1, 1, 3, 2));
        let same = change(size, &shown, &shown, 3);
        assert_eq!((same.width, same.height), (1, 1));
    }
}
