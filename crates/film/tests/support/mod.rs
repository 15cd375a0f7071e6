//! Frames to film and readers for the films.

use bedswell_film::Clip;
use bedswell_painter::{Image, Size};
use openh264::decoder::Decoder;
use openh264::formats::YUVSource;
use std::path::Path;

/// Colours of the patches along the top of every frame.
pub(crate) const CARD: [[u8; 3]; 8] = [
    [255, 255, 255],
    [20, 20, 20],
    [200, 40, 40],
    [40, 160, 60],
    [30, 60, 190],
    [230, 200, 60],
    [120, 120, 120],
    [180, 90, 200],
];

/// A test card above, a moving shaded ball below.
pub(crate) fn frame(size: Size, number: u32) -> Image {
    let (width, height) = (size.width as f32, size.height as f32);
    let centre = [width * (0.3 + 0.004 * number as f32), 0.7 * height];
    let pixel = |x: u32, y: u32| {
        if 2 * y < size.height {
            return CARD[(8 * x / size.width) as usize];
        }
        let (dx, dy) = ((x as f32 - centre[0]) / (0.2 * height), (y as f32 - centre[1]) / (0.2 * height));
        let depth = 1.0 - dx * dx - dy * dy;
        if depth < 0.0 {
            return [244, 245, 247];
        }
        let light = (0.25 + 0.75 * (0.6 * depth.sqrt() - 0.4 * dx - 0.5 * dy).max(0.0)).min(1.0);
        [190.0, 150.0, 100.0].map(|channel: f32| (channel * light) as u8)
    };
    let pixels = (0..size.height).flat_map(|y| (0..size.width).map(move |x| (x, y))).flat_map(|(x, y)| {
        let [r, g, b] = pixel(x, y);
        [r, g, b, 255]
    });
    Image { size, pixels: pixels.collect() }
}

pub(crate) fn write(path: &Path, size: Size, rate: u32, frames: u32) {
    let mut clip = Clip::create(path, size, rate).unwrap();
    (0..frames).for_each(|number| clip.push(frame(size, number)).unwrap());
    clip.finish().unwrap();
}

/// Names in a folder, sorted.
pub(crate) fn left_in(folder: &Path) -> Vec<String> {
    let entries = std::fs::read_dir(folder).unwrap();
    let mut names: Vec<String> =
        entries.map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
    names.sort();
    names
}

/// Mean colour in the middle of a patch of the test card.
pub(crate) fn patch_mean(image: &Image, patch: usize) -> [f64; 3] {
    let width = image.size.width as usize;
    let (left, edge) = (patch * width / 8, width / 8);
    let mut sums = [0.0; 3];
    let (rows, columns) = (20..60, left + edge / 4..left + 3 * edge / 4);
    let count = (rows.len() * columns.len()) as f64;
    for y in rows {
        for x in columns.clone() {
            for channel in 0..3 {
                sums[channel] += f64::from(image.pixels[4 * (y * width + x) + channel]);
            }
        }
    }
    sums.map(|sum| sum / count)
}

/// What an MP4 file says of itself.
pub(crate) struct Mp4File {
    pub(crate) boxes: Vec<String>,
    pub(crate) frames: u32,
    pub(crate) seconds: f64,
    pub(crate) size: Size,
    stream: Vec<u8>,
}

impl Mp4File {
    pub(crate) fn read(path: &Path) -> Self {
        let bytes = std::fs::read(path).unwrap();
        let top = boxes(&bytes);
        let inside = |steps: &[&str]| {
            steps.iter().fold(bytes.as_slice(), |bytes, step| {
                boxes(bytes)
                    .into_iter()
                    .find(|(name, _)| name == step)
                    .unwrap_or_else(|| panic!("no {step}"))
                    .1
            })
        };
        let mdhd = inside(&["moov", "trak", "mdia", "mdhd"]);
        let stsz = inside(&["moov", "trak", "mdia", "minf", "stbl", "stsz"]);
        let tkhd = inside(&["moov", "trak", "tkhd"]);
        let tail = &tkhd[tkhd.len() - 8..];
        Self {
            boxes: top.iter().map(|(name, _)| name.clone()).collect(),
            frames: number(&stsz[8..]),
            seconds: f64::from(number(&mdhd[16..])) / f64::from(number(&mdhd[12..])),
            size: Size { width: number(tail) >> 16, height: number(&tail[4..]) >> 16 },
            stream: inside(&["mdat"]).to_vec(),
        }
    }

    /// Pictures, with colours worked out by BT.709 in floating point.
    pub(crate) fn decoded(&self) -> Vec<Image> {
        let mut decoder = Decoder::new().unwrap();
        let (mut pictures, mut rest) = (Vec::new(), self.stream.as_slice());
        while !rest.is_empty() {
            let (unit, after) = rest[4..].split_at(number(rest) as usize);
            let annexed = [&[0, 0, 0, 1], unit].concat();
            if let Some(picture) = decoder.decode(&annexed).unwrap() {
                pictures.push(to_image(&picture));
            }
            rest = after;
        }
        pictures.extend(decoder.flush_remaining().unwrap().iter().map(to_image));
        pictures
    }
}

fn to_image(yuv: &impl YUVSource) -> Image {
    let (width, height) = yuv.dimensions();
    let (luma, chroma, _) = yuv.strides();
    let mut pixels = Vec::new();
    for (y, x) in (0..height).flat_map(|y| (0..width).map(move |x| (y, x))) {
        let at = y / 2 * chroma + x / 2;
        let l = (f64::from(yuv.y()[y * luma + x]) - 16.0) / 219.0;
        let [b, r] = [yuv.u()[at], yuv.v()[at]].map(|value| (f64::from(value) - 128.0) / 224.0);
        let (red, blue) = (l + 1.5748 * r, l + 1.8556 * b);
        let green = (l - 0.2126 * red - 0.0722 * blue) / 0.7152;
        pixels.extend([red, green, blue, 1.0].map(|value| (255.0 * value).round().clamp(0.0, 255.0) as u8));
    }
    Image { size: Size { width: width as u32, height: height as u32 }, pixels }
}

fn boxes(mut bytes: &[u8]) -> Vec<(String, &[u8])> {
    let mut found = Vec::new();
    while bytes.len() >= 8 {
        let (whole, rest) = bytes.split_at(number(bytes) as usize);
        found.push((String::from_utf8_lossy(&whole[4..8]).into_owned(), &whole[8..]));
        bytes = rest;
    }
    found
}

fn number(bytes: &[u8]) -> u32 {
    u32::from_be_bytes(bytes[..4].try_into().unwrap())
}

/// Pictures of a GIF as they are seen, and its whole time (hundredths of a second).
pub(crate) fn composed_gif(path: &Path) -> (Vec<Vec<[u8; 3]>>, u32) {
    let mut options = gif::DecodeOptions::new();
    options.set_color_output(gif::ColorOutput::RGBA);
    let mut decoder = options.read_info(std::fs::File::open(path).unwrap()).unwrap();
    let width = usize::from(decoder.width());
    let mut shown = vec![[0; 3]; width * usize::from(decoder.height())];
    let (mut pictures, mut hundredths) = (Vec::new(), 0);
    while let Some(frame) = decoder.read_next_frame().unwrap() {
        hundredths += u32::from(frame.delay);
        for (index, &[r, g, b, a]) in frame.buffer.as_chunks::<4>().0.iter().enumerate() {
            let (row, column) = (index / usize::from(frame.width), index % usize::from(frame.width));
            if a > 0 {
                let at = (usize::from(frame.top) + row) * width + usize::from(frame.left) + column;
                shown[at] = [r, g, b];
            }
        }
        pictures.push(shown.clone());
    }
    (pictures, hundredths)
}
